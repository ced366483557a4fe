"""Whose list it may be, as its name or a title over its tables tells: proposed, and never taken by itself. No Qt."""

from __future__ import annotations

import re
from collections.abc import Iterator

from blendapp.domain.library import Library
from blendapp.domain.list_rows import ListReading, SourceSheet, source_of
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold

_TITLE_ROWS, _LEAST_LETTERS = 12, 4


def proposed_supplier(reading: ListReading, library: Library) -> str:
    """The one supplier of the mill that the source or a title names; "" where none is, or several, or it was said."""
    if reading.supplier_id is not None or _was_said(reading, library):
        return ""
    texts = [_words(text) for text in (reading.source, *(text for sheet in reading.sheets for text in _titles(sheet)))]
    names: list[str] = [one.name for one in library.all("supplier")]
    whole = [name for name in names if _words(name) and any(f" {_words(name)} " in f" {text} " for text in texts)]
    # "marsh" for "Marsh & Sons": a name that begins as the source is called, if it is the only one.
    source = _words(reading.source)
    begun = [name for name in names if len(source) >= _LEAST_LETTERS and f"{_words(name)} ".startswith(f"{source} ")]
    found = whole or begun
    return found[0] if len(found) == 1 else ""


def _words(text: str) -> str:
    """The words of a text, without case and punctuation."""
    return " ".join(re.sub(r"[\W_]+", " ", fold(text)).split())


def _was_said(reading: ListReading, library: Library) -> bool:
    """Whether a person said whose it is, for this list or for an earlier one of its source; "none" was said too."""
    return any(one.asked is Asked.SUPPLIER and not one.about for one in reading.answers) or any(
        one.asked is Asked.SUPPLIER and not one.name and source_of(one.source) == source_of(reading.source)
        for one in library.all("synonym"))


def _titles(sheet: SourceSheet) -> Iterator[str]:
    """What stands over the first table of a sheet."""
    if not sheet.tables:
        return
    first = min(min(table.heading_rows, default=table.first_row) for table in sheet.tables)
    for row in range(min(first - 1, _TITLE_ROWS, len(sheet.rows))):
        yield from (text for text in sheet.rows[row] if text)
