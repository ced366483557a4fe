"""A batch as it was approved, or as the formula stands now: the choice, and what each gives."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.domain.records import KINDS, added
from blendapp.services import edits, people
from blendapp.services.mill import open_mill
from blendapp.storage import create
from tests.desk.conftest import Hands
from tests.services.approving import MASH, MEAL, approve, feed_library, staffed


@pytest.fixture
def approved(
    empty_bench: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, qtbot: QtBot
) -> Bench:
    """The window on a mill whose Mash is approved and has changed since."""
    from argon2 import PasswordHasher

    monkeypatch.setattr(people, "_hasher", PasswordHasher(time_cost=1, memory_cost=8, parallelism=1))
    path = tmp_path / "Feed.mill"
    library = feed_library()
    create(path, [added(record) for kind in KINDS for record in library.all(kind)]).close()
    mill = open_mill(path)
    staffed(mill)
    approve(mill)
    edits.set_bound(mill, 1, "minimum", 20.0)
    mill.close()
    empty_bench.start(str(path))
    return empty_bench


def settled(bench: Bench, qtbot: QtBot) -> None:
    qtbot.waitUntil(lambda: bench.sheet.batch is not None, timeout=20000)


def meal_kg(bench: Bench) -> float:
    assert bench.sheet.batch is not None
    return next(line.target_kg for line in bench.sheet.batch.lines if line.ingredient_id == MEAL)


def test_the_approved_proportions_are_made_unless_the_draft_is_asked_for(
    approved: Bench, hands: Hands, qtbot: QtBot
) -> None:
    approved.show_sheet()
    settled(approved, qtbot)
    form = approved.sheet.form
    assert form.made.isVisible()
    assert form.made.currentText() == "as approved (version 1)"
    batch = approved.sheet.batch
    assert batch is not None
    assert (batch.version, batch.draft) == ("version 1", False)
    was = meal_kg(approved)
    form.made.setFocus()
    hands.key(Qt.Key.Key_Up)
    form.made.activated.emit(form.made.currentIndex())
    assert approved.sheet.batch is None
    settled(approved, qtbot)
    batch = approved.sheet.batch
    assert batch is not None
    assert batch.draft
    assert batch.version == "draft 2"
    # More protein is asked for now than was approved.
    assert meal_kg(approved) > was + 10


def test_what_was_approved_is_made_though_the_formula_has_no_answer_today(
    approved: Bench, qtbot: QtBot
) -> None:
    approved.work.do(lambda mill: edits.set_bound(mill, 1, "minimum", 90.0))
    assert approved.work.result is not None
    assert not approved.work.result.has_answer
    approved.show_sheet()
    settled(approved, qtbot)
    assert approved.sheet.view.print_button.isEnabled()
    form = approved.sheet.form
    form.made.setCurrentIndex(0)
    form.made.activated.emit(0)
    qtbot.waitUntil(lambda: "no answer" in approved.sheet.words.text(), timeout=20000)
    assert not approved.sheet.view.print_button.isEnabled()


def test_a_formula_without_an_approved_version_offers_no_choice(approved: Bench, qtbot: QtBot) -> None:
    approved.work.choose(2)
    approved.show_sheet()
    settled(approved, qtbot)
    assert not approved.sheet.form.made.isVisible()
    approved.work.choose(MASH)
    settled(approved, qtbot)
    assert approved.sheet.form.made.isVisible()
