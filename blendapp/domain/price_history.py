"""The prices of one ingredient over the days: what was in force when, and every quote with why it is or is not."""

from __future__ import annotations

import datetime
import heapq
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from enum import StrEnum

from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.quotes import Quote, counting, is_valid, rank
from blendapp.domain.wording import _

TYPED = "typed"
_DAY = datetime.timedelta(days=1)


class Standing(StrEnum):
    """What a quote is on a day."""

    IN_FORCE = "in force"
    GIVES_WAY = "gives way"
    TO_COME = "to come"
    ENDED = "ended"
    REPLACED = "replaced"
    ELSEWHERE = "another site"

    @property
    def label(self) -> str:
        return _(self.value)


@dataclass(frozen=True)
class Step:
    """Days in a row with one quote in force, or with none. first, last: inclusive, None is open."""

    first: datetime.date | None
    last: datetime.date | None
    quote: Quote | None

    @property
    def price_per_t(self) -> float | None:
        """Money of the mill per tonne as fed; None where no price was known: no quote, or a withdrawn price."""
        return None if self.quote is None else self.quote.price_per_t


@dataclass(frozen=True)
class QuoteLine:
    """A quote and what it is on the day of the history. supplier, site: names, "" for none. why: one sentence.

    source: where the price comes from, for a person. price_list_id: a list that stands on record, else None.
    """

    quote: Quote
    standing: Standing
    why: str
    supplier: str = ""
    site: str = ""
    source: str = ""
    price_list_id: int | None = None


@dataclass(frozen=True)
class PriceHistory:
    """All quotes of an ingredient as of a day. lines: latest first day first, of equal ones the last recorded first.

    steps: from the earliest day to the latest without a gap, () without a quote that counts. site: whose prices count
    besides those of the whole mill, "" for none. supplier: whom it is bought from, "" for none said. why: which quote
    is in force and for what reason, in a sentence.
    """

    ingredient_id: int
    ingredient: str
    currency: str
    on: datetime.date
    site: str
    supplier: str
    steps: tuple[Step, ...]
    lines: tuple[QuoteLine, ...]
    why: str

    @property
    def in_force(self) -> QuoteLine | None:
        return next((line for line in self.lines if line.standing is Standing.IN_FORCE), None)


def steps(quotes: Iterable[Quote], site_id: int | None = None, supplier_id: int | None = None) -> tuple[Step, ...]:
    """What quotes.in_force gives on every day, as stretches of days; next to each other they differ.

    One pass over the days on which a validity begins or has ended, with the quotes that have begun in a heap by rank.
    """
    ranked = sorted(counting(quotes, site_id), key=lambda quote: rank(quote, supplier_id), reverse=True)
    if not ranked:
        return ()
    starts = sorted(range(len(ranked)), key=lambda at: _first(ranked[at]))
    turns = {_first(quote) for quote in ranked} | {datetime.date.min}
    turns |= {quote.valid_to + _DAY for quote in ranked if quote.valid_to not in (None, datetime.date.max)}
    begun: list[int] = []
    found: list[tuple[datetime.date, Quote | None]] = []
    taken = 0
    for day in sorted(turns):
        while taken < len(starts) and _first(ranked[starts[taken]]) <= day:
            heapq.heappush(begun, starts[taken])
            taken += 1
        while begun and not is_valid(ranked[begun[0]], day):
            heapq.heappop(begun)
        best = ranked[begun[0]] if begun else None
        if not found or found[-1][1] is not best:
            found.append((day, best))
    lasts = [day - _DAY for day, _quote in found[1:]]
    return tuple(
        Step(None if day == datetime.date.min else day, last, quote)
        for (day, quote), last in zip(found, [*lasts, None], strict=True)
    )


def _first(quote: Quote) -> datetime.date:
    return quote.valid_from or datetime.date.min


def price_history(library: Library, ingredient_id: int, on: datetime.date) -> PriceHistory:
    """The history of an ingredient at the site that the mill works at. Raises KeyError for an unknown ingredient."""
    ingredient = library.ingredient(ingredient_id)
    site_id = library.mill.site_id
    quotes = library.quotes_of(ingredient_id)
    counted = counting(quotes, site_id)
    valid = sorted((q for q in counted if is_valid(q, on)), key=lambda q: rank(q, ingredient.supplier_id))
    best = valid[-1] if valid else None
    tell = _Teller(library, ingredient_id, on, quotes, best)
    lines = [tell.line(quote) for quote in sorted(quotes, key=lambda q: (_first(q), q.id), reverse=True)]
    return PriceHistory(
        ingredient_id, ingredient.name, library.mill.currency, on, tell.name("site", site_id),
        tell.name("supplier", ingredient.supplier_id), steps(quotes, site_id, ingredient.supplier_id), tuple(lines),
        tell.why(valid),
    )


