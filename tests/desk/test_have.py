"""The ingredient table: typed, refused, copied and pasted, undone."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.services import edits
from tests.desk.conftest import Hands

MAIZE, SOY, LIMESTONE, PEAS = 1, 2, 3, 4
CONTROL = Qt.KeyboardModifier.ControlModifier


def shown(bench: Bench, owner: int, key: str) -> str:
    return str(bench.have.model.cell(owner, key).data())


def test_a_typed_price_is_stored_and_the_cost_follows(bench: Bench, hands: Hands) -> None:
    before = bench.frame.header.cost.figure.text()
    hands.go(bench.have.table, MAIZE, "price")
    hands.write("210")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.price_per_t(MAIZE, bench.work.on) == 210
    assert shown(bench, MAIZE, "price") == "210.00"
    assert bench.frame.header.cost.figure.text() != before
    assert bench.frame.header.cost.since_last.text().startswith("+")


def test_enter_goes_on_to_the_cell_below(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, MAIZE, "price")
    hands.write("210")
    hands.key(Qt.Key.Key_Return)
    hands.write("430")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.price_per_t(SOY, bench.work.on) == 430


def test_a_price_that_is_no_number_is_refused_beside_its_cell_and_escape_takes_it_back(
    bench: Bench, hands: Hands
) -> None:
    table = bench.have.table
    hands.go(table, MAIZE, "price")
    hands.write("cheap")
    hands.key(Qt.Key.Key_Tab)
    assert bench.work.library.price_per_t(MAIZE, bench.work.on) == 200
    assert shown(bench, MAIZE, "price") == "cheap"
    hands.go(table, MAIZE, "price")
    QApplication.processEvents()
    assert table._note is not None
    assert table._note.isVisible()
    assert "cheap" in table._note.text()
    hands.key(Qt.Key.Key_Escape)
    assert shown(bench, MAIZE, "price") == "200.00"
    assert not table._note.isVisible()


def test_a_price_per_another_mass_is_turned_into_money_per_tonne(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, MAIZE, "price")
    hands.write("20 / 100 kg")
    hands.key(Qt.Key.Key_Return)
    assert shown(bench, MAIZE, "price") == "200.00"
    assert shown(bench, MAIZE, "quoted") == "20 per 100 kg"


def test_a_cleared_price_is_unknown_and_never_zero(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, LIMESTONE, "price")
    hands.key(Qt.Key.Key_Delete)
    assert bench.work.library.price_per_t(LIMESTONE, bench.work.on) is None
    assert shown(bench, LIMESTONE, "price") == "no price"


def test_undo_and_redo_restore_a_price(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, MAIZE, "price")
    hands.write("210")
    hands.key(Qt.Key.Key_Return)
    hands.key(Qt.Key.Key_Z, CONTROL)
    assert shown(bench, MAIZE, "price") == "200.00"
    hands.key(Qt.Key.Key_Z, CONTROL | Qt.KeyboardModifier.ShiftModifier)
    assert shown(bench, MAIZE, "price") == "210.00"


def test_an_unknown_value_is_a_dot_a_known_none_is_0_and_clearing_makes_it_unknown(bench: Bench, hands: Hands) -> None:
    bench.have.show_set("composition")
    assert shown(bench, PEAS, "nutrient 2") == "·"
    assert shown(bench, LIMESTONE, "nutrient 2") == "0"
    hands.go(bench.have.table, LIMESTONE, "nutrient 2")
    hands.key(Qt.Key.Key_Delete)
    assert shown(bench, LIMESTONE, "nutrient 2") == "·"
    assert bench.work.library.value(LIMESTONE, 2) is None


def test_a_pasted_block_keeps_every_good_cell_lists_every_bad_one_and_is_one_undo(bench: Bench, hands: Hands) -> None:
    bench.have.show_set("composition")
    table = bench.have.table
    hands.go(table, MAIZE, "nutrient 1")
    QApplication.clipboard().setText("9.5\t0.31\tlots\n47\tx\t0.33\n")
    hands.key(Qt.Key.Key_V, CONTROL)
    library = bench.work.library
    assert library.value(MAIZE, 1).amount == 9.5  # type: ignore[union-attr]
    assert library.value(SOY, 3).amount == 0.33  # type: ignore[union-attr]
    assert library.value(SOY, 2).amount == 2.90  # type: ignore[union-attr]
    assert "4 of 6" in bench.strip.words.text()
    assert "lots" in bench.strip.list.text()
    assert "“x”" in bench.strip.list.text()
    assert shown(bench, SOY, "nutrient 2") == "x"
    hands.key(Qt.Key.Key_Z, CONTROL)
    assert library.value(MAIZE, 1).amount == 10.0  # type: ignore[union-attr]
    assert library.value(SOY, 3).amount == 0.30  # type: ignore[union-attr]


def test_cells_of_a_block_that_fall_outside_the_table_are_listed(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, PEAS, "stock_kg")
    QApplication.clipboard().setText("5\n6\n7")
    hands.key(Qt.Key.Key_V, CONTROL)
    assert bench.work.library.ingredient(PEAS).stock_kg == 5
    assert "6" in bench.strip.list.text()
    assert "7" in bench.strip.list.text()


def test_a_copied_block_pastes_back_equal(bench: Bench, hands: Hands) -> None:
    bench.have.show_set("composition")
    table = bench.have.table
    hands.go(table, MAIZE, "nutrient 1")
    for _step in range(2):
        hands.key(Qt.Key.Key_Down, Qt.KeyboardModifier.ShiftModifier)
    hands.key(Qt.Key.Key_C, CONTROL)
    assert QApplication.clipboard().text() == "10\n46\n0"
    values = dict(bench.work.library.records["value"])
    hands.go(table, MAIZE, "nutrient 1")
    hands.key(Qt.Key.Key_V, CONTROL)
    assert dict(bench.work.library.records["value"]) == values


def test_typing_in_the_find_field_shows_only_what_holds_it(bench: Bench, hands: Hands) -> None:
    hands.key(Qt.Key.Key_F, CONTROL)
    hands.write("me")
    names = [bench.work.library.ingredient(owner).name for owner in bench.have.model.owners]
    assert names == ["Soybean meal", "Limestone"]


def test_an_ingredient_is_added_named_and_removed_again_with_undo(bench: Bench, hands: Hands) -> None:
    hands.click(bench.have.add)
    hands.write("Oats")
    hands.key(Qt.Key.Key_Return)
    oats = bench.work.library.named("ingredient", "Oats")
    assert oats is not None
    hands.go(bench.have.table, oats.id, "name")
    hands.key(Qt.Key.Key_Delete)
    assert bench.work.library.named("ingredient", "Oats") is None
    hands.key(Qt.Key.Key_Z, CONTROL)
    assert bench.work.library.named("ingredient", "Oats") is not None


def test_two_ingredients_of_one_name_are_refused_where_it_is_typed(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, PEAS, "name")
    hands.write("maize")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.ingredient(PEAS).name == "Peas"
    assert bench.have.model.look(*where(bench, PEAS, "name")).fault


def where(bench: Bench, owner: int, key: str) -> tuple[int, int]:
    index = bench.have.model.cell(owner, key)
    return index.row(), index.column()


def test_a_dragged_price_shows_its_cost_while_it_moves_and_is_one_undo(bench: Bench, hands: Hands) -> None:
    before = bench.frame.header.cost.figure.text()
    hands.drag_rail(bench.have.table, MAIZE, "holds", 200, 220, drop=False)
    assert bench.frame.header.cost.figure.text() != before
    assert bench.work.library.price_per_t(MAIZE, bench.work.on) == 200
    hands.key(Qt.Key.Key_Escape)
    assert bench.frame.header.cost.figure.text() == before
    hands.drag_rail(bench.have.table, MAIZE, "holds", 200, 220)
    price = bench.work.library.price_per_t(MAIZE, bench.work.on)
    assert price is not None
    assert 215 < price < 225
    hands.key(Qt.Key.Key_Z, CONTROL)
    assert bench.work.library.price_per_t(MAIZE, bench.work.on) == 200


def test_headings_sort_and_unknown_prices_stand_last_both_ways(bench: Bench) -> None:
    model = bench.have.model
    section = model.column_of("price")
    assert section is not None
    bench.have._sort(section)
    assert model.owners == [LIMESTONE, MAIZE, SOY, PEAS]
    bench.have._sort(section)
    assert model.owners == [SOY, MAIZE, LIMESTONE, PEAS]


def test_removing_a_row_keeps_the_place_in_a_scrolled_table(bench: Bench) -> None:
    for number in range(60):
        bench.work.do(lambda mill, number=number: edits.add_ingredient(mill, f"Feed {number:02}"))
    QApplication.processEvents()
    bar = bench.have.table.verticalScrollBar()
    bar.setValue(bar.maximum() // 2)
    place = bar.value()
    assert place > 0
    bench.have.remove(bench.work.library.named("ingredient", "Feed 59").id)  # type: ignore[union-attr]
    QApplication.processEvents()
    assert bar.value() == place
    assert bench.have.table.names.verticalScrollBar().value() == place


def test_an_editor_opens_with_every_digit_of_what_is_stored(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, 1, "price")
    hands.write("201.123456789")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.price_per_t(1, bench.work.on) == 201.123456789
    index = bench.have.model.cell(1, "price")
    assert index.data() == "201.12"
    assert bench.have.model.data(index, Qt.ItemDataRole.EditRole) == "201.123456789"


def refuse_in_composition(bench: Bench, hands: Hands) -> None:
    bench.have.show_set("composition")
    hands.go(bench.have.table, MAIZE, "nutrient 2")
    hands.write("abc")
    hands.key(Qt.Key.Key_Return)
    assert bench.have.model.refusals


def test_a_refused_entry_keeps_the_keyboard_and_takes_the_next_figure(bench: Bench, hands: Hands) -> None:
    refuse_in_composition(bench, hands)
    table, model = bench.have.table, bench.have.model
    assert (model.owner(table.currentIndex()), model.key(table.currentIndex())) == (MAIZE, "nutrient 2")
    assert table._note is not None
    assert table._note.isVisible()
    assert "abc" in table._note.text()
    soy = bench.work.library.value(SOY, 2)
    hands.write("0.35")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.value(MAIZE, 2).amount == 0.35  # type: ignore[union-attr]
    assert bench.work.library.value(SOY, 2) == soy
    assert not table._note.isVisible()
    assert model.owner(table.currentIndex()) == SOY


def test_a_refused_entry_keeps_the_keyboard_however_often_enter_or_tab_is_pressed(bench: Bench, hands: Hands) -> None:
    refuse_in_composition(bench, hands)
    table, model = bench.have.table, bench.have.model
    for key in (Qt.Key.Key_Return, Qt.Key.Key_Tab, Qt.Key.Key_Down):
        hands.key(Qt.Key.Key_F2)
        hands.key(key)
        assert (model.owner(table.currentIndex()), model.key(table.currentIndex())) == (MAIZE, "nutrient 2")
        assert shown(bench, MAIZE, "nutrient 2") == "abc"
    hands.key(Qt.Key.Key_Escape)
    assert shown(bench, MAIZE, "nutrient 2") == "0.30"


def test_a_refused_name_keeps_the_keyboard_too(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, MAIZE, "name")
    hands.write("Peas")
    hands.key(Qt.Key.Key_Return)
    hands.write("Corn")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.ingredient(MAIZE).name == "Corn"
    assert bench.work.library.ingredient(SOY).name == "Soybean meal"


def test_undo_and_redo_show_the_stored_value_again(bench: Bench, hands: Hands) -> None:
    for key in (Qt.Key.Key_Z, Qt.Key.Key_Y):
        if key == Qt.Key.Key_Z:
            bench.work.do(lambda mill: edits.set_price_per_t(mill, SOY, 430.0, bench.work.on))
        refuse_in_composition(bench, hands)
        hands.key(key, CONTROL)
        assert shown(bench, MAIZE, "nutrient 2") == "0.30"
        assert not bench.have.model.refusals


def test_a_value_that_comes_from_elsewhere_replaces_a_refused_text_and_leaves_others(
    bench: Bench, hands: Hands
) -> None:
    refuse_in_composition(bench, hands)
    bench.work.do(lambda mill: edits.set_value(mill, SOY, 2, 3.0))
    assert shown(bench, MAIZE, "nutrient 2") == "abc"
    bench.work.do(lambda mill: edits.set_value(mill, MAIZE, 2, 0.28))
    assert shown(bench, MAIZE, "nutrient 2") == "0.28"


def test_another_formula_begins_without_refused_texts(bench: Bench, hands: Hands) -> None:
    refuse_in_composition(bench, hands)
    bench.work.choose(2)
    assert shown(bench, MAIZE, "nutrient 2") == "0.30"


def test_a_price_of_nothing_pasted_from_outside_is_a_question_and_a_blank_wipes_none(
    bench: Bench, hands: Hands
) -> None:
    hands.go(bench.have.table, MAIZE, "price")
    QApplication.clipboard().setText("0\n\n-5\n190")
    hands.key(Qt.Key.Key_V, CONTROL)
    library, on = bench.work.library, bench.work.on
    assert [library.price_per_t(one, on) for one in (MAIZE, SOY, LIMESTONE, PEAS)] == [200, 420, 50, 190]
    listed = bench.strip.list.text().splitlines()
    assert bench.strip.words.text() == "1 of 4 cells taken; what was not taken stands below."
    assert "Maize" in listed[0]
    assert "type it if it is meant" in listed[0]
    assert "Limestone" in listed[1]
    assert "Soybean meal" in listed[2]
    assert "left as it is" in listed[2]
    hands.go(bench.have.table, MAIZE, "price")
    hands.write("0")
    hands.key(Qt.Key.Key_Return)
    assert library.price_per_t(MAIZE, on) == 0


def test_one_refused_cell_is_counted_in_the_singular(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, MAIZE, "price")
    QApplication.clipboard().setText("lots")
    hands.key(Qt.Key.Key_V, CONTROL)
    assert bench.strip.words.text() == "0 of 1 cell taken; what was not taken stands below."


def test_a_negative_stock_is_refused_typed_and_pasted(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, MAIZE, "stock_kg")
    hands.write("-5")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.ingredient(MAIZE).stock_kg is None
    assert "at least 0 kg" in bench.have.model.look(*where(bench, MAIZE, "stock_kg")).fault
    hands.key(Qt.Key.Key_Escape)
    QApplication.clipboard().setText("-5")
    hands.key(Qt.Key.Key_V, CONTROL)
    assert bench.work.library.ingredient(MAIZE).stock_kg is None
