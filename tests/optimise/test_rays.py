"""An unbounded program names the columns at fault."""

from __future__ import annotations

import numpy as np

from blendapp.optimise.program import Bound, Program, Row
from blendapp.optimise.rays import ray
from blendapp.optimise.solve import solve


def ration(cost: list[float], *rows: Row, bounds: tuple[Bound, ...] = ()) -> Program:
    n = len(cost)
    return Program(np.array(cost), np.zeros(n), np.full(n, np.inf), rows, bounds)


def test_a_price_below_zero_without_a_limit_is_at_fault() -> None:
    program = ration([0.2, -0.05, 0.4], Row(np.array([1.0, 1.0, 1.0]), 2.0, None, limit=0))
    assert solve(program).status == "unbounded"
    found = ray(program)
    assert found is not None
    assert found.growing == (1,)
    assert found.at_fault == (1,)
    assert found.cost_slope == -0.05


def test_a_column_that_must_grow_with_the_one_at_fault_is_named_beside_it() -> None:
    ratio = Row(np.array([1.0, -2.0, 0.0]), 0.0, None, limit=0)
    program = ration([0.1, -0.5, 0.4], ratio)
    found = ray(program)
    assert found is not None
    assert set(found.growing) == {0, 1}
    assert found.at_fault == (1,)
    assert (ratio.numerator @ found.direction) >= -1e-12


def test_a_bounded_program_has_no_ray() -> None:
    program = ration([0.2, -0.05], Row(np.ones(2), 2.0, None, limit=0), bounds=(Bound(1, None, 3.0, 1),))
    assert ray(program) is None
    assert solve(program).status == "optimal"
