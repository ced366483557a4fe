"""The versions of a formula: prepared, approved by another person, compared; and what no longer stands, on opening."""

from __future__ import annotations

import threading
import time
from pathlib import Path
from typing import Any

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QLineEdit, QPushButton
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.domain.mills import VersionState
from blendapp.domain.records import KINDS, added
from blendapp.domain.versions import acknowledgements_of, in_state
from blendapp.services import edits, versions
from blendapp.services.mill import open_mill
from blendapp.storage import create
from tests.desk.conftest import Hands
from tests.services.approving import ANN_WORD, BEN_WORD, LAMB, MASH, feed_library, staffed


@pytest.fixture(autouse=True)
def quick_hashing(monkeypatch: pytest.MonkeyPatch) -> None:
    """Passwords hashed as weakly as the library allows: these tests are about the window."""
    from argon2 import PasswordHasher

    from blendapp.services import people

    monkeypatch.setattr(people, "_hasher", PasswordHasher(time_cost=1, memory_cost=8, parallelism=1))


@pytest.fixture
def approved_mill(tmp_path: Path) -> Path:
    path = tmp_path / "Feed.mill"
    library = feed_library()
    create(path, [added(record) for kind in KINDS for record in library.all(kind)]).close()
    mill = open_mill(path)
    staffed(mill)
    mill.close()
    return path


@pytest.fixture
def page(empty_bench: Bench, approved_mill: Path, hands: Hands, qtbot: QtBot) -> Bench:
    """The page of the versions of Mash, opened by the standing in the header."""
    bench = empty_bench
    bench.start(str(approved_mill))
    qtbot.waitUntil(lambda: bench.frame.header.state.whole == "draft 1", timeout=5000)
    hands.click(bench.frame.header.state)
    assert bench.frame.middle.currentWidget() is bench.versions
    return bench


def type_into(hands: Hands, field: QLineEdit, text: str) -> None:
    field.setFocus()
    field.selectAll()
    hands.write(text)


def act(bench: Bench, hands: Hands, name: str, word: str) -> None:
    form = bench.versions.form
    form.person.setCurrentIndex(form.person.findText(name))
    type_into(hands, form.password, word)


def press(hands: Hands, button: QPushButton) -> None:
    """Press a button of the form, and wait until what it asked for is done or refused."""
    hands.click(button)
    end = time.monotonic() + 20
    while not button.isEnabled() and time.monotonic() < end:
        QTest.qWait(5)
    assert button.isEnabled()


def approve(bench: Bench, hands: Hands) -> None:
    act(bench, hands, "Ann", ANN_WORD)
    press(hands, bench.versions.form.prepare_button)
    assert not bench.versions.form.fault.isVisible(), bench.versions.form.fault.text()
    act(bench, hands, "Ben", BEN_WORD)
    for text, field in bench.versions.form.reasons.items():
        type_into(hands, field, f"seen: {text[:5]}")
    press(hands, bench.versions.form.approve_button)
    assert not bench.versions.form.fault.isVisible(), bench.versions.form.fault.text()


def test_a_draft_is_prepared_by_one_person_and_approved_by_another(page: Bench, hands: Hands, qtbot: QtBot) -> None:
    approve(page, hands)
    version = in_state(page.work.library, MASH, VersionState.APPROVED)
    assert version is not None
    assert (version.made_by, version.approved_by, version.capacity) == ("Ann", "Ben", "production manager")
    assert page.versions.form.password.text() == ""
    qtbot.waitUntil(lambda: page.frame.header.state.whole.startswith("version 1, Ben"), timeout=5000)
    assert page.versions.rows.owners == [version.id]
    assert "Nothing is different" in page.versions.heading.whole
    # The last that can be taken back is of before the approval.
    assert page.work.mill.undo_text == "Add Ben"


def test_the_wrong_password_or_the_same_person_is_refused_in_place(page: Bench, hands: Hands) -> None:
    form = page.versions.form
    act(page, hands, "Ann", "no such word")
    press(hands, form.prepare_button)
    assert "not the password of Ann" in form.fault.text()
    assert page.work.library.all("version") == []
    act(page, hands, "Ann", ANN_WORD)
    press(hands, form.prepare_button)
    act(page, hands, "Ann", ANN_WORD)
    press(hands, form.approve_button)
    assert "another person must approve" in form.fault.text()
    assert in_state(page.work.library, MASH, VersionState.APPROVED) is None


def test_every_caution_needs_its_own_reason(page: Bench, hands: Hands) -> None:
    page.work.choose(LAMB)
    form = page.versions.form
    act(page, hands, "Ann", ANN_WORD)
    press(hands, form.prepare_button)
    cautions = form.cautions
    assert cautions
    act(page, hands, "Ben", BEN_WORD)
    press(hands, form.approve_button)
    assert "needs a reason" in form.fault.text()
    for field in form.reasons.values():
        type_into(hands, field, "the shepherd knows")
    type_into(hands, form.capacity, "chief")
    type_into(hands, form.password, BEN_WORD)
    press(hands, form.approve_button)
    version = in_state(page.work.library, LAMB, VersionState.APPROVED)
    assert version is not None
    assert version.capacity == "chief"
    taken = acknowledgements_of(page.work.library, version.id)
    assert {one.caution: one.reason for one in taken} == dict.fromkeys(cautions, "the shepherd knows")


