"""A sheet or a delimited text as it stands: every cell with its place and kind, before anyone reads meaning into it."""

from __future__ import annotations

import datetime
from bisect import bisect_right
from collections.abc import Mapping
from dataclasses import dataclass, field
from enum import Enum
from functools import cached_property
from typing import NamedTuple


@dataclass(frozen=True)
class ErrorCell:
    """A cell that holds an error of the spreadsheet, for example #N/A."""

    text: str


@dataclass(frozen=True)
class NoStoredValue:
    """A cell with a formula whose result was never stored in the file."""


@dataclass(frozen=True)
class PercentCell:
    """A number that the sheet shows as a percentage: 0.12 stored, 12 % shown."""

    amount: float


NO_STORED_VALUE = NoStoredValue()

# What stands in a cell; blank is None. Whole numbers and fractions are both float.
CellValue = float | str | bool | datetime.date | datetime.datetime | ErrorCell | NoStoredValue | PercentCell | None


class CellKind(Enum):
    BLANK = "blank"
    NUMBER = "number"
    TEXT = "text"
    DATE = "date"
    BOOLEAN = "boolean"
    PERCENT = "percentage"
    ERROR = "error"
    NO_STORED_VALUE = "formula without a stored value"


def kind_of(value: CellValue) -> CellKind:
    if value is None:
        return CellKind.BLANK
    if isinstance(value, str):
        return CellKind.TEXT if value.strip() else CellKind.BLANK
    if isinstance(value, bool):
        return CellKind.BOOLEAN
    if isinstance(value, float | int):
        return CellKind.NUMBER
    if isinstance(value, PercentCell):
        return CellKind.PERCENT
    if isinstance(value, ErrorCell):
        return CellKind.ERROR
    if isinstance(value, NoStoredValue):
        return CellKind.NO_STORED_VALUE
    return CellKind.DATE


class MergedRange(NamedTuple):
    """Merged cells, from 0, ends included; the value stands in the first one."""

    first_row: int
    first_column: int
    last_row: int
    last_column: int


@dataclass
class RawTable:
    """The cells of one sheet, or of one text, by row and column from 0; row 0 is row 1 as the editor shows it.

    rows: may be ragged; a blank cell is None or an empty text. visible: whether the sheet is. hidden_rows and
    hidden_columns: from 0; None where the format does not tell. formats: number formats other than the general one,
    by (row, column), where the format of the file keeps them. struck: cells that are struck through, likewise.
    comments: texts that are attached to cells, likewise.
    """

    sheet: str
    rows: list[list[CellValue]]
    visible: bool = True
    hidden_rows: frozenset[int] | None = None
    hidden_columns: frozenset[int] | None = None
    formats: Mapping[tuple[int, int], str] = field(default_factory=dict)
    struck: frozenset[tuple[int, int]] = frozenset()
    merged: tuple[MergedRange, ...] = ()
    comments: Mapping[tuple[int, int], str] = field(default_factory=dict)

    def cell(self, row: int, column: int) -> CellValue:
        """The value of a cell; None beyond the end of its row."""
        cells = self.rows[row]
        return cells[column] if column < len(cells) else None

    def top_of_merged(self, row: int, column: int) -> int:
        """The row in which the value of a cell stands: further up where cells are merged downwards, else the same."""
        ranges = self._downwards.get(column)
        if not ranges:
            return row
        found = bisect_right(ranges, (row, 1 << 30)) - 1
        return ranges[found][0] if found >= 0 and row <= ranges[found][1] else row

    @cached_property
    def _downwards(self) -> dict[int, list[tuple[int, int]]]:
        """First and last row of the cells that are merged downwards, by their first column, from the top."""
        found: dict[int, list[tuple[int, int]]] = {}
        for one in sorted(self.merged):
            if one.first_row < one.last_row:
                found.setdefault(one.first_column, []).append((one.first_row, one.last_row))
        return found

    def is_blank(self, row: int) -> bool:
        return all(kind_of(value) is CellKind.BLANK for value in self.rows[row])


def column_letters(column: int) -> str:
    """A column from 0 as the spreadsheet names it: 0 is A, 26 is AA."""
    letters = ""
    column += 1
    while column:
        column, rest = divmod(column - 1, 26)
        letters = chr(65 + rest) + letters
    return letters


def column_number(letters: str) -> int:
    """A column as the spreadsheet names it, from 0: A is 0, AA is 26."""
    found = 0
    for letter in letters:
        found = found * 26 + ord(letter) - 64
    return found - 1
