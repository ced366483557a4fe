"""What new prices do, as a file beside the command: before they are recorded, or with it."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import openpyxl
import pytest

from blendapp.services.mill import open_mill
from tests.cli.conftest import Run

Runner = Callable[..., Run]


@pytest.fixture
def monday(mill: Path) -> Path:
    """A list that changes the price of the first ingredient of the mill that a formula admits."""
    opened = open_mill(mill)
    names = [(one.name, opened.library.quotes_of(one.id)) for one in opened.library.ingredients]
    opened.close()
    name, quotes = next((name, quotes) for name, quotes in names if quotes)
    path = mill.parent / "monday.csv"
    path.write_text(f"Ingredient,Price,Unit\n\"{name}\",{(quotes[0].price_per_t or 0) * 1.1:.2f},t\n")
    return path


def held(mill: Path) -> dict[int, object]:
    opened = open_mill(mill)
    found = dict(opened.library.records["quote"])
    opened.close()
    return found


def costs(path: Path) -> dict[str, tuple[float | None, float | None]]:
    rows = openpyxl.load_workbook(path)["Formulas"].iter_rows(min_row=2, values_only=True)
    return {str(row[0]): (row[3], row[4]) for row in rows}


def test_the_effect_is_written_and_nothing_is_recorded_before_it_is_asked_for(
    run: Runner, mill: Path, monday: Path, tmp_path: Path
) -> None:
    before = held(mill)
    found = run("prices", mill, monday, "--effect", tmp_path / "effect.xlsx")
    assert found.status == 0, found.err
    assert held(mill) == before
    assert "the table is in" in found.out
    formulas = {row["formula"]: row["cost"] for row in run("formulate", mill, "--json").json["formulas"]}
    written = costs(tmp_path / "effect.xlsx")
    assert any(old is not None for old, _new in written.values())
    for name, (old, _new) in written.items():
        assert (old is None) == (formulas[name] is None)
        assert old is None or old == pytest.approx(formulas[name])


def test_the_effect_says_before_what_formulating_says_after(
    run: Runner, mill: Path, monday: Path, tmp_path: Path
) -> None:
    found = run("prices", mill, monday, "--apply", "--effect", tmp_path / "effect.xlsx", "--json")
    assert found.status == 0, found.err
    assert found.json["applied"] is True
    assert found.json["effect"] == str(tmp_path / "effect.xlsx")
    formulas = {row["formula"]: row["cost"] for row in run("formulate", mill, "--json").json["formulas"]}
    for name, (_old, new) in costs(tmp_path / "effect.xlsx").items():
        assert (new is None) == (formulas[name] is None)
        assert new is None or new == pytest.approx(formulas[name], rel=1e-7)


def test_the_effect_may_be_delimited_text(run: Runner, mill: Path, monday: Path, tmp_path: Path) -> None:
    assert run("prices", mill, monday, "--effect", tmp_path / "effect.csv").status == 0
    lines = (tmp_path / "effect.csv").read_text("utf-8-sig").splitlines()
    assert lines[0].startswith("Formula,Currency,Per,Cost before,Cost after")
    assert len(lines) > 1


@pytest.mark.parametrize("name", ["effect.pdf", "nowhere/effect.xlsx"])
def test_a_file_that_cannot_be_written_is_one_line_and_nothing_is_recorded(
    name: str, run: Runner, mill: Path, monday: Path, tmp_path: Path
) -> None:
    before = held(mill)
    (line,) = run("prices", mill, monday, "--apply", "--effect", tmp_path / name).faults
    assert Path(name).name in line
    assert held(mill) == before


def test_the_table_never_takes_the_place_of_the_list_or_of_a_mill(run: Runner, mill: Path, monday: Path) -> None:
    text, kept = monday.read_text(), held(mill)
    (line,) = run("prices", mill, monday, "--apply", "--effect", monday).faults
    assert "the place of the price list" in line
    assert run("prices", mill, monday, "--effect", mill).status == 2
    assert (monday.read_text(), held(mill)) == (text, kept)
