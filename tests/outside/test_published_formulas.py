"""Published diets and mixes as feed formulas: ingredients with prices, nutrients with units, limits per day or not.

Sources stand beside each example in data/linear_programs.json, data/stigler_1945.json and data/pearson_square.json. A
published program is a ration: a unit of a column is a kg, what a row counts of it is a nutrient in a bare number.
"""

from __future__ import annotations

import json
from dataclasses import replace
from fractions import Fraction
from pathlib import Path
from typing import Any

import pytest

from blendapp.domain.formulas import Admits, Amounts
from blendapp.domain.ingredients import Basis
from blendapp.domain.library import Library
from blendapp.domain.records import Change
from blendapp.domain.results import Result, Side, Status
from blendapp.services.formulate import formulate
from tests.mills import TODAY, Maker

DATA = Path(__file__).parent / "data"
PROGRAMS: dict[str, Any] = {
    e["id"]: e for e in json.loads((DATA / "linear_programs.json").read_text())["examples"]
}
STIGLER = json.loads((DATA / "stigler_1945.json").read_text())
PEARSON = json.loads((DATA / "pearson_square.json").read_text())["examples"]
# Whole numbers of bags are no limit of a formula.
RATIONS = [name for name, e in PROGRAMS.items() if not any(v["integer"] for v in e["variables"])]
OPTIMAL = [name for name in RATIONS if "x" in PROGRAMS[name]["computed"]]


def exact(figure: Any) -> float:
    if not isinstance(figure, dict):
        return float(figure)
    return float(Fraction(figure["exact"])) if "exact" in figure else float(figure["value"])


def ration(example: dict[str, Any]) -> Library:
    """The example as a ration per day; the first limits are its rows in order."""
    make = Maker()
    sign = 1.0 if example["sense"] == "min" else -1.0
    for row in example["rows"]:
        make.nutrient(row["name"], "", never_negative=False)
    for v in example["variables"]:
        content = {row["name"]: row["coef"][v["name"]] for row in example["rows"] if v["name"] in row["coef"]}
        make.ingredient(v["name"], sign * 1000 * v["cost"], content)
    feed = make.formula("Published", amounts=Amounts.RATION)
    for row in example["rows"]:
        make.limit(feed, "nutrient", row["name"], row["lo"], row["hi"], basis="per day")
    for v in example["variables"]:
        if v["semicontinuous"]:
            make.limit(feed, "practical", v["name"], v["lb"])
            make.limit(feed, "ingredient", v["name"], None, v["ub"])
        elif v["lb"] or v["ub"] is not None:
            make.limit(feed, "ingredient", v["name"], v["lb"], v["ub"])
    return make.library


def solved(library: Library) -> Result:
    return formulate(library, 1, TODAY)


@pytest.mark.parametrize("name", OPTIMAL)
def test_a_published_program_as_a_ration_has_the_published_cost_and_amounts(name: str) -> None:
    example = PROGRAMS[name]
    result = solved(ration(example))
    assert result.status is Status.OPTIMAL, result.cause
    assert result.cost is not None
    sign = 1.0 if example["sense"] == "min" else -1.0
    assert sign * result.cost == pytest.approx(exact(example["computed"]["objective"]), rel=1e-9)
    published = example["published"] | example["published"].get("from_memory", {})
    assert sign * result.cost == pytest.approx(published["objective"], rel=2e-4)
    if example["computed"].get("alternative_optima"):
        return
    for one in result.ingredients:
        assert one.amount == pytest.approx(exact(example["computed"]["x"][one.name]), rel=1e-8, abs=1e-8), one.name


def limit_prices(result: Result) -> dict[str, float]:
    """d(cost)/d(bound) of each row's nutrient, from what is shown."""
    found = {}
    for one in result.limits:
        if one.kind != "nutrient":
            continue
        if one.raise_cost is not None:
            found[one.name] = one.raise_cost
        elif one.tighten_cost is not None:
            assert one.tighten_cost == pytest.approx(one.relax_saving, rel=1e-9, abs=1e-12)
            found[one.name] = -one.tighten_cost if one.binding is Side.MAXIMUM else one.tighten_cost
    return found


