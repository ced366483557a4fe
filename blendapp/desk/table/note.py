"""The sentence beside a cell: what is wrong with what was typed there, and what to do. Never modal."""

from __future__ import annotations

from PySide6.QtCore import QPoint, QRect, Qt
from PySide6.QtGui import QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import QLabel, QWidget

from blendapp.desk.theme import tokens

WIDTH_PX = 300


class Note(QLabel):
    """A small slip that hangs under a cell, inside the window, and lets clicks through."""

    def __init__(self, window: QWidget) -> None:
        super().__init__(window)
        self.inside = window
        self.setWordWrap(True)
        self.setContentsMargins(12, 8, 12, 8)
        self.setAttribute(Qt.WidgetAttribute.WA_TransparentForMouseEvents)
        self.hide()

    def beside(self, view: QWidget, cell: QRect, sentence: str) -> None:
        """Show a sentence under a cell of a viewport, or above it where there is no room."""
        window = self.inside
        self.setText(sentence)
        self.setAccessibleName(sentence)
        self.setFixedWidth(min(WIDTH_PX, max(window.width() - 16, 80)))
        self.setFixedHeight(self.heightForWidth(self.width()))
        at = view.mapTo(window, QPoint(cell.left(), cell.bottom() + 4))
        left = min(max(at.x(), 8), max(window.width() - self.width() - 8, 8))
        top = at.y()
        if top + self.height() > window.height() - 8:
            top = view.mapTo(window, cell.topLeft()).y() - self.height() - 4
        self.move(left, top)
        self.show()
        self.raise_()

    def paintEvent(self, event: QPaintEvent) -> None:
        look = tokens()
        painter = QPainter(self)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(look.colour("text"), 1))
        painter.setBrush(look.colour("raised"))
        painter.drawRoundedRect(self.rect().adjusted(0, 0, -1, -1).toRectF().adjusted(0.5, 0.5, 0.5, 0.5), 4, 4)
        painter.end()
        super().paintEvent(event)
