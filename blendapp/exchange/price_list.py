"""Reading a price list in the plain form: every row that is not blank gets one fate, and no price is ever guessed."""

from __future__ import annotations

import datetime
from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer, Fate, source_of
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_cells import first_text, holds_number
from blendapp.exchange.list_columns import answered_sign, date_order
from blendapp.exchange.list_files import open_list
from blendapp.exchange.list_names import NameFinder
from blendapp.exchange.list_numbers import DateOrder, DecimalSign
from blendapp.exchange.price_cells import column_sign
from blendapp.exchange.price_checks import ask_about_duplicates, ask_about_leaps
from blendapp.exchange.price_columns import Role, Table
from blendapp.exchange.price_headings import read_headings
from blendapp.exchange.price_notes import Notes, read_notes
from blendapp.exchange.price_row import read_row
from blendapp.exchange.price_tables import drop_empty_prices, find_table, settle_name_column
from blendapp.exchange.tables import CellKind, RawTable, kind_of


@dataclass(frozen=True)
class Segment:
    """The rows of one table: from its heading row to the next one, with what was decided over its columns."""

    table: Table
    first: int
    last: int
    signs: dict[int, DecimalSign | None]
    dates: dict[int, DateOrder | None]
    notes: Notes


def read_price_list(
    path: str | Path, library: Library, today: datetime.date, sheet: str | None = None,
    answers: Sequence[Answer] = (), source: str = "",
) -> PriceListReading:
    """Reads a price list against a library; nothing is written.

    sheet: None reads every visible sheet. Each row that is not blank has one entry, in the order of the file.
    answers: those given for this list; those remembered for the source count as well. source: whom the list is from,
    "" as the name of the file tells.
    Raises Refused with one sentence for a file that cannot be read, or that has no sheet of that name.
    """
    opened = open_list(path, sheet)
    source = source_of(source or opened.file.name)
    answered = Answers(library, source, answers, today)
    names = NameFinder(library, answered)
    rows = [row for table in opened.tables for row in read_table(table, library, names, today)]
    rows = ask_about_leaps(ask_about_duplicates(rows, answered), answered, library)
    return PriceListReading(
        opened.file.name, opened.file.digest, tuple(rows), opened.notes, source, tuple(answers),
        currency=library.mill.currency,
    )


def read_table(raw: RawTable, library: Library, names: NameFinder, today: datetime.date) -> Iterator[PriceRow]:
    """The fate of every row of one sheet that is not blank."""
    table = find_table(raw, names.is_known)
    if table is None:
        yield from _without_table(raw)
        return
    for segment in _segments(raw, table, names):
        headings = segment.table.heading_rows
        for row in range(segment.first, segment.last):
            if raw.is_blank(row):
                continue
            if row in headings:
                yield PriceRow(raw.sheet, row + 1, Fate.IGNORED, _("Heading."))
            elif row < segment.table.first_row:
                yield PriceRow(raw.sheet, row + 1, Fate.IGNORED, _("Title above the table."), first_text(raw, row))
            else:
                yield read_row(raw, row, segment, library, names, today)


def _segments(raw: RawTable, table: Table, names: NameFinder) -> Iterator[Segment]:
    """The table, and every further one below it that has headings of its own."""
    first, titles = 0, Notes()
    for row in range(table.first_row, len(raw.rows)):
        if row < table.first_row:  # the second heading row of a table found meanwhile
            continue
        found = read_headings(raw, row) if _may_be_heading(raw, row, table) else None
        if found is None:
            continue
        settle_name_column(found, raw, names.is_known)
        if found.name is None:
            continue
        drop_empty_prices(found, raw)
        segment = _segment(raw, table, first, row, names.answers, titles)
        yield segment
        titles = segment.notes
        table, first = found, row
    yield _segment(raw, table, first, len(raw.rows), names.answers, titles)


def _may_be_heading(raw: RawTable, row: int, table: Table) -> bool:
    """A quick look: a row whose cells are texts only, at least two, one of them where prices stand or will."""
    filled = [kind_of(value) for value in raw.rows[row]]
    filled = [kind for kind in filled if kind is not CellKind.BLANK]
    if len(filled) < 2 or any(kind is not CellKind.TEXT for kind in filled):
        return False
    values = (raw.cell(row, column.index) for column in table.prices)
    texts = [value for value in values if isinstance(value, str) and value.strip()]
    return not texts or any(not any(letter.isdigit() for letter in text) or "/" in text for text in texts)


def _segment(
    raw: RawTable, table: Table, first: int, last: int, answers: Answers, titles: Notes
) -> Segment:
    """titles: what notes of the tables above it say, which holds where its own notes are silent."""
    body = range(max(first, table.first_row), last)
    signs = {
        column.index: column_sign(raw, column.index, body) or answered_sign(answers, column.heading)
        for column in table.prices
    }
    dates: dict[int, DateOrder | None] = {}
    for role in (Role.VALID_FROM, Role.VALID_TO):
        index = table.first(role)
        if index is not None:
            dates[index] = date_order(raw, index, body, answers, table.headings[index])
    notes = read_notes(raw, range(first, last))
    notes = Notes(
        notes.units or titles.units, notes.valid_from or titles.valid_from, notes.valid_to or titles.valid_to,
        notes.without_freight or titles.without_freight,
    )
    return Segment(table, first, last, signs, dates, notes)


def _without_table(raw: RawTable) -> Iterator[PriceRow]:
    """A sheet in which no table was found: rows of words are ignored, rows with a number are asked about."""
    for row in range(len(raw.rows)):
        if raw.is_blank(row):
            continue
        text = first_text(raw, row)
        if any(holds_number(value) for value in raw.rows[row]):
            reason = _("No heading row with a name and a price was found; add one, with a unit.")
            yield PriceRow(raw.sheet, row + 1, Fate.QUESTION, reason, text)
        else:
            yield PriceRow(raw.sheet, row + 1, Fate.IGNORED, _("No table of prices."), text)
