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
from blendapp.optimise.program import Program, Row
from blendapp.optimise.rays import ray
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
