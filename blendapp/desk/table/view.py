"""The table of the desk: cells reached by arrows and tab, typed into at once; rails that are dragged and nudged."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import (
    QItemSelection,
    QItemSelectionModel,
    QModelIndex,
    QPoint,
    QRect,
    QRectF,
    Qt,
    QTimer,
    Signal,
)
from PySide6.QtGui import (
    QFocusEvent,
    QGuiApplication,
    QHideEvent,
    QKeyEvent,
    QKeySequence,
    QMouseEvent,
    QPaintEvent,
    QResizeEvent,
)
from PySide6.QtWidgets import QAbstractItemView, QFrame, QHeaderView, QWidget

from blendapp.desk.rail.geometry import End, end_at
from blendapp.desk.rail.grip import RailGrip
from blendapp.desk.rail.paint import track_of
from blendapp.desk.table.block_view import BlockTable
from blendapp.desk.table.cell import CellDelegate, Here
from blendapp.desk.table.grid import AnyIndex, Grid
from blendapp.desk.table.note import Note
from blendapp.desk.theme import ROW_PX, tokens

_ARROWS: dict[int, int] = {Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1}


class DeskTable(BlockTable):
    """A table view of a Grid.

    asked: Enter on a cell that is not typed into. resized: the viewport has another size.
    grip: moves the rails.
    """

    asked = Signal(QModelIndex)
    resized = Signal()

    def __init__(self, model: Grid, parent: QWidget | None = None, *, ruled: bool = True) -> None:
        super().__init__(model, parent)
        self.grip: RailGrip = RailGrip(self)
        self._chosen_end: End | None = None
        self._dragging = False
        self._block = False
        self.here = Here(-1, -1, False, tokens())
        self._note: Note | None = None
        self.cells = CellDelegate(self, ruled=ruled)
        self.setItemDelegate(self.cells)
        self.setModel(model)
        self._dress()
        model.refused.connect(lambda index, _sentence: QTimer.singleShot(0, self, self._show_note))
        self._widths: dict[str, int] = {}
        self._scrolled = (0, 0)
        model.modelAboutToBeReset.connect(self._keep_place)
        model.modelReset.connect(self._take_widths)
        # After every view of the model has been reset, since one of them may scroll the others.
        self._back = QTimer(self, singleShot=True, interval=0)
        self._back.timeout.connect(self._go_back_to_place)
        model.modelReset.connect(self._back.start)
        self.horizontalHeader().sectionResized.connect(self._width_changed)
        self._take_widths()

    def _dress(self) -> None:
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setShowGrid(False)
        self.setMouseTracking(True)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setSelectionMode(QAbstractItemView.SelectionMode.ContiguousSelection)
        self.setEditTriggers(
            QAbstractItemView.EditTrigger.DoubleClicked
            | QAbstractItemView.EditTrigger.EditKeyPressed
            | QAbstractItemView.EditTrigger.AnyKeyPressed
        )
        self.verticalHeader().hide()
        self.verticalHeader().setMinimumSectionSize(8)
        self.verticalHeader().setDefaultSectionSize(ROW_PX)
        self.verticalHeader().setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        head = self.horizontalHeader()
        head.setHighlightSections(False)
        head.setSectionResizeMode(QHeaderView.ResizeMode.Interactive)
        head.setMinimumSectionSize(24)
        head.setFixedHeight(28)
        self.setTabKeyNavigation(True)

    def _take_widths(self) -> None:
        for at, heading in enumerate(self.grid.headings):
            self.setColumnWidth(at, self._widths.get(heading.key, heading.width))

    def _width_changed(self, section: int, _old: int, new: int) -> None:
        """Remember a width that the person has drawn, so that no change of rows takes it back."""
        if QGuiApplication.mouseButtons() & Qt.MouseButton.LeftButton and section < len(self.grid.headings):
            self._widths[self.grid.headings[section].key] = new

    def has_own_width(self, key: str) -> bool:
        """Whether the person has drawn a column to a width."""
        return key in self._widths

    def _keep_place(self) -> None:
        if not self._back.isActive():
            self._scrolled = (self.horizontalScrollBar().value(), self.verticalScrollBar().value())

    def go_to_top(self) -> None:
        """Show the first rows, also after a reset that is just under way."""
        self._scrolled = (self._scrolled[0], 0)
        self.scrollToTop()

    def _go_back_to_place(self) -> None:
        self.updateGeometries()
        self.horizontalScrollBar().setValue(self._scrolled[0])
        self.verticalScrollBar().setValue(self._scrolled[1])

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self.resized.emit()

    # -- where the keyboard is

    def has_keyboard(self) -> bool:
        """Whether keys come here, or to the editor of a cell."""
        focus = QGuiApplication.focusObject()
        return focus is self or (isinstance(focus, QWidget) and self.isAncestorOf(focus))

    def look_round(self) -> None:
        """Take in what the next painting shares: a block is always tinted, one cell only under the keyboard."""
        current, keyboard = self.currentIndex(), self.has_keyboard()
        row, column = (current.row(), current.column()) if keyboard else (-1, -1)
        self.here = Here(row, column, self._block or keyboard, tokens())

    def paintEvent(self, event: QPaintEvent) -> None:
        self.look_round()
        super().paintEvent(event)

    def selectionChanged(self, selected: QItemSelection, deselected: QItemSelection) -> None:
        super().selectionChanged(selected, deselected)
        self._block = len(self.selectionModel().selectedIndexes()) > 1

    def is_current(self, index: AnyIndex) -> bool:
        """Whether a cell is the one that keys reach."""
        current = self.currentIndex()
        return current.row() == index.row() and current.column() == index.column() and self.has_keyboard()

    def held_end(self, index: AnyIndex) -> End | None:
        """The end of a cell's rail that is held by hand, or that arrow keys would move."""
        if self.grip.moving:
            held = (self.grid.owner(index), self.grid.key(index))
            return self.grip.end if self.grip.owner == held else None
        return self._keyed_end(index) if self.is_current(index) else None

    def _keyed_end(self, index: AnyIndex) -> End | None:
        rail = self.grid.look(index.row(), index.column()).rail
        ends = rail.ends() if rail is not None else ()
        if not ends or rail is None:
            return None
        if self._chosen_end in ends:
            return self._chosen_end
        return next((end for end in ends if end in rail.working), ends[0])

    def step_row(self, step: int) -> None:
        """Make the cell above or below current, if there is one."""
        current = self.currentIndex()
        below = self.grid.index(current.row() + step, current.column())
        self.setFocus()
        if below.isValid():
            self.setCurrentIndex(below)

    def go_to(self, owner: int, key: str) -> bool:
        """Make a record's cell current and seen. Returns whether it is shown."""
        index = self.grid.cell(owner, key)
        if not index.isValid():
            return False
        self.selectionModel().setCurrentIndex(index, QItemSelectionModel.SelectionFlag.ClearAndSelect)
        self.scrollTo(index)
        self.setFocus()
        return True

    # -- rails by hand

    def rail_rect(self, index: AnyIndex) -> QRectF:
        """Where the axis of a cell's rail lies in the viewport."""
        return track_of(QRectF(self.cells.line_rect(self.visualRect(index))))

    def _rail_at(self, point: QPoint) -> QModelIndex | None:
        index = self.indexAt(point)
        if not index.isValid() or self.grid.look(index.row(), index.column()).rail is None:
            return None
        return index if self.cells.line_rect(self.visualRect(index)).contains(point) else None

    def mousePressEvent(self, event: QMouseEvent) -> None:
        point = event.position().toPoint()
        index = self._rail_at(point) if event.button() == Qt.MouseButton.LeftButton else None
        if index is not None:
            look = self.grid.look(index.row(), index.column())
            track = self.rail_rect(index)
            assert look.rail is not None
            assert look.axis is not None
            owner = (self.grid.owner(index), self.grid.key(index))
            # Moving the keyboard here gives what another rail still holds, so it comes first.
            self.setFocus()
            self.setCurrentIndex(index)
            taken = self.grip.press(owner, look.rail, look.axis, point.x() - track.left(), track.width())
            if taken is not None:
                self._chosen_end = taken
                self._dragging = True
                self.update(index)
                return
        super().mousePressEvent(event)

    def mouseMoveEvent(self, event: QMouseEvent) -> None:
        point = event.position().toPoint()
        if self._dragging and self.grip.owner is not None:
            owner, key = self.grip.owner
            track = self.rail_rect(self.grid.cell(owner, key))
            self.grip.drag(point.x() - track.left(), track.width())
            return
        index = self._rail_at(point)
        over = False
        if index is not None:
            look = self.grid.look(index.row(), index.column())
            track = self.rail_rect(index)
            assert look.rail is not None
            assert look.axis is not None
            over = end_at(look.rail, look.axis, point.x() - track.left(), track.width()) is not None
        self.viewport().setCursor(Qt.CursorShape.SizeHorCursor if over else Qt.CursorShape.ArrowCursor)
        super().mouseMoveEvent(event)

    def mouseReleaseEvent(self, event: QMouseEvent) -> None:
        if self._dragging:
            self._dragging = False
            self.grip.let_go()
            return
        super().mouseReleaseEvent(event)

    # -- keys

    def keyPressEvent(self, event: QKeyEvent) -> None:
        index = self.currentIndex()
        if event.key() == Qt.Key.Key_Escape and self._escape(index):
            return
        if index.isValid() and self._rail_key(index, event):
            return
        if event.key() == Qt.Key.Key_Space and index.isValid() and self._tell(index):
            return
        if event.matches(QKeySequence.StandardKey.Copy):
            self.copy()
        elif event.matches(QKeySequence.StandardKey.Paste):
            self.paste()
        elif event.key() in (Qt.Key.Key_Delete, Qt.Key.Key_Backspace) and index.isValid():
            self.cleared.emit(self.selected_cells())
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and index.isValid():
            if self.grid.look(index.row(), index.column()).editable:
                self.edit(index)
            else:
                self.asked.emit(index)
        else:
            super().keyPressEvent(event)

    def _escape(self, index: QModelIndex) -> bool:
        if self.grip.take_back():
            self._dragging = False
            return True
        return index.isValid() and self.grid.forgive(self.grid.owner(index), self.grid.key(index))

    def _rail_key(self, index: QModelIndex, event: QKeyEvent) -> bool:
        """Arrow keys move the chosen end of a rail, Home and End choose one, a figure types it."""
        look = self.grid.look(index.row(), index.column())
        end = self._keyed_end(index)
        if look.rail is None or look.axis is None or end is None:
            return False
        owner = (self.grid.owner(index), self.grid.key(index))
        if event.key() in _ARROWS:
            big = bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
            self.grip.nudge(owner, end, look.rail, look.axis, _ARROWS[event.key()], big=big)
            return True
        if event.key() in (Qt.Key.Key_Home, Qt.Key.Key_End):
            self.grip.let_go()
            self._chosen_end = End.MINIMUM if event.key() == Qt.Key.Key_Home else End.MAXIMUM
            self.update(index)
            return True
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and self.grip.moving:
            self.grip.let_go()
            return True
        if event.text() and (event.text().isdigit() or event.text() in "-,."):
            self.type_end(index, end, event)
            return True
        return False

    def type_end(self, index: QModelIndex, end: End, event: QKeyEvent) -> None:
        """Open the cell in which an end is typed; a table whose rails have such cells says which."""

    def currentChanged(self, current: AnyIndex, previous: AnyIndex) -> None:
        if self.grip.moving and not self._dragging:
            self.grip.let_go()
        super().currentChanged(current, previous)
        self._chosen_end = None
        self._show_note()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        if not self._dragging:
            self.grip.let_go()
        super().focusOutEvent(event)
        self._hide_note()
        self.viewport().update()

    def focusInEvent(self, event: QFocusEvent) -> None:
        super().focusInEvent(event)
        if not self.currentIndex().isValid() and self.grid.owners and event.reason() in (
            Qt.FocusReason.TabFocusReason, Qt.FocusReason.BacktabFocusReason, Qt.FocusReason.ShortcutFocusReason
        ):
            self.setCurrentIndex(self.grid.index(0, 0))
        self._show_note()
        self.viewport().update()

    # -- the sentence beside a cell

    def _show_note(self) -> None:
        index = self.currentIndex()
        look = self.grid.look(index.row(), index.column()) if index.isValid() else None
        if look is None or not look.fault:
            self._hide_note()
            return
        if self._note is None:
            self._note = Note(self.window())
        self._note.beside(self.viewport(), self.cell_rect(index), look.fault)

    def _tell(self, index: QModelIndex) -> bool:
        """Show beside a cell what pointing at it would say; returns whether there is anything to say."""
        look = self.grid.look(index.row(), index.column())
        sentence = look.fault or look.hint
        if not sentence:
            return False
        if self._note is None:
            self._note = Note(self.window())
        self._note.beside(self.viewport(), self.cell_rect(index), sentence)
        return True

    def cell_rect(self, index: QModelIndex) -> QRect:
        """Where a cell is in the viewport."""
        return self.cells.line_rect(self.visualRect(index))

    def _hide_note(self) -> None:
        if self._note is not None:
            self._note.hide()

    def dataChanged(self, top: AnyIndex, bottom: AnyIndex, roles: Sequence[int] = ()) -> None:
        super().dataChanged(top, bottom, roles)
        if self._note is not None and self._note.isVisible():
            self._show_note()

    def hideEvent(self, event: QHideEvent) -> None:
        super().hideEvent(event)
        self._hide_note()

