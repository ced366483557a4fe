"""Every edit that a person can make, as one undoable command each: it works out changes and has the mill take them."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass, replace
from typing import Any

from blendapp.domain import units
from blendapp.domain.formulas import Admits, Formula, Limit, LimitKind, Subject, write_basis
from blendapp.domain.ingredients import Basis, Ingredient, Value
from blendapp.domain.library import Library
from blendapp.domain.mills import MillInfo
from blendapp.domain.names import fold
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.problems import Problem, Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change, Record, added, removed
from blendapp.domain.wording import _
from blendapp.services.mill import Edit, Mill, kind_of, problems_in_place, record_name

TYPED = "typed"
# Places that a refusal names one by one.
_MOST_NAMED = 6


# -- one field of one record


def change(mill: Mill, record: Record, what: str = "", **fields: Any) -> Edit:
    """Change fields of a record: change(mill, ingredient, name="Barley"). Raises Refused for a faulty value."""
    changes = field_changes(mill, record, **fields)
    name = record_name(record, mill.library)
    return mill.apply(what or _("Change {name}").format(name=name), changes)


def field_changes(mill: Mill, record: Record, **fields: Any) -> list[Change]:
    """The changes of change(), to be joined with others into one edit."""
    current: Record = mill.library.records[kind_of(record)].get(record.id)
    if current is None and isinstance(record, MillInfo):
        return [added(replace(record, **fields))]
    return [Change(current, replace(current, **fields))]


def set_mill(mill: Mill, **fields: Any) -> Edit:
    """Change the mill's own name, currency, or what a ton or cwt means."""
    return change(mill, mill.library.mill, _("Change the mill"), **fields)


# -- composition


def set_value(
    mill: Mill, ingredient_id: int, nutrient_id: int, amount: float | None, *, unit: str | None = None,
    basis: Basis | None = None, **fields: Any,
) -> Edit:
    """Enter a composition value, or forget it (None: unknown). unit None: as it stands, else the nutrient's own."""
    changes = value_changes(mill, ingredient_id, nutrient_id, amount, unit=unit, basis=basis, **fields)
    library = mill.library
    what = _("Change {nutrient} of {ingredient}").format(
        nutrient=library.nutrient(nutrient_id).name, ingredient=library.ingredient(ingredient_id).name
    )
    return mill.apply(what, changes)


def value_changes(
    mill: Mill, ingredient_id: int, nutrient_id: int, amount: float | None, *, unit: str | None = None,
    basis: Basis | None = None, **fields: Any,
) -> list[Change]:
    """The changes of set_value. A new amount loses origin, source, date, n and SD unless they are given again."""
    old = mill.library.value(ingredient_id, nutrient_id)
    if amount is None:
        return [] if old is None else [removed(old)]
    if old is not None and old.amount == amount and unit in (None, old.unit) and basis in (None, old.basis):
        return [Change(old, replace(old, **fields))]
    ingredient, nutrient = mill.library.ingredient(ingredient_id), mill.library.nutrient(nutrient_id)
    new = Value(
        id=mill.new_id("value") if old is None else old.id,
        ingredient_id=ingredient_id,
        nutrient_id=nutrient_id,
        amount=amount,
        unit=unit if unit is not None else (old.unit if old else nutrient.unit),
        basis=basis or (old.basis if old else ingredient.basis),
    )
    return [Change(old, replace(new, **fields))]


# -- prices


def set_price(
    mill: Mill, ingredient_id: int, price: float | None, on: datetime.date, *, per: str | None = None,
    source: str = TYPED, entered: str = "", supplier_id: int | None = None, site_id: int | None = None,
) -> Edit:
    """Quote a price from a day on; None withdraws the price, so that it is unknown. per None: as the last quote.

    supplier_id: whose price it is, None for nobody's in particular. site_id: None is that of the quote in force.
    """
    what = _("Price of {ingredient}").format(ingredient=mill.library.ingredient(ingredient_id).name)
    return mill.apply(what, price_changes(
        mill, ingredient_id, price, on, per=per, source=source, entered=entered, supplier_id=supplier_id,
        site_id=site_id,
    ))


