"""Enter alone never puts a doubtful price in force: a figure or an arrow comes first, and then a key that takes."""

from __future__ import annotations

import threading
from pathlib import Path

import pytest
from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.prices.asking import answer_words
from blendapp.desk.prices.reader import read_list
from blendapp.domain.list_rows import TAKE, Fate
from blendapp.domain.mills import Asked
from tests.desk.arriving import (
    DUPLICATES,
    FOREIGN,
    TWO_DECIMALS,
    UNITS_OPEN,
    UNKNOWN_NAMES,
    Rows,
    count,
    hide_and_strike,
    price,
    read,
    wait,
    write,
)
from tests.desk.conftest import Hands

CTRL = Qt.KeyboardModifier.ControlModifier
ENTER = Qt.Key.Key_Return
TEN_TIMES: Rows = [["Ingredient", "USD/t"], ["Maize", 2000], ["Soybean meal", 421]]
LIST_ENDED: Rows = [["Ingredient", "USD/t", "Valid to"], ["Maize", 201, "2001-01-31"], ["Limestone", 51, "2001-01-31"]]
ONE_ENDED: Rows = [["Ingredient", "USD/t", "Valid to"], ["Maize", 201, "2001-01-31"], ["Limestone", 51, "2999-01-31"]]
NEGATIVE: Rows = [["Ingredient", "USD/t"], ["Maize", -200], ["Limestone", 51]]
NO_SUM: Rows = [["Ingredient", "Ex works USD/t", "Freight USD/t", "Delivered USD/t"], ["Maize", 180, 20, 215]]
NO_PRICE: Rows = [["Ingredient", "USD/t"], ["Maize", "200-210"], ["Limestone", 51]]
NAMELESS: Rows = [["Ingredient", "USD/t"], ["Maize", 201], [None, 430], ["Limestone", 51]]
FREIGHT: Rows = [["Ingredient", "Price USD/t", "Freight USD/t"], ["Maize", 190, 12], ["Limestone", 51, 4]]
NO_DAY: Rows = [["Ingredient", "USD/t", "Valid from"], ["Maize", 201, "soon"], ["Limestone", 51, "2026-03-02"]]


def open_list(bench: Bench, path: Path, rows: Rows) -> None:
    read(bench, write(path, rows))
    assert bench.prices.questions.current is not None


@pytest.mark.parametrize(
    "rows", [TEN_TIMES, LIST_ENDED, ONE_ENDED, NEGATIVE, NO_SUM, NO_PRICE, NAMELESS, FREIGHT, NO_DAY, DUPLICATES,
             UNKNOWN_NAMES, UNITS_OPEN, TWO_DECIMALS, FOREIGN],
    ids=["ten times", "list ended", "one ended", "negative", "no sum", "no price", "nameless", "freight", "no day",
         "twin", "names", "unit", "decimal", "rate"])
def test_enter_alone_answers_no_question_and_takes_nothing(
    bench: Bench, hands: Hands, tmp_path: Path, rows: Rows
) -> None:
    open_list(bench, tmp_path / "list.xlsx", rows)
    panel = bench.prices.questions
    for _page in range(len(panel.open)):
        asked = panel.current
        assert panel.choices.marked is None
        for _again in range(3):
            hands.key(ENTER)
            wait(bench)
        assert panel.current == asked
        assert panel.fault.text()
        hands.key(Qt.Key.Key_PageDown)
    assert bench.prices.replies is not None
    assert bench.prices.replies.answers == []
    assert bench.work.mill.undo_text is None


