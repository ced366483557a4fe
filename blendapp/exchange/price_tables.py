"""Where the table of a price list is: below which heading row, or, without headings, by what its columns hold."""

from __future__ import annotations

import re
from collections.abc import Callable

from blendapp.domain.list_rows import ColumnRole
from blendapp.domain.mills import Asked
from blendapp.domain.wording import _
from blendapp.exchange.list_headings import FURTHEST, best_name_column, is_known_text, known_names
from blendapp.exchange.list_names import NameFinder
from blendapp.exchange.list_numbers import date_readings
from blendapp.exchange.list_placing import NO_HEADINGS, Placing, column_name
from blendapp.exchange.price_columns import PRICE_ROLES, PriceColumn, RoleOf, Table, role_of
from blendapp.exchange.price_headings import read_headings
from blendapp.exchange.price_numbers import read_price_text
from blendapp.exchange.price_places import settle_places
from blendapp.exchange.price_sides import settle_sides
from blendapp.exchange.price_units import is_price_unit
from blendapp.exchange.price_words import NO_WORDS, Words, read_heading_words
from blendapp.exchange.source_sheets import shown_text
from blendapp.exchange.tables import CellKind, CellValue, RawTable, column_letters, kind_of


def find_table(raw: RawTable, names: NameFinder, placing: Placing) -> Table | None:
    """The first table of a sheet, or where a person said that one stands.

    It is not complete (Table.is_complete) where headings were pointed out that tell no name or no price.
    """
    said = placing.heading_row(raw)
    pointed_out = None
    if said is not None:
        pointed_out = _pointed_out(raw, said, names, placing)
        if pointed_out.is_complete or names.answers.given(Asked.TABLE):
            return pointed_out
    for row in range(min(len(raw.rows), FURTHEST)):
        found = None if raw.is_blank(row) else headed_table(raw, row, names, placing)
        if found is not None:
            if said is not None:
                text = _("The headings were last in row {said}; those in row {row} were read.")
                placing.note(text.format(said=said + 1, row=row + 1))
            return found
    found = _table_without_headings(raw, names.is_known)
    if placing.names_columns:
        found = _with_said_columns(raw, found or Table(None), names, placing)
    return found if found is not None and found.is_complete else pointed_out


def headed_table(raw: RawTable, row: int, names: NameFinder, placing: Placing) -> Table | None:
    """The table whose headings begin in a row, None where they head no name or no price."""
    found = read_headings(raw, row, role_reader(placing))
    if found is None or any(holds_price_of_known(raw, one, names.is_known) for one in found.heading_rows):
        return None
    _settle(found, raw, names, placing)
    return found if found.is_complete else None


def holds_price_of_known(raw: RawTable, row: int, is_known: Callable[[str], bool]) -> bool:
    """Whether a row holds the name of an ingredient and, in another cell, a number, and so is no heading."""
    cells = raw.rows[row]
    named = [index for index, value in enumerate(cells) if is_known_text(value, is_known)]
    return bool(named) and any(_is_number(value) for index, value in enumerate(cells) if index != named[0])


def _is_number(value: CellValue) -> bool:
    kind = kind_of(value)
    if kind is CellKind.TEXT:
        text = str(value).strip()
        return not date_readings(text) and read_price_text(text) is not None
    return kind is CellKind.NUMBER


def role_reader(placing: Placing) -> RoleOf:
    """What headings say of their columns, what a person said of them coming first."""
    if not placing.names_columns:
        return role_of

    def role(heading: str, index: int) -> tuple[ColumnRole, Words]:
        found, words = role_of(heading)
        return placing.role(heading, index) or found, words

    return role


def _pointed_out(raw: RawTable, row: int, names: NameFinder, placing: Placing) -> Table:
    """The table below a row that a person pointed out, or that has no headings; perhaps not a complete one."""
    if row == NO_HEADINGS:
        found = _table_without_headings(raw, names.is_known) or Table(None)
        return _with_said_columns(raw, found, names, placing)
    read = headed_table(raw, row, names, placing)
    if read is not None:
        return read
    role = role_reader(placing)
    found = Table(row)
    for index, value in enumerate(raw.rows[row]):
        heading = " ".join(shown_text(value).split())
        if heading:
            found.headings[index] = heading
            found.roles[index], words = role(heading, index)
            if found.roles[index] in PRICE_ROLES:
                found.prices.append(PriceColumn(index, found.roles[index], heading, words))
    _settle(found, raw, names, placing)
    return found


def _settle(found: Table, raw: RawTable, names: NameFinder, placing: Placing) -> None:
    if placing.names_columns:
        _add_columns_without_heading(found, raw, placing)
    settle_sides(found, raw, names.is_known, names.answers, placing)
    settle_name_column(found, raw, names.is_known, placing)
    settle_places(found, raw, names.library, placing)
    if found.name is not None:
        drop_empty_prices(found, raw)


