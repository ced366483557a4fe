"""What a remark beside one price, a footnote that marks it or a comment on its cell says of it: mostly nothing."""

from __future__ import annotations

import datetime
import re
from dataclasses import dataclass
from functools import lru_cache

from blendapp.domain.list_rows import ColumnRole
from blendapp.domain.mills import MillInfo
from blendapp.exchange.list_numbers import date_readings
from blendapp.exchange.price_columns import Table
from blendapp.exchange.price_extras import on_top
from blendapp.exchange.price_notes import first_day, last_day
from blendapp.exchange.price_units import (
    AmbiguousPriceUnit,
    PriceUnit,
    UnknownPriceUnit,
    is_price_unit,
    plain_words,
    read_price_unit,
    unit_choices,
)
from blendapp.exchange.price_words import NO_MONEY, Money, read_heading_words, split_money
from blendapp.exchange.tables import CellKind, RawTable, kind_of

_HEADINGS = frozenset({
    "note", "notes", "remark", "remarks", "rem", "comment", "comments", "info", "information", "status", "availability",
    "observation", "observations", "message", "conditions", "text",
})
# "4)", "*" or "²" behind a name, and before the words that go with it.
_MARK = r"\*+|[†‡§#]+|[¹²³⁴⁵]|[(\[]?[0-9a-z][)\]]"
FOOTNOTE = re.compile(rf"\s*({_MARK})\s*(?=\S)")
_MARKED = re.compile(rf"({_MARK})\s*$")

_NOT_TO_USE = re.compile(
    r"\b(?:do\s+not|don[’']?t|not\s+to\s+be)\s+(?:use|order|book|sell)\b|\b(?:old|wrong|last\s+(?:week|month)[’']?s)\s+"
    r"(?:price|quote|rate)|\b(?:void|cancell?ed|withdrawn|discontinued|delisted|obsolete|superseded|incorrect|expired|"
    r"indicative|provisional|estimated?|approx\w*|sold\s+out|out\s+of\s+stock|unavailable|no\s+longer|tbc|tba|"
    r"to\s+be\s+confirmed|typing\s+error|misprint)\b|\bnot\s+(?:available|valid|current|quoted|confirmed)\b|"
    r"\b(?:now|new\s+price|revised|corrected|amended|should\s+(?:be|read)|changed\s+to)\b\D{0,12}[0-9]",
    re.IGNORECASE,
)
_REDUCED = re.compile(r"\b(?:discount|rebate|less(?!\s+than)|minus|deduct)\b[^;]*[0-9]", re.IGNORECASE)
_OF_GOODS = re.compile(r"\b(?:moisture|protein|admixture|ash|oil|dm|fib(?:re|er)|screenings)\b|[0-9]\s*%", re.I)
# When goods can be had is no day on which a price holds.
_OF_DELIVERY = re.compile(
    r"\b(?:availab\w+|deliver\w*|ship\w*|load\w*|collect\w*|arriv\w*|eta|crop|harvest|stock|position)\b", re.IGNORECASE
)
_SOME_DAY = re.compile(
    r"(?:^|\b(?:valid|price|prices|effective)\s+)(?:only\s+)?(?:from|until|till|to|up\s+to|expir\w+)\s+(?:on\s+|the\s+|end\s+"
    r"(?:of\s+)?)?(?:[0-9]|jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec|next|mon|tue|wed|thu|fri)", re.IGNORECASE,
)
_DENSITY = re.compile(r"(?<![a-z])(?:m?g|µg|kg|mj|kcal|iu|ml|l|lb|oz)\s*(?:/|\bper\b)\s*\w+", re.IGNORECASE)
_OF_DRY = re.compile(r"\b(?:price|prices|priced|quoted|paid|per|basis)\b|/", re.IGNORECASE)


@dataclass(frozen=True)
class Remark:
    """unit, money, dry, as_fed: what the words say the price is. stops: that it is perhaps not to be used.

    first, last: days on which the price holds.
    """

    unit: str = ""
    money: Money = NO_MONEY
    dry: bool = False
    as_fed: bool = False
    stops: bool = False
    first: datetime.date | None = None
    last: datetime.date | None = None

    def is_in_doubt(self, unit: PriceUnit | None, dry: bool, cents: bool, mill: MillInfo) -> bool:
        """Whether the price, in its unit and basis as it was read, may not be what the words say."""
        if self.stops or self.money.is_foreign(mill.currency) or (self.money.cents and not cents):
            return True
        if (self.dry and not dry) or (self.as_fed and dry):
            return True
        return bool(self.unit) and unit is not None and not _may_mean(self.unit, unit, mill)


