"""A price list is looked at row by row before it is taken, and taken as one undo."""

from __future__ import annotations

import threading
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.desk.prices import effect
from blendapp.services.formulate import formulate
from blendapp.services.movers import movers
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
    assert bench.frame.middle.currentWidget() is bench.effect
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


def worked_out(bench: Bench, qtbot: QtBot) -> None:
    qtbot.waitUntil(lambda: not bench.effect.running, timeout=20000)


def text(bench: Bench, formula_id: int, key: str) -> str:
    return str(bench.effect.rows.cell(formula_id, key).data())


def test_what_the_new_prices_do_stands_in_a_table_after_they_are_taken(
    bench: Bench, hands: Hands, price_list: Path, qtbot: QtBot
) -> None:
    cost = {one.id: formulate(bench.work.library, one.id, bench.work.on).cost for one in bench.work.library.formulas}
    bench.bring_in_prices(price_list)
    hands.click(bench.prices.take)
    worked_out(bench, qtbot)
    for key, before in cost.items():
        after = formulate(bench.work.library, key, bench.work.on).cost
        assert before is not None
        assert after is not None
        assert text(bench, key, "before") == f"{before:.2f}"
        assert text(bench, key, "after") == f"{after:.2f}"
        assert text(bench, key, "change") == f"+{after - before:.2f}"
        assert text(bench, key, "mix") == "kept"
    assert text(bench, 1, "most").startswith(
        ("Maize, 200.00 to 210.00, does +", "Soybean meal, 420.00 to 440.00, does +"))
    hands.go(bench.effect.table, 2, "formula")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.formula_id == 2
    assert bench.frame.middle.currentWidget() is bench.frame.bench


def test_a_preview_says_the_same_and_stores_nothing(
    bench: Bench, hands: Hands, price_list: Path, qtbot: QtBot
) -> None:
    bench.bring_in_prices(price_list)
    hands.click(bench.prices.look)
    worked_out(bench, qtbot)
    before = {key: text(bench, key, "after") for key in (1, 2)}
    assert bench.work.mill.undo_text is None
    assert bench.work.library.price_per_t(1, bench.work.on) == 200
    hands.key(Qt.Key.Key_Escape)
    assert bench.frame.middle.currentWidget() is bench.prices
    hands.click(bench.prices.take)
    worked_out(bench, qtbot)
    assert {key: text(bench, key, "after") for key in (1, 2)} == before


def test_stopping_keeps_what_is_worked_out_and_the_rest_can_follow(
    bench: Bench, hands: Hands, price_list: Path, qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    begun = threading.Event()

    def slow(before, after, on, go_on, progress, answers):  # type: ignore[no-untyped-def]
        rows = movers(before, after, on)
        progress(1, 2)
        begun.set()
        while go_on():
            threading.Event().wait(0.005)
        return rows[:1]

    monkeypatch.setattr(effect, "movers", slow)
    bench.bring_in_prices(price_list)
    hands.click(bench.prices.take)
    qtbot.waitUntil(lambda: begun.is_set() and bench.effect.remark.whole == "1 of 2 formulas", timeout=20000)
    hands.click(bench.effect.stop)
    worked_out(bench, qtbot)
    assert len(bench.effect.rows.owners) == 1
    assert bench.effect.remark.whole == "stopped after 1 of 2 formulas"
    monkeypatch.undo()
    hands.click(bench.effect.stop)
    worked_out(bench, qtbot)
    assert len(bench.effect.rows.owners) == 2
    assert not bench.effect.stop.isVisible()


def test_what_prices_did_can_be_come_back_to_and_says_when_it_is_of_before_an_edit(
    bench: Bench, hands: Hands, price_list: Path, qtbot: QtBot
) -> None:
    bench.bring_in_prices(price_list)
    hands.click(bench.prices.take)
    worked_out(bench, qtbot)
    assert bench.effect.remark.whole == "2 mixes kept, 0 changed"
    hands.key(Qt.Key.Key_Escape)
    hands.key(Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert bench.work.library.price_per_t(1, bench.work.on) == 200
    command = next(one for one in bench.things() if one.words == "What the last prices did")
    command.run()
    assert bench.frame.middle.currentWidget() is bench.effect
    assert "edited since" in bench.effect.remark.whole
    assert text(bench, 1, "most")
