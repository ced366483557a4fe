"""How lists come in: chosen, dropped, or the latest of their folder; a known list takes two actions a week."""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QEvent, QMimeData, QObject, QPointF, Qt, QUrl
from PySide6.QtGui import QDragEnterEvent, QDropEvent, QKeyEvent, QMouseEvent
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.domain.mills import ListAbout, PriceList
from blendapp.domain.records import added
from blendapp.services.arriving import likely_about
from blendapp.services.list_memory import forget, remembered
from tests.desk.arriving import UNKNOWN_NAMES, price, read, wait, write
from tests.desk.conftest import Hands

MODIFIERS = (Qt.Key.Key_Control, Qt.Key.Key_Shift, Qt.Key.Key_Alt)
CTRL = Qt.KeyboardModifier.ControlModifier


class Actions(QObject):
    """Counts what a hand does: keys pressed, buttons pressed, things dropped; modifiers alone are none."""

    def __init__(self) -> None:
        super().__init__()
        self.done: list[str] = []
        self._pressed: set[int] = set()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        kind = event.type()
        if kind == QEvent.Type.ShortcutOverride and isinstance(event, QKeyEvent):
            # Every key begins so, also one that is a shortcut and reaches nobody else; it goes on to parents.
            if watched is QApplication.focusWidget() and event.key() not in MODIFIERS:
                self.done.append("key")
        elif isinstance(event, QMouseEvent) and kind in (
            QEvent.Type.MouseButtonPress, QEvent.Type.MouseButtonDblClick
        ):
            if event.timestamp() not in self._pressed:
                self.done.append("press")
            self._pressed.add(event.timestamp())
        elif kind == QEvent.Type.Drop:
            self.done.append("drop")
        return False


@pytest.fixture
def actions() -> Iterator[Actions]:
    found = Actions()
    app = QApplication.instance()
    assert app is not None
    app.installEventFilter(found)
    yield found
    app.removeEventFilter(found)


def drop(bench: Bench, path: Path) -> None:
    """Drop a file on the window."""
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(path))])
    place, action = QPointF(300, 300), Qt.DropAction.CopyAction
    buttons, none = Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier
    over = QDragEnterEvent(place.toPoint(), action, data, buttons, none)
    QApplication.sendEvent(bench.frame, over)
    assert over.isAccepted()
    QApplication.sendEvent(bench.frame, QDropEvent(place, action, data, buttons, none))
    QApplication.processEvents()
    wait(bench)


def by_drop(bench: Bench, hands: Hands, path: Path) -> None:
    drop(bench, path)


def by_choosing(bench: Bench, hands: Hands, path: Path) -> None:
    # The panel in which the file is chosen is the system's own.
    bench.files.ask_open = lambda _title, _kinds: str(path)
    hands.key(Qt.Key.Key_I, CTRL)
    wait(bench)


def by_folder(bench: Bench, hands: Hands, path: Path) -> None:
    hands.key(Qt.Key.Key_J, CTRL)
    wait(bench)


