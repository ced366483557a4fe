"""Among equally cheap mixes the tie rule chooses, and says how they differ."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from blendapp.optimise.certificate import check
from blendapp.optimise.program import Program, Row
from blendapp.optimise.sensitivity import sensitivity
from blendapp.optimise.solve import solve
from blendapp.optimise.ties import exchanges, settle
from tests.optimise import glpk, made, resolving


def tied(seed: int, columns: int, limits: int) -> Program:
    """A program with a twin and a column whose reduced cost is nought: seldom a single optimum."""
    return made.spoilt(made.with_twin(made.program(seed, columns, limits), seed % columns), seed)


def optimal_face(program: Program, cost: np.ndarray, objective: float) -> Program:
    """The program over the mixes that cost no more than objective, with another cost."""
    room = 1e-11 * max(1.0, abs(objective))
    return dataclasses.replace(program, cost=cost, rows=(*program.rows, Row(program.cost, None, objective + room)))


@settings(max_examples=40, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6), columns=st.integers(2, 9), limits=st.integers(0, 5))
def test_the_mix_is_the_largest_in_the_order_of_the_columns(seed: int, columns: int, limits: int) -> None:
    program = tied(seed, columns, limits)
    first = solve(program)
    if first.objective is None:
        return
    found = settle(first)
    assert found.x is not None
    assert found.objective == pytest.approx(first.objective, rel=1e-9)
    check(program, found)
    # step by step by the independent solver: the most of column 0, then of column 1 with that held, ...
    held = optimal_face(program, program.cost, first.objective)
    for j in range(min(3, program.size)):
        cost = np.zeros(program.size)
        cost[j] = -1.0
        most = glpk.optimum(dataclasses.replace(held, cost=cost))[1]
        assert most is not None
        assert found.x[j] == pytest.approx(-most, abs=2e-6)
        unit = np.zeros(program.size)
        unit[j] = 1.0
        held = dataclasses.replace(held, rows=(*held.rows, Row(unit, -most - 1e-9, None)))


@settings(max_examples=40, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6), columns=st.integers(2, 9), limits=st.integers(0, 5))
def test_with_a_reference_the_change_from_it_is_least(seed: int, columns: int, limits: int) -> None:
    program = tied(seed, columns, limits)
    first = solve(program)
    if first.objective is None:
        return
    reference = np.random.default_rng(seed).dirichlet(np.ones(program.size))
    found = settle(first, reference)
    check(program, found)
    assert found.x is not None
    n = program.size
    wide = optimal_face(program, program.cost, first.objective)
    pad = np.zeros(2 * n)
    rows = [
        dataclasses.replace(
            row,
            numerator=np.concatenate((row.numerator, pad)),
            divisor=None if row.divisor is None else np.concatenate((row.divisor, pad)),
        )
        for row in wide.rows
    ]
    for j in range(n):
        link = np.zeros(3 * n)
        link[[j, n + j, 2 * n + j]] = 1.0, -1.0, 1.0
        rows.append(Row(link, float(reference[j]), float(reference[j])))
    least = glpk.optimum(
        Program(
            np.concatenate((np.zeros(n), np.ones(2 * n))),
            np.concatenate((program.lower, pad)),
            np.concatenate((program.upper, np.full(2 * n, np.inf))),
            tuple(rows),
            program.bounds,
        )
    )[1]
    assert least is not None
    assert np.abs(found.x - reference).sum() == pytest.approx(least, abs=1e-6)


@settings(max_examples=25, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6), columns=st.integers(2, 8), limits=st.integers(0, 5))
def test_prices_of_a_settled_mix_are_what_solving_again_gives(seed: int, columns: int, limits: int) -> None:
    """A settled mix need not be a vertex."""
    program = tied(seed, columns, limits)
    first = solve(program)
    if first.objective is None:
        return
    for reference in (None, np.random.default_rng(seed).dirichlet(np.ones(program.size))):
        found = settle(first, reference)
        assert not resolving.faults(program, found, sensitivity(found))


def test_exchanges_cost_nothing_and_are_none_where_the_optimum_is_alone() -> None:
    some = 0
    for seed in range(40):
        program = tied(seed, 6, 3)
        found = settle(solve(program))
        if found.x is None:
            continue
        ways = exchanges(found)
        assert bool(ways) == (not sensitivity(found).unique_optimum)
        for way in ways:
            some += 1
            assert way.change[way.column] > 0
            assert abs(program.cost @ way.change) <= 1e-9 * np.abs(program.cost).max()
            check(program, dataclasses.replace(found, x=found.x + way.change))
    assert some > 20


def test_a_settled_twin_shares_its_price_with_its_twin() -> None:
    """Half and half of two equal columns, as the approved mix had it: neither price may move at all."""
    content = np.array([10.0, 46.0, 10.0])
    program = Program(
        np.array([200.0, 420.0, 200.0]),
        np.zeros(3),
        np.ones(3),
        (Row(np.ones(3), 1.0, 1.0), Row(content, 19.0, None, limit=0)),
    )
    found = settle(solve(program), np.array([0.4, 0.25, 0.35]))
    assert found.x == pytest.approx([0.4, 0.25, 0.35], abs=1e-9)
    prices = sensitivity(found)
    assert (prices.price_low[[0, 2]] == 200.0).all()
    assert (prices.price_high[[0, 2]] == 200.0).all()
    ways = exchanges(found)
    assert sorted(round(float(way.change[way.column]), 9) for way in ways) == [0.35, 0.4]


def test_an_answer_that_is_alone_comes_back_as_it_is() -> None:
    solution = solve(made.program(5, 8, 4))
    assert settle(solution) is solution
