"""Where the table of a price list is: its heading row, and what each column holds."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, field
from functools import lru_cache
from typing import TYPE_CHECKING

from blendapp.domain.list_rows import ColumnRole
from blendapp.exchange.list_table import ListTable
from blendapp.exchange.price_words import Words, read_heading_words, split_dry

if TYPE_CHECKING:
    from blendapp.exchange.price_sides import Side

_NAME_WORDS = frozenset({
    "ingredient", "ingredients", "commodity", "commodities", "product", "products", "material", "materials",
    "item", "items", "description", "name", "feed", "feedstuff", "feedstuffs", "goods", "article", "articles",
    "grain", "grains",
})
_PRICE_WORDS = frozenset({
    "price", "prices", "cost", "quote", "quoted", "quotation", "offer", "offers", "offered", "rate", "spot",
    "asking",
})
_SUM_WORDS = frozenset({
    "delivered", "total", "sum", "cif",
})
_FREIGHT_WORDS = frozenset({
    "freight", "haulage", "transport", "carriage", "delivery",
})
_OLD_WORDS = frozenset({
    "old", "previous", "prior", "last", "change", "changed", "difference", "diff", "forecast", "budget",
    "average", "target",
})
_UNIT_HEADINGS = frozenset({
    "unit", "units", "per", "uom", "price per", "price unit", "unit of measure", "pricing unit", "per unit",
    "unit of price",     "measure", "priced per",
})
_CURRENCY_HEADINGS = frozenset({"currency", "ccy", "cur", "curr", "price currency", "currency code"})
_FROM_HEADINGS = frozenset({
    "valid from", "date", "from", "effective", "effective date", "effective from", "price date", "quote date", "as of",
    "start", "start date", "valid", "from date", "date from",
})
_TO_HEADINGS = frozenset({
    "valid to", "valid until", "until", "expires", "expiry", "expiry date", "valid till", "end", "end date", "to",
    "date to", "to date", "expiration",
})
_NOTE_HEADINGS = frozenset({
    "note", "notes", "remark", "remarks", "comment", "comments", "origin", "supplier", "code", "sku",
    "item no", "item number", "product code", "place", "location", "port", "site", "depot", "store", "destination",
    "delivered to", "deliver to", "delivery to", "delivery site", "quality", "specification", "spec", "class",
})
_PACK_HEADINGS = frozenset({
    "bag weight", "pack size", "pack", "packing", "bag size", "pack weight", "bag", "packaging", "bag kg", "kg bag",
})
_TERMS_HEADINGS = frozenset({"terms", "basis", "price basis", "delivery terms", "terms of delivery", "incoterm"})
_ADJUSTMENT_WORDS = frozenset({"discount", "discounts", "rebate", "surcharge", "surcharges", "levy"})
_QUANTITY_WORDS = frozenset({
    "stock", "quantity", "qty", "volume", "tonnage", "weight", "moisture", "protein", "available", "lot",
    "minimum",
})
_NOTE_WORDS = frozenset({
    "basis", "date", "period", "month", "terms", "time", "window", "place", "point", "address",
})
PRICE_ROLES = frozenset({ColumnRole.PRICE, ColumnRole.FREIGHT, ColumnRole.SUM})
# What a column of a price list may hold.
LIST_ROLES = tuple(
    role for role in ColumnRole
    if role not in (
        ColumnRole.SAMPLE, ColumnRole.SAMPLED, ColumnRole.BASIS, ColumnRole.DRY_MATTER, ColumnRole.NUTRIENT
    )
)


@dataclass(frozen=True)
class PriceColumn:
    """A column of prices, of one role of PRICE, FREIGHT and SUM, with what its heading says of unit and currency."""

    index: int
    role: ColumnRole
    heading: str
    words: Words


@dataclass
class Table(ListTable):
    """A table of prices within a sheet.

    sides: where several tables stand side by side, all of them; side: the one that is read, None until that is said.
    sides_key: what the question is about.
    """

    prices: list[PriceColumn] = field(default_factory=list)
    sides: tuple[Side, ...] = ()
    side: Side | None = None
    sides_key: str = ""

    @property
    def is_complete(self) -> bool:
        """Whether it is known where names and prices stand."""
        return self.name is not None and any(column.role is not ColumnRole.FREIGHT for column in self.prices)

    @property
    def prices_key(self) -> str:
        """What the choice between the columns of prices is remembered by."""
        return " | ".join(column.heading for column in self.prices)


# Heading and column, from 0, to the role of the column and the words of the heading.
RoleOf = Callable[[str, int], tuple[ColumnRole, Words]]


def role_of(heading: str, _index: int = 0) -> tuple[ColumnRole, Words]:
    """The role that a heading gives its column."""
    return _role_of(heading)


@lru_cache(4096)
def _role_of(heading: str) -> tuple[ColumnRole, Words]:
    words = read_heading_words(heading)
    plain = " ".join(re.sub(r"[^a-z0-9%]+", " ", split_dry(heading)[1].casefold()).split())
    tokens = set(plain.split())
    for headings, role in (
        (_UNIT_HEADINGS, ColumnRole.UNIT), (_CURRENCY_HEADINGS, ColumnRole.CURRENCY),
        (_FROM_HEADINGS, ColumnRole.VALID_FROM), (_TO_HEADINGS, ColumnRole.VALID_TO),
        (_PACK_HEADINGS, ColumnRole.PACK), (_TERMS_HEADINGS, ColumnRole.TERMS), (_NOTE_HEADINGS, ColumnRole.NOTE),
    ):
        if plain in headings:
            return role, words
    if tokens & _OLD_WORDS and not tokens & {"new", "current"}:
        return ColumnRole.OTHER, words
    if tokens & _ADJUSTMENT_WORDS and not tokens & _PRICE_WORDS:
        return ColumnRole.ADJUSTMENT, words
    names_money = words.money.currencies is not None or words.money.cents
    if tokens & _NOTE_WORDS:
        return ColumnRole.NOTE, words
    under_price = re.fullmatch(r"prices? (?:freight|haulage|transport|carriage)", plain) is not None
    if under_price or (tokens & _FREIGHT_WORDS and not tokens & {"price", "incl", "including", "inclusive"}):
        return ColumnRole.FREIGHT, words
    if tokens & _SUM_WORDS and (tokens & _PRICE_WORDS or names_money or words.unit or len(tokens) == 1):
        return ColumnRole.SUM, words
    if tokens & _PRICE_WORDS or {"ex", "works"} <= tokens:
        return ColumnRole.PRICE, words
    if tokens & _QUANTITY_WORDS:
        return ColumnRole.OTHER, words
    if tokens & _NAME_WORDS:
        is_code = tokens & {"code", "no", "number", "id", "class", "group"}
        return (ColumnRole.NOTE if is_code else ColumnRole.NAME), words
    if names_money and (words.unit or len(tokens) <= 2):
        return ColumnRole.PRICE, words
    return ColumnRole.OTHER, words
