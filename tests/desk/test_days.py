"""A window that stays open over midnight works on the prices of the new day; what has expired says so."""

from __future__ import annotations

import datetime

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.services import edits, price_history
from blendapp.services.formulate import formulate
from tests.desk.conftest import Hands

DAY = datetime.timedelta(days=1)


class Calendar:
    """The day as the test says it."""

    def __init__(self, day: datetime.date) -> None:
        self.day = day

    def __call__(self) -> datetime.date:
        return self.day


@pytest.fixture
def calendar(bench: Bench) -> Calendar:
    """The window's day, from the test's hands: soybean meal is 500 from tomorrow, limestone ends today."""
    work = bench.work
    calendar = Calendar(work.on)
    work.day = calendar
    work.do(lambda mill: price_history.add_quote(mill, 2, 500.0, work.on, valid_from=work.on + DAY))
    work.do(lambda mill: price_history.end_quote(mill, 3, work.on, work.on))
    QApplication.processEvents()
    return calendar


def cell(bench: Bench, owner: int, key: str) -> str:
    return str(bench.have.model.cell(owner, key).data())


def test_over_midnight_the_answer_is_that_of_the_new_days_prices(bench: Bench, calendar: Calendar) -> None:
    work = bench.work
    before = work.result.cost if work.result is not None else None
    assert cell(bench, 2, "price") == "420.00"
    # Limestone has no price any more; with one, the answer is whole again.
    work.do(lambda mill: price_history.add_quote(mill, 3, 60.0, work.on, valid_from=work.on + DAY))
    calendar.day += DAY
    bench.day.look()
    assert work.on == calendar.day
    assert cell(bench, 2, "price") == "500.00"
    assert work.result is not None
    assert work.result.cost == pytest.approx(formulate(work.library, 1, calendar.day).cost)
    assert work.result.cost != pytest.approx(before)
    assert "2 prices are others than yesterday" in bench.strip.words.text()
    assert "Soybean meal: 420.00 to 500.00" in bench.strip.list.text()


def test_what_expired_over_night_is_said_in_its_cell_in_the_zone_and_on_the_strip(
    bench: Bench, calendar: Calendar, hands: Hands
) -> None:
    assert cell(bench, 3, "price") == "50.00"
    assert "expired" not in bench.have.zone.remark.whole
    calendar.day += DAY
    bench.day.look()
    assert cell(bench, 3, "price") == "expired"
    assert cell(bench, 3, "since") == "ended 1 d"
    look = bench.have.model.look(2, bench.have.model.column_of("price") or 0)
    assert "held until" in look.hint
    assert bench.have.zone.remark.whole.endswith("1 price expired")
    assert "Limestone: 50.00 has ended" in bench.strip.list.text()
    # One that never had a price is told apart.
    assert cell(bench, 4, "price") == "no price"
    hands.go(bench.have.table, 3, "price")
    hands.write("55")
    hands.key(Qt.Key.Key_Return)
    assert cell(bench, 3, "price") == "55.00"
    assert "expired" not in bench.have.zone.remark.whole


def test_what_is_to_come_stands_in_the_hint_of_the_price(bench: Bench, calendar: Calendar) -> None:
    column = bench.have.model.column_of("price") or 0
    assert f"From {calendar.day + DAY} it is 500.00" in bench.have.model.look(1, column).hint
    assert f"From {calendar.day + DAY} no price is known" in bench.have.model.look(2, column).hint
    assert "From" not in bench.have.model.look(0, column).hint


def test_the_same_day_changes_nothing_and_says_nothing(bench: Bench, calendar: Calendar) -> None:
    result = bench.work.result
    bench.day.look()
    assert bench.work.result is result
    assert not bench.strip.isVisible()


def test_a_day_waits_for_what_is_being_typed(bench: Bench, calendar: Calendar, hands: Hands) -> None:
    hands.go(bench.have.table, 1, "price")
    hands.write("21")
    calendar.day += DAY
    bench.day.look()
    assert bench.work.on == calendar.day - DAY
    hands.write("5")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.price_per_t(1, bench.work.on) == 215
    bench.day.look()
    assert bench.work.on == calendar.day
    assert cell(bench, 1, "price") == "215.00"


def test_a_mill_that_is_opened_on_another_day_is_worked_on_at_that_days_prices(
    bench: Bench, calendar: Calendar, tmp_path: object
) -> None:
    calendar.day += DAY
    path = bench.work.mill.path
    bench.work.open(None)
    bench.files.open_path(path)
    assert bench.work.on == calendar.day
    assert cell(bench, 2, "price") == "500.00"


def test_the_page_of_a_price_follows_the_day(bench: Bench, calendar: Calendar) -> None:
    bench.show_history(2)
    assert "In force is 420 per t" in bench.history.why.text()
    calendar.day += DAY
    bench.day.look()
    assert "In force is 500 per t" in bench.history.why.text()


def test_what_prices_did_says_of_which_day_it_is(bench: Bench, calendar: Calendar, qtbot: QtBot) -> None:
    before = bench.work.library.copy()
    bench.work.do(lambda mill: edits.set_price(mill, 1, 230.0, bench.work.on))
    bench.show_effect(before, bench.work.library.copy(), True)
    qtbot.waitUntil(lambda: not bench.effect.running, timeout=20000)
    calendar.day += DAY
    bench.day.look()
    assert bench.effect.remark.whole.endswith(f"; at the prices of {calendar.day - DAY}")


def test_an_edit_after_midnight_is_of_the_new_day(bench: Bench, calendar: Calendar) -> None:
    calendar.day += DAY
    bench.day.look()
    bench.work.do(lambda mill: edits.set_price(mill, 1, 222.0, bench.work.on))
    assert bench.work.library.quotes_of(1)[-1].valid_from == calendar.day
