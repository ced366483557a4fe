"""Shadow prices in a terminal: both sides, with figures that show, and nothing where moving a limit costs nothing."""

from __future__ import annotations

from dataclasses import replace

import pytest

from blendapp.cli.as_text import price_words
from blendapp.domain.formulas import LimitKind
from blendapp.domain.results import LimitResult, Result, Side
from blendapp.services.formulate import formulate
from tests.mills import TODAY, three_ingredients

HELD = LimitResult(
    0, 1, LimitKind.NUTRIENT, "Lysine", None, "as fed", "%", 0.95, None, 0.95, Side.MINIMUM, True
)


@pytest.fixture(scope="module")
def result() -> Result:
    library, feed = three_ingredients()
    return formulate(library, feed.id, TODAY)


def test_both_sides_of_a_degenerate_optimum_are_told(result: Result) -> None:
    protein, lysine = result.limits[:2]
    assert price_words(protein, result) == "1 % more costs 6.111, 1 % less saves 5.332 USD/t"
    assert price_words(lysine, result) == "1 % more costs 10.79 USD/t"


@pytest.mark.parametrize(
    ("figures", "words"),
    [
        ({"tighten_cost": 0.0008151, "relax_saving": 0.0008151},
         "1 % more costs 0.0008151, 1 % less saves 0.0008151 USD/t"),
        ({"binding": Side.MAXIMUM, "tighten_cost": 2.5, "relax_saving": 1.25},
         "1 % less costs 2.500, 1 % more saves 1.250 USD/t"),
        ({"tighten_cost": None, "relax_saving": 3.0}, "1 % less saves 3.000 USD/t"),
        ({"raise_cost": 5.0, "lower_cost": -2.0}, "1 % more costs 5.000, 1 % less saves 2.000 USD/t"),
        ({"raise_cost": 5.0, "lower_cost": 2.0}, "1 % more costs 5.000, 1 % less costs 2.000 USD/t"),
        ({"tighten_cost": 0.0, "relax_saving": 0.0}, ""),
        ({"binding": None, "tighten_cost": 0.0, "relax_saving": 0.0}, ""),
        ({"shadow_price_unique": False}, "more than one price fits"),
        ({"shadow_price_unique": None}, ""),
    ],
)
def test_each_side_says_whether_it_costs_or_saves(figures: dict[str, object], words: str, result: Result) -> None:
    assert price_words(replace(HELD, **figures), result) == words  # type: ignore[arg-type]
