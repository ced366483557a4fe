from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from blendapp.domain.cautions import GENERAL_CAUTION
from tests.cli import shapes
from tests.cli.conftest import Run

Runner = Callable[..., Run]


@pytest.fixture
def sheet(run: Runner, mill: Path, tmp_path: Path) -> Callable[..., Run]:
    def call(formula: str, kg: float, *more: object) -> Run:
        return run("sheet", mill, formula, "--batch-kg", kg, "-o", tmp_path / "a.pdf", *more)

    return call


def checked(found: Run) -> Any:
    assert found.err == ""
    shapes.check(found.json, shapes.SHEET)
    return found.json


def test_an_order_becomes_equal_batches_and_a_page(sheet: Callable[..., Run], tmp_path: Path) -> None:
    found = sheet("Sound", 6000, "--json")
    assert found.status == 0
    batch = checked(found)
    assert (batch["order_kg"], batch["batches"], batch["batch_kg"]) == (6000, 3, 2000)
    assert batch["total_kg"] == pytest.approx(sum(line["target_kg"] for line in batch["lines"]))
    assert batch["broken"] == []
    assert batch["cause"] is None
    assert batch["version"]
    assert batch["cautions"][0] == GENERAL_CAUTION
    assert batch["pdf"] == str(tmp_path / "a.pdf")
    assert (tmp_path / "a.pdf").read_bytes().startswith(b"%PDF")
    assert {line["ingredient"]: (line["scale"], line["hand_add"]) for line in batch["lines"]} == {
        "Maize": ("Big", False), "Soybean meal": ("Big", False), "Premix": ("Bench", True)
    }
    for line in batch["lines"]:
        assert line["target_kg"] / line["step_kg"] == pytest.approx(round(line["target_kg"] / line["step_kg"]))
    protein = batch["limits"][0]
    by_name = {line["ingredient"]: line["target_kg"] for line in batch["lines"]}
    expected = (8.5 * by_name["Maize"] + 46 * by_name["Soybean meal"]) / batch["total_kg"]
    assert protein["value"] == pytest.approx(expected, rel=1e-12)


def test_broken_limits_are_named_and_the_answer_is_no_until_they_are_accepted(
    sheet: Callable[..., Run], tmp_path: Path
) -> None:
    found = sheet("Broken", 1000, "--json")
    assert found.status == 1
    batch = checked(found)
    assert batch["broken"] == [0]
    assert not 16.01 <= batch["limits"][0]["value"] <= 16.02
    words = sheet("Broken", 1000)
    assert words.status == 1
    assert "NOT TO BE MIXED" in words.out
    assert "Protein" in words.out
    accepted = sheet("Broken", 1000, "--json", "--accept", "within the analysis", "--by", "Ann")
    assert accepted.status == 0
    assert checked(accepted)["broken"] == [0]
    assert (tmp_path / "a.pdf").exists()


@pytest.mark.parametrize("half", [["--accept", "because"], ["--by", "Ann"], ["--accept", " ", "--by", "Ann"],
                                  ["--accept", "because", "--by", ""]])
@pytest.mark.parametrize("formula", ["Sound", "Broken"])
def test_half_an_acceptance_is_unusable_and_writes_nothing(
    half: list[str], formula: str, sheet: Callable[..., Run], tmp_path: Path
) -> None:
    (line,) = sheet(formula, 1000, *half, "--json").faults
    assert "--accept" in line or "reason" in line
    assert not (tmp_path / "a.pdf").exists()
    assert "Batch sheet 1 " in sheet("Sound", 1000).out


@pytest.mark.parametrize(
    ("formula", "kg", "words"),
    [("Gritty", 1000, "No scale weighs Grit"), ("Conflict", 1000, "No mix"), ("Sound", 50, "Mixer holds 100 to 2000"),
     ("Horse", 1000, "ionophore"), ("Incomplete", 1000, "Fish meal")],
)
def test_where_no_batch_can_be_made_the_cause_is_said_and_no_page_written(
    formula: str, kg: float, words: str, sheet: Callable[..., Run], tmp_path: Path
) -> None:
    found = sheet(formula, kg, "--json")
    assert found.status == 1
    batch = checked(found)
    assert words in batch["cause"]
    assert batch["pdf"] is None
    assert batch["lines"] == []
    assert batch["total_kg"] is None
    assert not (tmp_path / "a.pdf").exists()
    plain = sheet(formula, kg)
    assert plain.status == 1
    assert words in plain.out


def test_a_ration_is_made_in_the_proportions_of_its_kilograms(
    sheet: Callable[..., Run], run: Runner, mill: Path
) -> None:
    ration = run("formulate", mill, "Ration", "--json").json["formulas"][0]
    fed = {i["name"]: i["kg_per_day"] for i in ration["ingredients"] if i["kg_per_day"]}
    batch = checked(sheet("Ration", 1000, "--json"))
    for line in batch["lines"]:
        assert line["share_kg"] == pytest.approx(1000 * fed[line["ingredient"]] / sum(fed.values()), rel=1e-9)


def test_sheets_are_numbered_one_after_the_other(sheet: Callable[..., Run]) -> None:
    for number in (1, 2, 3):
        assert f"Batch sheet {number} written to" in sheet("Sound", 1000).out


def test_an_unknown_formula_is_unusable(sheet: Callable[..., Run], tmp_path: Path, mill: Path) -> None:
    (line,) = sheet("Hen", 1000, "--json").faults
    assert "Hen" in line
    assert str(mill) in line
    assert not (tmp_path / "a.pdf").exists()


def test_a_page_that_cannot_be_written_is_unusable_and_takes_no_number(run: Runner, mill: Path, tmp_path: Path) -> None:
    target = tmp_path / "missing" / "a.pdf"
    (line,) = run("sheet", mill, "Sound", "--batch-kg", 1000, "-o", target, "--json").faults
    assert str(target) in line
    assert "Batch sheet 1 " in run("sheet", mill, "Sound", "--batch-kg", 1000, "-o", tmp_path / "b.pdf").out
