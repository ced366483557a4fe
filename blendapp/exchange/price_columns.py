"""Where the table of a price list is: its heading row, and what each column holds."""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass, field
from enum import Enum

from blendapp.exchange.price_units import is_price_unit
from blendapp.exchange.price_words import Words, read_heading_words
from blendapp.exchange.tables import CellKind, CellValue, RawTable, kind_of


class Role(Enum):
    """What a column of a price list holds."""

    NAME = "name"
    PRICE = "price"
    FREIGHT = "freight"
    SUM = "sum"
    UNIT = "unit"
    CURRENCY = "currency"
    VALID_FROM = "valid from"
    VALID_TO = "valid to"
    NOTE = "note"
    OTHER = "other"


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
    "note", "notes", "remark", "remarks", "comment", "comments", "origin", "supplier", "terms", "code", "sku",
    "item no", "item number", "product code", "place", "location", "port", "quality", "specification", "spec", "class",
})
_QUANTITY_WORDS = frozenset({
    "stock", "quantity", "qty", "volume", "tonnage", "weight", "moisture", "protein", "available", "lot",
    "minimum",
})
_NOTE_WORDS = frozenset({
    "basis", "date", "period", "month", "terms", "time", "window", "place", "point", "address",
})
# A heading row stands near the top; looking further would only find odd rows of a long list.
_FURTHEST = 200


@dataclass(frozen=True)
class PriceColumn:
    """A column of prices, of one role of PRICE, FREIGHT and SUM, with what its heading says of unit and currency."""

    index: int
    role: Role
    heading: str
    words: Words


@dataclass
class Table:
    """A table within a sheet. heading_row: from 0, None where the columns were told by their content alone."""

    heading_row: int | None
    roles: dict[int, Role] = field(default_factory=dict)
    headings: dict[int, str] = field(default_factory=dict)
    prices: list[PriceColumn] = field(default_factory=list)
    name: int | None = None
    side_by_side: bool = False

    def first(self, role: Role) -> int | None:
        return next((index for index, found in sorted(self.roles.items()) if found is role), None)


def role_of(heading: str) -> tuple[Role, Words]:
    """The role that a heading gives its column."""
    words = read_heading_words(heading)
    plain = " ".join(re.sub(r"[^a-z0-9%]+", " ", heading.casefold()).split())
    tokens = set(plain.split())
    for headings, role in (
        (_UNIT_HEADINGS, Role.UNIT), (_CURRENCY_HEADINGS, Role.CURRENCY), (_FROM_HEADINGS, Role.VALID_FROM),
        (_TO_HEADINGS, Role.VALID_TO), (_NOTE_HEADINGS, Role.NOTE),
    ):
        if plain in headings:
            return role, words
    if tokens & _OLD_WORDS and not tokens & {"new", "current"}:
        return Role.OTHER, words
    names_money = words.money.currencies is not None or words.money.cents
    if tokens & _NOTE_WORDS:
        return Role.NOTE, words
    if tokens & _FREIGHT_WORDS and not tokens & {"price", "incl", "including", "inclusive"}:
        return Role.FREIGHT, words
    if tokens & _SUM_WORDS and (tokens & _PRICE_WORDS or names_money or words.unit or len(tokens) == 1):
        return Role.SUM, words
    if tokens & _PRICE_WORDS or {"ex", "works"} <= tokens:
        return Role.PRICE, words
    if tokens & _QUANTITY_WORDS:
        return Role.OTHER, words
    if tokens & _NAME_WORDS:
        return (Role.NOTE if tokens & {"code", "no", "number", "id", "class", "group"} else Role.NAME), words
    if names_money and (words.unit or len(tokens) <= 2):
        return Role.PRICE, words
    return Role.OTHER, words


def read_headings(table: RawTable, row: int) -> Table | None:
    """The table that begins with a row, if the row has headings for a name and a price, and holds no number."""
    found = Table(row)
    names = []
    for index, value in enumerate(table.rows[row]):
        kind = kind_of(value)
        if kind is CellKind.BLANK:
            continue
        if kind is not CellKind.TEXT:
            return None
        heading = " ".join(str(value).split())
        role, words = role_of(heading)
        found.roles[index], found.headings[index] = role, heading
        if role is Role.NAME:
            names.append(index)
        elif role in (Role.PRICE, Role.FREIGHT, Role.SUM):
            if re.search(r"[0-9]", heading) and not words.unit:
                return None
            found.prices.append(PriceColumn(index, role, heading, words))
    if not any(column.role is not Role.FREIGHT for column in found.prices) or len(found.roles) < 2:
        return None
    found.name = names[0] if names else None
    found.side_by_side = _is_side_by_side(names, found.prices)
    return found


