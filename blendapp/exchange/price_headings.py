"""The heading rows of a table of prices: one row, two rows, or one row under a wider heading."""

from __future__ import annotations

import re

from blendapp.domain.list_rows import ColumnRole
from blendapp.exchange.list_headings import joined, spread_over, texts_of
from blendapp.exchange.price_columns import PriceColumn, RoleOf, Table, role_of
from blendapp.exchange.price_numbers import read_price_text
from blendapp.exchange.price_words import read_heading_words, read_unit_words
from blendapp.exchange.tables import RawTable, column_letters

# A heading may name the week or the day of its prices.
_DATED = re.compile(
    r"\b(?:19|20)[0-9]{2}(?:-[0-9]{1,2}-[0-9]{1,2})?\b|\b(?:week|wk|kw)\s*[0-9]{1,2}\b|\b[0-9]{1,2}[./-][0-9]{1,2}[./-](?:[0-9]{4}|[0-9]{2})\b|"
    r"\b[0-9]{1,2}(?:st|nd|rd|th)?\s+(?=jan|feb|mar|apr|may|jun|jul|aug|sep|oct|nov|dec)|"
    r"(?<=\b[a-z]{3} )[0-9]{1,2}\b", re.IGNORECASE,
)
# A note in a title row speaks of prices too, and heads none; the second one may be a heading beside one of names.
_NOTE = re.compile(r"\b(?:all|our|these)\s+(?:prices|quotes|offers)\b", re.IGNORECASE)
_NOTE_ALONE = re.compile(r"\b(?:prices|quotes|offers)\s+(?:are|is|subject|valid|per|in)\b", re.IGNORECASE)


def read_headings(table: RawTable, row: int, role: RoleOf = role_of) -> Table | None:
    """The table that begins with a row, if the row has headings for a name and a price, and holds no number.

    Headings may take two rows: the second says more of each column, or the first stands over several of them.
    role: what a heading says of its column.
    """
    texts = texts_of(table, row)
    if texts is None:
        return None
    below = texts_of(table, row + 1) if row + 1 < len(table.rows) else None
    if below and _holds_price(below):
        below = None
    found = _headed(row, texts, role)
    if found is not None and found.name is None and below and _headed(row + 1, below, role) is None:
        both = _headed(row, joined(spread_over(table, row, texts, below), below), role)
        if both is not None and both.name in below:  # the name is headed in the second row alone
            both.last_heading_row = row + 1
            return both
    if found is not None:
        split = _split_below(table, row, texts, below, found, role) if below else None
        if split is not None:
            return split
        if below and _says_more(found, below, role):
            found = _headed(row, joined(texts, below), role) or found
            found.last_heading_row = row + 1
            return found
        return _under_a_wider_heading(table, row, texts, found, role)
    if below and len(below) > 1 and not _holds_price(texts) and _headed(row + 1, below, role) is None:
        both = _headed(row, joined(spread_over(table, row, texts, below), below), role)
        if both is not None and both.name is not None:
            both.last_heading_row = row + 1
            return both
    return None


def _holds_price(texts: dict[int, str]) -> bool:
    return any(_is_price(text, bool(read_heading_words(text).unit)) for text in texts.values())


def _split_below(
    table: RawTable, row: int, texts: dict[int, str], below: dict[int, str], found: Table,
    role: RoleOf,
) -> Table | None:
    """The table whose one heading of prices stands over several columns, headed each in the row below."""
    if found.name is None or found.name in below:
        return None
    spread = spread_over(table, row, texts, below)
    heads = {column.heading for column in found.prices}
    if not any(index not in texts and spread.get(index) in heads for index in below):
        return None
    both = _headed(row, joined(spread, below), role)
    if both is not None:
        both.last_heading_row = row + 1
    return both


def _says_more(found: Table, below: dict[int, str], role: RoleOf) -> bool:
    """Whether a row of texts goes on with the headings above it: units under prices, "from" under "Valid"."""
    own = _headed(0, below, role)
    if own is not None and own.name is not None:
        return False
    if found.name in below and role(below[found.name], found.name)[0] not in (ColumnRole.NAME, ColumnRole.NOTE):
        return False
    under_prices = {column.index: below[column.index] for column in found.prices if column.index in below}
    if not under_prices:
        return False
    for index, text in under_prices.items():
        words = read_unit_words(text.strip("()[]"))
        plain = not words.rest and (words.unit or words.money.currencies or words.dry)
        if not plain and role(text, index)[0] not in (ColumnRole.PRICE, ColumnRole.FREIGHT, ColumnRole.SUM):
            return False
    return True


def _under_a_wider_heading(
    table: RawTable, row: int, texts: dict[int, str], found: Table, role: RoleOf
) -> Table:
    """The same table with what stands over its price columns: a unit, a currency, "last week" and "this week"."""
    if row == 0 or found.name is None:
        return found
    above = texts_of(table, row - 1)
    if not above or min(above) <= found.name:  # that is a title
        return found
    spread = spread_over(table, row - 1, above, texts)
    more = {
        column.index: spread[column.index] for column in found.prices if column.index in spread
    }
    wider = _headed(row, {index: f"{more.get(index, '')} {text}".strip() for index, text in texts.items()}, role)
    if not more or wider is None:
        return found
    wider.first_heading_row = row - 1
    return wider


def _is_price(text: str, names_unit: bool) -> bool:
    """Whether a text is a price rather than a heading: a number stands before its unit, and it is no day or week."""
    before = re.split(r"/|\bper\b", _DATED.sub("", text), maxsplit=1)[0]
    if not re.search(r"[0-9]", before):
        return False
    return not names_unit or read_price_text(text) is not None


def _headed(row: int, texts: dict[int, str], role_of_heading: RoleOf) -> Table | None:
    """The table under headings by column, or None where they head no price."""
    found = Table(row)
    names = []
    for index, heading in texts.items():
        role, words = role_of_heading(heading, index)
        found.roles[index], found.headings[index] = role, heading
        if role is ColumnRole.NAME:
            names.append(index)
        elif role in (ColumnRole.PRICE, ColumnRole.FREIGHT, ColumnRole.SUM):
            if _is_price(heading, bool(words.unit)):
                return None
            if any(heading == column.heading for column in found.prices):
                heading = f"{heading} ({column_letters(index)})"
            found.prices.append(PriceColumn(index, role, heading, words))
    if not any(column.role is not ColumnRole.FREIGHT for column in found.prices) or len(found.roles) < 2:
        return None
    if any(_NOTE.search(column.heading) for column in found.prices):
        return None
    if not names and any(_NOTE_ALONE.search(column.heading) for column in found.prices):
        return None
    found.name = names[0] if names else None
    return found
