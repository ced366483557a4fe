"""What limits and their prices are called, in words and units. No Qt."""

from __future__ import annotations

import math

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


def money(value: float, currency_per: str) -> str:
    """An amount of money of a tag: two decimals, more where it is small; "/t" or "/day" behind it."""
    decimals = 2 if abs(value) >= 0.1 else min(decimals_of(value, significant=2, least=2), 5)
    return _("{amount} /{per}").format(amount=notation().write(value, decimals), per=currency_per)


def tag_step(bound: float, decimals: int, holds_to: float | None = None) -> float:
    """The change of a bound that a tag prices: a round figure near a fiftieth of it, no more than the price holds."""
    size = abs(bound) * 0.02
    step = 10.0 ** round(math.log10(size)) if size > 0 else 10.0**-decimals
    step = max(step, 10.0**-decimals)
    if holds_to is not None and 0 < abs(holds_to - bound) < step:
        room = abs(holds_to - bound)
        # Down to what can be shown, so that the money is that of the step as it is read.
        shown = math.floor(room * 10.0**decimals + 1e-9) / 10.0**decimals
        return shown or room
    return step


def bound_words(value: float, decimals: int) -> str:
    """A bound or a step with the decimals of its limit, more where it would be 0."""
    shown = max(decimals, decimals_of(value, significant=1)) if 0 < abs(value) < 10.0**-decimals else decimals
    return notation().write(value, shown)


def tag_words(found: LimitResult, decimals: int, per: str) -> str:
    """What a working wall costs, short enough for its tag; "" where nothing is to be said."""
    if found.binding is None:
        return ""
    bound = found.minimum if found.binding is Side.MINIMUM else found.maximum
    if bound is None:
        return ""
    if found.shadow_price_unique is False and found.relax_saving is None and found.raise_cost is None:
        return _("more than one price fits")
    if found.raise_cost is not None or found.lower_cost is not None:
        return _target_words(found, bound, decimals, per)
    if found.relax_saving is not None and found.relax_saving > 0:
        return _relax_words(found, bound, decimals, per)
    if found.tighten_cost is not None and found.tighten_cost > 0:
        step = tag_step(bound, decimals, found.tighten_holds_to)
        text = _("{step} more costs {money}") if found.binding is Side.MINIMUM else _("{step} less costs {money}")
        return text.format(step=bound_words(step, decimals), money=money(found.tighten_cost * step, per))
    return ""


def _relax_words(found: LimitResult, bound: float, decimals: int, per: str) -> str:
    assert found.relax_saving is not None
    step = tag_step(bound, decimals, found.relax_holds_to)
    words = {"step": bound_words(step, decimals), "money": money(found.relax_saving * step, per)}
    minimum = found.binding is Side.MINIMUM
    if found.relax_holds_to is None:
        text = _("{step} less saves {money}") if minimum else _("{step} more saves {money}")
        return text.format(**words)
    words["to"] = bound_words(found.relax_holds_to, decimals)
    text = _("{step} less saves {money}, to {to}") if minimum else _("{step} more saves {money}, to {to}")
    return text.format(**words)


def _target_words(found: LimitResult, bound: float, decimals: int, per: str) -> str:
    step = tag_step(bound, decimals)
    parts: list[tuple[bool, str]] = []
    for cost, costs, saves in (
        (found.raise_cost, _("{step} more costs {money}"), _("{step} more saves {money}")),
        (found.lower_cost, _("{step} less costs {money}"), _("{step} less saves {money}")),
    ):
        if cost:
            text = costs if cost > 0 else saves
            words = text.format(step=bound_words(step, decimals), money=money(abs(cost) * step, per))
            # What saves is said before what costs.
            parts.append((cost > 0, words))
    return ", ".join(words for _costs, words in sorted(parts))


def cost_rank(found: LimitResult) -> float:
    """The money of a limit's tag, for the order of the list; 0 for one that does not bind."""
    bound = found.minimum if found.binding is Side.MINIMUM else found.maximum
    if found.binding is None or bound is None:
        return 0.0
    prices = (found.relax_saving, found.tighten_cost, found.raise_cost, found.lower_cost)
    price = max((abs(one) for one in prices if one is not None), default=0.0)
    return price * tag_step(bound, limit_decimals(bound), found.relax_holds_to) + 1e-12


def per_of(formula: Formula) -> str:
    """What the cost is per."""
    return "t" if formula.amounts is Amounts.BLEND else _("day")
