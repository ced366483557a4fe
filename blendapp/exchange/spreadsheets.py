"""Spreadsheets of every known format as raw tables, formulas by their stored values, macros never run."""

from __future__ import annotations

import io
import re
from typing import Any
from xml.parsers import expat

from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.exchange import xlsx_scan
from blendapp.exchange.files import Format, SourceFile, entities_sentence, refusal
from blendapp.exchange.tables import CellValue, PercentCell, RawTable

# calamine lays a sheet out as a full rectangle, so a cell far out costs memory for everything before it.
GREATEST_AREA = 5_000_000
GREATEST_ROWS_TO_REPEAT = 100_000

_ODS_REPEAT = re.compile(rb'number-(?:rows|columns)-repeated="([0-9]+)"')


def read_spreadsheet(source: SourceFile, formats: bool = False) -> list[RawTable]:
    """Every sheet of a workbook in its order.

    formats: whether number formats are wanted, which takes as long again; they are known for .xlsx and .xlsm only.
    There, percentages are told apart in any case.
    Raises Refused with one sentence if the file cannot be read.
    """
    if source.format is not Format.XLSX:
        return [_table(*sheet) for sheet in _stored(source)]
    scans = _scans(source)
    for name, scan in scans.items():
        if scan.area > GREATEST_AREA:
            sentence = _("The sheet {sheet} reaches to row {row} and column {column}; delete what stands far out.")
            raise refusal(source.name, sentence.format(sheet=name, row=scan.last_row + 1, column=scan.last_column + 1))
    tables = [_table(*sheet) for sheet in _stored(source)]
    for table in tables:
        scan = scans.get(table.sheet, xlsx_scan.SheetScan())
        table.hidden_rows = frozenset(scan.hidden_rows)
        table.hidden_columns = frozenset(scan.hidden_columns)
        for (row, column), mark in scan.marks.items():
            _place(table.rows, row, column, mark)
    if formats or xlsx_scan.has_percent_format(source.data):
        _add_formats(source, tables)
    return tables


def _table(name: str, visible: bool, rows: list[list[CellValue]]) -> RawTable:
    return RawTable(name, rows, visible)


def _place(rows: list[list[CellValue]], row: int, column: int, value: CellValue) -> None:
    while len(rows) <= row:
        rows.append([])
    cells = rows[row]
    cells.extend([None] * (column + 1 - len(cells)))
    cells[column] = value


def _scans(source: SourceFile) -> dict[str, xlsx_scan.SheetScan]:
    try:
        return xlsx_scan.scan_sheets(source.data)
    except xlsx_scan.ForbiddenEntities:
        raise refusal(source.name, entities_sentence()) from None
    except (expat.ExpatError, KeyError, ValueError, OverflowError):
        raise _unreadable(source) from None


def _stored(source: SourceFile) -> list[tuple[str, bool, list[list[CellValue]]]]:
    """Name, visibility and stored values of each sheet, from calamine."""
    import python_calamine

    _guard_repeats(source)
    found: list[tuple[str, bool, list[list[CellValue]]]] = []
    try:
        with python_calamine.load_workbook(io.BytesIO(source.data)) as workbook:
            for sheet in workbook.sheets_metadata:
                if sheet.typ != python_calamine.SheetTypeEnum.WorkSheet:
                    continue
                visible = sheet.visible == python_calamine.SheetVisibleEnum.Visible
                rows: Any = workbook.get_sheet_by_name(sheet.name).to_python(skip_empty_area=False)
                found.append((sheet.name, visible, rows))
    except python_calamine.PasswordError:
        raise refusal(source.name, _("The file is locked with a password; save a copy without one.")) from None
    except (KeyboardInterrupt, SystemExit, MemoryError, Refused):
        raise
    except BaseException:  # a broken file makes the parser raise anything, its own panics included
        raise _unreadable(source) from None
    return found


def _guard_repeats(source: SourceFile) -> None:
    """An .ods cell may say that it repeats a million times; a filled one that does is no table."""
    if source.format is not Format.ODS:
        return
    import zipfile

    try:
        content = zipfile.ZipFile(io.BytesIO(source.data)).read("content.xml")
    except (KeyError, zipfile.BadZipFile):
        raise _unreadable(source) from None
    for row in re.finditer(rb"<table:table-row\b[^>]*?(?:/>|>(.*?)</table:table-row>)", content, re.DOTALL):
        inside = row.group(1) or b""
        if b"office:value" not in inside and b"<text:p" not in inside:
            continue
        repeats = [int(n) for n in _ODS_REPEAT.findall(row.group(0).partition(b">")[0])]
        filled = re.findall(rb"<table:table-cell\b[^>]*office:value-type[^>]*>", inside)
        across = [int(n) for cell in filled for n in _ODS_REPEAT.findall(cell)]
        if max(repeats, default=1) * max(across, default=1) > GREATEST_ROWS_TO_REPEAT:
            sentence = _("The file repeats a filled cell far more often than a table does; ask for a clean copy.")
            raise refusal(source.name, sentence)


def _add_formats(source: SourceFile, tables: list[RawTable]) -> None:
    """Number formats of .xlsx cells that hold a number, from openpyxl."""
    import openpyxl

    try:
        workbook = openpyxl.load_workbook(io.BytesIO(source.data))
        for table in tables:
            sheet = workbook[table.sheet]
            table.formats = {
                (cell.row - 1, cell.column - 1): cell.number_format
                for cell in sheet._cells.values()  # sparse: iterating rows would fill in every blank cell
                if cell.data_type in ("n", "f") and cell.value is not None and cell.number_format != "General"
            }
            for (row, column), number_format in table.formats.items():
                if _shows_percent(number_format):
                    _mark_percent(table.rows, row, column)
    except Exception:  # a broken file makes the parser raise anything
        raise _unreadable(source) from None


def _shows_percent(number_format: str) -> bool:
    """Whether a format shows 0.12 as 12 %; a percent sign in quotes or behind a backslash is only printed."""
    return "%" in re.sub(r'"[^"]*"|\\.', "", number_format)


def _mark_percent(rows: list[list[CellValue]], row: int, column: int) -> None:
    value = rows[row][column] if row < len(rows) and column < len(rows[row]) else None
    if isinstance(value, float):
        rows[row][column] = PercentCell(value)


def _unreadable(source: SourceFile) -> Refused:
    return refusal(source.name, _("The file is damaged and cannot be read as a workbook; open it and save it again."))
