"""The check must fail when anything in an answer is not so."""

from __future__ import annotations

import dataclasses
from typing import Any

import numpy as np
import pytest

from blendapp.optimise.certificate import FailedCheck, check
from blendapp.optimise.program import Bound, Count, Program, Row
from blendapp.optimise.solve import solve
from tests.optimise import made

PROTEIN = np.array([10.0, 46.0, 95.0])
DRY = np.array([0.88, 0.9, 0.99])


@pytest.fixture
def program() -> Program:
    return Program(
        np.array([200.0, 420.0, 1500.0]),
        np.zeros(3),
        np.ones(3),
        (Row(np.ones(3), 1.0, 1.0), Row(PROTEIN, 19.0, 40.0, limit=0), Row(PROTEIN * DRY, 21.0, None, DRY, limit=1)),
        (Bound(1, None, 0.2, 2),),
        names=("maize", "soya", "isolate"),
    )


@pytest.mark.parametrize("j", [0, 1, 2])
def test_an_amount_moved_by_a_millionth_is_refused(program: Program, j: int) -> None:
    solution = solve(program)
    assert solution.x is not None
    check(program, solution)
    x = solution.x.copy()
    x[j] += 1e-6
    with pytest.raises(FailedCheck, match="missed"):
        check(program, dataclasses.replace(solution, x=x, objective=float(program.cost @ x)))


def test_a_dearer_mix_that_holds_every_limit_is_refused(program: Program) -> None:
    solution = solve(program)
    dearer = solve(dataclasses.replace(program, cost=np.array([200.0, 900.0, 800.0])))
    assert dearer.x is not None
    assert (dearer.x != solution.x).any()
    with pytest.raises(FailedCheck):
        check(program, dataclasses.replace(solution, x=dearer.x, objective=float(program.cost @ dearer.x)))


@pytest.mark.parametrize("field", ["minimum_price", "maximum_price", "lower_price", "upper_price"])
@pytest.mark.parametrize("step", [1e-3, -1e-3])
def test_a_price_moved_is_refused(program: Program, field: str, step: float) -> None:
    solution = solve(program)
    for k in range(len(getattr(solution, field))):
        prices = getattr(solution, field).copy()
        prices[k] += step * 1000.0
        changed: dict[str, Any] = {field: prices}
        with pytest.raises(FailedCheck):
            check(program, dataclasses.replace(solution, **changed))


def test_a_cost_that_is_not_the_sum_of_its_parts_is_refused(program: Program) -> None:
    solution = solve(program)
    assert solution.objective is not None
    with pytest.raises(FailedCheck):
        check(program, dataclasses.replace(solution, objective=solution.objective * (1 + 1e-6)))


def test_an_answer_without_amounts_is_refused(program: Program) -> None:
    with pytest.raises(FailedCheck):
        check(program, dataclasses.replace(solve(program), x=None))


def test_a_negative_divisor_is_refused_as_it_turns_the_limit_round() -> None:
    divisor = np.array([1.0, -3.0])
    program = Program(
        np.array([2.0, 1.0]),
        np.zeros(2),
        np.ones(2),
        (Row(np.ones(2), 1.0, 1.0), Row(np.array([0.0, 1.0]), 2.0, None, divisor, limit=0)),
    )
    solution = solve(program)
    assert solution.x is not None
    assert divisor @ solution.x < 0
    with pytest.raises(FailedCheck, match="missed"):
        check(program, solution)


def test_the_refusal_names_the_column(program: Program) -> None:
    solution = solve(program)
    assert solution.x is not None
    x = solution.x + np.array([-0.01, 0.01, 0.0])
    with pytest.raises(FailedCheck, match="soya"):
        check(program, dataclasses.replace(solution, x=x, objective=float(program.cost @ x)))


def test_figures_are_relative_so_that_the_money_may_be_any() -> None:
    base = made.program(11, 10, 6)
    for factor in (1e-6, 1.0, 1e6):
        scaled = dataclasses.replace(base, cost=base.cost * factor)
        found = check(scaled, solve(scaled))
        assert found.duality_gap < 1e-12
        assert found.dual_residual < 1e-12


def test_choices_are_checked_too() -> None:
    program = Program(
        np.array([1.0, 2.0, 3.0]),
        np.zeros(3),
        np.ones(3),
        (Row(np.ones(3), 1.0, 1.0), Row(np.array([0.0, 1.0, 3.0]), 0.02, None, limit=0)),
        least_if_used=np.array([0.0, 0.05, 0.05]),
        least_limit=np.array([-1, 1, 2]),
        counts=(Count((0, 1, 2), 2, 3),),
    )
    solution = solve(program)
    check(program, solution)
    assert solution.x is not None
    tampered = dataclasses.replace(program, least_if_used=solution.x + 0.01 * (solution.x > 0))
    with pytest.raises(FailedCheck, match="least amount"):
        check(tampered, solution)
    tampered = dataclasses.replace(program, counts=(Count((0, 1, 2), 1, 3),))
    with pytest.raises(FailedCheck, match="count"):
        check(tampered, solution)
    tampered = dataclasses.replace(program, whole=np.array([True, False, False]))
    with pytest.raises(FailedCheck, match="whole"):
        check(tampered, solution)
