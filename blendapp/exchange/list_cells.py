"""Cells of a list: where they stand, and those that hold an error instead of a value."""

from __future__ import annotations

import re

from blendapp.domain.notation import PLAIN
from blendapp.domain.wording import _
from blendapp.exchange.list_numbers import NumberText
from blendapp.exchange.tables import CellKind, CellValue, RawTable, column_letters, kind_of

_LONG = 240
_LONG_QUOTE = re.compile(r"(“[^”]{80})[^”]+")


def place(row: int, column: int) -> str:
    """A cell as the spreadsheet names it: row 0, column 1 is B1."""
    return f"{column_letters(column)}{row + 1}"


def error_in(value: CellValue, row: int, column: int) -> str:
    """The sentence for a cell that holds an error or a formula without a stored value, or nothing."""
    kind = kind_of(value)
    if kind is CellKind.ERROR:
        text = _("The cell {place} holds the error {error}; correct it in the list.")
        return text.format(place=place(row, column), error=getattr(value, "text", ""))
    if kind is CellKind.NO_STORED_VALUE:
        text = _("The formula in the cell {place} has no stored result; open the list, let it calculate, and save it.")
        return text.format(place=place(row, column))
    return ""


def shortened(sentence: str) -> str:
    """A sentence in which what the list says is cut off after some words, where it says very much."""
    return _LONG_QUOTE.sub(r"\1…", sentence) if len(sentence) > _LONG else sentence


def holds_number(value: CellValue) -> bool:
    """Whether a cell holds a number, a day, or a text with a digit."""
    kind = kind_of(value)
    if kind is CellKind.TEXT:
        return any(letter.isdigit() for letter in str(value))
    return kind not in (CellKind.BLANK, CellKind.BOOLEAN)


def cell_text(value: CellValue) -> str:
    """A text or a number as the person sees it; "" for anything else."""
    kind = kind_of(value)
    if kind is CellKind.TEXT:
        return " ".join(str(value).split())
    if kind is CellKind.NUMBER:
        assert isinstance(value, float | int)
        return PLAIN.write_exact(float(value))
    return ""


def first_text(raw: RawTable, row: int) -> str:
    """What stands first in a row, as the person sees it."""
    return next((text for text in map(cell_text, raw.rows[row]) if text), "")


def number_doubt(text: str, found: NumberText) -> str:
    """The sentence for a number that its column does not tell how to read."""
    values = [PLAIN.write_exact(value) for value in found.readings.values()]
    if len(values) == 2:
        sentence = _("“{text}” may be {first} or {second}, and the column does not tell; say which.")
        return sentence.format(text=text, first=values[0], second=values[1])
    return _("“{text}” is not written as the other numbers of its column are; say what it is.").format(text=text)
