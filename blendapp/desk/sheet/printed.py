"""The batch sheets that were printed: found by number or formula, looked at, and printed again as a copy."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QLineEdit, QPushButton, QVBoxLayout, QWidget

from blendapp.desk.finder.search import Found
from blendapp.desk.sheet.pages import PageView
from blendapp.desk.sheet.printing import Printing
from blendapp.desk.shell.page import Page
from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, fitting_decimals, number_look
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.domain.mills import PrintedBatch
from blendapp.domain.names import fold
from blendapp.domain.wording import _
from blendapp.services import sheets

if TYPE_CHECKING:
    from blendapp.desk.work import Work

LIST_PX = 486


class PrintedRows(Grid):
    """Owners are printed sheets, the latest first."""

    def __init__(self, work: Work, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work

    def show(self, wanted: str = "") -> None:
        """Show those whose number begins with a text, or whose formula or version holds it."""
        self.set_headings([
            Heading("number", _("sheet"), 60, True), Heading("formula", _("Formula"), 158),
            Heading("version", _("version"), 86), Heading("order", _("Order, kg"), 80, True),
            Heading("printed", _("printed"), 96),
        ])
        every: list[PrintedBatch] = self.work.library.all("batch")
        plain = fold(wanted)
        self.set_rows([
            one.id for one in sorted(every, key=lambda one: -one.number)
            if not plain or str(one.number).startswith(plain) or plain in fold(self.formula(one))
            or plain in fold(one.version)
        ])
        self.refresh()

    def formula(self, record: PrintedBatch) -> str:
        """The name of a sheet's formula as the mill has it."""
        formula = self.work.library.records["formula"].get(record.formula_id)
        return "" if formula is None else str(formula.name)

    def record(self, owner: int) -> PrintedBatch | None:
        """The printed sheet of a row."""
        return self.work.library.records["batch"].get(owner)

    def make_look(self, owner: int, key: str) -> Look:
        one = self.record(owner)
        if one is None:
            return EMPTY
        if key == "number":
            return Look(text=str(one.number), number=True, strong=True)
        if key == "formula":
            text = self.formula(one)
            return Look(text=text, hint=text)
        if key == "version":
            return Look(text=one.version)
        if key == "order":
            return number_look(one.order_kg, fitting_decimals(one.order_kg, 0, 3), widest=0)
        return Look(text=one.printed.astimezone().date().isoformat(), quiet=True, hint=self._history(one))

    @staticmethod
    def _history(one: PrintedBatch) -> str:
        text = _("Printed by {name}, {moment}, copied {count} times.")
        moment = one.printed.astimezone().strftime("%Y-%m-%d %H:%M")
        return text.format(name=one.printed_by or _("nobody named"), moment=moment, count=one.copies)

    def write(self, owner: int, key: str, text: str) -> None:
        raise ValueError(_("A printed sheet never changes; make another batch."))


