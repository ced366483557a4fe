"""Both-sided prices, how far they hold, and price ranges: by solving again, for every kind of linear limit."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from blendapp.optimise.program import Bound, Program, Row
from blendapp.optimise.sensitivity import sensitivity
from blendapp.optimise.solve import solve
from tests.optimise import made, resolving

PRICE = np.array([200.0, 420.0, 1500.0])
PROTEIN = np.array([10.0, 46.0, 95.0])
LYSINE = np.array([0.30, 2.90, 78.8])


def blend(*limits: Row, price: np.ndarray = PRICE, bounds: tuple[Bound, ...] = ()) -> Program:
    n = price.size
    return Program(price, np.zeros(n), np.ones(n), (Row(np.ones(n), 1.0, 1.0), *limits), bounds)


@settings(max_examples=60, deadline=None, derandomize=True)
@given(made.programs(degenerate=False))
def test_prices_reach_and_ranges_are_what_solving_again_gives(program: Program) -> None:
    solution = solve(program)
    assert not resolving.faults(program, solution, sensitivity(solution))


@settings(max_examples=100, deadline=None, derandomize=True)
@given(made.programs(degenerate=True))
def test_they_are_so_at_degenerate_optima_too(program: Program) -> None:
    solution = solve(program)
    assert not resolving.faults(program, solution, sensitivity(solution))


def test_the_check_values_of_the_three_ingredient_mix() -> None:
    """75, 25, 0 %: protein 6.111 and 5.332, lysine 10.787 and 0, where a solver says 6.111 and 0."""
    found = sensitivity(solve(blend(Row(PROTEIN, 19.0, None, limit=0), Row(LYSINE, 0.95, None, limit=1))))
    protein, lysine = found.limits[0], found.limits[1]
    assert protein.tighten_cost == pytest.approx(6.111, abs=5e-4)
    assert protein.relax_saving == pytest.approx(5.332, abs=5e-4)
    assert lysine.tighten_cost == pytest.approx(10.787, abs=5e-4)
    assert lysine.relax_saving == 0.0
    assert protein.unique is False
    assert lysine.unique is False
    assert protein.tighten_holds_to == pytest.approx(46.0)
    assert lysine.relax_holds_to is None


def test_a_target_has_signed_costs_of_raising_and_lowering() -> None:
    found = sensitivity(solve(blend(Row(PROTEIN, 25.0, 25.0, limit=0))))
    prices = found.limits[0]
    assert prices.tighten_cost is None
    assert prices.relax_saving is None
    assert prices.raise_cost == pytest.approx(220 / 36)
    assert prices.lower_cost == pytest.approx(-220 / 36)
    assert prices.binding == "minimum"
    assert prices.raise_holds_to == pytest.approx(46.0)
    assert prices.lower_holds_to == pytest.approx(10.0)


def test_a_bound_that_cannot_be_stricter_has_no_cost_of_tightening() -> None:
    program = blend(Row(PROTEIN, 46.0, None, limit=0), price=PRICE, bounds=(Bound(2, None, 0.0, 1),))
    found = sensitivity(solve(program))
    assert found.limits[0].tighten_cost is None
    assert found.limits[0].tighten_holds_to is None
    assert found.limits[0].relax_saving == pytest.approx(220 / 36)


def test_doubled_limits_save_nothing_when_only_one_is_relaxed() -> None:
    twice = blend(Row(PROTEIN, 19.0, None, limit=0), Row(PROTEIN * 10, 190.0, None, limit=1))
    found = sensitivity(solve(twice))
    assert found.limits[0].relax_saving == 0.0
    assert found.limits[0].tighten_cost == pytest.approx(220 / 36)
    assert found.limits[1].tighten_cost == pytest.approx(220 / 360)


def test_a_limit_that_does_not_bind_costs_nothing() -> None:
    found = sensitivity(solve(blend(Row(PROTEIN, 19.0, 30.0, limit=0), Row(LYSINE, 0.2, None, limit=1))))
    assert found.limits[1] == (None, True, 0.0, None, 0.0, None, None, None, None, None)


def test_a_bound_that_multiplies_amounts_tells_no_reach() -> None:
    dry = np.array([0.88, 0.90, 0.99])
    found = sensitivity(solve(blend(Row(PROTEIN * dry, 22.0, None, dry, limit=0))))
    prices = found.limits[0]
    assert prices.tighten_cost is not None
    assert prices.tighten_cost > 0
    assert prices.tighten_holds_to is None
    assert prices.relax_holds_to is None


def test_a_ratio_among_tied_mixes_has_two_slopes_though_its_dual_is_unique() -> None:
    """Columns 1 and 2 cost the same per unit of need but differ in what the bound multiplies."""
    divisor = np.array([1.0, 2.0, 4.0])
    numerator = np.array([0.0, 3.0, 5.0])
    price = np.array([100.0, 0.0, 0.0])
    # reduced costs of both nought at the dual y = 50: price = 100 + 50 (numerator - divisor)
    price[1:] = 100.0 + 50.0 * (numerator - divisor)[1:] - 50.0 * -1.0
    program = blend(Row(numerator, 1.0, None, divisor, limit=0), price=price)
    solution = solve(program)
    found = sensitivity(solution)
    assert not found.unique_optimum
    prices = found.limits[0]
    assert prices.tighten_cost is not None
    assert prices.relax_saving is not None
    assert not prices.unique
    assert prices.tighten_cost < prices.relax_saving
    assert not resolving.faults(program, solution, found)


def test_break_even_is_the_price_at_which_an_idle_ingredient_comes_in() -> None:
    program = blend(Row(PROTEIN, 19.0, None, limit=0), Row(LYSINE, 0.95, None, limit=1))
    found = sensitivity(solve(program))
    assert np.isnan(found.break_even[:2]).all()
    limit = found.break_even[2]
    for price, used in ((limit * 1.0001, False), (limit * 0.9999, True)):
        solution = solve(dataclasses.replace(program, cost=np.array([200.0, 420.0, price])))
        assert solution.x is not None
        assert (solution.x[2] > 0) == used


def test_a_twin_may_not_become_dearer_nor_its_idle_twin_cheaper() -> None:
    program = made.with_twin(blend(Row(PROTEIN, 19.0, None, limit=0), price=PRICE), 0)
    solution = solve(program)
    found = sensitivity(solution)
    assert solution.x is not None
    used, idle = (0, 3) if solution.x[0] > 0 else (3, 0)
    assert solution.x[idle] == 0.0
    assert found.price_high[used] == pytest.approx(200.0)
    assert found.break_even[idle] == pytest.approx(200.0)
    assert not found.unique_optimum


@settings(max_examples=30, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6), extra=st.integers(1, 8))
def test_many_limits_at_one_point_are_still_priced_right(seed: int, extra: int) -> None:
    """Every limit of the program is moved onto the value of its answer: p is as large as it can be."""
    program = made.program(seed, 8, 4 + extra)
    solution = solve(program)
    rows = []
    for row in program.rows:
        if row.limit is None:
            rows.append(row)
            continue
        value = solution.limits[row.limit].value
        maximum = row.minimum is None
        rows.append(dataclasses.replace(row, minimum=None if maximum else value, maximum=value if maximum else None))
    tight = dataclasses.replace(program, rows=tuple(rows))
    again = solve(tight)
    assert not resolving.faults(tight, again, sensitivity(again))


def test_an_answer_that_is_none_has_no_prices() -> None:
    with pytest.raises(ValueError, match="only an answer"):
        sensitivity(solve(blend(Row(PROTEIN, 96.0, None, limit=0))))
