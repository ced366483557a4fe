"""What the list leaves open: one question in view, its answers numbered, all others in a list below it."""

from __future__ import annotations

import datetime
from collections.abc import Sequence

from PySide6.QtCore import QEvent, QModelIndex, QObject, Qt, Signal
from PySide6.QtGui import QKeyEvent, QResizeEvent
from PySide6.QtWidgets import QHBoxLayout, QLabel, QLineEdit, QVBoxLayout, QWidget

from blendapp.desk.prices.answer_field import AnswerField, RateFields
from blendapp.desk.prices.asking import (
    FIGURE,
    NAMES,
    NEW,
    RATE,
    TEXT,
    Choice,
    Open,
    best_names,
    choices_of,
    choose_words,
    figure_choice,
    kept_words,
    make_answer,
    names_of,
    place_words,
    row_words,
    unit_words,
)
from blendapp.desk.prices.choices import LINE_PX, ChoiceList
from blendapp.desk.shell.zone import Elided
from blendapp.desk.theme import GAP_PX, text_font
from blendapp.domain.library import Library
from blendapp.domain.wording import _, plural

MOST_OTHERS, FEW_OTHERS, LOW_PX = 4, 2, 620
# Further questions than these are counted, and come up as those before them are answered.
MOST_LISTED = 60


