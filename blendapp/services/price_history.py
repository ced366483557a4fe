"""Prices over time: what was in force when, and every entry of the history as one undoable command.

A price that was taken stays on record. Other days, another price or other terms are a new quote in its place.
"""

from __future__ import annotations

import datetime
from dataclasses import dataclass, replace
from typing import Any

from blendapp.domain.library import Library
from blendapp.domain.names import fold
from blendapp.domain.plant import Site, Supplier
from blendapp.domain.price_history import PriceHistory, Step, day_words, price_history, steps
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change, Record, added
from blendapp.domain.units import BUSHEL, CWT_KEPT_AS
from blendapp.domain.wording import _
from blendapp.services.edits import TYPED, change
from blendapp.services.mill import Edit, Mill

# What change_quote may change; the rest of a quote says where it came from.
CHANGEABLE = frozenset({"price", "per", "supplier_id", "site_id", "kind", "terms", "valid_from", "valid_to", "entered"})


def history(library: Library, ingredient_id: int, on: datetime.date) -> PriceHistory:
    """Every quote of an ingredient and what was in force on which day, as of a day and at the mill's site.

    Raises Refused for an ingredient that is not there.
    """
    if ingredient_id not in library.records["ingredient"]:
        raise Refused(_("There is no such ingredient; it was removed."))
    return price_history(library, ingredient_id, on)


def add_quote(
    mill: Mill, ingredient_id: int, price: float | None, on: datetime.date, *, per: str = "t", supplier: str = "",
    site: str = "", **fields: Any,
) -> Edit:
    """Record a quote. supplier, site: names; a supplier that the mill does not know yet is added with it.

    price: money per `per` as fed, None withdraws. fields: kind, terms, valid_from (today unless said), valid_to,
    source, entered. Raises Refused, for an unknown site too.
    """
    ingredient = mill.library.ingredient(ingredient_id)
    supplier_id, changes = _supplier(mill, supplier)
    per = _kept_per(mill, per)
    new = Quote(
        mill.new_id("quote"), ingredient_id, price, per, ingredient.bushel_lb if per == BUSHEL else None,
        _site_id(mill.library, site), supplier_id, recorded=on, **{"valid_from": on, "source": TYPED, **fields},
    )
    what = _("Price of {ingredient}").format(ingredient=ingredient.name)
    return mill.apply(what, [*changes, added(new)])


def change_quote(mill: Mill, quote_id: int, on: datetime.date, **fields: Any) -> Edit:
    """Record a quote in the place of another one, which stays on record and no longer counts.

    fields: of CHANGEABLE, or supplier and site by name. It keeps the price list that the first one came with, so that
    rolling the list back takes both. Raises Refused where the quote is gone or another stands in its place already.
    """
    old = _counting(mill, quote_id)
    changes: list[Change] = []
    if "supplier" in fields:
        fields["supplier_id"], changes = _supplier(mill, fields.pop("supplier"))
    if "site" in fields:
        fields["site_id"] = _site_id(mill.library, fields.pop("site"))
    unknown = fields.keys() - CHANGEABLE
    if unknown:
        raise TypeError(f"a quote does not change {sorted(unknown)}")
    if "per" in fields and fields["per"] != old.per:
        fields["per"] = _kept_per(mill, fields["per"])
    if replace(old, **{**fields, "entered": old.entered}) == old:
        return Edit(0, "", ())
    per = fields.get("per", old.per)
    if per == BUSHEL and old.per != BUSHEL:
        fields["bushel_lb"] = mill.library.ingredient(old.ingredient_id).bushel_lb
    elif per != BUSHEL:
        fields["bushel_lb"] = None
    if "price" in fields and "entered" not in fields:
        fields["entered"] = ""
    new = replace(old, id=mill.new_id("quote"), recorded=on, replaces_id=old.id, **fields)
    what = _("Change a price of {ingredient}").format(ingredient=mill.library.ingredient(old.ingredient_id).name)
    return mill.apply(what, [*changes, added(new)])


def end_quote(mill: Mill, quote_id: int, last: datetime.date, on: datetime.date) -> Edit:
    """Have a quote hold until a day, that day included; then whatever else is valid counts. Raises Refused for a day
    before its first."""
    quote = _counting(mill, quote_id)
    if quote.valid_from is not None and last < quote.valid_from:
        text = _("The price begins on {day} and cannot end before; withdraw it, or change its first day.")
        raise Refused(text.format(day=day_words(quote.valid_from)))
    return change_quote(mill, quote_id, on, valid_to=last)


