"""The batch sheet: looked at as it will be printed, numbered when it is kept or printed, and copied as a copy."""

from __future__ import annotations

import threading
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QFont
from PySide6.QtWidgets import QApplication, QLabel
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.desk.sheet import asked
from blendapp.domain.batches import Batch
from blendapp.domain.results import Status
from blendapp.services.batch import make_batch
from tests.desk.conftest import Hands


@pytest.fixture
def sheet(bench: Bench, qtbot: QtBot) -> Bench:
    """The window with the sheet of the usual batch in view."""
    bench.sheet.view.turn("sheet")
    with qtbot.waitSignal(bench.sheet.view.pages.shown, timeout=20000):
        bench.show_sheet()
    return bench


def test_the_preview_shows_the_pages_of_the_usual_batch(sheet: Bench) -> None:
    assert sheet.sheet.form.order.text() == "1000"
    assert sheet.sheet.view.pages.pages
    assert sheet.sheet.view.pages.pages[0].startswith(b"\x89PNG")
    assert sheet.frame.footer.caution.isVisible()


def test_another_order_is_worked_out_as_it_is_typed(sheet: Bench, hands: Hands, qtbot: QtBot) -> None:
    with qtbot.waitSignal(sheet.sheet.view.pages.shown, timeout=20000):
        sheet.sheet.form.order.setFocus()
        sheet.sheet.form.order.selectAll()
        hands.write("500")
    assert sheet.sheet.batch is not None
    assert sheet.sheet.batch.order_kg == 500


@pytest.mark.parametrize("text", ["plenty", "0", ""])
def test_an_order_that_is_no_mass_says_so_and_pressing_print_leads_back_to_it(
    sheet: Bench, hands: Hands, qtbot: QtBot, text: str
) -> None:
    pane = sheet.sheet
    assert pane.batch is not None
    pane.form.order.setFocus()
    pane.form.order.selectAll()
    hands.key(Qt.Key.Key_Delete)
    hands.write(text)
    pane.make()
    assert text in pane.words.text()
    assert pane.words.font().weight() == QFont.Weight.DemiBold
    assert not pane.view.pages.pages
    assert not [page for page in pane.view.pages.inside.findChildren(QLabel) if page.isVisible()]
    asked: list[str] = []
    pane.printing.ask_save = lambda title, _name: asked.append(title) or ""  # type: ignore[func-returns-value]
    for button in (pane.view.print_button, pane.view.save_button):
        pane.view.table.setFocus()
        hands.click(button)
        assert pane.form.order.hasFocus()
        assert pane.form.order.selectedText() == text
    assert not asked
    assert not list(sheet.work.library.all("batch"))
    with qtbot.waitSignal(pane.view.pages.shown, timeout=20000):
        hands.write("500")
    assert pane.batch is not None
    assert pane.words.font().weight() == QFont.Weight.Normal


def test_what_is_said_takes_no_room_from_the_sheet_and_leaves_with_the_next_figure(
    sheet: Bench, hands: Hands
) -> None:
    page = sheet.frame.middle.geometry()
    sheet.strip.say("Batch sheet 1 is printed.")
    QApplication.processEvents()
    assert sheet.strip.isVisible()
    assert sheet.frame.middle.geometry() == page
    assert page.contains(sheet.strip.geometry())
    sheet.sheet.form.order.setFocus()
    hands.write("7")
    assert not sheet.strip.isVisible()
    sheet.strip.say("Again.")
    hands.key(Qt.Key.Key_Escape)
    assert not sheet.strip.isVisible()
    sheet.strip.say("On the bench it has its own row.")
    QApplication.processEvents()
    assert not sheet.frame.middle.geometry().intersects(sheet.strip.geometry())


