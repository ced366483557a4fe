"""What calamine does not tell of an .xlsx sheet: errors, formulas without a stored value, hidden rows, its extent."""

from __future__ import annotations

import io
import posixpath
import re
import zipfile
from dataclasses import dataclass, field

from blendapp.exchange.tables import NO_STORED_VALUE, ErrorCell, NoStoredValue, column_number
from blendapp.exchange.xlsx_comments import read_comments
from blendapp.exchange.xlsx_parser import ForbiddenEntities, careful_parser
from blendapp.exchange.xlsx_styles import CellStyles, is_set, read_struck_texts, read_styles

# calamine lays a sheet out as a full rectangle, so a cell far out costs memory for everything before it.
GREATEST_AREA = 5_000_000
# What spreadsheets hold.
MOST_COLUMNS = 16_384
# Only those of headings are looked at, and they come first.
MOST_MERGED = 20_000
# Filled rows of one sheet, twice those of the longest list: looking further would take a second for every 50,000.
MOST_ROWS = 100_000

__all__ = ["ForbiddenEntities", "SheetScan", "TooFarOut", "TooLong", "careful_parser", "scan_sheets", "sheet_parts"]

_REFERENCE = re.compile(r"([A-Z]{1,3})([0-9]{1,7})")
_ROW = re.compile(r"[0-9]{1,7}")
_COLUMNS: dict[str, int] = {}


class TooFarOut(Exception):
    """A cell of a sheet stands so far out that no memory would hold everything before it; row, column from 0."""

    def __init__(self, row: int, column: int) -> None:
        super().__init__(row, column)
        self.row, self.column, self.sheet = row, column, ""


class TooLong(Exception):
    """A sheet has more filled rows than any table of a mill."""


@dataclass
class SheetScan:
    """marks: cells, by (row, column) from 0, that hold no value. last_row, last_column: of cells that hold anything.

    formats: number formats that tell something, of cells with a number. struck: filled cells that are struck through,
    wholly or in part.
    merged: ranges of merged cells as the file writes them, B1:C1. comments: texts that are attached to cells.
    """

    marks: dict[tuple[int, int], ErrorCell | NoStoredValue] = field(default_factory=dict)
    last_row: int = -1
    last_column: int = -1
    hidden_rows: set[int] = field(default_factory=set)
    hidden_columns: set[int] = field(default_factory=set)
    formats: dict[tuple[int, int], str] = field(default_factory=dict)
    struck: set[tuple[int, int]] = field(default_factory=set)
    merged: list[str] = field(default_factory=list)
    comments: dict[tuple[int, int], str] = field(default_factory=dict)


def scan_sheets(data: bytes) -> dict[str, SheetScan]:
    """Each sheet of an .xlsx file by name.

    Raises ForbiddenEntities, TooFarOut, expat.ExpatError, KeyError, zipfile.BadZipFile.
    """
    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        parts = {part.filename for part in archive.infolist()}
        found: dict[str, SheetScan] = {}
        by_name = sheet_parts(archive)
        styles = read_styles(archive)
        texts = {part for part in parts if part.startswith("xl/") and part.casefold().endswith("sharedstrings.xml")}
        struck = frozenset(place for part in texts for place in read_struck_texts(archive.read(part)))
        for name, part in by_name.items():
            try:
                found[name] = _scan(archive.read(part), styles, struck) if part in parts else SheetScan()
            except TooFarOut as far:
                far.sheet = name
                raise
            found[name].comments = read_comments(archive, part)
        for part in parts - set(by_name.values()) - texts:
            if part.startswith("xl/") and part.endswith((".xml", ".rels")):
                careful_parser().Parse(archive.read(part), True)  # so that no other parser meets a broken part
        return found


def sheet_parts(archive: zipfile.ZipFile) -> dict[str, str]:
    """The part of the archive behind each sheet name, in the order of the workbook."""
    targets: dict[str, str] = {}
    names: list[tuple[str, str]] = []

    def relation(tag: str, attributes: dict[str, str]) -> None:
        if _local(tag) == "Relationship":
            targets[attributes["Id"]] = attributes["Target"]

    def sheet(tag: str, attributes: dict[str, str]) -> None:
        if _local(tag) == "sheet":
            key = next((value for name, value in attributes.items() if _local(name) == "id"), "")
            names.append((attributes.get("name", ""), key))

    _parse(archive.read("xl/_rels/workbook.xml.rels"), relation)
    _parse(archive.read("xl/workbook.xml"), sheet)
    return {name: _resolved(targets[key]) for name, key in names if key in targets}


def _resolved(target: str) -> str:
    return posixpath.normpath(target.lstrip("/") if target.startswith("/") else "xl/" + target)