def withdraw_quote(mill: Mill, quote_id: int, on: datetime.date) -> Edit:
    """Have the price of a quote be unknown from today on, or from its first day where that is to come. What was in
    force before stays as it was."""
    old = _counting(mill, quote_id)
    if old.price is None:
        raise Refused(_("This entry withdraws a price already; add a price to have one again."))
    if old.valid_to is not None and old.valid_to < on:
        raise Refused(_("This price has ended on {day}; there is nothing to withdraw.").format(
            day=day_words(old.valid_to)))
    first = on if old.valid_from is None else max(on, old.valid_from)
    new = replace(
        old, id=mill.new_id("quote"), price=None, valid_from=first, recorded=on, source=TYPED, entered="",
        price_list_id=None, replaces_id=None, bushel_lb=None, per="t",
    )
    what = _("Withdraw the price of {ingredient}").format(
        ingredient=mill.library.ingredient(old.ingredient_id).name)
    return mill.apply(what, [added(new)])


def buy_from(mill: Mill, ingredient_id: int, supplier: str) -> Edit:
    """Say whom an ingredient is bought from, by name, "" for nobody in particular; a new supplier is added with it."""
    supplier_id, changes = _supplier(mill, supplier)
    ingredient = mill.library.ingredient(ingredient_id)
    if not changes:
        what = _("{ingredient} is bought from {supplier}") if supplier_id is not None else _(
            "{ingredient} is bought from nobody in particular")
        return change(mill, ingredient, what.format(ingredient=ingredient.name, supplier=supplier.strip()),
                      supplier_id=supplier_id)
    what = _("{ingredient} is bought from {supplier}").format(ingredient=ingredient.name, supplier=supplier.strip())
    return mill.apply(what, [*changes, Change(ingredient, replace(ingredient, supplier_id=supplier_id))])


def expired(library: Library, ingredient_id: int, on: datetime.date) -> Quote | None:
    """The quote whose price ended last, of an ingredient for which none is in force any more; else None."""
    if library.quote_in_force(ingredient_id, on) is not None:
        return None
    supplier_id = library.ingredient(ingredient_id).supplier_id
    found = steps(library.quotes_of(ingredient_id), library.mill.site_id, supplier_id)
    before = [step for step in found if step.price_per_t is not None and step.last is not None and step.last < on]
    return before[-1].quote if before else None


@dataclass(frozen=True)
class Turn:
    """A price on two days, in money per tonne, None where unknown."""

    ingredient_id: int
    before: float | None
    after: float | None


def turned(library: Library, before: datetime.date, on: datetime.date) -> list[Turn]:
    """The ingredients whose price differs between two days."""
    turns = [Turn(i.id, library.price_per_t(i.id, before), library.price_per_t(i.id, on)) for i in library.ingredients]
    return [turn for turn in turns if turn.before != turn.after]


def coming(library: Library, ingredient_id: int, on: datetime.date) -> Step | None:
    """The next stretch of days on which another quote is in force than on a day, or none; None where that stays."""
    quotes = library.quotes_of(ingredient_id)
    if not any((q.valid_from is not None and q.valid_from > on) or (q.valid_to is not None and q.valid_to >= on)
               for q in quotes):
        return None
    found = steps(quotes, library.mill.site_id, library.ingredient(ingredient_id).supplier_id)
    return next((step for step in found if step.first is not None and step.first > on), None)


def _counting(mill: Mill, quote_id: int) -> Quote:
    quote: Quote | None = mill.library.records["quote"].get(quote_id)
    if quote is None:
        raise Refused(_("This price is no longer on record."))
    if any(one.replaces_id == quote_id for one in mill.library.quotes_of(quote.ingredient_id)):
        raise Refused(_("Another entry stands in the place of this price; change that one."))
    return quote


def _kept_per(mill: Mill, per: str) -> str:
    return CWT_KEPT_AS.get(mill.library.mill.cwt_means, per) if per == "cwt" else per


def _supplier(mill: Mill, name: str) -> tuple[int | None, list[Change]]:
    """A supplier by name, with the change that adds it where it is new."""
    if not name.strip():
        return None, []
    known: Record = mill.library.named("supplier", name)
    if known is not None:
        return int(known.id), []
    new = Supplier(mill.new_id("supplier"), " ".join(name.split()))
    return new.id, [added(new)]


def _site_id(library: Library, name: str) -> int | None:
    if not name.strip():
        return None
    known: Site | None = next((one for one in library.all("site") if fold(one.name) == fold(name)), None)
    if known is None:
        names = ", ".join(one.name for one in library.all("site")) or _("none yet")
        raise Refused(_("There is no site “{name}”; the mill's sites are {names}.").format(name=name, names=names))
    return known.id
