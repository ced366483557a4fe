"""Where the table of a price list is: below which heading row, or, without headings, by what its columns hold."""

from __future__ import annotations

import re
from collections.abc import Callable

from blendapp.domain.list_rows import ColumnRole
from blendapp.exchange.list_headings import FURTHEST, best_name_column, is_known_text, known_names
from blendapp.exchange.price_columns import PriceColumn, Table
from blendapp.exchange.price_headings import read_headings
from blendapp.exchange.price_units import is_price_unit
from blendapp.exchange.price_words import read_heading_words
from blendapp.exchange.tables import CellKind, CellValue, RawTable, kind_of


def find_table(table: RawTable, is_known: Callable[[str], bool]) -> Table | None:
    """The first table of a sheet. is_known: whether a text is the name of an ingredient."""
    for row in range(min(len(table.rows), FURTHEST)):
        found = None if table.is_blank(row) else read_headings(table, row)
        if found is not None:
            settle_name_column(found, table, is_known)
            if found.name is not None:
                drop_empty_prices(found, table)
                return found
    return _table_without_headings(table, is_known)


def settle_name_column(found: Table, table: RawTable, is_known: Callable[[str], bool]) -> None:
    """Of several columns of names, or of none headed so, the one that holds most known ones."""
    candidates = [index for index, role in found.roles.items() if role is ColumnRole.NAME]
    if not candidates:
        taken = {column.index for column in found.prices}
        width = max((len(cells) for cells in table.rows), default=0)
        candidates = [index for index in range(width) if index not in taken]
        if not any(known_names(table, index, (found.heading_row or 0) + 1, is_known) for index in candidates):
            return
    found.name = best_name_column(table, candidates, (found.heading_row or 0) + 1, is_known)
    assert found.name is not None
    for index in candidates:
        if index != found.name and found.roles.get(index) is ColumnRole.NAME:
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
