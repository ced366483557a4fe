"""A box of choices with the arrow that the style sheet cannot draw."""

from __future__ import annotations

from PySide6.QtCore import QRectF
from PySide6.QtGui import QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QComboBox

from blendapp.desk.shell.glyphs import draw_glyph
from blendapp.desk.theme import tokens


class Choice(QComboBox):
    """A combo box in the program's look."""

    def paintEvent(self, event: QPaintEvent) -> None:
        super().paintEvent(event)
        painter = QPainter(self)
        box = QRectF(self.width() - 24, 0, 18, self.height())
        painter.setOpacity(1.0 if self.isEnabled() else 0.4)
        draw_glyph(painter, "down", box, QPen(tokens().colour("quiet"), 1.5))
