"""The parts of the page of a list and where they stand."""

from __future__ import annotations

from PySide6.QtCore import QEvent, QRect, Qt, Signal
from PySide6.QtGui import QKeyEvent, QPainter, QPaintEvent
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QSplitter,
    QSplitterHandle,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from blendapp.desk.finder.ask import Ask
from blendapp.desk.finder.panel import Finder
from blendapp.desk.prices.counts import FateCounts
from blendapp.desk.prices.model import PriceRows
from blendapp.desk.prices.questions import QuestionPanel
from blendapp.desk.prices.samples import SampleRows
from blendapp.desk.prices.source_view import SourceTableView
from blendapp.desk.prices.understood import UnderstoodRows
from blendapp.desk.prices.view import UnderstoodTable
from blendapp.desk.prices.whose import Whose
from blendapp.desk.shell.frame import Rule
from blendapp.desk.shell.zone import Elided
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font, tokens
from blendapp.domain.library import Library
from blendapp.domain.list_rows import Fate, ListReading
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.wording import _

LEAST_SOURCE_PX = 320


class _Handle(QSplitterHandle):
    def paintEvent(self, event: QPaintEvent) -> None:
        middle = self.width() // 2
        QPainter(self).fillRect(QRect(middle, GAP_PX, 1, self.height()), tokens().colour("hairline"))


class _Halves(QSplitter):
    def __init__(self) -> None:
        super().__init__(Qt.Orientation.Horizontal)
        self.setHandleWidth(2 * GAP_PX + 1)
        self.setChildrenCollapsible(False)

    def createHandle(self) -> QSplitterHandle:
        return _Handle(self.orientation(), self)


class TakeButton(QPushButton):
    """Enter presses it, as the space bar does."""

    def event(self, event: QEvent) -> bool:
        if isinstance(event, QKeyEvent) and event.type() == QEvent.Type.KeyPress and (
            event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter)
        ):
            # A key that is held since an earlier page takes nothing here.
            if not event.isAutoRepeat():
                self.click()
            return True
        return super().event(event)


class SheetChoice(QWidget):
    """The sheets of a file, where there are several. chosen: the name of one."""

    chosen = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self.row = QHBoxLayout(self)
        self.row.setContentsMargins(0, 0, 0, 0)
        self.row.setSpacing(2)
        self.row.addStretch(1)
        self.group = QButtonGroup(self)
        self.buttons: dict[str, QPushButton] = {}

    def show_names(self, names: list[str]) -> None:
        """Offer sheets."""
        if names == list(self.buttons):
            return
        for button in self.buttons.values():
            self.group.removeButton(button)
            button.deleteLater()
        self.buttons = {}
        for name in names:
            button = self.buttons[name] = QPushButton(name)
            button.setObjectName("set")
            button.setCheckable(True)
            button.clicked.connect(lambda _checked=False, name=name: self.chosen.emit(name))
            self.group.addButton(button)
            self.row.insertWidget(self.row.count() - 1, button)
        self.setVisible(len(names) > 1)

    def choose(self, name: str) -> None:
        """Mark the sheet in view."""
        if name in self.buttons:
            self.buttons[name].setChecked(True)