class PrintedPane(Page):
    """closed: back to the bench. sheet_wanted: to the batch of the chosen formula. said: a sentence and a list."""

    sheet_wanted = Signal()
    said = Signal(str, list)

    def __init__(self, work: Work, printing: Printing) -> None:
        super().__init__()
        self.work = work
        self.printing = printing
        self.rows = PrintedRows(work, self)
        self.table = DeskTable(self.rows, self)
        self.table.setAccessibleName(_("Printed batch sheets"))
        self.filter = QLineEdit()
        self.filter.setPlaceholderText(_("Number or formula…"))
        self.filter.setAccessibleName(_("Show only sheets of this number or formula"))
        self.filter.setClearButtonEnabled(True)
        self.told = QLabel()
        self.told.setWordWrap(True)
        self.told.setObjectName("quiet")
        self.pages = PageView()
        self.print_button = QPushButton(_("Print a copy…"))
        self.print_button.setObjectName("first")
        self.save_button = QPushButton(_("Keep a copy as PDF…"))
        self.save_button.setObjectName("plain")
        self.leave = QPushButton(_("Back to the bench"))
        self.leave.setObjectName("plain")
        self._lay()
        self.setFocusProxy(self.filter)
        self.filter.textChanged.connect(self._narrow)
        self.filter.returnPressed.connect(self._into_list)
        self.table.selectionModel().currentRowChanged.connect(lambda _now, _before: self._look())
        self.print_button.clicked.connect(self.to_printer)
        self.save_button.clicked.connect(self.to_file)
        self.leave.clicked.connect(self.closed)
        self.pages.failed.connect(lambda sentence: self.said.emit(sentence, []))
        work.opened.connect(self._forget)

    def _lay(self) -> None:
        title = QLabel(_("Printed batch sheets"))
        title.setFont(text_font(strong=True))
        side = QVBoxLayout()
        side.setSpacing(GAP_PX)
        for widget in (title, self.filter):
            side.addWidget(widget)
        side.addWidget(self.table, 1)
        side.addWidget(self.told)
        buttons = QHBoxLayout()
        buttons.setSpacing(GAP_PX)
        for button in (self.print_button, self.save_button, self.leave):
            buttons.addWidget(button)
        side.addLayout(buttons)
        side.addSpacing(GAP_PX)
        left = QWidget()
        left.setLayout(side)
        side.setContentsMargins(0, 0, 0, 0)
        left.setFixedWidth(LIST_PX)
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX, GAP_PX * 2, 0, 0)
        row.setSpacing(MARGIN_PX)
        row.addWidget(left)
        row.addWidget(self.pages, 1)

    # -- what is shown

    def begin(self, record_id: int | None = None) -> None:
        """Show every printed sheet, the latest or a named one chosen."""
        self.filter.clear()
        self._forget()
        self.rows.show()
        first = next(iter(self.rows.owners), None)
        self.table.go_to(record_id if record_id is not None else first or 0, "number")
        self.filter.setFocus() if record_id is None else self.table.setFocus()
        self._look()

    def found(self, show: Callable[[int], object]) -> list[Found]:
        """Every printed sheet, as things to find."""
        text = _("Batch sheet {number}, {formula}")
        every: list[PrintedBatch] = self.work.library.all("batch")
        return [
            Found(text.format(number=one.number, formula=self.rows.formula(one)), _("printed sheet"),
                  partial(show, one.id))
            for one in reversed(every)
        ]

    def _forget(self) -> None:
        self.table.selectionModel().clear()
        self.pages.clear()

    def _narrow(self, text: str) -> None:
        self.rows.show(text)
        if self.rows.owners and not self.table.currentIndex().isValid():
            self.table.setCurrentIndex(self.rows.index(0, 0))
        self._look()

    def _into_list(self) -> None:
        if self.rows.owners:
            self.table.setFocus(Qt.FocusReason.TabFocusReason)

    def chosen(self) -> PrintedBatch | None:
        """The sheet that is looked at."""
        index = self.table.currentIndex()
        return self.rows.record(self.rows.owner(index)) if index.isValid() else None

    def _look(self) -> None:
        """Show the copy that would be printed now."""
        record = self.chosen()
        for button in (self.print_button, self.save_button):
            button.setEnabled(record is not None and self.work.mill.writable)
        if record is None:
            self.pages.clear()
            empty = _("No sheet fits this.") if self.filter.text().strip() else _("No batch sheet was printed yet.")
            self.told.setText(empty)
            return
        copy = record.copies + 1
        text = _("Sheet {number}, printed {day}; on the right is copy {count} of it, digit for digit.")
        self.told.setText(text.format(
            number=record.number, day=record.printed.astimezone().date().isoformat(), count=copy))
        self.pages.show_pdf(lambda: sheets.batch_pdf(sheets.printed_batch(record, copy)))

    # -- copies

    def to_file(self) -> None:
        """Keep a copy of the chosen sheet as a PDF."""
        record = self.chosen()
        if record is not None:
            self.printing.copy_to_file(record.id)
            self._again()

    def to_printer(self) -> None:
        """Print a copy of the chosen sheet."""
        record = self.chosen()
        if record is not None:
            self.printing.copy_to_printer(record.id, sheets.printed_batch(record).paper)
            self._again()

    def _again(self) -> None:
        self.rows.refresh()
        self._look()
