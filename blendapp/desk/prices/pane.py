"""The page on which a list is looked at before it is taken: on the left as it stands, on the right as understood."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QModelIndex, Qt, Signal
from PySide6.QtGui import QFocusEvent, QKeyEvent, QResizeEvent, QShowEvent
from PySide6.QtWidgets import QWidget

from blendapp.desk.finder.ask import Ask
from blendapp.desk.finder.panel import Finder
from blendapp.desk.finder.search import Found
from blendapp.desk.prices.asking import Open, open_questions, said_words
from blendapp.desk.prices.layout import Parts
from blendapp.desk.prices.reader import ListReader
from blendapp.desk.prices.replies import Replies
from blendapp.desk.prices.roles import sayings
from blendapp.desk.prices.words import left_open, state_words, take_words, taken_words, unsettled_words
from blendapp.desk.work import Work
from blendapp.domain.list_rows import Answer, Fate, ListReading, SourceSheet
from blendapp.domain.mills import Asked, ListAbout
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import edits
from blendapp.services.arriving import apply_list, taken_before
from blendapp.services.mill import Edit
from blendapp.services.movers import with_prices


class ListPane(QWidget):
    """arrived: a list has been read for the first time and can be shown. closed: back to the bench. said: a sentence
    with what can be listed below it. changed: what taking back would do has changed. effect_wanted: the person wants to
    see what prices do, between two libraries, with whether they are taken.
    """

    arrived = Signal()
    closed = Signal()
    said = Signal(str, list)
    changed = Signal()
    effect_wanted = Signal(object, object, bool)

    def __init__(self, work: Work, finder: Finder, ask: Ask) -> None:
        super().__init__()
        self.work, self.finder = work, finder
        self.reader = ListReader(work, self)
        self.parts = Parts(self, finder, ask)
        self.rows, self.table = self.parts.price_rows, self.parts.price_table
        self.questions, self.source = self.parts.questions, self.parts.source
        self.take, self.look, self.leave = self.parts.take, self.parts.look, self.parts.leave
        self._go_to: Answer | None = None
        self._only: Fate | None = None
        self._stale = self._taking = self._was_on_take = False
        self._connect()

    def _connect(self) -> None:
        parts = self.parts
        parts.leave.clicked.connect(self.closed)
        parts.take.clicked.connect(self.apply)
        parts.look.clicked.connect(self.preview)
        parts.other.clicked.connect(self._read_as_other)
        parts.counts.chosen.connect(self._show_only)
        parts.sheets.chosen.connect(lambda name: self._show_sheet(name))
        parts.whose.answered.connect(self.give)
        parts.whose.source_said.connect(self._say_source)
        self.questions.answered.connect(self.give)
        self.questions.new_wanted.connect(self.add_ingredient)
        self.questions.back.connect(self.take_back)
        self.questions.left.connect(self._escape)
        self.questions.take.connect(self.apply)
        self.questions.done.connect(self._go_to_take)
        self.questions.shown.connect(self._mark_question)
        self.source.role_asked.connect(self._offer_roles)
        self.source.looked_at.connect(self._mark_understood)
        for table in (parts.price_table, parts.sample_table):
            table.asked.connect(self._ask)
            table.doubleClicked.connect(self._ask)
            table.cleared.connect(lambda _cells: self.take_back())
            table.selectionModel().currentChanged.connect(lambda index, _old: self._mark_row(index))
        self.reader.came.connect(self._came)
        self.reader.failed.connect(self._failed)
        self.work.edited.connect(self._edited)
        self.work.opened.connect(self._forget)
        self.work.day_came.connect(self._read_when_seen)

    # -- reading

    @property
    def replies(self) -> Replies | None:
        """What was answered for the list in view."""
        return self.reader.replies

    @property
    def reading(self) -> ListReading | None:
        """The list in view."""
        return self.reader.reading

    def begin(self, path: Path, about: ListAbout = ListAbout.PRICES) -> None:
        """Read a list, with what was answered for it before; arrived follows, or a sentence."""
        self._go_to = None
        self.reader.begin(path, about)
        # Until it is read, the list that still stands here is not taken in its place.
        self._say_state()

    def again(self) -> None:
        """Read the list in view again, as its file and the mill are now."""
        self._stale = False
        # A button that cannot be pressed while the list is read loses the keyboard; it gets it back.
        self._was_on_take |= self.take.hasFocus()
        self.reader.again()
        self._say_state()

    def _came(self, first: bool) -> None:
        self._show(first)
        if first:
            self.arrived.emit()

    def _failed(self, sentence: str) -> None:
        if self.reader.refused is not None and self.isVisible():
            self.reader.look_at_refused()
            self._show_refusal(sentence)
            return
        self.said.emit(sentence, [])
        if self.reading is not None:
            # What was answered meanwhile is kept for the next reading; until then the list stands as it was read.
            self._show(False)

    def _forget(self) -> None:
        self.reader.forget_all()
        self.parts.show_nothing()
        self.changed.emit()

    def _edited(self, edit: Edit) -> None:
        if self.reading is None or self._taking or not edit.changes:
            return
        for change in edit.changes:
            if change.kind == "ingredient" and change.after is None:
                # An ingredient that was added for this list is gone again: its name is asked about once more.
                self._go_to = Answer(Asked.INGREDIENT, change.before.name)  # type: ignore[union-attr]
        self._read_when_seen()

    def _read_when_seen(self) -> None:
        """Read again, now or when the page is next looked at: the mill is another, or the day, whose prices count."""
        if self.reading is None:
            return
        if self.isVisible():
            self.again()
        else:
            self._stale = True

    def showEvent(self, event: QShowEvent) -> None:
        super().showEvent(event)
        self.parts.share_width()
        if self._stale:
            self.again()

    def focusInEvent(self, event: QFocusEvent) -> None:
        """The page itself takes no keys; what is to be done does."""
        if self.reading is not None:
            self.focus_first()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self.parts.share_width()

    # -- answering

    def give(self, answer: Answer) -> None:
        """Take an answer in and read the list again with it."""
        if self.replies is not None:
            self.replies.give(answer)
            self._go_to = None
            self.again()
            self.changed.emit()

    def add_ingredient(self, name: str) -> None:
        """Add an ingredient to the mill under the name that the list has for it; one undo of the mill."""
        if self.replies is None:
            return
        try:
            edit = self.work.do(lambda mill: edits.add_ingredient(mill, name))
        except Refused as refusal:
            self.questions.say_fault(" ".join(one.text for one in refusal.problems))
            return
        self.replies.edits.append((len(self.replies.answers), edit.what))
        self._say_state()
        self.changed.emit()

    def take_back(self) -> bool:
        """Take back what was done last for the list, an answer or an ingredient added; returns whether there was any.
        """
        if self._is_edit_last:
            self.work.undo()
            return True
        return self._step(None if self.replies is None else self.replies.take_back())

    def give_again(self) -> bool:
        """Give the answer again that was taken back last."""
        return self._step(None if self.replies is None else self.replies.give_again())

    def _step(self, answer: Answer | None) -> bool:
        if answer is None:
            return False
        self._go_to = answer
        self.again()
        self.changed.emit()
        return True

    @property
    def _is_edit_last(self) -> bool:
        return self.replies is not None and self.work.is_open and self.replies.is_edit_last(self.work.mill.undo_text)

    @property
    def last_answer(self) -> str:
        """What taking back would take back, in words; "" for nothing."""
        if self.replies is None or not self.replies.answers or self.reader.is_taken(self.replies) or self._is_edit_last:
            return ""
        return said_words(self.replies.answers[-1], self.work.library)

    @property
    def last_taken_back(self) -> str:
        """What would be answered again, in words; "" for nothing."""
        back = [] if self.replies is None else self.replies.back
        return said_words(back[-1], self.work.library) if back else ""

    def _say_source(self, source: str) -> None:
        if self.replies is not None:
            self.replies.source = source
            self.again()

    def _read_as_other(self) -> None:
        if self.replies is not None:
            other = ListAbout.COMPOSITION if self.replies.about is ListAbout.PRICES else ListAbout.PRICES
            self.begin(self.replies.path, other)

    # -- showing

    def _show(self, first: bool) -> None:
        reading = self.reading
        assert reading is not None
        library = self.work.library
        if first:
            self._only = None
        if self._only is not None and not reading.count(self._only):
            self._only = None
        self.parts.show_reading(reading, library, self._only)
        self._show_sheet(None if not first else reading.sheets[0].name if reading.sheets else None)
        if first:
            self.parts.share_width()
        self.questions.show_questions(
            open_questions(reading), library, reading.source, len(reading.sheets) > 1, self.work.on)
        unsettled = self.reader.unsettled
        wanted = unsettled or self._go_to
        if wanted is not None:
            back = next((one for one in self.questions.open if one.key == wanted.key), None)
            if back is not None:
                self.questions.go_to(back)
                first = True
        self.questions.say_fault(unsettled_words() if unsettled is not None else "")
        self._go_to = None
        self._mark_question(self.questions.current)
        self._say_state()
        if first or self._was_on_take or self.questions.has_keyboard():
            self.focus_first()
        self._was_on_take = False

    def _show_refusal(self, sentence: str) -> None:
        """A file that cannot be read stands on the page with its sentence and nothing else: there is nothing to take.
        """
        assert self.replies is not None
        self._only = None
        self.parts.show_refusal(self.replies.path.name, sentence)
        self.questions.show_questions([], self.work.library, "", False, self.work.on)
        self.questions.say_last("")
        self.take.setText(_("Nothing to take"))
        self.take.setEnabled(False)
        self.look.setEnabled(False)
        self.leave.setFocus()
        self.changed.emit()

    def focus_first(self) -> None:
        """Put the keyboard on the question in view, else where the list is taken.

        A list that needed answers waits for one Enter more, so that none runs on from the last answer into taking it.
        """
        if self.questions.current is not None or (self._needed_answers and self.take.isEnabled()):
            self.questions.setFocus()
        elif self.take.isEnabled():
            self.take.setFocus()
        else:
            self.parts.table.setFocus()

    @property
    def _needed_answers(self) -> bool:
        return self.replies is not None and bool(self.replies.answers or self.replies.edits)

    def _go_to_take(self) -> None:
        if self.take.isEnabled():
            self.take.setFocus()

    def _say_state(self) -> None:
        reading, replies = self.reading, self.replies
        if reading is None or replies is None:
            return
        added = self.work.mill.undo_text if self._is_edit_last else None
        self.questions.say_last(added or (self.last_answer and _("Answered {what}").format(what=self.last_answer)))
        taken, running = self.reader.is_taken(replies), self.reader.running
        count = reading.count(Fate.ACCEPTED)
        # What was settled since a list of prices was taken can be taken too; what was taken stands apart by then.
        over = taken and (running or self._stale or not count or replies.about is not ListAbout.PRICES)
        self.take.setText(_("Taken") if over else take_words(replies.about, count))
        ready = count > 0 and not over and not running and self.work.is_open and self.work.mill.writable
        self.take.setEnabled(ready)
        if self.questions.current is None and ready and self._needed_answers:
            self.questions.place.say(_("Enter goes to “{button}”").format(button=self.take.text()))
        self.look.setVisible(replies.about is ListAbout.PRICES)
        self.look.setEnabled(count > 0 and not running)
        before = taken_before(self.work.library, reading.digest) is not None
        self.parts.remark.say(state_words(
            replies.about, running=running, taken=taken, before=before, more=count > 0 and not over))

    def _show_only(self, fate: Fate | None) -> None:
        self._only = fate
        if self.reading is not None:
            self.parts.show_rows(self.reading, fate)

    # -- the source

    def _sheet(self, name: str | None) -> SourceSheet | None:
        sheets = () if self.reading is None else self.reading.sheets
        wanted = self.source.rows.sheet.name if name is None else name
        return next((one for one in sheets if one.name == wanted), sheets[0] if sheets else None)

    def _show_sheet(self, name: str | None) -> None:
        reading, sheet = self.reading, self._sheet(name)
        if reading is None:
            return
        name = "" if sheet is None else sheet.name
        rows = [row for row in reading.rows if row.sheet == name]
        self.parts.sheets.choose(name)
        self.source.rows.show(sheet, reading.digest, {row.row: row.fate for row in rows})
        self.source.mark(self.source.marked_row)

    def _mark(self, sheet: str, row: int, about: Asked | None = None, heading: str = "") -> None:
        if sheet != self.source.rows.sheet.name:
            self._show_sheet(sheet)
        self.source.mark(row, about, heading)

    def _mark_question(self, one: Open | None) -> None:
        if one is not None:
            self._mark(one.row.sheet, one.row.row, one.question.asked, one.question.about)

    def _mark_row(self, index: QModelIndex) -> None:
        row = self.parts.model.row(index)
        if row is not None and self.parts.table.has_keyboard():
            self._mark(row.sheet, row.row)

    def _mark_understood(self, row: int) -> None:
        self.source.mark_only(row)
        line = self.parts.model.line_of(self.source.rows.sheet.name, row)
        if line is not None:
            self.parts.table.setCurrentIndex(self.parts.model.index(line, 0))

    def _ask(self, index: QModelIndex) -> None:
        """Bring the question of a row into view."""
        row = self.parts.model.row(index)
        if row is None or not row.questions:
            return
        first = Open(row.questions[0], row, 0)
        self.questions.go_to(first)
        self.questions.setFocus()

    def _offer_roles(self, row: int, column: int) -> None:
        self.finder.open(self.sayings(row, column), _("What stands here"), none=_("No such role. There are these:"))

    def sayings(self, row: int, column: int) -> list[Found]:
        """What a person may say of a place in the source."""
        sheet, replies = self._sheet(None), self.replies
        if sheet is None or replies is None:
            return []
        return sayings(sheet, self.source.rows.table_at(max(row, 1)), row, column, replies.about, self.give)

    def found(self) -> list[Found]:
        """What can be found while this page is in view: what stands where the keyboard is in the source."""
        here = self.source.currentIndex()
        if not self.isVisible() or not here.isValid():
            return []
        return self.sayings(here.row() + 1, here.column())

    # -- taking

    def preview(self) -> None:
        """Show what the accepted prices would do, with nothing stored."""
        if isinstance(self.reading, PriceListReading):
            before = self.work.library.copy()
            self.effect_wanted.emit(before, with_prices(before, self.reading, self.work.on), False)

    def apply(self) -> None:
        """Record every accepted row as one undo; of prices, show what they do."""
        reading, replies = self.reading, self.replies
        if reading is None or replies is None or not self.take.isEnabled():
            return
        before = self.work.library.copy()
        self._taking = True
        try:
            self.work.do(lambda mill: apply_list(mill, reading, self.work.on))
        except Refused as refusal:
            self.said.emit(str(refusal), [])
            return
        finally:
            self._taking = False
        replies.taken_as = max(self.work.library.records["price_list"], default=None)
        # Read again when it is next looked at, with what was taken set apart.
        self._stale = True
        self._say_state()
        self.changed.emit()
        if replies.about is ListAbout.PRICES:
            self.effect_wanted.emit(before, self.work.library.copy(), True)
        else:
            self.closed.emit()
        words = taken_words(replies.about, reading.count(Fate.ACCEPTED), reading.file_name)
        self.said.emit(words, left_open(reading))

    # -- keys

    def _escape(self) -> None:
        if not self.take_back():
            self.closed.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        enter = event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter)
        if event.key() == Qt.Key.Key_Escape:
            looking = self.parts.table.has_keyboard() or self.source.hasFocus()
            if looking and (self.questions.current is not None or self.take.isEnabled()):
                # From looking about back to what is to be done; nothing is taken back yet.
                self.focus_first()
            else:
                self._escape()
        elif event.key() == Qt.Key.Key_Backspace:
            self.take_back()
        elif event.key() == Qt.Key.Key_F5:
            self.again()
        elif event.key() == Qt.Key.Key_F6:
            self.parts.whose.take_proposed()
        elif enter and event.modifiers() & Qt.KeyboardModifier.ControlModifier:
            self.apply()
        else:
            super().keyPressEvent(event)
