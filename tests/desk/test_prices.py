"""A price list is looked at row by row before it is taken, and taken as one undo."""

from __future__ import annotations

import datetime
import threading
from dataclasses import replace
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QFontMetrics
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.desk.prices import effect
from blendapp.desk.table.cell import PAD_PX
from blendapp.desk.theme import text_font
from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import Asked, ListAbout
from blendapp.domain.plant import Site
from blendapp.domain.records import Change, added
from blendapp.services import price_history
from blendapp.services.formulate import formulate
from blendapp.services.lists import roll_back
from blendapp.services.movers import movers
from tests.desk.arriving import DUPLICATES, count, price, read, wait, watch, write
from tests.desk.conftest import Hands


@pytest.fixture
def price_list(tmp_path: Path) -> Path:
    path = tmp_path / "list.csv"
    path.write_text("Ingredient,Price,Unit\nMaize,210,t\nLimestone,n/q,t\nUnobtainium,5,t\nSoybean meal,0.44,kg\n")
    return path


def shown(bench: Bench, key: str) -> list[str]:
    rows = bench.prices.rows
    return [str(rows.cell(owner, key).data()) for owner in rows.owners]


def test_every_row_shows_its_fate_and_nothing_is_stored_before_it_is_taken(
    bench: Bench, hands: Hands, price_list: Path
) -> None:
    testers = watch(bench)
    read(bench, price_list)
    assert bench.frame.middle.currentWidget() is bench.prices
    assert shown(bench, "fate") == ["question", "accepted", "accepted"]
    assert shown(bench, "ingredient") == ["Unobtainium", "Maize", "Soybean meal"]
    assert shown(bench, "price") == ["5.00", "210.00", "440.00"]
    assert shown(bench, "old") == ["", "200.00", "420.00"]
    assert shown(bench, "change") == ["", "+10.00", "+20.00"]
    assert price(bench, 1) == 200
    assert testers


def test_the_counts_add_up_to_the_rows_read_and_each_shows_its_own(
    bench: Bench, hands: Hands, price_list: Path
) -> None:
    read(bench, price_list)
    counts = bench.prices.parts.counts
    assert counts.read.text() == "5 rows read:"
    figures = [counts.buttons[fate].text() for fate in (Fate.ACCEPTED, Fate.QUESTION, Fate.REFUSED, Fate.IGNORED)]
    assert figures == ["2 accepted", "1 in question", "0 refused", "2 left alone"]
    hands.click(counts.buttons[Fate.IGNORED])
    # The heading row is left alone, and so is the row whose price is “n/q”.
    assert shown(bench, "place") == ["1", "3"]
    hands.click(counts.buttons[None])
    assert len(bench.prices.rows.owners) == 3


def test_taking_the_list_records_every_accepted_price_as_one_undo(bench: Bench, hands: Hands, price_list: Path) -> None:
    read(bench, price_list)
    hands.click(bench.prices.take)
    assert price(bench, 1) == 210
    assert price(bench, 2) == pytest.approx(440)
    assert bench.frame.middle.currentWidget() is bench.effect
    assert "Unobtainium" in bench.strip.list.text()
    bench.work.undo()
    assert price(bench, 1) == 200
    assert price(bench, 2) == 420


def test_leaving_the_list_changes_nothing(bench: Bench, hands: Hands, price_list: Path) -> None:
    read(bench, price_list)
    hands.click(bench.prices.leave)
    assert bench.frame.middle.currentWidget() is bench.frame.bench
    assert bench.work.mill.undo_text is None


def test_a_file_that_cannot_be_read_is_named_in_a_sentence(bench: Bench, tmp_path: Path) -> None:
    path = tmp_path / "photo.xlsx"
    path.write_bytes(b"PK\x03\x04 half a workbook")
    read(bench, path)
    assert bench.frame.middle.currentWidget() is bench.frame.bench
    assert "photo.xlsx" in bench.strip.words.text()


