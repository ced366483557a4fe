"""Lists that arrive, of prices or of analyses: where their tables stand, and what became of every row."""

from __future__ import annotations

import datetime
import re
from collections.abc import Sequence
from dataclasses import dataclass
from enum import StrEnum

from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.wording import _

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
    """A person's answer. sheet, row: of the row that it is for where asked.is_of_row, else not looked at.

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
        if self.asked.is_of_row:
            return self.asked, "", self.sheet, self.row
        return self.asked, fold(self.about), "", 0


# What a file name says of its week; months as people shorten them.
_OF_THE_WEEK = re.compile(
    r"\.[a-z]{2,5}$|\([0-9]+\)|\b(?:week|wk|kw)\s*[0-9]*\b|[0-9]+(?:st|nd|rd|th)?|\b(?:copy|final|new)\b|"
    r"\b(?:jan|feb|mar|apr|may|jun|jul|aug|sep|sept|oct|nov|dec)(?:uary|ruary|ch|il|e|y|ust|tember|ober|ember)?\b"
)


def source_of(file_name: str) -> str:
    """Whom a list is from, as its file name tells: the name without extension, dates, numbers and weeks."""
    words = re.sub(r"[\W_]+", " ", _OF_THE_WEEK.sub(" ", re.sub(r"[_\-]+", " ", file_name.casefold())))
    return " ".join(words.split()) or fold(file_name)


class ColumnRole(StrEnum):
    """What a column of a list holds. Those below the gap stand in lists of analyses only."""

    NAME = "name"
    PRICE = "price"
    FREIGHT = "freight"
    SUM = "sum"
    UNIT = "unit"
    CURRENCY = "currency"
    VALID_FROM = "valid from"
    VALID_TO = "valid to"
    PACK = "weight of a bag"
    TERMS = "terms"
    ADJUSTMENT = "discount or surcharge"
    SITE = "site"
    SUPPLIER = "supplier"
    NOTE = "note"
    OTHER = "other"

    SAMPLE = "sample"
    SAMPLED = "day of the sample"
    BASIS = "basis"
    DRY_MATTER = "dry matter"
    NUTRIENT = "nutrient"

    @property
    def label(self) -> str:
        return _(self.value)


@dataclass(frozen=True)
class SourceColumn:
    """One column of a table. index: from 0. says: what was read out of its heading, for a person, "" if nothing."""

    index: int
    heading: str
    role: ColumnRole
    says: str = ""


@dataclass(frozen=True)
class SourceTable:
    """A table on a sheet. heading_rows: from 1, () where the columns were told by what they hold. Rows from 1."""

    heading_rows: tuple[int, ...]
    first_row: int
    last_row: int
    columns: tuple[SourceColumn, ...]


@dataclass(frozen=True)
class SourceSheet:
    """A sheet as it stands in the file: rows[0] is its row 1; each cell as its text, "" if blank.

    rows may make their texts only when they are asked for; all have as many cells as the widest. hidden_rows from 1,
    hidden_columns from 0. struck: cells that are struck through, by (row from 1, column from 0).
    """

    name: str
    rows: Sequence[tuple[str, ...]]
    tables: tuple[SourceTable, ...] = ()
    hidden_rows: frozenset[int] = frozenset()
    hidden_columns: frozenset[int] = frozenset()
    struck: frozenset[tuple[int, int]] = frozenset()


@dataclass(frozen=True)
class ListRow:
    """One source row. row: from 1, as the spreadsheet or text editor shows it. reason: why, in one sentence.

    ingredient: name in the mill, None where not known. questions: those that an answer settles; a row may be a
    question for another reason too.
    """

    sheet: str
    row: int
    fate: Fate
    reason: str = ""
    source_name: str = ""
    ingredient_id: int | None = None
    ingredient: str | None = None
    questions: tuple[Question, ...] = ()


@dataclass(frozen=True)
class ListReading:
    """A list read whole, nothing written. digest: SHA-256 of the file. notes: about the file as a whole.

    source: whom the answers are remembered for. answers: those given for this list. sheets: what was read, as it
    stands. supplier_id, site_id: whose list it is and for which site, None for none said.
    """

    file_name: str
    digest: str
    rows: tuple[ListRow, ...]
    notes: tuple[str, ...] = ()
    source: str = ""
    answers: tuple[Answer, ...] = ()
    sheets: tuple[SourceSheet, ...] = ()
    supplier_id: int | None = None
    site_id: int | None = None

    @property
    def questions(self) -> list[Question]:
        """Every question that an answer settles, in the order of the rows; one about the whole list stands once."""
        found: dict[object, Question] = {}
        for row in self.rows:
            for one in row.questions:
                key = (one.asked, row.sheet, row.row) if one.asked.is_of_row else (one.asked, fold(one.about))
                found.setdefault(key, one)
        return list(found.values())

    def count(self, fate: Fate) -> int:
        return sum(row.fate is fate for row in self.rows)
