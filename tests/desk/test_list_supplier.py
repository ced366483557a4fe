"""A supplier that a list names is proposed, taken with one key, and never said by the program itself."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.services import plant
from tests.desk.arriving import Rows, read, wait, write
from tests.desk.conftest import Hands

PLAIN: Rows = [["Ingredient", "USD/t"], ["Maize", 201], ["Limestone", 51]]
TITLED: Rows = [["Marramgate Grain, offers of the week"], [], *PLAIN]


@pytest.fixture(autouse=True)
def suppliers(bench: Bench) -> None:
    for name in ("Marramgate Grain", "Marsh & Sons", "Bay"):
        bench.work.do(lambda mill, name=name: plant.add_supplier(mill, name))


@pytest.mark.parametrize(
    ("file_name", "rows", "name"),
    [("list 49.xlsx", TITLED, "Marramgate Grain"), ("Marramgate Grain 2026-12-07.xlsx", PLAIN, "Marramgate Grain"),
     ("marramgate 49.xlsx", PLAIN, "Marramgate Grain"), ("bayside 49.xlsx", PLAIN, ""), ("mar 49.xlsx", PLAIN, ""),
     ("Marsh & Sons.xlsx", TITLED, ""), ("list.xlsx", PLAIN, "")],
    ids=["title", "file", "begun", "part of a word", "too short", "two", "none"])
def test_the_one_supplier_that_the_list_names_is_proposed(
    bench: Bench, hands: Hands, tmp_path: Path, file_name: str, rows: Rows, name: str
) -> None:
    read(bench, write(tmp_path / file_name, rows))
    whose = bench.prices.parts.whose
    assert whose.proposed.isVisible() is bool(name)
    if name:
        assert whose.proposed.text() == f"{name}? F6 takes it"
    assert whose.supplier.text() == "supplier: none said"
    assert bench.prices.reading is not None
    assert bench.prices.reading.supplier_id is None


def test_f6_takes_the_proposal_and_the_next_list_of_the_source_knows_it(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "marramgate 48.xlsx", TITLED))
    whose = bench.prices.parts.whose
    assert QApplication.focusWidget() is bench.prices.take
    hands.key(Qt.Key.Key_F6)
    wait(bench)
    assert whose.supplier.text() == "supplier: Marramgate Grain"
    assert not whose.proposed.isVisible()
    hands.key(Qt.Key.Key_Backspace)
    wait(bench)
    assert whose.supplier.text() == "supplier: none said"
    assert whose.proposed.isVisible()
    hands.click(whose.proposed)
    wait(bench)
    hands.key(Qt.Key.Key_Return, Qt.KeyboardModifier.ControlModifier)
    quotes = [one for one in bench.work.library.all("quote") if one.price_list_id]
    assert {bench.work.library.records["supplier"][one.supplier_id].name for one in quotes} == {"Marramgate Grain"}
    read(bench, write(tmp_path / "marramgate 49.xlsx", [*TITLED, ["Soybean meal", 421]]))
    assert whose.supplier.text() == "supplier: Marramgate Grain"
    assert QApplication.focusWidget() is bench.prices.take


def test_a_list_of_which_none_was_said_is_not_asked_again(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", TITLED))
    whose = bench.prices.parts.whose
    hands.click(whose.supplier)
    hands.write("none said")
    hands.key(Qt.Key.Key_Return)
    wait(bench)
    assert not whose.proposed.isVisible()


def test_reading_again_leaves_the_keyboard_where_the_list_is_taken(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "list.xlsx", PLAIN))
    hands.key(Qt.Key.Key_F5)
    wait(bench)
    assert QApplication.focusWidget() is bench.prices.take
