"""What limits and their prices are called, in words and units. No Qt."""

from __future__ import annotations

import math
from dataclasses import dataclass

from blendapp.domain import limit_units, units
from blendapp.domain.figures import decimals_of
from blendapp.domain.formulas import Amounts, Formula, Limit, LimitBasis, LimitKind
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.results import LimitResult, Side
from blendapp.domain.wording import _


def limit_name(library: Library, limit: Limit) -> str:
    """What a limit is about: "Lysine", "Wheat", "Calcium : available phosphorus"."""
    name = library.subject_name(limit.subject)
    if limit.per is not None:
        return _("{name} : {per}").format(name=name, per=library.subject_name(limit.per))
    return name


def limit_unit(library: Library, limit: Limit, amounts: Amounts) -> str:
    """The unit with the word that tells kinds apart: "%", "% DM", "% of mix", "% of mix together"."""
    unit = limit_units.shown_unit(library, limit, amounts)
    if limit.kind is LimitKind.NUTRIENT:
        if limit.basis is LimitBasis.DRY_MATTER:
            return _("{unit} of DM").format(unit=unit)
        if limit.basis is LimitBasis.AT_DRY_MATTER:
            return _("{unit} at {percent} % DM").format(unit=unit, percent=f"{limit.at_dry_matter_percent:g}")
        return unit
    if limit.kind is LimitKind.RATIO:
        return unit or _("ratio")
    if limit.kind is LimitKind.COUNT:
        return _("how many")
    said = _("% of mix") if unit == "%" else _("% of DM") if unit == units.SHARE_OF_DRY_MATTER else unit
    if limit.kind is LimitKind.GROUP:
        return _("{unit} together").format(unit=said)
    if limit.kind is LimitKind.PRACTICAL:
        return _("{unit}, or none").format(unit=said)
    return said


def kind_word(kind: LimitKind) -> str:
    """The kind of a limit in a word."""
    return {
        LimitKind.NUTRIENT: _("nutrient"), LimitKind.INGREDIENT: _("ingredient"), LimitKind.GROUP: _("group"),
        LimitKind.RATIO: _("ratio"), LimitKind.PRACTICAL: _("practical minimum"), LimitKind.COUNT: _("count"),
    }[kind]


def limit_decimals(*values: float | None) -> int:
    """The decimals that show the bounds of a limit as entered and its value to at least three figures."""
    least = 0
    for value in values:
        if value is not None:
            shown = f"{value:.6f}".rstrip("0").partition(".")[2]
            least = max(least, len(shown))
    size = max((abs(value) for value in values if value), default=0.0)
    fair = 0 if size >= 100 else 1 if size >= 10 else 2 if size >= 0.1 else 3
    return min(max(least, fair), 6)


def money(value: float, currency: str, per: str) -> str:
    """An amount of money of a tag, "2.92 USD/t": two decimals, more where it is small."""
    decimals = 2 if abs(value) >= 0.1 else min(decimals_of(value, significant=2, least=2), 5)
    return _("{amount} {currency}/{per}").format(
        amount=notation().write(value, decimals), currency=currency, per=per)


def tag_step(bound: float, decimals: int, holds_to: float | None = None) -> float:
    """The change of a bound that a tag prices: a hundredth of it for every limit, so that tags compare.

    Of a bound at 0 it is the last digit shown. Never more than the price holds.
    """
    step = abs(bound) * 0.01 or 10.0**-decimals
    if holds_to is not None and 0 < abs(holds_to - bound) < step:
        room = abs(holds_to - bound)
        # Down to what is shown, so that the money is that of the step as it is read.
        shown = math.floor(room * 10.0 ** (decimals + 2) + 1e-9) / 10.0 ** (decimals + 2)
        return shown or room
    return step


def step_words(step: float, decimals: int) -> str:
    """A step in full: a hundredth of a bound has two decimals more than the bound."""
    most = decimals + 2
    return notation().write_short(step, most if step >= 10.0**-most else decimals_of(step, significant=2))


def bound_words(value: float, decimals: int) -> str:
    """A bound with the decimals of its limit, more where it would be 0."""
    shown = max(decimals, decimals_of(value, significant=1)) if 0 < abs(value) < 10.0**-decimals else decimals
    return notation().write(value, shown)


@dataclass(frozen=True)
class Tagged:
    """One thing that a tag says: what a step of the bound does to the cost, below 0 saving."""

    step: float
    cost: float
    raised: bool
    holds_to: float | None = None


def tagged(found: LimitResult, decimals: int) -> list[Tagged]:
    """What the tag of a working wall says, savings first; nothing where nothing is to be said."""
    bound = found.minimum if found.binding is Side.MINIMUM else found.maximum
    if found.binding is None or bound is None:
        return []
    minimum = found.binding is Side.MINIMUM
    if found.raise_cost is not None or found.lower_cost is not None:
        step = tag_step(bound, decimals)
        sides = ((found.raise_cost, True), (found.lower_cost, False))
        return sorted((Tagged(step, cost * step, raised) for cost, raised in sides if cost),
                      key=lambda one: (one.cost > 0, not one.raised))
    if found.relax_saving is not None and found.relax_saving > 0:
        step = tag_step(bound, decimals, found.relax_holds_to)
        return [Tagged(step, -found.relax_saving * step, not minimum, found.relax_holds_to)]
    if found.tighten_cost is not None and found.tighten_cost > 0:
        step = tag_step(bound, decimals, found.tighten_holds_to)
        return [Tagged(step, found.tighten_cost * step, minimum)]
    return []


def tag_words(found: LimitResult, decimals: int, currency: str, per: str) -> str:
    """What a working wall costs, short enough for its tag; "" where nothing is to be said."""
    if found.binding is None:
        return ""
    if found.shadow_price_unique is False and found.relax_saving is None and found.raise_cost is None:
        return _("more than one price fits")
    texts = {
        (True, True): _("{step} more costs {money}"), (True, False): _("{step} more saves {money}"),
        (False, True): _("{step} less costs {money}"), (False, False): _("{step} less saves {money}"),
    }
    parts = []
    for one in tagged(found, decimals):
        text = texts[one.raised, one.cost > 0].format(
            step=step_words(one.step, decimals), money=money(abs(one.cost), currency, per))
        if one.holds_to is not None:
            text = _("{text}, to {to}").format(text=text, to=bound_words(one.holds_to, decimals))
        parts.append(text)
    return ", ".join(parts)


def cost_rank(found: LimitResult, decimals: int) -> float:
    """The money that a limit's tag says, for the order of the list; 0 for one that does not bind.

    One that binds without a figure stands just above those that do not.
    """
    if found.binding is None:
        return 0.0
    return max((abs(one.cost) for one in tagged(found, decimals)), default=0.0) + 1e-12


def per_of(formula: Formula) -> str:
    """What the cost is per."""
    return "t" if formula.amounts is Amounts.BLEND else _("day")
