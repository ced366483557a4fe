"""What the price of a limit means and how far it holds, in a sentence with its numbers and units. No Qt."""

from __future__ import annotations

import math

from blendapp.desk.meet.words import bound_words, money, step_words, tag_step
from blendapp.domain.formulas import LimitKind
from blendapp.domain.results import LimitResult, Side
from blendapp.domain.wording import _


def price_sentence(
    found: LimitResult, name: str, decimals: int, currency: str, per: str, *, given: bool = False
) -> str:
    """Both sides of a working limit; that it has room, of another; "" without an answer.

    currency, per: of the cost. given: whether prices hold for the chosen ingredients only.
    """
    if found.value is None:
        return ""
    if found.binding is None:
        return _("{name} has room: moving this limit a little does not change the cost.").format(name=name)
    bound = found.minimum if found.binding is Side.MINIMUM else found.maximum
    if bound is None:
        return ""
    if found.kind is LimitKind.COUNT:
        return _("{name} is at its greatest count; a count has no price by the unit.").format(name=name)
    if found.shadow_price_unique is False and found.relax_saving is None and found.raise_cost is None and (
            found.tighten_cost is None and found.lower_cost is None):
        return _(
            "{name} holds the mix, but at this mix more than one price fits, so none is shown; move the end to see."
        ).format(name=name)
    at = f"{bound_words(bound, decimals)} {found.unit}".strip()
    if found.minimum is not None and found.minimum == found.maximum:
        head = _("{name} is held at {at}").format(name=name, at=at)
        parts = _target(found, bound, decimals, currency, per)
    else:
        side = _("minimum") if found.binding is Side.MINIMUM else _("maximum")
        head = _("{name} holds the mix at its {side} of {at}").format(name=name, side=side, at=at)
        parts = _sides(found, bound, decimals, currency, per)
    if given:
        head = _("Given these ingredients, {sentence}").format(sentence=head)
    return f"{head}: {'; '.join(parts)}." if parts else f"{head}."


def _sides(found: LimitResult, bound: float, decimals: int, currency: str, per: str) -> list[str]:
    minimum = found.binding is Side.MINIMUM
    parts = []
    if found.relax_saving is not None:
        way = _("{step} less") if minimum else _("{step} more")
        parts.append(_part(found, way, bound, found.relax_holds_to, -found.relax_saving, decimals, currency, per))
    if found.tighten_cost is not None:
        way = _("{step} more") if minimum else _("{step} less")
        parts.append(_part(found, way, bound, found.tighten_holds_to, found.tighten_cost, decimals, currency, per))
    elif found.relax_saving is not None:
        parts.append(_("no higher minimum can be met") if minimum else _("no lower maximum can be met"))
    if _bends(found) and parts:
        parts.append(_("how far that holds cannot be said, since this bound multiplies amounts"))
    return parts


def _target(found: LimitResult, bound: float, decimals: int, currency: str, per: str) -> list[str]:
    parts = []
    for way, cost, none in (
        (_("{step} more"), found.raise_cost, _("it cannot be raised")),
        (_("{step} less"), found.lower_cost, _("it cannot be lowered")),
    ):
        parts.append(none if cost is None else _part(found, way, bound, None, cost, decimals, currency, per))
    return parts


def _part(
    found: LimitResult, way: str, bound: float, holds_to: float | None, cost: float, decimals: int, currency: str,
    per: str,
) -> str:
    """One side: "0.0125 % less saves 0.16 USD/t, as far as 1.20 %"."""
    step = tag_step(bound, decimals, holds_to)
    moved = way.format(step=f"{step_words(step, decimals)} {found.unit}".strip())
    change = abs(cost) * step
    words = {"moved": moved, "money": money(change, currency, per)}
    if not change or not math.isfinite(change):
        text = _("{moved} changes nothing").format(**words)
    else:
        text = (_("{moved} costs {money}") if cost > 0 else _("{moved} saves {money}")).format(**words)
    if holds_to is None or not change:
        return text
    return _("{text}, as far as {to}").format(text=text, to=f"{bound_words(holds_to, decimals)} {found.unit}".strip())


def _bends(found: LimitResult) -> bool:
    """Whether the cost bends everywhere as the bound moves, so that no end of its price can be given."""
    return found.relax_holds_to is None and found.tighten_holds_to is None and (
        found.kind is LimitKind.RATIO or found.basis not in (None, "as fed", "per day"))
