"""The commands that read and write other people's tables: new, export, prices."""

from __future__ import annotations

import shutil
from collections.abc import Callable
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.services.mill import open_mill
from tests.cli import shapes
from tests.cli.conftest import Run

Runner = Callable[..., Run]
SAMPLE = Path(__file__).resolve().parents[2] / "sample_data"


def held(path: Path) -> dict[str, list[dict[str, Any]]]:
    opened = open_mill(path)
    try:
        return opened.store.dump()
    finally:
        opened.close()


def visible(folder: Path) -> list[str]:
    return sorted(p.name for p in folder.iterdir() if not p.name.startswith("."))


# -- new


def test_a_new_mill_is_empty_or_filled_from_a_workbook(run: Runner, tmp_path: Path) -> None:
    found = run("new", tmp_path / "a.mill", "--json")
    assert (found.status, found.err) == (0, "")
    shapes.check(found.json, shapes.NEW)
    assert found.json == {"mill": str(tmp_path / "a.mill"), "warnings": []}
    found = run("new", tmp_path / "b.mill", "--from", SAMPLE / "mill.xlsx", "--json")
    assert (found.status, found.err) == (0, "")
    shapes.check(found.json, shapes.NEW)
    assert len(held(tmp_path / "b.mill")["ingredient"]) > 30
    assert GENERAL_CAUTION in run("new", tmp_path / "c.mill").out


def test_new_never_overwrites(run: Runner, tmp_path: Path) -> None:
    path = tmp_path / "a.mill"
    path.write_text("mine")
    for more in ([], ["--from", SAMPLE / "mill.xlsx"]):
        (line,) = run("new", path, *more, "--json").faults
        assert "a.mill" in line
        assert path.read_text() == "mine"


def test_new_from_a_workbook_with_faults_tells_each_with_its_place_and_makes_nothing(
    run: Runner, tmp_path: Path
) -> None:
    book = openpyxl.load_workbook(SAMPLE / "mill.xlsx")
    nutrients = book["Nutrients"]
    heads = [cell.value for cell in nutrients[1]]
    nutrients.cell(2, heads.index("Unit") + 1, "furlong")
    limits = book["Limits"]
    heads = [cell.value for cell in limits[1]]
    limits.cell(3, heads.index("Kind") + 1, "wish")
    book.save(tmp_path / "bad.xlsx")
    lines = run("new", tmp_path / "a.mill", "--from", tmp_path / "bad.xlsx", "--json").faults
    assert all("bad.xlsx" in line for line in lines)
    assert any("Nutrients:2" in line and "furlong" in line for line in lines)
    assert any("Limits:3" in line and "wish" in line for line in lines)
    assert visible(tmp_path) == ["bad.xlsx"]


@pytest.mark.parametrize("content", [None, b"", b"no workbook", b"PK\x03\x04 broken"])
def test_new_from_what_is_no_workbook_is_one_line_and_makes_nothing(
    content: bytes | None, run: Runner, tmp_path: Path
) -> None:
    if content is not None:
        (tmp_path / "bad.xlsx").write_bytes(content)
    (line,) = run("new", tmp_path / "a.mill", "--from", tmp_path / "bad.xlsx", "--json").faults
    assert "bad.xlsx" in line
    assert "a.mill" not in visible(tmp_path)


def test_new_where_nothing_can_be_written_is_one_line(run: Runner, tmp_path: Path) -> None:
    (line,) = run("new", tmp_path / "missing" / "a.mill", "--json").faults
    assert "missing" in line


# -- export


