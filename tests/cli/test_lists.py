"""The commands about lists: composition, lists, and whose prices a price list holds."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from argon2 import PasswordHasher

from blendapp.domain.plant import Site, Supplier
from blendapp.domain.records import KINDS, added
from blendapp.services import people
from blendapp.services.edits import set_value
from blendapp.services.mill import Mill, open_mill
from blendapp.storage import create
from tests.cli import shapes
from tests.cli.conftest import Run
from tests.services import approving

Runner = Callable[..., Run]
LAB = """Results as received basis
Material,Lab no,Sampled,Moisture %,Protein (%),Energy MJ/kg,Mould
Maize,7,2026-02-03,13.0,8.3,14.2,absent
Maize,8,2026-02-05,12.6,8.7,14.0,absent
Soybean meal,9,2026-02-05,11.0,4.6,,absent
Fish meal,10,2026-02-05,8,-65,,absent
Bone meal,11,2026-02-05,8,40,,absent
Mean,,,11,20,,
"""


@pytest.fixture
def lab(mill: Path) -> Path:
    path = mill.parent / "Laboratory 2026-02.csv"
    path.write_text(LAB)
    return path


def held(path: Path) -> dict[str, list[dict[str, Any]]]:
    opened = open_mill(path)
    try:
        return opened.store.dump()
    finally:
        opened.close()


def test_every_row_of_a_list_of_analyses_has_one_fate_and_its_values(run: Runner, mill: Path, lab: Path) -> None:
    before = held(mill)
    found = run("composition", mill, lab, "--json")
    assert (found.status, found.err) == (1, "")
    shapes.check(found.json, shapes.COMPOSITION)
    rows = found.json["rows"]
    assert [(row["row"], row["fate"]) for row in rows] == [
        (1, "ignored"), (2, "ignored"), (3, "accepted"), (4, "accepted"), (5, "question"), (6, "refused"),
        (7, "question"), (8, "ignored"),
    ]
    assert rows[2] == {
        "sheet": None, "row": 3, "fate": "accepted", "reason": None,
        "source_name": "Maize", "ingredient": "Maize", "sample": "7", "sampled": "2026-02-03",
        "values": [
            {"nutrient": "Dry matter", "amount": 87, "unit": "%", "basis": "as fed", "old": 87},
            {"nutrient": "Protein", "amount": 8.3, "unit": "%", "basis": "as fed", "old": 8.5},
            {"nutrient": "Energy", "amount": 14.2, "unit": "MJ/kg", "basis": "as fed", "old": 14.1},
        ],
    }
    assert "10th" in rows[4]["reason"]
    assert "negative" in rows[5]["reason"]
    assert "Bone meal" in rows[6]["reason"]
    assert found.json["applied"] is False
    assert held(mill) == before


def test_apply_records_the_accepted_samples_and_their_means(run: Runner, mill: Path, lab: Path) -> None:
    found = run("composition", mill, lab, "--apply")
    assert (found.status, found.err) == (1, "")
    assert "accepted 2, question 2, refused 1, ignored 3. Recorded." in found.out
    assert [line.split() for line in found.out.splitlines() if line.split()[:2] == ["Maize", "Protein"]] == [
        ["Maize", "Protein", "8.500", "%", "as", "fed", "2", "0.2828", "8.500"]
    ]
    now = held(mill)
    (kept,) = now["price_list"]
    assert (kept["file_name"], kept["about"], kept["source"]) == ("Laboratory 2026-02.csv", "composition", "laboratory")
    assert [(lot["name"], lot["dry_matter_percent"]) for lot in now["lot"]] == [("7", 87), ("8", 87.4)]
    (energy,) = [one for one in now["value"] if one["ingredient_id"] == 1 and one["nutrient_id"] == 2]
    assert (energy["amount"], energy["n"], energy["origin"]) == (14.1, 2, "measured")


def test_a_list_without_questions_is_done_and_one_without_a_table_is_no_traceback(
    run: Runner, mill: Path, tmp_path: Path
) -> None:
    (tmp_path / "one.csv").write_text("Ingredient,Protein % as fed\nMaize,8.4\n")
    assert run("composition", mill, tmp_path / "one.csv", "--apply", "--source", "Bay Lab").status == 0
    assert held(mill)["price_list"][0]["source"] == "bay lab"
    (line,) = run("composition", mill, tmp_path / "none.csv", "--json").faults
    assert "none.csv" in line
    (line,) = run("composition", mill, tmp_path / "one.csv", "--sheet", "A").faults
    assert "no sheets" in line


def test_an_approved_formula_that_falls_outside_its_limits_is_said_after_applying(
    run: Runner, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(people, "_hasher", PasswordHasher(time_cost=1, memory_cost=8, parallelism=1))
    feed = approving.feed_library()
    path = tmp_path / "feed.mill"
    mill = Mill(create(path, [added(record) for kind in KINDS for record in feed.all(kind)]), "Ann")
    approving.staffed(mill)
    approving.approve(mill)
    mill.close()
    (tmp_path / "lab.csv").write_text("Ingredient,Crude protein % as fed\nSoybean meal,43\n")
    assert "Mash" not in run("composition", path, tmp_path / "lab.csv").out
    found = run("composition", path, tmp_path / "lab.csv", "--apply")
    assert found.status == 0
    assert "! Mash, version 1, is outside its limits:" in found.out
    assert "below its minimum of 18" in found.out


def test_applied_lists_are_shown_opened_and_rolled_back(run: Runner, mill: Path, lab: Path, tmp_path: Path) -> None:
    assert "No list" in run("lists", mill).out
    before = held(mill)
    (tmp_path / "monday.csv").write_text("Ingredient,Price,Unit\nMaize,205,t\n")
    assert run("prices", mill, tmp_path / "monday.csv", "--apply").status == 0
    run("composition", mill, lab, "--apply")
    found = run("lists", mill, "--json")
    shapes.check(found.json, shapes.LISTS)
    assert [(one["number"], one["about"], one["rows"], one["accepted"]) for one in found.json["lists"]] == [
        (2, "composition", 8, 2), (1, "prices", 2, 1)
    ]
    words = run("lists", mill).out
    assert "Laboratory 2026-02.csv" in words
    assert "monday.csv" in words
    opened = run("lists", mill, 2, "--json").json
    assert [row["fate"] for row in opened["rows"]][1:5] == ["ignored", "accepted", "accepted", "question"]
    shapes.check({"rows": opened["rows"], "questions": [], "applied": True}, shapes.COMPOSITION)
    assert "Maize" in run("lists", mill, 1).out
    assert run("lists", mill, 1, "--json").json["rows"][1]["price_per_t"] == 205
    done = run("lists", mill, 2, "--roll-back", "--json")
    assert (done.status, done.json["left"]) == (0, [])
    assert done.json["lists"][0]["withdrawn"] is not None
    assert held(mill)["value"] == before["value"]
    assert "rolled back" in run("lists", mill, 2).out
    for call in (["lists", mill, 9], ["lists", mill, 2, "--roll-back"], ["lists", mill, "--roll-back"]):
        assert len(run(*call).faults) == 1


def test_what_was_changed_since_is_said_when_a_list_is_rolled_back(run: Runner, mill: Path, lab: Path) -> None:
    run("composition", mill, lab, "--apply")
    opened = open_mill(mill)
    set_value(opened, 1, 1, 9.0)
    opened.close()
    assert "! Maize, Protein: The value was changed since and stays." in run("lists", mill, 1, "--roll-back").out


def test_whose_prices_and_for_which_site_is_said_once(run: Runner, mill: Path, tmp_path: Path) -> None:
    opened = open_mill(mill)
    opened.apply("places", [
        added(Site(opened.new_id("site"), "North")), added(Supplier(opened.new_id("supplier"), "Bay Grain"))
    ])
    opened.close()
    (tmp_path / "monday.csv").write_text("Ingredient,Price,Unit\nMaize,205,t\n")
    path = tmp_path / "monday.csv"
    call = ["prices", mill, path, "--source", "bay", "--supplier", "bay grain", "--site", "North", "--apply"]
    assert run(*call).status == 0
    assert run("prices", mill, path, "--source", "bay", "--apply").status == 0
    quotes = [one for one in held(mill)["quote"] if one["price_list_id"]]
    assert [(one["site_id"], one["supplier_id"]) for one in quotes] == [(1, 1), (1, 1)]
    lines = run("prices", mill, path, "--supplier", "Bay Grian", "--site", "South").faults
    assert len(lines) == 2
    assert "Bay Grain" in lines[0]


def test_the_very_same_file_taken_a_second_time_is_said_to_be_so(run: Runner, mill: Path, lab: Path) -> None:
    assert "taken before" not in run("composition", mill, lab, "--apply").out
    again = run("composition", mill, lab)
    assert "This very file was taken before, on " in again.out
    lab.write_text(LAB.replace("8.3", "8.4"))
    assert "taken before" not in run("composition", mill, lab).out
