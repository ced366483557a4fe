"""The screen on which a batch is sized and made, its lines looked at and fixed, and its pages printed or kept."""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import QHideEvent, QKeyEvent
from PySide6.QtWidgets import (
    QHBoxLayout,
    QLabel,
    QPushButton,
)

from blendapp.desk.aside import Aside
from blendapp.desk.sheet.accepting import Accepting
from blendapp.desk.sheet.asked import AskedBatch
from blendapp.desk.sheet.form import BatchForm
from blendapp.desk.sheet.lines import LineModel
from blendapp.desk.sheet.printing import Printing
from blendapp.desk.sheet.view import LINES, BatchView
from blendapp.desk.sheet.words import batch_words
from blendapp.desk.shell.page import Page, side_column
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.batches import Batch, BatchPage, ToMake
from blendapp.domain.notation import notation
from blendapp.domain.problems import Refused
from blendapp.domain.results import Status
from blendapp.domain.wording import _
from blendapp.services import sheets
from blendapp.services.batch import clean_out_question
from blendapp.services.formulate import FailedCertificate

REST_MS = 200
SIDE_PX = 312


class SheetPane(Page):
    """closed: back to the bench. printed_wanted: to the printed sheets. scale_wanted: to where an ingredient gets its
    scale. said: a sentence and a list below it."""

    printed_wanted = Signal()
    scale_wanted = Signal(int)
    said = Signal(str, list)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.batch: Batch | None = None
        self.printing = Printing(work, self)
        self.form = BatchForm(work)
        self.lines = LineModel(self._fixed, self)
        self.view = BatchView(self.lines)
        self.words = QLabel()
        self.words.setWordWrap(True)
        self.accepting = Accepting(work)
        self.reason, self.by = self.accepting.reason, self.accepting.by
        self._last_fixed: int | None = None
        self._order_wrong = False
        self._came_from: list[tuple[int, float]] = []
        self._rest = QTimer(self, singleShot=True, interval=REST_MS)
        self._rest.timeout.connect(self.make)
        # Whole numbers of scale steps may take a second or two to find.
        self._aside = Aside(self, (Refused, ValueError, FailedCertificate))
        self._aside.done.connect(self._take)
        self._lay()
        self._connect()

    def _lay(self) -> None:
        title = QLabel(_("Batch"))
        title.setFont(text_font(strong=True))
        self.back = QPushButton()
        self.back.setObjectName("left")
        self.back.setAccessibleName(_("Back to the batch before"))
        self.back.hide()
        self.give_scale = QPushButton(_("Choose its scale…"))
        self.give_scale.setObjectName("plain")
        self.give_scale.hide()
        self.printed = QPushButton(_("Printed sheets…"))
        self.leave = QPushButton(_("Back to the bench"))
        for button in (self.printed, self.leave):
            button.setObjectName("plain")
        scroll = side_column(
            (title, self.back, self.form, self.words, self.give_scale, self.accepting), SIDE_PX,
            (self.printed, self.leave),
        )
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX - GAP_PX, 0)
        row.setSpacing(MARGIN_PX - GAP_PX)
        row.addWidget(scroll)
        row.addWidget(self.view, 1)
        self.setFocusProxy(self.form.order)

    def _connect(self) -> None:
        work, view = self.work, self.view
        self.form.order.returnPressed.connect(self._mend_order)
        self.form.changed.connect(self._wait)
        self.form.paper_changed.connect(self._wait)
        self.back.clicked.connect(self._go_back)
        self.printed.clicked.connect(self.printed_wanted)
        self.leave.clicked.connect(self.closed)
        self.give_scale.clicked.connect(self._ask_scale)
        view.table.cleared.connect(self._let_free)
        view.table.pasted.connect(self._paste)
        view.turned.connect(lambda _key: self._draw())
        view.make_wanted.connect(self._make_first)
        view.print_button.clicked.connect(self.to_printer)
        view.save_button.clicked.connect(self.to_file)
        view.pages.failed.connect(lambda sentence: self.said.emit(sentence, []))
        self.printing.said.connect(self.said)
        work.answered.connect(lambda: self._wait() if self.isVisible() else None)
        work.opened.connect(self._leave_all)
        work.chosen.connect(self._chosen)

    # -- looking

    def begin(self, order_kg: float | None = None) -> None:
        """Show a batch of the chosen formula: the usual one, unless a mass is given."""
        self._forget()
        self.form.begin(self.form.usual_kg() if order_kg is None else order_kg)
        self.accepting.clear()
        self._say_back()
        self.make()
        self.form.order.selectAll()

    def begin_anew(self) -> None:
        """As begin, for a person who comes here from elsewhere."""
        self._came_from = []
        self.begin()

    def _leave_all(self) -> None:
        self._came_from = []
        self._forget()

    def _chosen(self) -> None:
        if self.isVisible() and self.work.formula_id is not None:
            self.begin_anew()
        else:
            self._forget()

    def _forget(self) -> None:
        """Nothing of another formula stays."""
        self._rest.stop()
        self._aside.forget()
        self.batch = None
        self.lines.forget()
        self._show(None)
        self.view.pages.clear()

    def _show(self, batch: Batch | None) -> None:
        self.lines.show(batch)
        self.view.say(batch)

    def _wait(self) -> None:
        """What is shown is of before the last edit, until the new batch is in."""
        self._go_stale()
        self._rest.start()

    def _go_stale(self) -> None:
        self.batch = None
        self.view.pages.say_stale(True)
        self.lines.say_stale(True)
        if self.lines.owners:
            self._say(_("Stale: the new batch is being worked out."), ready=False)
        else:
            self._say(_("The batch is being worked out."), ready=False)

    def make(self) -> None:
        """Have the batch worked out again beside the window, and its page shown."""
        self._rest.stop()
        self._aside.forget()
        self._go_stale()
        work, result = self.work, self.work.stored_result
        if work.formula_id is None or not work.is_open:
            self._refuse(_("Without an answer there is nothing to weigh."))
            return
        if not self.form.as_approved:
            if result is None:
                self._refuse(_("Without an answer there is nothing to weigh."))
                return
            if work.stale or work.trying:
                self._say(_("The answer is stale; the sheet follows as soon as the new one is in."), ready=False)
                return
            if result.status is Status.STOPPED:
                self._refuse(_(
                    "Time was up before this answer was proven, so it is not printed as if it were the cheapest. "
                    "Make the formula easier, or change it back."))
                return
        try:
            asked: AskedBatch = self.form.asked(self.lines.fixed)
        except ValueError as fault:
            self._refuse(str(fault), order_wrong=True)
            return
        library = work.library.copy()
        self._aside.ask(lambda: asked.make(library, result))

    def _refuse(self, sentence: str, *, order_wrong: bool = False) -> None:
        """Say why there is no sheet, and show none. order_wrong: the buttons then lead to the order."""
        self._say(sentence, ready=False)
        if order_wrong:
            self._order_wrong = True
            self.words.setFont(text_font(strong=True))
            for button in (self.view.print_button, self.view.save_button):
                button.setEnabled(self.work.mill.writable)
        self.view.pages.clear()
        self._show(None)

    def _take(self, found: Batch | None, fault: Exception | None) -> None:
        if not self.work.is_open:
            return
        if found is None:
            self._not_made(sentence_of(fault) if fault is not None else "")
            return
        self._last_fixed = None
        self.lines.say_stale(False)
        self.view.pages.say_stale(False)
        self.form.say_before(found)
        if found.cause is not None:
            self._refuse(found.cause)
            self.give_scale.setVisible(self._unscaled() is not None)
            return
        self.batch = found
        self._show(found)
        words = batch_words(found)
        if found.lacks_clean_out:
            words += "\n" + clean_out_question(found)
        self._say(words, ready=True)
        self._draw()

    def _not_made(self, sentence: str) -> None:
        last, self._last_fixed = self._last_fixed, None
        if last is not None and last in self.lines.fixed and self.lines.batch is not None:
            # The line that was just fixed cannot be: it is let free, with the sentence beside it.
            typed = notation().write_exact(self.lines.fixed.pop(last))
            self.make()
            self.lines.refuse(last, "kg", typed, sentence)
            return
        self._refuse(sentence)

    def _draw(self) -> None:
        """Draw the page that is looked at; the lines need none."""
        batch, page = self.batch, self.view.page
        if batch is not None and self.view.shown != LINES:
            self.view.pages.show_pdf(lambda: sheets.batch_pdf(batch, page=page))

    # -- fixing lines

    def _fixed(self, ingredient_id: int) -> None:
        self._last_fixed = ingredient_id
        self.make()

    def _let_free(self, cells: list[tuple[int, str]]) -> None:
        for owner, _key in cells:
            self.lines.fixed.pop(owner, None)
            self.lines.forgive(owner, "kg")
        self.make()

    def _paste(self, cells: list[tuple[int, str, str]], outside: list[str]) -> None:
        lost = list(outside)
        for owner, key, text in cells:
            try:
                if key != "kg" or self.lines.line(owner) is None:
                    raise ValueError
                self.lines.fixed[owner] = notation().read(text)
            except ValueError:
                lost.append(text)
        self.make()
        if lost:
            self.said.emit(_("These cells fell where no mass is fixed:"), lost)

    def _mend_order(self) -> bool:
        """Put the keyboard into an order that cannot be read; returns whether that is what stands in the way."""
        if self._order_wrong:
            self.form.order.setFocus()
            self.form.order.selectAll()
        return self._order_wrong

    def _say(self, words: str, *, ready: bool) -> None:
        self._order_wrong = False
        self.give_scale.hide()
        self.words.setFont(text_font())
        self.words.setText(words)
        batch = self.batch
        self.accepting.ask(ready and batch is not None and (bool(batch.broken) or batch.lacks_clean_out))
        for button in (self.view.print_button, self.view.save_button):
            button.setEnabled(ready and self.work.mill.writable)

    # -- what is lacking

    def _unscaled(self) -> int | None:
        """The first ingredient of today's mix that no scale weighs, where the mill has scales."""
        result, library = self.work.stored_result, self.work.library
        if result is None or not library.scales:
            return None
        found = (one.ingredient_id for one in result.mix if library.ingredient(one.ingredient_id).scale_id is None)
        return next(found, None)

    def _ask_scale(self) -> None:
        ingredient_id = self._unscaled()
        if ingredient_id is not None:
            self.scale_wanted.emit(ingredient_id)

    # -- what must be made first

    def _make_first(self, one: ToMake) -> None:
        """Go to the batch of a made ingredient, with the mass that is needed, and remember where from."""
        batch = self.batch
        if batch is not None:
            self._go_to(one.formula_id, one.mass_kg, [*self._came_from, (batch.formula_id, batch.order_kg)])

    def _go_back(self) -> None:
        formula_id, order_kg = self._came_from[-1]
        self._go_to(formula_id, order_kg, self._came_from[:-1])

    def _go_to(self, formula_id: int, order_kg: float, came_from: list[tuple[int, float]]) -> None:
        self.work.choose(formula_id)
        self._came_from = came_from
        self.begin(order_kg)

    def _say_back(self) -> None:
        known = [one for one in self._came_from if one[0] in self.work.library.records["formula"]]
        self._came_from = known
        self.back.setVisible(bool(known))
        if known:
            text = _("Back to the batch of {formula}, {kg} kg")
            formula = self.work.library.formula(known[-1][0]).name
            self.back.setText(text.format(formula=formula, kg=notation().write_short(known[-1][1], 3)))
            self.back.setAccessibleName(self.back.text())

    # -- to paper

    def to_file(self) -> None:
        """Keep the page that is looked at as a PDF; a batch sheet gets its number with it."""
        if not self._mend_order() and self.batch is not None:
            self._printed(self.printing.to_file(self.batch, self.view.page, self.reason.text(), self.by.text()))

    def to_printer(self) -> None:
        """Print the page that is looked at; a batch sheet gets its number with it."""
        batch = self.batch
        if not self._mend_order() and batch is not None:
            self._printed(self.printing.to_printer(
                batch, self.view.page, self.reason.text(), self.by.text(), lambda: self.batch is batch))

    def _printed(self, done: Batch | None) -> None:
        # What went through the mixer is another feed from now on.
        if done is not None and self.view.page is BatchPage.SHEET:
            self.make()

    def hideEvent(self, event: QHideEvent) -> None:
        super().hideEvent(event)
        self._rest.stop()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        control = bool(event.modifiers() & Qt.KeyboardModifier.ControlModifier)
        if control and event.key() in (Qt.Key.Key_PageDown, Qt.Key.Key_PageUp):
            self.view.turn_by(1 if event.key() == Qt.Key.Key_PageDown else -1)
        else:
            super().keyPressEvent(event)
