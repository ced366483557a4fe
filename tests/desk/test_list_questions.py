"""What a list leaves open is answered by keys, one question at a time, and taken back as easily."""

from __future__ import annotations

import threading
from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.prices.reader import read_list
from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import Asked
from tests.desk.arriving import (
    DUPLICATES,
    FOREIGN,
    TWO_DECIMALS,
    UNITS_OPEN,
    UNKNOWN_NAMES,
    count,
    fates,
    hide_and_strike,
    price,
    read,
    wait,
    watch,
    write,
)
from tests.desk.conftest import Hands

CTRL, SHIFT = Qt.KeyboardModifier.ControlModifier, Qt.KeyboardModifier.ShiftModifier


@pytest.fixture(autouse=True)
def testers(bench: Bench) -> Iterator[None]:
    found = watch(bench)
    yield
    assert found


class Clerk(Hands):
    """Presses keys and waits for the list to be read again."""

    def __init__(self, bench: Bench) -> None:
        self.bench = bench

    def press(self, key: Qt.Key, modifier: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier) -> None:
        self.key(key, modifier)
        wait(self.bench)

    @property
    def asked(self) -> str:
        one = self.bench.prices.questions.current
        return "" if one is None else f"{one.question.asked.value}: {one.question.about or one.row.row}"

    @property
    def offered(self) -> list[str]:
        return [one.words for one in self.bench.prices.questions.choices.rows.choices]


@pytest.fixture
def clerk(bench: Bench) -> Clerk:
    return Clerk(bench)


def test_a_name_is_answered_by_its_figure_and_the_next_question_comes_up(
    bench: Bench, clerk: Clerk, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "bay grain 49.xlsx", UNKNOWN_NAMES))
    panel = bench.prices.questions
    assert panel.count.text() == "3 questions left"
    assert clerk.asked == "ingredient: Soya bean ml"
    assert clerk.offered == ["Soybean meal", "Nothing of ours: leave it out",
                             "A new ingredient of the mill: add “Soya bean ml”"]
    assert panel.kept.text() == "Remembered for bay grain: its next list is not asked."
    assert [one.words[:35] for one in panel.others.rows.choices] == [
        "The mill has no ingredient “Chalk”.", "The mill has no ingredient “Oddity”"]
    clerk.press(Qt.Key.Key_1)
    assert count(bench, Fate.ACCEPTED) == 2
    assert clerk.asked == "ingredient: Chalk"
    clerk.write("lime")
    assert clerk.offered == ["Limestone"]
    clerk.press(Qt.Key.Key_Return)
    assert clerk.asked == "ingredient: Oddity"
    assert panel.last.whole == "Answered “Chalk”: Limestone   Backspace takes it back"
    clerk.press(Qt.Key.Key_1)
    assert panel.count.text() == "No questions"
    assert fates(bench) == ["ignored", "accepted", "accepted", "accepted", "ignored"]
    # With nothing left to ask, Enter goes to where the list is taken, and Enter there takes it.
    assert panel.place.whole == "Enter goes to “Take 3 prices”"
    clerk.press(Qt.Key.Key_Return)
    assert QApplication.focusWidget() is bench.prices.take
    assert price(bench, 2) == 420
    clerk.press(Qt.Key.Key_Return)
    assert [price(bench, key) for key in (1, 2, 3)] == [210, 430, 51]
    read(bench, write(tmp_path / "bay grain 50.xlsx", [*UNKNOWN_NAMES, ["* subject to confirmation"]]))
    assert panel.count.text() == "No questions"
    assert count(bench, Fate.ACCEPTED) == 3


