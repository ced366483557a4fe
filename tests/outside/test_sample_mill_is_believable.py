"""The sample mill against what a nutritionist would believe: data/sample_ranges.json, each range with its source."""

from __future__ import annotations

import datetime
import importlib.util
import json
from collections.abc import Iterator
from pathlib import Path
from types import ModuleType

import pytest
from openpyxl import Workbook, load_workbook

from blendapp.domain.formulas import Amounts
from blendapp.domain.library import Library
from blendapp.domain.list_rows import Fate
from blendapp.domain.results import Result, Status
from blendapp.services import composition, from_formula, prices, workbook
from blendapp.services.formulate import formulate
from blendapp.services.mill import Mill

HERE = Path(__file__).resolve().parent
SAMPLE = HERE.parents[1] / "sample_data"
BELIEVABLE = json.loads((HERE / "data" / "sample_ranges.json").read_text(encoding="utf-8"))["formulas"]
TODAY = datetime.date.today()

# Bounds that a limit of the formula shares with a range are met to the solver's tolerance, not beyond it.
SLACK = 1e-6


@pytest.fixture(scope="module")
def mill(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Mill]:
    path = tmp_path_factory.mktemp("sample") / "sample.mill"
    mill, _warnings = workbook.new_mill(path, SAMPLE / "mill.xlsx")
    yield mill
    mill.close()


@pytest.fixture(scope="module")
def library(mill: Mill) -> Library:
    return mill.library


@pytest.fixture(scope="module")
def answers(library: Library) -> dict[str, Result]:
    return {formula.name: formulate(library, formula.id, TODAY) for formula in library.formulas}


@pytest.fixture(scope="module")
def script() -> ModuleType:
    spec = importlib.util.spec_from_file_location("make_sample", SAMPLE / "make_sample.py")
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


def amounts(answer: Result) -> dict[str, float]:
    """Amounts as the ranges state them: % of a blend, kg per day of a ration."""
    factor = 100 if answer.amounts is Amounts.BLEND else 1
    return {ingredient.name: factor * ingredient.amount for ingredient in answer.ingredients}


def outside(low: float, value: float, high: float) -> bool:
    return not low - SLACK * max(1, abs(low)) <= value <= high + SLACK * max(1, abs(high))


def test_the_sample_has_the_formulas_and_no_others_that_the_ranges_speak_of(library: Library) -> None:
    assert sorted(formula.name for formula in library.formulas) == sorted(BELIEVABLE)


@pytest.mark.parametrize("name", BELIEVABLE)
def test_every_formula_has_an_answer_at_a_believable_cost(name: str, answers: dict[str, Result]) -> None:
    answer, (low, high) = answers[name], BELIEVABLE[name]["cost"]
    assert answer.status is Status.OPTIMAL, answer.cause
    assert low <= answer.cost <= high


@pytest.mark.parametrize("name", BELIEVABLE)
def test_every_inclusion_lies_where_feed_makers_keep_it(name: str, answers: dict[str, Result]) -> None:
    found, ranges = amounts(answers[name]), BELIEVABLE[name]["ingredients"]
    assert sorted(found) == sorted(ranges)
    assert [(i, found[i], ranges[i]) for i in found if outside(ranges[i][0], found[i], ranges[i][1])] == []


@pytest.mark.parametrize("name", BELIEVABLE)
def test_ingredients_of_one_purpose_together_lie_where_feed_makers_keep_them(
    name: str, library: Library, answers: dict[str, Result]
) -> None:
    found = amounts(answers[name])
    classes = {ingredient.name: ingredient.class_name for ingredient in library.ingredients}
    for group, (low, high) in BELIEVABLE[name]["groups"].items():
        members = group.split(" + ") if " + " in group else [i for i in found if classes[i] == group]
        together = sum(found[member] for member in members)
        assert not outside(low, together, high), (group, together)


@pytest.mark.parametrize("name", BELIEVABLE)
def test_main_nutrients_lie_between_the_requirement_and_common_excess(
    name: str, library: Library, answers: dict[str, Result]
) -> None:
    answer = answers[name]
    dry_matter = {ingredient.name: ingredient.dry_matter_percent / 100 for ingredient in library.ingredients}
    mass = sum(ingredient.amount for ingredient in answer.ingredients)
    dry = sum(ingredient.amount * dry_matter[ingredient.name] for ingredient in answer.ingredients)
    for nutrient, per, unit, low, high, source in BELIEVABLE[name]["nutrients"]:
        if nutrient == "Dry matter":
            value = dry
        else:
            whole = sum(i.amount * as_fed(library, i.name, nutrient, unit, per) for i in answer.ingredients)
            value = whole / {"kg as fed": mass, "kg dry matter": dry, "day": 1}[per]
        assert not outside(low, value, high), (nutrient, value, unit, per, source)


