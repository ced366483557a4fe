"""Prices: dated, sourced quotes, and the one rule for the quote in force."""

from __future__ import annotations

import datetime
from collections.abc import Iterable
from dataclasses import dataclass
from enum import StrEnum

from blendapp.domain import units
from blendapp.domain.wording import _


class QuoteKind(StrEnum):
    REPLACEMENT = "replacement"
    CONTRACT = "contract"
    STOCK_AVERAGE = "stock average"


class Terms(StrEnum):
    EX_WORKS = "ex works"
    DELIVERED = "delivered"


@dataclass(frozen=True)
class Quote:
    """One price of one ingredient, kept as entered.

    price: money of the mill per `per` as fed, None where the price was withdrawn (then it is unknown, never 0).
    bushel_lb: mass of the bushel when the quote was made. valid_from, valid_to: inclusive, None is open.
    recorded: when the mill took it. price_list_id: the price list it came with. replaces_id: the quote in whose place
    it was recorded, with other days, another price or other terms; that one stays on record and no longer counts.
    """

    id: int
    ingredient_id: int
    price: float | None
    per: str = "t"
    bushel_lb: float | None = None
    site_id: int | None = None
    supplier_id: int | None = None
    kind: QuoteKind = QuoteKind.REPLACEMENT
    terms: Terms | None = None
    valid_from: datetime.date | None = None
    valid_to: datetime.date | None = None
    recorded: datetime.date | None = None
    source: str = ""
    entered: str = ""
    price_list_id: int | None = None
    replaces_id: int | None = None

    @property
    def price_per_t(self) -> float | None:
        """Money of the mill per tonne as fed."""
        return None if self.price is None else units.price_per_t(self.price, self.per, self.bushel_lb)


def rule() -> str:
    """The rule of in_force, as a person reads it."""
    return _(
        "In force is, of the quotes valid on the day and not replaced by a later entry, first one of the site before "
        "one of the whole mill; then one of the ingredient's own supplier, or of none, before one of another supplier; "
        "then the one whose first day of validity is latest; of two with the same first day, the one recorded last."
    )


def counting(quotes: Iterable[Quote], site_id: int | None) -> list[Quote]:
    """The quotes that count at a site on the days of their validity: not replaced, of the site or the whole mill."""
    quotes = list(quotes)
    replaced = {quote.replaces_id for quote in quotes}
    return [quote for quote in quotes if quote.id not in replaced and quote.site_id in (None, site_id)]


def is_valid(quote: Quote, on: datetime.date) -> bool:
    """Whether a day lies within the validity of a quote."""
    return (quote.valid_from is None or quote.valid_from <= on) and (quote.valid_to is None or quote.valid_to >= on)


def rank(quote: Quote, supplier_id: int | None) -> tuple[bool, bool, datetime.date, int]:
    """Of valid quotes that count, the greatest is in force: the four parts of rule(), in their order."""
    return (
        quote.site_id is not None,
        supplier_id is None or quote.supplier_id in (None, supplier_id),
        quote.valid_from or datetime.date.min,
        quote.id,
    )


def in_force(
    quotes: Iterable[Quote], on: datetime.date, site_id: int | None = None, supplier_id: int | None = None
) -> Quote | None:
    """The quote in force on a day at a site (None: the whole mill), or None. The rule is that of rule().

    supplier_id: whom the ingredient is bought from; None makes no difference between suppliers.
    """
    quotes = list(quotes)
    replaced = {quote.replaces_id for quote in quotes}
    # counting and is_valid, written out: every price of every answer is asked for here.
    valid = [
        quote for quote in quotes
        if (quote.valid_from is None or quote.valid_from <= on) and (quote.valid_to is None or quote.valid_to >= on)
        and (quote.site_id is None or quote.site_id == site_id) and quote.id not in replaced
    ]
    if len(valid) < 2:
        return valid[0] if valid else None
    return max(valid, key=lambda quote: rank(quote, supplier_id))
