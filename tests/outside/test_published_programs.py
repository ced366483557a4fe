"""Published linear programs, as programs. Each source stands in data/linear_programs.json beside its example;
figures are checked against what was published and, digit for digit, against the exact fractions found there."""

from __future__ import annotations

import json
from fractions import Fraction
from pathlib import Path
from typing import Any

import numpy as np
import pytest

from blendapp.optimise.certificate import check
from blendapp.optimise.conflicts import conflict, only
from blendapp.optimise.exact import prove
from blendapp.optimise.program import Program, Row
from blendapp.optimise.rays import ray
from blendapp.optimise.sensitivity import LimitPrices, sensitivity
from blendapp.optimise.solve import solve

DATA = Path(__file__).parent / "data"
EXAMPLES: dict[str, Any] = {e["id"]: e for e in json.loads((DATA / "linear_programs.json").read_text())["examples"]}
OPTIMAL = [name for name, e in EXAMPLES.items() if "x" in e["computed"]]


def read(example: dict[str, Any]) -> Program:
    """The example as a program that is minimised; rows are limits 0, 1, ... in order."""
    names = [v["name"] for v in example["variables"]]
    sign = 1.0 if example["sense"] == "min" else -1.0
    semi = np.array([v["semicontinuous"] for v in example["variables"]])
    lower = np.array([0.0 if v["lb"] is None else v["lb"] for v in example["variables"]])
    return Program(
        cost=sign * np.array([v["cost"] for v in example["variables"]]),
        lower=np.where(semi, 0.0, lower),
        upper=np.array([np.inf if v["ub"] is None else v["ub"] for v in example["variables"]]),
        rows=tuple(
            Row(np.array([row["coef"].get(name, 0.0) for name in names]), row["lo"], row["hi"], limit=i)
            for i, row in enumerate(example["rows"])
        ),
        whole=np.array([v["integer"] for v in example["variables"]]),
        least_if_used=np.where(semi, lower, 0.0),
        names=tuple(names),
    )


def exact(figure: dict[str, Any]) -> float:
    return float(Fraction(figure["exact"])) if "exact" in figure else float(figure["value"])


@pytest.mark.parametrize("name", OPTIMAL)
def test_the_optimum_is_the_published_one(name: str) -> None:
    example = EXAMPLES[name]
    program = read(example)
    solution = solve(program)
    assert solution.status == "optimal"
    assert solution.objective is not None
    assert solution.x is not None
    check(program, solution)
    sign = 1.0 if example["sense"] == "min" else -1.0
    computed = example["computed"]["objective"]
    target = exact(computed) if isinstance(computed, dict) else computed
    assert sign * solution.objective == pytest.approx(target, rel=1e-9)
    published = example["published"] | example["published"].get("from_memory", {})
    assert sign * solution.objective == pytest.approx(published["objective"], rel=2e-4)
    if example["computed"].get("alternative_optima"):
        return
    for j, column in enumerate(program.names):
        figure = example["computed"]["x"][column]
        found = exact(figure) if isinstance(figure, dict) else figure
        assert solution.x[j] == pytest.approx(found, rel=1e-8, abs=1e-8)
    for column, amount in published.get("x", {}).items():
        assert solution.x[program.names.index(column)] == pytest.approx(amount, rel=0.02, abs=0.006)


@pytest.mark.parametrize("name", [n for n in OPTIMAL if EXAMPLES[n]["computed"].get("primal_degenerate") is False])
def test_shadow_prices_are_the_published_marginals_where_the_optimum_is_not_degenerate(name: str) -> None:
    example = EXAMPLES[name]
    solution = solve(read(example))
    sign = 1.0 if example["sense"] == "min" else -1.0
    for i, row in enumerate(example["rows"]):
        state = solution.limits[i]
        assert state.unique
        assert state.price is not None
        assert sign * state.price == pytest.approx(
            exact(example["computed"]["marginal"][row["name"]]), rel=1e-9, abs=1e-12
        )
    published = example["published"] | example["published"].get("from_memory", {})
    for row, price in published.get("dual_prices_book_sign", {}).items():
        state = solution.limits[[r["name"] for r in example["rows"]].index(row)]
        assert state.price == pytest.approx(-price, rel=1e-6, abs=1e-6)  # the books print improvement per unit


def test_the_degenerate_manual_diet_has_prices_that_are_not_unique() -> None:
    """Fourer, Gay, Kernighan, diet of chapter 2: one dinner, three vitamins tight at once."""
    example = EXAMPLES["manual_diet_degenerate"]
    solution = solve(read(example))
    unique = {row["name"]: solution.limits[i].unique for i, row in enumerate(example["rows"])}
    assert unique == {"vit_a": False, "vit_c": True, "vit_b1": False, "vit_b2": False}