def as_fed(library: Library, ingredient: str, nutrient: str, unit: str, per: str) -> float:
    """A value of composition per kg as fed in a unit of the ranges; 0 where it is unknown, as the program counts it."""
    record = library.named("ingredient", ingredient)
    value = library.value(record.id, library.named("nutrient", nutrient).id)
    concentration = unit.replace("/day", "/kg") if per == "day" else unit
    return 0.0 if value is None else value.as_fed(concentration, record.dry_matter_percent)


def test_an_ingredient_without_a_price_is_named_and_not_mixed(answers: dict[str, Result]) -> None:
    assert answers["Grower pig"].unpriced == ("Field peas",)
    assert "Field peas" not in amounts(answers["Grower pig"])


def test_an_unknown_value_under_a_maximum_is_said_to_be_unsafe(answers: dict[str, Result]) -> None:
    unsafe = {(u.ingredient, u.nutrient) for u in answers["Lamb finisher"].unknown if u.unsafe}
    assert unsafe == {("Cane molasses", "Total copper")}


def test_sheep_feed_of_the_sample_holds_no_added_copper(answers: dict[str, Result]) -> None:
    for name in ("Lamb finisher", "Ewe lactation"):
        added = [limit.value for limit in answers[name].limits if limit.name == "Added copper"]
        assert added == [0.0]


def test_every_value_of_composition_has_an_origin_and_a_source(library: Library) -> None:
    values = library.all("value")
    assert len(values) > 1000
    assert [value for value in values if value.origin is None or not value.source] == []


def test_the_price_list_has_plain_rows_and_one_of_each_thing_to_ask_or_ignore(mill: Mill) -> None:
    rows = prices.read_price_list(mill, SAMPLE / "price_list.xlsx", TODAY).rows
    asked = [row.source_name for row in rows if row.fate is Fate.QUESTION]
    assert asked == ["Maize distillers grains", "Golden sweet feed base"]
    ignored = [row.source_name for row in rows if row.fate is Fate.IGNORED]
    assert ignored == ["", "Cane molasses", "Prices ex store Larkwater; for silage ask the farms"]
    assert sum(row.fate is Fate.ACCEPTED for row in rows) == len(rows) - 5 == 24


def test_the_laboratory_s_list_has_samples_and_one_of_each_thing_to_ask_or_ignore(mill: Mill) -> None:
    rows = composition.read_composition_list(mill, SAMPLE / "laboratory.xlsx", TODAY).rows
    asked = [row.source_name for row in rows if row.fate is Fate.QUESTION]
    assert asked == ["Sunflower meal", "Maize gluten feed"]
    assert [row.source_name for row in rows if row.fate is Fate.IGNORED] == ["", "Mean"]
    assert sum(row.fate is Fate.ACCEPTED for row in rows) == len(rows) - 4 == 7
    assert sum("Left unknown" in row.reason for row in rows) == 2


def test_the_workbook_warns_only_of_its_own_notes_and_of_admits_left_blank(tmp_path: Path) -> None:
    made, warnings = workbook.new_mill(tmp_path / "sample.mill", SAMPLE / "mill.xlsx")
    made.close()
    assert [(warning.place.sheet, warning.place.column) for warning in warnings] == [
        ("About", ""),
        ("Formulas", "Admits"),
    ]


def test_what_the_mill_makes_itself_is_what_its_formula_makes(mill: Mill) -> None:
    assert [i.name for i in mill.library.ingredients if i.made_by_formula_id is not None] == ["Horse minerals"]
    assert from_formula.stale(mill, TODAY) == []


def test_an_ingredient_stands_in_two_bins_and_every_liquid_has_a_meter_and_a_density(library: Library) -> None:
    maize = library.named("ingredient", "Maize")
    assert [one.name for one in library.bins_of(maize.id)] == ["Bin 1", "Bin 2"]
    metered = [i for i in library.ingredients if i.scale_id and library.records["scale"][i.scale_id].by_volume]
    assert [(i.name, i.density_kg_per_l) for i in metered] == [("Cane molasses", 1.4), ("Soya oil", 0.92)]


def test_every_formula_has_steps_and_the_medicated_one_its_own(library: Library) -> None:
    assert all(library.steps_of(formula.id) for formula in library.formulas)
    own = {step.formula_id for step in library.all("mixing_step") if step.formula_id is not None}
    assert {library.formula(key).name for key in own} == {"Broiler starter", "Broiler finisher"}


@pytest.mark.parametrize(("file", "maker"), [
    ("mill.xlsx", "mill_workbook"), ("price_list.xlsx", "price_workbook"), ("laboratory.xlsx", "laboratory_workbook"),
])
def test_the_workbooks_are_what_their_script_makes(file: str, maker: str, script: ModuleType) -> None:
    assert cells(load_workbook(SAMPLE / file)) == cells(getattr(script, maker)())


def cells(book: Workbook) -> dict[str, list[list[object]]]:
    """Every filled cell by sheet and row; a date is compared as a day, as a saved workbook gives it a time."""
    return {sheet.title: [[plain(c) for c in row] for row in sheet.iter_rows(values_only=True)] for sheet in book}


def plain(cell: object) -> object:
    return cell.date() if isinstance(cell, datetime.datetime) else cell
