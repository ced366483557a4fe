"""A window on a small mill, driven as a person drives it; nothing may be left behind after it closes."""

from __future__ import annotations

import gc
from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QSettings, Qt
from PySide6.QtTest import QAbstractItemModelTester, QTest
from PySide6.QtWidgets import QApplication, QWidget

from blendapp.desk.bench import Bench
from blendapp.desk.shell.frame import Frame
from blendapp.desk.start import make_app
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import dress
from blendapp.domain.formulas import Admits
from blendapp.domain.library import Library
from blendapp.domain.notation import PLAIN, use_notation
from blendapp.domain.plant import Scale
from blendapp.domain.records import KINDS, added
from tests.mills import Maker


def small_mill() -> Library:
    """Four ingredients, one without a price, and two formulas; "Grower" is chosen first."""
    make = Maker()
    make.put(Scale(1, "Big scale", 1.0))
    make.nutrient("Crude protein")
    make.nutrient("Lysine")
    make.nutrient("Calcium")
    for name, price, protein, lysine, calcium in (
        ("Maize", 200.0, 10.0, 0.30, 0.02), ("Soybean meal", 420.0, 46.0, 2.90, 0.30),
        ("Limestone", 50.0, 0.0, 0.0, 38.0),
    ):
        values = {"Crude protein": protein, "Lysine": lysine, "Calcium": calcium}
        make.ingredient(name, price, values, scale_id=1)
    make.ingredient("Peas", None, {"Crude protein": 22.0, "Calcium": 0.1})
    grower = make.formula("Grower", admits=Admits.ALL, batch_kg=1000.0)
    make.limit(grower, "nutrient", "Crude protein", 19.0, 24.0)
    make.limit(grower, "nutrient", "Calcium", 0.8, 1.2)
    make.limit(grower, "ingredient", "Maize", None, 90.0)
    finisher = make.formula("Finisher", admits=Admits.ALL)
    make.limit(finisher, "nutrient", "Crude protein", 15.0)
    return make.library


@pytest.fixture
def mill_file(tmp_path: Path) -> Path:
    """The small mill as a file, closed."""
    from blendapp.storage import create

    library = small_mill()
    path = tmp_path / "Test mill.mill"
    create(path, [added(record) for kind in KINDS for record in library.all(kind)]).close()
    return path


@pytest.fixture
def empty_bench(qapp: QApplication, tmp_path: Path) -> Iterator[Bench]:
    """A shown window without a mill. Fails where a widget is left over when it is closed."""
    use_notation(PLAIN)
    make_app([])
    dress(qapp, dark=False)
    before = set(QApplication.topLevelWidgets())
    frame = Frame()
    bench = Bench(frame, QSettings(str(tmp_path / "settings.ini"), QSettings.Format.IniFormat))
    testers = [
        QAbstractItemModelTester(model, QAbstractItemModelTester.FailureReportingMode.Warning)
        for model in (
            bench.have.model, bench.meet.model, bench.mix.model, bench.prices.rows, bench.effect.rows,
            bench.finder.found, bench.versions.rows, bench.versions.found, bench.sheet.lines,
            bench.sheet.form.rework, bench.printed.rows,
            bench.history.rows, bench.applied.rows, bench.applied.opened, bench.memory.rows,
            *(bench.mill.model(kind) for kind in bench.mill.tables),
        )
    ]
    frame.show()
    frame.activateWindow()
    QTest.qWaitForWindowActive(frame)
    yield bench
    frame.close()
    for tester in testers:
        tester.deleteLater()
    frame.deleteLater()
    del bench, frame
    qapp.sendPostedEvents(None, 52)  # QEvent.DeferredDelete
    qapp.processEvents()
    gc.collect()
    left = set(QApplication.topLevelWidgets()) - before
    assert not left, f"left behind: {left}"


@pytest.fixture
def bench(empty_bench: Bench, mill_file: Path) -> Bench:
    """A shown window on the small mill, with Grower chosen."""
    empty_bench.start(str(mill_file))
    QApplication.processEvents()
    return empty_bench


class Hands:
    """Types and clicks where a person would."""

    def key(self, key: Qt.Key, modifier: Qt.KeyboardModifier = Qt.KeyboardModifier.NoModifier) -> None:
        """Press a key wherever the keyboard is."""
        focus = QApplication.focusWidget()
        assert focus is not None, "nothing has the keyboard"
        QTest.keyClick(focus, key, modifier)
        QApplication.processEvents()

    def write(self, text: str) -> None:
        """Type a text wherever the keyboard is."""
        for sign in text:
            focus = QApplication.focusWidget()
            assert focus is not None, "nothing has the keyboard"
            QTest.keyClicks(focus, sign)
        QApplication.processEvents()

    def click(self, widget: QWidget) -> None:
        """Click a widget in its middle."""
        QApplication.processEvents()
        QTest.mouseClick(widget, Qt.MouseButton.LeftButton)
        QApplication.processEvents()

    def go(self, table: DeskTable, owner: int, key: str) -> None:
        """Put the keyboard on a cell."""
        assert table.go_to(owner, key)
        QApplication.processEvents()

    def drag_rail(self, table: DeskTable, owner: int, key: str, value: float, to: float, *, drop: bool = True) -> None:
        """Press on a value of a rail, move to another, and let go unless told not to."""
        index = table.grid.cell(owner, key)
        table.scrollTo(index)
        axis = table.grid.look(index.row(), index.column()).axis
        assert axis is not None
        track = table.rail_rect(index)
        middle = round(track.center().y())
        points = [track.left() + axis.place(at, track.width()) for at in (value, (value + to) / 2, to)]
        places = [track.topLeft().toPoint() for _point in points]
        for place, x in zip(places, points, strict=True):
            place.setX(round(x))
            place.setY(middle)
        viewport = table.viewport()
        QTest.mousePress(viewport, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, places[0])
        for place in places[1:]:
            QTest.mouseMove(viewport, place)
            QApplication.processEvents()
        if drop:
            QTest.mouseRelease(viewport, Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, places[-1])
            QApplication.processEvents()


@pytest.fixture
def hands() -> Hands:
    return Hands()
