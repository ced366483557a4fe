"""A table whose first column stays when the others are scrolled sideways."""

from __future__ import annotations

from PySide6.QtCore import QModelIndex, QRect, Qt
from PySide6.QtGui import QPainter, QPaintEvent, QResizeEvent
from PySide6.QtWidgets import QAbstractItemView, QFrame, QHeaderView, QTableView, QWidget

from blendapp.desk.table.cell import CellDelegate
from blendapp.desk.table.grid import AnyIndex, Grid
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import ROW_PX, tokens


class _Names(QTableView):
    """The column that stays: a second view of the same model and selection, laid over the first."""

    def __init__(self, table: DeskTable) -> None:
        super().__init__(table)
        self.table = table

    def paintEvent(self, event: QPaintEvent) -> None:
        self.table.look_round()
        super().paintEvent(event)
        if self.table.horizontalScrollBar().value() > 0:
            painter = QPainter(self.viewport())
            rect = self.viewport().rect()
            painter.fillRect(QRect(rect.right(), 0, 1, rect.height()), tokens().colour("hairline"))


class FrozenTable(DeskTable):
    """A DeskTable with its first column frozen."""

    def __init__(self, model: Grid, parent: QWidget | None = None) -> None:
        super().__init__(model, parent)
        self.names = _Names(self)
        self.names.setModel(model)
        self.names.setSelectionModel(self.selectionModel())
        self.names.setItemDelegate(CellDelegate(self))
        self._dress_names()
        self.horizontalHeader().sectionResized.connect(self._resized)
        self.verticalScrollBar().valueChanged.connect(self.names.verticalScrollBar().setValue)
        self.names.verticalScrollBar().valueChanged.connect(self.verticalScrollBar().setValue)
        self.horizontalScrollBar().valueChanged.connect(lambda _value: self.names.viewport().update())
        model.modelReset.connect(self._only_first)
        self._only_first()

    def _dress_names(self) -> None:
        names = self.names
        names.setObjectName("names")
        names.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        names.setFocusProxy(self)
        names.setFrameShape(QFrame.Shape.NoFrame)
        names.setShowGrid(False)
        names.setEditTriggers(self.editTriggers())
        names.setSelectionMode(self.selectionMode())
        names.verticalHeader().hide()
        names.verticalHeader().setMinimumSectionSize(8)
        names.verticalHeader().setDefaultSectionSize(ROW_PX)
        names.verticalHeader().setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        names.horizontalHeader().setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        names.horizontalHeader().setHighlightSections(False)
        names.horizontalHeader().setFixedHeight(28)
        names.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        names.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        names.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)

    def setAccessibleName(self, name: str) -> None:
        super().setAccessibleName(name)
        self.names.setAccessibleName(name)

    def _only_first(self) -> None:
        for column in range(1, self.grid.columnCount()):
            self.names.setColumnHidden(column, True)
        if self.grid.columnCount():
            self.names.setColumnHidden(0, False)
            self.names.setColumnWidth(0, self.columnWidth(0))
        self._lay()

    def _resized(self, section: int, _old: int, new: int) -> None:
        if section == 0:
            self.names.setColumnWidth(0, new)
            self._lay()

    def _lay(self) -> None:
        # The horizontal scroll bar takes its height from the viewport, not from the names beside it.
        height = self.viewport().height() + self.horizontalHeader().height()
        self.names.setGeometry(self.frameWidth(), self.frameWidth(), self.columnWidth(0), height)
        self.names.raise_()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._lay()

    def updateGeometries(self) -> None:
        super().updateGeometries()
        if hasattr(self, "names"):
            self._lay()

    def scrollTo(
        self, index: AnyIndex, hint: QAbstractItemView.ScrollHint = QAbstractItemView.ScrollHint.EnsureVisible
    ) -> None:
        super().scrollTo(index, hint)
        if index.column() > 0:
            # Qt takes a cell under the frozen column for visible.
            hidden = self.columnWidth(0) - self.visualRect(index).left()
            if hidden > 0:
                self.horizontalScrollBar().setValue(self.horizontalScrollBar().value() - hidden)

    def edit(self, *arguments: object) -> object:  # type: ignore[override]
        index = arguments[0]
        if isinstance(index, QModelIndex) and index.column() == 0:
            if len(arguments) == 1:
                return self.names.edit(index)
            return self.names.edit(*arguments)  # type: ignore[call-overload]
        return super().edit(*arguments)  # type: ignore[call-overload]

    def cell_rect(self, index: QModelIndex) -> QRect:
        if index.column() == 0:
            return self.names.visualRect(index)
        return super().cell_rect(index)
