"""Conflicts: the set is irreducible, repairs are the least that help, what is reachable is reachable."""

from __future__ import annotations

import dataclasses

import numpy as np
import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from blendapp.optimise.choice_conflicts import explain
from blendapp.optimise.conflicts import Conflict, Repair, as_rows, conflict, only
from blendapp.optimise.program import Bound, Count, Program, Row
from blendapp.optimise.solve import solve
from tests.optimise import glpk, made


def impossible(seed: int, columns: int, limits: int, ration: bool) -> Program:
    """A program whose limits ask for more than can be had together: a few bounds pushed past the feasible mix."""
    random = np.random.default_rng(seed)
    base = made.program(seed, columns, limits, ration)

    def push(one: Row | Bound) -> Row | Bound:
        if one.limit is None or random.random() < 0.4:
            return one
        by = random.uniform(0.02, 0.6)
        low, high = one.minimum, one.maximum
        if low is not None and high is not None:
            shift = by * (1 if random.random() < 0.5 else -1)
            return dataclasses.replace(one, minimum=low * (1 + shift), maximum=high * (1 + shift))
        return dataclasses.replace(
            one, minimum=None if low is None else low * (1 + by), maximum=None if high is None else high * (1 - by)
        )

    return dataclasses.replace(
        base, rows=tuple(push(row) for row in base.rows), bounds=tuple(push(bound) for bound in base.bounds)
    )


def feasible(program: Program) -> bool:
    return glpk.optimum(dataclasses.replace(program, cost=np.zeros(program.size)))[0] == "optimal"


def changed(program: Program, repair: Repair, to: float) -> Program:
    """The program with the bound of a repair moved."""

    def shift(one: Row | Bound) -> Row | Bound:
        return dataclasses.replace(one, **{repair.side: to}) if one.limit == repair.limit else one

    return dataclasses.replace(
        program, rows=tuple(shift(row) for row in program.rows), bounds=tuple(shift(b) for b in program.bounds)
    )


@settings(max_examples=120, deadline=None, derandomize=True)
@given(seed=st.integers(0, 10**6), columns=st.integers(2, 12), limits=st.integers(1, 10), ration=st.booleans())
def test_a_conflict_holds_what_it_says(seed: int, columns: int, limits: int, ration: bool) -> None:
    program = impossible(seed, columns, limits, ration)
    found = conflict(program)
    assert (found is None) == (solve(program).status == "optimal")
    assume(found is not None)
    assert found is not None
    plain = as_rows(program)
    assert not feasible(only(plain, found.members))
    for limit in found.members:
        assert feasible(only(plain, (m for m in found.members if m != limit)))
    assert [repair.limit for repair in found.repairs] == list(found.members)
    for repair in found.repairs:
        if repair.to is None:
            assert not feasible(only(plain, (r.limit for r in plain.rows if r.limit not in (None, repair.limit))))
            continue
        assert solve(changed(program, repair, repair.to)).status == "optimal"
        divided = any(row.limit == repair.limit and row.divisor is not None for row in program.rows)
        endless = divided and bool(np.isinf(program.upper).any())  # then a repair may give a thousandth more
        hair = (5e-3 if endless else 1e-5) * (repair.to - repair.start)
        hair += np.sign(hair) * (2e-3 if endless else 1e-7) * abs(repair.to)
        assert solve(changed(program, repair, repair.to - hair)).status == "infeasible"
    mended = program
    for repair in found.total:
        assert repair.to is not None
        mended = changed(mended, repair, repair.to)
    assert solve(mended).status == "optimal"
    reaches(program, found)


def reaches(program: Program, found: Conflict) -> None:
    """What is reported as the nearest reachable value is so, by the independent solver, and nothing is left out."""
    reported = {(reach.limit, reach.side): reach for reach in found.reach}
    box = dataclasses.replace(program, rows=tuple(row for row in program.rows if row.limit is None))
    if not feasible(box):
        assert not reported
        return
    for row in program.rows:
        for side, end, sign in (("minimum", row.minimum, -1.0), ("maximum", row.maximum, 1.0)):
            if row.limit is None or end is None:
                continue
            alone = dataclasses.replace(
                box,
                rows=(
                    *box.rows,
                    dataclasses.replace(row, minimum=end if sign < 0 else None, maximum=end if sign > 0 else None),
                ),
            )
            reach = reported.get((row.limit, side))
            assert (reach is None) == feasible(alone), (row, side)
            if reach is None:
                continue
            assert reach.asked == end
            assert reach.reachable is not None
            gap = sign * (reach.reachable - end)
            assert gap > 0
            # a quotient among mixes without end may only be approached
            slack = 1e-2 if row.divisor is not None and np.isinf(program.upper).any() else 1e-6
            for share, can in ((slack, True), (-1e-5, False)):
                to = reach.reachable + sign * (gap * share + np.sign(share) * 1e-7 * abs(end))
                moved = dataclasses.replace(
                    box,
                    rows=(
                        *box.rows,
                        dataclasses.replace(row, minimum=to if sign < 0 else None, maximum=to if sign > 0 else None),
                    ),
                )
                assert feasible(moved) == can


