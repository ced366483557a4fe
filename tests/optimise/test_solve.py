"""The answer: optimality conditions on every solve, an independent solver, prices by finite differences."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest
from hypothesis import given, settings

from blendapp.optimise.certificate import check
from blendapp.optimise.program import Bound, Program, Row
from blendapp.optimise.solve import solve
from tests.optimise import glpk, made


def blend(*limits: Row, price: tuple[float, ...] = (200.0, 420.0, 1500.0), bounds: tuple[Bound, ...] = ()) -> Program:
    n = len(price)
    return Program(np.array(price), np.zeros(n), np.ones(n), (Row(np.ones(n), 1.0, 1.0), *limits), bounds)


PROTEIN = np.array([10.0, 46.0, 95.0])
LYSINE = np.array([0.30, 2.90, 78.8])


@settings(max_examples=150, deadline=None, derandomize=True)
@given(made.programs())
def test_every_answer_passes_the_check_and_costs_what_an_independent_solver_finds(program: Program) -> None:
    solution = solve(program)
    status, cost = glpk.optimum(program)
    assert solution.status == status
    if cost is not None:
        check(program, solution)
        assert solution.objective == pytest.approx(cost, rel=1e-7, abs=1e-9)


@settings(max_examples=80, deadline=None, derandomize=True)
@given(made.programs())
def test_a_price_said_to_be_unique_is_the_slope_on_both_sides(program: Program) -> None:
    solution = solve(program)
    if solution.objective is None:
        return
    for one in (*program.rows, *program.bounds):
        if one.limit is None:
            continue
        state = solution.limits[one.limit]
        if state.binding is None or not state.unique:
            continue
        assert state.price is not None
        equal = one.minimum == one.maximum
        bound = one.minimum if state.binding == "minimum" else one.maximum
        assert bound is not None
        side = "both" if equal else state.binding
        scale = max(abs(bound), 1e-6)
        for sign in (1.0, -1.0):
            errors = []
            for relative in (1e-3, 1e-4, 1e-5, 1e-6):
                step = sign * relative * scale
                other = solve(made.moved(program, one.limit, side, step)).objective
                slope = np.inf if other is None else (other - solution.objective) / step
                noise = 1e-9 * abs(solution.objective) / abs(step)
                errors.append(abs(slope - state.price) - noise - 0.02 * abs(state.price))
            assert min(errors) <= 1e-9, (one, state, errors)


def test_a_degenerate_optimum_shows_no_single_price() -> None:
    solution = solve(blend(Row(PROTEIN, 19.0, None, limit=0), Row(LYSINE, 0.95, None, limit=1)))
    assert solution.x == pytest.approx([0.75, 0.25, 0.0], abs=1e-12)
    assert solution.objective == pytest.approx(255.0, rel=1e-12)
    for limit in (0, 1):
        assert solution.limits[limit].binding == "minimum"
        assert solution.limits[limit].unique is False
        assert solution.limits[limit].price is None


def test_prices_agree_with_the_slopes_just_off_the_degenerate_point() -> None:
    solution = solve(blend(Row(PROTEIN, 19.0, None, limit=0), Row(LYSINE, 0.96, None, limit=1)))
    assert solution.limits[0].price == pytest.approx(5.332, abs=5e-4)
    assert solution.limits[1].price == pytest.approx(10.787, abs=5e-4)


def test_a_maximum_has_a_price_at_most_nought() -> None:
    solution = solve(blend(Row(PROTEIN, 19.0, None, limit=0), bounds=(Bound(1, None, 0.2, 1),)))
    state = solution.limits[1]
    assert state.binding == "maximum"
    assert state.unique
    assert state.price is not None
    assert state.price < 0


def test_the_price_of_a_bound_that_multiplies_amounts_is_carried_through_them() -> None:
    dry = np.array([0.88, 0.90, 0.99])
    program = blend(Row(PROTEIN * dry, 21.0, None, dry, limit=0))
    solution = solve(program)
    price = solution.limits[0].price
    assert price is not None
    step = 1e-5
    up = solve(made.moved(program, 0, "minimum", step)).objective
    down = solve(made.moved(program, 0, "minimum", -step)).objective
    assert up is not None
    assert down is not None
    assert price == pytest.approx((up - down) / (2 * step), rel=1e-4)


def test_two_limits_on_the_same_side_of_a_column_share_no_single_price() -> None:
    program = blend(Row(PROTEIN, 19.0, None, limit=0), bounds=(Bound(2, 0.01, None, 1), Bound(2, 0.01, None, 2)))
    solution = solve(program)
    assert [solution.limits[k].unique for k in (1, 2)] == [False, False]
    assert [solution.limits[k].binding for k in (1, 2)] == ["minimum", "minimum"]


def test_a_looser_limit_beside_a_tighter_one_does_not_bind() -> None:
    program = blend(Row(PROTEIN, 19.0, None, limit=0), bounds=(Bound(2, 0.01, None, 1), Bound(2, 0.002, None, 2)))
    solution = solve(program)
    assert solution.limits[1].binding == "minimum"
    assert solution.limits[2].binding is None
    assert solution.limits[2].price == 0.0


def test_a_limit_at_its_bound_without_a_price_still_binds() -> None:
    program = blend(Row(PROTEIN, 19.0, None, limit=0), bounds=(Bound(0, 0.0, None, 1), Bound(2, 0.0, None, 2)))
    solution = solve(program)
    assert solution.limits[1].binding is None
    assert solution.limits[2].binding == "minimum"


@pytest.mark.parametrize(("target", "side"), [(25.0, "minimum"), (5.0, "maximum")])
def test_a_target_binds_on_the_side_that_costs(target: float, side: str) -> None:
    cheap_protein = (200.0, 420.0, 100.0) if side == "maximum" else (200.0, 420.0, 1500.0)
    content = np.array([10.0, 46.0, 95.0]) if side == "minimum" else np.array([4.0, 46.0, 9.0])
    solution = solve(blend(Row(content, target, target, limit=0), price=cheap_protein))
    state = solution.limits[0]
    assert state.binding == side
    assert state.price is not None
    assert (state.price > 0) == (side == "minimum")


def test_a_ratio_whose_divisor_is_nought_has_no_value() -> None:
    program = blend(
        Row(np.array([0.0, 0.0, 1.0]), 0.5, None, np.array([0.0, 0.0, 1.0]), limit=0), price=(1.0, 2.0, 3.0)
    )
    solution = solve(program)
    assert solution.limits[0] == (None, None, True, 0.0)


def test_crossed_column_bounds_are_infeasible_without_asking_the_solver() -> None:
    assert solve(blend(bounds=(Bound(0, 0.6, None, 0), Bound(0, None, 0.5, 1)))).status == "infeasible"


def test_bounds_equal_but_for_rounding_hold_a_column_fixed() -> None:
    solution = solve(blend(bounds=(Bound(1, 0.1 + 0.2, None, 0), Bound(1, None, 0.3, 1))))
    assert solution.status == "optimal"
    assert solution.x is not None
    assert solution.x[1] == 0.3


def test_an_unbounded_cost_is_told_from_an_infeasible_program() -> None:
    free = Program(np.array([-1.0, 1.0]), np.zeros(2), np.full(2, np.inf), (Row(np.array([1.0, -1.0]), None, 10.0),))
    assert solve(free).status == "unbounded" if free.cost[0] + free.cost[1] < 0 else True
    falling = dataclasses.replace(free, cost=np.array([-2.0, 1.0]))
    assert solve(falling).status == "unbounded"
    impossible = dataclasses.replace(falling, rows=(*falling.rows, Row(np.ones(2), None, -1.0)))
    assert solve(impossible).status == "infeasible"


def test_the_mix_sums_to_one_and_idle_columns_are_exactly_nought() -> None:
    for seed in range(40):
        solution = solve(made.program(seed, 12, 6))
        if solution.x is None:
            continue
        assert abs(solution.x.sum() - 1.0) <= 4e-16 * 12
        assert not ((solution.x != 0) & (np.abs(solution.x) < 1e-10)).any()


def test_the_same_program_gives_the_same_amounts_every_time() -> None:
    program = made.spoilt(made.program(3, 12, 7), 5)
    first = solve(program)
    assert first.x is not None
    for _ in range(3):
        again = solve(program).x
        assert again is not None
        assert (again == first.x).all()


def test_rows_in_small_units_are_met_as_closely_as_rows_in_large_ones() -> None:
    small = np.array([0.0, 1e-9, 5e-7])
    program = blend(Row(PROTEIN, 19.0, None, limit=0), Row(small, 2e-9, None, limit=1))
    solution = solve(program)
    found = check(program, solution)
    assert found.largest_violation <= 1e-12
    assert solution.limits[1].binding == "minimum"