class Parts:
    """Makes the parts of a page and lays them out on it."""

    def __init__(self, page: QWidget, finder: Finder, ask: Ask) -> None:
        self.title, self.remark = QLabel(), Elided()
        self.title.setFont(text_font(strong=True))
        self.remark.setObjectName("quiet")
        self.look, self.leave = QPushButton(_("What they would do")), QPushButton(_("Leave it"))
        self.take = TakeButton()
        self.take.setText(_("Nothing to take yet"))
        self.other = QPushButton(_("Read it as analyses"))
        self.other.setObjectName("order")
        self.look.setObjectName("plain")
        self.leave.setObjectName("plain")
        self.take.setObjectName("first")
        self.leave.setToolTip(_("Back to the bench; what you have answered is kept while the mill file is open"))
        self.take.setToolTip(_("Ctrl+Enter from anywhere on this page"))
        self.whose = Whose(finder, ask)
        self.notes = QLabel()
        self.notes.setWordWrap(True)
        self.sheets = SheetChoice()
        self.source = SourceTableView()
        self.questions = QuestionPanel()
        self.counts = FateCounts()
        self.price_rows, self.sample_rows = PriceRows(page), SampleRows(page)
        self.price_table, self.sample_table = UnderstoodTable(self.price_rows), UnderstoodTable(self.sample_rows)
        self.tables = QStackedWidget()
        for table in (self.price_table, self.sample_table):
            table.setAccessibleName(_("What was understood"))
            self.tables.addWidget(table)
        self._lay_out(page)

    def _lay_out(self, page: QWidget) -> None:
        head = QHBoxLayout()
        head.setSpacing(GAP_PX * 2)
        head.addWidget(self.title)
        head.addWidget(self.remark, 1)
        for one in (self.look, self.leave, self.take):
            head.addWidget(one)
        whose = QHBoxLayout()
        whose.setContentsMargins(0, 0, 0, 0)
        whose.setSpacing(GAP_PX)
        whose.addWidget(self.whose)
        whose.addStretch(1)
        whose.addWidget(self.other)
        left, right = QWidget(), QWidget()
        self.halves = _Halves()
        sides = ((left, (self.sheets, self.source)), (right, (self.questions, Rule(), self.counts, self.tables)))
        for side, parts in sides:
            column = QVBoxLayout(side)
            column.setContentsMargins(0, 0, 0, 0)
            column.setSpacing(GAP_PX // 2)
            for part in parts:
                column.addWidget(part, 1 if part in (self.source, self.tables) else 0)
            self.halves.addWidget(side)
        left.setMinimumWidth(LEAST_SOURCE_PX)
        right.setMinimumWidth(480)
        self.halves.setSizes([460, 560])
        self.halves.setStretchFactor(0, 0)
        self.halves.setStretchFactor(1, 1)
        self.halves.splitterMoved.connect(lambda _place, _index: self._moved())
        self._is_moved = False
        column = QVBoxLayout(page)
        column.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX, 0)
        column.setSpacing(GAP_PX // 2)
        column.addLayout(head)
        column.addLayout(whose)
        column.addWidget(self.notes)
        column.addWidget(self.halves, 1)

    def _moved(self) -> None:
        self._is_moved = True

    def share_width(self) -> None:
        """Give the source as much of the width as it needs, at most half; where the person has drawn it, it stays."""
        whole = sum(self.halves.sizes())
        if whole and not self._is_moved:
            left = max(min(self.source.wanted_width(), whole * 46 // 100), LEAST_SOURCE_PX)
            self.halves.setSizes([left, whole - left])

    # -- what is shown

    @property
    def table(self) -> UnderstoodTable:
        """The table that is in view."""
        found = self.tables.currentWidget()
        assert isinstance(found, UnderstoodTable)
        return found

    @property
    def model(self) -> UnderstoodRows:
        """The rows of the table that is in view."""
        return self.table.understood

    def show_reading(self, reading: ListReading, library: Library, only: Fate | None) -> None:
        """Show a reading, all but its source and its questions."""
        prices = isinstance(reading, PriceListReading)
        self.tables.setCurrentWidget(self.price_table if prices else self.sample_table)
        (self.sample_rows if prices else self.price_rows).show(None)
        self.title.setText(reading.file_name)
        self.other.setText(_("Read it as analyses") if prices else _("Read it as prices"))
        self.whose.show_reading(reading, library)
        self.whose.show()
        self.notes.setFont(text_font())
        self.notes.setText("\n".join(reading.notes))
        self.notes.setVisible(bool(reading.notes))
        self.sheets.show_names([sheet.name for sheet in reading.sheets])
        self.counts.show_reading(reading)
        self.show_rows(reading, only)

    def show_rows(self, reading: ListReading, only: Fate | None) -> None:
        """Show the rows of one fate, or all but those left alone."""
        self.counts.buttons[only].setChecked(True)
        self.model.show(reading, only)

    def show_refusal(self, file_name: str, sentence: str) -> None:
        """Show the name of a file that cannot be read, and why."""
        self.show_nothing()
        self.title.setText(file_name)
        self.remark.say(_("nothing was read and nothing is changed"))
        self.notes.setFont(text_font(strong=True))
        self.notes.setText(sentence)
        self.notes.show()
        self.whose.hide()
        self.sheets.show_names([])
        self.counts.show_reading(ListReading(file_name, "", ()))

    def show_nothing(self) -> None:
        """Forget the list."""
        for model in (self.price_rows, self.sample_rows):
            model.show(None)
        self.source.rows.show(None, "", {})
