"""The frame of what lies over the window: raised ground, a quiet line around it, round corners."""

from __future__ import annotations

from PySide6.QtGui import QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QFrame, QWidget

from blendapp.desk.theme import tokens

RADIUS_PX = 6


class Raised(QFrame):
    """A panel inside a window, hidden until it is opened. inside: the window that it lies over."""

    def __init__(self, window: QWidget) -> None:
        super().__init__(window)
        self.inside = window
        self.hide()

    def paintEvent(self, event: QPaintEvent) -> None:
        look = tokens()
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(look.colour("quiet"), 1))
        painter.setBrush(look.colour("raised"))
        painter.drawRoundedRect(self.rect().toRectF().adjusted(0.5, 0.5, -0.5, -0.5), RADIUS_PX, RADIUS_PX)
