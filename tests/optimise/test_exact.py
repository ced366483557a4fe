"""Proofs in rational arithmetic: the basis is exactly feasible and exactly optimal."""

from __future__ import annotations

from fractions import Fraction

import numpy as np
import pytest
from hypothesis import given, settings

from blendapp.optimise.exact import NotProven, prove
from blendapp.optimise.program import Program, Row
from blendapp.optimise.solve import solve
from blendapp.optimise.ties import settle
from tests.optimise import made


def holds_exactly(program: Program, x: tuple[Fraction, ...]) -> bool:
    """Every limit and bound, in fractions, from the program as stated."""
    for row in program.rows:
        top = sum(Fraction(float(n)) * v for n, v in zip(row.numerator, x, strict=True))
        per = Fraction(1)
        if row.divisor is not None:
            per = sum((Fraction(float(d)) * v for d, v in zip(row.divisor, x, strict=True)), Fraction(0))
        if row.minimum is not None and top < Fraction(row.minimum) * per:
            return False
        if row.maximum is not None and top > Fraction(row.maximum) * per:
            return False
    for bound in program.bounds:
        if bound.minimum is not None and x[bound.column] < Fraction(bound.minimum):
            return False
        if bound.maximum is not None and x[bound.column] > Fraction(bound.maximum):
            return False
    return all(
        v >= Fraction(float(low)) and (np.isinf(high) or v <= Fraction(float(high)))
        for v, low, high in zip(x, program.lower, program.upper, strict=True)
    )


@settings(max_examples=60, deadline=None, derandomize=True)
@given(made.programs())
def test_a_proof_is_a_mix_and_prices_that_meet_each_other_exactly(program: Program) -> None:
    solution = settle(solve(program))
    assert solution.face is not None
    try:
        proof = prove(solution)
    except NotProven:
        # limits that coincide but for rounding may contradict each other exactly: then it must be said
        if solution.face.degree > 0:
            return
        raise
    assert holds_exactly(program, proof.x)
    cost = [Fraction(float(c)) for c in program.cost]
    assert sum(c * v for c, v in zip(cost, proof.x, strict=True)) == proof.objective
    arrays = solution.arrays
    assert arrays is not None
    assert all(y >= 0 for y in proof.price[: arrays.inequalities])
    # the prices explain the cost: what is left over has the sign that its column's bound wants
    dual = Fraction(0)
    left = cost[:]
    for k, y in enumerate(proof.price):
        if not y:
            continue
        row = program.rows[int(arrays.row[k])]
        sign = -1 if arrays.side[k] < 0 else 1
        bound = Fraction(float(arrays.bound[k]))
        for j in range(program.size):
            entry = Fraction(float(row.numerator[j]))
            if row.divisor is not None:
                entry -= bound * Fraction(float(row.divisor[j]))
            left[j] -= y * sign * entry
        dual += 0 if row.divisor is not None else y * sign * bound
    for j, d in enumerate(left):
        end = arrays.lower[j] if d > 0 else arrays.upper[j]
        if d:
            assert np.isfinite(end)
            dual += d * Fraction(float(end))
    assert dual == proof.objective


def test_numbers_may_be_taken_as_typed() -> None:
    """0.1 + 0.2 are three tenths as typed, and a hair more as binary fractions."""
    program = Program(
        np.array([0.1, 0.7]),
        np.zeros(2),
        np.ones(2),
        (Row(np.ones(2), 1.0, 1.0), Row(np.array([0.3, 0.1]), 0.2, None, limit=0)),
    )
    solution = solve(program)
    assert prove(solution, as_typed=True).objective == Fraction(1, 10)
    assert prove(solution).objective == Fraction(0.1)


def test_no_answer_cannot_be_proven() -> None:
    program = Program(np.ones(1), np.zeros(1), np.ones(1), (Row(np.ones(1), 2.0, None, limit=0),))
    with pytest.raises(ValueError, match="only an answer"):
        prove(solve(program))


def test_limits_that_contradict_each_other_by_rounding_are_not_proven() -> None:
    """Three times 0.1 is not 0.3 in binary: two equalities that agree as typed, but not as stored."""
    content = np.array([1.0, 0.0])
    program = Program(
        np.array([1.0, 2.0]),
        np.zeros(2),
        np.ones(2),
        (Row(np.ones(2), 1.0, 1.0), Row(content, 0.1, 0.1, limit=0), Row(3 * content, 0.3, 0.3, limit=1)),
    )
    solution = solve(program)
    assert solution.status == "optimal"
    with pytest.raises(NotProven):
        prove(solution)
    assert prove(solution, as_typed=True).objective == Fraction(19, 10)