def _is_side_by_side(names: list[int], prices: list[PriceColumn]) -> bool:
    """Name, price, name, price: two tables beside each other."""
    if len(names) < 2 or len(prices) < 2:
        return False
    return any(names[0] < price.index < names[-1] for price in prices) and prices[-1].index > names[-1]


def find_table(table: RawTable, is_known: Callable[[str], bool]) -> Table | None:
    """The first table of a sheet. is_known: whether a text is the name of an ingredient."""
    for row in range(min(len(table.rows), _FURTHEST)):
        found = None if table.is_blank(row) else read_headings(table, row)
        if found is not None:
            settle_name_column(found, table, is_known)
            if found.name is not None:
                drop_empty_prices(found, table)
                return found
    return _table_without_headings(table, is_known)


def settle_name_column(found: Table, table: RawTable, is_known: Callable[[str], bool]) -> None:
    """Of several columns of names, or of none headed so, the one that holds most known ones."""
    candidates = [index for index, role in found.roles.items() if role is Role.NAME]
    if not candidates:
        taken = {column.index for column in found.prices}
        width = max((len(cells) for cells in table.rows), default=0)
        candidates = [index for index in range(width) if index not in taken]
        if not any(_known(table, index, found.heading_row or 0, is_known) for index in candidates):
            return
    start = found.heading_row or 0
    found.name = max(candidates, key=lambda index: (_known(table, index, start, is_known), -index))
    for index in candidates:
        if index != found.name and found.roles.get(index) is Role.NAME:
            found.roles[index] = Role.NOTE
    found.roles[found.name] = Role.NAME


def drop_empty_prices(found: Table, table: RawTable) -> None:
    """A column of prices that is headed and never filled says nothing."""
    start = (found.heading_row or 0) + 1
    filled = [
        column
        for column in found.prices
        if any(kind_of(table.cell(row, column.index)) is not CellKind.BLANK for row in range(start, len(table.rows)))
    ]
    if filled:
        found.prices = filled


def _known(table: RawTable, column: int, start: int, is_known: Callable[[str], bool]) -> int:
    rows = table.rows[start + 1 : start + 1 + _FURTHEST]
    texts = (cells[column] for cells in rows if column < len(cells))
    return sum(_is_known_text(text, is_known) for text in texts)


def _is_known_text(value: CellValue, is_known: Callable[[str], bool]) -> bool:
    return isinstance(value, str) and is_known(value)


def _table_without_headings(table: RawTable, is_known: Callable[[str], bool]) -> Table | None:
    """Names that the mill knows in one column, numbers in exactly one other."""
    width = max((len(cells) for cells in table.rows), default=0)
    counts = [_known(table, column, -1, is_known) for column in range(width)]
    if not counts or max(counts) < 2:
        return None
    name = counts.index(max(counts))
    named = [cells for cells in table.rows if name < len(cells) and _is_known_text(cells[name], is_known)]
    numeric = [
        column
        for column in range(width)
        if column != name and sum(_has_number(cells, column) for cells in named) * 2 >= len(named)
    ]
    if len(numeric) != 1:
        return None
    found = Table(None, {name: Role.NAME, numeric[0]: Role.PRICE}, name=name)
    found.prices = [PriceColumn(numeric[0], Role.PRICE, "", read_heading_words(""))]
    for column in range(width):
        if column in found.roles:
            continue
        filled = [cells[column] for cells in named if column < len(cells)]
        texts = [str(value) for value in filled if kind_of(value) is CellKind.TEXT]
        if texts and all(is_price_unit(text) or read_heading_words("/" + text).unit for text in texts):
            found.roles[column] = Role.UNIT
            break
    return found


def _has_number(cells: list[CellValue], column: int) -> bool:
    if column >= len(cells):
        return False
    value = cells[column]
    kind = kind_of(value)
    return kind is CellKind.NUMBER or (kind is CellKind.TEXT and re.search(r"[0-9]", str(value)) is not None)