def test_a_mill_exported_and_read_again_is_equal_and_exports_equal_tables(run: Runner, mill: Path) -> None:
    folder = mill.parent
    found = run("export", mill, folder / "a.xlsx", "--json")
    assert (found.status, found.err) == (0, "")
    shapes.check(found.json, shapes.EXPORT)
    assert found.json["workbook"] == str(folder / "a.xlsx")
    assert run("new", folder / "b.mill", "--from", folder / "a.xlsx").status == 0
    assert run("export", folder / "b.mill", folder / "b.xlsx").status == 0
    tables = []
    for name in ("a.xlsx", "b.xlsx"):
        book = openpyxl.load_workbook(folder / name)
        tables.append({sheet.title: [tuple(c.value for c in row) for row in sheet.rows] for sheet in book})
    assert tables[0] == tables[1]
    for formula in ("Sound", "Ration", "Conflict", "Horse", "Broken", "Gritty"):
        first, second = (run("formulate", folder / name, formula, "--json") for name in ("valley.mill", "b.mill"))
        assert first.json == second.json


def test_the_sample_mill_formulates_alike_after_a_round_trip(run: Runner, tmp_path: Path) -> None:
    assert run("new", tmp_path / "a.mill", "--from", SAMPLE / "mill.xlsx").status == 0
    assert run("export", tmp_path / "a.mill", tmp_path / "a.xlsx").status == 0
    assert run("new", tmp_path / "b.mill", "--from", tmp_path / "a.xlsx").status == 0
    first, second = (run("formulate", tmp_path / name, "--json") for name in ("a.mill", "b.mill"))
    assert first.status == 0
    assert first.json == second.json
    for formula in first.json["formulas"]:
        shapes.check(formula, shapes.formula(formula["amounts"]), formula["formula"])


def test_an_export_that_cannot_be_written_is_one_line(run: Runner, mill: Path) -> None:
    target = mill.parent / "missing" / "a.xlsx"
    (line,) = run("export", mill, target, "--json").faults
    assert line.startswith("a.xlsx: ")


def test_an_older_workbook_of_that_name_is_replaced_whole(run: Runner, mill: Path) -> None:
    target = mill.parent / "a.xlsx"
    target.write_text("old")
    assert run("export", mill, target).status == 0
    assert "Ingredients" in openpyxl.load_workbook(target).sheetnames


# -- prices

LIST = """Ingredient,Price,Unit
Maize,210.5,t
Soybean meal,19.5,cwt
Oatmeal,300,t
Premix,call,t
Fish meal,,t

Whey,-7,t
"""


@pytest.fixture
def prices(mill: Path) -> Path:
    path = mill.parent / "monday.csv"
    path.write_text(LIST)
    return path


def fates(found: Run) -> dict[int, str]:
    return {row["row"]: row["fate"] for row in found.json["rows"]}


def test_every_row_that_is_not_blank_has_one_fate_and_nothing_is_recorded_unasked(
    run: Runner, mill: Path, prices: Path
) -> None:
    before = held(mill)
    found = run("prices", mill, prices, "--json")
    assert found.err == ""
    shapes.check(found.json, shapes.PRICES)
    assert found.json["currency"] == "EUR"
    assert found.json["applied"] is False
    assert list(fates(found)) == [1, 2, 3, 4, 5, 6, 8]
    by_row = fates(found)
    assert by_row[2] == "accepted"
    assert by_row[4] == "question"
    assert (by_row[1], by_row[5], by_row[6]) == ("ignored", "ignored", "ignored")
    assert by_row[8] == "question", "a negative price in a list is asked about"
    assert found.status == 1
    maize = next(row for row in found.json["rows"] if row["row"] == 2)
    assert (maize["ingredient"], maize["price_per_t"], maize["old_price_per_t"]) == ("Maize", 210.5, 200)
    assert (maize["reason"], maize["valid_from"]) == (None, None), "what a row does not have is null and no empty text"
    assert held(mill) == before
    words = run("prices", mill, prices)
    assert words.status == 1
    assert "Oatmeal" in words.out
    assert "Nothing recorded" in words.out


