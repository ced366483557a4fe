"""Stigler 1945, The Cost of Subsistence: 77 foods, nine nutrients; transcriptions as told in the data file."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from blendapp.optimise.certificate import check
from blendapp.optimise.exact import prove
from blendapp.optimise.program import Program, Row
from blendapp.optimise.sensitivity import sensitivity
from blendapp.optimise.solve import solve

STIGLER: dict[str, Any] = json.loads((Path(__file__).parent / "data" / "stigler_1945.json").read_text())


def program() -> Program:
    """Dollars a day of each food; nutrients per dollar."""
    foods = STIGLER["table"]
    rows = tuple(
        Row(
            np.array([food["per_usd"][need["nutrient"]] for food in foods]),
            need["minimum_per_day"],
            None,
            limit=i,
        )
        for i, need in enumerate(STIGLER["requirements"])
    )
    n = len(foods)
    return Program(np.ones(n), np.zeros(n), np.full(n, np.inf), rows, names=tuple(food["food"] for food in foods))


def test_the_cheapest_diet_costs_0_108662_dollars_a_day_and_has_five_foods() -> None:
    made = program()
    assert made.size == 77
    solution = solve(made)
    assert solution.x is not None
    check(made, solution)
    assert solution.objective == pytest.approx(0.10866227820675685, rel=1e-12)
    used = {made.names[j]: solution.x[j] for j in solution.x.nonzero()[0]}
    assert used == pytest.approx(STIGLER["computed"]["dollars_per_day"], rel=1e-10)
    assert solution.objective * 365 == pytest.approx(STIGLER["published"]["optimum_per_year_usd"], abs=0.005)


def test_shadow_prices_and_reduced_costs_are_those_of_the_exact_basis() -> None:
    solution = solve(program())
    assert solution.lower_price is not None
    for i, need in enumerate(STIGLER["requirements"]):
        state = solution.limits[i]
        assert state.unique
        target = STIGLER["computed"]["shadow_prices_usd_per_unit"][need["nutrient"]]
        assert state.price == pytest.approx(target, rel=1e-10, abs=1e-15)
    for j, food in enumerate(STIGLER["table"]):
        target = STIGLER["computed"]["reduced_costs_usd"][food["food"]]
        assert solution.lower_price[j] == pytest.approx(target, rel=1e-9, abs=1e-12)


def test_the_optimum_is_proven_exactly_and_its_ranges_are_those_of_the_data() -> None:
    made = program()
    solution = solve(made)
    assert str(prove(solution, as_typed=True).objective) == STIGLER["computed"]["objective_exact"]
    found = sensitivity(solution)
    assert found.unique_optimum
    ranges = STIGLER["computed"]["cost_range"]
    assert len(ranges) == 5
    for j, name in enumerate(made.names):
        if name in ranges:
            assert (found.price_low[j], found.price_high[j]) == pytest.approx(tuple(ranges[name]), rel=1e-9)
        else:
            assert found.break_even[j] == pytest.approx(1.0 - STIGLER["computed"]["reduced_costs_usd"][name], rel=1e-9)
    for i, need in enumerate(STIGLER["requirements"]):
        ends = STIGLER["computed"]["rhs_range"].get(need["nutrient"])
        if ends is not None and found.limits[i].binding:
            prices = found.limits[i]
            assert (prices.relax_holds_to, prices.tighten_holds_to) == pytest.approx(tuple(ends), rel=1e-9)
