from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.services import asking
from blendapp.services import formulate as formulating
from blendapp.services.mill import open_mill
from tests.cli import shapes
from tests.cli.conftest import Run

Runner = Callable[..., Run]


def one(found: Run) -> Any:
    (formula,) = found.json["formulas"]
    shapes.check(found.json, {"formulas": [shapes.formula(formula["amounts"])]})
    return formula


def test_every_formula_is_solved_in_order_where_none_is_named(run: Runner, mill: Path) -> None:
    found = run("formulate", mill, "--json")
    assert found.status == 1
    assert found.err == ""
    assert [f["formula"] for f in found.json["formulas"]] == [
        "Sound", "Conflict", "Unbounded", "Incomplete", "Horse", "Ration", "Broken", "Gritty"
    ]
    assert [f["status"] for f in found.json["formulas"]] == [
        "optimal", "conflict", "unbounded", "incomplete", "conflict", "optimal", "optimal", "optimal"
    ]
    for formula in found.json["formulas"]:
        shapes.check(formula, shapes.formula(formula["amounts"]), formula["formula"])
        assert formula["cautions"][0] == GENERAL_CAUTION


def test_an_optimal_formula_has_all_its_figures(run: Runner, mill: Path) -> None:
    found = run("formulate", mill, "Sound", "--json")
    assert (found.status, found.err) == (0, "")
    formula = one(found)
    assert formula["currency"] == "EUR"
    assert formula["gap"] <= 1e-7
    assert formula["check"]["largest_violation"] <= 1e-9
    assert formula["check"]["duality_gap"] <= 1e-7
    assert formula["conflict"] is None
    assert formula["cause"] is None
    assert formula["given_ingredients"] is False
    ingredients = formula["ingredients"]
    assert [i["name"] for i in ingredients] == ["Maize", "Soybean meal", "Premix"]
    assert sum(i["inclusion_percent"] for i in ingredients) == pytest.approx(100, abs=1e-9)
    assert sum(i["cost"] for i in ingredients) == pytest.approx(formula["cost"], rel=1e-12)
    for i in ingredients:
        assert i["cost"] == pytest.approx(i["price_per_t"] * i["inclusion_percent"] / 100, rel=1e-12)
    assert formula["unpriced"] == ["Fish meal"]
    assert formula["unknown"] == [{"ingredient": "Soybean meal", "nutrient": "Energy", "unsafe": True}]
    assert any("Energy of Soybean meal is unknown" in text for text in formula["cautions"])


def test_limits_stand_in_the_order_of_the_workbook_each_row_one_entry(run: Runner, mill: Path) -> None:
    limits = one(run("formulate", mill, "Sound", "--json"))["limits"]
    assert [(x["kind"], x["name"], x["per"], x["basis"], x["unit"], x["minimum"], x["maximum"]) for x in limits] == [
        ("nutrient", "Protein", None, "as fed", "%", 16.0, 18.0),
        ("nutrient", "Energy", None, "at 88 % dry matter", "MJ/kg", 10.0, None),
        ("ingredient", "Premix", None, None, "%", 0.5, 0.5),
        ("ratio", "Protein", "Energy", None, "", None, 9.0),
        ("group", "Maize + Soybean meal", None, None, "kg/t", None, 995.0),
        ("ingredient", "Maize", None, None, "%", None, None),
    ]
    target = limits[2]
    assert target["value"] == 0.5
    assert (target["tighten_cost"], target["relax_saving"]) == (None, None)
    assert limits[5]["value"] is not None
    assert limits[5]["binding"] is None
    for limit in limits:
        if limit["binding"] is None:
            assert (limit["tighten_cost"], limit["relax_saving"]) == (0, 0)
            assert (limit["tighten_holds_to"], limit["relax_holds_to"]) == (None, None)
        if limit["minimum"] is None or limit["minimum"] != limit["maximum"]:
            assert (limit["raise_cost"], limit["lower_cost"]) == (None, None)


def test_a_ration_is_in_kg_and_money_per_day(run: Runner, mill: Path) -> None:
    formula = one(run("formulate", mill, "Ration", "--json"))
    assert formula["cost_per"] == "day"
    fed = {i["name"]: i["kg_per_day"] for i in formula["ingredients"]}
    assert sum(i["cost"] for i in formula["ingredients"]) == pytest.approx(formula["cost"], rel=1e-12)
    assert fed["Maize"] * 85 + fed["Soybean meal"] * 460 == pytest.approx(1200, rel=1e-9)
    assert [x["unit"] for x in formula["limits"]] == ["g/day", "kg/day"]


