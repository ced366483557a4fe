"""Shadow prices in money per displayed unit, held against the costs of formulas with the bound moved."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

import pytest

from blendapp.domain.formulas import Amounts
from blendapp.domain.library import Library
from blendapp.domain.records import Change
from blendapp.domain.results import LimitResult, Result, Side, Status
from blendapp.services.formulate import formulate
from tests.mills import TODAY, Maker, three_ingredients
from tests.services.test_formulate import feeds

# Moved by this share of a bound, a cost that is linear there moves by its slope to about nine digits.
STEP = 1e-6


def cost_with(library: Library, limit_id: int, **bounds: float | None) -> float:
    moved = library.copy()
    limit = moved.limit(limit_id)
    moved.apply([Change(limit, replace(limit, **bounds))])
    result = formulate(moved, 1, TODAY)
    assert result.cost is not None, result.cause
    return result.cost


def slopes(library: Library, one: LimitResult, side: Side) -> tuple[float, float]:
    """(cost of tightening, saving of loosening) by one displayed unit, from two more formulas."""
    bound = one.minimum if side is Side.MINIMUM else one.maximum
    assert bound is not None
    here = cost_with(library, one.limit_id)
    step = STEP * max(abs(bound), 1e-3)
    inward = step if side is Side.MINIMUM else -step
    tighter = cost_with(library, one.limit_id, **{str(side): bound + inward})
    looser = cost_with(library, one.limit_id, **{str(side): bound - inward})
    return (tighter - here) / step, (here - looser) / step


BLEND: list[tuple[str, Any, float | None, float | None, dict[str, Any]]] = [
    ("nutrient", "Protein", 17.0, None, {}),
    ("nutrient", "Lysine", 0.9, None, {"unit": "%"}),
    ("nutrient", "Energy", 2950.0, None, {"unit": "kcal/kg"}),
    ("nutrient", "Protein", None, 24.0, {"basis": "dry matter"}),
    ("ingredient", "Salt", 3.1, 3.1, {"unit": "kg/t"}),
    ("ingredient", "Silage", None, 2.3, {}),
    ("ingredient", "Hay", 1.7, None, {"unit": "lb/short ton"}),
    ("group", ["Soybean meal", "Rapeseed meal"], None, 26.0, {}),
    ("ratio", "Lysine", None, 0.75, {"per": "Energy", "unit": "g/MJ"}),
    ("nutrient", "Zinc", 38.0, None, {"unit": "g/t", "basis": "at 88 % dry matter"}),
]
RATION: list[tuple[str, Any, float | None, float | None, dict[str, Any]]] = [
    ("nutrient", "Dry matter", None, 21.3, {"basis": "per day"}),
    ("nutrient", "Energy", 57.0, None, {"basis": "per day", "unit": "Mcal/day"}),
    ("nutrient", "Protein", 3350.0, None, {"basis": "per day", "unit": "g/day"}),
    ("ingredient", "Hay", 5.1, None, {"unit": "lb/day"}),
    ("group", ["Silage", "Hay"], None, 58.0, {"unit": "% of dry matter"}),
    ("ingredient", "Salt", 55.0, 55.0, {"unit": "g/day"}),
    ("nutrient", "Lysine", 6.1, None, {"basis": "dry matter"}),
]


@pytest.mark.parametrize(("amounts", "limits"), [(Amounts.BLEND, BLEND), (Amounts.RATION, RATION)])
def test_a_shadow_price_is_what_moving_the_bound_costs_and_saves(amounts: Amounts, limits: list[Any]) -> None:
    make = feeds()
    feed = make.formula(amounts=amounts)
    for kind, name, minimum, maximum, more in limits:
        make.limit(feed, kind, name, minimum, maximum, **more)
    library = make.library
    result = formulate(library, feed.id, TODAY)
    assert result.status is Status.OPTIMAL, result.cause
    checked = 0
    for one in result.limits:
        if one.minimum is not None and one.minimum == one.maximum:
            assert (one.tighten_cost, one.relax_saving) == (None, None)
            step = STEP * one.minimum
            here = cost_with(library, one.limit_id)
            raised = cost_with(library, one.limit_id, minimum=one.minimum + step, maximum=one.minimum + step)
            lowered = cost_with(library, one.limit_id, minimum=one.minimum - step, maximum=one.minimum - step)
            assert one.raise_cost == pytest.approx((raised - here) / step, rel=1e-4, abs=1e-6)
            assert one.lower_cost == pytest.approx((lowered - here) / step, rel=1e-4, abs=1e-6)
            checked += 1
            continue
        assert (one.raise_cost, one.lower_cost) == (None, None)
        if one.binding is None:
            assert (one.tighten_cost, one.relax_saving) == (0, 0)
            continue
        assert one.shadow_price_unique is True, one.name
        tighten, relax = slopes(library, one, one.binding)
        assert one.tighten_cost == pytest.approx(tighten, rel=1e-4, abs=1e-6), one.name
        assert one.relax_saving == pytest.approx(relax, rel=1e-4, abs=1e-6), one.name
        checked += 1
    assert checked >= 4


def degenerate() -> Result:
    library, feed = three_ingredients()
    return formulate(library, feed.id, TODAY)


def test_the_mix_of_the_degenerate_example_is_75_25_0() -> None:
    result = degenerate()
    assert {i.name: i.amount for i in result.ingredients} == pytest.approx(
        {"Maize": 0.75, "Soybean meal": 0.25, "Lysine HCl": 0.0}, abs=1e-12
    )
    assert result.cost == pytest.approx(255, rel=1e-12)
    assert [one.binding for one in result.limits] == [Side.MINIMUM, Side.MINIMUM]


def test_both_sides_of_a_degenerate_limit_are_shown_and_never_a_solvers_one_dual() -> None:
    """A solver's dual is 6.111 for protein, where less saves 5.332, and 0 for lysine, where more costs 10.787."""
    found = {}
    for one in degenerate().limits:
        assert one.shadow_price_unique is False
        assert (one.raise_cost, one.lower_cost) == (None, None)
        found[one.name] = (one.tighten_cost, one.relax_saving)
    assert found["Crude protein"] == pytest.approx((6.111, 5.332), abs=5e-4)
    assert found["Lysine"] == pytest.approx((10.787, 0.0), abs=5e-4)


