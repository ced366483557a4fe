"""The table of a price list: reasons are wrapped, since they are sentences to be read."""

from __future__ import annotations

from PySide6.QtCore import QRect, QRectF, Qt
from PySide6.QtGui import QFontMetrics, QPainter
from PySide6.QtWidgets import QWidget

from blendapp.desk.prices.model import PriceRows
from blendapp.desk.table.cell import PAD_PX, AnyIndex, CellDelegate
from blendapp.desk.table.look import Look
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import ROW_PX, Tokens, text_font

_WRAP = int(Qt.TextFlag.TextWordWrap)
_PLACE = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop)
LEAST_PX = 240


class _Wrapped(CellDelegate):
    def paint_inside(self, painter: QPainter, rect: QRectF, look: Look, scheme: Tokens, index: AnyIndex) -> None:
        model = index.model()
        assert isinstance(model, PriceRows)
        if model.key(index) != "reason":
            super().paint_inside(painter, rect, look, scheme, index)
            return
        painter.setPen(scheme.colour("quiet" if look.quiet else "text"))
        whole = QRectF(rect.left() + PAD_PX, rect.top() + 8, rect.width() - 2 * PAD_PX, 10000)
        painter.drawText(whole, _WRAP | _PLACE, look.text)


class PriceTable(DeskTable):
    """A DeskTable of PriceRows; the reason takes the width that is left."""

    def __init__(self, model: PriceRows, parent: QWidget | None = None) -> None:
        super().__init__(model, parent)
        self.rows = model
        self.cells = _Wrapped(self)
        self.setItemDelegate(self.cells)
        self.resized.connect(self.lay)
        model.modelReset.connect(self.lay)

    def lay(self) -> None:
        """Lay out the reason and the heights of rows."""
        column = self.rows.column_of("reason")
        if column is None:
            return
        others = sum(self.columnWidth(at) for at in range(self.rows.columnCount()) if at != column)
        width = max(self.viewport().width() - others, LEAST_PX)
        self.setColumnWidth(column, width)
        metrics = QFontMetrics(text_font())
        box = QRect(0, 0, width - 2 * PAD_PX, 10000)
        for row in range(self.rows.rowCount()):
            text = self.rows.look(row, column).text
            height = max(ROW_PX, metrics.boundingRect(box, _WRAP, text).height() + 15) if text else ROW_PX
            if self.rowHeight(row) != height:
                self.setRowHeight(row, height)
