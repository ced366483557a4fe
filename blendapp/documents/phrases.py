"""Limits and amounts in words, the same on every page."""

from __future__ import annotations

import math
from collections.abc import Iterable

from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.figures import decimals_of
from blendapp.domain.notation import notation
from blendapp.domain.results import LimitResult, NutrientResult, Side
from blendapp.domain.wording import _


def special(cautions: Iterable[str]) -> list[str]:
    """The cautions but for the general one, which stands at the foot of every page."""
    general = {GENERAL_CAUTION, _(GENERAL_CAUTION)}
    return [caution for caution in cautions if caution not in general]


def limit_name(limit: LimitResult) -> str:
    """"Lysine", "Calcium : Phosphorus", with the basis where it is not as fed."""
    name = f"{limit.name} : {limit.per}" if limit.per else limit.name
    if limit.basis and limit.basis != "as fed":
        return f"{name}, {basis_words(limit.basis)}"
    return name


def basis_words(basis: str) -> str:
    """A basis as the person reads it."""
    if basis == "dry matter":
        return _("in dry matter")
    if basis == "per day":
        return _("per day")
    stated = basis.removeprefix("at ").removesuffix(" % dry matter")
    if stated != basis:
        return _("at {percent} % dry matter").format(percent=stated.replace(".", notation().decimal))
    return basis


def with_unit(figure: str, unit: str) -> str:
    """A figure with its unit, kept on one line."""
    return f"{figure}\u00a0{unit.replace(' ', chr(160))}" if unit else figure


def typed(value: float | None) -> str:
    """A bound as it was typed."""
    return notation().write_short(value)


def bounds_words(limit: LimitResult) -> str:
    """"at least 0.95 %", "at most 60 %", "18 to 20 %"."""
    low, high = limit.minimum, limit.maximum
    if low is None and high is None:
        return _("no bounds")
    if low is None:
        return _("at most {value}").format(value=with_unit(typed(high), limit.unit))
    if high is None:
        return _("at least {value}").format(value=with_unit(typed(low), limit.unit))
    if low == high:
        return _("exactly {value}").format(value=with_unit(typed(low), limit.unit))
    return _("{least} to {greatest}").format(least=typed(low), greatest=with_unit(typed(high), limit.unit))


def broken_words(limit: LimitResult) -> str:
    """One sentence for a limit that its value does not keep, with by how much."""
    asked, name = bounds_words(limit), limit_name(limit)
    if limit.value is None:
        return _("{name}: asked {asked}, has no value.").format(name=name, asked=asked)
    below = limit.minimum - limit.value if limit.minimum is not None else -math.inf
    above = limit.value - limit.maximum if limit.maximum is not None else -math.inf
    by, bound = (below, limit.minimum) if below >= above else (above, limit.maximum)
    # As many decimals as show the difference with two digits, so that 0.9499 never stands as 0.95.
    decimals = max(decimals_of(by, 2), decimals_of(bound, 3))
    sentence = (
        _("{name}: asked {asked}, comes to {value}, {by} too little.")
        if below >= above
        else _("{name}: asked {asked}, comes to {value}, {by} too much.")
    )
    return sentence.format(
        name=name,
        asked=asked,
        value=with_unit(notation().write(limit.value, decimals), limit.unit),
        by=with_unit(notation().write(by, decimals), limit.unit),
    )


def side_word(side: Side | None) -> str:
    """The side of a limit, or nothing."""
    return {None: "", Side.MINIMUM: _("minimum"), Side.MAXIMUM: _("maximum")}[side]


def missing_words(nutrients: Iterable[NutrientResult]) -> list[str]:
    """One sentence for each nutrient to which an ingredient of the mix brings no known value."""
    return [
        _("{nutrient}: no value known for {ingredients}; counted as 0.").format(
            nutrient=nutrient.name, ingredients=", ".join(nutrient.missing)
        )
        for nutrient in nutrients
        if nutrient.missing and nutrient.value is not None
    ]