def test_the_least_total_change_is_weighed_by_each_limits_own_size() -> None:
    """Protein could give 1 of 20 or fibre 1 of 4: the larger limit gives."""
    program = Program(
        np.array([1.0, 2.0]),
        np.zeros(2),
        np.ones(2),
        (
            Row(np.ones(2), 1.0, 1.0),
            Row(np.array([10.0, 30.0]), 20.0, None, limit=0),
            Row(np.array([2.0, 7.0]), None, 4.0, limit=1),
        ),
    )
    found = conflict(program)
    assert found is not None
    assert found.members == (0, 1)
    assert found.total == (Repair(0, "minimum", 20.0, pytest.approx(18.0)),)
    assert [repair.to for repair in found.repairs] == [pytest.approx(18.0), pytest.approx(4.5)]


def test_limits_of_one_column_may_clash_with_the_sum() -> None:
    program = Program(
        np.ones(2),
        np.zeros(2),
        np.ones(2),
        (Row(np.ones(2), 1.0, 1.0),),
        (Bound(0, 0.7, None, 0), Bound(1, 0.5, None, 1)),
    )
    found = conflict(program)
    assert found is not None
    assert found.members == (0, 1)
    assert [repair.to for repair in found.repairs] == [pytest.approx(0.5), pytest.approx(0.3)]
    assert found.reach == ()


def test_two_limits_of_one_column_that_cross_are_the_conflict() -> None:
    program = Program(
        np.ones(2),
        np.zeros(2),
        np.ones(2),
        (Row(np.ones(2), 1.0, 1.0),),
        (Bound(0, 0.7, None, 0), Bound(0, None, 0.5, 1)),
    )
    found = conflict(program)
    assert found is not None
    assert found.members == (0, 1)


def test_a_ratio_is_repaired_by_its_quotient_not_as_a_right_hand_side() -> None:
    """Calcium to phosphorus at least 3 where 2 is the most that can be had."""
    program = Program(
        np.ones(2),
        np.zeros(2),
        np.ones(2),
        (Row(np.ones(2), 1.0, 1.0), Row(np.array([2.0, 0.1]), 3.0, None, np.array([1.0, 4.0]), limit=0)),
    )
    found = conflict(program)
    assert found is not None
    assert found.members == (0,)
    assert found.repairs[0].to == pytest.approx(2.0, rel=1e-12)
    assert found.reach[0].reachable == pytest.approx(2.0, rel=1e-12)


def test_a_balance_that_cannot_be_met_has_no_members() -> None:
    program = Program(np.ones(2), np.zeros(2), np.full(2, 0.4), (Row(np.ones(2), 1.0, 1.0),))
    found = conflict(program)
    assert found is not None
    assert found.members == ()
    assert found.repairs == ()


def test_a_feasible_program_has_no_conflict() -> None:
    assert conflict(made.program(1, 8, 5)) is None


def counted() -> Program:
    """Three nutrients, each from one column, and at most two columns."""
    return Program(
        np.array([1.0, 2.0, 3.0]),
        np.zeros(3),
        np.ones(3),
        (
            Row(np.ones(3), 1.0, 1.0),
            Row(np.array([1.0, 0.0, 0.0]), 0.2, None, limit=0),
            Row(np.array([0.0, 1.0, 0.0]), 0.2, None, limit=1),
            Row(np.array([0.0, 0.0, 1.0]), 0.2, None, limit=2),
        ),
        counts=(Count((0, 1, 2), 2, 3),),
    )


def test_a_count_can_be_a_member_and_its_repair_is_a_whole_number() -> None:
    found = explain(counted())
    assert found is not None
    assert found.members == (0, 1, 2, 3)
    assert found.repairs[3] == Repair(3, "maximum", 2.0, 3.0)
    assert found.repairs[0].to == pytest.approx(0.0, abs=1e-9)


def test_a_practical_minimum_that_is_too_much_can_be_a_member() -> None:
    program = Program(
        np.array([1.0, 2.0]),
        np.zeros(2),
        np.ones(2),
        (
            Row(np.ones(2), 1.0, 1.0),
            Row(np.array([0.0, 10.0]), 0.1, 0.3, limit=0),
        ),
        least_if_used=np.array([0.0, 0.05]),
        least_limit=np.array([-1, 1]),
    )
    found = explain(program)
    assert found is not None
    assert found.members == (0, 1)
    assert found.repairs[1] == Repair(1, "minimum", 0.05, pytest.approx(0.03))
