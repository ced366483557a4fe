"""A list as it arrives: the sheets of its file that are to be read, and what is to be said of the file as a whole."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from blendapp.domain.list_rows import source_of
from blendapp.domain.names import fold
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.wording import _
from blendapp.exchange.delimited import read_delimited
from blendapp.exchange.files import Format, SourceFile, open_source, refusal
from blendapp.exchange.list_source import find_source
from blendapp.exchange.spreadsheets import read_spreadsheet
from blendapp.exchange.suggestions import did_you_mean
from blendapp.exchange.tables import CellKind, RawTable, column_letters, kind_of

# Far above any list of a mill; every row and every heading costs time.
MOST_ROWS = 50_000
MOST_COLUMNS = 300


@dataclass(frozen=True)
class OpenedList:
    """tables: the sheets to be read, in the order of the file. notes: about the file as a whole.

    source: whom its answers are remembered for.
    """

    file: SourceFile
    tables: tuple[RawTable, ...]
    notes: tuple[str, ...]
    source: str


def open_list(path: str | Path, sheet: str | None, source: str = "") -> OpenedList:
    """Opens a list. sheet: None takes every visible sheet. source: whom it is from, "" for list_source.find_source.

    Raises Refused with one sentence for a file that cannot be read, or that has no sheet of that name.
    """
    file = open_source(path)
    notes: list[str] = []
    tables = _chosen(_tables(file), sheet, file.name, notes)
    _check_extent(tables, file.name)
    if file.format in (Format.XLS, Format.XLSB, Format.ODS):
        notes.append(_("What is hidden, struck through or in error cannot be told in this file; check it by eye."))
    if source:
        return OpenedList(file, tuple(tables), tuple(notes), source_of(source))
    source, note = find_source(Path(path), tables)
    return OpenedList(file, tuple(tables), (*notes, *filter(None, [note])), source)


def _check_extent(tables: list[RawTable], file: str) -> None:
    """Cuts off blank ends of rows, and refuses what is no list: looking through it would take minutes."""
    filled = 0
    for table in tables:
        for number, cells in enumerate(table.rows, start=1):
            while cells and kind_of(cells[-1]) is CellKind.BLANK:
                cells.pop()
            filled += bool(cells)
            if len(cells) > MOST_COLUMNS:
                text = _("Row {row} reaches to column {column}, further than lists do; keep only the columns needed.")
                raise refusal(file, text.format(row=number, column=column_letters(len(cells) - 1)))
    if not filled:
        raise refusal(file, _("No cell is filled where a list is looked for; check that this is the right file."))
    if filled > MOST_ROWS:
        text = _("The list has {count} filled rows, more than a mill buys by; keep only those needed.")
        raise refusal(file, text.format(count=filled))


def _tables(source: SourceFile) -> list[RawTable]:
    return [read_delimited(source)] if source.format is Format.TEXT else read_spreadsheet(source)


def _chosen(tables: list[RawTable], sheet: str | None, file: str, notes: list[str]) -> list[RawTable]:
    if sheet is None:
        hidden = [table.sheet for table in tables if not table.visible]
        if hidden:
            names = ", ".join(f"“{name}”" for name in hidden)
            notes.append(_("These sheets are hidden and were not read: {names}.").format(names=names))
        return [table for table in tables if table.visible]
    found = [table for table in tables if table.sheet == sheet] or [
        table for table in tables if fold(table.sheet) == fold(sheet)
    ]
    if not found:
        text = _("There is no sheet “{sheet}”.").format(sheet=sheet)
        known = [table.sheet for table in tables if table.sheet]
        if not known:
            text = _("The file is a text and has no sheets; leave the sheet out.")
        elif not (likely := did_you_mean(sheet, known)):
            text += " " + _("It has {names}.").format(names=", ".join(f"“{name}”" for name in known))
        else:
            text += likely
        raise Refused(Problem(text, Place(file)))
    return found[:1]