def test_a_refused_file_takes_the_place_of_the_list_that_was_in_view_and_offers_nothing_to_take(
    bench: Bench, hands: Hands, price_list: Path, tmp_path: Path
) -> None:
    testers = watch(bench)
    read(bench, price_list)
    assert bench.prices.take.isEnabled()
    path = tmp_path / "photo.xlsx"
    path.write_bytes(b"PK\x03\x04 half a workbook")
    read(bench, path)
    parts = bench.prices.parts
    assert bench.frame.middle.currentWidget() is bench.prices
    assert parts.title.text() == "photo.xlsx"
    assert parts.notes.text().startswith("photo.xlsx: ")
    assert parts.counts.read.text() == "0 rows read:"
    assert (bench.prices.take.text(), bench.prices.take.isEnabled()) == ("Nothing to take", False)
    assert not bench.prices.look.isEnabled()
    assert not bench.prices.rows.owners
    assert not parts.whose.isVisible()
    for keys in (Qt.KeyboardModifier.NoModifier, Qt.KeyboardModifier.ControlModifier):
        hands.key(Qt.Key.Key_Return, keys)
    assert bench.work.mill.undo_text is None
    # The list that was in view is read again like any other.
    read(bench, price_list)
    assert bench.prices.take.isEnabled()
    assert parts.whose.isVisible()
    assert testers


def test_while_another_file_is_read_the_list_in_view_is_not_taken_in_its_place(
    bench: Bench, hands: Hands, price_list: Path, tmp_path: Path
) -> None:
    read(bench, price_list)
    bench.arrivals.choose(ListAbout.PRICES, write(tmp_path / "other.xlsx", DUPLICATES))
    hands.key(Qt.Key.Key_Return, Qt.KeyboardModifier.ControlModifier)
    assert bench.work.mill.undo_text is None
    wait(bench)
    assert bench.prices.parts.title.text() == "other.xlsx"


def test_a_refused_file_that_was_mended_is_read_by_the_same_key(
    bench: Bench, hands: Hands, price_list: Path, tmp_path: Path
) -> None:
    read(bench, price_list)
    path = tmp_path / "list.xlsx"
    path.write_bytes(b"PK\x03\x04 half a workbook")
    read(bench, path)
    write(path, DUPLICATES)
    hands.key(Qt.Key.Key_F5)
    wait(bench)
    assert bench.prices.questions.count.text() == "2 questions left"


def test_a_list_that_stays_open_over_midnight_is_read_for_the_new_day(bench: Bench, tmp_path: Path) -> None:
    work = bench.work
    today = work.on
    work.day = lambda: today
    last = today.isoformat()
    read(bench, write(tmp_path / "list.xlsx", [
        ["Ingredient", "USD/t", "Valid to"], ["Maize", 201, last], ["Limestone", 51, "2999-01-31"]]))
    assert count(bench, Fate.ACCEPTED) == 2
    work.day = lambda: today + datetime.timedelta(days=1)
    bench.day.look()
    wait(bench)
    assert count(bench, Fate.ACCEPTED) == 1
    assert bench.prices.questions.current is not None
    assert bench.prices.questions.current.question.asked is Asked.EXPIRED


