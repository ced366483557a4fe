"""What a person answered about a list, now or for an earlier list of the same source."""

from __future__ import annotations

import datetime
from collections.abc import Iterable

from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT, Answer, source_of
from blendapp.domain.mills import Asked, Synonym
from blendapp.domain.names import fold

LARGEST_USUAL_CHANGE = 0.30


class Answers:
    """Answers by what they answer; one given for this list comes before one that is remembered."""

    def __init__(self, library: Library, source: str, given: Iterable[Answer], today: datetime.date) -> None:
        self.source = source
        self.today = today
        self._usual = {
            fold(one.name): one.answer for one in library.all("synonym") if one.asked is Asked.USUAL_CHANGE
        }
        self._given = {answer.key: answer for answer in given}
        self._left_out = {
            (answer.sheet, answer.row) for answer in self._given.values()
            if answer.asked.is_of_row and answer.answer == LEAVE_OUT
        }
        self._remembered: dict[tuple[Asked, str], Synonym] = {
            (one.asked, fold(one.name)): one
            for one in library.all("synonym")
            if source and source_of(one.source) == source_of(source)
        }

    def find(self, asked: Asked, about: str) -> Answer | None:
        """The answer to a question that is remembered; a rate of another day is none."""
        given = self._given.get((asked, fold(about), "", 0))
        if given is not None:
            return given
        known = self._remembered.get((asked, fold(about)))
        if known is None or (asked is Asked.RATE and known.rate is not None and known.given != self.today):
            return None
        return Answer(asked, known.name, known.answer, known.ingredient_id, known.rate, known.given)

    def given(self, asked: Asked) -> list[Answer]:
        """What was answered for this list, of one kind."""
        return [answer for answer in self._given.values() if answer.asked is asked]

    def has(self, asked: Asked) -> bool:
        """Whether anything of a kind was answered, for this list or an earlier one."""
        return any(key[0] is asked for key in self._given) or any(key[0] is asked for key in self._remembered)

    def unit(self, name: str, about: str) -> str:
        """The unit that words in doubt were answered to mean, for one name or for all; "" if they were not."""
        of_name = self._remembered.get((Asked.INGREDIENT, fold(name)))
        if of_name is not None and of_name.per:
            return of_name.per
        found = self.find(Asked.UNIT, about)
        return "" if found is None else found.answer

    def of_row(self, asked: Asked, sheet: str, row: int) -> str:
        """TAKE, LEAVE_OUT, or nothing; row from 1."""
        found = self._given.get((asked, "", sheet, row))
        return "" if found is None else found.answer

    def is_left_out(self, sheet: str, row: int) -> bool:
        """Whether any question about a row was answered by leaving it out; row from 1."""
        return (sheet, row) in self._left_out

    def about_row(self, asked: Asked, sheet: str, row: int) -> Answer | None:
        """The whole answer to a question about a row; row from 1."""
        return self._given.get((asked, "", sheet, row))

    def largest_usual_change(self, class_name: str) -> float:
        """By how much a price of a class may change without a question, as a fraction of the old price."""
        said = self._usual.get(fold(class_name)) or self._usual.get("")
        try:
            return LARGEST_USUAL_CHANGE if said is None else float(said) / 100
        except ValueError:
            return LARGEST_USUAL_CHANGE

    def last_rate(self, about: str) -> Synonym | None:
        """The rate that was given for an earlier list, to be proposed."""
        return self._remembered.get((Asked.RATE, fold(about)))
