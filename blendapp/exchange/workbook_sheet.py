"""Reading the rows of one sheet of the exchange workbook by heading, with every fault at its cell."""

from __future__ import annotations

import datetime
import math
from collections.abc import Callable, Iterator, Sequence
from enum import StrEnum
from typing import TypeVar

from blendapp.domain.names import fold
from blendapp.domain.notation import PLAIN
from blendapp.domain.problems import Place, Problems
from blendapp.domain.wording import _, plural
from blendapp.exchange.suggestions import Suggester, did_you_mean
from blendapp.exchange.tables import CellKind, CellValue, PercentCell, RawTable, column_letters, kind_of
from blendapp.exchange.workbook_layout import Layout

Choice = TypeVar("Choice", bound=StrEnum)
# Takes a heading that the layout does not know and its column; says whether it has a use for the column.
TakeColumn = Callable[[str, int], bool]

_YES = frozenset({"yes", "y", "true", "x", "1"})
_NO = frozenset({"no", "n", "false", "0"})


class Sheet:
    """A sheet with its columns found. Warns of columns that nothing knows; a needed one that is missing is a fault.

    also: headings beside those of the layout that a person may have meant by one that nothing knows.
    """

    def __init__(
        self, table: RawTable, layout: Layout, file: str, problems: Problems, take: TakeColumn | None = None,
        also: Sequence[str] = (),
    ) -> None:
        self.table = table
        self.layout = layout
        self.name = table.sheet
        self.file = file
        self.problems = problems
        self.columns: dict[str, int] = {}
        self._taken: list[int] = []
        self._numbers_as_text: dict[str, tuple[int, int, str]] = {}
        self.usable = self._find_columns(take, also)

    def place(self, row: int | None = None, column: str = "", record: str = "") -> Place:
        return Place(self.file, self.name, row, column, record)

    def _find_columns(self, take: TakeColumn | None, also: Sequence[str]) -> bool:
        known = {fold(heading): heading for heading in self.layout.headings}
        seen: dict[str, int] = {}
        unknown: list[tuple[int, str]] = []
        for index, cell in enumerate(self.table.rows[0] if self.table.rows else []):
            heading = cell.strip() if isinstance(cell, str) else ""
            if not heading:
                if self._has_content(index):
                    unknown.append((index, ""))
                continue
            folded = fold(heading)
            if folded in seen:
                text = _("The heading “{heading}” stands in column {first} and again in {second}; keep one of them.")
                first, second = column_letters(seen[folded]), column_letters(index)
                self.problems.fault(text.format(heading=heading, first=first, second=second), self.place(1, heading))
                continue
            seen[folded] = index
            if folded in known:
                self.columns[known[folded]] = index
            elif take is not None and take(heading, index):
                self._taken.append(index)
            else:
                unknown.append((index, heading))
        self._warn_of(unknown, [heading for heading in also if fold(heading) not in seen])
        missing = [heading for heading in self.layout.needed if heading not in self.columns]
        if missing:
            text = _("The first row of the sheet must have the headings {missing}; add what is missing.")
            sentence = text.format(missing=", ".join(f"“{m}”" for m in missing))
            self.problems.fault(sentence + self._nearly_there(missing, unknown), self.place(1))
        return not missing

    def _has_content(self, column: int) -> bool:
        rows = self.table.rows
        return any(column < len(cells) and kind_of(cells[column]) is not CellKind.BLANK for cells in rows)

    @staticmethod
    def _nearly_there(missing: list[str], unknown: list[tuple[int, str]]) -> str:
        """Names the columns that may have been meant by the headings that are missing."""
        found = ""
        for heading in missing:
            near = Suggester(name for _index, name in unknown if name).close_names(heading)
            if near:
                text = _("For “{heading}”, did you mean the column “{near}”?").format(heading=heading, near=near[0])
                found += " " + text
        return found

    def _warn_of(self, unknown: list[tuple[int, str]], also: Sequence[str]) -> None:
        free = [*(heading for heading in self.layout.headings if heading not in self.columns), *also]
        for index, heading in unknown:
            if heading:
                text = _("The column “{heading}” is not known here and was left alone.").format(heading=heading)
                text += did_you_mean(heading, free)
            else:
                text = _("Column {letters} has no heading and was left alone.").format(letters=column_letters(index))
            self.problems.oddity(text, self.place(1, heading or column_letters(index)))

    def rows(self) -> Iterator[Row]:
        """The rows below the headings that hold something in a column that means something."""
        wanted = sorted([*self.columns.values(), *self._taken])
        for number, cells in enumerate(self.table.rows[1:], start=2):
            for index in wanted:
                if index < len(cells) and kind_of(cells[index]) is not CellKind.BLANK:
                    yield Row(self, number, cells)
                    break

    def note_number_as_text(self, row: int, heading: str, text: str) -> None:
        count, first, shown = self._numbers_as_text.get(heading, (0, row, text))
        self._numbers_as_text[heading] = (count + 1, first, shown)

    def say_numbers_as_text(self) -> None:
        """One warning a column for the numbers that were stored as text."""
        for heading, (count, row, text) in self._numbers_as_text.items():
            sentence = plural(
                "A number is stored as text (“{text}”); it was read with a decimal point.",
                "{count} numbers are stored as text, the first is “{text}”; they were read with a decimal point.",
                count,
            )
            self.problems.oddity(sentence.format(count=count, text=text), self.place(row, heading))


