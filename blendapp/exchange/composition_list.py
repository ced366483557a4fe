"""Reading a list of analyses: every row that is not blank gets one fate, and no unit or basis is ever guessed."""

from __future__ import annotations

import datetime
from collections.abc import Iterator, Sequence
from pathlib import Path

from blendapp.domain.composition_rows import CompositionReading, CompositionRow
from blendapp.domain.ingredients import Basis
from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer, ColumnRole, Fate, SourceColumn, SourceSheet, SourceTable
from blendapp.domain.wording import _
from blendapp.exchange.composition_cells import result_sign
from blendapp.exchange.composition_checks import (
    ask_about_known_samples,
    ask_about_outliers,
    ask_about_same_samples,
    ask_about_two_bases,
    day_after,
)
from blendapp.exchange.composition_columns import COMPOSITION_ROLES, AnalysisTable
from blendapp.exchange.composition_notes import TableNotes, read_notes
from blendapp.exchange.composition_nutrients import NutrientFinder
from blendapp.exchange.composition_row import read_row
from blendapp.exchange.composition_segments import Segment
from blendapp.exchange.composition_tables import Finders, find_tables, is_transposed
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_cells import first_text, holds_number
from blendapp.exchange.list_columns import answered_sign, date_order
from blendapp.exchange.list_files import open_list
from blendapp.exchange.list_headings import known_names
from blendapp.exchange.list_names import NameFinder
from blendapp.exchange.list_numbers import DecimalSign
from blendapp.exchange.list_placing import Placing
from blendapp.exchange.list_sender import read_sender
from blendapp.exchange.list_walk import TooManyTables, rows_of_table, too_many_tables
from blendapp.exchange.source_sheets import source_sheet
from blendapp.exchange.tables import RawTable


def read_composition_list(
    path: str | Path, library: Library, today: datetime.date, sheet: str | None = None,
    answers: Sequence[Answer] = (), source: str = "",
) -> CompositionReading:
    """Reads a list of analyses against a library; nothing is written. Arguments and faults: price_list.read_price_list.

    One row is one sample; each row that is not blank has one entry, in the order of the file.
    """
    opened = open_list(path, sheet, source)
    source = opened.source
    answered = Answers(library, source, answers, today)
    sender = read_sender(answered, library)
    finders = Finders(
        NameFinder(library, answered), NutrientFinder(library, answered), Placing(answered, COMPOSITION_ROLES)
    )
    rows: list[CompositionRow] = []
    sheets = []
    for raw in opened.tables:
        try:
            found, shown = read_table(raw, library, finders)
        except TooManyTables:
            raise too_many_tables(opened.file.name) from None
        rows += found
        sheets.append(shown)
    finders.placing.note_what_was_not_used(
        column.heading for shown in sheets for table in shown.tables for column in table.columns
    )
    rows = ask_about_known_samples(ask_about_same_samples(day_after(rows, today), answered), answered, library)
    rows = ask_about_outliers(ask_about_two_bases(rows), answered)
    notes = (*opened.notes, *sender.notes, *finders.placing.notes)
    return CompositionReading(
        opened.file.name, opened.file.digest, tuple(rows), notes, source, tuple(answers), tuple(sheets),
        sender.supplier_id, sender.site_id,
    )


def read_table(raw: RawTable, library: Library, finders: Finders) -> tuple[list[CompositionRow], SourceSheet]:
    """The fate of every row of one sheet that is not blank, and the sheet with the tables that were found on it."""
    tables = find_tables(raw, finders)
    named = any(
        table.name is not None and known_names(raw, table.name, table.first_row, finders.names.is_known)
        for table, _first, _last in tables
    )
    if not tables or (not named and is_transposed(raw, finders)):
        return list(_without_table(raw, finders)), source_sheet(raw, ())
    rows: list[CompositionRow] = []
    shown = []
    notes = TableNotes()
    for table, first, last in tables:
        segment = _segment(raw, table, first, last, finders, notes)
        notes = segment.notes
        rows += _rows(raw, segment, library, finders.names)
        shown.append(_source_table(raw, segment))
    return rows, source_sheet(raw, shown)


def _segment(
    raw: RawTable, table: AnalysisTable, first: int, last: int, finders: Finders, titles: TableNotes
) -> Segment:
    """titles: what notes of the tables above it say, which holds where its own notes are silent."""
    body = range(max(first, table.first_row), last)
    answers = finders.names.answers
    signs: dict[int, DecimalSign | None] = {
        column.index: result_sign(raw, column.index, body) or answered_sign(answers, column.heading)
        for column in table.values
    }
    day = table.first(ColumnRole.SAMPLED)
    order = None if day is None else date_order(raw, day, body, answers, table.headings.get(day, ""))
    above = range(first, table.heading_rows.start if table.heading_rows else first)
    notes = read_notes(raw, range(first, last), above, finders.names.is_known)
    return Segment(table, first, last, signs, order, notes.after(titles))


def _rows(raw: RawTable, segment: Segment, library: Library, names: NameFinder) -> Iterator[CompositionRow]:
    return rows_of_table(
        raw, range(segment.first, segment.last), segment.table.heading_rows, segment.table.first_row, CompositionRow,
        lambda row: read_row(raw, row, segment, library, names),
    )


def _without_table(raw: RawTable, finders: Finders) -> Iterator[CompositionRow]:
    """A sheet in which no table was found: rows of words are ignored, rows with a number are refused or asked about."""
    transposed = is_transposed(raw, finders)
    for row in range(len(raw.rows)):
        if raw.is_blank(row):
            continue
        text = first_text(raw, row)
        if not any(holds_number(value) for value in raw.rows[row]):
            yield CompositionRow(raw.sheet, row + 1, Fate.IGNORED, _("No table of analyses."), text)
        elif transposed:
            reason = _("Nutrients stand one below the other here; turn the table, so that each row is one sample.")
            yield CompositionRow(raw.sheet, row + 1, Fate.REFUSED, reason, text)
        else:
            reason = _("No heading row with a name and a nutrient was found; add one, with units.")
            yield CompositionRow(raw.sheet, row + 1, Fate.QUESTION, reason, text)


def _source_table(raw: RawTable, segment: Segment) -> SourceTable:
    """A segment as it is shown beside the list: where it stands, and what each of its columns holds."""
    table = segment.table
    values = {column.index: column for column in table.values}
    rows = range(table.first_row, segment.last)
    width = max((len(raw.rows[row]) for row in (*table.heading_rows, *rows)), default=0)
    columns = []
    for index in range(width):
        says = ""
        if index in values:
            column = values[index]
            basis = column.words.basis or (None if column.is_built_in else segment.notes.basis)
            on = {None: "", Basis.AS_FED: _("as fed"), Basis.DRY_MATTER: _("on dry matter")}[basis]
            comma = _("decimal comma") if segment.signs.get(index) is DecimalSign.COMMA else ""
            says = ", ".join(filter(None, (column.match.name, column.words.unit, on, comma)))
        columns.append(SourceColumn(
            index, table.headings.get(index, ""), table.roles.get(index, ColumnRole.OTHER), says
        ))
    last = next((row for row in reversed(rows) if not raw.is_blank(row)), table.first_row)
    return SourceTable(tuple(row + 1 for row in table.heading_rows), table.first_row + 1, last + 1, tuple(columns))