@pytest.mark.parametrize("name", ["infeasible_simple", "elastic_infeasible", "manual_diet_infeasible"])
def test_an_infeasible_example_is_infeasible_and_shows_nothing(name: str) -> None:
    solution = solve(read(EXAMPLES[name]))
    assert solution.status == "infeasible"
    assert solution.x is None
    assert solution.objective is None
    assert solution.gap is None
    assert not solution.limits


def test_the_unbounded_example_is_unbounded_along_its_second_column() -> None:
    """Taha, special cases of the simplex method (from memory): x2 grows without end. x1 stops at 20."""
    program = read(EXAMPLES["unbounded"])
    assert solve(program).status == "unbounded"
    found = ray(program)
    assert found is not None
    assert [program.names[j] for j in found.at_fault] == ["x2"]


SENSITIVE = [n for n in OPTIMAL if "rhs_range" in EXAMPLES[n]["computed"]]


def sided(example: dict[str, Any], name: str, i: int, prices: LimitPrices, found: Program) -> list[tuple[float, float]]:
    """(slope to the left, slope to the right) of the minimised cost, as found; infinite where it cannot be moved."""
    row = found.rows[i]
    if row.minimum is not None and row.minimum == row.maximum:
        left = -np.inf if prices.lower_cost is None else -prices.lower_cost
        return [(left, np.inf if prices.raise_cost is None else prices.raise_cost)]
    assert prices.relax_saving is not None
    tighten = np.inf if prices.tighten_cost is None else prices.tighten_cost
    if name.endswith(":lo"):
        return [(prices.relax_saving, tighten) if prices.binding == "minimum" else (0.0, 0.0)]
    return [(-tighten, -prices.relax_saving) if prices.binding == "maximum" else (0.0, 0.0)]


@pytest.mark.parametrize("name", SENSITIVE)
def test_both_sides_of_every_shadow_price_are_the_computed_ones(name: str) -> None:
    """left_right_shadow_price in the data is by re-solving at relative steps of 1e-5, printed to six decimals."""
    example = EXAMPLES[name]
    program = read(example)
    found = sensitivity(solve(program))
    names = [row["name"] for row in example["rows"]]
    sign = 1.0 if example["sense"] == "min" else -1.0
    for key, (left, right) in example["computed"].get("left_right_shadow_price", {}).items():
        i = names.index(key.split(":")[0])
        if left is None or right is None:
            continue
        for down, up in sided(example, key, i, found.limits[i], program):
            assert sign * down == pytest.approx(left, abs=2e-6, rel=1e-5), key
            assert sign * up == pytest.approx(right, abs=2e-6, rel=1e-5), key


@pytest.mark.parametrize("name", SENSITIVE)
def test_price_ranges_hold_the_ranges_of_the_basis(name: str) -> None:
    """The data gives the range over which the basis stays optimal. By amounts a range is the same where the optimum
    is not degenerate, wider where it is (manual_diet_degenerate, degenerate_vertex, multi_period_blend)."""
    example = EXAMPLES[name]
    program = read(example)
    solution = solve(program)
    found = sensitivity(solution)
    computed = example["computed"]
    if computed.get("alternative_optima"):
        return  # which of several optimal mixes is ranged is the reader's choice
    for j, column in enumerate(program.names):
        ends = [None if end is None else exact(end) for end in computed["cost_range"][column]]
        if example["sense"] == "max":
            ends = [None if end is None else -end for end in reversed(ends)]
        low = -np.inf if ends[0] is None else ends[0]
        high = np.inf if ends[1] is None else ends[1]
        if computed["primal_degenerate"]:
            assert found.price_low[j] <= low or found.price_low[j] == pytest.approx(low, rel=1e-9, abs=1e-9)
            assert found.price_high[j] >= high or found.price_high[j] == pytest.approx(high, rel=1e-9, abs=1e-9)
        else:
            assert found.price_low[j] == pytest.approx(low, rel=1e-9, abs=1e-9)
            assert found.price_high[j] == pytest.approx(high, rel=1e-9, abs=1e-9)


