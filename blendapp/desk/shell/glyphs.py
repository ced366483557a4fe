"""Small drawings on buttons, drawn from paths so that they are sharp at every scale."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, QSize, Qt
from PySide6.QtGui import QPainter, QPainterPath, QPaintEvent, QPen, QTransform
from PySide6.QtWidgets import QStyle, QStyleOptionToolButton, QStylePainter, QToolButton, QWidget

from blendapp.desk.theme import tokens

SIDE_PX = 16


def _lines(*points: tuple[float, float]) -> QPainterPath:
    path = QPainterPath(QPointF(*points[0]))
    for x, y in points[1:]:
        path.lineTo(x, y)
    return path


def _joined(*paths: QPainterPath) -> QPainterPath:
    whole = QPainterPath()
    for path in paths:
        whole.addPath(path)
    return whole


def _turn(mirrored: bool) -> QPainterPath:
    path = QPainterPath(QPointF(3, 6.5))
    path.lineTo(9.5, 6.5)
    path.arcTo(QRectF(6, 6.5, 7, 7), 90, -180)
    path.lineTo(6, 13.5)
    path.addPath(_lines((6, 3.5), (3, 6.5), (6, 9.5)))
    if mirrored:
        return QTransform(-1, 0, 0, 1, 16, 0).map(path)
    return path


def _path(name: str) -> QPainterPath:
    if name == "menu":
        return _joined(*(_lines((2.5, y), (13.5, y)) for y in (4.5, 8.0, 11.5)))
    if name == "undo":
        return _turn(False)
    if name == "redo":
        return _turn(True)
    if name == "widen":
        return _joined(_lines((9.5, 3), (13, 3), (13, 6.5)), _lines((6.5, 13), (3, 13), (3, 9.5)),
                       _lines((13, 3), (9.3, 6.7)), _lines((3, 13), (6.7, 9.3)))
    if name == "narrow":
        return _joined(_lines((13, 6.7), (9.3, 6.7), (9.3, 3)), _lines((3, 9.3), (6.7, 9.3), (6.7, 13)),
                       _lines((9.3, 6.7), (13.3, 2.7)), _lines((6.7, 9.3), (2.7, 13.3)))
    if name == "add":
        return _joined(_lines((8, 3), (8, 13)), _lines((3, 8), (13, 8)))
    if name == "up":
        return _lines((4, 9.8), (8, 5.8), (12, 9.8))
    if name == "down":
        return _lines((4, 6.2), (8, 10.2), (12, 6.2))
    if name == "close":
        return _joined(_lines((4, 4), (12, 12)), _lines((12, 4), (4, 12)))
    raise ValueError(name)


def draw_glyph(painter: QPainter, name: str, rect: QRectF, pen: QPen) -> None:
    """Draw a glyph centred in a rectangle."""
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.translate(rect.center().x() - SIDE_PX / 2, rect.center().y() - SIDE_PX / 2)
    painter.setPen(pen)
    painter.setBrush(Qt.BrushStyle.NoBrush)
    painter.drawPath(_path(name))
    painter.restore()


class GlyphButton(QToolButton):
    """A flat button with a glyph; its words are its tool tip and its accessible name."""

    def __init__(self, glyph: str, words: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.glyph = glyph
        self.setFixedSize(QSize(30, 30))
        self.say(words)

    def say(self, words: str, glyph: str | None = None) -> None:
        """Change what the button says, and its drawing."""
        self.setToolTip(words)
        self.setAccessibleName(words)
        self.glyph = glyph or self.glyph
        self.update()

    def paintEvent(self, _event: QPaintEvent) -> None:
        option = QStyleOptionToolButton()
        self.initStyleOption(option)
        option.text = ""
        painter = QStylePainter(self)
        painter.drawComplexControl(QStyle.ComplexControl.CC_ToolButton, option)
        name = "text" if self.isEnabled() and (self.underMouse() or self.hasFocus()) else "quiet"
        pen = QPen(tokens().colour(name), 1.5)
        pen.setCapStyle(Qt.PenCapStyle.RoundCap)
        pen.setJoinStyle(Qt.PenJoinStyle.RoundJoin)
        if not self.isEnabled():
            painter.setOpacity(0.45)
        draw_glyph(painter, self.glyph, QRectF(self.rect()), pen)
