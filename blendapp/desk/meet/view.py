"""The list of rails: a table whose working rows are taller, with the price of the wall hanging from it."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QModelIndex, QRectF, Qt, Signal
from PySide6.QtGui import QKeyEvent, QPainter, QPaintEvent, QResizeEvent
from PySide6.QtWidgets import QWidget

from blendapp.desk.meet.model import MeetModel
from blendapp.desk.rail.geometry import End
from blendapp.desk.rail.paint import TAG_PX, draw_tag, wall_x
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import ROW_PX, tokens

TAGGED_PX = ROW_PX + int(TAG_PX) - 1
_FIGURE_PX, _TIGHT_FIGURE_PX, _TIGHT_PX = 66, 54, 430
_NAME_LEAST, _RAIL_LEAST, _MOST = 90, 84, 420


class LimitTable(DeskTable):
    """A DeskTable of a MeetModel. Its columns share the width: the name and the rail take what figures leave.

    left: the pointer has gone away.
    """

    left = Signal()

    def __init__(self, model: MeetModel, parent: QWidget | None = None) -> None:
        super().__init__(model, parent, ruled=False)
        self.limits = model
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.horizontalHeader().setSectionsClickable(True)
        model.modelReset.connect(self.fit)
        model.dataChanged.connect(lambda *_args: self._fit_heights())

    def _take_widths(self) -> None:
        """The widths follow the width of the zone, not the headings."""

    def fit(self) -> None:
        """Lay out columns and rows for what is shown now."""
        if self.grid.columnCount() == 5:
            width = self.viewport().width()
            figure = _FIGURE_PX if width >= _TIGHT_PX else _TIGHT_FIGURE_PX
            rest = width - 3 * figure
            rail = max(_RAIL_LEAST, min(int(rest * 0.44), _MOST))
            name = max(_NAME_LEAST, min(rest - rail, _MOST))
            for at, width in enumerate((name, figure, figure, rail, figure)):
                self.setColumnWidth(at, width)
        self._fit_heights()

    def _fit_heights(self) -> None:
        for row, owner in enumerate(self.grid.owners):
            height = TAGGED_PX if self._tag(owner) else ROW_PX
            if self.rowHeight(row) != height:
                self.setRowHeight(row, height)

    def _tag(self, owner: int) -> str:
        row = self.grid.owners.index(owner)
        column = self.grid.column_of("rail")
        if column is None:
            return ""
        rail = self.grid.look(row, column).rail
        return "" if rail is None else rail.tag

    def leaveEvent(self, event: QEvent) -> None:
        super().leaveEvent(event)
        self.left.emit()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self.fit()

    def paintEvent(self, event: QPaintEvent) -> None:
        super().paintEvent(event)
        column = self.grid.column_of("rail")
        if column is None:
            return
        painter = QPainter(self.viewport())
        look = tokens()
        for row in range(self.grid.rowCount()):
            cell = self.grid.look(row, column)
            if cell.rail is None or cell.axis is None or not cell.rail.tag:
                continue
            rect = self.visualRect(self.grid.index(row, column))
            if rect.bottom() < 0 or rect.top() > self.viewport().height():
                continue
            bounds = QRectF(8, rect.top() + ROW_PX - 4, self.viewport().width() - 12, TAG_PX)
            line = QRectF(self.cells.line_rect(rect))
            plain = not cell.rail.working
            draw_tag(painter, bounds, wall_x(line, cell.rail, cell.axis), cell.rail.tag, look,
                     stale=cell.rail.stale, plain=plain)

    def type_end(self, index: QModelIndex, end: End, event: QKeyEvent) -> None:
        column = self.grid.column_of(end.value)
        if column is None:
            return
        cell = self.grid.index(index.row(), column)
        self.setCurrentIndex(cell)
        super(DeskTable, self).keyPressEvent(event)