def _with_said_columns(raw: RawTable, found: Table, names: NameFinder, placing: Placing) -> Table:
    """A table without headings, with what a person said of its columns in place of what was guessed."""
    width = max(map(len, raw.rows), default=0)
    said = {index: role for index in range(width) if (role := placing.role("", index)) is not None}
    if ColumnRole.NAME in said.values():
        found.roles = {index: role for index, role in found.roles.items() if role is not ColumnRole.NAME}
    if not PRICE_ROLES.isdisjoint(said.values()):
        found.roles = {index: role for index, role in found.roles.items() if role not in PRICE_ROLES}
    found.roles |= said
    found.prices = [
        PriceColumn(index, role, column_name(index), NO_WORDS)
        for index, role in sorted(found.roles.items()) if role in PRICE_ROLES
    ]
    settle_name_column(found, raw, names.is_known, placing)
    return found


def _add_columns_without_heading(found: Table, raw: RawTable, placing: Placing) -> None:
    width = max(map(len, raw.rows), default=0)
    for index in range(width):
        role = None if index in found.headings else placing.role("", index)
        if role is not None:
            found.roles[index] = role
            if role in PRICE_ROLES:
                found.prices.append(PriceColumn(index, role, column_name(index), NO_WORDS))


def settle_name_column(
    found: Table, table: RawTable, is_known: Callable[[str], bool], placing: Placing
) -> None:
    """Of several columns of names, or of none headed so, the one that holds most known ones; said ones come first."""
    candidates = [index for index, role in found.roles.items() if role is ColumnRole.NAME]
    if placing.names_columns:
        said = [i for i in candidates if placing.role(found.headings.get(i, ""), i) is ColumnRole.NAME]
        candidates = said or candidates
    else:
        said = []
    first_row = 0 if found.heading_row is None else found.heading_row + 1
    if not candidates:
        taken = {column.index for column in found.prices}
        width = max((len(cells) for cells in table.rows), default=0)
        candidates = [index for index in range(width) if index not in taken]
        if not any(known_names(table, index, first_row, is_known) for index in candidates):
            return
    found.name = best_name_column(table, candidates, first_row, is_known)
    assert found.name is not None
    if len(said) > 1:
        text = _("Several columns were said to hold the name: {names}; the one in column {taken} was read. Say which.")
        said_names = ", ".join(f"“{found.headings.get(index) or column_name(index)}”" for index in said)
        placing.note(text.format(names=said_names, taken=column_letters(found.name)))
    for index, role in found.roles.items():
        if index != found.name and role is ColumnRole.NAME:
            found.roles[index] = ColumnRole.NOTE
    found.roles[found.name] = ColumnRole.NAME


def drop_empty_prices(found: Table, table: RawTable) -> None:
    """A column of prices that is headed and never filled says nothing."""
    start = found.first_row
    filled = [
        column
        for column in found.prices
        if any(kind_of(table.cell(row, column.index)) is not CellKind.BLANK for row in range(start, len(table.rows)))
    ]
    if filled:
        found.prices = filled


def _table_without_headings(table: RawTable, is_known: Callable[[str], bool]) -> Table | None:
    """Names that the mill knows in one column, numbers in exactly one other."""
    width = max((len(cells) for cells in table.rows), default=0)
    counts = [known_names(table, column, 0, is_known) for column in range(width)]
    if not counts or max(counts) < 2:
        return None
    name = counts.index(max(counts))
    named = [cells for cells in table.rows if name < len(cells) and is_known_text(cells[name], is_known)]
    numeric = [
        column
        for column in range(width)
        if column != name and sum(_has_number(cells, column) for cells in named) * 2 >= len(named)
    ]
    if len(numeric) != 1:
        return None
    found = Table(None, {name: ColumnRole.NAME, numeric[0]: ColumnRole.PRICE}, name=name)
    found.prices = [PriceColumn(numeric[0], ColumnRole.PRICE, "", read_heading_words(""))]
    for column in range(width):
        if column in found.roles:
            continue
        filled = [cells[column] for cells in named if column < len(cells)]
        texts = [str(value) for value in filled if kind_of(value) is CellKind.TEXT]
        if texts and all(is_price_unit(text) or read_heading_words("/" + text).unit for text in texts):
            found.roles[column] = ColumnRole.UNIT
            break
    return found


def _has_number(cells: list[CellValue], column: int) -> bool:
    if column >= len(cells):
        return False
    value = cells[column]
    kind = kind_of(value)
    return kind is CellKind.NUMBER or (kind is CellKind.TEXT and re.search(r"[0-9]", str(value)) is not None)