class _Teller:
    """Says of the quotes of one ingredient what each is, and why."""

    def __init__(
        self, library: Library, ingredient_id: int, on: datetime.date, quotes: Sequence[Quote], best: Quote | None
    ) -> None:
        self.library = library
        self.supplier_id = library.ingredient(ingredient_id).supplier_id
        self.on = on
        self.best = best
        self.replaced_by = {quote.replaces_id: quote for quote in quotes if quote.replaces_id is not None}

    def name(self, kind: str, record_id: int | None) -> str:
        record = None if record_id is None else self.library.records[kind].get(record_id)
        return "" if record is None else str(record.name)

    def line(self, quote: Quote) -> QuoteLine:
        standing, why = self._standing(quote)
        kept = None if quote.price_list_id is None else self.library.records["price_list"].get(quote.price_list_id)
        source = _("typed by hand") if quote.source == TYPED else quote.source
        return QuoteLine(
            quote, standing, why, self.name("supplier", quote.supplier_id), self.name("site", quote.site_id), source,
            None if kept is None else kept.id,
        )

    def _standing(self, quote: Quote) -> tuple[Standing, str]:
        later = self.replaced_by.get(quote.id)
        if later is not None:
            text = _("Replaced by an entry of {day}; it stays on record and does not count.")
            return Standing.REPLACED, text.format(day=day_words(later.recorded))
        if quote.site_id is not None and quote.site_id != self.library.mill.site_id:
            text = _("It is a quote of {site}, where the mill does not work now.")
            return Standing.ELSEWHERE, text.format(site=self.name("site", quote.site_id))
        if quote.valid_from is not None and quote.valid_from > self.on:
            return Standing.TO_COME, _("It takes effect on {day}.").format(day=day_words(quote.valid_from))
        if quote.valid_to is not None and quote.valid_to < self.on:
            return Standing.ENDED, _("It held until {day}.").format(day=day_words(quote.valid_to))
        if quote is self.best:
            return Standing.IN_FORCE, ""
        assert self.best is not None
        text = _("Another comes first: {reason}.")
        return Standing.GIVES_WAY, text.format(reason=self._reason(self.best, quote))

    def why(self, valid: Sequence[Quote]) -> str:
        """Which quote is in force and why. valid: those that count and hold on the day, by rank, the greatest last."""
        if self.best is None:
            return _("No quote is in force on {day}: the price is unknown, and the ingredient is left out of every mix."
                     ).format(day=day_words(self.on))
        what = self._words(self.best)
        if self.best.price is None:
            text = _("On {day} the price is withdrawn ({quote}): it is unknown, not 0.")
            return text.format(day=day_words(self.on), quote=what)
        if len(valid) == 1:
            return _("In force is {quote}: it is the only one that holds on {day}.").format(
                quote=what, day=day_words(self.on))
        other = valid[-2]
        return _("In force is {quote}, and not {other}: {reason}.").format(
            quote=what, other=self._words(other), reason=self._reason(self.best, other))

    def _words(self, quote: Quote) -> str:
        """A quote in a few words: "210 per t of Bay Grain for North yard, valid from 2026-12-01"."""
        parts = [_("a withdrawal") if quote.price is None else _("{price} per {mass}").format(
            price=notation().write_short(quote.price), mass=quote.per)]
        if quote.supplier_id is not None:
            parts.append(_("of {supplier}").format(supplier=self.name("supplier", quote.supplier_id)))
        if quote.site_id is not None:
            parts.append(_("for {site}").format(site=self.name("site", quote.site_id)))
        words = " ".join(parts)
        if quote.valid_from is None:
            return words
        return _("{quote}, valid from {day}").format(quote=words, day=day_words(quote.valid_from))

    def _reason(self, best: Quote, other: Quote) -> str:
        """The first part of the rule by which one comes before another."""
        if (best.site_id is None) is not (other.site_id is None):
            return _("a quote of {site} comes before one of the whole mill").format(
                site=self.name("site", best.site_id))
        own = [rank(quote, self.supplier_id)[1] for quote in (best, other)]
        if own[0] is not own[1] and best.supplier_id is None:
            return _("it is bought from {supplier}, and a quote of nobody in particular comes before one of {other}"
                     ).format(supplier=self.name("supplier", self.supplier_id),
                              other=self.name("supplier", other.supplier_id))
        if own[0] is not own[1]:
            return _("it is bought from {supplier}, whose quotes come before those of {other}").format(
                supplier=self.name("supplier", self.supplier_id), other=self.name("supplier", other.supplier_id))
        if best.valid_from != other.valid_from:
            if other.valid_from is None:
                return _("its first day, {day}, is later than that of one without a first day").format(
                    day=day_words(best.valid_from))
            return _("its first day, {day}, is later than {other}").format(
                day=day_words(best.valid_from), other=day_words(other.valid_from))
        return _("of two with the same first day, the one recorded last holds")


def day_words(day: datetime.date | None) -> str:
    """A day as tables show it; "" for none."""
    return "" if day is None else day.isoformat()
