"""What is different between two snapshots of a formula, as rows that a screen and a page can show."""

from __future__ import annotations

import math
from collections.abc import Iterator
from dataclasses import dataclass, fields, replace
from enum import Enum, StrEnum
from typing import Any

from blendapp.domain import limit_units
from blendapp.domain.fields import field_of
from blendapp.domain.formulas import Amounts, Formula, Limit, LimitBasis, LimitKind, write_basis
from blendapp.domain.ingredients import Basis, Ingredient, Value
from blendapp.domain.versions import Snapshot
from blendapp.domain.wording import _

# Amounts and costs closer than this, as a share of the whole mix or of the cost, are the same.
_SAME = 1e-9


class Area(StrEnum):
    """What a difference is about, in the order in which they are shown."""

    FORMULA = "formula"
    LIMITS = "limits"
    ADMITTED = "admitted ingredients"
    PRICES = "prices"
    COMPOSITION = "composition"
    MIX = "mix"
    COST = "cost"
    CAUTIONS = "cautions"


# What a person enters; the rest follows from it.
ENTERED = frozenset({Area.FORMULA, Area.LIMITS, Area.ADMITTED, Area.PRICES, Area.COMPOSITION})


@dataclass(frozen=True)
class Difference:
    """One row. name: of the limit, ingredient, or value; detail: which part of it, "" where the name says it all.

    before, after: numbers in `unit`, or texts; None where there is none (unknown, unlimited, not in the mix).
    """

    area: Area
    name: str
    detail: str
    before: float | str | None
    after: float | str | None
    unit: str = ""

    @property
    def change(self) -> float | None:
        """after less before, where both are numbers."""
        if isinstance(self.before, float | int) and isinstance(self.after, float | int):
            return self.after - self.before
        return None


def differences(before: Snapshot, after: Snapshot) -> tuple[Difference, ...]:
    """Every difference, by area; empty where both say the same. The days of the two are no difference.

    Mix, cost and cautions are compared where both hold an answer, and values where both speak of them.
    """
    found = [*_formula(before, after), *_limits(before, after), *_admitted(before, after), *_prices(before, after),
             *_composition(before, after), *_answers(before, after)]
    return tuple(sorted(found, key=lambda row: list(Area).index(row.area)))


def _text(value: Any) -> str:
    if isinstance(value, tuple):
        return ", ".join(_text(part) for part in value)
    if isinstance(value, Enum):
        return _(str(value.value))
    if isinstance(value, bool):
        return _("yes") if value else _("no")
    return "" if value is None else str(value)


def _label(kind: str, name: str) -> str:
    try:
        return field_of(kind, name).label
    except KeyError:
        return name


def _fields(area: Area, name: str, kind: str, old: Any, new: Any, leave: frozenset[str]) -> Iterator[Difference]:
    """The fields in which two records of a kind differ."""
    for f in fields(old):
        was, now = getattr(old, f.name), getattr(new, f.name)
        if f.name not in leave and was != now:
            numbers = all(x is None or (isinstance(x, float | int) and not isinstance(x, bool)) for x in (was, now))
            shown = (was, now) if numbers else (_text(was), _text(now))
            yield Difference(area, name, _label(kind, f.name), *shown)


def _formula(before: Snapshot, after: Snapshot) -> Iterator[Difference]:
    old: Formula = before.formula
    yield from _fields(Area.FORMULA, after.formula.name, "formula", old, after.formula, frozenset({"id"}))
    if before.mill.currency != after.mill.currency:
        yield Difference(Area.FORMULA, after.formula.name, _label("mill", "currency"), before.mill.currency,
                         after.mill.currency)


# -- limits


def _limits(before: Snapshot, after: Snapshot) -> Iterator[Difference]:
    gone, come = list(before.limits), list(after.limits)
    # One that was removed and entered again alike is no difference, whatever its identifier.
    for limit in list(gone):
        unit = _unit(before, limit)
        twin = next((x for x in come if replace(x, id=limit.id) == limit and _unit(after, x) == unit), None)
        if twin is not None:
            gone.remove(limit)
            come.remove(twin)
    kept = {limit.id: limit for limit in come}
    for limit in gone:
        if limit.id in kept:
            yield from _changed_limit(before, limit, after, kept.pop(limit.id))
        else:
            yield from _whole_limit(before, limit, came=False)
    for limit in come:
        if limit.id in kept:
            yield from _whole_limit(after, limit, came=True)