def test_both_sides_of_a_degenerate_limit_are_what_moving_its_bound_costs_and_saves() -> None:
    library, _feed = three_ingredients()
    for one in degenerate().limits:
        tighten, relax = slopes(library, one, Side.MINIMUM)
        assert one.tighten_cost == pytest.approx(tighten, rel=1e-4, abs=1e-6)
        assert one.relax_saving == pytest.approx(relax, rel=1e-4, abs=1e-6)


def test_a_shadow_price_holds_as_far_as_is_said_and_no_further() -> None:
    """Up to the bound that is shown the cost is a straight line; beyond it the mix changes and costs more."""
    library, _feed = three_ingredients()
    here = degenerate().cost
    assert here is not None
    checked = 0
    for one in degenerate().limits:
        assert one.minimum is not None
        assert one.tighten_cost is not None
        end = one.tighten_holds_to
        assert end is not None
        assert end > one.minimum
        halfway = (one.minimum + end) / 2
        for bound in (halfway, end):
            cost = cost_with(library, one.limit_id, minimum=bound)
            assert cost == pytest.approx(here + one.tighten_cost * (bound - one.minimum), rel=1e-9)
        moved = library.copy()
        limit = moved.limit(one.limit_id)
        moved.apply([Change(limit, replace(limit, minimum=end + 0.01 * (end - one.minimum)))])
        beyond = formulate(moved, 1, TODAY)
        if beyond.cost is not None:
            assert beyond.cost > here + one.tighten_cost * 1.01 * (end - one.minimum) * (1 + 1e-9)
        checked += 1
    assert checked == 2


@pytest.mark.parametrize(("target", "sign"), [(30.0, 1), (5.0, -1)])
def test_raising_a_target_costs_where_lowering_it_saves(target: float, sign: int) -> None:
    make = Maker()
    make.nutrient("Protein")
    make.nutrient("Fibre")
    make.ingredient("Straw", 60 if sign > 0 else 900, {"Protein": 4.0, "Fibre": 40.0})
    make.ingredient("Meal", 400, {"Protein": 46.0, "Fibre": 6.0})
    feed = make.formula()
    make.limit(feed, "nutrient", "Protein", target, target)
    (one,) = formulate(make.library, feed.id, TODAY).limits
    assert one.raise_cost == pytest.approx((400 - (60 if sign > 0 else 900)) / 42, rel=1e-9)
    assert one.lower_cost == pytest.approx(-one.raise_cost, rel=1e-9)
    assert one.binding is (Side.MINIMUM if sign > 0 else Side.MAXIMUM)
    assert (one.tighten_cost, one.relax_saving) == (None, None)


def test_a_limit_that_holds_the_mix_but_costs_nothing_binds_all_the_same() -> None:
    make = Maker()
    make.ingredient("A", 200)
    make.ingredient("B", 300)
    feed = make.formula()
    make.limit(feed, "ingredient", "A", None, 100.0)
    (one,) = formulate(make.library, feed.id, TODAY).limits
    assert one.value == 100
    assert one.binding is Side.MAXIMUM
