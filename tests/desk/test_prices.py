"""A price list is looked at row by row before it is taken, and taken as one undo."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import Qt

from blendapp.desk.bench import Bench
from tests.desk.conftest import Hands


@pytest.fixture
def price_list(tmp_path: Path) -> Path:
    path = tmp_path / "list.csv"
    path.write_text("Ingredient,Price,Unit\nMaize,210,t\nLimestone,n/q,t\nUnobtainium,5,t\nSoybean meal,0.44,kg\n")
    return path


def test_every_row_shows_its_fate_and_nothing_is_stored_before_it_is_taken(bench: Bench, price_list: Path) -> None:
    bench.bring_in_prices(price_list)
    assert bench.frame.middle.currentWidget() is bench.prices
    rows = bench.prices.rows
    fates = [str(rows.cell(owner, "fate").data()) for owner in rows.owners]
    assert sorted(fates) == ["question", "taken", "taken"]
    bench.prices.ignored.setChecked(True)
    # The heading row is left alone, and so is the row whose price is “n/q”.
    assert len(rows.owners) == 5
    assert bench.work.library.price_per_t(1, bench.work.on) == 200


def test_taking_the_list_records_every_accepted_price_as_one_undo(bench: Bench, hands: Hands, price_list: Path) -> None:
    bench.bring_in_prices(price_list)
    hands.click(bench.prices.take)
    assert bench.work.library.price_per_t(1, bench.work.on) == 210
    assert bench.work.library.price_per_t(2, bench.work.on) == pytest.approx(440)
    assert bench.frame.middle.currentWidget() is bench.frame.bench
    assert "Unobtainium" in bench.strip.list.text()
    bench.work.undo()
    assert bench.work.library.price_per_t(1, bench.work.on) == 200
    assert bench.work.library.price_per_t(2, bench.work.on) == 420


def test_leaving_the_list_changes_nothing(bench: Bench, hands: Hands, price_list: Path) -> None:
    bench.bring_in_prices(price_list)
    hands.click(bench.prices.leave)
    assert bench.frame.middle.currentWidget() is bench.frame.bench
    assert bench.work.mill.undo_text is None


def test_a_file_that_cannot_be_read_is_named_in_a_sentence(bench: Bench, tmp_path: Path) -> None:
    path = tmp_path / "photo.xlsx"
    path.write_bytes(b"PK\x03\x04 half a workbook")
    bench.bring_in_prices(path)
    assert bench.frame.middle.currentWidget() is bench.frame.bench
    assert "photo.xlsx" in bench.strip.words.text()


def test_a_question_about_a_name_is_answered_once_and_remembered(bench: Bench, hands: Hands, price_list: Path) -> None:
    bench.bring_in_prices(price_list)
    rows = bench.prices.rows
    question = next(owner for owner in rows.owners if str(rows.cell(owner, "fate").data()) == "question")
    hands.go(bench.prices.table, question, "fate")
    hands.key(Qt.Key.Key_Return)
    hands.write("peas")
    hands.key(Qt.Key.Key_Return)
    assert "question" not in [str(rows.cell(owner, "fate").data()) for owner in rows.owners]
    hands.click(bench.prices.take)
    assert bench.work.library.price_per_t(4, bench.work.on) == 5
    bench.bring_in_prices(price_list)
    assert "question" not in [str(rows.cell(owner, "fate").data()) for owner in rows.owners]
