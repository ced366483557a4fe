"""Delimited text as a raw table: encoding and separator are found from the content."""

from __future__ import annotations

import codecs
import csv
import io
from collections import Counter

from blendapp.domain.wording import _
from blendapp.exchange.files import SourceFile, refusal, utf16_without_mark
from blendapp.exchange.tables import NO_STORED_VALUE, CellValue, ErrorCell, RawTable

GREATEST_TEXT_BYTES = 20_000_000
SEPARATORS = ("\t", ";", ",")
_LINES_LOOKED_AT = 200
# What spreadsheets hold.
MOST_COLUMNS = 16_384
_ERRORS = frozenset({"#N/A", "#REF!", "#VALUE!", "#DIV/0!", "#NAME?", "#NULL!", "#NUM!", "#NV", "#SPILL!", "#CALC!"})


def read_delimited(source: SourceFile) -> RawTable:
    """The text as a table without a sheet name; a row is the line of the text on which it begins.

    Raises Refused if the file is too large or too wide.
    """
    if len(source.data) > GREATEST_TEXT_BYTES:
        raise refusal(source.name, _("The text is too large to be a table of a mill; keep only the rows needed."))
    text = decode(source.data)
    separator = find_separator(text)
    try:
        rows = _rows(text, separator, csv.QUOTE_MINIMAL)
    except csv.Error:  # a quote that is never closed would swallow every line after it
        try:
            rows = _rows(text, separator, csv.QUOTE_NONE)
        except csv.Error:
            sentence = _("A cell of the text is too long to be one of a table; check the file.")
            raise refusal(source.name, sentence) from None
    widest = max(map(len, rows), default=0)
    if widest > MOST_COLUMNS:
        sentence = _("A row of the text has {count} columns, far more than a table; check how its cells are separated.")
        raise refusal(source.name, sentence.format(count=widest))
    return RawTable("", rows, hidden_rows=frozenset(), hidden_columns=frozenset())


def decode(data: bytes) -> str:
    """utf-8, with a mark or without, or utf-16, or, where neither fits, cp1252."""
    if data.startswith((codecs.BOM_UTF16_LE, codecs.BOM_UTF16_BE)):
        return data.decode("utf-16", "replace")
    unmarked = utf16_without_mark(data[:65536]) if b"\x00" in data[:65536] else None
    if unmarked:
        return data.decode(unmarked, "replace")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError:
        return data.decode("cp1252", "replace")


def find_separator(text: str) -> str:
    """The separator that cuts most lines into the same number of cells, at least two; of equals the one with most."""
    lines = "".join(text.splitlines(keepends=True)[:_LINES_LOOKED_AT])
    best, best_score = ",", (0, 0)
    for separator in SEPARATORS:
        try:
            reader = csv.reader(io.StringIO(lines, newline=""), delimiter=separator)
            widths = [len(cells) for cells in reader if any(cells)]
        except csv.Error:
            continue
        counts = Counter(width for width in widths if width > 1)
        if not counts:
            continue
        width, count = max(counts.items(), key=lambda item: (item[1], item[0]))
        if (count, width) > best_score:
            best, best_score = separator, (count, width)
    return best


def _rows(text: str, separator: str, quoting: int) -> list[list[CellValue]]:
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=separator, quoting=quoting, strict=True)  # type: ignore[arg-type]
    rows: list[list[CellValue]] = []
    for cells in reader:
        rows.append([_cell(cell) for cell in cells])
        # Lines inside a quoted cell count for the editor, so that the next row keeps its number.
        rows.extend([] for _line in range(reader.line_num - len(rows)))
    return rows


def _cell(text: str) -> CellValue:
    plain = text.strip()
    if plain.startswith("#") and plain.upper() in _ERRORS:
        return ErrorCell(plain)
    return NO_STORED_VALUE if plain.startswith("=") and len(plain) > 1 else text
