"""A sheet as a person sees it in the file, for the preview: the text of every cell, and what each column holds."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Sequence
from typing import overload

from blendapp.domain.list_rows import SourceSheet, SourceTable
from blendapp.domain.notation import PLAIN
from blendapp.domain.wording import _
from blendapp.exchange.tables import CellValue, ErrorCell, NoStoredValue, PercentCell, RawTable

_MIDNIGHT = datetime.time()


class ShownRows(Sequence[tuple[str, ...]]):
    """The rows of a sheet as texts, each made when it is asked for: a long list costs only what is looked at.

    Every row has as many cells as the widest one.
    """

    def __init__(self, raw: RawTable) -> None:
        self._rows = raw.rows
        self._width = max(map(len, raw.rows), default=0)

    def __len__(self) -> int:
        return len(self._rows)

    @overload
    def __getitem__(self, index: int) -> tuple[str, ...]: ...
    @overload
    def __getitem__(self, index: slice) -> tuple[tuple[str, ...], ...]: ...
    def __getitem__(self, index: int | slice) -> tuple[str, ...] | tuple[tuple[str, ...], ...]:
        if isinstance(index, slice):
            return tuple(self[one] for one in range(*index.indices(len(self._rows))))
        shown = tuple(map(shown_text, self._rows[index]))
        return shown + ("",) * (self._width - len(shown))

    def __eq__(self, other: object) -> bool:
        if not isinstance(other, Sequence) or isinstance(other, str):
            return NotImplemented
        return len(self) == len(other) and all(a == b for a, b in zip(self, other, strict=True))

    def __hash__(self) -> int:
        return hash(tuple(self))


def source_sheet(raw: RawTable, tables: Iterable[SourceTable]) -> SourceSheet:
    """The sheet of a raw table. tables: those that were found on it, from the top."""
    hidden_rows = frozenset(row + 1 for row in raw.hidden_rows or ())
    struck = frozenset((row + 1, column) for row, column in raw.struck)
    columns = raw.hidden_columns or frozenset()
    return SourceSheet(raw.sheet, ShownRows(raw), tuple(tables), hidden_rows, columns, struck)


def shown_text(value: CellValue) -> str:
    """A cell as a person sees it: a number with its own digits, a day as 2026-03-09, an error as #N/A."""
    if value is None:
        return ""
    if isinstance(value, str):
        return value.strip()
    if isinstance(value, bool):
        return "TRUE" if value else "FALSE"
    if isinstance(value, float | int):
        return PLAIN.write_exact(float(value))
    if isinstance(value, PercentCell):
        return f"{round(value.amount * 100, 9):g} %"
    if isinstance(value, ErrorCell):
        return value.text
    if isinstance(value, NoStoredValue):
        return _("(no result)")
    if isinstance(value, datetime.datetime):
        return value.date().isoformat() if value.time() == _MIDNIGHT else value.isoformat(" ", "minutes")
    return str(value)
