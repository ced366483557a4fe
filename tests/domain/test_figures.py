from __future__ import annotations

import pytest

from blendapp.domain.figures import (
    decimals_of,
    decimals_of_step,
    write_kg,
    write_measure,
    write_percent,
    write_shadow_price,
    write_tiny,
)
from blendapp.domain.notation import COMMA, PLAIN, use_notation


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
