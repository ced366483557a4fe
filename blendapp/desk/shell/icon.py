"""The mark of the program: a rail whose minimum is at work, drawn so that it is sharp at every size."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QIcon, QPainter, QPixmap

from blendapp.desk.theme import LIGHT

SIZES_PX = (16, 24, 32, 48, 64, 128, 256)


def window_icon() -> QIcon:
    """The icon of the window in all usual sizes."""
    icon = QIcon()
    for side in SIZES_PX:
        icon.addPixmap(_drawn(side))
    return icon


def _drawn(side: int) -> QPixmap:
    pixmap = QPixmap(side, side)
    pixmap.fill(Qt.GlobalColor.transparent)
    painter = QPainter(pixmap)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    painter.scale(side / 64, side / 64)
    painter.setPen(Qt.PenStyle.NoPen)
    painter.setBrush(LIGHT.colour("raised"))
    painter.drawRoundedRect(QRectF(2, 2, 60, 60), 12, 12)
    painter.fillRect(QRectF(8, 31, 48, 2), LIGHT.colour("quiet"))
    painter.fillRect(QRectF(22, 25, 28, 14), LIGHT.colour("band"))
    painter.fillRect(QRectF(19, 14, 6, 36), LIGHT.colour("accent"))
    painter.setBrush(LIGHT.colour("text"))
    painter.drawEllipse(QPointF(38, 32), 9, 9)
    painter.end()
    return pixmap
