"""Reading a price list in the plain form: every row that is not blank gets one fate, and no price is ever guessed."""

from __future__ import annotations

import datetime
from collections.abc import Iterator, Sequence
from pathlib import Path

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer, SourceSheet
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_files import open_list
from blendapp.exchange.list_names import NameFinder
from blendapp.exchange.list_placing import Placing
from blendapp.exchange.list_sender import read_sender
from blendapp.exchange.list_walk import TooManyTables, rows_of_table, too_many_tables
from blendapp.exchange.price_checks import ask_about_duplicates, ask_about_leaps
from blendapp.exchange.price_columns import LIST_ROLES
from blendapp.exchange.price_dated import ListDay, dated, day_of_titles
from blendapp.exchange.price_days import ask_once_about_expired
from blendapp.exchange.price_places import placed, site_in_titles
from blendapp.exchange.price_row import read_row
from blendapp.exchange.price_segments import Segment, pointed_out_table, read_segments, source_table
from blendapp.exchange.price_sides import beside, unsettled_row
from blendapp.exchange.price_tables import find_table, holds_price_of_known
from blendapp.exchange.price_unplaced import above_headings, without_columns, without_table
from blendapp.exchange.source_sheets import source_sheet
from blendapp.exchange.tables import RawTable


def read_price_list(
    path: str | Path, library: Library, today: datetime.date, sheet: str | None = None,
    answers: Sequence[Answer] = (), source: str = "",
) -> PriceListReading:
    """Reads a price list against a library; nothing is written.

    sheet: None reads every visible sheet. Each row that is not blank has one entry, in the order of the file.
    answers: those given for this list; those remembered for the source count as well. source: whom the list is from,
    "" as its file name, its title or its folder tell.
    Raises Refused with one sentence for a file that cannot be read, or that has no sheet of that name.
    """
    opened = open_list(path, sheet, source)
    source = opened.source
    answered = Answers(library, source, answers, today)
    sender = read_sender(answered, library, site_in_titles(opened.tables, library))
    if sender.site_id is not None:
        library = library.at_site(sender.site_id)
    names = NameFinder(library, answered)
    rows: list[PriceRow] = []
    sheets = []
    placing = Placing(answered, LIST_ROLES)
    for table in opened.tables:
        try:
            found, sheet_read = read_table(table, library, names, today, placing)
        except TooManyTables:
            raise too_many_tables(opened.file.name) from None
        rows += found
        sheets.append(sheet_read)
    placing.note_what_was_not_used(
        column.heading for shown in sheets for table in shown.tables for column in table.columns
    )
    rows = ask_once_about_expired(ask_about_leaps(ask_about_duplicates(rows, answered, library), answered, library))
    return PriceListReading(
        opened.file.name, opened.file.digest, tuple(rows), (*opened.notes, *sender.notes, *placing.notes), source,
        tuple(answers), tuple(sheets), sender.supplier_id, sender.site_id, currency=library.mill.currency,
    )


def read_table(
    raw: RawTable, library: Library, names: NameFinder, today: datetime.date, placing: Placing
) -> tuple[list[PriceRow], SourceSheet]:
    """The fate of every row of one sheet that is not blank, and the sheet with the tables that were found on it."""
    table = find_table(raw, names, placing)
    if table is None:
        return list(without_table(raw)), source_sheet(raw, ())
    if not table.is_complete:
        return list(without_columns(raw, table, placing)), source_sheet(raw, [pointed_out_table(raw, table)])
    rows: list[PriceRow] = []
    tables = []
    day: ListDay | None = None
    for segment in read_segments(raw, table, names, placing):
        headings = segment.table.heading_rows.start if segment.table.heading_rows else segment.first
        day = day_of_titles(raw, segment.first, headings, segment.last, today) or day
        rows += _rows(raw, segment, library, names, today, day)
        tables.append(source_table(raw, segment))
    return rows, source_sheet(raw, tables)


def _rows(
    raw: RawTable, segment: Segment, library: Library, names: NameFinder, today: datetime.date, day: ListDay | None
) -> Iterator[PriceRow]:
    table = segment.table

    def read(row: int) -> PriceRow:
        if table.sides and table.side is None:
            return unsettled_row(raw, row, table)
        found = read_row(raw, row, segment, library, names, today)
        found = dated(found, table, day, names.answers)
        return beside(raw, placed(raw, found, table, library, names.answers, today), table)

    headings = table.heading_rows
    said = names.answers.find(Asked.TABLE, raw.sheet) is not None
    for found in rows_of_table(raw, range(segment.first, segment.last), headings, table.first_row, PriceRow, read):
        is_title = headings and found.row <= headings.start
        if is_title and not said and holds_price_of_known(raw, found.row - 1, names.is_known):
            found = above_headings(raw, found)
        yield found
