"""The page of the mill: its name and money, its scales, mixers and nutrients."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication
from shiboken6 import isValid

from blendapp.desk.bench import Bench
from blendapp.desk.table.names import NameField
from blendapp.services import mixing
from tests.desk.conftest import Hands


def test_the_mills_name_and_what_a_ton_means_are_stored_as_they_are_changed(bench: Bench, hands: Hands) -> None:
    bench.show_mill("facts")
    bench.mill.facts.name.setFocus()
    bench.mill.facts.name.selectAll()
    hands.write("Hill mill")
    hands.key(Qt.Key.Key_Return)
    bench.mill.facts.ton.setCurrentIndex(bench.mill.facts.ton.findData("short ton"))
    bench.mill.facts.ton.activated.emit(bench.mill.facts.ton.currentIndex())
    assert bench.work.library.mill.name == "Hill mill"
    assert bench.work.library.mill.ton_means == "short ton"
    bench.work.undo()
    bench.work.undo()
    assert bench.work.library.mill.name == "Test mill"
    assert bench.mill.facts.ton.currentData() == ""


def test_a_currency_that_is_none_is_refused_under_its_field(bench: Bench, hands: Hands) -> None:
    bench.show_mill("facts")
    bench.mill.facts.currency.setFocus()
    bench.mill.facts.currency.selectAll()
    hands.write("dollars")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.mill.currency == "USD"
    assert bench.mill.facts.fault.text()


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
    bench.show_mill("scales")
    hands.go(bench.mill.tables["scale"], 1, "name")
    hands.key(Qt.Key.Key_Delete)
    assert 1 in bench.work.library.records["scale"]
    assert "Maize" in bench.strip.words.text()


def test_a_step_of_zero_is_refused_in_its_cell(bench: Bench, hands: Hands) -> None:
    bench.show_mill("scales")
    table = bench.mill.tables["scale"]
    hands.go(table, 1, "step_kg")
    hands.write("0")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.records["scale"][1].step_kg == 1.0
    index = table.grid.cell(1, "step_kg")
    assert table.grid.look(index.row(), index.column()).fault


def test_a_pasted_block_is_one_undo_and_what_cannot_be_stays_in_its_cell(bench: Bench, hands: Hands) -> None:
    bench.show_mill("nutrients")
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


def test_a_section_is_reached_and_entered_by_the_arrows(bench: Bench, hands: Hands) -> None:
    bench.show_mill()
    assert bench.mill.sections.hasFocus()
    for _step in range(4):
        hands.key(Qt.Key.Key_Down)
    assert bench.mill.tables["bin"].isVisible()
    bench.mill.add("bin")
    hands.write("Silo 1")
    hands.key(Qt.Key.Key_Return)
    bench.mill.sections.setFocus()
    hands.key(Qt.Key.Key_Return)
    assert bench.mill.tables["bin"].hasFocus()


def typed_candidates(bench: Bench) -> list[str]:
    field = QApplication.focusWidget()
    assert isinstance(field, NameField)
    assert field.list.isVisible() is bool(field.offered)
    assert field.window() is bench.frame
    return field.offered


def test_what_stands_in_a_bin_is_chosen_by_typing_the_beginning_of_its_name(bench: Bench, hands: Hands) -> None:
    bench.show_mill("bins")
    bench.mill.add("bin")
    hands.write("Silo 1")
    hands.key(Qt.Key.Key_Tab)
    # Tab leaves the name and opens the next cell.
    assert typed_candidates(bench) == ["Limestone", "Maize", "Peas", "Soybean meal"]
    hands.write("m")
    assert typed_candidates(bench) == ["Maize", "Soybean meal", "Limestone"]
    hands.key(Qt.Key.Key_Return)
    (held,) = bench.work.library.all("bin")
    assert (held.name, held.ingredient_id) == ("Silo 1", 1)
    assert QApplication.activeModalWidget() is None
    hands.go(bench.mill.tables["bin"], held.id, "ingredient_id")
    hands.write("m")
    hands.key(Qt.Key.Key_Down)
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.records["bin"][held.id].ingredient_id == 2
    hands.go(bench.mill.tables["bin"], held.id, "ingredient_id")
    hands.key(Qt.Key.Key_Delete)
    assert bench.work.library.records["bin"][held.id].ingredient_id is None


def test_a_name_that_is_not_written_out_is_not_guessed_when_the_cell_is_left(bench: Bench, hands: Hands) -> None:
    bench.show_mill("bins")
    bench.mill.add("bin")
    hands.write("Silo 1")
    hands.key(Qt.Key.Key_Return)
    table = bench.mill.tables["bin"]
    hands.go(table, 1, "ingredient_id")
    hands.write("ma")
    bench.mill.sections.setFocus()
    QApplication.processEvents()
    assert bench.work.library.records["bin"][1].ingredient_id is None
    look = table.grid.look(0, 1)
    assert look.text == "ma"
    assert "no ingredient “ma”" in look.fault


def test_escape_shuts_a_cell_with_candidates_and_leaves_the_page_where_it_is(bench: Bench, hands: Hands) -> None:
    bench.show_mill("bins")
    bench.mill.add("bin")
    hands.write("Silo 1")
    hands.key(Qt.Key.Key_Tab)
    field = QApplication.focusWidget()
    assert isinstance(field, NameField)
    offered = field.list
    hands.write("pe")
    hands.key(Qt.Key.Key_Escape)
    assert not isValid(offered) or not offered.isVisible()
    assert bench.frame.middle.currentWidget() is bench.mill
    assert bench.work.library.records["bin"][1].ingredient_id is None
    hands.key(Qt.Key.Key_Escape)
    assert bench.frame.middle.currentWidget() is bench.frame.bench


def test_a_candidate_is_taken_by_a_click(bench: Bench, hands: Hands) -> None:
    bench.show_mill("bins")
    bench.mill.add("bin")
    hands.write("Silo 1")
    hands.key(Qt.Key.Key_Tab)
    field = QApplication.focusWidget()
    assert isinstance(field, NameField)
    line = field.list.model().index(field.offered.index("Peas"), 0)
    QTest.mouseClick(field.list.viewport(), Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier,
                     field.list.visualRect(line).center())
    QApplication.processEvents()
    (held,) = bench.work.library.all("bin")
    assert held.ingredient_id == 4


def test_a_lot_is_entered_and_chosen_for_a_bin_and_leaves_it_with_its_ingredient(bench: Bench, hands: Hands) -> None:
    bench.show_mill("lots")
    bench.mill.add("lot")
    hands.write("A 17")
    hands.key(Qt.Key.Key_Return)
    lots = bench.mill.tables["lot"]
    hands.go(lots, 1, "ingredient_id")
    hands.write("peas")
    hands.key(Qt.Key.Key_Return)
    hands.go(lots, 1, "received")
    hands.write("2026-13-01")
    hands.key(Qt.Key.Key_Return)
    assert lots.grid.look(0, 2).fault
    hands.go(lots, 1, "received")
    hands.write("2026-11-30")
    hands.key(Qt.Key.Key_Return)
    bench.mill.add("bin")
    hands.write("Silo 1")
    hands.key(Qt.Key.Key_Return)
    bins = bench.mill.tables["bin"]
    hands.go(bins, 1, "lot_id")
    hands.write("a 17")
    hands.key(Qt.Key.Key_Return)
    held = bench.work.library.records["bin"][1]
    assert (held.ingredient_id, held.lot_id) == (4, 1)
    hands.go(bins, 1, "ingredient_id")
    hands.write("maize")
    hands.key(Qt.Key.Key_Return)
    held = bench.work.library.records["bin"][1]
    assert (held.ingredient_id, held.lot_id) == (1, None)


def test_a_liquid_meter_has_its_step_in_litres_in_a_table_of_its_own(bench: Bench, hands: Hands) -> None:
    bench.show_mill("scales")
    bench.mill.add("meter")
    hands.write("Oil meter")
    hands.key(Qt.Key.Key_Return)
    meter = bench.work.library.named("scale", "Oil meter")
    assert meter is not None
    assert bench.mill.model("meter").owners == [meter.id]
    assert meter.id not in bench.mill.model("scale").owners
    hands.go(bench.mill.tables["meter"], meter.id, "step_l")
    hands.write("0.5")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.records["scale"][meter.id].step_l == 0.5
    hands.go(bench.mill.tables["meter"], meter.id, "name")
    hands.key(Qt.Key.Key_Delete)
    assert bench.work.library.named("scale", "Oil meter") is None


def test_where_the_mill_works_is_chosen_among_its_sites_and_greys_the_others(bench: Bench, hands: Hands) -> None:
    bench.show_mill("facts")
    facts = bench.mill.facts
    assert not facts.site.isEnabled()
    for name in ("River", "Hill"):
        bench.mill.add("site")
        hands.write(name)
        hands.key(Qt.Key.Key_Return)
    scales = bench.mill.tables["scale"]
    bench.show_mill("scales")
    hands.go(scales, 1, "site_id")
    hands.write("hil")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.records["scale"][1].site_id == 2
    facts.site.setCurrentIndex(facts.site.findText("River"))
    facts.site.activated.emit(facts.site.currentIndex())
    assert bench.work.library.mill.site_id == 1
    assert scales.grid.look(0, 0).quiet
    facts.mass.setCurrentIndex(facts.mass.findData("lb"))
    facts.mass.activated.emit(facts.mass.currentIndex())
    facts.paper.setCurrentIndex(facts.paper.findData("letter"))
    facts.paper.activated.emit(facts.paper.currentIndex())
    assert (bench.work.library.mill.sheet_mass, bench.work.library.mill.paper) == ("lb", "letter")


def steps(bench: Bench, formula_id: int | None) -> list[str]:
    return [one.text for one in mixing.own_steps(bench.work.library, formula_id)]


def test_steps_are_entered_in_order_and_moved_by_the_keyboard(bench: Bench, hands: Hands) -> None:
    bench.show_mill("steps")
    for text in ("Weigh", "Mix", "Empty"):
        bench.mill.add("general step")
        hands.write(text)
        hands.key(Qt.Key.Key_Return)
    assert steps(bench, None) == ["Weigh", "Mix", "Empty"]
    # Insert puts a new one under the one that has the keyboard.
    hands.go(bench.mill.tables["general step"], bench.mill.tables["general step"].grid.owners[0], "text")
    hands.key(Qt.Key.Key_Insert)
    hands.write("Look")
    hands.key(Qt.Key.Key_Return)
    assert steps(bench, None) == ["Weigh", "Look", "Mix", "Empty"]
    bench.work.undo()
    bench.work.undo()
    table = bench.mill.tables["general step"]
    hands.go(table, table.grid.owners[2], "minutes")
    hands.write("2.5")
    hands.key(Qt.Key.Key_Return)
    hands.go(table, table.grid.owners[2], "text")
    hands.key(Qt.Key.Key_Up, Qt.KeyboardModifier.AltModifier)
    assert steps(bench, None) == ["Weigh", "Empty", "Mix"]
    # The keyboard goes along with the step.
    hands.key(Qt.Key.Key_Up, Qt.KeyboardModifier.AltModifier)
    assert steps(bench, None) == ["Empty", "Weigh", "Mix"]
    assert mixing.own_steps(bench.work.library, None)[0].minutes == 2.5
    hands.click(bench.mill.copy_steps)
    assert steps(bench, 1) == ["Empty", "Weigh", "Mix"]
    assert not bench.mill.copy_steps.isVisible()
    own = bench.mill.tables["own step"]
    hands.go(own, own.grid.owners[0], "text")
    hands.key(Qt.Key.Key_Delete)
    assert steps(bench, 1) == ["Weigh", "Mix"]
    assert steps(bench, None) == ["Empty", "Weigh", "Mix"]
    bench.work.choose(2)
    assert bench.mill.model("own step").owners == []
    assert "Finisher" in bench.mill.own_title.text()


def test_what_the_mill_has_is_found_by_typing_its_name(bench: Bench, hands: Hands) -> None:
    bench.show_mill("bins")
    bench.mill.add("bin")
    hands.write("Silo 1")
    hands.key(Qt.Key.Key_Return)
    bench.to_bench()
    bench.find_anything()
    hands.write("silo")
    hands.key(Qt.Key.Key_Return)
    assert bench.mill.tables["bin"].isVisible()
    assert bench.mill.tables["bin"].hasFocus()
    bench.find_anything()
    hands.write("mixing steps")
    hands.key(Qt.Key.Key_Return)
    assert bench.mill.tables["own step"].isVisible()