@pytest.mark.parametrize(
    "name", [n for n in OPTIMAL if PROGRAMS[n]["computed"].get("primal_degenerate") is False
             and not any(v["semicontinuous"] for v in PROGRAMS[n]["variables"])]
)
def test_shadow_prices_of_a_ration_are_the_published_marginals(name: str) -> None:
    example = PROGRAMS[name]
    sign = 1.0 if example["sense"] == "min" else -1.0
    expected = {row: sign * exact(price) for row, price in example["computed"]["marginal"].items()}
    assert limit_prices(solved(ration(example))) == pytest.approx(expected, rel=1e-8, abs=1e-9)


def test_the_textbook_diet_costs_90_cents_with_shadow_prices_of_2_50_and_7_50() -> None:
    result = solved(ration(PROGRAMS["textbook_four_foods"]))
    assert result.cost == pytest.approx(90, rel=1e-12)
    assert limit_prices(result) == pytest.approx({"calories": 0, "chocolate": 2.5, "sugar": 7.5, "fat": 0})
    assert {i.name: i.amount for i in result.mix} == pytest.approx({"ice_cream": 3, "cola": 1})


@pytest.mark.parametrize("name", ["infeasible_simple", "elastic_infeasible", "manual_diet_infeasible"])
def test_an_infeasible_program_is_a_formula_in_conflict(name: str) -> None:
    result = solved(ration(PROGRAMS[name]))
    assert result.status is Status.CONFLICT
    assert result.cost is None
    assert all(i.amount is None for i in result.ingredients)


def test_the_unbounded_program_is_an_unbounded_ration_that_names_its_second_column() -> None:
    result = solved(ration(PROGRAMS["unbounded"]))
    assert result.status is Status.UNBOUNDED
    assert "x2" in (result.cause or "")
    assert "x1" not in (result.cause or "")
    assert result.cost is None


def test_the_canned_pet_food_is_60_percent_beef_and_40_percent_gel() -> None:
    """The blend in % and $/t: 52 cents for 100 g are 5,200 $/t, and 7 cents for a gram of fat are 700 $/t for 1 %."""
    example = PROGRAMS["pet_food_six_ingredients"]
    make = Maker()
    nutrients = [row for row in example["rows"] if row["name"] != "percentages_sum"]
    for row in nutrients:
        make.nutrient(row["name"], "%")
    for v in example["variables"]:
        content = {row["name"]: 100 * row["coef"][v["name"]] for row in nutrients}
        make.ingredient(v["name"], 1000 * v["cost"], content, per="kg")
    feed = make.formula("Can")
    for row in nutrients:
        make.limit(feed, "nutrient", row["name"], row["lo"], row["hi"])
    result = solved(make.library)
    assert result.cost == pytest.approx(5200, rel=1e-12)
    assert {i.name: i.amount for i in result.mix} == pytest.approx({"beef": 0.6, "gel": 0.4}, rel=1e-12)
    assert limit_prices(result) == pytest.approx({"protein": 0, "fat": 700, "fibre": 0, "salt": 0}, rel=1e-9, abs=1e-9)
    assert {one.name: one.value for one in result.limits} == pytest.approx(
        {"protein": 12, "fat": 6, "fibre": 0.3, "salt": 0.3}, rel=1e-9
    )


def test_the_mix_of_corn_limestone_and_soybean_meal_is_the_published_one() -> None:
    example = PROGRAMS["farm_feed_mix_three"]
    make = Maker()
    nutrients = [row for row in example["rows"] if row["name"] != "conservation"]
    for row in nutrients:
        make.nutrient(row["name"], "g/kg")
    for v in example["variables"]:
        make.ingredient(v["name"], v["cost"] / 100, {r["name"]: 1000 * r["coef"][v["name"]] for r in nutrients}, "kg")
    feed = make.formula("Mix")
    for row in nutrients:
        bounds = [None if b is None else 100 * b for b in (row["lo"], row["hi"])]
        make.limit(feed, "nutrient", row["name"], *bounds, unit="%")
    result = solved(make.library)
    assert result.cost == pytest.approx(10 * exact(example["computed"]["objective"]), rel=1e-12)
    assert result.cost / 10 == pytest.approx(example["published"]["objective"], abs=0.005)
    for one in result.ingredients:
        assert one.amount == pytest.approx(exact(example["computed"]["x"][one.name]), rel=1e-10)
        assert one.amount == pytest.approx(example["published"]["x"][one.name], abs=0.005)
    per_percent = {r["name"]: exact(example["computed"]["marginal"][r["name"]]) / 10 for r in nutrients}
    assert limit_prices(result) == pytest.approx(per_percent, rel=1e-9, abs=1e-9)


