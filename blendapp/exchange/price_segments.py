"""The tables of a sheet, one below the other: which rows each one takes, and what is decided over its columns."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field

from blendapp.domain.list_rows import ColumnRole, SourceColumn, SourceTable
from blendapp.domain.wording import _
from blendapp.exchange.list_columns import answered_sign, date_order
from blendapp.exchange.list_names import NameFinder
from blendapp.exchange.list_numbers import DateOrder, DecimalSign
from blendapp.exchange.list_placing import Placing
from blendapp.exchange.list_walk import MOST_TABLES, TooManyTables
from blendapp.exchange.price_cells import column_sign
from blendapp.exchange.price_columns import Table
from blendapp.exchange.price_notes import Notes, read_notes, speaks_of_all, speaks_of_prices
from blendapp.exchange.price_remarks import mark_of, read_footnotes, remark_columns
from blendapp.exchange.price_sections import NO_SECTION, Section, Sections, read_sections
from blendapp.exchange.price_tables import headed_table
from blendapp.exchange.price_words import Words
from blendapp.exchange.tables import CellKind, RawTable, kind_of


@dataclass(frozen=True)
class Segment:
    """The rows of one table: from its heading row to the next one, with what was decided over its columns.

    footnotes: by their mark, with their row, those that a row or a heading leads to.
    """

    table: Table
    first: int
    last: int
    signs: dict[int, DecimalSign | None]
    dates: dict[int, DateOrder | None]
    notes: Notes
    sections: Sections
    remark_columns: tuple[int, ...] = ()
    footnotes: dict[str, tuple[int, str]] = field(default_factory=dict)


def read_segments(raw: RawTable, table: Table, names: NameFinder, placing: Placing) -> Iterator[Segment]:
    """The table, and every further one below it that has headings of its own. Raises TooManyTables."""
    first, titles, count, above = 0, Notes(), 1, NO_SECTION
    for row in range(table.first_row, len(raw.rows)):
        if row < table.first_row:  # the second heading row of a table found meanwhile
            continue
        found = headed_table(raw, row, names, placing) if _may_be_heading(raw, row, table) else None
        if found is None:
            continue
        segment = _segment(raw, table, first, row, names, titles, above)
        yield segment
        titles, above = segment.notes, _section_below(raw, segment)
        table, first, count = found, row, count + 1
        if count > MOST_TABLES:
            raise TooManyTables
    yield _segment(raw, table, first, len(raw.rows), names, titles, above)


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
    raw: RawTable, table: Table, first: int, last: int, names: NameFinder, titles: Notes, above: Section
) -> Segment:
    """titles: what notes of the tables above it say, which holds where its own notes are silent. above: a heading that
    stands over the table."""
    answers = names.answers
    body = range(max(first, table.first_row), last)
    signs = {
        column.index: column_sign(raw, column.index, body) or answered_sign(answers, column.heading)
        for column in table.prices
    }
    dates: dict[int, DateOrder | None] = {}
    for role in (ColumnRole.VALID_FROM, ColumnRole.VALID_TO):
        index = table.first(role)
        if index is not None:
            dates[index] = date_order(raw, index, body, answers, table.headings[index])
    sections = read_sections(raw, table, body, names.is_known, above)
    headings = table.heading_rows.start if table.heading_rows else 0
    end = _last_row(raw, table, last)
    # What stands below the last price is a footnote, unless it is the title of a further table.
    taken = {
        one.row for one in sections.found
        if one.row < end or (last < len(raw.rows) and not speaks_of_prices(one.text))
    }
    footnotes = read_footnotes(raw, body)
    if footnotes:
        marked = {mark_of(text) for text in table.headings.values()}
        marked |= {mark_of(text) for row in body for text in raw.rows[row] if isinstance(text, str)}
        footnotes = {mark: found for mark, found in footnotes.items() if mark in marked}
        taken |= {row for row, text in footnotes.values() if not speaks_of_all(text)}
    notes = read_notes(raw, [row for row in range(first, last) if row not in taken], headings)
    notes = Notes(
        notes.units or titles.units, notes.valid_from or titles.valid_from, notes.valid_to or titles.valid_to,
        notes.without_freight or titles.without_freight,
    )
    remarks = remark_columns(raw, table, body)
    return Segment(table, first, last, signs, dates, notes, sections, remarks, footnotes)


def _section_below(raw: RawTable, segment: Segment) -> Section:
    """A heading at the end of a table, over no price of it: it stands over the next one."""
    last = segment.sections.found[-1] if segment.sections.found else NO_SECTION
    return last if last.row > _last_row(raw, segment.table, segment.last) and not last.ended else NO_SECTION


def source_table(raw: RawTable, segment: Segment) -> SourceTable:
    """A segment as it is shown beside the list: where it stands, and what each of its columns holds."""
    table = segment.table
    width = max((len(raw.rows[row]) for row in (*table.heading_rows, *range(table.first_row, segment.last))), default=0)
    prices = {column.index: column for column in table.prices}
    columns = []
    for index in range(width):
        role = prices[index].role if index in prices else table.roles.get(index, ColumnRole.OTHER)
        said = _says(prices[index].words, segment, index) if index in prices else ""
        order = segment.dates.get(index)
        columns.append(SourceColumn(
            index, table.headings.get(index, ""), role, said or ("" if order is None else _(order.value))
        ))
    last_row = _last_row(raw, table, segment.last) + 1
    return SourceTable(
        tuple(row + 1 for row in table.heading_rows), table.first_row + 1, last_row, tuple(columns)
    )


def pointed_out_table(raw: RawTable, table: Table) -> SourceTable:
    """A table whose headings were pointed out, but do not tell yet what every column holds."""
    columns = tuple(
        SourceColumn(index, table.headings.get(index, ""), table.roles.get(index, ColumnRole.OTHER))
        for index in range(max((len(cells) for cells in raw.rows), default=0))
    )
    heading_rows = tuple(row + 1 for row in table.heading_rows)
    return SourceTable(heading_rows, table.first_row + 1, max(len(raw.rows), table.first_row + 1), columns)


def _says(words: Words, segment: Segment, index: int) -> str:
    """What the heading of a price column, or else a note, says of all its prices."""
    money = words.money.sign
    unit = words.unit
    of_note = False
    for note in segment.notes.units:
        if not unit and note.unit:
            unit, of_note = note.unit, True
        if not money and note.money.sign:
            money, of_note = note.money.sign, True
    parts = [money, _("hundredths") if words.money.cents else "", _("per {unit}").format(unit=unit) if unit else ""]
    said = " ".join(part for part in parts if part)
    if said and of_note:
        said = _("{what}, as a note says").format(what=said)
    sign = segment.signs.get(index)
    more = [_("of dry matter") if words.dry else "", _("decimal comma") if sign is DecimalSign.COMMA else ""]
    return ", ".join(part for part in (said, *more) if part)


def _last_row(raw: RawTable, table: Table, end: int) -> int:
    """The last row of a table that fills a price, or two cells; what stands below it are its footnotes."""
    first = table.first_row
    for row in range(end - 1, first - 1, -1):
        filled = [index for index, value in enumerate(raw.rows[row]) if kind_of(value) is not CellKind.BLANK]
        if len(filled) > 1 or any(column.index in filled for column in table.prices):
            return row
    return first
