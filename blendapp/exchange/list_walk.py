"""Going down the rows of a list, and refusing one that has more tables than anybody makes."""

from __future__ import annotations

from collections.abc import Callable, Container, Iterator
from typing import TypeVar

from blendapp.domain.list_rows import Fate, ListRow
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.exchange.files import refusal
from blendapp.exchange.list_cells import first_text
from blendapp.exchange.tables import RawTable

MOST_TABLES = 500
# No list that a person reads is wider; only a hostile file is.
MOST_COLUMNS = 400

Row = TypeVar("Row", bound=ListRow)


class TooManyTables(Exception):
    """A sheet holds more tables than anybody makes."""


def too_many_tables(file_name: str) -> Refused:
    text = _("A sheet has more than {count} rows of headings; keep only those needed.")
    return refusal(file_name, text.format(count=MOST_TABLES))


def rows_of_table(
    raw: RawTable, rows: range, headings: Container[int], first_row: int, make: type[Row], read: Callable[[int], Row]
) -> Iterator[Row]:
    """The fate of every row that is not blank. first_row: the first below the headings, from which on rows are read."""
    for row in rows:
        if raw.is_blank(row):
            continue
        if row in headings:
            yield make(raw.sheet, row + 1, Fate.IGNORED, _("Heading."))
        elif row < first_row:
            yield make(raw.sheet, row + 1, Fate.IGNORED, _("Title above the table."), first_text(raw, row))
        else:
            yield read(row)