def test_apply_records_every_accepted_row_and_leaves_the_rest(run: Runner, mill: Path, prices: Path) -> None:
    found = run("prices", mill, prices, "--apply", "--json")
    shapes.check(found.json, shapes.PRICES)
    assert found.json["applied"] is True
    assert found.status == 1
    opened = open_mill(mill)
    try:
        accepted = {row["ingredient"]: row["price_per_t"] for row in found.json["rows"] if row["fate"] == "accepted"}
        assert "Maize" in accepted
        (kept,) = opened.library.all("price_list")
        quotes = [q for q in opened.library.all("quote") if q.price_list_id == kept.id]
        assert {opened.library.ingredient(q.ingredient_id).name: q.price_per_t for q in quotes} == accepted
        assert (kept.file_name, kept.accepted) == ("monday.csv", len(accepted))
        assert opened.undo_text == "Prices from monday.csv"
        opened.undo()
        assert opened.library.all("price_list") == []
    finally:
        opened.close()


def test_a_list_without_questions_is_done(run: Runner, mill: Path) -> None:
    path = mill.parent / "clean.csv"
    path.write_text("Ingredient,Price,Unit\nMaize,205,t\n")
    found = run("prices", mill, path, "--apply", "--json")
    assert (found.status, found.json["applied"]) == (0, True)
    again = run("formulate", mill, "Sound", "--json").json["formulas"][0]
    assert next(i["price_per_t"] for i in again["ingredients"] if i["name"] == "Maize") == 205


def test_a_list_without_an_accepted_row_applies_nothing(run: Runner, mill: Path) -> None:
    path = mill.parent / "none.csv"
    path.write_text("Ingredient,Price,Unit\nOatmeal,205,t\n")
    before = held(mill)
    found = run("prices", mill, path, "--apply", "--json")
    assert (found.status, found.json["applied"]) == (1, False)
    assert held(mill) == before


def test_the_sample_price_list_is_read_row_by_row(run: Runner, tmp_path: Path) -> None:
    run("new", tmp_path / "a.mill", "--from", SAMPLE / "mill.xlsx")
    found = run("prices", tmp_path / "a.mill", SAMPLE / "price_list.xlsx", "--apply", "--json")
    shapes.check(found.json, shapes.PRICES)
    assert found.json["applied"] is True
    assert found.status in (0, 1)


@pytest.mark.parametrize("more", [["--sheet", "May"], []])
def test_a_list_that_cannot_be_read_is_one_line(more: list[str], run: Runner, mill: Path) -> None:
    book = openpyxl.Workbook()
    book.active.title = "March"  # type: ignore[union-attr]
    book.save(mill.parent / "list.xlsx")
    name = "list.xlsx" if more else "gone.xlsx"
    (line,) = run("prices", mill, mill.parent / name, *more, "--json").faults
    assert name in line


def test_a_mill_that_another_program_holds_can_be_formulated_but_takes_no_prices(
    run: Runner, mill: Path, prices: Path
) -> None:
    import subprocess
    import sys

    program = (
        "import sys; from blendapp.services.mill import open_mill; m = open_mill(sys.argv[1]); "
        "print('open', flush=True); sys.stdin.read(); m.close()"
    )
    holder = subprocess.Popen(
        [sys.executable, "-c", program, str(mill)], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True
    )
    try:
        assert holder.stdout is not None
        assert holder.stdout.readline().strip() == "open"
        assert run("formulate", mill, "Sound", "--json").status == 0
        for call in (["prices", mill, prices, "--apply"],
                     ["sheet", mill, "Sound", "--batch-kg", 1000, "-o", mill.parent / "a.pdf"]):
            (line,) = run(*call, "--json").faults
            assert "valley.mill" in line
        assert not (mill.parent / "a.pdf").exists()
    finally:
        holder.communicate("")


def test_a_copy_of_a_mill_file_is_a_mill_file(run: Runner, mill: Path) -> None:
    shutil.copy(mill, mill.parent / "copy.mill")
    assert run("formulate", mill.parent / "copy.mill", "Sound", "--json").status == 0
