from __future__ import annotations

import pytest

from blendapp.domain.figures import (
    band_in_steps,
    decimals_of,
    decimals_of_mass,
    decimals_of_step,
    decimals_to_add_up,
    mass_in,
    unit_of_meter,
    unit_of_scale,
    write_kg,
    write_mass,
    write_measure,
    write_percent,
    write_shadow_price,
    write_tiny,
    write_typed_mass,
    write_volume,
)
from blendapp.domain.notation import COMMA, PLAIN, use_notation
from blendapp.domain.units import LB_KG, VOLUME_L


@pytest.mark.parametrize(
    ("step", "decimals"), [(5, 0), (20, 0), (0.5, 1), (0.25, 2), (0.1, 1), (0.005, 3), (0.001, 3), (2.5, 1)]
)
def test_a_step_needs_as_many_decimals_as_its_multiples_have(step: float, decimals: int) -> None:
    assert decimals_of_step(step) == decimals
    for count in range(1, 200):
        assert float(write_kg(count * step, step)) == pytest.approx(count * step, abs=1e-12)


@pytest.mark.parametrize(
    ("value", "text"),
    [(18.032, "18.03"), (0.94997, "0.9500"), (8000.0, "8000"), (12345.6, "12346"), (0.0, "0"), (-3.14159, "-3.142"),
     (None, "")],
)
def test_a_measure_has_four_significant_digits(value: float | None, text: str) -> None:
    assert write_measure(value) == text


def test_a_shadow_price_has_at_least_two_decimals() -> None:
    assert write_shadow_price(6.11112) == "6.111"
    assert write_shadow_price(12345.678) == "12345.68"


def test_ten_grams_in_a_tonne_still_show() -> None:
    assert write_percent(1e-5) == "0.001"
    assert decimals_of(1e-12) <= 9


def test_a_residue_of_the_arithmetic_is_written_short_in_the_notation() -> None:
    use_notation(COMMA)
    try:
        assert write_tiny(1.34e-12) == "1,3e-12"
    finally:
        use_notation(PLAIN)
    assert write_tiny(0.0) == "0"
    assert write_tiny(None) == ""


@pytest.mark.parametrize("step_lb", [5, 1, 0.5, 0.25, 0.1, 0.01, 0.0625])
def test_a_scale_of_pounds_shows_its_pounds(step_lb: float) -> None:
    step_kg = step_lb * LB_KG
    assert unit_of_scale(step_kg, "lb") == unit_of_scale(step_kg, "kg") == "lb"
    for count in range(1, 200):
        assert float(write_mass(count * step_kg, step_kg, "lb")) == pytest.approx(count * step_lb, abs=1e-12)


@pytest.mark.parametrize("step_kg", [20, 5, 2.5, 0.5, 0.25, 0.1, 0.02, 0.005, 0.001, 0.0001])
def test_the_step_of_a_scale_is_found_again_from_the_digits_of_either_unit(step_kg: float) -> None:
    assert unit_of_scale(step_kg, "lb") == unit_of_scale(step_kg, "kg") == "kg"
    for count in range(1, 2000, 7):
        steps = float(write_mass(count * step_kg, step_kg, "lb")) * LB_KG / step_kg
        assert abs(steps - count) <= 0.1 + 1e-9
        assert write_mass(count * step_kg, step_kg, "kg") == write_kg(count * step_kg, step_kg)


def test_kilograms_of_a_pound_scale_are_fine_enough_and_no_finer() -> None:
    assert decimals_of_mass(5 * LB_KG, "kg") == 1
    assert write_mass(305 * LB_KG, 5 * LB_KG, "kg") == "138.3"
    # 2.268 kg is a step of kilograms that is near 5 lb, and not 5 lb.
    assert unit_of_scale(2.268, "lb") == "kg"


@pytest.mark.parametrize(("count", "step_kg"), [(1, 5), (20, 5), (20, 0.5), (25, 0.001), (200, 0.005)])
def test_rounded_masses_add_up_to_within_a_step(count: int, step_kg: float) -> None:
    decimals = decimals_to_add_up([20, *[step_kg] * (count - 1), step_kg], "lb")
    # Each could be off by half of its last digit, all to the same side.
    assert (count + 1) * 0.5 * 10.0**-decimals <= step_kg / LB_KG
    assert decimals == 2 or (count + 1) * 0.5 * 10.0 ** -(decimals - 1) > step_kg / LB_KG
    assert decimals_to_add_up([], "lb") == 0


def test_a_mass_typed_in_pounds_shows_as_typed() -> None:
    assert write_typed_mass(4000 * LB_KG, "lb") == "4000"
    assert write_typed_mass(0.5 * LB_KG, "lb") == "0.5"
    assert write_typed_mass(2000, "lb") == "4409.245"
    assert write_typed_mass(1870.5, "kg") == "1870.5"
    assert mass_in(LB_KG, "lb") == 1


def test_a_meter_shows_the_unit_in_which_its_step_is_plain() -> None:
    assert unit_of_meter(0.5) == ("l", 1.0)
    assert unit_of_meter(0.25 * VOLUME_L["US gal"])[0] == "US gal"
    assert unit_of_meter(0.5 * VOLUME_L["imperial gal"])[0] == "imperial gal"
    assert write_volume(17 * 0.25 * VOLUME_L["US gal"], 0.25 * VOLUME_L["US gal"]) == "4.25"
    assert write_volume(33.5, 0.5) == "33.5"


@pytest.mark.parametrize(
    ("share", "tolerance", "step", "target", "band"),
    [
        (0.9125, 0.009125, 0.001, 0.921, (904, 921)),
        (0.3, 0.1, 0.1, 0.3, (2, 4)),
        (7.5, 5, 5, 10, (1, 2)),
        (12, 5, 5, 10, (2, 3)),
        # A line that is weighed at all is not weighed as nothing.
        (3, 5, 5, 5, (1, 1)),
        # What a person set outside its tolerance stays the target.
        (100, 2, 5, 120, (20, 24)),
        (102, 1, 5, 100, (20, 20)),
    ],
)
def test_what_may_be_weighed_lies_within_the_tolerance_of_the_share_in_whole_steps(
    share: float, tolerance: float, step: float, target: float, band: tuple[float, float]
) -> None:
    assert band_in_steps(share, tolerance, step, target) == band
