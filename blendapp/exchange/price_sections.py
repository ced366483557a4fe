"""Headings inside a table that say of the rows below them what the heading of the column does not: "Meals, $/cwt"."""

from __future__ import annotations

import re
from bisect import bisect_right
from collections.abc import Callable, Mapping
from dataclasses import dataclass

from blendapp.exchange.list_row import TOTALS
from blendapp.exchange.price_columns import Table
from blendapp.exchange.price_notes import speaks_of_all, speaks_of_something_else
from blendapp.exchange.price_numbers import NO_PRICE
from blendapp.exchange.price_remarks import FOOTNOTE
from blendapp.exchange.price_words import NO_WORDS, Words, read_heading_words
from blendapp.exchange.tables import CellKind, RawTable, kind_of


@dataclass(frozen=True)
class Section:
    """row: of its text, from 0. words: what holds for the rows below it. ended: that a plain heading follows that may
    end it, "" if none does."""

    row: int
    text: str
    words: Words
    ended: str = ""


NO_SECTION = Section(-1, "", NO_WORDS)


@dataclass(frozen=True)
class Sections:
    """The headings inside a table that count, from the top."""

    found: tuple[Section, ...] = ()

    def over(self, row: int) -> Section:
        """The one that stands over a row."""
        if not self.found:
            return NO_SECTION
        at = bisect_right(self.found, row, key=lambda section: section.row)
        return self.found[at - 1] if at else NO_SECTION


def read_sections(
    raw: RawTable, table: Table, body: range, is_known: Callable[[str], bool], above: Section
) -> Sections:
    """The sections of a table. above: a heading that stands right over the table, NO_SECTION if none does."""
    found = [above] if above is not NO_SECTION else []
    prices = [column.index for column in table.prices]
    blank_before = True
    for row in body:
        if any(kind_of(raw.cell(row, index)) not in (CellKind.BLANK, CellKind.TEXT) for index in prices):
            blank_before = False
            continue
        cells = {index: value for index, value in enumerate(raw.rows[row]) if kind_of(value) is not CellKind.BLANK}
        text = _heading(cells, table.name, prices, is_known)
        if text:
            words = section_words(text)
            if words is not None:
                found.append(Section(row, text, words))
            elif found and (blank_before or text.isupper() or text.endswith(":")):
                found.append(Section(row, found[-1].text, found[-1].words, text))
        blank_before = not cells
    return Sections(tuple(found))


def _heading(
    cells: Mapping[int, object], name: int | None, prices: list[int], is_known: Callable[[str], bool]
) -> str:
    """The text of a row that is a heading: words alone, or words under the names and others under the prices."""
    if not cells or len(cells) > 2 or not all(isinstance(value, str) for value in cells.values()):
        return ""
    if len(cells) == 2 and (name not in cells or not any(index in cells for index in prices)):
        return ""
    texts = {index: " ".join(str(value).split()) for index, value in cells.items()}
    if any(texts[index].casefold() in NO_PRICE or re.search(r"^\W*[0-9]", texts[index]) for index in prices
           if index in texts and len(texts) == 2):
        return ""
    text = " ".join(texts.values())
    first = next(iter(texts.values()))
    if is_known(first) or FOOTNOTE.match(text) or text.casefold().rstrip(" :") in TOTALS:
        return ""
    return "" if speaks_of_all(text) or speaks_of_something_else(text) else text


def section_words(text: str) -> Words | None:
    """What a heading says of the prices below it, None where it says nothing of them."""
    words = read_heading_words(text)
    telling = words.money.currencies is not None or words.money.cents
    if not (words.unit or telling or words.dry or words.as_fed):
        return None
    unknown = words.rest if telling and words.rest.startswith("/") else ""
    return Words(words.money, words.unit, unknown, words.dry, words.as_fed, words.at_dry if words.unit else "")


def under(section: Words, column: Words) -> Words:
    """The words of the heading of a column, as far as the section does not say otherwise."""
    if section is NO_WORDS:
        return column
    says_money = section.money.currencies is not None or section.money.cents
    says_unit = bool(section.unit or section.rest)
    return Words(
        section.money if says_money else column.money, section.unit if says_unit else column.unit,
        section.rest if says_unit else column.rest, section.dry or (column.dry and not section.as_fed),
        section.as_fed or column.as_fed, section.at_dry or column.at_dry,
    )