def _only_day(text: str) -> datetime.date | None:
    """The day in a text, None where it holds none or may be two."""
    days = set(date_readings(text).values())
    return days.pop() if len(days) == 1 else None


def _may_mean(words: str, unit: PriceUnit, mill: MillInfo) -> bool:
    try:
        return read_price_unit(words, mill, cwt_is_100_lb=False) == unit
    except AmbiguousPriceUnit:
        return any(read_price_unit(one, mill, True) == unit for one in unit_choices(plain_words(words)))
    except UnknownPriceUnit:
        return False


@lru_cache(4096)
def read_remark(text: str, mill: MillInfo) -> Remark:
    """What words beside a price say of it."""
    plain = _DENSITY.sub(" ", text)
    words = read_heading_words(plain)
    money, _rest = split_money(plain)
    if money.sign.isalpha() and not money.sign.isupper() and money.sign.casefold() in ("fr", "kr"):
        money = NO_MONEY
    unit = words.unit if not re.search(r"\b(?:bags?|sacks?|totes?|drums?)\b", words.unit) else ""
    clauses = re.split(r"[,;()]", plain)
    unit = unit or next((part.strip() for part in clauses if is_price_unit(split_money(part)[1])
                         and not re.match(r"[0-9]", part.strip())), "")
    if unit:
        unit = split_money(unit)[1].strip()
    dry = words.dry and bool(_OF_DRY.search(text) or re.fullmatch(r"\W*(?:dm|dry[ -]?matter)\W*", text, re.IGNORECASE))
    dated, first, last, unclear = not _OF_DELIVERY.search(text), None, None, False
    if dated:
        said = first_day(text), last_day(text)
        first, last = map(_only_day, said)
        unclear = any(one and day is None for one, day in zip(said, (first, last), strict=True))
        unclear = unclear or (not any(said) and _SOME_DAY.search(text) is not None)
    reduced = _REDUCED.search(text) is not None and not _OF_GOODS.search(text)
    stops = _NOT_TO_USE.search(text) is not None or on_top(text, mill) is not None or reduced or unclear
    return Remark(unit, money, dry or bool(words.at_dry), words.as_fed, stops, first, last)


def remark_columns(raw: RawTable, table: Table, body: range) -> tuple[int, ...]:
    """The columns in which remarks stand: headed so, or without a heading and with words in them."""
    prices = {column.index for column in table.prices}
    headed = [
        index for index, heading in table.headings.items()
        if index not in prices and table.roles.get(index) in (ColumnRole.NOTE, ColumnRole.OTHER)
        and _HEADINGS & set(re.sub(r"[^a-z]+", " ", heading.casefold()).split())
    ]
    width = max((len(raw.rows[row]) for row in body), default=0)
    bare = [index for index in range(width) if index not in table.headings and index not in table.roles
            and index not in prices and index != table.name
            and any(kind_of(raw.cell(row, index)) is CellKind.TEXT for row in body)]
    return tuple(sorted({*headed, *bare}))


def read_footnotes(raw: RawTable, body: range) -> dict[str, tuple[int, str]]:
    """By its mark each footnote of a table, with its row: words alone in a row, behind a mark."""
    found: dict[str, tuple[int, str]] = {}
    for row in body:
        cells = [value for value in raw.rows[row] if kind_of(value) is not CellKind.BLANK]
        text = " ".join(str(cells[0]).split()) if len(cells) == 1 and isinstance(cells[0], str) else ""
        mark = FOOTNOTE.match(text) if text else None
        if mark is not None:
            found.setdefault(mark[1].strip("()[]"), (row, text[mark.end():]))
    return found


def mark_of(text: str) -> str:
    """The mark behind a name, a price or a heading that leads to a footnote, "" without one."""
    found = _MARKED.search(text)
    return found[1].strip("()[]") if found else ""
