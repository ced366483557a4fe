"""The page of the mill: its name and money, its scales, mixers and nutrients."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from tests.desk.conftest import Hands


def test_the_mills_name_and_what_a_ton_means_are_stored_as_they_are_changed(bench: Bench, hands: Hands) -> None:
    bench.show_mill()
    bench.mill.name.setFocus()
    bench.mill.name.selectAll()
    hands.write("Hill mill")
    hands.key(Qt.Key.Key_Return)
    bench.mill.ton.setCurrentIndex(bench.mill.ton.findData("short ton"))
    bench.mill.ton.activated.emit(bench.mill.ton.currentIndex())
    assert bench.work.library.mill.name == "Hill mill"
    assert bench.work.library.mill.ton_means == "short ton"
    bench.work.undo()
    bench.work.undo()
    assert bench.work.library.mill.name == "Test mill"
    assert bench.mill.ton.currentData() == ""


def test_a_currency_that_is_none_is_refused_under_its_field(bench: Bench, hands: Hands) -> None:
    bench.show_mill()
    bench.mill.currency.setFocus()
    bench.mill.currency.selectAll()
    hands.write("dollars")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.mill.currency == "USD"
    assert bench.mill.fault.text()


def test_a_scale_is_added_named_and_given_a_step(bench: Bench, hands: Hands) -> None:
    bench.show_mill()
    bench.mill.add("scale")
    hands.write("Hand scale")
    hands.key(Qt.Key.Key_Return)
    scale = bench.work.library.named("scale", "Hand scale")
    assert scale is not None
    hands.go(bench.mill.tables["scale"], scale.id, "step_kg")
    hands.write("0.01")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.records["scale"][scale.id].step_kg == 0.01


def test_a_scale_that_still_weighs_something_stays(bench: Bench, hands: Hands) -> None:
    bench.show_mill()
    hands.go(bench.mill.tables["scale"], 1, "name")
    hands.key(Qt.Key.Key_Delete)
    assert 1 in bench.work.library.records["scale"]
    assert "Maize" in bench.strip.words.text()


def test_a_step_of_zero_is_refused_in_its_cell(bench: Bench, hands: Hands) -> None:
    bench.show_mill()
    table = bench.mill.tables["scale"]
    hands.go(table, 1, "step_kg")
    hands.write("0")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.records["scale"][1].step_kg == 1.0
    index = table.grid.cell(1, "step_kg")
    assert table.grid.look(index.row(), index.column()).fault


def test_a_pasted_block_is_one_undo_and_what_cannot_be_stays_in_its_cell(bench: Bench, hands: Hands) -> None:
    bench.show_mill()
    table = bench.mill.tables["nutrient"]
    table.go_to(table.grid.owners[0], "note")
    entries = len(bench.work.mill.store.entries())
    QApplication.clipboard().setText("first\nsecond\nthird")
    table.paste()
    assert len(bench.work.mill.store.entries()) == entries + 1
    assert sorted(one.note for one in bench.work.library.nutrients) == ["first", "second", "third"]
    bench.work.undo()
    assert [one.note for one in bench.work.library.nutrients] == ["", "", ""]
    scales = bench.mill.tables["scale"]
    scales.go_to(1, "step_kg")
    QApplication.clipboard().setText("none\t0.5")
    scales.paste()
    assert bench.work.library.records["scale"][1].least_kg == 0.5
    assert bench.work.library.records["scale"][1].step_kg == 1.0
    assert scales.grid.look(0, 1).fault
