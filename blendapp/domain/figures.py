"""How many decimals a figure is shown with, so that screen, terminal and page show the same digits."""

from __future__ import annotations

import math
from collections.abc import Sequence

from blendapp.domain.notation import notation
from blendapp.domain.units import LB_KG, VOLUME_L

_MOST_DECIMALS = 9
PERCENT_DECIMALS = 3  # of a share of a mix in %: 10 g in a tonne still show
DAY_COST_DECIMALS = 4  # of money per head and day: a day of a hen costs cents
# A step that needs no more decimals than this in a unit is taken to be what its scale shows.
_PLAIN_DECIMALS = {"kg": 6, "lb": 4}
_PLAIN_DECIMALS_OF_VOLUME = 4


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
    return notation().write(None if fraction is None else fraction * 100, PERCENT_DECIMALS)


def write_price(value: float | None) -> str:
    """Money per tonne, two decimals."""
    return notation().write(value, 2)


def write_day_cost(value: float | None) -> str:
    """Money per head and day, four decimals: a day of a hen costs cents."""
    return notation().write(value, DAY_COST_DECIMALS)


def write_shadow_price(value: float | None) -> str:
    """Money per unit of a limit: four significant digits, at least two decimals."""
    return notation().write(value, decimals_of(value, least=2))


def write_tiny(value: float | None) -> str:
    """A numerical residue such as 3.1e-12, in the notation in use; 0 is 0."""
    if value is None:
        return ""
    return "0" if value == 0 else f"{value:.1e}".replace(".", notation().decimal)


def mass_in(kg: float, unit: str) -> float:
    """A mass in a unit, "kg" or "lb"."""
    return kg / LB_KG if unit == "lb" else kg


def unit_of_scale(step_kg: float, unit: str) -> str:
    """The unit that a scale shows, "kg" or "lb": `unit` unless its step is a plain number of the other one only."""
    other = "kg" if unit == "lb" else "lb"
    for one in (unit, other):
        if _is_plain(mass_in(step_kg, one), _PLAIN_DECIMALS[one]):
            return one
    return unit


def decimals_of_mass(step_kg: float, unit: str) -> int:
    """The decimals of a mass in a unit, weighed in these steps: exact in the unit that the scale shows.

    In the other one as many as leave an error of at most a tenth of a step, so that the multiple of the step is found
    again from the digits.
    """
    step = mass_in(step_kg, unit)
    if _is_plain(step, _PLAIN_DECIMALS[unit]) or (unit == "kg" and unit_of_scale(step_kg, unit) == "kg"):
        return decimals_of_step(step)
    return max(0, math.ceil(-math.log10(step / 5)))


def decimals_to_add_up(steps_kg: Sequence[float], unit: str) -> int:
    """The decimals with which so many masses in a unit, each rounded, add up to within the finest of their steps.

    At least two, so that the sum of a few coarse ones is near enough to the batch to be added up by hand.
    """
    if not steps_kg:
        return 0
    return max(2, math.ceil(math.log10(0.5 * len(steps_kg) / mass_in(min(steps_kg), unit)) - 1e-9))


def write_mass(kg: float, step_kg: float, unit: str) -> str:
    """A mass in a unit, with the decimals of the step it was weighed in."""
    return notation().write(mass_in(kg, unit), decimals_of_mass(step_kg, unit))


def write_typed_mass(kg: float, unit: str) -> str:
    """A mass in a unit as a person would type it; one typed in the other unit is cut to what a mill can weigh."""
    value = mass_in(kg, unit)
    return notation().write_short(value, 6 if unit == "kg" else max(3, decimals_of(value)))


def unit_of_meter(step_l: float) -> tuple[str, float]:
    """The unit that a liquid meter shows and its litres: the first of litres and gallons in which its step is plain."""
    for name in ("l", "US gal", "imperial gal"):
        if _is_plain(step_l / VOLUME_L[name], _PLAIN_DECIMALS_OF_VOLUME):
            return name, VOLUME_L[name]
    return "l", 1.0


def write_volume(litres: float, step_l: float) -> str:
    """A volume in the unit that its meter shows, with the decimals of its step."""
    _name, unit_l = unit_of_meter(step_l)
    return notation().write(litres / unit_l, decimals_of_step(step_l / unit_l))


def band_in_steps(share_kg: float, tolerance_kg: float, step_kg: float, target_kg: float) -> tuple[float, float]:
    """The least and the most that may be weighed, in steps of the scale: what lies within the tolerance of the share.

    The target is always in it, even where a person set it outside; a line that is weighed at all is at least a step.
    """
    target = round(target_kg / step_kg, 6)
    least = max(1, math.ceil((share_kg - tolerance_kg) / step_kg - 1e-6))
    most = math.floor((share_kg + tolerance_kg) / step_kg + 1e-6)
    return min(least, target), max(most, target)


def _is_plain(step: float, most_decimals: int) -> bool:
    return decimals_of_step(step) <= most_decimals