def test_keeping_the_sheet_gives_it_a_number_and_a_copy_is_counted(
    sheet: Bench, hands: Hands, tmp_path: Path
) -> None:
    pane = sheet.sheet
    if pane.batch is not None and pane.batch.broken:
        pane.reason.setText("trial")
        pane.by.setText("Ann")
    pane.printing.ask_save = lambda _title, _name: str(tmp_path / "sheet")
    pane.to_file()
    (record,) = sheet.work.library.all("batch")
    assert record.number == 1
    assert (tmp_path / "sheet.pdf").read_bytes().startswith(b"%PDF")
    assert "1" in sheet.strip.words.text()
    pane.printing.ask_save = lambda _title, _name: str(tmp_path / "copy.pdf")
    hands.click(pane.printed)
    assert sheet.frame.middle.currentWidget() is sheet.printed
    hands.click(sheet.printed.save_button)
    (record,) = sheet.work.library.all("batch")
    assert record.copies == 1
    assert (tmp_path / "copy.pdf").is_file()


def test_a_formula_without_an_answer_has_no_sheet(bench: Bench, hands: Hands) -> None:
    for owner in (1, 2):
        hands.go(bench.have.table, owner, "price")
        hands.key(Qt.Key.Key_Delete)
    bench.show_sheet()
    assert bench.sheet.batch is None
    assert not bench.sheet.view.print_button.isEnabled()
    assert bench.sheet.words.text()


def line_kg(bench: Bench, name: str) -> float:
    assert bench.sheet.batch is not None
    return next(line.target_kg for line in bench.sheet.batch.lines if line.ingredient == name)


def test_a_line_fixed_by_hand_stays_and_the_others_make_up_the_batch(
    sheet: Bench, hands: Hands, qtbot: QtBot, monkeypatch: pytest.MonkeyPatch
) -> None:
    pane = sheet.sheet
    before = line_kg(sheet, "Maize")
    go_on = threading.Event()

    def held(*given: Any, **named: Any) -> Batch:
        assert go_on.wait(20)
        return make_batch(*given, **named)

    monkeypatch.setattr(asked, "make_batch", held)
    hands.go(pane.view.table, 1, "kg")
    hands.write(f"{before - 2:g}")
    with qtbot.waitSignal(pane.view.pages.shown, timeout=20000):
        hands.key(Qt.Key.Key_Return)
        assert pane.batch is None
        assert not pane.view.print_button.isEnabled()
        go_on.set()
    assert line_kg(sheet, "Maize") == before - 2
    assert pane.batch is not None
    assert pane.batch.total_kg == pytest.approx(1000)
    with qtbot.waitSignal(pane.view.pages.shown, timeout=20000):
        hands.go(pane.view.table, 1, "kg")
        hands.key(Qt.Key.Key_Delete)
    assert line_kg(sheet, "Maize") == before


def test_a_mass_that_cannot_be_is_refused_beside_its_line(sheet: Bench, hands: Hands, qtbot: QtBot) -> None:
    pane = sheet.sheet
    before = line_kg(sheet, "Maize")
    hands.go(pane.view.table, 1, "kg")
    hands.write("0.37")
    with qtbot.waitSignal(pane.view.pages.shown, timeout=20000):
        hands.key(Qt.Key.Key_Return)
    look = pane.lines.look(pane.lines.owners.index(1), pane.lines.column_of("kg") or 0)
    assert "0.37" in look.text
    assert look.fault
    assert line_kg(sheet, "Maize") == before


def test_an_old_page_is_greyed_and_not_printed_while_the_new_answer_is_worked_out(sheet: Bench) -> None:
    sheet.work.stale = True
    sheet.work.answered.emit()
    pane = sheet.sheet
    assert pane.batch is None
    assert pane.view.pages.pages
    assert "tale" in pane.words.text()
    assert not pane.view.print_button.isEnabled()
    assert not pane.view.save_button.isEnabled()


def test_a_stopped_answer_is_refused_in_a_sentence(sheet: Bench, qtbot: QtBot) -> None:
    work = sheet.work
    assert work.stored_result is not None
    stopped = replace(work.stored_result, status=Status.STOPPED, gap=0.01)
    work.stored_result = stopped
    sheet.sheet.make()
    assert sheet.sheet.batch is None
    assert not sheet.sheet.view.print_button.isEnabled()
    assert "not printed" in sheet.sheet.words.text()
    batch = make_batch(work.library, work.formula_id or 0, 1000.0, work.on, result=stopped)
    assert batch.cause is not None
    assert not batch.lines
