"""Every visible text goes through translation: a marking translator is put in, and what is unmarked must be data."""

from __future__ import annotations

import re
from collections.abc import Iterator

import pytest
from PySide6.QtCore import QSettings
from PySide6.QtGui import QAction
from PySide6.QtWidgets import QAbstractButton, QApplication, QComboBox, QLabel, QLineEdit, QWidget

from blendapp.desk.bench import Bench
from blendapp.desk.shell.frame import Frame
from blendapp.desk.start import make_app
from blendapp.desk.table.grid import Grid
from blendapp.domain import wording
from blendapp.domain.formulas import LimitKind
from blendapp.domain.list_rows import Answer
from blendapp.domain.mills import Asked
from blendapp.services.list_memory import remember, set_usual_change

DATA = re.compile(
    r"Maize|Soybean meal|Limestone|Peas|Grower|Finisher|Crude protein|Lysine|Calcium|Big scale|Test mill(\.mill)?|USD|"
    r"Feed|blendapp|kg|/t\b|\bt\b|Ctrl\+\w|Shift\+|list\.csv|\bcsv\b"
)


@pytest.fixture
def marked() -> Iterator[None]:
    """A translator that wraps each text in brackets."""
    wording.use_translator(lambda text: f"⟦{text}⟧", lambda one, many, count: f"⟦{one if count == 1 else many}⟧")
    yield
    wording.use_language(None)


def bare(text: str) -> str:
    """What is left of a text without its marked parts, data and figures; "" is as it should be."""
    before = None
    while before != text:
        before = text
        text = re.sub(r"⟦[^⟦⟧]*⟧", "", text)
    left = DATA.sub("", text)
    return left if re.search(r"[A-Za-z]{2,}", left) else ""


def texts_of(window: QWidget) -> Iterator[tuple[str, str]]:
    """Every text that a person can see or hear, with where it stands."""
    for widget in [window, *window.findChildren(QWidget)]:
        # Parts that Qt makes for itself have texts of Qt's own, which Qt translates.
        if widget.objectName().startswith("qt_") or isinstance(widget.parent(), QLineEdit):
            continue
        where = f"{type(widget).__name__} {widget.objectName()}"
        yield widget.toolTip(), where
        yield widget.accessibleName(), where
        if isinstance(widget, QLabel | QAbstractButton):
            yield widget.text(), where
        if isinstance(widget, QLineEdit):
            yield widget.placeholderText(), where
        if isinstance(widget, QComboBox):
            for at in range(widget.count()):
                yield widget.itemText(at), where
    for action in window.findChildren(QAction):
        yield action.text(), "action"
    yield window.windowTitle(), "title"


def looks_of(model: Grid) -> Iterator[tuple[str, str]]:
    for heading in model.headings:
        yield heading.words, "heading"
        yield heading.hint, "heading"
    for row in range(model.rowCount()):
        for column in range(model.columnCount()):
            look = model.look(row, column)
            for text in (look.text, look.words, look.hint, look.unit, *look.choices):
                yield text, f"{type(model).__name__} {model.headings[column].key}"
            if look.rail is not None:
                yield look.rail.tag, "tag"


UNITS = {"%", "g/kg", "mg/kg", "ug/kg", "ppm", "ppb", "g/t", "g/short ton", "mg/lb", "kg/t", "lb/short ton", "t"}


def test_no_visible_text_goes_past_the_catalogue(
    marked: None, qapp: QApplication, tmp_path: object, mill_file: object
) -> None:
    make_app([])
    frame = Frame()
    bench = Bench(frame, QSettings(f"{tmp_path}/settings.ini", QSettings.Format.IniFormat))
    frame.show()
    bench.start(str(mill_file))
    seen: list[tuple[str, str]] = []
    for column_set in ("prices", "composition", "keeping"):
        bench.have.show_set(column_set)
        seen += looks_of(bench.have.model)
    bench.mix.model.opened = frozenset({"nutrients", "left out"})
    bench.mix.model.opened_ids = frozenset({1, 2})
    bench.mix._answered()
    seen += [*looks_of(bench.meet.model), *looks_of(bench.mix.model)]
    for kind in LimitKind:
        bench.meet.adding.begin(kind, "Nothing like it")
        bench.meet.adding.add()
        seen += [*texts_of(frame)]
    bench.meet.about.begin()
    bench.show_sheet()
    seen += texts_of(frame)
    seen += [(thing.words, "found") for thing in bench.things()]
    seen += [(thing.kind, "found") for thing in bench.things()]
    bench.show_history(1)
    bench.history.form.add.emit()
    seen += [*looks_of(bench.history.rows), *texts_of(bench.history)]
    bench.work.do(lambda mill: set_usual_change(mill, "", 20.0))
    bench.work.do(lambda mill: remember(mill, "csv", Answer(Asked.INGREDIENT, "Maize", ingredient_id=1)))
    bench.show_memory()
    bench.memory.keep.click()
    seen += [*looks_of(bench.memory.rows), *texts_of(bench.memory)]
    bench.show_applied()
    seen += [*looks_of(bench.applied.rows), *looks_of(bench.applied.opened), *texts_of(bench.applied)]
    bench.to_bench()
    bench.have.model.setData(bench.have.model.cell(1, "price"), "x")
    seen.append((bench.have.model.look(0, 1).fault, "fault"))
    paths = {str(path) for path in bench.files.recent()}
    missed = sorted({(text, where) for text, where in seen if text not in UNITS | paths and bare(text)})
    frame.close()
    frame.deleteLater()
    assert len(seen) > 300
    assert not missed, missed