class QuestionPanel(QWidget):
    """answered: an Answer. new_wanted: the mill is to have an ingredient of that name. back: the last answer is to be
    taken back. shown: another question is in view, or None. left: the person wants away. take: the person wants the
    list taken. done: Enter with nothing left to answer. Enter alone never answers: a figure or an arrow comes first.
    """

    answered = Signal(object)
    new_wanted = Signal(str)
    back = Signal()
    shown = Signal(object)
    left = Signal()
    take = Signal()
    done = Signal()

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName(_("Questions"))
        self.open: list[Open] = []
        self.at = 0
        self.library = Library()
        self.source = ""
        self.several_sheets = False
        self.on = datetime.date.min
        self.count = QLabel()
        self.place = Elided()
        self.place.setObjectName("quiet")
        self.text = QLabel()
        self.text.setWordWrap(True)
        self.text.setFont(text_font(strong=True))
        self.field = AnswerField()
        self.rate = RateFields()
        self.choices = ChoiceList()
        self.kept = QLabel()
        self.kept.setObjectName("quiet")
        self.kept.setWordWrap(True)
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        self.fault.setFont(text_font(strong=True))
        self.later = QLabel(_("Page Down leaves it for later and goes to the next:"))
        self.later.setObjectName("quiet")
        self.others = ChoiceList()
        self.others.setAccessibleName(_("Other questions"))
        self.last = Elided()
        self.last.setObjectName("quiet")
        head = QHBoxLayout()
        head.setSpacing(GAP_PX * 2)
        head.addWidget(self.count)
        head.addWidget(self.place, 1)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, GAP_PX)
        column.setSpacing(6)
        column.addLayout(head)
        answers = (self.rate, self.field, self.choices, self.fault, self.kept)
        for part in (self.text, *answers, self.later, self.others, self.last):
            column.addWidget(part)
        self.choices.clicked.connect(self._clicked)
        self.others.clicked.connect(self._go_to_other)
        self.field.textEdited.connect(self.narrow)
        for field in (self.field, self.rate.rate, self.rate.day):
            field.installEventFilter(self)

    # -- what is shown

    def show_questions(
        self, found: Sequence[Open], library: Library, source: str, several_sheets: bool, on: datetime.date
    ) -> None:
        """Show what is open now; the question in view stays if it still is, and so does what is being typed."""
        here = self.current
        self.library, self.source, self.several_sheets, self.on = library, source, several_sheets, on
        self.open = list(found)
        if here is not None:
            same = next((at for at, one in enumerate(self.open) if one.key == here.key), None)
            if same is not None and self.open[same].question == here.question:
                self.at = same
                self._say()
                return
        self.at = min(self.at, max(len(self.open) - 1, 0))
        self._show()

    def go_to(self, one: Open) -> None:
        """Bring a question into view."""
        found = next((at for at, other in enumerate(self.open) if other.key == one.key), None)
        if found is not None:
            self.at = found
            self._show()

    def say_fault(self, sentence: str) -> None:
        """Say what is wrong with the last answer."""
        self.fault.setText(sentence)
        self.fault.setVisible(bool(sentence))

    def say_last(self, words: str) -> None:
        """Say what was done last."""
        self.last.say(_("{what}   Backspace takes it back").format(what=words) if words else "")
        self.last.setVisible(bool(words))

    @property
    def current(self) -> Open | None:
        """The question in view."""
        return self.open[self.at] if self.at < len(self.open) else None

    def _show(self) -> None:
        one = self.current
        had = self.has_keyboard()
        self.say_fault("")
        self.field.clear()
        typed = "" if one is None else one.typed
        self.field.setVisible(typed in (NAMES, TEXT, FIGURE))
        self.rate.setVisible(typed == RATE)
        self.text.setVisible(one is not None)
        self.kept.setVisible(one is not None)
        if one is not None:
            self.text.setText(one.question.text)
            self.text.setAccessibleName(one.question.text)
            self.setAccessibleDescription(one.question.text)
            self.field.ask(typed, bool(one.question.choices))
            if typed == RATE:
                self.rate.ask(one.question.about, self.library.mill.currency, self.on)
        self._offer_all()
        self._say()
        target = self.field if typed in (NAMES, TEXT, FIGURE) else self.rate.rate if typed == RATE else None
        # Without a field the keys come to the panel itself.
        self.setFocusProxy(target)  # type: ignore[arg-type]
        if had:
            self.setFocus()
        self.shown.emit(one)

    def _offer_all(self) -> None:
        """Show every choice; figures take one unless they are typed as a price or a rate."""
        one = self.current
        found = [] if one is None else choices_of(one, self.library)
        self.choices.show_choices(found, one is not None and one.typed not in (FIGURE, RATE))

    def has_keyboard(self) -> bool:
        """Whether keys come here."""
        focus = self.window().focusWidget()
        return focus is not None and (focus is self or self.isAncestorOf(focus))

    def _say(self) -> None:
        one, count = self.current, len(self.open)
        self.count.setText(plural("{count} question left", "{count} questions left", count).format(count=count)
                           if count else _("No questions"))
        self.count.setAccessibleName(self.count.text())
        self.place.say("" if one is None else place_words(one, self.several_sheets))
        self.kept.setText("" if one is None else kept_words(
            one.question.asked, self.source, unit_words(one.row)))
        # In the order in which Page Down comes to them.
        others = self.open[self.at + 1:] + self.open[: self.at]
        self.others.show_choices(
            [Choice("", other.question.text, row_words(other.row, self.several_sheets), is_aside=True)
             for other in others[:MOST_LISTED]], numbered=False)
        self._fit_others()
        self.later.setVisible(bool(others))

    def _fit_others(self) -> None:
        page = self.parentWidget()
        room = FEW_OTHERS if page is not None and page.height() < LOW_PX else MOST_OTHERS
        self.others.setFixedHeight(min(len(self.others.rows.choices), room) * LINE_PX + 2)

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._fit_others()

    # -- answering

    def narrow(self, typed: str) -> None:
        one = self.current
        if one is None:
            return
        self.say_fault("")
        if not typed.strip():
            self._offer_all()
        elif one.typed == NAMES:
            self.choices.show_choices(best_names(names_of(one, self.library), typed), numbered=False)
            # What is typed is chosen: the name that fits it best.
            self.choices.mark(0)
        else:
            self.choices.show_choices(best_names(choices_of(one, self.library), typed), numbered=False)

    def _clicked(self, index: QModelIndex) -> None:
        if index.isValid():
            self._give(self.choices.rows.choices[index.row()])

    def _go_to_other(self, index: QModelIndex) -> None:
        order = self.open[self.at + 1:] + self.open[: self.at]
        self.go_to(order[index.row()])
        self.setFocus()

    def enter(self) -> None:
        one = self.current
        if one is None:
            self.done.emit()
        elif one.typed == RATE and (self.rate.rate.text().strip() or self.choices.marked is None):
            self._take_rate()
        elif one.typed in (TEXT, FIGURE) and self.field.text().strip():
            self._give_typed(one, self.field.text().strip())
        elif self.choices.marked is not None:
            self._give(self.choices.marked)
        elif self.field.text().strip():
            text = _("The mill has nothing called “{name}”; choose a name, or add it to the mill first.")
            self.say_fault(text.format(name=self.field.text().strip()))
        else:
            self.say_fault(choose_words(one, len(self.choices.rows.choices)))

    def _give_typed(self, one: Open, text: str) -> None:
        try:
            self._give(figure_choice(text) if one.typed == FIGURE else Choice(text, text))
        except ValueError as fault:
            self.say_fault(str(fault))

    def _take_rate(self) -> None:
        one = self.current
        if one is None:
            return
        try:
            answer = self.rate.answer(one)
        except ValueError as fault:
            self.say_fault(str(fault))
            return
        self._gone(answer)

    def _give(self, choice: Choice) -> None:
        one = self.current
        if one is not None and choice.answer == NEW:
            self.new_wanted.emit(one.question.about)
        elif one is not None:
            self._gone(make_answer(one, choice))

    def _gone(self, answer: object) -> None:
        """Show the next question at once; what the list makes of the answer follows."""
        self.open = [one for at, one in enumerate(self.open) if at != self.at]
        if self.at >= len(self.open):
            self.at = 0
        self._show()
        self.answered.emit(answer)

    def step(self, by: int) -> None:
        """Leave the question in view for later and show another."""
        if self.open:
            self.at = (self.at + by) % len(self.open)
            self._show()

    # -- keys

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if not self._key(event):
            super().keyPressEvent(event)

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if isinstance(event, QKeyEvent) and event.type() == QEvent.Type.KeyPress and isinstance(watched, QLineEdit):
            return self._key(event, watched)
        return super().eventFilter(watched, event)

    def _key(self, event: QKeyEvent, field: QLineEdit | None = None) -> bool:
        """Take a key; returns whether it was one of the panel's own."""
        key, text = event.key(), "" if field is None else field.text()
        steps = {Qt.Key.Key_Down: 1, Qt.Key.Key_Up: -1}
        pages = {Qt.Key.Key_PageDown: 1, Qt.Key.Key_PageUp: -1}
        if key in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            if event.isAutoRepeat():
                # A key held too long is no further answer.
                return True
            if event.modifiers() & Qt.KeyboardModifier.ControlModifier:
                self.take.emit()
            else:
                self.enter()
        elif key == Qt.Key.Key_Escape:
            if field is not None and field is not self.rate.day and text:
                field.clear()
                self.narrow("")
            else:
                self.left.emit()
        elif key == Qt.Key.Key_Backspace and (field is None or not text):
            self.back.emit()
        elif key in pages:
            self.step(pages[Qt.Key(key)])
        elif key in steps and self.choices.rows.choices and field in (None, self.field, self.rate.rate):
            self.choices.step(steps[Qt.Key(key)])
        else:
            return self._letter(event.text(), field, text)
        return True

    def _letter(self, sign: str, field: QLineEdit | None, text: str) -> bool:
        choices = self.choices.rows.choices
        if field in (None, self.field) and not text and sign.isdigit() and self.choices.rows.numbered:
            at = int(sign) - 1
            if 0 <= at < len(choices):
                self._give(choices[at])
                return True
        if field is None and sign.isalpha():
            found = next((at for at, one in enumerate(choices) if one.words.casefold().startswith(sign.casefold())), -1)
            if found >= 0:
                self.choices.mark(found)
                return True
        return False
