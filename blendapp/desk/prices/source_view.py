"""The list as it stands in its file, with the row of the question outlined."""

from __future__ import annotations

from PySide6.QtCore import QModelIndex, QRect, Qt, QTimer, Signal
from PySide6.QtGui import QKeyEvent, QMouseEvent, QPainter, QPaintEvent, QPen
from PySide6.QtWidgets import (
    QAbstractItemView,
    QFrame,
    QHeaderView,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QTableView,
    QWidget,
)

from blendapp.desk.prices.source_heads import PAD_PX, FateGutter, RoleHead
from blendapp.desk.prices.source_model import AnyIndex, SourceRows
from blendapp.desk.theme import text_font, tokens
from blendapp.domain.list_rows import ColumnRole
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.wording import _

LINE_PX = 26
_LEAST_PX, _MOST_PX, _LOOKED_AT = 64, 230, 120
_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
_RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
# Which column a question is about, where it is not about the name.
_ABOUT = {Asked.UNIT: ColumnRole.UNIT, Asked.RATE: ColumnRole.PRICE, Asked.CENTS: ColumnRole.PRICE,
          Asked.CHANGE: ColumnRole.PRICE, Asked.SIGN: ColumnRole.PRICE, Asked.EXPIRED: ColumnRole.VALID_TO,
          Asked.TERMS: ColumnRole.TERMS, Asked.PRICE: ColumnRole.PRICE,
          Asked.REMARK: ColumnRole.NOTE}


class _Cell(QStyledItemDelegate):
    """A cell as text: figures to the right, headings strong, what is not read quiet."""

    def __init__(self, view: SourceTableView) -> None:
        super().__init__(view)
        self.view = view
        self._plain, self._strong = text_font(), text_font(strong=True)
        self._struck = text_font()
        self._struck.setStrikeOut(True)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        rows, look = self.view.rows, tokens()
        at, column = index.row(), index.column()
        row, rect = at + 1, option.rect
        here = self.view.currentIndex()
        if here.row() == at and here.column() == column and self.view.hasFocus():
            painter.fillRect(rect, look.colour("chosen"))
            painter.setPen(QPen(look.colour("text"), 1))
            painter.drawRect(rect.adjusted(0, 0, -1, -2))
        painter.fillRect(QRect(rect.left(), rect.bottom(), rect.width(), 1), look.colour("hairline"))
        text = rows.text(at, column)
        if not text:
            return
        heading = rows.is_heading(row)
        read = heading or (rows.is_read(row, column) and not rows.is_hidden(row)
                           and column not in rows.sheet.hidden_columns)
        font = self._strong if heading else self._struck if (row, column) in rows.sheet.struck else self._plain
        painter.setFont(font)
        painter.setPen(look.colour("text" if read else "quiet"))
        box = rect.adjusted(PAD_PX, 0, -PAD_PX, 0)
        metrics = painter.fontMetrics()
        number = text[-1].isdigit() and text.lstrip("(+-−")[:1].isdigit() and not heading
        if not number:
            box.setRight(box.right() + self._room_beside(at, column, metrics.horizontalAdvance(text) - box.width()))
        shown = metrics.elidedText(text, Qt.TextElideMode.ElideRight, box.width())
        painter.drawText(box, _RIGHT if number else _LEFT, shown)

    def _room_beside(self, at: int, column: int, wanted: int) -> int:
        """Room in the blank cells beside a text, as far as it is wanted."""
        room, cells = 0, self.view.rows.cells(at)
        while room < wanted and column + 1 < len(cells) and not cells[column + 1]:
            column += 1
            room += self.view.columnWidth(column)
        return room


