"""What words say to come on top of a price: freight, or a surcharge, with its amount where they name one."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, replace
from functools import lru_cache

from blendapp.domain import units
from blendapp.domain.mills import MillInfo
from blendapp.exchange.list_numbers import split_number
from blendapp.exchange.price_terms import FREIGHT, WITH_FREIGHT, WITHOUT_FREIGHT
from blendapp.exchange.price_units import AmbiguousPriceUnit, UnknownPriceUnit, read_price_unit
from blendapp.exchange.price_units_read import TonnePrice
from blendapp.exchange.price_words import read_heading_words, split_money

_CURRENCY = r"(?:[$€£¥]|[A-Z]{2}\$|[A-Z]{3}\b)"
_NUMBER = r"[0-9]+(?:[.,][0-9]+)*"
_PER = r"(?:/|\bper\b)\s*(?:[0-9]+ ?)?[A-Za-z]+(?:\s+tons?\b)?"
_AMOUNT = re.compile(
    rf"{_CURRENCY}\s*{_NUMBER}(?:\s*{_PER})?|{_NUMBER}\s*(?:{_CURRENCY}\s*)?{_PER}|{_NUMBER}\s*{_CURRENCY}"
)
_SURCHARGE = re.compile(
    r"(?:\+|\b(?:plus|add|and)\b)[^;]{0,40}?\b(?:surcharges?|levy|levies|handling|bagging|packing)\b|"
    r"\b(?:surcharges?|levy|levies)\b[^;]{0,40}?\b(?:extra|on top|added|not\s+included)\b", re.IGNORECASE,
)


@dataclass(frozen=True)
class OnTop:
    """per_t: the amount in money of the mill per tonne, None where the words name none that can be reckoned with."""

    text: str
    per_t: float | None


@lru_cache(1024)
def on_top(text: str, mill: MillInfo, is_heading: bool = False) -> OnTop | None:
    """What words say to come on top, None where they say nothing. is_heading: of a column, where a bare amount of
    freight is no note about it."""
    amount = None if is_heading else _per_t(text, mill)
    named = amount is not None and FREIGHT.search(text) and not WITH_FREIGHT.search(text)
    if WITHOUT_FREIGHT.search(text) or named or (not is_heading and _SURCHARGE.search(text)):
        return OnTop(text, amount)
    return None


def _per_t(text: str, mill: MillInfo) -> float | None:
    """The amount of money in a text, per tonne; a text with further figures, as of steps, names none."""
    found = _AMOUNT.findall(text)
    if len(found) != 1 or re.search(r"[0-9]", _AMOUNT.sub("", text)):
        return None
    money, _rest = split_money(found[0])
    number = split_number(found[0])
    words = read_heading_words(found[0])
    if number is None or money.is_foreign(mill.currency) or money.cents or not words.unit:
        return None
    values = set(number[0].readings.values())
    if "," in number[0].digits or "." in number[0].digits:
        # A point or a comma before two figures is the decimal sign; before three it may be either.
        values = {value for value in values if not re.search(r"[.,][0-9]{3}$", number[0].digits)}
    if len(values) != 1:
        return None
    try:
        unit = read_price_unit(words.unit, mill, cwt_is_100_lb=False)
    except (UnknownPriceUnit, AmbiguousPriceUnit):
        return None
    return None if unit.per == units.BUSHEL else units.price_per_t(values.pop() * unit.factor, unit.per)


def with_added(found: TonnePrice, per_t: float) -> TonnePrice:
    """A price with an amount per tonne on top, in its own unit where that is the tonne."""
    if found.per_t is None:
        return found
    if found.per == "t":
        return replace(found, price=found.price + per_t, per_t=found.per_t + per_t)
    return TonnePrice(found.per_t + per_t, "t", None, found.per_t + per_t)


def sum_of(prices: Sequence[TonnePrice | None]) -> TonnePrice | None:
    """A base price and its freight as one, per tonne where their units differ; None where one cannot be reckoned."""
    known = [one for one in prices if one is not None and one.per_t is not None]
    if len(known) < len(prices) or not known:
        return None
    per_t = sum(one.per_t for one in known if one.per_t is not None)
    if len({(one.per, one.bushel_lb) for one in known}) == 1:
        return replace(known[0], price=sum(one.price for one in known), per_t=per_t)
    return TonnePrice(per_t, "t", None, per_t)
