"""Questions of a list answered in writing, as from a terminal: "unit: ton=short ton", "row 12=leave out"."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Iterator, Sequence
from typing import TypeVar

from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT, Answer, Fate, ListReading, ListRow, Question
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.notation import PLAIN
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _

AnyReading = TypeVar("AnyReading", bound=ListReading)

# Answers that may be other words than those that are offered.
_TYPED = frozenset({
    Asked.UNIT, Asked.CONCENTRATION, Asked.NUTRIENT, Asked.SUPPLIER, Asked.SITE, Asked.TABLE, Asked.COLUMN,
})
_NAMES = frozenset({Asked.INGREDIENT, Asked.NAMELESS})


def key_of(question: Question, row: ListRow, several_sheets: bool = False) -> str:
    """What a written answer names a question by: "unit: ton", "cents", "row 12", "row Spot!12"."""
    if question.asked.is_of_row:
        return f"row {row.sheet}!{row.row}" if several_sheets and row.sheet else f"row {row.row}"
    return f"{question.asked}: {question.about}" if question.about else str(question.asked)


def has_several_sheets(reading: ListReading) -> bool:
    return len({row.sheet for row in reading.rows}) > 1


def questions(reading: ListReading) -> list[tuple[str, Question]]:
    """Every open question once, in the order of the rows, with its name for an answer in writing."""
    return list({name: (name, question) for name, question, _row in _open(reading)}.values())


def answered(
    library: Library, read: Callable[[Sequence[Answer]], AnyReading], written: Sequence[str], on: datetime.date,
    known: Sequence[Answer] = (),
) -> AnyReading:
    """A list read with answers in writing, one after the other, since an answer may open the next question.

    read: reads the list with answers. written: each "QUESTION=ANSWER" with the question as key_of names it. known:
    answers that stand besides. on: the day of a rate without one. Raises Refused, with all that may be answered, for
    one that names no open question or does not fit it.
    """
    answers = list(known)
    reading = read(answers)
    said: set[tuple[str, str]] = set()
    for text in written:
        key, sign, words = (part.strip() for part in text.rpartition("="))
        if not sign or not key or not words:
            raise Refused(_("“{text}” is no answer; write QUESTION=ANSWER, such as “unit: ton=t”.").format(text=text))
        if (fold(key), fold(words)) in said:  # said twice, and settled the first time
            continue
        said.add((fold(key), fold(words)))
        question, row = _question(reading, key)
        answers.append(_answer(library, question, row, words, on))
        reading = read(answers)
        if question.text and _is_still_open(reading, question, row):
            raise Refused(_unfit(question, words, question.choices or [_("another answer")]))
    return reading


def _is_still_open(reading: ListReading, question: Question, of: ListRow) -> bool:
    """Whether what was answered is asked again in the same words: the answer was not understood."""
    return any(
        (one.asked, one.about, one.text) == (question.asked, question.about, question.text)
        and (not one.asked.is_of_row or (row.sheet, row.row) == (of.sheet, of.row))
        for _name, one, row in _open(reading)
    )


def _open(reading: ListReading) -> Iterator[tuple[str, Question, ListRow]]:
    several = has_several_sheets(reading)
    for row in reading.rows:
        for question in row.questions:
            yield key_of(question, row, several), question, row


def _question(reading: ListReading, key: str) -> tuple[Question, ListRow]:
    for name, question, row in _open(reading):
        if fold(name) == fold(key):
            return question, row
    # A table, the role of a column, and whose list it is may be set without being asked about.
    asked, _colon, about = (part.strip() for part in key.partition(":"))
    if asked in (Asked.TABLE, Asked.COLUMN) or (asked in (Asked.SUPPLIER, Asked.SITE) and not about):
        return Question(Asked(asked), about, ""), ListRow("", 0, Fate.QUESTION)
    names = list(dict.fromkeys(name for name, _question, _row in _open(reading)))
    if not names:
        text = _("{file} leaves nothing open; “{key}” needs no answer.")
        raise Refused(text.format(file=reading.file_name, key=key))
    shown = "; ".join(names[:12]) + ("; …" if len(names) > 12 else "")
    text = _("{file} does not ask “{key}”; open are: {names}.")
    raise Refused(text.format(file=reading.file_name, key=key, names=shown))


def _answer(library: Library, question: Question, row: ListRow, words: str, on: datetime.date) -> Answer:
    asked = question.asked
    if asked is Asked.RATE and not _offered(question, words):
        return _rate(question, words, on)
    ingredient_id = None
    if asked in _NAMES and fold(words) != fold(LEAVE_OUT):
        found = library.named("ingredient", words)
        if found is None:
            raise Refused(_unfit(question, words, [*question.choices, LEAVE_OUT]))
        words, ingredient_id = "", found.id
    elif asked in _NAMES:
        words = LEAVE_OUT
    elif offered := _offered(question, words):
        words = offered
    elif asked in (Asked.AMOUNT, Asked.REMARK):
        words = f"{_number(question, words)!r}".removesuffix(".0")
    elif asked not in _TYPED and question.choices:
        raise Refused(_unfit(question, words, question.choices))
    return Answer(asked, question.about, words, ingredient_id, sheet=row.sheet, row=row.row)


def _offered(question: Question, words: str) -> str:
    """The offered answer that the words are, "" if they are none."""
    return next((one for one in question.choices if fold(one) == fold(words)), "")


def _rate(question: Question, words: str, on: datetime.date) -> Answer:
    figure, _space, day = words.partition(" ")
    rate = _number(question, figure)
    try:
        given = datetime.date.fromisoformat(day.strip()) if day.strip() else on
    except ValueError:
        raise Refused(_("“{text}” is not a day; write it like 2026-03-02.").format(text=day.strip())) from None
    if rate <= 0:
        raise Refused(_("A rate is above 0: money of the mill for one of the other."))
    return Answer(question.asked, question.about, rate=rate, given=given)


def _number(question: Question, words: str) -> float:
    try:
        return PLAIN.read(words)
    except ValueError:
        raise Refused(_unfit(question, words, [*question.choices, _("a number")])) from None


def _unfit(question: Question, words: str, fits: Sequence[str]) -> str:
    text = _("“{words}” does not answer: {question} Use one of: {fits}.")
    return text.format(words=words, question=question.text, fits="; ".join(fits))