def price_changes(
    mill: Mill, ingredient_id: int, price: float | None, on: datetime.date, *, per: str | None = None,
    source: str = TYPED, entered: str = "", supplier_id: int | None = None, site_id: int | None = None,
) -> list[Change]:
    """The changes of set_price: a new quote, so that the price history keeps the old one.

    Unless a site is said, it is for that of the quote in force, or it would not be in force itself.
    """
    old = mill.library.quote_in_force(ingredient_id, on)
    chosen = per or (old.per if old else "t")
    if chosen == "cwt" and (old is None or old.per != "cwt"):
        chosen = units.CWT_KEPT_AS.get(mill.library.mill.cwt_means, chosen)
    if site_id is None and old is not None:
        site_id = old.site_id
    same_place = old is not None and old.site_id == site_id and supplier_id in (None, old.supplier_id)
    if old is not None and same_place and old.price == price and old.per == chosen:
        return []
    if old is None and price is None:
        return []
    bushel = _bushel_lb(mill.library, ingredient_id, old) if chosen == units.BUSHEL else None
    return [added(Quote(
        mill.new_id("quote"), ingredient_id, price, chosen, bushel, site_id, supplier_id, valid_from=on, recorded=on,
        source=source, entered=entered,
    ))]


def set_price_per_t(mill: Mill, ingredient_id: int, price_per_t: float, on: datetime.date) -> Edit:
    """Quote a price given per tonne, in the mass that the last quote was per."""
    old = mill.library.quote_in_force(ingredient_id, on)
    if old is None or old.per == "t":
        return set_price(mill, ingredient_id, price_per_t, on, per="t")
    per_t = units.price_per_t(1.0, old.per, _bushel_lb(mill.library, ingredient_id, old))
    return set_price(mill, ingredient_id, price_per_t / per_t, on, per=old.per)


def _bushel_lb(library: Library, ingredient_id: int, last: Quote | None) -> float | None:
    """The bushel of a new quote: the ingredient's own now, else that of its last quote."""
    own = library.ingredient(ingredient_id).bushel_lb
    return own if own is not None or last is None else last.bushel_lb


# -- ingredients and nutrients


def add_ingredient(mill: Mill, name: str, **fields: Any) -> Edit:
    new = Ingredient(mill.new_id("ingredient"), name.strip(), **fields)
    return mill.apply(_("Add {name}").format(name=new.name), [added(new)])


def remove_ingredient(mill: Mill, ingredient_id: int) -> Edit:
    """Remove an ingredient with its composition, prices and the limits that are about it alone.

    Raises Refused where a group or a ratio of a formula, a lot or a bin still names it.
    """
    library = mill.library
    ingredient = library.ingredient(ingredient_id)
    own, shared = _limits_about(library, ingredient_id)
    blocking = [record_name(limit, library) for limit in shared]
    blocking += [lot.name for lot in library.all("lot") if lot.ingredient_id == ingredient_id]
    blocking += [b.name for b in library.all("bin") if b.ingredient_id == ingredient_id]
    if blocking:
        text = _("{name} is still named by {places}; take it out there first.")
        places = blocking[:_MOST_NAMED]
        if len(blocking) > len(places):  # a laboratory's lists bring many lots
            places.append(_("{count} more").format(count=len(blocking) - len(places)))
        raise Refused(text.format(name=ingredient.name, places="; ".join(places)))
    rest: list[Record] = [*own, *library.values_of(ingredient_id).values(), *library.quotes_of(ingredient_id)]
    rest += [s for s in library.all("synonym") if s.ingredient_id == ingredient_id]
    what = _("Remove {name}").format(name=ingredient.name)
    return mill.apply(what, [*map(removed, rest), removed(ingredient)])


