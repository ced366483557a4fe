"""The list as it stands in its file: what each column and row was taken for, and saying otherwise."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import QPoint, Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.prices.source_model import column_letters
from blendapp.domain.list_rows import Fate, SourceSheet
from blendapp.domain.plant import Site, Supplier
from blendapp.domain.records import added
from tests.desk.arriving import TWO_ROW_HEADINGS, UNKNOWN_NAMES, count, fates, hide_and_strike, read, wait, watch, write
from tests.desk.conftest import Hands

MOVED = [["Code", "What", "Old", "New USD/t"], ["x1", "Maize", 100, 210], ["x2", "Limestone", 40, 51]]


@pytest.fixture(autouse=True)
def testers(bench: Bench) -> Iterator[None]:
    found = watch(bench)
    yield
    assert found


def roles(bench: Bench) -> list[str]:
    head = bench.prices.source.head
    return [head.words(column)[0] for column in range(bench.prices.source.rows.columnCount())]


def choose(bench: Bench, hands: Hands, words: str) -> None:
    """Take one of what the finder offers."""
    hands.write(words)
    hands.key(Qt.Key.Key_Return)
    wait(bench)


def test_every_column_is_named_above_it_and_heading_rows_are_marked(bench: Bench, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", TWO_ROW_HEADINGS))
    source = bench.prices.source
    assert roles(bench) == ["name", "price", "unit"]
    assert source.head.words(1) == ("price", "B  USD")
    assert [source.gutter.word(row) for row in (1, 3, 4, 5)] == ["", "headings", "headings", ""]
    assert source.rows.data(source.rows.index(4, 1)) == "210"
    assert [source.rows.fates.get(row) for row in (1, 2, 5, 7)] == [
        Fate.IGNORED, None, Fate.ACCEPTED, Fate.IGNORED]


def test_hidden_and_struck_rows_are_told_from_others(bench: Bench, tmp_path: Path) -> None:
    rows = [["Ingredient", "USD/t"], ["Maize", 210], ["Soybean meal", 430], ["Limestone", 51]]
    read(bench, hide_and_strike(write(tmp_path / "list.xlsx", rows), hidden=3, struck=4))
    source = bench.prices.source
    assert source.gutter.word(3) == "hidden"
    assert source.rows.sheet.struck == {(4, 0), (4, 1)}


def test_the_row_of_the_question_is_outlined_and_comes_into_view(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    rows = [["Ingredient", "USD/t"], *([f"Feed {at}", "n/q"] for at in range(400)), ["Chalk", 50]]
    read(bench, write(tmp_path / "list.xlsx", rows))
    source = bench.prices.source
    assert source.marked_row == 402
    assert 0 < source.rowViewportPosition(401) < source.viewport().height()
    assert source.chosen_column == 0


def test_a_click_in_the_source_finds_the_row_that_was_understood(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", UNKNOWN_NAMES))
    source = bench.prices.source
    place = source.visualRect(source.rows.index(3, 0)).center()
    QTest.mouseClick(source.viewport(), Qt.MouseButton.LeftButton, pos=place)
    row = bench.prices.rows.row(bench.prices.table.currentIndex())
    assert row is not None
    assert row.source_name == "Chalk"
    assert source.marked_row == 4


def test_another_role_is_given_to_a_column_by_keys_by_a_click_and_by_the_finder(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "list.xlsx", MOVED))
    source = bench.prices.source
    # By the keyboard, in the column itself.
    source.setFocus()
    source.setCurrentIndex(source.rows.index(1, 2))
    hands.key(Qt.Key.Key_Return)
    choose(bench, hands, "not read")
    assert roles(bench)[2] == "not read"
    # By a click on the words above it.
    x = source.head.sectionViewportPosition(1) + 20
    QTest.mouseClick(source.head.viewport(), Qt.MouseButton.LeftButton, pos=QPoint(x, 10))
    choose(bench, hands, "name")
    assert roles(bench)[1] == "name"
    # By the finder, for the column under the keyboard.
    source.setFocus()
    source.setCurrentIndex(source.rows.index(1, 3))
    hands.key(Qt.Key.Key_K, Qt.KeyboardModifier.ControlModifier)
    choose(bench, hands, "this column is: price")
    assert roles(bench) == [roles(bench)[0], "name", "not read", "price"]
    assert count(bench, Fate.ACCEPTED) == 2
    hands.key(Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    wait(bench)
    assert len(bench.prices.replies.answers) == 2  # type: ignore[union-attr]


def test_headings_are_said_to_be_in_another_row(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    rows = [["Ingredient", "USD/t"], ["Last week", None], ["Chalk", 40], ["Ingredient", "USD/t"], ["Limestone", 51]]
    read(bench, write(tmp_path / "list.xlsx", rows))
    source = bench.prices.source
    source.setFocus()
    source.setCurrentIndex(source.rows.index(3, 0))
    hands.key(Qt.Key.Key_Return)
    choose(bench, hands, "headings are in this row")
    assert [row for row in range(1, 6) if source.rows.is_heading(row)] == [4]
    assert fates(bench)[-2:] == ["ignored", "accepted"]


def test_each_sheet_is_a_press_away_and_a_question_brings_its_own(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    more = [["Item", "USD/t"], ["Chalk", 50]]
    read(bench, write(tmp_path / "list.xlsx", TWO_ROW_HEADINGS, Minerals=more))
    source, sheets = bench.prices.source, bench.prices.parts.sheets
    assert list(sheets.buttons) == ["Prices", "Minerals"]
    assert source.rows.sheet.name == "Minerals"
    hands.click(sheets.buttons["Prices"])
    assert source.rows.data(source.rows.index(4, 0)) == "Maize"
    assert bench.prices.questions.place.whole.startswith("row 2 of “Minerals”")


def test_supplier_and_site_are_said_in_place_and_the_source_can_be_another(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    path = write(tmp_path / "bay grain 49.xlsx", UNKNOWN_NAMES)
    read(bench, path)
    whose = bench.prices.parts.whose
    assert whose.source.text() == "list of: bay grain"
    assert not whose.supplier.isVisible()
    bench.work.apply("Plant", [added(Supplier(1, "Bay Grain Ltd")), added(Site(1, "Riverside"))])
    wait(bench)
    assert whose.supplier.text() == "supplier: none said"
    hands.click(whose.supplier)
    choose(bench, hands, "bay")
    assert whose.supplier.text() == "supplier: Bay Grain Ltd"
    hands.click(whose.site)
    choose(bench, hands, "river")
    assert whose.site.text() == "for site: Riverside"
    hands.click(whose.source)
    bench.ask.field.selectAll()
    choose(bench, hands, "Bay Grain, west")
    assert whose.source.text() == "list of: bay grain west"
    assert bench.prices.questions.kept.text() == "Remembered for bay grain west: its next list is not asked."
    hands.click(bench.prices.take)
    quote = bench.work.library.all("quote")[-1]
    assert (quote.supplier_id, quote.site_id) == (1, 1)


def test_only_the_cells_in_view_of_a_long_wide_list_are_made_and_painted(
    bench: Bench, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    asked: set[int] = set()

    class Rows:
        """5,000 rows of 20 cells, and a million blank ones below them."""

        def __len__(self) -> int:
            return 1_005_000

        def __getitem__(self, row: int) -> tuple[str, ...]:
            asked.add(row)
            return tuple(f"{row}.{column}" for column in range(20)) if row < 5000 else ("",) * 20

    sheet = SourceSheet("Long", Rows())  # type: ignore[arg-type]
    read(bench, write(tmp_path / "list.xlsx", TWO_ROW_HEADINGS))
    source = bench.prices.source
    painted: list[tuple[int, int]] = []
    text = source.rows.text
    monkeypatch.setattr(source.rows, "text", lambda *place: (painted.append(place), text(*place))[1])
    source.rows.show(sheet, "another file", dict.fromkeys(range(1, 5001), Fate.ACCEPTED))
    QApplication.processEvents()
    source.grab()
    assert source.rows.rowCount() == 5000
    assert source.rows.columnCount() == 20
    seen = (source.viewport().height() // 26 + 2) * 20
    assert 0 < len(set(painted)) <= seen
    assert len(asked) < 200
    source.mark(4990)
    QApplication.processEvents()
    source.grab()
    assert len(asked) < 300


@pytest.mark.parametrize(("index", "letters"), [(0, "A"), (25, "Z"), (26, "AA"), (51, "AZ"), (52, "BA"), (701, "ZZ"),
                                                (702, "AAA"), (16383, "XFD")])
def test_columns_are_lettered_as_spreadsheets_letter_them(index: int, letters: str) -> None:
    assert column_letters(index) == letters


def test_a_word_that_is_no_role_is_said_to_be_none_and_the_roles_are_listed(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "list.xlsx", MOVED))
    source, finder = bench.prices.source, bench.finder
    source.setFocus()
    source.setCurrentIndex(source.rows.index(1, 2))
    hands.key(Qt.Key.Key_Return)
    offered = [one.words for one in finder.found.found]
    assert "This column is: not read" in offered
    assert not finder.none.isVisible()
    hands.write("xyzzy")
    assert finder.none.isVisible()
    assert finder.none.text() == "No such role. There are these:"
    assert [one.words for one in finder.found.found] == offered
    # Nothing that was not asked for is done by Enter.
    hands.key(Qt.Key.Key_Return)
    assert finder.isVisible()
    hands.key(Qt.Key.Key_Down)
    assert finder.list.currentIndex().row() == 0
