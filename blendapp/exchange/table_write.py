"""Tables for other programs: a workbook with a sheet each, or the first one as delimited text."""

from __future__ import annotations

import csv
import io
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING, BinaryIO

from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.wording import _
from blendapp.domain.written_tables import Figure, WrittenCell, WrittenTable
from blendapp.exchange.written_cells import LONGEST_TEXT, MARKED_AS_TEXT, fill_number, fill_text, replace_file

if TYPE_CHECKING:
    from openpyxl.worksheet.worksheet import Worksheet

ENDINGS = (".xlsx", ".csv")
_WIDEST, _NARROWEST, _ROWS_LOOKED_AT = 60, 9, 500
# A tab or a carriage return before one of the signs is skipped by some programs.
_RISKY_IN_TEXT = (*MARKED_AS_TEXT, "\t", "\r", "\n")


def refuse_ending(path: Path) -> None:
    """Raises Refused for a file name whose ending says neither kind."""
    if path.suffix.lower() not in ENDINGS:
        text = _("“{file}” says neither .xlsx nor .csv; end its name with one of them.")
        raise Refused(Problem(text.format(file=path.name), Place(file=path.name)))


def write_tables(path: Path | str, tables: Sequence[WrittenTable]) -> None:
    """Write tables by the ending of the file's name: .xlsx holds all of them, .csv the first.

    Text stays text in either, whatever it begins with; numbers are numbers. Delimited text is that of RFC 4180 in
    UTF-8 with a byte order mark, decimal points, and an apostrophe before what would be taken for a formula.
    Raises Refused for another ending, or where the file cannot be written; an older file then stays.
    """
    path = Path(path)
    refuse_ending(path)
    if path.suffix.lower() == ".csv":
        text = delimited(tables[0])
        replace_file(path, lambda stream: stream.write(text.encode("utf-8-sig")))
    else:
        replace_file(path, lambda stream: _write_workbook(stream, tables))


def delimited(table: WrittenTable) -> str:
    """A table as delimited text."""
    lines = io.StringIO()
    writer = csv.writer(lines, lineterminator="\r\n")
    writer.writerow([_safe(heading) for heading in table.headings])
    for row in table.rows:
        writer.writerow([_plain(cell) for cell in row])
    return lines.getvalue()


def _plain(cell: WrittenCell) -> str:
    if cell is None:
        return ""
    return f"{cell.value:.{cell.decimals}f}" if isinstance(cell, Figure) else _safe(cell)


def _safe(text: str) -> str:
    return f"'{text}" if text.startswith(_RISKY_IN_TEXT) else text


def _write_workbook(stream: BinaryIO, tables: Sequence[WrittenTable]) -> None:
    import openpyxl

    workbook = openpyxl.Workbook()
    workbook.remove(workbook.worksheets[0])
    for table in tables:
        _fill_sheet(workbook.create_sheet(table.name), table)
    workbook.save(stream)


def _fill_sheet(sheet: Worksheet, table: WrittenTable) -> None:
    from openpyxl.cell.cell import Cell
    from openpyxl.styles import Alignment, Border, Font, Side
    from openpyxl.utils import get_column_letter

    font, border = Font(bold=True), Border(bottom=Side("thin", color="FF8A949C"))
    alignment = Alignment(wrap_text=True, vertical="top")
    for column, heading in enumerate(table.headings, start=1):
        cell = sheet.cell(1, column)
        assert isinstance(cell, Cell)
        fill_text(cell, heading)
        cell.font, cell.border, cell.alignment = font, border, alignment
    for number, row in enumerate(table.rows, start=2):
        for column, value in enumerate(row, start=1):
            if value is None or value == "":
                continue
            cell = sheet.cell(number, column)
            assert isinstance(cell, Cell)
            if isinstance(value, Figure):
                fill_number(cell, value.value)
                cell.number_format = "0." + "0" * value.decimals if value.decimals else "0"
            else:
                fill_text(cell, value[:LONGEST_TEXT])
    sheet.freeze_panes = "B2"
    for column, heading in enumerate(table.headings):
        longest = max((len(_plain(row[column])) for row in table.rows[:_ROWS_LOOKED_AT]), default=0)
        width = min(max(longest + 2, len(heading) + 2, _NARROWEST), _WIDEST)
        sheet.column_dimensions[get_column_letter(column + 1)].width = width