def test_enter_alone_takes_no_hidden_or_struck_row(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    rows = [["Ingredient", "USD/t"], ["Maize", 210], ["Soybean meal", 430], ["Limestone", 51]]
    read(bench, hide_and_strike(write(tmp_path / "list.xlsx", rows), hidden=3, struck=4))
    for _again in range(4):
        hands.key(ENTER)
        wait(bench)
    assert bench.prices.questions.fault.text() == "Choose 1 or 2; Enter alone answers nothing."
    assert count(bench, Fate.QUESTION) == 2
    assert bench.work.mill.undo_text is None


def test_a_price_ten_times_too_high_is_not_in_force_after_the_keys_of_a_clean_week(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    path = write(tmp_path / "list.xlsx", TEN_TIMES)
    bench.files.ask_open = lambda _title, _kinds: str(path)
    hands.key(Qt.Key.Key_I, CTRL)
    wait(bench)
    for _again in range(5):
        hands.key(ENTER)
        wait(bench)
    assert price(bench, 1) == 200
    assert bench.work.mill.undo_text is None
    # A figure is deliberate; after it, Enter goes to the button first.
    hands.key(Qt.Key.Key_1)
    wait(bench)
    assert bench.work.mill.undo_text is None
    hands.key(ENTER)
    assert QApplication.focusWidget() is bench.prices.take
    assert price(bench, 1) == 200
    hands.key(ENTER)
    assert price(bench, 1) == 2000


def test_the_enter_that_answers_the_last_question_does_not_take_the_list(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    open_list(bench, tmp_path / "list.xlsx", TEN_TIMES)
    go = threading.Event()

    def slow(*arguments):  # type: ignore[no-untyped-def]
        go.wait(20)
        return read_list(*arguments)

    bench.prices.reader.read = slow
    hands.key(Qt.Key.Key_Down)
    assert bench.prices.questions.choices.marked is not None
    hands.key(ENTER)
    # Pressed again before the list is read with the answer.
    hands.key(ENTER)
    go.set()
    wait(bench)
    assert bench.prices.questions.current is None
    assert QApplication.focusWidget() is not bench.prices.take
    assert bench.work.mill.undo_text is None


@pytest.mark.parametrize("first", [Qt.Key.Key_Down, Qt.Key.Key_1])
def test_an_enter_that_is_held_down_answers_once_and_takes_nothing(
    bench: Bench, hands: Hands, tmp_path: Path, first: Qt.Key
) -> None:
    open_list(bench, tmp_path / "list.xlsx", TEN_TIMES)
    hands.key(first)
    hands.key(ENTER)
    wait(bench)
    for _repeat in range(6):
        target = QApplication.focusWidget()
        assert target is not None
        held = QKeyEvent(QEvent.Type.KeyPress, ENTER, Qt.KeyboardModifier.NoModifier, "\r", True)
        QApplication.sendEvent(target, held)
        wait(bench)
    assert bench.work.mill.undo_text is None


def test_a_list_that_needed_no_answer_is_taken_by_its_first_enter(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", [["Ingredient", "USD/t"], ["Maize", 201], ["Limestone", 51]]))
    assert QApplication.focusWidget() is bench.prices.take
    hands.key(ENTER)
    assert price(bench, 1) == 201


def test_a_currency_that_is_the_mills_own_is_said_with_an_arrow(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    rows = [["Ingredient", "Price", "Currency", "Unit"], ["Maize", 201, "Bucks", "t"]]
    open_list(bench, tmp_path / "list.xlsx", rows)
    panel = bench.prices.questions
    assert [one.words for one in panel.choices.rows.choices] == ["It is USD, the money of the mill"]
    hands.key(Qt.Key.Key_Down)
    hands.key(ENTER)
    wait(bench)
    assert count(bench, Fate.ACCEPTED) == 1


def test_every_answer_that_takes_says_what_it_takes() -> None:
    assert answer_words(Asked.EXPIRED_LIST, TAKE) == "They count: take them all the same"
    assert answer_words(Asked.DATES, TAKE) == "It counts as no day"


def test_what_was_said_of_a_list_that_has_expired_does_not_outlive_a_change_of_its_file(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    path = tmp_path / "list.xlsx"
    open_list(bench, path, LIST_ENDED)
    hands.key(Qt.Key.Key_1)
    wait(bench)
    assert count(bench, Fate.ACCEPTED) == 2
    write(path, [*LIST_ENDED, ["Soybean meal", 421, "2001-01-31"]])
    hands.key(Qt.Key.Key_F5)
    wait(bench)
    assert count(bench, Fate.ACCEPTED) == 0
    assert bench.prices.questions.current is not None


def test_a_price_that_is_typed_is_said_to_replace_the_freight_beside_it(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    rows = [["Ingredient", "Price USD/t", "Freight USD/t"], ["Maize", 190, 12], ["Limestone", "51-53", 4]]
    open_list(bench, tmp_path / "list.xlsx", rows)
    panel = bench.prices.questions
    panel.go_to(next(one for one in panel.open if one.question.asked is Asked.AMOUNT))
    assert panel.field.placeholderText() == "type the whole price, freight and all, or choose with the arrows"
    assert "a freight or other sum beside it is not added" in panel.kept.text()
    assert "Give the price per t with all that comes on top" in panel.kept.text()
