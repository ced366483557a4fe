"""Spreadsheets of every known format as raw tables, formulas by their stored values, macros never run."""

from __future__ import annotations

import io
import os
import pickle
import re
import subprocess
import sys
import zipfile
from collections.abc import Iterator
from contextlib import contextmanager
from xml.parsers import expat

from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.exchange import ods_check, stored_values, xlsx_scan
from blendapp.exchange.files import Format, SourceFile, entities_sentence, locked, refusal
from blendapp.exchange.stored_values import StoredSheet
from blendapp.exchange.tables import CellValue, MergedRange, PercentCell, RawTable, column_number
from blendapp.exchange.xlsx_styles import shows_percent

# calamine lays a sheet out as a full rectangle, so a cell far out costs memory for everything before it.
GREATEST_AREA = 5_000_000
MOST_MEMORY_BYTES = 2_000_000_000
MOST_SECONDS = 15.0


def read_spreadsheet(source: SourceFile) -> list[RawTable]:
    """Every sheet of a workbook in its order.

    Formats, merged cells and what is hidden or struck through are known for .xlsx and .xlsm only.
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
        table.formats, table.struck, table.merged = scan.formats, frozenset(scan.struck), _ranges(scan.merged)
        for (row, column), number_format in scan.formats.items():
            if shows_percent(number_format):
                _mark_percent(table.rows, row, column)
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


def _stored(source: SourceFile) -> list[StoredSheet]:
    """Stored values of every sheet. What was not looked through before is opened in a process of its own.

    A broken file of the binary formats may make the parser ask for all memory, or never come back.
    """
    if source.format is Format.XLSX or getattr(sys, "frozen", False):
        _check_ods(source)
        try:
            with _silent():
                return stored_values.stored_values(source.data)
        except (KeyboardInterrupt, SystemExit, MemoryError):
            raise
        except BaseException:  # a broken file makes the parser raise anything, its own panics included
            raise _unreadable(source) from None
    _check_ods(source)
    command = [sys.executable, "-P", stored_values.__file__, str(MOST_MEMORY_BYTES)]
    try:
        done = subprocess.run(command, input=source.data, capture_output=True, timeout=MOST_SECONDS, check=True)
    except subprocess.TimeoutExpired:
        raise refusal(source.name, _("The file takes too long to read; save it again as .xlsx.")) from None
    except subprocess.CalledProcessError as error:
        if error.returncode == stored_values.LOCKED:
            raise locked(source.name) from None
        raise _unreadable(source) from None
    found: list[StoredSheet] = pickle.loads(done.stdout)  # made by our own script a moment ago
    return found


def _check_ods(source: SourceFile) -> None:
    """Opens no OpenDocument file that is unsound: the parser may not come back from it."""
    if source.format is not Format.ODS:
        return
    try:
        with zipfile.ZipFile(io.BytesIO(source.data)) as archive:
            ods_check.check_content(archive.read("content.xml"))
    except ods_check.SpreadsTooFar:
        sentence = _("The file repeats a filled cell far more often than a table does; ask for a clean copy.")
        raise refusal(source.name, sentence) from None
    except xlsx_scan.ForbiddenEntities:
        raise refusal(source.name, entities_sentence()) from None
    except (expat.ExpatError, KeyError, zipfile.BadZipFile):
        raise _unreadable(source) from None


@contextmanager
def _silent() -> Iterator[None]:
    """Keeps what a panic of the parser prints off standard error, which belongs to our own sentences."""
    try:
        kept = os.dup(2)
    except OSError:  # a window without a terminal has none
        yield
        return
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, 2)
    try:
        yield
    finally:
        os.dup2(kept, 2)
        os.close(kept)
        os.close(nowhere)


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


def _unreadable(source: SourceFile) -> Refused:
    return refusal(source.name, _("The file is damaged and cannot be read as a workbook; open it and save it again."))