def _unit(snapshot: Snapshot, limit: Limit) -> str:
    """The unit in which a limit is shown; that of one without a unit is its nutrient's, and may have changed."""
    return limit_units.shown_unit(snapshot.library, limit, snapshot.formula.amounts)


def _limit_name(snapshot: Snapshot, limit: Limit) -> str:
    """What a limit is called where kinds and bases stand among each other."""
    name = snapshot.library.subject_name(limit.subject)
    if limit.per is not None:
        name = _("{name} over {per}").format(name=name, per=snapshot.library.subject_name(limit.per))
    if limit.kind is LimitKind.NUTRIENT and limit.basis is not LimitBasis.AS_FED:
        name = f"{name}, {write_basis(limit.basis, limit.at_dry_matter_percent)}"
    elif limit.kind in (LimitKind.PRACTICAL, LimitKind.COUNT):
        name = f"{name}, {_(limit.kind)}"
    return name


def _changed_limit(before: Snapshot, old: Limit, after: Snapshot, new: Limit) -> Iterator[Difference]:
    name, unit = _limit_name(after, new), _unit(after, new)
    if (was := _limit_name(before, old)) != name:
        yield Difference(Area.LIMITS, name, _label("limit", "subject"), was, name)
    if old.kind is not new.kind:
        yield Difference(Area.LIMITS, name, _label("limit", "kind"), _text(old.kind), _text(new.kind))
    if (was := _unit(before, old)) != unit:
        yield Difference(Area.LIMITS, name, _label("limit", "unit"), was, unit)
    for side in ("minimum", "maximum"):
        bounds = getattr(old, side), getattr(new, side)
        if bounds[0] != bounds[1]:
            yield Difference(Area.LIMITS, name, _label("limit", side), *bounds, unit)
    if old.note != new.note:
        yield Difference(Area.LIMITS, name, _("Note"), old.note, new.note)


def _whole_limit(snapshot: Snapshot, limit: Limit, came: bool) -> Iterator[Difference]:
    name = _limit_name(snapshot, limit)
    bounds = [(side, getattr(limit, side)) for side in ("minimum", "maximum") if getattr(limit, side) is not None]
    for side, bound in bounds:
        old, new = (None, bound) if came else (bound, None)
        yield Difference(Area.LIMITS, name, _label("limit", side), old, new, _unit(snapshot, limit))
    if not bounds:
        text = _("without bounds")
        yield Difference(Area.LIMITS, name, "", *(("", text) if came else (text, "")))


# -- ingredients, prices, composition

# What an answer and its sheet do not rest on; the dry matter is told among the composition, and another supplier's
# price among the prices.
_LEFT = frozenset({"id", "dry_matter_percent", "basis", "code", "scale_id", "stock_kg", "density_kg_per_l", "bushel_lb",
                   "note", "supplier_id"})


def _admitted(before: Snapshot, after: Snapshot) -> Iterator[Difference]:
    for key in sorted(before.admitted | after.admitted):
        old, new = _ingredient(before, key), _ingredient(after, key)
        if old is not None and new is not None:
            yield from _fields(Area.ADMITTED, new.name, "ingredient", old, new, _LEFT)
        else:
            found = old or new
            assert found is not None
            yield Difference(Area.ADMITTED, found.name, "", *((_("admitted"), "") if old else ("", _("admitted"))))


def _ingredient(snapshot: Snapshot, key: int) -> Ingredient | None:
    return snapshot.library.ingredient(key) if key in snapshot.admitted else None


def _prices(before: Snapshot, after: Snapshot) -> Iterator[Difference]:
    old = {quote.ingredient_id: quote.price_per_t for quote in before.quotes}
    new = {quote.ingredient_id: quote.price_per_t for quote in after.quotes}
    for key in sorted(before.admitted & after.admitted):
        if old.get(key) != new.get(key):
            yield Difference(Area.PRICES, after.library.ingredient(key).name, "", old.get(key), new.get(key),
                             f"{after.mill.currency}/t")


