"""Programs at the edge: nothing to mix, nothing to limit, every chain from solve to conflict holds."""

from __future__ import annotations

import numpy as np
import pytest

from blendapp.optimise.certificate import check
from blendapp.optimise.choice_conflicts import explain
from blendapp.optimise.exact import prove
from blendapp.optimise.near import near_optimal
from blendapp.optimise.program import Bound, Program, Row
from blendapp.optimise.sensitivity import sensitivity
from blendapp.optimise.solve import solve
from blendapp.optimise.ties import exchanges, settle
from tests.optimise import made

NONE = np.zeros(0)
TWO = np.ones(2)
SUM = Row(TWO, 1.0, 1.0)


@pytest.mark.parametrize(
    "program",
    [
        Program(NONE, NONE, NONE, ()),
        Program(TWO, 0 * TWO, TWO, ()),
        Program(-TWO, 0 * TWO, TWO, ()),
        Program(0 * TWO, 0 * TWO, TWO, (SUM, Row(np.array([1.0, 2.0]), 1.5, None, limit=0))),
        Program(np.array([3.0]), np.zeros(1), np.ones(1), (Row(np.ones(1), 1.0, 1.0),)),
        Program(TWO, 0 * TWO, TWO, (SUM, Row(0 * TWO, None, 0.0, limit=0))),
        Program(TWO, 0 * TWO, TWO, (SUM,), (Bound(0, 0.5, 0.5, 0), Bound(1, 0.5, 0.5, 1))),
        Program(TWO * 1e6, 0 * TWO, TWO, (SUM, Row(np.array([1e9, 2e9]), 1.5e9, None, limit=0),
                                          Row(np.array([1e-9, 2e-9]), None, 1.8e-9, limit=1))),
        Program(TWO, np.full(2, -np.inf), np.full(2, np.inf), (SUM, Row(np.array([1.0, 3.0]), 2.0, 2.5, limit=0))),
    ],
    ids=["nothing", "no rows", "paid to take", "free of cost", "one column", "row of noughts", "all fixed",
         "extreme units", "no ends"],
)  # fmt: skip
def test_an_edge_case_goes_through_the_whole_chain(program: Program) -> None:
    solution = settle(solve(program))
    assert solution.x is not None
    found = check(program, solution)
    assert found.largest_violation <= 1e-12
    prices = sensitivity(solution)
    assert set(prices.limits) == set(solution.limits)
    near = near_optimal(solution)
    assert (near.low <= solution.x + 1e-12).all()
    assert (near.high >= solution.x - 1e-12).all()
    exchanges(solution)
    assert float(prove(solution).objective) == pytest.approx(solution.objective, abs=1e-9)


@pytest.mark.parametrize(
    ("program", "members"),
    [
        (Program(NONE, NONE, NONE, (Row(NONE, 1.0, 1.0),)), ()),
        (Program(NONE, NONE, NONE, (Row(NONE, 1.0, 1.0), Row(NONE, 5.0, None, limit=0))), ()),
        (Program(TWO, 0 * TWO, TWO, (SUM, Row(0 * TWO, 1.0, None, limit=0))), (0,)),
    ],
)
def test_an_impossible_edge_case_is_explained(program: Program, members: tuple[int, ...]) -> None:
    assert solve(program).status == "infeasible"
    found = explain(program)
    assert found is not None
    assert found.members == members


def test_no_time_at_all_stops_without_figures() -> None:
    solution = solve(made.program(3, 14, 9), time_limit_s=0.0)
    if solution.status == "stopped":
        assert solution.x is None
        assert not solution.limits
    else:
        assert solution.status == "optimal"
