"""`blendapp sheet` with all that may be said of a batch: version, site, mixer, rework, fixed lines, clean-out, page."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import pypdfium2
import pytest

from blendapp.domain.formulas import Admits, Animal
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.plant import Bin, Lot, Mixer, Scale, Site
from blendapp.domain.records import KINDS, Change, added
from blendapp.services import edits
from blendapp.services.mill import open_mill
from blendapp.storage import create
from tests.cli import shapes
from tests.cli.conftest import Run
from tests.mills import Maker
from tests.services.approving import approve, staffed

Runner = Callable[..., Run]


def library() -> Library:
    make = Maker()
    for key, name in ((1, "North"), (2, "South")):
        make.put(Site(key, name))
    make.put(Mixer(1, "Small mixer", 50.0, 600.0))
    make.put(Mixer(2, "Big mixer", 100.0, 2000.0))
    make.put(Mixer(3, "South mixer", 100.0, 400.0, site_id=2))
    make.put(Scale(1, "Big", 1.0))
    make.put(Scale(2, "Oil pump", None, step_l=0.5))
    make.ingredient("Maize", 200.0, scale_id=1, dry_matter_percent=87.0)
    make.ingredient("Oil", 900.0, scale_id=2, density_kg_per_l=0.8, dry_matter_percent=99.5)
    make.ingredient("Drug", 900.0, scale_id=1, tags=(Tag.MEDICATED,), drug="tylosin", dry_matter_percent=95.0)
    make.ingredient("Fines = old", None, scale_id=1, tags=(Tag.ONLY_WHEN_LISTED,), dry_matter_percent=88.0)
    premix = make.ingredient("Premix", 700.0, scale_id=1, dry_matter_percent=90.0)
    make.put(Lot(1, 1, "L-77"))
    make.put(Bin(1, "Bin 4", 1, 1))
    feed = make.formula("Feed", animal=Animal.PIG, admits=Admits.LISTED, loss_percent=1.0)
    drugged = make.formula("Drugged", animal=Animal.PIG, admits=Admits.LISTED)
    base = make.formula("Base", admits=Admits.LISTED)
    make.limit(base, "ingredient", "Maize")
    for one in (feed, drugged):
        make.limit(one, "ingredient", "Maize")
        make.limit(one, "ingredient", "Oil", 3.0, 3.1)
        make.limit(one, "ingredient", "Premix", 1.9, 2.0)
    make.limit(drugged, "ingredient", "Drug", 0.9, 1.0)
    make.library.apply([Change(premix, replace(premix, made_by_formula_id=base.id))])
    return make.library


@pytest.fixture
def mill(tmp_path: Path) -> Path:
    path = tmp_path / "plant.mill"
    found = library()
    create(path, [added(record) for kind in KINDS for record in found.all(kind)]).close()
    return path


@pytest.fixture
def sheet(run: Runner, mill: Path, tmp_path: Path) -> Callable[..., Run]:
    def call(formula: str, kg: float, *more: object) -> Run:
        return run("sheet", mill, formula, "--batch-kg", kg, "-o", tmp_path / "a.pdf", *more)

    return call


def checked(found: Run, status: int = 0) -> Any:
    assert found.err == ""
    assert found.status == status, found.out
    shapes.check(found.json, shapes.SHEET)
    return found.json


def pages(path: Path) -> tuple[str, tuple[int, int]]:
    document = pypdfium2.PdfDocument(path.read_bytes())
    text = "\n".join(page.get_textpage().get_text_bounded() for page in document)
    return text, tuple(round(side) for side in document[0].get_size())  # type: ignore[return-value]


def by_name(batch: Any) -> dict[str, Any]:
    return {line["ingredient"]: line for line in batch["lines"]}


def test_json_tells_bins_litres_mixer_yield_and_what_is_made_first(sheet: Callable[..., Run]) -> None:
    batch = checked(sheet("Feed", 1000, "--json"))
    lines = by_name(batch)
    assert lines["Maize"]["bins"] == ["Bin 4, lot L-77"]
    assert lines["Oil"]["target_l"] * 2 == round(lines["Oil"]["target_l"] * 2)
    assert lines["Oil"]["target_kg"] == pytest.approx(lines["Oil"]["target_l"] * 0.8, rel=1e-12)
    assert lines["Maize"]["target_l"] is None
    assert lines["Premix"]["tolerance_kg"] == pytest.approx(1.0)
    assert (batch["site"], batch["mixer"]) == (None, "Big mixer")
    assert (batch["previous_feed"], batch["clean_out"]) == (None, None)
    assert batch["yield_kg"] == pytest.approx(batch["total_kg"] * 0.99)
    assert batch["to_make"] == [
        {"ingredient": "Premix", "formula": "Base", "mass_kg": lines["Premix"]["target_kg"]}
    ]


def test_rework_and_fixed_lines_are_told_by_name_and_number(sheet: Callable[..., Run]) -> None:
    batch = checked(sheet("Feed", 1000, "--rework", "fines = Old=2.5", "--fix", "Premix=21", "--json"), 1)
    lines = by_name(batch)
    assert (lines["Fines = old"]["target_kg"], lines["Fines = old"]["rework"]) == (25.0, True)
    assert (lines["Premix"]["target_kg"], lines["Premix"]["fixed"]) == (21.0, True)
    text = sheet("Feed", 1000, "--rework", "Fines = old=2.5", "--fix", "Premix=21").out
    assert "rework" in text
    assert "fixed" in text
    assert "To be made first: 21.000 kg of Premix, by Base" in text
    assert "Bin 4, lot L-77" in text


def test_site_and_mixer_are_chosen_by_name(sheet: Callable[..., Run]) -> None:
    assert checked(sheet("Feed", 400, "--json"))["mixer"] == "South mixer"
    north = checked(sheet("Feed", 400, "--site", "north", "--json"))
    assert (north["site"], north["mixer"], north["batches"]) == ("North", "Small mixer", 1)
    south = checked(sheet("Feed", 800, "--site", "South", "--mixer", "South mixer", "--json"), 0)
    assert (south["site"], south["mixer"], south["batches"]) == ("South", "South mixer", 2)


def test_every_unknown_name_is_told_at_once(sheet: Callable[..., Run], tmp_path: Path) -> None:
    faults = sheet(
        "Feed", 500, "--site", "West", "--mixer", "Old", "--rework", "Dust=1", "--fix", "Oil=3", "--fix", "oil=4"
    ).faults
    assert len(faults) == 4
    for words in ("no site “West”; the mill has: North, South", "no mixer “Old”", "no ingredient “Dust”",
                  "--fix names Oil twice"):
        assert any(words in line for line in faults), words
    assert not (tmp_path / "a.pdf").exists()


@pytest.mark.parametrize(
    ("more", "words"),
    [
        (["--rework", "Fines"], "write it like Fines=2"),
        (["--rework", "=2"], "write it like Fines=2"),
        (["--rework", "Oil=much"], "is not a number"),
        (["--rework", "Oil=100"], "leaves nothing of the feed"),
        (["--rework", "Oil=0"], "above 0 %"),
        (["--fix", "Oil=-3"], "below 0"),
        (["--fix", "Premix=20.5"], "no multiple of a scale's step"),
        (["--fix", "Premix=500"], "other lines bring the batch to"),
        (["--clean-out", "hose"], "physical"),
        (["--page", "both"], "master"),
        (["--paper", "A3"], "letter"),
        (["--approved"], "no approved version"),
    ],
)
def test_what_cannot_be_is_unusable_and_writes_nothing(
    more: list[str], words: str, sheet: Callable[..., Run], tmp_path: Path
) -> None:
    (line,) = sheet("Feed", 1000, *more).faults
    assert words in line
    assert not (tmp_path / "a.pdf").exists()
    assert "Batch sheet 1 " in sheet("Feed", 1000).out


def test_after_a_drug_the_answer_is_no_until_a_clean_out_is_chosen(
    sheet: Callable[..., Run], tmp_path: Path
) -> None:
    assert sheet("Drugged", 1000).status == 0
    (tmp_path / "a.pdf").unlink()
    asked = checked(sheet("Feed", 1000, "--json"), 1)
    assert "Drug (drug: tylosin) is not in this feed" in asked["cause"]
    assert asked["pdf"] is None
    assert not (tmp_path / "a.pdf").exists()
    assert "Choose physical, flush or sequence" in sheet("Feed", 1000, "--clean-out", "none").out
    flushed = checked(sheet("Feed", 1000, "--clean-out", "flush", "--json"))
    assert (flushed["clean_out"], flushed["previous_feed"][:17]) == ("flush", "Drugged (sheet 1,")
    assert sheet("Drugged", 1000, "--previous", "Wheat").status == 0
    accepted = sheet("Feed", 1000, "--accept", "washed by hand", "--by", "Ann")
    assert accepted.status == 0
    assert "Batch sheet 4 " in accepted.out


def test_the_approved_version_is_made_in_its_approved_proportions(sheet: Callable[..., Run], mill: Path) -> None:
    before = by_name(checked(sheet("Feed", 1000, "--json")))
    opened = open_mill(mill, "Ann")
    staffed(opened)
    approve(opened, 1)
    edits.set_bound(opened, 3, "maximum", 5.0)
    edits.set_bound(opened, 3, "minimum", 4.5)
    opened.close()
    draft = checked(sheet("Feed", 1000, "--json"))
    assert draft["version"] == "draft 2"
    approved = checked(sheet("Feed", 1000, "--approved", "--rework", "Fines = old=10", "--json"), 1)
    lines = by_name(approved)
    assert approved["version"] == "version 1"
    assert lines["Fines = old"]["target_kg"] == 100.0
    assert lines["Oil"]["share_kg"] == pytest.approx(0.9 * before["Oil"]["share_kg"])
    assert lines["Maize"]["bins"] == ["Bin 4, lot L-77"]
    assert approved["to_make"][0]["ingredient"] == "Premix"


def test_an_approved_version_that_was_altered_from_outside_is_unusable_and_says_so(
    sheet: Callable[..., Run], mill: Path, tmp_path: Path
) -> None:
    opened = open_mill(mill, "Ann")
    staffed(opened)
    approve(opened, 1)
    opened.close()
    raw = sqlite3.connect(mill)
    raw.execute("UPDATE version SET note = 'x'")
    raw.commit()
    raw.close()
    (line,) = sheet("Feed", 1000, "--approved").faults
    assert "Version 1 of Feed was altered outside this program: its seal does not fit." in line
    assert not (tmp_path / "a.pdf").exists()


def test_an_acceptance_by_nobody_of_the_mill_is_unusable_on_every_page(
    sheet: Callable[..., Run], mill: Path, tmp_path: Path
) -> None:
    opened = open_mill(mill)
    staffed(opened)
    opened.close()
    for page in ("sheet", "master"):
        (line,) = sheet("Feed", 1000, "--fix", "Premix=21", "--accept", "seen", "--by", "Bem", "--page", page).faults
        assert "Nobody active in this mill is called “Bem”; did you mean Ben?" in line
        assert not (tmp_path / "a.pdf").exists()
    assert sheet("Feed", 1000, "--fix", "Premix=21", "--accept", "seen", "--by", "BEN").status == 0
    opened = open_mill(mill)
    assert [record.accepted_by for record in opened.library.all("batch")] == ["Ben"]
    opened.close()


def test_paper_and_mass_are_chosen_for_the_page(sheet: Callable[..., Run], tmp_path: Path) -> None:
    assert sheet("Feed", 1000).status == 0
    metric, size = pages(tmp_path / "a.pdf")
    assert size == (595, 842)
    assert sheet("Feed", 1000, "--paper", "letter", "--mass", "lb").status == 0
    pounds, size = pages(tmp_path / "a.pdf")
    assert size == (612, 792)
    assert metric != pounds


@pytest.mark.parametrize("page", ["master", "blank"])
def test_the_sisters_of_the_sheet_take_no_number_and_are_not_recorded(
    page: str, sheet: Callable[..., Run], tmp_path: Path
) -> None:
    found = sheet("Feed", 1000, "--page", page)
    assert found.status == 0
    assert "without a number" in found.out
    text, _size = pages(tmp_path / "a.pdf")
    assert "Maize" in text
    assert "Batch sheet 1 " in sheet("Feed", 1000).out


def test_help_has_an_example_of_the_new_options(run: Runner) -> None:
    found = run("sheet", "--help")
    assert found.status == 0
    for option in ("--approved", "--site", "--mixer", "--rework", "--fix", "--clean-out", "--previous", "--paper",
                   "--mass", "--page"):
        assert option in found.out
    assert "Example: blendapp sheet" in " ".join(found.out.split())
