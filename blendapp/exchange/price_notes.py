"""What titles and footnotes of a table say of all its prices: unit, currency, and the days on which they hold."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator
from dataclasses import dataclass

from blendapp.exchange.list_numbers import date_readings
from blendapp.exchange.price_units import is_price_unit
from blendapp.exchange.price_words import Words, read_heading_words
from blendapp.exchange.tables import CellKind, RawTable, kind_of

_SPEAKS_OF_PRICES = re.compile(
    r"\b(?:prices?|quot(?:es?|ed|ations?)|offers?|rates?|values?|figures)\b|\ball\s+in\b", re.IGNORECASE
)
# A note about something beside the price says nothing of the price itself.
_OF_SOMETHING_ELSE = re.compile(
    r"\b(?:freight|haulage|carriage|surcharges?|add|plus|less|levy|discounts?|commission|storage|fees?|min|minimum|"
    r"deliver(?:y|ies|ing)?|shipments?|deposit|demurrage)\b",
    re.IGNORECASE,
)
# What is said of all prices of a table, wherever in it that stands.
_OF_ALL = re.compile(r"\b(?:all|our|these|the)\s+(?:prices|quotes|offers|quotations)\b|\ball\s+in\b", re.IGNORECASE)
_PRICED_PER = re.compile(r"(?:[$€£¢]|\b[A-Z]{3}\b|\bc(?:en)?ts?\b)\s*(?:/|per\b)")
_CLAUSES = re.compile(r"[;,.](?=\s|$)|\s[-–—]\s")
_ON_TOP = re.compile(
    r"\b(?:freight|haulage|carriage|delivery|transport|surcharges?|levy|levies|handling|bagging|packing)\b",
    re.IGNORECASE,
)
_DATE = (
    r"([0-9]{4}-[0-9]{1,2}-[0-9]{1,2}|[0-9]{1,2}[./-][0-9]{1,2}[./-](?:[0-9]{4}|[0-9]{2})|"
    r"[0-9]{1,2}(?:st|nd|rd|th)?\s+[a-z]{3,9}\.?,?\s+[0-9]{4}|[a-z]{3,9}\.?\s+[0-9]{1,2}(?:st|nd|rd|th)?,?\s+[0-9]{4})"
)
_FROM = re.compile(r"\b(?:from|effective|as\s+of|as\s+from)[ :]+" + _DATE, re.IGNORECASE)
_TO = re.compile(r"\b(?:until|till|to|expir\w+|through)[ :]+(?:on\s+)?" + _DATE, re.IGNORECASE)

MOST_TEXTS_IN_A_TITLE = 3


@dataclass(frozen=True)
class Notes:
    """units: what notes say of all prices, each once. valid_from, valid_to: the texts of their dates, "" if none.

    without_freight: a note about freight or a surcharge, to be looked at with each price.
    """

    units: tuple[Words, ...] = ()
    valid_from: str = ""
    valid_to: str = ""
    without_freight: str = ""


def speaks_of_all(text: str) -> bool:
    """Whether a text within a table is about all of its prices, and not only about those below it."""
    return _OF_ALL.search(text) is not None


def speaks_of_prices(text: str) -> bool:
    return _SPEAKS_OF_PRICES.search(text) is not None


def speaks_of_something_else(text: str) -> bool:
    """Whether a text is about something beside the price: freight, a minimum, a discount."""
    return _OF_SOMETHING_ELSE.search(text) is not None


def read_notes(table: RawTable, rows: Iterable[int], headings: int = 0) -> Notes:
    """The notes among rows: texts that speak of prices, alone in a row or, above the headings, beside one or two more.

    headings: the row, from 0, in which the headings begin.
    """
    units: list[Words] = []
    first = last = freight = ""
    for text in _texts(table, rows, headings):
        if _OF_SOMETHING_ELSE.search(text):
            freight = freight or (text if _ON_TOP.search(text) else "")
            text = "; ".join(part for part in _CLAUSES.split(text) if not _OF_SOMETHING_ELSE.search(part))
        bare = re.match(r"\W*(?:/|per\b)", text) or is_price_unit(text.lstrip("*†‡ "))
        speaks = _SPEAKS_OF_PRICES.search(text) or _PRICED_PER.search(text) or bare
        if speaks:
            words = read_heading_words(f"per {text.lstrip('*†‡/ ')}" if bare else text)
            if words.unit or words.money.currencies or words.dry or words.at_dry:
                units.append(Words(words.money, words.unit, "", words.dry, words.as_fed, words.at_dry))
        if speaks or re.search(r"\bvalid\b|\beffective\b", text, re.IGNORECASE):
            first = first or _found(_FROM, text)
            last = last or _found(_TO, text)
    return Notes(tuple(dict.fromkeys(units)), first, last, freight)


def _texts(table: RawTable, rows: Iterable[int], headings: int) -> Iterator[str]:
    for row in rows:
        cells = [value for value in table.rows[row] if kind_of(value) is not CellKind.BLANK]
        if len(cells) <= (MOST_TEXTS_IN_A_TITLE if row < headings else 1):
            yield from (" ".join(cell.split()) for cell in cells if isinstance(cell, str))


def first_day(text: str) -> str:
    """The text of the day from which words say that a price holds, "" for none."""
    return _found(_FROM, text)


def last_day(text: str) -> str:
    """The text of the day until which words say that a price holds, "" for none."""
    return _found(_TO, text)


def _found(pattern: re.Pattern[str], text: str) -> str:
    found = pattern.search(text)
    return found[1] if found and date_readings(found[1]) else ""
