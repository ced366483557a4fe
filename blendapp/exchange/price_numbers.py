"""The text of a price cell: one number with its currency and unit, or words that say that there is none."""

from __future__ import annotations

import re
from dataclasses import dataclass

from blendapp.exchange.list_numbers import NumberText, plain_text, split_number
from blendapp.exchange.price_words import Money, read_unit_words

# What stands in a price cell where there is no price.
NO_PRICE = frozenset({
    "", "-", "--", "---", "–", "—", "−",
    "n/q", "nq", "n.q.", "call", "n/a", "na", "n.a.", "tba", "tbc", "tbd", "poa", "p.o.a.",
    "on request", "on application", "price on request", "see note", "see notes", "none", "no offer",
    "no quote", "no price", "not quoted", "not available", "unavailable", "sold out", "out of stock", "nil", "x",
    ".", "?", "call for price", "please call", "ask", "nominal", "unquoted", "*",
})


# 205,- and 205.-- are 205.
_NO_CENTS = re.compile(r"(?<=[0-9])[.,]-{1,2}(?![0-9])")


@dataclass(frozen=True)
class PriceText(NumberText):
    """A number with what stands beside it: currency, unit, and whether it is said to be of dry matter."""

    money: Money
    unit: str
    dry: bool = False


def read_price_text(text: str) -> PriceText | None:
    """The number, currency and unit in a text such as "$ 1,234.50 / short ton"; None if it holds anything else."""
    found = split_number(_NO_CENTS.sub("", plain_text(text)))
    if found is None:
        return None
    number, before, after = found
    first, second = read_unit_words(before), read_unit_words(after)
    if first.unit or first.rest or second.rest or first.as_fed or second.as_fed:
        return None
    one, other = first.money.currencies, second.money.currencies
    if one and other and one.isdisjoint(other):
        return None
    money = first.money if first.money.currencies or first.money.cents else second.money
    return PriceText(number.digits, number.negative, money, second.unit, second.dry or first.dry)
