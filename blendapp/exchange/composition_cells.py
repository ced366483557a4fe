"""One cell of a column of results: an amount, nothing, words that say why there is none, or something in doubt."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

from blendapp.domain.ingredients import Basis
from blendapp.domain.names import fold
from blendapp.domain.notation import PLAIN
from blendapp.domain.wording import _
from blendapp.exchange.composition_words import read_heading
from blendapp.exchange.list_cells import number_doubt, place
from blendapp.exchange.list_numbers import (
    DecimalSign,
    decide_decimal_sign,
    plain_text,
    split_number,
    value_in_column,
)
from blendapp.exchange.source_sheets import shown_text
from blendapp.exchange.tables import CellKind, PercentCell, RawTable, kind_of

# What stands for a blank.
_BLANK = frozenset({"", "-", "--", "---", ".", "..", "/"})
# What says that there is no amount; common practice, no source.
_NO_AMOUNT = frozenset({
    "n/a", "na", "n.a.", "n.a", "nd", "n.d.", "n.d", "n/d", "not determined", "not detected", "not tested",
    "not analysed", "not analyzed", "not available", "not measured", "not requested", "nt", "n.t.", "n.t", "n/t", "nr",
    "n.r.", "none", "none detected", "nil", "trace", "traces", "tr", "tr.", "bdl", "b.d.l.", "bld", "lod", "loq",
    "below detection", "below detection limit", "below lod", "below loq", "below limit", "pending", "tba", "tbd",
    "to follow", "*", "**", "?", "x", "negative", "absent",
})


_LONGEST = 200


@dataclass(frozen=True)
class ResultCell:
    """amount: None where there is none or it is in doubt. entered: as shown. unit, factor, basis: said beside it.

    left_open: the words that stand where an amount is unknown, "" for a blank. doubt: the question, "" without one;
    both_ways: the column does not tell its decimal sign. as_text: a number stored as text. wordy: words alone.
    """

    amount: float | None = None
    entered: str = ""
    left_open: str = ""
    doubt: str = ""
    unit: str = ""
    factor: float = 1.0
    basis: Basis | None = None
    as_text: bool = False
    both_ways: bool = False
    wordy: bool = False

    @property
    def is_empty(self) -> bool:
        return self.amount is None and not self.doubt


def result_sign(raw: RawTable, column: int, rows: Iterable[int]) -> DecimalSign | None:
    """The decimal sign of the texts of a column, decided over all of its rows."""
    texts = (raw.cell(row, column) for row in rows)
    found = (split_number(text) for text in texts if isinstance(text, str) and len(text) <= _LONGEST)
    return decide_decimal_sign([one[0] for one in found if one is not None and not one[1].strip(" <>~≤≥")])


def read_result(raw: RawTable, row: int, column: int, sign: DecimalSign | None) -> ResultCell:
    value = raw.cell(row, column)
    kind = kind_of(value)
    if kind is CellKind.BLANK:
        return ResultCell()
    if kind is CellKind.NUMBER:
        assert isinstance(value, float | int)
        return ResultCell(float(value), PLAIN.write_exact(float(value)))
    if isinstance(value, PercentCell):
        return ResultCell(float(f"{value.amount * 100:.12g}"), shown_text(value), unit="%")
    if kind is CellKind.TEXT:
        return _text_cell(str(value).strip(), sign, bool(raw.sheet))
    text = _("The cell {place} holds a date, a time or a truth value; say what the amount is.")
    return ResultCell(entered=shown_text(value), doubt=text.format(place=place(row, column)))


def _text_cell(text: str, sign: DecimalSign | None, spreadsheet: bool) -> ResultCell:
    if len(text) > _LONGEST:
        wordy = not any(letter.isdigit() for letter in text)
        return ResultCell(entered=text[:_LONGEST], doubt=_("A text that long is not one amount."), wordy=wordy)
    plain = fold(plain_text(text))
    if plain in _BLANK:
        return ResultCell(entered=text)
    if plain in _NO_AMOUNT or plain[0] in "<>≤≥":
        return ResultCell(entered=text, left_open=text)
    found = split_number(text)
    doubt = _("“{text}” is not one amount.").format(text=text)
    if found is None:
        return ResultCell(entered=text, doubt=doubt, wordy=True)
    number, before, after = found
    words = read_heading(after.strip())
    if before.strip() or words.name or words.stated or (words.says_unit and not words.unit):
        return ResultCell(entered=text, doubt=doubt)
    value = value_in_column(number, sign)
    if value is None:
        return ResultCell(entered=text, doubt=number_doubt(text, number), both_ways=len(number.readings) == 2)
    return ResultCell(value, text, unit=words.unit, factor=words.factor, basis=words.basis, as_text=spreadsheet)
