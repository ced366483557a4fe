"""The page of what prices do: changed mixes in words, and the table that is written from it."""

from __future__ import annotations

from pathlib import Path

import openpyxl
import pytest
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.services import edits
from tests.desk.conftest import Hands


@pytest.fixture
def effect(bench: Bench, qtbot: QtBot) -> Bench:
    """Soybean meal falls from 420 to 150: the mixes turn to it as far as they may. The effect stands on its page."""
    before = bench.work.library.copy()
    bench.work.do(lambda mill: edits.set_price(mill, 2, 150.0, bench.work.on))
    bench.show_effect(before, bench.work.library.copy(), True)
    qtbot.waitUntil(lambda: not bench.effect.running, timeout=20000)
    return bench


def text(bench: Bench, formula_id: int, key: str) -> str:
    return str(bench.effect.rows.cell(formula_id, key).data())


def test_a_changed_mix_is_told_in_words(effect: Bench) -> None:
    assert effect.work.result is not None
    soy = next(one for one in effect.work.result.ingredients if one.name == "Soybean meal")
    words = text(effect, 1, "mix")
    assert words.startswith("changed: ")
    assert f"to {100 * (soy.amount or 0):.2f} %" in words


def test_the_rows_are_written_in_their_order_with_the_figures_of_the_page(
    effect: Bench, hands: Hands, tmp_path: Path
) -> None:
    asked: list[str] = []

    def answer(_title: str, name: str, kinds: str) -> str:
        asked.append(f"{name} {kinds}")
        return str(tmp_path / "moved")

    effect.files.ask_save = answer
    hands.click(effect.effect.write)
    assert asked == ["price effect.xlsx Workbooks (*.xlsx);;Delimited text (*.csv)"]
    assert "moved.xlsx" in effect.strip.words.text()
    rows = list(openpyxl.load_workbook(tmp_path / "moved.xlsx")["Formulas"].iter_rows(min_row=2, values_only=True))
    names = {one.id: one.name for one in effect.work.library.formulas}
    assert [row[0] for row in rows] == [names[owner] for owner in effect.effect.rows.owners]
    for owner, row in zip(effect.effect.rows.owners, rows, strict=True):
        assert f"{row[3]:.2f}" == text(effect, owner, "before")
        assert f"{row[4]:.2f}" == text(effect, owner, "after")


def test_a_file_that_cannot_be_written_is_said_and_leaving_the_dialog_writes_nothing(
    effect: Bench, hands: Hands, tmp_path: Path
) -> None:
    effect.files.ask_save = lambda _title, _name, _kinds: ""
    hands.click(effect.effect.write)
    assert list(tmp_path.glob("*.xlsx")) == []
    effect.files.ask_save = lambda _title, _name, _kinds: str(tmp_path / "moved.pdf")
    hands.click(effect.effect.write)
    assert "neither .xlsx nor .csv" in effect.strip.words.text()


def test_there_is_nothing_to_write_before_anything_was_worked_out(bench: Bench) -> None:
    assert not bench.effect.write.isEnabled()