def test_the_count_of_actions_counts_each_key_click_and_drop_once(
    bench: Bench, hands: Hands, tmp_path: Path, actions: Actions
) -> None:
    hands.key(Qt.Key.Key_Down)
    hands.key(Qt.Key.Key_K, CTRL)
    hands.write("ma")
    hands.key(Qt.Key.Key_Escape)
    hands.click(bench.frame.header.finder)
    hands.click(bench.have.filter)
    drop(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    assert actions.done == ["key"] * 5 + ["press"] * 2 + ["drop"]


@pytest.mark.parametrize("choose", [by_drop, by_choosing, by_folder])
def test_the_list_of_a_known_source_is_in_force_after_two_actions(
    bench: Bench, hands: Hands, tmp_path: Path, actions: Actions, choose: Callable[[Bench, Hands, Path], None]
) -> None:
    first = write(tmp_path / "bay grain week 48.xlsx", UNKNOWN_NAMES)
    os.utime(first, (1e9, 1e9))
    read(bench, first)
    for _question in range(3):
        hands.key(Qt.Key.Key_1)
        wait(bench)
    hands.key(Qt.Key.Key_Return, CTRL)
    bench.to_bench()
    rows = [[one, cost and cost + 7 if isinstance(cost, int) else cost] for one, cost in UNKNOWN_NAMES]
    second = write(tmp_path / "bay grain week 49.xlsx", rows)
    actions.done.clear()
    choose(bench, hands, second)
    hands.key(Qt.Key.Key_Return)
    assert len(actions.done) == 2, actions.done
    assert (price(bench, 1), price(bench, 2)) == (217, 437)
    assert bench.work.mill.undo_text == "Prices from bay grain week 49.xlsx"


def test_a_dropped_mill_file_is_opened(bench: Bench, tmp_path: Path) -> None:
    from blendapp.services.workbook import new_mill

    mill, _warnings = new_mill(tmp_path / "Other.mill")
    mill.close()
    drop(bench, tmp_path / "Other.mill")
    assert bench.work.mill.path.name == "Other.mill"


def test_a_folder_or_a_text_that_is_dropped_is_not_taken(bench: Bench, tmp_path: Path) -> None:
    data = QMimeData()
    data.setUrls([QUrl.fromLocalFile(str(tmp_path))])
    for one in (data, QMimeData()):
        over = QDragEnterEvent(
            QPointF(300, 300).toPoint(), Qt.DropAction.CopyAction, one, Qt.MouseButton.LeftButton,
            Qt.KeyboardModifier.NoModifier)
        over.ignore()
        QApplication.sendEvent(bench.frame, over)
        assert not over.isAccepted()


def test_lists_of_the_folder_can_be_found_by_name_the_latest_first(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    folder = tmp_path / "lists"
    folder.mkdir()
    for at, name in enumerate(("old.csv", "new.csv", "note.pdf")):
        (folder / name).write_text("Ingredient,USD/t\nMaize,211\n")
        os.utime(folder / name, (1e9 + at, 1e9 + at))
    assert [one for one in bench.things() if one.kind == "list that arrived"] == []
    read(bench, folder / "old.csv")
    bench.to_bench()
    assert [one.words for one in bench.things() if one.kind == "list that arrived"] == ["new.csv", "old.csv"]
    hands.key(Qt.Key.Key_K, CTRL)
    hands.write("new.csv")
    hands.key(Qt.Key.Key_Return)
    wait(bench)
    assert bench.prices.parts.title.text() == "new.csv"


def test_a_dropped_list_is_read_as_what_the_last_of_its_source_was(bench: Bench) -> None:
    import datetime

    library = bench.work.library
    assert likely_about(library, "Lab report 49.xlsx") is ListAbout.PRICES
    when = datetime.datetime(2026, 3, 2, tzinfo=datetime.UTC)
    kept = PriceList(1, "Lab report 48.xlsx", "", when, 1, 1, source="lab report", about=ListAbout.COMPOSITION)
    library.apply([added(kept)])
    assert likely_about(library, "Lab report 49.xlsx") is ListAbout.COMPOSITION


def test_what_is_remembered_is_a_press_away_and_forgetting_it_asks_again(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "bay grain 48.xlsx", UNKNOWN_NAMES))
    whose = bench.prices.parts.whose
    assert not whose.memory.isVisible()
    for _question in range(3):
        hands.key(Qt.Key.Key_1)
        wait(bench)
    hands.key(Qt.Key.Key_Return, CTRL)
    read(bench, write(tmp_path / "bay grain 49.xlsx", UNKNOWN_NAMES))
    assert whose.memory.text() == "3 answers remembered"
    hands.click(whose.memory)
    assert bench.frame.middle.currentWidget() is bench.memory
    bench.work.do(lambda mill: forget(mill, [one.id for one in remembered(mill, "bay grain")]))
    bench.memory.closed.emit()
    wait(bench)
    assert bench.frame.middle.currentWidget() is bench.prices
    assert bench.prices.questions.count.text() == "3 questions left"


def test_the_list_that_was_read_can_be_come_back_to(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    hands.key(Qt.Key.Key_1)
    wait(bench)
    bench.to_bench()
    next(one for one in bench.things() if one.words == "Back to the list that was read").run()
    assert bench.frame.middle.currentWidget() is bench.prices
    assert bench.prices.questions.count.text() == "2 questions left"