def _limits_about(library: Library, ingredient_id: int) -> tuple[list[Limit], list[Limit]]:
    own: list[Limit] = []
    shared: list[Limit] = []
    for limit in library.all("limit"):
        subjects = [s for s in (limit.subject, limit.per) if s is not None and not s.is_nutrient]
        if any(ingredient_id in s.ids for s in subjects):
            (own if limit.subject.ids == (ingredient_id,) and limit.per is None else shared).append(limit)
    return own, shared


def add_nutrient(mill: Mill, name: str, unit: str = "%", **fields: Any) -> Edit:
    new = Nutrient(mill.new_id("nutrient"), name.strip(), unit, **fields)
    return mill.apply(_("Add {name}").format(name=new.name), [added(new)])


def remove_nutrient(mill: Mill, nutrient_id: int) -> Edit:
    """Remove a nutrient with all its values. Raises Refused where a limit still names it."""
    library = mill.library
    nutrient = library.nutrient(nutrient_id)
    naming = [
        record_name(limit, library)
        for limit in library.all("limit")
        if any(s is not None and s == Subject.nutrient(nutrient_id) for s in (limit.subject, limit.per))
    ]
    if naming:
        text = _("{name} is still limited in {places}; remove those limits first.")
        raise Refused(text.format(name=nutrient.name, places="; ".join(naming)))
    values = [v for v in library.all("value") if v.nutrient_id == nutrient_id]
    values += [v for v in library.all("lot_value") if v.nutrient_id == nutrient_id]
    return mill.apply(_("Remove {name}").format(name=nutrient.name), [*map(removed, values), removed(nutrient)])


# -- formulas and limits


def add_formula(mill: Mill, name: str, **fields: Any) -> Edit:
    new = Formula(mill.new_id("formula"), name.strip(), **fields)
    return mill.apply(_("Add {name}").format(name=new.name), [added(new)])


def duplicate_formula(mill: Mill, formula_id: int, name: str) -> Edit:
    """A new formula with the same limits and steps of its own under another name."""
    old = mill.library.formula(formula_id)
    new = replace(old, id=mill.new_id("formula"), name=name.strip())
    limits = [replace(x, id=mill.new_id("limit"), formula_id=new.id) for x in mill.library.limits(formula_id)]
    steps = [replace(x, id=mill.new_id("mixing_step"), formula_id=new.id) for x in _own_steps(mill.library, formula_id)]
    what = _("Copy {old} as {new}").format(old=old.name, new=new.name)
    return mill.apply(what, [added(new), *map(added, limits), *map(added, steps)])


def _own_steps(library: Library, formula_id: int) -> list[Record]:
    return [step for step in library.all("mixing_step") if step.formula_id == formula_id]


def remove_formula(mill: Mill, formula_id: int) -> Edit:
    """Remove a formula with its limits and own steps.

    Raises Refused where it makes an ingredient or was printed or approved.
    """
    library = mill.library
    formula = library.formula(formula_id)
    makes = [i.name for i in library.ingredients if i.made_by_formula_id == formula_id]
    if makes:
        text = _("{formula} makes {ingredient}; change how that is made first.")
        raise Refused(text.format(formula=formula.name, ingredient=", ".join(makes)))
    if any(r.formula_id == formula_id for kind in ("batch", "version") for r in library.all(kind)):
        text = _("{formula} has printed batches or versions, which must stay on record; it cannot be removed.")
        raise Refused(text.format(formula=formula.name))
    what = _("Remove {name}").format(name=formula.name)
    rest = [*library.limits(formula_id), *_own_steps(library, formula_id)]
    return mill.apply(what, [*map(removed, rest), removed(formula)])