def _local(tag: str) -> str:
    return tag.rpartition(":")[2]


def _parse(data: bytes, start: object) -> None:
    parser = careful_parser()
    parser.StartElementHandler = start  # type: ignore[assignment]
    parser.Parse(data, True)


def _column(letters: str) -> int:
    found = _COLUMNS.get(letters)
    if found is None:
        found = _COLUMNS[letters] = column_number(letters)
    return found


class _Cells:
    """The handlers of one sheet; a class, since the parser calls them a few hundred thousand times."""

    def __init__(self, styles: CellStyles, struck_texts: frozenset[int]) -> None:
        self.scan = SheetScan()
        self.styles, self.telling = styles, styles.telling
        self.read_kinds = ("e", "s") if struck_texts else ("e",)
        self.struck_texts = struck_texts
        self.struck_run = False
        self.style = "0"
        self.row, self.column = -1, -1
        self.filled_row, self.filled_rows = -1, 0
        self.kind = ""
        self.formula = self.holds = self.in_value = False
        self.text: list[str] = []

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        if ":" in tag:
            tag = tag.rpartition(":")[2]
        if tag == "c":
            place = attributes.get("r")
            found = _REFERENCE.fullmatch(place) if place else None
            if found:
                self.column, self.row = _column(found[1]), int(found[2]) - 1
            else:
                self.column += 1
            self.kind = attributes.get("t", "")
            self.style = attributes.get("s", "0")
            self.formula = self.holds = self.struck_run = False
            self.text.clear()
        elif tag in ("v", "is"):
            self.in_value = True
        elif tag == "f":
            self.formula = True
        elif tag == "row":
            number = attributes.get("r", "")
            self.row = int(number) - 1 if _ROW.fullmatch(number) else self.row + 1
            self.column = -1
            if attributes.get("hidden") in ("1", "true"):
                self.scan.hidden_rows.add(self.row)
        elif tag == "strike" and is_set(attributes):
            self.struck_run = True
        elif tag == "mergeCell" and len(self.scan.merged) < MOST_MERGED:
            self.scan.merged.append(attributes.get("ref", ""))
        elif tag == "col" and attributes.get("hidden") in ("1", "true"):
            first, last = int(attributes.get("min", 1)), int(attributes.get("max", 1))
            self.scan.hidden_columns.update(range(first - 1, min(last, 16384)))

    def characters(self, text: str) -> None:
        if self.in_value:
            self.holds = True
            if self.kind in self.read_kinds:
                self.text.append(text)

    def end(self, tag: str) -> None:
        if ":" in tag:
            tag = tag.rpartition(":")[2]
        if tag == "c":
            if not self.holds and not self.formula:
                return
            scan = self.scan
            if self.row != self.filled_row:
                self.filled_row, self.filled_rows = self.row, self.filled_rows + 1
                if self.filled_rows > MOST_ROWS:
                    raise TooLong
            if self.row > scan.last_row or self.column > scan.last_column:
                scan.last_row = max(scan.last_row, self.row)
                scan.last_column = max(scan.last_column, self.column)
                area = (scan.last_row + 1) * (scan.last_column + 1)
                if area > GREATEST_AREA or scan.last_column >= MOST_COLUMNS:
                    raise TooFarOut(scan.last_row, scan.last_column)
            if self.struck_run or (self.struck_texts and self.kind == "s" and self._is_struck_text()):
                scan.struck.add((self.row, self.column))
            if self.kind == "e":
                scan.marks[self.row, self.column] = ErrorCell("".join(self.text).strip() or "#ERROR")
            elif self.formula and not self.holds and self.kind != "str":
                scan.marks[self.row, self.column] = NO_STORED_VALUE
            elif self.style in self.telling:
                self._take_style()
        elif tag in ("v", "is"):
            self.in_value = False

    def _is_struck_text(self) -> bool:
        place = "".join(self.text).strip()
        return place.isascii() and place.isdigit() and int(place) in self.struck_texts

    def _take_style(self) -> None:
        place = self.row, self.column
        if self.style in self.styles.struck:
            self.scan.struck.add(place)
        if self.kind in ("", "n") and self.style in self.styles.formats:
            self.scan.formats[place] = self.styles.formats[self.style]


def _scan(data: bytes, styles: CellStyles, struck_texts: frozenset[int]) -> SheetScan:
    cells = _Cells(styles, struck_texts)
    parser = careful_parser()
    parser.StartElementHandler = cells.start
    parser.EndElementHandler = cells.end
    parser.CharacterDataHandler = cells.characters
    parser.Parse(data, True)
    return cells.scan