class Row:
    """One row. Every reader returns the blank value of its kind for a blank cell, a missing column or a fault."""

    __slots__ = ("cells", "number", "sheet", "told")

    def __init__(self, sheet: Sheet, number: int, cells: list[CellValue]) -> None:
        self.sheet, self.number, self.cells = sheet, number, cells
        self.told: tuple[str, ...] = ()

    def raw(self, heading: str) -> CellValue:
        index = self.sheet.columns.get(heading)
        return None if index is None or index >= len(self.cells) else self.cells[index]

    def has(self, heading: str) -> bool:
        """Whether the cell holds anything."""
        return kind_of(self.raw(heading)) is not CellKind.BLANK

    def place(self, heading: str) -> Place:
        return self.sheet.place(self.number, heading)

    def fault(self, heading: str, text: str) -> None:
        """Says a fault of a cell; `told` keeps the headings of the cells that have one."""
        self.told += (heading,)
        self.sheet.problems.fault(text, self.place(heading))

    def oddity(self, heading: str, text: str) -> None:
        self.sheet.problems.oddity(text, self.place(heading))

    def text(self, heading: str) -> str:
        """Text as it stands; a number as it would be typed."""
        value = self.raw(heading)
        if isinstance(value, str):
            return value if value.strip() else ""
        kind = kind_of(value)
        if kind is CellKind.NUMBER:
            assert isinstance(value, float | int)
            return PLAIN.write_exact(value)
        if kind is CellKind.BLANK:
            return ""
        self.fault(heading, _not_text(value))
        return ""

    def name(self, heading: str) -> str:
        return self.text(heading).strip()

    def number_at(self, heading: str, value: CellValue) -> tuple[float | None, str]:
        """The number in a cell, and the text that it was stored as, if it was."""
        kind = kind_of(value)
        if kind is CellKind.BLANK:
            return None, ""
        if kind is CellKind.NUMBER:
            assert isinstance(value, float | int)
            if math.isfinite(value):
                return float(value), ""
            self.fault(heading, _("The number in this cell is too large; correct it."))
            return None, ""
        if kind is not CellKind.TEXT:
            self.fault(heading, _not_a_number(value))
            return None, ""
        assert isinstance(value, str)
        try:
            if "," in value and "." not in value:
                raise ValueError
            number = PLAIN.read(value)
        except ValueError:
            text = _("“{text}” is not a number; type it with a decimal point, or leave the cell blank if unknown.")
            self.fault(heading, text.format(text=value.strip()))
            return None, ""
        self.sheet.note_number_as_text(self.number, heading, value.strip())
        return number, value.strip()

    def number_in(self, heading: str) -> float | None:
        return self.number_at(heading, self.raw(heading))[0]

    def whole_number(self, heading: str) -> int | None:
        number = self.number_in(heading)
        if number is None or number == int(number):
            return None if number is None else int(number)
        self.fault(heading, _("A whole number is needed here; {number} is none.").format(number=f"{number:g}"))
        return None

    def yes(self, heading: str) -> bool | None:
        """True for yes, False for no, None for a blank cell."""
        value = self.raw(heading)
        kind = kind_of(value)
        if kind is CellKind.BLANK:
            return None
        if kind is CellKind.BOOLEAN:
            return bool(value)
        word = fold(self.text(heading))
        if word in _YES or word in _NO:
            return word in _YES
        if kind in (CellKind.TEXT, CellKind.NUMBER):
            self.fault(heading, _("“{text}” is neither yes nor no; write one of them.").format(text=word))
        return None

    def date(self, heading: str) -> datetime.date | None:
        value = self.raw(heading)
        if isinstance(value, datetime.datetime):
            return value.date()
        if isinstance(value, datetime.date):
            return value
        text = self.name(heading)
        try:
            return datetime.date.fromisoformat(text) if text else None
        except ValueError:
            sentence = _("“{text}” is no date; write it like 2024-03-31.")
            self.fault(heading, sentence.format(text=text))
            return None

    def choice(self, heading: str, known: type[Choice]) -> Choice | None:
        """One word of a closed list, case and spacing apart."""
        text = self.name(heading)
        if not text:
            return None
        found = {fold(word): word for word in known}.get(fold(text))
        if found is None:
            self.fault(heading, not_in_list(text, [str(word) for word in known]))
        return found


def not_in_list(text: str, known: list[str]) -> str:
    sentence = _("“{text}” is not known here; use one of {known}.").format(text=text, known=", ".join(known))
    return sentence + did_you_mean(text, known)


def _not_text(value: CellValue) -> str:
    kind = kind_of(value)
    if kind is CellKind.BOOLEAN:
        return _("The cell holds a truth value and not a text; format it as text and type it again.")
    if kind is CellKind.PERCENT:
        return _("The cell holds a percentage and not a text; format it as text and type it again.")
    if kind is CellKind.DATE:
        return _("The cell holds a date or a time and not a text; format it as text and type it again.")
    return _unusable(value)


def _not_a_number(value: CellValue) -> str:
    kind = kind_of(value)
    if kind is CellKind.BOOLEAN:
        return _("The cell holds a truth value and not a number; type the number, or leave it blank if unknown.")
    if isinstance(value, PercentCell):
        text = _("The cell shows {shown} % and stores {stored}; format it as a number and type what is meant.")
        return text.format(shown=f"{value.amount * 100:g}", stored=f"{value.amount:g}")
    if kind is CellKind.DATE:
        return _("The cell holds a date or a time and not a number; type the number, or leave it blank if unknown.")
    return _unusable(value)


def _unusable(value: CellValue) -> str:
    if kind_of(value) is CellKind.NO_STORED_VALUE:
        return _("The formula in this cell has no stored result; open the workbook, let it calculate, and save it.")
    text = _("The cell holds the error {error}; correct it, or leave it blank if unknown.")
    return text.format(error=getattr(value, "text", ""))
