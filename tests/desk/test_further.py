"""What follows an answer: near-optimal ranges under the bars, or why there is none and what would mend it."""

from __future__ import annotations

import threading

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from blendapp.desk import work as works
from blendapp.desk.bench import Bench
from blendapp.desk.mix.lines import Part
from blendapp.desk.rail.geometry import End
from blendapp.domain.results import Repair, Side, Status
from blendapp.services import edits
from tests.desk.conftest import Hands

PROTEIN, CALCIUM, MAIZE_LIMIT = 1, 2, 3


def learned(bench: Bench, qtbot: QtBot) -> None:
    if not bench.work.has_further:
        with qtbot.waitSignal(bench.work.learned, timeout=20000):
            pass


def make_conflict(bench: Bench, qtbot: QtBot) -> None:
    """Protein can reach about 46 % at most; 30 and a little calcium hold, 60 does not."""
    with qtbot.waitSignal(bench.work.learned, timeout=20000):
        bench.work.do(lambda mill: edits.change(mill, mill.library.limit(PROTEIN), minimum=60.0, maximum=None))


def test_near_optimal_ranges_fill_in_under_the_bars_after_the_answer(bench: Bench, qtbot: QtBot) -> None:
    bars = [line for line in bench.mix.model.lines if line.part is Part.INGREDIENT]
    assert bars
    learned(bench, qtbot)
    bars = [line for line in bench.mix.model.lines if line.part is Part.INGREDIENT]
    for line in bars:
        assert line.bar is not None
        assert line.bar_range is not None
        assert line.bar_range[0] <= line.bar + 1e-9
        assert line.bar_range[1] >= line.bar - 1e-9
        assert "dearer" in line.hint
    assert any(line.bar_range[1] > line.bar_range[0] for line in bars if line.bar_range is not None)


def test_an_edit_stops_what_is_being_worked_out_of_the_answer_before(
    bench: Bench, qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    learned(bench, qtbot)
    begun, stopped = threading.Event(), threading.Event()

    def endless(answer, go_on):
        begun.set()
        while go_on():
            threading.Event().wait(0.005)
        stopped.set()
        return answer.result

    monkeypatch.setattr(works, "ask_all", endless)
    bench.work.do(lambda mill: edits.set_bound(mill, PROTEIN, "minimum", 19.5))
    qtbot.waitUntil(begun.is_set, timeout=20000)
    monkeypatch.undo()
    bench.work.do(lambda mill: edits.set_bound(mill, PROTEIN, "minimum", 20.0))
    assert stopped.wait(20)
    learned(bench, qtbot)
    assert bench.work.result is not None
    assert bench.work.result.limits[0].minimum == 20
    assert all(one.near_optimal is not None for one in bench.work.result.ingredients)


def test_a_conflict_says_what_can_be_reached_and_hatches_the_walls(bench: Bench, qtbot: QtBot) -> None:
    make_conflict(bench, qtbot)
    result = bench.work.result
    assert result is not None
    assert result.status is Status.CONFLICT
    assert result.conflict is not None
    texts = [line.text for line in bench.mix.model.lines]
    assert any("can reach" in text and "asked 60" in text for text in texts)
    rail = bench.meet.model.rail(PROTEIN)
    assert rail is not None
    assert End.MINIMUM in rail.conflict
    assert not any(line.cost or line.amount for line in bench.mix.model.lines)


def test_a_repair_by_the_keyboard_is_one_undo_and_brings_an_answer(bench: Bench, hands: Hands, qtbot: QtBot) -> None:
    make_conflict(bench, qtbot)
    entries = len(bench.work.mill.store.entries())
    row = next(at for at, line in enumerate(bench.mix.model.lines) if line.part is Part.ACTION)
    bench.mix.table.setFocus()
    bench.mix.table.setCurrentIndex(bench.mix.model.index(row, 0))
    hands.key(Qt.Key.Key_Return)
    assert bench.work.result is not None
    assert bench.work.result.status is Status.OPTIMAL
    assert len(bench.work.mill.store.entries()) == entries + 1
    hands.key(Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert bench.work.library.limit(PROTEIN).minimum == 60


def test_what_needs_several_changes_is_one_button_and_one_undo(bench: Bench, hands: Hands, qtbot: QtBot) -> None:
    def both(mill):
        return edits.set_bounds(mill, "Ask too much", [
            (PROTEIN, "minimum", 60.0), (PROTEIN, "maximum", None), (CALCIUM, "minimum", 39.0),
            (CALCIUM, "maximum", None),
        ])

    with qtbot.waitSignal(bench.work.learned, timeout=20000):
        bench.work.do(both)
    line = next(one for one in bench.mix.model.lines if len(one.repairs) > 1)
    assert line.text.count("\n") == len(line.repairs) - 1
    entries = len(bench.work.mill.store.entries())
    row = bench.mix.model.lines.index(line)
    table = bench.mix.table
    table.scrollTo(bench.mix.model.index(row, 0))
    QTest.mouseClick(table.viewport(), Qt.MouseButton.LeftButton,
                     pos=table.visualRect(bench.mix.model.index(row, 0)).center())
    assert bench.work.result is not None
    assert bench.work.result.status is Status.OPTIMAL
    assert len(bench.work.mill.store.entries()) == entries + 1
    bench.work.undo()
    assert bench.work.library.limit(PROTEIN).minimum == 60
    assert bench.work.library.limit(CALCIUM).minimum == 39


def test_a_repair_is_rounded_to_the_side_that_still_helps() -> None:
    from blendapp.desk.mix.why import repaired

    assert repaired(Repair(0, Side.MINIMUM, 1.1, 0.913456789))[0] == pytest.approx(0.9134, abs=1e-9)
    assert repaired(Repair(0, Side.MAXIMUM, 1.1, 1.913456789))[0] == pytest.approx(1.914, abs=1e-9)
    assert repaired(Repair(0, Side.MAXIMUM, 18.0, 18.4))[0] == 18.4


def test_limits_that_clash_stand_first_when_the_list_is_sorted(bench: Bench, qtbot: QtBot) -> None:
    meet = bench.meet
    with qtbot.waitSignal(bench.work.learned, timeout=20000):
        bench.work.do(lambda mill: edits.change(mill, mill.library.limit(CALCIUM), minimum=39.0, maximum=None))
    assert meet.model.owners[0] == PROTEIN
    assert "sort again" in meet.order.text()
    meet.order.click()
    assert meet.model.owners[0] == CALCIUM
    assert meet.order.text() == "by what each costs"
    bench.work.undo()
    meet.order.click()
    assert meet.model.owners[0] == PROTEIN


def test_limits_that_clash_stand_first_when_a_formula_is_chosen(bench: Bench, qtbot: QtBot) -> None:
    bench.work.do(lambda mill: edits.change(mill, mill.library.limit(CALCIUM), minimum=39.0, maximum=None))
    bench.work.choose(2)
    with qtbot.waitSignal(bench.work.learned, timeout=20000):
        bench.work.choose(1)
    assert bench.meet.model.owners[0] == CALCIUM