def _composition(before: Snapshot, after: Snapshot) -> Iterator[Difference]:
    for key in sorted(before.admitted & after.admitted):
        was, now = (s.library.ingredient(key).dry_matter_percent for s in (before, after))
        name = after.library.ingredient(key).name
        if was != now:
            yield Difference(Area.COMPOSITION, name, _label("ingredient", "dry_matter_percent"), was, now, "%")
        nutrients = sorted({*before.library.values_of(key), *after.library.values_of(key)})
        for nutrient_id in nutrients:
            if before.speaks_of(key, nutrient_id) and after.speaks_of(key, nutrient_id):
                old, new = before.library.value(key, nutrient_id), after.library.value(key, nutrient_id)
                holder = after if new is not None else before
                yield from _value(name, holder.library.nutrient(nutrient_id).name, old, new)


def _value(ingredient: str, nutrient: str, old: Value | None, new: Value | None) -> Iterator[Difference]:
    if old == new:
        return
    if old is None or new is None:
        found = old or new
        assert found is not None
        was, now = (None, found.amount) if old is None else (found.amount, None)
        yield Difference(Area.COMPOSITION, ingredient, nutrient, was, now, _value_unit(found))
        return
    if _value_unit(old) != _value_unit(new):
        yield Difference(Area.COMPOSITION, ingredient, nutrient, f"{old.amount:.12g} {_value_unit(old)}".strip(),
                         f"{new.amount:.12g} {_value_unit(new)}".strip())
    elif old.amount != new.amount:
        yield Difference(Area.COMPOSITION, ingredient, nutrient, old.amount, new.amount, _value_unit(new))
    for row in _fields(Area.COMPOSITION, ingredient, "value", old, new,
                       frozenset({"id", "ingredient_id", "nutrient_id", "amount", "unit", "basis", "entered"})):
        detail = _("{nutrient}, {field}").format(nutrient=nutrient, field=row.detail)
        yield replace(row, detail=detail)


def _value_unit(value: Value) -> str:
    return value.unit if value.basis is Basis.AS_FED else f"{value.unit} {_(value.basis)}".strip()


# -- answers


def _answers(before: Snapshot, after: Snapshot) -> Iterator[Difference]:
    if before.result is None or after.result is None:
        return
    yield from _mix(before, after)
    old, new = before.result, after.result
    if old.status is not new.status:
        yield Difference(Area.COST, _("Answer"), "", _text(old.status), _text(new.status))
    if not _same(old.cost, new.cost, max(abs(old.cost or 0.0), abs(new.cost or 0.0))):
        yield Difference(Area.COST, _("Cost"), "", old.cost, new.cost, f"{new.currency}/{_(new.cost_per)}")
    for text in [*old.cautions, *(c for c in new.cautions if c not in old.cautions)]:
        if (text in old.cautions) is not (text in new.cautions):
            yield Difference(Area.CAUTIONS, text, "", *(
                (_("stands"), "") if text in old.cautions else ("", _("stands"))))


def _mix(before: Snapshot, after: Snapshot) -> Iterator[Difference]:
    old, new = before.amounts, after.amounts
    whole = max(math.fsum(old.values()), math.fsum(new.values()))
    blend = after.formula.amounts is Amounts.BLEND
    scale, unit = (100.0, "%") if blend else (1.0, "kg/day")
    for key in sorted({*old, *new}, key=lambda key: (-new.get(key, 0.0), -old.get(key, 0.0), key)):
        was, now = old.get(key), new.get(key)
        if not _same(was or 0.0, now or 0.0, whole):
            holder = after if key in after.admitted else before
            yield Difference(
                Area.MIX, holder.library.ingredient(key).name, "", None if was is None else was * scale,
                None if now is None else now * scale, unit,
            )


def _same(one: float | None, other: float | None, whole: float) -> bool:
    if one is None or other is None:
        return one is other
    return abs(one - other) <= _SAME * whole
