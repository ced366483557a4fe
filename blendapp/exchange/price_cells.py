"""One cell of a price column: a price with what stands beside it, nothing, or something that is no price."""

from __future__ import annotations

import math
from collections.abc import Iterable
from dataclasses import dataclass, replace

from blendapp.domain.names import fold
from blendapp.domain.notation import PLAIN
from blendapp.domain.wording import _
from blendapp.exchange.list_cells import number_doubt, place
from blendapp.exchange.list_numbers import DecimalSign, decide_decimal_sign, value_in_column
from blendapp.exchange.price_columns import PriceColumn
from blendapp.exchange.price_numbers import NO_PRICE, read_price_text
from blendapp.exchange.price_words import NO_MONEY, NO_WORDS, Money, words_of_format
from blendapp.exchange.tables import CellKind, PercentCell, RawTable, kind_of

# Nobody pays so much for any unit; beyond it sums are no longer exact.
MOST_PAID = 1e15


@dataclass(frozen=True)
class PriceCell:
    """value: the price, None where there is none or it is in doubt. empty: says that there is none. entered: as shown.

    doubt: the question, "" without one. both_ways: the column does not tell its decimal sign.
    unit, money: what stands beside the number. as_text: a number stored as text. proposed: an answer to the doubt.
    """

    value: float | None = None
    empty: bool = False
    entered: str = ""
    doubt: str = ""
    money: Money = NO_MONEY
    unit: str = ""
    as_text: bool = False
    both_ways: bool = False
    dry: bool = False
    wordy: bool = False
    proposed: str = ""


def column_sign(table: RawTable, column: int, rows: Iterable[int]) -> DecimalSign | None:
    """The decimal sign of the texts of a column, decided over all of its rows."""
    texts = (table.cell(row, column) for row in rows)
    found = (read_price_text(text) for text in texts if isinstance(text, str) and fold(text) not in NO_PRICE)
    return decide_decimal_sign([text for text in found if text is not None])


def read_price_cell(table: RawTable, row: int, column: PriceColumn, sign: DecimalSign | None) -> PriceCell:
    value = table.cell(row, column.index)
    kind = kind_of(value)
    if kind is CellKind.BLANK:
        return PriceCell(empty=True)
    if kind is CellKind.TEXT:
        found = _text_cell(str(value).strip(), sign, spreadsheet=bool(table.sheet))
        if found.value is None or (row, column.index) not in table.struck:
            return found
        # Which of its figures are struck through is not told, so that they may be two prices.
        text = _("“{text}” is struck through, perhaps in part; say what the price is.").format(text=found.entered)
        return replace(found, value=None, doubt=text)
    if kind is CellKind.NUMBER:
        assert isinstance(value, float | int)
        number_format = table.formats.get((row, column.index), "")
        words = words_of_format(number_format) if number_format else NO_WORDS
        money = words.money
        if not abs(value) < MOST_PAID:
            shown = PLAIN.write_exact(float(value)) if math.isfinite(value) else str(value)
            return PriceCell(entered=shown, doubt=_("“{text}” is not one price.").format(text=shown), money=money)
        return PriceCell(
            float(value), entered=PLAIN.write_exact(float(value)), money=money, unit=words.unit, dry=words.dry
        )
    text = _("The cell {place} holds a date, a time, a percentage or a truth value; say what the price is.")
    entered = f"{value.amount:%}" if isinstance(value, PercentCell) else str(value)
    return PriceCell(entered=entered, doubt=text.format(place=place(row, column.index)))


def read_merged_price(
    table: RawTable, row: int, column: PriceColumn, sign: DecimalSign | None, name_column: int | None
) -> PriceCell:
    """As read_price_cell; a price that stands in the row of another name and is merged over this one is in doubt."""
    found = read_price_cell(table, row, column, sign)
    top = table.top_of_merged(row, column.index)
    if top == row or not found.empty or found.entered or name_column is None:
        return found
    above = read_price_cell(table, top, column, sign)
    if above.value is None or kind_of(table.cell(row, name_column)) is CellKind.BLANK:
        return found
    text = _("The price {price} in {place} is merged over this row too; say whether it holds here.")
    said = text.format(price=above.entered, place=place(top, column.index))
    return replace(above, doubt=said, proposed=PLAIN.write_exact(above.value))


def _text_cell(text: str, sign: DecimalSign | None, spreadsheet: bool) -> PriceCell:
    if fold(text) in NO_PRICE:
        return PriceCell(empty=True, entered=text)
    found = read_price_text(text)
    if found is None:
        wordy = not any(letter.isdigit() for letter in text)
        return PriceCell(entered=text, doubt=_("“{text}” is not one price.").format(text=text), wordy=wordy)
    value = value_in_column(found, sign)
    if value is None:
        return PriceCell(entered=text, doubt=number_doubt(text, found), money=found.money, unit=found.unit,
                         both_ways=len(found.readings) == 2)
    return PriceCell(
        value, entered=text, money=found.money, unit=found.unit, as_text=spreadsheet, dry=found.dry
    )