class SourceTableView(QTableView):
    """role_asked: the person wants to say what a column holds, or where headings stand: row of the file, column.
    looked_at: the person has gone to a row of the file."""

    role_asked = Signal(int, int)
    looked_at = Signal(int)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.rows = SourceRows(self)
        self.marked_row = 0
        self.chosen_column = -1
        self._first = 0
        self.setModel(self.rows)
        self.setItemDelegate(_Cell(self))
        self.head, self.gutter = RoleHead(self), FateGutter(self)
        self.setHorizontalHeader(self.head)
        self.setVerticalHeader(self.gutter)
        self.gutter.setDefaultSectionSize(LINE_PX)
        self.head.setSectionResizeMode(QHeaderView.ResizeMode.Interactive)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setShowGrid(False)
        self.setCornerButtonEnabled(False)
        self.setWordWrap(False)
        self.setSelectionMode(QAbstractItemView.SelectionMode.NoSelection)
        self.setHorizontalScrollMode(QAbstractItemView.ScrollMode.ScrollPerPixel)
        self.setVerticalScrollMode(QAbstractItemView.ScrollMode.ScrollPerItem)
        self.setTabKeyNavigation(False)
        self.setAccessibleName(_("The list as it stands in its file"))
        self.head.sectionClicked.connect(lambda column: self.role_asked.emit(self.row_in_view, column))
        self.gutter.sectionClicked.connect(lambda at: self.role_asked.emit(at + 1, -1))
        self.gutter.setSectionsClickable(True)
        self.verticalScrollBar().valueChanged.connect(self._scrolled)
        self.rows.modelReset.connect(self._lay)

    def wanted_width(self) -> int:
        """The width at which every column is in view."""
        return self.gutter.room() + self.head.length() + 2 * PAD_PX + self.verticalScrollBar().sizeHint().width()

    # -- what is in view

    @property
    def row_in_view(self) -> int:
        """The row of the file whose table the margin over the columns speaks of."""
        if self.marked_row:
            return self.marked_row
        return self.currentIndex().row() + 1 if self.currentIndex().isValid() else max(self.rowAt(1), 0) + 1

    def _scrolled(self, _value: int) -> None:
        if len(self.rows.sheet.tables) > 1:
            self.head.viewport().update()

    def _lay(self) -> None:
        """Columns as wide as what stands in them, as far as the first rows tell."""
        self.marked_row, self.chosen_column = 0, -1
        plain, strong = self.fontMetrics(), text_font(strong=True)
        tables = self.rows.sheet.tables
        # Titles run over the cells beside them and make no column wide.
        told = [row for row in sorted(self.rows.fates) if not tables or self.rows.is_in_table(row)][:_LOOKED_AT]
        filled = [self.rows.cells(row - 1) for row in told]
        head_of = {column.index: column for table in tables[:1] for column in table.columns}
        for column in range(self.rows.columnCount()):
            texts = {row[column][:40] for row in filled if column < len(row)}
            width = max((plain.horizontalAdvance(text) for text in texts), default=0)
            found = head_of.get(column)
            if found is not None:
                self.setFont(strong)
                width = max(width, self.fontMetrics().horizontalAdvance(found.role.label))
                self.setFont(text_font())
            self.setColumnWidth(column, min(max(width + 2 * PAD_PX + 4, _LEAST_PX), _MOST_PX))
        self.gutter.setFixedWidth(self.gutter.room())

    def mark(self, row: int, about: Asked | None = None, heading: str = "") -> None:
        """Bring a row of the file into view and outline it; 0 outlines none. about, heading: of a question in it."""
        self.marked_row = row if 0 < row <= self.rows.rowCount() else 0
        if self.marked_row:
            column = self._column_of(row, about, heading)
            self.chosen_column = column if about is not None else -1
            index = self.rows.index(row - 1, max(column, 0))
            self.selectionModel().blockSignals(True)
            self.setCurrentIndex(index)
            self.selectionModel().blockSignals(False)
            top = self.rowAt(1)
            shown = max(self.viewport().height() // LINE_PX - 1, 1)
            if not top <= row - 1 < top + shown:
                self.scrollTo(index, QAbstractItemView.ScrollHint.PositionAtCenter)
            else:
                self.scrollTo(index)
        else:
            self.chosen_column = -1
        for part in (self, self.head, self.gutter):
            part.viewport().update()

    def mark_only(self, row: int) -> None:
        """Outline a row that is in view already; the keyboard stays where it is."""
        self.marked_row, self.chosen_column = row, -1
        for part in (self, self.head, self.gutter):
            part.viewport().update()

    def _column_of(self, row: int, about: Asked | None, heading: str) -> int:
        table = self.rows.table_at(row)
        columns = () if table is None else table.columns
        if about is not None and heading:
            named = [one.index for one in columns if fold(one.heading) == fold(heading)]
            if named:
                return named[0]
        role = ColumnRole.NAME if about is None else _ABOUT.get(about, ColumnRole.NAME)
        found = [one.index for one in columns if one.role is role] or [
            one.index for one in columns if one.role in (ColumnRole.NAME, ColumnRole.SAMPLE)]
        return found[0] if found else 0

    # -- painting and keys

    def paintEvent(self, event: QPaintEvent) -> None:
        super().paintEvent(event)
        if self.marked_row:
            at = self.marked_row - 1
            painter = QPainter(self.viewport())
            painter.setPen(QPen(tokens().colour("text"), 1))
            width = min(self.head.length() - self.head.offset(), self.viewport().width())
            painter.drawRect(-1, self.rowViewportPosition(at) - 1, width, self.rowHeight(at))

    def currentChanged(self, current: AnyIndex, previous: AnyIndex) -> None:
        super().currentChanged(current, previous)
        if current.isValid() and self.hasFocus() and not self.selectionModel().signalsBlocked():
            row = current.row() + 1
            # After this event: marking another row moves the current cell itself.
            QTimer.singleShot(0, self, lambda: self.looked_at.emit(row))

    def mousePressEvent(self, event: QMouseEvent) -> None:
        super().mousePressEvent(event)
        index = self.indexAt(event.position().toPoint())
        if index.isValid():
            self.looked_at.emit(index.row() + 1)

    def mouseDoubleClickEvent(self, event: QMouseEvent) -> None:
        index: QModelIndex = self.indexAt(event.position().toPoint())
        if index.isValid():
            self.role_asked.emit(index.row() + 1, index.column())

    def keyPressEvent(self, event: QKeyEvent) -> None:
        here = self.currentIndex()
        plain = not event.modifiers() & Qt.KeyboardModifier.ControlModifier
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and plain and here.isValid():
            self.role_asked.emit(here.row() + 1, here.column())
        elif event.key() in (Qt.Key.Key_Escape, Qt.Key.Key_Backspace, Qt.Key.Key_Return, Qt.Key.Key_Enter):
            event.ignore()
        else:
            super().keyPressEvent(event)
