"""Sheets in which nobody can tell where names and prices stand: what to point out so that they can be read."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from blendapp.domain.list_rows import ColumnRole, Fate, Question
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.wording import _
from blendapp.exchange.list_cells import first_text, holds_number
from blendapp.exchange.list_headings import FURTHEST
from blendapp.exchange.list_placing import Placing, column_name
from blendapp.exchange.price_columns import LIST_ROLES, Table
from blendapp.exchange.tables import CellKind, RawTable, kind_of

MOST_ROWS_PROPOSED = 5
MOST_COLUMNS_ASKED = 12


def without_table(raw: RawTable) -> Iterator[PriceRow]:
    """A sheet in which no table was found: rows of words are ignored, rows with a number are asked about."""
    text = _("No heading row with a name and a price was found; say in which row the headings stand, or add one.")
    question = Question(Asked.TABLE, raw.sheet, text, _likely_rows(raw))
    return _rows(raw, 0, text, (question,))


def above_headings(raw: RawTable, row: PriceRow) -> PriceRow:
    """A row above the headings that holds the name of an ingredient and a number: it is asked about, and not lost."""
    text = _("The row stands above the headings and holds a price; say in which row the headings stand.")
    question = Question(Asked.TABLE, raw.sheet, text, _likely_rows(raw))
    return replace(row, fate=Fate.QUESTION, reason=text, questions=(question,))


def without_columns(raw: RawTable, table: Table, placing: Placing) -> Iterator[PriceRow]:
    """The rows below headings that were pointed out, but do not tell where the name stands and where the price."""
    missing = [] if table.name is not None else [_("the name")]
    if not any(column.role is not ColumnRole.FREIGHT for column in table.prices):
        missing.append(_("the price"))
    text = _("Say which column holds {what}.").format(what=_(" and ").join(missing))
    choices = tuple(role.value for role in LIST_ROLES)
    questions = [
        Question(Asked.COLUMN, about, _("Say what the column “{name}” holds.").format(name=about), choices)
        for index in _filled_columns(raw, table.first_row)
        if placing.role(table.headings.get(index, ""), index) is None
        for about in [table.headings.get(index) or column_name(index)]
    ]
    return _rows(raw, table.first_row, text, tuple(questions[:MOST_COLUMNS_ASKED]))


def _rows(raw: RawTable, first: int, text: str, questions: tuple[Question, ...]) -> Iterator[PriceRow]:
    for row in range(len(raw.rows)):
        if raw.is_blank(row):
            continue
        name = first_text(raw, row)
        if row < first:
            yield PriceRow(raw.sheet, row + 1, Fate.IGNORED, _("Title above the table."), name)
        elif any(holds_number(value) for value in raw.rows[row]):
            yield PriceRow(raw.sheet, row + 1, Fate.QUESTION, text, name, questions=questions)
        else:
            yield PriceRow(raw.sheet, row + 1, Fate.IGNORED, _("No table of prices."), name)


def _likely_rows(raw: RawTable) -> tuple[str, ...]:
    """Rows of several texts and no number, as they may be pointed out; the last choice is that there are none."""
    found = []
    for row in range(min(len(raw.rows), FURTHEST)):
        filled = [value for value in raw.rows[row] if kind_of(value) is not CellKind.BLANK]
        if len(filled) > 1 and not any(holds_number(value) for value in filled):
            found.append(f"row {row + 1}")
    return (*found[:MOST_ROWS_PROPOSED], "row 0")


def _filled_columns(raw: RawTable, first: int) -> list[int]:
    rows = raw.rows[first : first + FURTHEST]
    found = (index for cells in rows for index, value in enumerate(cells) if kind_of(value) is not CellKind.BLANK)
    return sorted(set(found))
