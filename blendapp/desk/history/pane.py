"""The page of one ingredient's prices: what was in force when, every quote, the rule, and entries of the history."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, QModelIndex, QTimer, Signal
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QVBoxLayout,
)

from blendapp.desk.history.form import PriceForm
from blendapp.desk.history.marks import legend
from blendapp.desk.history.model import QuoteRows
from blendapp.desk.shell.page import Page, side_column
from blendapp.desk.shell.zone import Elided
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.price_history import PriceHistory, Standing
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import rule
from blendapp.domain.wording import _, plural
from blendapp.services import price_history
from blendapp.services.mill import Edit, Mill

if TYPE_CHECKING:
    from blendapp.desk.plots.prices import PricePlot

SIDE_PX = 320


class HistoryPane(Page):
    """closed: back to the bench. said: a sentence with what can be listed below it. list_wanted: the list that a price
    came with is to be opened."""

    said = Signal(str, list)
    list_wanted = Signal(int)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.ingredient_id: int | None = None
        self.history: PriceHistory | None = None
        self.plot: PricePlot | None = None
        self.title = QLabel()
        self.title.setFont(text_font(strong=True))
        self.why = QLabel()
        self.rule = QLabel(rule())
        self.rule.setObjectName("quiet")
        for label in (self.title, self.why, self.rule):
            label.setWordWrap(True)
        self.form = PriceForm()
        self.leave = QPushButton(_("Back to the bench"))
        self.leave.setObjectName("plain")
        self.leave.clicked.connect(self.closed)
        self.remark = Elided()
        self.remark.setObjectName("quiet")
        self.legend = Elided()
        self.legend.setObjectName("quiet")
        self.replaced = QPushButton(_("with replaced entries"))
        self.replaced.setCheckable(True)
        self.replaced.setObjectName("set")
        self.replaced.toggled.connect(self._turn_replaced)
        self.rows = QuoteRows(work, self)
        self.table = DeskTable(self.rows, self)
        self.table.setAccessibleName(_("Quotes"))
        self.end = QPushButton(_("It ends today"))
        self.withdraw = QPushButton(_("Withdraw it from today"))
        self.end.setToolTip(_("The price holds for the last time today; then whatever else is valid counts."))
        self.withdraw.setToolTip(_("From today the price is unknown, and the ingredient is left out of every mix."))
        for button in (self.end, self.withdraw):
            button.setObjectName("plain")
        self.end.clicked.connect(self._end)
        self.withdraw.clicked.connect(self._withdraw)
        self._lay()
        self.setFocusProxy(self.table)
        self.form.add.connect(self._add)
        self.form.bought_from.connect(self._buy)
        self.table.selectionModel().currentRowChanged.connect(lambda _now, _before: self._row_chosen())
        self.table.cleared.connect(self._clear)
        self.table.asked.connect(self._asked)
        self.table.doubleClicked.connect(self._asked)
        work.edited.connect(self._edited)
        work.opened.connect(self._forget)
        work.day_came.connect(self._day_came)
        work.reversed.connect(self.rows.forgive_all)

    def _lay(self) -> None:
        scroll = side_column((self.title, self.why, self.form, self.leave, self.rule), SIDE_PX)
        head = QHBoxLayout()
        head.setSpacing(2)
        head.addWidget(self.remark, 1)
        self.spans = QButtonGroup(self)
        for words, days in ((_("3 months"), 92), (_("a year"), 366), (_("all"), None)):
            button = QPushButton(words)
            button.setCheckable(True)
            button.setObjectName("set")
            button.clicked.connect(lambda _checked, days=days: self._span(days))
            self.spans.addButton(button)
            head.addWidget(button)
        self.spans.buttons()[-1].setChecked(True)
        self._span_days: int | None = None
        foot = QHBoxLayout()
        foot.setSpacing(GAP_PX)
        foot.addStretch(1)
        foot.addWidget(self.replaced)
        foot.addWidget(self.end)
        foot.addWidget(self.withdraw)
        self.place = QVBoxLayout()
        right = QVBoxLayout()
        right.setSpacing(GAP_PX)
        right.addLayout(head)
        right.addLayout(self.place, 5)
        right.addWidget(self.legend)
        right.addLayout(foot)
        right.addWidget(self.table, 6)
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX, 0)
        row.setSpacing(MARGIN_PX)
        row.addWidget(scroll)
        row.addLayout(right, 1)

    # -- what is shown

    def begin(self, ingredient_id: int) -> None:
        """Show the prices of an ingredient."""
        if self.plot is None:
            # The library of plots is slow to import: only whoever opens this page waits for it.
            from blendapp.desk.plots.prices import PricePlot

            self.plot = PricePlot(self)
            self.plot.chosen.connect(self._point_chosen)
            self.place.addWidget(self.plot)
            self.setTabOrder(self.plot, self.table)
        if ingredient_id != self.ingredient_id:
            self.rows.forgive_all()
            self.form.clear(self.work.on)
            self.form.supplier.choose(None)
        self.ingredient_id = ingredient_id
        self.fill()
        found = self.history.in_force if self.history is not None else None
        if found is not None:
            self.table.go_to(found.quote.id, "quoted")

    def fill(self) -> None:
        """Show what the mill holds now."""
        if self.ingredient_id is None or self.plot is None:
            return
        library = self.work.library
        if self.ingredient_id not in library.records["ingredient"]:
            self._forget()
            if self.isVisible():
                self.closed.emit()
            return
        self.history = history = price_history.history(library, self.ingredient_id, self.work.on)
        self.title.setText(_("{ingredient}: prices").format(ingredient=history.ingredient))
        self.why.setText(history.why)
        self.rows.show(history)
        self.plot.show_history(history, self._span_days)
        self.form.fill(library, library.ingredient(self.ingredient_id).supplier_id, self.work.on)
        count = len(self.rows.owners)
        where = history.site or _("the whole mill")
        text = plural("{count} entry, as of {day}, for {site}", "{count} entries, as of {day}, for {site}", count)
        self.remark.say(text.format(count=count, day=history.on.isoformat(), site=where))
        self.legend.say(legend(history))
        self.replaced.setVisible(any(line.standing is Standing.REPLACED for line in history.lines))
        self._row_chosen()

    def _edited(self, edit: Edit) -> None:
        if not self.isVisible() or not edit.touches("quote", "supplier", "site", "ingredient", "mill", "price_list"):
            # It is filled when it is opened again.
            return
        self.rows.forgive_owners({change.id for change in edit.changes if change.kind == "quote"})
        if self.table.state() is DeskTable.State.EditingState:
            # The editor that gave the text is still open; the rows change once it has gone.
            QTimer.singleShot(0, self, lambda: self._follow(edit))
        else:
            self._follow(edit)

    def _follow(self, edit: Edit) -> None:
        """Show the rows anew with the keyboard where it was, or on what took the place of that row or came new."""
        owner, key = self.chosen_cell()
        self.fill()
        came = [change.after for change in edit.changes
                if change.kind == "quote" and change.before is None and change.after is not None]
        chosen = next((one.id for one in reversed(came) if one.replaces_id in (None, owner)), owner)
        if chosen is not None:
            index = self.rows.cell(chosen, key or "quoted")
            if index.isValid():
                self.table.setCurrentIndex(index)

    def chosen_cell(self) -> tuple[int | None, str]:
        """The quote and the column under the keyboard."""
        index = self.table.currentIndex()
        return (self.rows.owner(index), self.rows.key(index)) if index.isValid() else (None, "")

    def _day_came(self) -> None:
        if self.isVisible():
            self.fill()

    def _span(self, days: int | None) -> None:
        self._span_days = days
        if self.plot is not None and self.history is not None:
            self.plot.show_history(self.history, days)

    def _turn_replaced(self, shown: bool) -> None:
        self.rows.with_replaced = shown
        self.fill()

    def _row_chosen(self) -> None:
        owner, _key = self.chosen_cell()
        line = None if owner is None else self.rows.line(owner)
        if self.plot is not None:
            self.plot.point_at(owner)
        writable = self.work.is_open and self.work.mill.writable
        counts = line is not None and line.standing not in (Standing.REPLACED, Standing.ENDED) and writable
        begun = line is not None and line.standing is not Standing.TO_COME
        self.end.setEnabled(counts and begun)
        self.withdraw.setEnabled(counts and line is not None and line.quote.price is not None)

    def _point_chosen(self, quote_id: int) -> None:
        """A mark was chosen: its row is shown, and the keyboard stays where it is."""
        index = self.rows.cell(quote_id, "quoted")
        if index.isValid():
            self.table.setCurrentIndex(index)
            self.table.scrollTo(index)

    def _asked(self, index: QModelIndex) -> None:
        """Enter on where a price comes from opens the list."""
        line = self.rows.line(self.rows.owner(index)) if index.isValid() else None
        if line is not None and line.price_list_id is not None and self.rows.key(index) == "source":
            self.list_wanted.emit(line.price_list_id)

    # -- entries

    def _add(self) -> None:
        ingredient_id, on = self.ingredient_id, self.work.on
        if ingredient_id is None:
            return
        try:
            given = self.form.given(on)
            self.work.do(lambda mill: price_history.add_quote(
                mill, ingredient_id, given.price, on, per=given.per, supplier=given.supplier, site=given.site,
                terms=given.terms, kind=given.kind, valid_from=given.valid_from, valid_to=given.valid_to,
                entered=given.entered,
            ))
        except (Refused, ValueError) as fault:
            self.form.say(sentence_of(fault))
            return
        self.form.clear(on)
        self.form.supplier.choose(None)
        self.form.supplier.name.clear()
        self.table.setFocus()

    def _buy(self) -> None:
        ingredient_id = self.ingredient_id
        if ingredient_id is None:
            return
        try:
            name = self.form.buy.given()
            self.work.do(lambda mill: price_history.buy_from(mill, ingredient_id, name))
        except (Refused, ValueError) as fault:
            self.form.say(sentence_of(fault))
            return
        self.form.buy.name.clear()
        self.form.say("")

    def _end(self) -> None:
        self._try(lambda mill, owner: price_history.end_quote(mill, owner, self.work.on, self.work.on))

    def _withdraw(self) -> None:
        self._try(lambda mill, owner: price_history.withdraw_quote(mill, owner, self.work.on))

    def _try(self, job: Callable[[Mill, int], Edit]) -> None:
        owner, _key = self.chosen_cell()
        if owner is None:
            return
        try:
            self.work.do(lambda mill: job(mill, owner))
        except (Refused, ValueError) as fault:
            self.said.emit(sentence_of(fault), [])
        self.table.setFocus()

    def _clear(self, cells: list[tuple[int, str]]) -> None:
        """Delete empties a cell that may be blank; a price is withdrawn by its button."""
        if len(cells) != 1:
            self.said.emit(_("One cell at a time is emptied here."), [])
            return
        (owner, key), = cells
        index: QModelIndex = self.rows.cell(owner, key)
        if self.rows.look(index.row(), index.column()).editable:
            self.rows.setData(index, "")

    def _forget(self) -> None:
        self.ingredient_id = self.history = None
        self.rows.show(None)

    def changeEvent(self, event: QEvent) -> None:
        super().changeEvent(event)
        if event.type() == QEvent.Type.PaletteChange and self.plot is not None:
            self.plot.draw()
