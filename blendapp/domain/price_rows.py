"""What became of every row of a price list: read once, shown in the preview, printed, and applied."""

from __future__ import annotations

import datetime
import re
from dataclasses import dataclass
from enum import StrEnum

from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.quotes import Terms

# Answers with a fixed word; the others are a name, a unit, a sign or a heading.
TAKE, LEAVE_OUT, ADD = "take", "leave out", "add"
DAY_FIRST, MONTH_FIRST = "day first", "month first"


class Fate(StrEnum):
    """Every source row that is not blank has exactly one."""

    ACCEPTED = "accepted"
    QUESTION = "question"
    REFUSED = "refused"
    IGNORED = "ignored"


@dataclass(frozen=True)
class Question:
    """What a row leaves open. about: see mills.Asked. choices: what may be answered, () where it is typed."""

    asked: Asked
    about: str
    text: str
    choices: tuple[str, ...] = ()


@dataclass(frozen=True)
class Answer:
    """A person's answer. sheet, row: of the row that it is for where asked.is_remembered is false, else not looked at.

    rate: money of the mill for one of the currency in `about`, on the day `given`.
    """

    asked: Asked
    about: str = ""
    answer: str = ""
    ingredient_id: int | None = None
    rate: float | None = None
    given: datetime.date | None = None
    sheet: str = ""
    row: int = 0

    @property
    def key(self) -> tuple[Asked, str, str, int]:
        """What the answer answers; of two with the same key the later one holds."""
        if self.asked.is_remembered:
            return self.asked, fold(self.about), "", 0
        return self.asked, "", self.sheet, self.row


# What a file name says of its week; months as people shorten them.
_OF_THE_WEEK = re.compile(
    r"\.[a-z]{2,5}$|\([0-9]+\)|\b(?:week|wk|kw)\s*[0-9]*\b|[0-9]+(?:st|nd|rd|th)?|\b(?:copy|final|new)\b|"
    r"\b(?:jan|feb|mar|apr|may|jun|jul|aug|sep|sept|oct|nov|dec)(?:uary|ruary|ch|il|e|y|ust|tember|ober|ember)?\b"
)


def source_of(file_name: str) -> str:
    """Whom a list is from, as its file name tells: the name without extension, dates, numbers and weeks."""
    words = re.sub(r"[\W_]+", " ", _OF_THE_WEEK.sub(" ", re.sub(r"[_\-]+", " ", file_name.casefold())))
    return " ".join(words.split()) or fold(file_name)


@dataclass(frozen=True)
class PriceRow:
    """One source row. row: from 1, as the spreadsheet or text editor shows it. reason: why, in one sentence.

    price: as read, money per `per`; entered: the cell as it stands. price_per_t, old_price_per_t: money of the mill per
    tonne as fed. dry_matter_price_per_t: likewise of dry matter, where the list gives the price so. unit: what the list
    said, as it said it. ingredient: name in the mill. None: not known. questions: those that an answer settles; a row
    may be a question for another reason too.
    """

    sheet: str
    row: int
    fate: Fate
    reason: str = ""
    source_name: str = ""
    ingredient_id: int | None = None
    ingredient: str | None = None
    price: float | None = None
    per: str | None = None
    bushel_lb: float | None = None
    price_per_t: float | None = None
    unit: str | None = None
    valid_from: datetime.date | None = None
    old_price_per_t: float | None = None
    entered: str = ""
    valid_to: datetime.date | None = None
    terms: Terms | None = None
    dry_matter_price_per_t: float | None = None
    questions: tuple[Question, ...] = ()


@dataclass(frozen=True)
class PriceListReading:
    """A price list read whole, nothing written. digest: SHA-256 of the file. notes: about the file as a whole.

    source: whom the answers are remembered for. answers: those given for this list.
    """

    file_name: str
    digest: str
    currency: str
    rows: tuple[PriceRow, ...]
    notes: tuple[str, ...] = ()
    source: str = ""
    answers: tuple[Answer, ...] = ()

    @property
    def questions(self) -> list[Question]:
        """Every question that an answer settles, in the order of the rows; one about the whole list stands once."""
        found: dict[object, Question] = {}
        for row in self.rows:
            for one in row.questions:
                key = (one.asked, fold(one.about)) if one.asked.is_remembered else (one.asked, row.sheet, row.row)
                found.setdefault(key, one)
        return list(found.values())

    @property
    def accepted(self) -> list[PriceRow]:
        return [row for row in self.rows if row.fate is Fate.ACCEPTED]

    def count(self, fate: Fate) -> int:
        return sum(row.fate is fate for row in self.rows)