# Units of Stigler's table: what a dollar buys is a "kg" here, so that a price of 1,000 a tonne is a dollar.
STIGLER_UNITS = {"1000 kcal": ("Mcal/kg", 1.0), "g": ("g/kg", 1.0), "mg": ("mg/kg", 1.0), "1000 IU": ("IU/kg", 1000.0)}


def stigler() -> Library:
    make = Maker()
    for need in STIGLER["requirements"]:
        make.nutrient(need["nutrient"], STIGLER_UNITS[need["unit"]][0])
    scale = {need["nutrient"]: STIGLER_UNITS[need["unit"]][1] for need in STIGLER["requirements"]}
    for food in STIGLER["table"]:
        make.ingredient(food["food"], 1.0, {n: scale[n] * v for n, v in food["per_usd"].items()}, per="kg")
    man = make.formula("Moderately active man", amounts=Amounts.RATION)
    for need in STIGLER["requirements"]:
        minimum = scale[need["nutrient"]] * need["minimum_per_day"]
        make.limit(man, "nutrient", need["nutrient"], minimum, basis="per day")
    return make.library


def test_stiglers_subsistence_costs_0_108662_dollars_a_day_and_has_five_foods() -> None:
    result = solved(stigler())
    assert len(result.ingredients) == 77
    assert round(result.cost or 0, 6) == 0.108662
    assert result.cost == pytest.approx(0.10866227820675685, rel=1e-12)
    dollars = {i.name: i.amount for i in result.mix}
    assert dollars == pytest.approx(STIGLER["computed"]["dollars_per_day"], rel=1e-9)
    assert len(dollars) == 5
    assert (result.cost or 0) * 365 == pytest.approx(STIGLER["published"]["optimum_per_year_usd"], abs=0.005)


def test_stiglers_shadow_prices_are_those_of_the_exact_basis() -> None:
    prices = limit_prices(solved(stigler()))
    for need in STIGLER["requirements"]:
        target = STIGLER["computed"]["shadow_prices_usd_per_unit"][need["nutrient"]]
        scale = STIGLER_UNITS[need["unit"]][1]
        assert scale * prices[need["nutrient"]] == pytest.approx(target, rel=1e-9, abs=1e-15)


@pytest.mark.parametrize("example", PEARSON, ids=[e["id"] for e in PEARSON])
@pytest.mark.parametrize("basis", list(Basis))
def test_a_pearson_square_is_a_blend_of_two(example: dict[str, Any], basis: Basis) -> None:
    """On dry matter too, where both parts are equally dry."""
    make = Maker()
    make.nutrient("Crude protein")
    for name, protein in example["components"].items():
        make.ingredient(name, 100 + protein, {"Crude protein": protein}, basis=basis, dry_matter_percent=88)
    feed = make.formula("Square", admits=Admits.ALL)
    stated = "dry matter" if basis is Basis.DRY_MATTER else ""
    make.limit(feed, "nutrient", "Crude protein", example["target"], example["target"], basis=stated)
    result = solved(make.library)
    percent = {i.name: 100 * (i.amount or 0) for i in result.mix}
    assert percent == pytest.approx(example["computed_percent"], rel=1e-9)
    for name, printed in example["published"].get("percent", {}).items():
        assert percent[name] == pytest.approx(printed, abs=0.051)
    parts = example["published"]["parts"]
    first, second = example["components"]
    assert percent[first] / percent[second] == pytest.approx(parts[first] / parts[second], rel=1e-9)


def test_turning_a_bound_by_a_unit_turns_the_cost_by_the_printed_dual_price() -> None:
    """The four-food print-out: the costs of two formulas, not a shadow price, against the published dual prices."""
    example = PROGRAMS["four_foods_full_printout"]
    library = ration(example)
    here = solved(library).cost
    assert here == pytest.approx(example["published"]["objective"], abs=5e-6)
    for limit in library.limits(1):
        name = library.subject_name(limit.subject)
        printed = -example["published"]["dual_prices_book_sign"][name]
        moved = library.copy()
        step = 0.5
        bounds = {
            side: None if (b := getattr(limit, side)) is None else b + step for side in ("minimum", "maximum")
        }
        moved.apply([Change(limit, replace(limit, **bounds))])
        there = solved(moved).cost
        assert here is not None
        assert there is not None
        assert (there - here) / step == pytest.approx(printed, abs=5e-7), name