def test_a_price_ten_times_too_high_has_room_for_its_change(bench: Bench, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", [["Ingredient", "USD/t"], ["Maize", 2000]]))
    cell = bench.prices.rows.cell(0, "change")
    assert cell.data() == "+1800.00"
    room = bench.prices.table.columnWidth(cell.column()) - 2 * PAD_PX
    assert QFontMetrics(text_font()).horizontalAdvance("+18000.00") <= room


def test_days_terms_and_a_price_for_dry_matter_stand_below_the_row(bench: Bench, tmp_path: Path) -> None:
    from blendapp.services import edits

    limestone = bench.work.library.ingredient(3)
    bench.work.do(lambda mill: edits.change(mill, limestone, dry_matter_percent=90.0))
    path = tmp_path / "list.csv"
    first, last = (bench.work.on + datetime.timedelta(days=days) for days in (7, 31))
    path.write_text(f"Ingredient,USD/t DM,Terms,Valid from,Valid to\nLimestone,60,delivered,{first},{last}\n")
    read(bench, path)
    assert shown(bench, "price") == ["54.00"]
    detail = bench.prices.rows.detail_of(0)
    assert detail.startswith(f"from {first}, to {last}, delivered, 60.00 per t of dry matter.")
    assert "54.00 per t as fed at 90 % of dry matter" in detail


def test_a_list_that_was_taken_says_so_and_is_not_taken_twice_by_a_second_key(
    bench: Bench, hands: Hands, price_list: Path
) -> None:
    read(bench, price_list)
    hands.click(bench.prices.take)
    bench.arrivals.back()
    assert not bench.prices.take.isEnabled()
    assert bench.prices.take.text() == "Taken"
    bench.undo()
    wait(bench)
    assert bench.prices.take.isEnabled()
    hands.click(bench.prices.take)
    assert price(bench, 1) == 210
    read(bench, price_list)
    assert "taken before" in bench.prices.parts.remark.whole


def test_an_edit_of_the_mill_is_followed_by_the_list_in_view(bench: Bench, hands: Hands, price_list: Path) -> None:
    from blendapp.services import edits

    read(bench, price_list)
    bench.work.do(lambda mill: edits.add_ingredient(mill, "Unobtainium"))
    wait(bench)
    assert shown(bench, "fate") == ["accepted"] * 3
    bench.work.undo()
    wait(bench)
    assert shown(bench, "fate").count("question") == 1


def worked_out(bench: Bench, qtbot: QtBot) -> None:
    qtbot.waitUntil(lambda: not bench.effect.running, timeout=20000)


def text(bench: Bench, formula_id: int, key: str) -> str:
    return str(bench.effect.rows.cell(formula_id, key).data())


def test_what_the_new_prices_do_stands_in_a_table_after_they_are_taken(
    bench: Bench, hands: Hands, price_list: Path, qtbot: QtBot
) -> None:
    cost = {one.id: formulate(bench.work.library, one.id, bench.work.on).cost for one in bench.work.library.formulas}
    read(bench, price_list)
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
    read(bench, price_list)
    hands.click(bench.prices.look)
    worked_out(bench, qtbot)
    before = {key: text(bench, key, "after") for key in (1, 2)}
    assert bench.work.mill.undo_text is None
    assert bench.work.library.price_per_t(1, bench.work.on) == 200
    hands.key(Qt.Key.Key_Escape)
    assert bench.frame.middle.currentWidget() is bench.prices
    assert bench.prices.questions.has_keyboard()
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
    read(bench, price_list)
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
    read(bench, price_list)
    hands.click(bench.prices.take)
    worked_out(bench, qtbot)
    assert bench.effect.remark.whole == "2 mixes kept, 0 changed"
    hands.key(Qt.Key.Key_Escape)
    bench.work.do(lambda mill: price_history.add_quote(mill, 1, 205.0, bench.work.on))
    command = next(one for one in bench.things() if one.words == "What the last prices did")
    command.run()
    assert bench.frame.middle.currentWidget() is bench.effect
    assert bench.effect.remark.whole == "2 mixes kept, 0 changed; edited since"
    assert text(bench, 1, "most")


def test_what_prices_did_says_so_once_they_are_taken_back_and_no_longer_when_they_count_again(
    bench: Bench, hands: Hands, price_list: Path, qtbot: QtBot
) -> None:
    read(bench, price_list)
    hands.click(bench.prices.take)
    worked_out(bench, qtbot)
    assert bench.effect.title.text() == "What the new prices do"
    hands.key(Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert bench.frame.middle.currentWidget() is bench.effect
    assert price(bench, 1) == 200
    assert bench.effect.title.text() == "Taken back: what the new prices did"
    assert bench.effect.remark.whole == "the prices before them count again; they had: 2 mixes kept, 0 changed"
    hands.key(Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.ShiftModifier)
    assert price(bench, 1) == 210
    assert bench.effect.title.text() == "What the new prices do"
    assert bench.effect.remark.whole == "2 mixes kept, 0 changed"
    bench.work.do(lambda mill: roll_back(mill, max(mill.library.records["price_list"])))
    assert bench.effect.title.text() == "Taken back: what the new prices did"


def test_prices_that_are_taken_back_while_they_are_worked_out_are_said_to_be(
    bench: Bench, hands: Hands, price_list: Path, qtbot: QtBot
) -> None:
    read(bench, price_list)
    hands.click(bench.prices.take)
    bench.work.undo()
    worked_out(bench, qtbot)
    assert bench.effect.title.text() == "Taken back: what the new prices did"


def test_what_prices_did_is_of_the_site_that_the_mill_had(
    bench: Bench, hands: Hands, price_list: Path, qtbot: QtBot
) -> None:
    read(bench, price_list)
    hands.click(bench.prices.take)
    worked_out(bench, qtbot)
    place = bench.work.do(lambda mill: mill.apply("Add a site", [added(Site(1, "Larkwater"))]))
    assert place.changes
    assert bench.effect.remark.whole == "2 mixes kept, 0 changed"
    info = bench.work.library.mill
    bench.work.do(lambda mill: mill.apply("The site", [Change(info, replace(info, site_id=1))]))
    assert bench.effect.remark.whole == "2 mixes kept, 0 changed; edited since"