def test_what_differs_from_the_approved_version_stands_in_a_table(page: Bench, hands: Hands) -> None:
    approve(page, hands)
    page.work.do(lambda mill: edits.set_bound(mill, 1, "minimum", 18.5))
    found = page.versions.found
    row = next(at for at, one in enumerate(found.rows) if one.name == "Crude protein")
    texts = {key: str(found.cell(row, key).data()) for key in ("before", "after", "change")}
    assert texts == {"before": "18.0", "after": "18.5", "change": "+0.5"}
    assert "approved version 1" in page.versions.heading.whole
    approve(page, hands)
    page.versions.table.setFocus()
    hands.go(page.versions.table, page.versions.rows.owners[0], "number")
    assert page.versions.heading.whole == "What version 2 changed since version 1"
    hands.key(Qt.Key.Key_Escape)
    assert page.frame.middle.currentWidget() is page.frame.bench


def test_a_stale_answer_is_not_approved(page: Bench, hands: Hands) -> None:
    act(page, hands, "Ann", ANN_WORD)
    page.work.stale = True
    press(hands, page.versions.form.prepare_button)
    assert "stale" in page.versions.form.fault.text()
    assert page.work.library.all("version") == []


def test_an_approved_version_outside_its_limits_is_listed_on_opening(
    page: Bench, hands: Hands, approved_mill: Path, qtbot: QtBot
) -> None:
    approve(page, hands)
    page.work.do(lambda mill: edits.set_value(mill, 2, 1, 40.0))
    page.work.close()
    page.work.open(None)
    page.strip.clear()
    page.files.open_path(approved_mill)
    qtbot.waitUntil(page.strip.isVisible, timeout=5000)
    assert "Mash, version 1: Crude protein comes to" in page.strip.list.text()


def test_a_person_is_added_on_the_mill_page_and_given_a_password(bench: Bench, hands: Hands) -> None:
    bench.show_mill()
    bench.mill.add("person")
    hands.write("Cara")
    hands.key(Qt.Key.Key_Return)
    person = bench.work.library.named("person", "Cara")
    assert person is not None
    form = bench.mill.passwords
    assert form.isVisible()
    type_into(hands, form.new, "long enough word")
    type_into(hands, form.again, "long enough wort")
    hands.click(form.set_button)
    assert "not the same" in form.said.text()
    type_into(hands, form.again, "long enough word")
    hands.click(form.set_button)
    table = bench.mill.tables["person"]
    assert str(table.grid.cell(person.id, "password").data()) == "set"
    assert form.new.text() == ""
    type_into(hands, form.current, "some other word")
    type_into(hands, form.new, "a second long word")
    type_into(hands, form.again, "a second long word")
    hands.click(form.set_button)
    assert "another one" in form.said.text()
    hands.go(table, person.id, "name")
    hands.key(Qt.Key.Key_Delete)
    assert bench.work.library.named("person", "Cara") is not None
    assert QApplication.activeModalWidget() is None


@pytest.fixture
def held(monkeypatch: pytest.MonkeyPatch) -> threading.Event:
    """Working out a draft waits until this is set."""
    go_on = threading.Event()
    real = versions.work_out_draft

    def waiting(*given: Any, **named: Any) -> versions.WorkedDraft:
        assert go_on.wait(20)
        return real(*given, **named)

    monkeypatch.setattr(versions, "work_out_draft", waiting)
    return go_on


def test_the_window_lives_while_a_draft_is_worked_out_and_a_second_press_does_nothing(
    page: Bench, hands: Hands, qtbot: QtBot, held: threading.Event
) -> None:
    form = page.versions.form
    act(page, hands, "Ann", ANN_WORD)
    form.prepare_button.setFocus()
    hands.key(Qt.Key.Key_Space)
    assert not form.prepare_button.isEnabled()
    assert "once more" in form.fault.text()
    hands.click(form.prepare_button)
    form.prepare.emit()
    # The window goes on: another page, typing, and back.
    hands.key(Qt.Key.Key_Escape)
    assert page.frame.middle.currentWidget() is page.frame.bench
    assert page.work.library.all("version") == []
    held.set()
    qtbot.waitUntil(lambda: bool(page.work.library.all("version")), timeout=20000)
    (draft,) = page.work.library.all("version")
    assert draft.state is VersionState.DRAFT
    assert "Draft 1 of Mash is prepared" in page.strip.words.text()
    QTest.qWait(50)
    assert len([one for one in page.work.mill.store.entries() if "Prepare" in one.what]) == 1


def test_an_edit_while_a_draft_is_worked_out_refuses_it_and_loses_nothing(
    page: Bench, hands: Hands, qtbot: QtBot, held: threading.Event
) -> None:
    form = page.versions.form
    act(page, hands, "Ann", ANN_WORD)
    hands.click(form.prepare_button)
    page.work.do(lambda mill: edits.set_bound(mill, 1, "minimum", 18.5))
    held.set()
    qtbot.waitUntil(form.prepare_button.isEnabled, timeout=20000)
    assert page.work.library.all("version") == []
    assert "changed while it was worked out" in form.fault.text()
    assert page.work.library.limit(1).minimum == 18.5
    press(hands, form.prepare_button)
    assert len(page.work.library.all("version")) == 1


def test_closing_the_window_meanwhile_finishes_what_was_pressed(
    page: Bench, hands: Hands, approved_mill: Path, held: threading.Event
) -> None:
    act(page, hands, "Ann", ANN_WORD)
    hands.click(page.versions.form.prepare_button)
    threading.Timer(0.2, held.set).start()
    page.close()
    mill = open_mill(approved_mill)
    (draft,) = mill.library.all("version")
    mill.close()
    assert (draft.made_by, draft.state) == ("Ann", VersionState.DRAFT)
