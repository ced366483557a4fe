"""Writing the exchange workbook: a whole library as tables that read back equal."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Iterator
from pathlib import Path
from typing import TYPE_CHECKING

from blendapp.domain.library import Library
from blendapp.domain.problems import Place, Problem, Problems
from blendapp.domain.wording import _, plural
from blendapp.exchange.workbook_layout import LAYOUTS, Layout
from blendapp.exchange.workbook_plant_tables import WrittenCell
from blendapp.exchange.workbook_tables import tables_of
from blendapp.exchange.written_cells import LONGEST_TEXT, fill_number, fill_text, replace_file

if TYPE_CHECKING:
    from openpyxl import Workbook
    from openpyxl.cell.cell import Cell
    from openpyxl.worksheet.worksheet import Worksheet

_WIDEST, _NARROWEST = 42, 9


def write_workbook(path: str | Path, library: Library, today: datetime.date) -> list[Problem]:
    """Writes the library to a workbook, whole or not at all; gives warnings of what a workbook does not carry.

    Prices are those in force on `today`. Raises Refused if the file cannot be written; an older file then stays.
    """
    path = Path(path)
    problems = Problems()
    tables = tables_of(library, today, problems)
    _say_not_carried(library, path.name, problems)
    workbook = _workbook(tables, path.name, problems)
    replace_file(path, workbook.save)
    return [Problem(p.text, Place(path.name, p.place.sheet, p.place.row, p.place.column, p.place.record), p.severity)
            for p in problems]


def _workbook(tables: dict[str, list[list[WrittenCell]]], file: str, problems: Problems) -> Workbook:
    import openpyxl
    from openpyxl.styles import Alignment, Border, Font, PatternFill, Side

    workbook = openpyxl.Workbook()
    workbook.remove(workbook.worksheets[0])
    font, fill = Font(bold=True), PatternFill("solid", fgColor="FFE9EDF0")
    border, alignment = Border(bottom=Side("thin", color="FF8A949C")), Alignment(wrap_text=True, vertical="top")
    for layout in (one for one in LAYOUTS if one.name in tables):
        sheet = workbook.create_sheet(layout.name)
        rows = tables[layout.name]
        for number, row in enumerate(rows, start=1):
            for column, value in enumerate(row, start=1):
                if value is not None and value != "":
                    cell = sheet.cell(number, column)
                    _fill(cell, value, layout, problems)
        for cell in sheet[1]:
            cell.font, cell.fill, cell.border, cell.alignment = font, fill, border, alignment
        sheet.freeze_panes = "B2" if layout.name == "Ingredients" else "A2"
        _set_widths(sheet, rows)
    return workbook


def _fill(cell: Cell, value: str | float | datetime.date, layout: Layout, problems: Problems) -> None:
    if isinstance(value, datetime.date):
        cell.value = value
        cell.number_format = "yyyy-mm-dd"
    elif isinstance(value, str):
        if len(value) > LONGEST_TEXT:
            text = _("The text is longer than a cell can hold and was cut after {count} characters.")
            problems.oddity(text.format(count=LONGEST_TEXT), Place("", layout.name, cell.row))
        fill_text(cell, value[:LONGEST_TEXT])
    else:
        fill_number(cell, value)


def _set_widths(sheet: Worksheet, rows: list[list[WrittenCell]]) -> None:
    from openpyxl.utils import get_column_letter

    for column in range(len(rows[0])):
        longest = max((len(str(row[column])) for row in rows[1:200] if row[column] is not None), default=0)
        heading = max(len(word) for word in str(rows[0][column]).split(" ")) + 2
        width = min(max(longest + 2, heading, _NARROWEST), _WIDEST)
        sheet.column_dimensions[get_column_letter(column + 1)].width = width


def _say_not_carried(library: Library, file: str, problems: Problems) -> None:
    sentences = list(_not_carried(library))
    for sentence in sentences:
        problems.oddity(sentence)


def _not_carried(library: Library) -> Iterator[str]:
    """What the mill knows and a workbook has no place for, one sentence each."""
    older = sum(len(library.quotes_of(i.id)) > 1 for i in library.ingredients)
    if older:
        yield plural(
            "{count} ingredient has several quotes; only its price in force is in the workbook.",
            "{count} ingredients have several quotes; only their prices in force are in the workbook.",
            older,
        ).format(count=older)
    detailed = sum(_has_detail(quotes) for quotes in (library.quotes_of(i.id) for i in library.ingredients))
    if detailed:
        yield plural(
            "Dates, suppliers and terms of the price of {count} ingredient are not in the workbook.",
            "Dates, suppliers and terms of the prices of {count} ingredients are not in the workbook.",
            detailed,
        ).format(count=detailed)
    kept = {
        _("people"): "person", _("price lists"): "price_list", _("other names of ingredients"): "synonym",
        _("formula versions"): "version", _("printed batches"): "batch",
    }
    left = [name for name, kind in kept.items() if library.records[kind]]
    if left:
        yield _("These stay in the mill file and are not in the workbook: {kinds}.").format(kinds=", ".join(left))


def _has_detail(quotes: Iterable[object]) -> bool:
    return any(
        getattr(q, name) is not None
        for q in quotes
        for name in ("valid_from", "valid_to", "supplier_id", "site_id", "terms")
    )