def test_a_name_that_the_mill_does_not_have_is_said_and_stays_asked(
    bench: Bench, clerk: Clerk, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    clerk.write("granite")
    assert clerk.offered == []
    clerk.press(Qt.Key.Key_Return)
    assert "granite" in bench.prices.questions.fault.text()
    assert clerk.asked == "ingredient: Soya bean ml"
    clerk.press(Qt.Key.Key_Escape)
    assert clerk.offered[0] == "Soybean meal"


def test_a_name_may_be_a_new_ingredient_of_the_mill(bench: Bench, clerk: Clerk, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    clerk.press(Qt.Key.Key_1)
    assert clerk.offered[-1] == "A new ingredient of the mill: add “Chalk”"
    clerk.press(Qt.Key.Key_2)
    assert bench.work.library.named("ingredient", "Chalk") is not None
    assert count(bench, Fate.ACCEPTED) == 3
    assert clerk.asked == "ingredient: Oddity"
    assert bench.prices.questions.last.whole == "Add Chalk   Backspace takes it back"
    # Taken back in the order in which it was done: first the ingredient, then the answer.
    clerk.press(Qt.Key.Key_Z, CTRL)
    assert bench.work.library.named("ingredient", "Chalk") is None
    assert clerk.asked == "ingredient: Chalk"
    clerk.press(Qt.Key.Key_Backspace)
    assert clerk.asked == "ingredient: Soya bean ml"
    clerk.press(Qt.Key.Key_3)
    clerk.press(Qt.Key.Key_1)
    clerk.press(Qt.Key.Key_Backspace)
    clerk.press(Qt.Key.Key_Backspace)
    assert bench.work.library.named("ingredient", "Soya bean ml") is None
    assert bench.work.mill.undo_text is None


def test_a_unit_is_chosen_or_typed_for_all_rows_at_once(bench: Bench, clerk: Clerk, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNITS_OPEN))
    panel = bench.prices.questions
    assert clerk.asked == "unit: ton"
    assert panel.place.whole == "row 2, “Maize 190 / ton”, and 1 more row"
    clerk.write("heap")
    clerk.press(Qt.Key.Key_Return)
    assert panel.fault.text().startswith("That does not answer it")
    assert bench.prices.replies is not None
    assert bench.prices.replies.answers == []
    clerk.press(Qt.Key.Key_3)
    assert count(bench, Fate.ACCEPTED) == 3
    clerk.press(Qt.Key.Key_Backspace)
    assert clerk.asked == "unit: ton"
    clerk.write("short ton")
    clerk.press(Qt.Key.Key_Return)
    clerk.press(Qt.Key.Key_Return, CTRL)
    assert price(bench, 1) == pytest.approx(190 / 0.90718474)


def test_a_rate_is_typed_with_its_day(bench: Bench, clerk: Clerk, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", FOREIGN))
    panel = bench.prices.questions
    assert clerk.asked == "rate: EUR"
    assert panel.rate.day.text() == bench.work.on.isoformat()
    clerk.write("-1")
    clerk.press(Qt.Key.Key_Return)
    assert "above 0" in panel.fault.text()
    panel.rate.rate.selectAll()
    clerk.write("1.1")
    panel.rate.day.setFocus()
    panel.rate.day.selectAll()
    clerk.write("yesterday")
    clerk.press(Qt.Key.Key_Return)
    assert "2026-03-02" in panel.fault.text()
    panel.rate.day.selectAll()
    clerk.write(bench.work.on.isoformat())
    clerk.press(Qt.Key.Key_Return)
    assert panel.count.text() == "No questions"
    clerk.press(Qt.Key.Key_Return, CTRL)
    assert price(bench, 1) == pytest.approx(220)


def test_of_two_prices_of_one_ingredient_one_is_said_to_hold(bench: Bench, clerk: Clerk, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", DUPLICATES))
    assert clerk.asked == "twin: 2"
    assert bench.prices.source.marked_row == 2
    clerk.press(Qt.Key.Key_PageDown)
    assert clerk.asked == "twin: 4"
    assert bench.prices.source.marked_row == 4
    assert bench.prices.questions.kept.text() == "Holds for this row of this list alone."
    clerk.press(Qt.Key.Key_T)
    clerk.press(Qt.Key.Key_Return)
    assert fates(bench) == ["ignored", "ignored", "accepted", "accepted"]


def test_hidden_and_struck_rows_count_only_when_that_is_said(bench: Bench, clerk: Clerk, tmp_path: Path) -> None:
    rows = [["Ingredient", "USD/t"], ["Maize", 210], ["Soybean meal", 430], ["Limestone", 51]]
    read(bench, hide_and_strike(write(tmp_path / "list.xlsx", rows), hidden=3, struck=4))
    assert count(bench, Fate.ACCEPTED) == 1
    assert clerk.asked == "hidden: 3"
    clerk.press(Qt.Key.Key_1)
    assert clerk.asked == "struck: 4"
    clerk.press(Qt.Key.Key_Up)
    clerk.press(Qt.Key.Key_Return)
    assert fates(bench) == ["ignored", "accepted", "accepted", "ignored"]


def test_a_column_that_can_be_read_two_ways_is_asked_once(bench: Bench, clerk: Clerk, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", TWO_DECIMALS))
    assert clerk.asked == "decimal: USD/t"
    assert clerk.offered == ["The point: 1.234 is a little over 1", "The comma: 1.234 is over a thousand"]
    clerk.press(Qt.Key.Key_2)
    assert count(bench, Fate.ACCEPTED) == 2
    assert str(bench.prices.rows.cell(0, "price").data()) == "210.50"


@pytest.mark.parametrize(
    ("key", "modifier"),
    [(Qt.Key.Key_Backspace, Qt.KeyboardModifier.NoModifier), (Qt.Key.Key_Escape, Qt.KeyboardModifier.NoModifier),
     (Qt.Key.Key_Z, CTRL)],
)
def test_the_last_answer_is_taken_back_and_its_question_is_in_view(
    bench: Bench, clerk: Clerk, tmp_path: Path, key: Qt.Key, modifier: Qt.KeyboardModifier
) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    clerk.press(Qt.Key.Key_1)
    clerk.press(Qt.Key.Key_1)
    assert clerk.asked == "ingredient: Oddity"
    assert bench.frame.header.undo.toolTip() == "Undo: “Chalk”: left out (Ctrl+Z)"
    clerk.press(key, modifier)
    assert clerk.asked == "ingredient: Chalk"
    clerk.press(key, modifier)
    assert clerk.asked == "ingredient: Soya bean ml"
    assert count(bench, Fate.ACCEPTED) == 1
    clerk.press(Qt.Key.Key_Z, CTRL | SHIFT)
    assert count(bench, Fate.ACCEPTED) == 2
    assert bench.frame.middle.currentWidget() is bench.prices


def test_escape_without_an_answer_goes_back_to_the_bench(bench: Bench, clerk: Clerk, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    clerk.press(Qt.Key.Key_Escape)
    assert bench.frame.middle.currentWidget() is bench.frame.bench


def test_escape_in_a_table_goes_back_to_the_question_and_takes_nothing_back(
    bench: Bench, clerk: Clerk, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    clerk.press(Qt.Key.Key_1)
    for table in (bench.prices.table, bench.prices.source):
        table.setFocus()
        clerk.press(Qt.Key.Key_Escape)
        assert bench.prices.questions.has_keyboard()
        assert count(bench, Fate.ACCEPTED) == 2
    bench.prices.table.setFocus()
    bench.prices.table.setCurrentIndex(bench.prices.rows.index(0, 0))
    clerk.press(Qt.Key.Key_Backspace)
    assert count(bench, Fate.ACCEPTED) == 1


def test_what_was_answered_is_kept_while_the_mill_file_is_open(
    bench: Bench, clerk: Clerk, tmp_path: Path, mill_file: Path
) -> None:
    path = write(tmp_path / "list.xlsx", UNKNOWN_NAMES)
    read(bench, path)
    clerk.press(Qt.Key.Key_1)
    clerk.click(bench.prices.leave)
    assert bench.work.mill.undo_text is None
    read(bench, write(tmp_path / "other.xlsx", DUPLICATES))
    read(bench, path)
    assert count(bench, Fate.ACCEPTED) == 2
    assert clerk.asked == "ingredient: Chalk"
    bench.work.open(None)
    bench.start(str(mill_file))
    read(bench, path)
    assert count(bench, Fate.ACCEPTED) == 1


def test_answers_about_rows_do_not_outlive_a_change_of_the_file(bench: Bench, clerk: Clerk, tmp_path: Path) -> None:
    path = write(tmp_path / "list.xlsx", [*DUPLICATES, ["Chalk", 50]])
    read(bench, path)
    clerk.press(Qt.Key.Key_1)
    assert clerk.asked == "twin: 2"
    clerk.press(Qt.Key.Key_1)
    assert fates(bench) == ["ignored", "accepted", "accepted", "ignored", "ignored"]
    write(path, [["Ingredient", "USD/t"], ["Maize", 300], ["Chalk", 50], ["Maize", 210]])
    clerk.press(Qt.Key.Key_F5)
    assert fates(bench) == ["ignored", "question", "ignored", "question"]


def test_enter_on_a_row_goes_to_its_question_and_a_click_to_another(
    bench: Bench, clerk: Clerk, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    assert bench.prices.rows.row(bench.prices.rows.index(2, 0)).source_name == "Oddity"  # type: ignore[union-attr]
    bench.prices.table.setFocus()
    bench.prices.table.setCurrentIndex(bench.prices.rows.index(2, 0))
    assert bench.prices.source.marked_row == 5
    clerk.press(Qt.Key.Key_Return)
    assert clerk.asked == "ingredient: Oddity"
    others = bench.prices.questions.others
    QTest.mouseClick(others.viewport(), Qt.MouseButton.LeftButton,
                     pos=others.visualRect(others.rows.index(0)).center())
    assert clerk.asked == "ingredient: Soya bean ml"


def test_a_file_that_is_gone_meanwhile_is_said_and_no_answer_is_lost(
    bench: Bench, clerk: Clerk, tmp_path: Path
) -> None:
    path = write(tmp_path / "list.xlsx", UNKNOWN_NAMES)
    read(bench, path)
    clerk.press(Qt.Key.Key_1)
    path.rename(tmp_path / "moved.xlsx")
    clerk.press(Qt.Key.Key_1)
    assert "list.xlsx" in bench.strip.words.text()
    assert bench.frame.middle.currentWidget() is bench.prices
    assert count(bench, Fate.ACCEPTED) == 2
    (tmp_path / "moved.xlsx").rename(path)
    clerk.press(Qt.Key.Key_F5)
    assert clerk.asked == "ingredient: Oddity"
    assert fates(bench) == ["ignored", "accepted", "accepted", "ignored", "question"]


def test_a_fault_of_the_reader_is_said_and_the_page_goes_on(
    bench: Bench, clerk: Clerk, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    def broken(*_arguments: object) -> None:
        raise KeyError("a fault")

    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    bench.prices.reader.read = broken  # type: ignore[assignment]
    clerk.press(Qt.Key.Key_1)
    assert "KeyError" in bench.strip.words.text()
    assert "a fault" in capsys.readouterr().err
    bench.prices.reader.read = read_list
    clerk.press(Qt.Key.Key_F5)
    assert clerk.asked == "ingredient: Chalk"


def test_the_next_question_does_not_wait_for_the_list_and_a_list_being_read_is_not_taken(
    bench: Bench, clerk: Clerk, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    go = threading.Event()

    def slow(*arguments):  # type: ignore[no-untyped-def]
        go.wait(20)
        return read_list(*arguments)

    bench.prices.reader.read = slow
    clerk.key(Qt.Key.Key_1)
    assert clerk.asked == "ingredient: Chalk"
    assert not bench.prices.take.isEnabled()
    clerk.key(Qt.Key.Key_1)
    assert clerk.asked == "ingredient: Oddity"
    clerk.key(Qt.Key.Key_Return, CTRL)
    assert bench.work.mill.undo_text is None
    go.set()
    wait(bench)
    assert clerk.asked == "ingredient: Oddity"
    assert count(bench, Fate.ACCEPTED) == 2
    assert [one.asked for one in bench.prices.replies.answers] == [Asked.INGREDIENT] * 2  # type: ignore[union-attr]
