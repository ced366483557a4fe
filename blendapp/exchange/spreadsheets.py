"""Spreadsheets of every known format as raw tables, formulas by their stored values, macros never run.

What parses runs in a process of its own (parse_child); read_spreadsheet alone is for everybody.
"""

from __future__ import annotations

import io
import re
import zipfile
from typing import TYPE_CHECKING
from xml.parsers import expat

from blendapp.exchange import ods_check, stored_values, xlsx_scan
from blendapp.exchange.file_guard import Format, Unfit
from blendapp.exchange.stored_values import StoredSheet
from blendapp.exchange.tables import CellValue, MergedRange, PercentCell, RawTable, column_number
from blendapp.exchange.xlsx_styles import shows_percent

if TYPE_CHECKING:
    from blendapp.exchange.files import SourceFile


def read_spreadsheet(source: SourceFile) -> list[RawTable]:
    """Every sheet of a workbook in its order.

    Formats, merged cells and what is hidden or struck through are known for .xlsx and .xlsm only.
    """
    return list(source.tables)


def parse_spreadsheet(data: bytes, found: Format) -> list[RawTable]:
    """See read_spreadsheet. Raises file_guard.Unfit if the file cannot be read."""
    if found is not Format.XLSX:
        return [_table(sheet) for sheet in _stored(data, found)]
    scans = _scans(data)
    tables = [_table(sheet) for sheet in _stored(data, found)]
    for table in tables:
        scan = scans.get(table.sheet, xlsx_scan.SheetScan())
        table.hidden_rows = frozenset(scan.hidden_rows)
        table.hidden_columns = frozenset(scan.hidden_columns)
        for (row, column), mark in scan.marks.items():
            _place(table.rows, row, column, mark)
        table.comments = scan.comments
        table.formats, table.struck, table.merged = scan.formats, frozenset(scan.struck), _ranges(scan.merged)
        for (row, column), number_format in scan.formats.items():
            if shows_percent(number_format):
                _mark_percent(table.rows, row, column)
    return tables


def _table(sheet: StoredSheet) -> RawTable:
    name, visible, rows = sheet
    return RawTable(name, rows, visible)


def _place(rows: list[list[CellValue]], row: int, column: int, value: CellValue) -> None:
    while len(rows) <= row:
        rows.append([])
    cells = rows[row]
    cells.extend([None] * (column + 1 - len(cells)))
    cells[column] = value


def _scans(data: bytes) -> dict[str, xlsx_scan.SheetScan]:
    try:
        return xlsx_scan.scan_sheets(data)
    except xlsx_scan.ForbiddenEntities:
        raise Unfit("entities") from None
    except xlsx_scan.TooLong:
        raise Unfit("long", count=xlsx_scan.MOST_ROWS) from None
    except xlsx_scan.TooFarOut as far:
        raise Unfit("far", sheet=far.sheet, row=far.row + 1, column=far.column + 1) from None
    except (expat.ExpatError, KeyError, ValueError, OverflowError, zipfile.BadZipFile):
        raise Unfit("broken") from None


def _stored(data: bytes, found: Format) -> list[StoredSheet]:
    if found is Format.ODS:
        _check_ods(data)
    try:
        return stored_values.stored_values(data)
    except (KeyboardInterrupt, SystemExit, MemoryError):
        raise
    except BaseException as error:  # a broken file makes the parser raise anything, its own panics included
        raise Unfit("locked" if type(error).__name__ == "PasswordError" else "broken") from None


def _check_ods(data: bytes) -> None:
    """Opens no OpenDocument file that is unsound: the parser may not come back from it."""
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            ods_check.check_content(archive.read("content.xml"))
    except ods_check.SpreadsTooFar:
        raise Unfit("repeats") from None
    except xlsx_scan.ForbiddenEntities:
        raise Unfit("entities") from None
    except (expat.ExpatError, KeyError, zipfile.BadZipFile):
        raise Unfit("broken") from None


_RANGE = re.compile(r"([A-Z]{1,3})([0-9]{1,7}):([A-Z]{1,3})([0-9]{1,7})")


def _ranges(merged: list[str]) -> tuple[MergedRange, ...]:
    found = map(_RANGE.fullmatch, merged)
    return tuple(
        MergedRange(int(f[2]) - 1, column_number(f[1]), int(f[4]) - 1, column_number(f[3])) for f in found if f
    )


def _mark_percent(rows: list[list[CellValue]], row: int, column: int) -> None:
    value = rows[row][column] if row < len(rows) and column < len(rows[row]) else None
    if isinstance(value, float):
        rows[row][column] = PercentCell(value)