@pytest.mark.parametrize(
    ("name", "status", "words"),
    [("Conflict", "conflict", "No mix"), ("Unbounded", "unbounded", "Whey"), ("Incomplete", "incomplete", "Fish meal"),
     ("Horse", "conflict", "Coccidiostat holds an ionophore")],
)
def test_no_answer_is_said_with_its_cause_and_shows_no_figure(
    name: str, status: str, words: str, run: Runner, mill: Path
) -> None:
    found = run("formulate", mill, name, "--json")
    assert (found.status, found.err) == (1, "")
    formula = one(found)
    assert formula["status"] == status
    assert words in formula["cause"]
    assert formula["cost"] is None
    assert formula["gap"] is None
    amount = "kg_per_day" if formula["amounts"] == "ration" else "inclusion_percent"
    assert all(i[amount] is None and i["cost"] is None for i in formula["ingredients"])
    assert all(
        x[key] is None for x in formula["limits"]
        for key in ("value", "binding", "shadow_price_unique", "tighten_cost", "relax_saving", "raise_cost")
    )
    assert formula["limits"]
    plain = run("formulate", mill, name)
    assert plain.status == 1
    assert words in plain.out
    assert status in plain.out


def test_names_are_found_whatever_their_case_and_come_in_the_order_asked(run: Runner, mill: Path) -> None:
    found = run("formulate", mill, "RATION", " sound ", "--json")
    assert found.status == 0
    assert [f["formula"] for f in found.json["formulas"]] == ["Ration", "Sound"]


def test_in_words_an_answer_has_cost_mix_limits_and_the_caution(run: Runner, mill: Path) -> None:
    found = run("formulate", mill, "Sound")
    assert found.status == 0
    for words in ("EUR/t", "Maize", "Soybean meal", "Protein : Energy", "Fish meal", GENERAL_CAUTION):
        assert words in found.out


def test_every_unknown_name_is_one_line_with_file_name_and_mend(run: Runner, mill: Path) -> None:
    for json in ([], ["--json"]):
        lines = run("formulate", mill, "Sond", "Sound", "Hen", *json).faults
        assert len(lines) == 2
        assert "Sond" in lines[0]
        assert "Hen" in lines[1]
        assert all("the mill has: Sound, Conflict" in line for line in lines)
        assert all(str(mill) in line for line in lines)


@pytest.mark.parametrize("near", ["-1", "-0.001", "abc", "nan", "inf", ""])
def test_a_near_below_0_or_no_number_is_unusable(near: str, run: Runner, mill: Path) -> None:
    (line,) = run("formulate", mill, "--near", near, "--json").faults
    assert "--near" in line


@pytest.mark.parametrize("near", ["0", "0.5", "25"])
def test_any_near_from_0_is_taken(near: str, run: Runner, mill: Path) -> None:
    assert run("formulate", mill, "Sound", "--near", near, "--json").status == 0


def test_prove_is_taken(run: Runner, mill: Path) -> None:
    assert run("formulate", mill, "Sound", "--prove", "--json").status == 0


def test_a_mill_without_formulas_has_nothing_to_say_no_to(run: Runner, tmp_path: Path) -> None:
    path = tmp_path / "empty.mill"
    assert run("new", path).status == 0
    found = run("formulate", path, "--json")
    assert (found.status, found.json) == (0, {"formulas": []})
    assert "no formula" in run("formulate", path).out


def test_a_failed_check_is_unusable_and_shows_nothing(
    run: Runner, mill: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    def fail(*_given: object) -> None:
        raise formulating.certificate.FailedCheck("Maize is missed by 0.1")

    monkeypatch.setattr(formulating.certificate, "check", fail)
    (line,) = run("formulate", mill, "Sound", "--json").faults
    assert "failed its check" in line
    assert "valley.mill" in line


def test_formulating_leaves_the_file_as_it_was(run: Runner, mill: Path) -> None:
    def held() -> tuple[dict[str, Any], int]:
        opened = open_mill(mill)
        try:
            return opened.store.dump(), len(opened.store.entries())
        finally:
            opened.close()

    before = held()
    run("formulate", mill, "--json")
    assert held() == before


def test_prove_says_the_exact_cost_and_leaves_the_json_as_it_is(run: Runner, mill: Path) -> None:
    found = run("formulate", mill, "Sound", "Ration", "--prove")
    assert found.status == 0
    assert found.out.count("Proven in exact fractions: no mix costs less than") == 2
    assert run("formulate", mill, "Sound", "--prove", "--json").json == run("formulate", mill, "Sound", "--json").json


def test_a_proof_that_fails_shows_no_answer(run: Runner, mill: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    def fails(_solution: object, as_typed: bool = False) -> None:
        raise asking.NotProven("made to fail")

    monkeypatch.setattr(asking, "prove", fails)
    found = run("formulate", mill, "Sound", "--prove", "--json")
    assert found.status == 2
    assert found.out == ""
    assert "could not be proven" in found.err
