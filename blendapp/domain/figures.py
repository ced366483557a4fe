"""How many decimals a figure is shown with, so that screen, terminal and page show the same digits."""

from __future__ import annotations

import math

from blendapp.domain.notation import notation

_MOST_DECIMALS = 9


def decimals_of_step(step_kg: float) -> int:
    """The decimals that every multiple of a scale's step needs: 5 has 0, 0.25 has 2, 0.001 has 3."""
    for decimals in range(_MOST_DECIMALS):
        if math.isclose(round(step_kg, decimals), step_kg, rel_tol=1e-9):
            return decimals
    return _MOST_DECIMALS


def decimals_of(value: float | None, significant: int = 4, least: int = 0) -> int:
    """The decimals that show a value with so many significant digits, at least `least`; 0 has `least`."""
    if not value or not math.isfinite(value):
        return least
    return min(_MOST_DECIMALS, max(least, significant - 1 - math.floor(math.log10(abs(value)))))


def write_kg(kg: float, step_kg: float) -> str:
    """A mass in kg with the decimals of the step it was weighed in."""
    return notation().write(kg, decimals_of_step(step_kg))


def write_measure(value: float | None) -> str:
    """A nutrient or limit value in its own unit: four significant digits, no more; None is the empty text."""
    return notation().write(value, decimals_of(value))


def write_percent(fraction: float | None) -> str:
    """A fraction of a mix in %, with three decimals: 10 g in a tonne still show."""
    return notation().write(None if fraction is None else fraction * 100, 3)


def write_price(value: float | None) -> str:
    """Money per tonne, two decimals."""
    return notation().write(value, 2)


def write_day_cost(value: float | None) -> str:
    """Money per head and day, four decimals: a day of a hen costs cents."""
    return notation().write(value, 4)


def write_shadow_price(value: float | None) -> str:
    """Money per unit of a limit: four significant digits, at least two decimals."""
    return notation().write(value, decimals_of(value, least=2))


def write_tiny(value: float | None) -> str:
    """A numerical residue such as 3.1e-12, in the notation in use; 0 is 0."""
    if value is None:
        return ""
    return "0" if value == 0 else f"{value:.1e}".replace(".", notation().decimal)