def add_limit(mill: Mill, formula_id: int, kind: LimitKind, subject: Subject, **fields: Any) -> Edit:
    """Add a limit at the end of a formula."""
    new = Limit(mill.new_id("limit"), formula_id, kind, subject, **fields)
    what = _("Add a limit on {name}").format(name=mill.library.subject_name(subject))
    return mill.apply(what, [added(new)])


def remove_limit(mill: Mill, limit_id: int) -> Edit:
    limit = mill.library.limit(limit_id)
    what = _("Remove the limit on {name}").format(name=mill.library.subject_name(limit.subject))
    return mill.apply(what, [removed(limit)])


def set_bound(mill: Mill, limit_id: int, side: str, bound: float | None) -> Edit:
    """Move one side of a limit ("minimum" or "maximum"), as displayed; None opens it."""
    limit = mill.library.limit(limit_id)
    names = {"minimum": _("minimum"), "maximum": _("maximum")}
    basis = "" if limit.basis == "as fed" else " " + write_basis(limit.basis, limit.at_dry_matter_percent)
    what = _("Change the {side} of {name}{basis}").format(
        side=names[side], name=mill.library.subject_name(limit.subject), basis=basis
    )
    return change(mill, limit, what, **{side: bound})


def set_bounds(mill: Mill, what: str, bounds: Iterable[tuple[int, str, float | None]]) -> Edit:
    """Move several ends at once, (limit, side, bound) each as in set_bound, as one undo."""
    moved: dict[int, dict[str, float | None]] = {}
    for limit_id, side, bound in bounds:
        moved.setdefault(limit_id, {})[side] = bound
    changes = [one for key, sides in moved.items() for one in field_changes(mill, mill.library.limit(key), **sides)]
    return mill.apply(what, changes)


def admit(mill: Mill, formula_id: int, ingredient_id: int) -> Edit:
    """Admit an ingredient to a formula without bounds."""
    return add_limit(mill, formula_id, LimitKind.INGREDIENT, Subject.ingredients(ingredient_id))


def set_admits(mill: Mill, formula_id: int, admits: Admits) -> Edit:
    return change(mill, mill.library.formula(formula_id), admits=admits)


# -- many at once


@dataclass(frozen=True)
class Many:
    """What became of a block of edits: one edit of all that could be taken, and what could not, by its index."""

    edit: Edit
    refused: dict[int, list[Problem]]


def many(mill: Mill, what: str, edits: Iterable[Callable[[], Sequence[Change]]]) -> Many:
    """Take every edit of a block that can be taken, as one undo; list every other with its faults.

    edits: each works out its changes (field_changes, value_changes, price_changes) or raises Refused or ValueError.
    """
    good: list[Change] = []
    refused: dict[int, list[Problem]] = {}
    try:
        for index, changes_of in enumerate(edits):
            try:
                good += _tried(mill, list(changes_of()))
            except Refused as refusal:
                refused[index] = refusal.problems
            except ValueError as error:
                refused[index] = [Problem(str(error))]
    finally:
        mill.library.apply(c.reversed for c in reversed(good))
    return Many(mill.apply(what, _joined(good)), refused)


def _tried(mill: Mill, changes: list[Change]) -> list[Change]:
    """The changes, left standing in the library; raises Refused, with nothing changed, if they are faulty."""
    problems_in_place(changes, mill.library)
    return changes


def _joined(changes: Sequence[Change]) -> list[Change]:
    """One change a record, from before the first to after the last."""
    joined: dict[tuple[str, int], Change] = {}
    for one in changes:
        earlier = joined.get((one.kind, one.id))
        joined[one.kind, one.id] = one if earlier is None else Change(earlier.before, one.after)
    return [c for c in joined.values() if c.before is not None or c.after is not None]


def free_name(library: Library, kind: str, wanted: str) -> str:
    """The wanted name, or with a number behind it if it is taken."""
    taken = {fold(record.name) for record in library.all(kind)}
    name, number = wanted, 2
    while fold(name) in taken:
        name, number = f"{wanted} {number}", number + 1
    return name