@pytest.mark.parametrize("name", [n for n in SENSITIVE if EXAMPLES[n]["computed"]["primal_degenerate"] is False])
def test_prices_hold_to_the_published_ends_of_their_ranges(name: str) -> None:
    """rhs_range of an active row is where its basis stays feasible. Where the optimum has alternatives a slope goes on
    past that end; and the data does not clip a range at the row's own other side, which is where this
    program's limit would contradict itself."""
    example = EXAMPLES[name]
    program = read(example)
    found = sensitivity(solve(program))
    if example["computed"].get("alternative_optima"):
        return
    for i, row in enumerate(example["rows"]):
        ranged = example["computed"]["rhs_range"][row["name"]]
        if ranged["active"] is None:
            continue
        low, high = (None if end is None else exact(end) for end in ranged["range"])
        prices = found.limits[i]
        if row["lo"] is not None and row["lo"] == row["hi"]:
            pairs = [(prices.lower_holds_to, low), (prices.raise_holds_to, high)]
        elif ranged["active"] == "lo":
            other = np.inf if row["hi"] is None else row["hi"]
            high = None if high is None and other == np.inf else min(np.inf if high is None else high, other)
            pairs = [(prices.relax_holds_to, low), (prices.tighten_holds_to, high)]
        else:
            other = -np.inf if row["lo"] is None else row["lo"]
            low = None if low is None and other == -np.inf else max(-np.inf if low is None else low, other)
            pairs = [(prices.tighten_holds_to, low), (prices.relax_holds_to, high)]
        for ours, theirs in pairs:
            if theirs is None:
                assert ours is None, (row["name"], ours)
            else:
                assert ours == pytest.approx(theirs, rel=1e-9, abs=1e-9), row["name"]


def test_the_published_sensitivity_report_of_the_scrap_blend_is_reproduced() -> None:
    """GLPK 5.0 reference manual, section 3.4.1: marginals, right-hand-side and cost ranges as printed there."""
    example = EXAMPLES["scrap_blend_range_rows"]
    program = read(example)
    solution = solve(program)
    found = sensitivity(solution)
    published = example["published"]
    assert solution.objective == pytest.approx(published["objective"], rel=1e-9)
    names = [row["name"] for row in example["rows"]]
    for key, value in published["marginal"].items():
        if key in names:
            assert solution.limits[names.index(key)].price == pytest.approx(value, abs=1e-5)
        else:
            j = program.names.index(key)
            assert program.cost[j] - found.price_low[j] == pytest.approx(value, abs=1e-5)
            assert found.break_even[j] == found.price_low[j]
    for key, (low, high) in published["rhs_range"].items():
        prices = found.limits[names.index(key)]
        ends = [
            e
            for e in (prices.tighten_holds_to, prices.relax_holds_to, prices.raise_holds_to, prices.lower_holds_to)
            if e is not None
        ]
        assert sorted(ends) == pytest.approx([low, high], abs=1e-4)
    for key, (low, high) in published["cost_range"].items():
        j = program.names.index(key)
        assert found.price_low[j] == pytest.approx(low, abs=1e-5)
        assert found.price_high[j] == pytest.approx(high, abs=1e-5)


@pytest.mark.parametrize("name", ["infeasible_simple", "elastic_infeasible", "manual_diet_infeasible"])
def test_a_published_conflict_is_irreducible_and_its_repairs_are_the_computed_ones(name: str) -> None:
    """The data gives what a row could be if it alone were freed. Its irreducible sets count bounds of columns too; here
    the columns' own bounds are given, and another smallest set may be found."""
    example = EXAMPLES[name]
    program = read(example)
    found = conflict(program)
    assert found is not None
    freed = example["computed"]["best_achievable_when_only_this_row_is_freed"]
    for repair in found.repairs:
        key = example["rows"][repair.limit]["name"] + (":lo" if repair.side == "minimum" else ":hi")
        if key in freed and freed[key] != "Infeasible":
            assert repair.to == pytest.approx(freed[key], rel=1e-8)
        elif key in freed:
            assert repair.to is None
        else:
            assert repair.limit in found.members
    assert not solve(only(program, found.members)).objective
    for limit in found.members:
        assert solve(only(program, (m for m in found.members if m != limit))).status != "infeasible"


def test_the_least_total_change_of_the_elastic_example_is_one() -> None:
    """lp_solve reference guide, infeasible models: a total violation of 1 makes x >= 6, y >= 6, x + y <= 11 possible.
    Weighed by each limit's own size the larger limit gives."""
    found = conflict(read(EXAMPLES["elastic_infeasible"]))
    assert found is not None
    assert [(r.limit, r.side, r.start) for r in found.total] == [(2, "maximum", 11.0)]
    assert found.total[0].to == pytest.approx(12.0)


@pytest.mark.parametrize("name", OPTIMAL)
def test_every_published_optimum_is_proven_in_rational_arithmetic(name: str) -> None:
    """The data has the exact optimum of the numbers as printed; so has the proof."""
    example = EXAMPLES[name]
    proof = prove(solve(read(example)), as_typed=True)
    computed = example["computed"]["objective"]
    sign = 1 if example["sense"] == "min" else -1
    if isinstance(computed, dict) and "exact" in computed:
        assert sign * proof.objective == Fraction(computed["exact"])
    else:
        assert sign * float(proof.objective) == pytest.approx(computed, rel=1e-8)
