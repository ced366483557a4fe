"""The window as a whole: opening, formulas, finding, zones, the answer, and what stands in view at all times."""

from __future__ import annotations

import contextlib
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QAbstractButton, QApplication, QComboBox, QLineEdit, QTableView
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.desk.mix.lines import Part
from blendapp.domain.cautions import general_caution
from blendapp.services.mill import open_mill
from tests.desk.conftest import Hands

CONTROL = Qt.KeyboardModifier.ControlModifier
MAIZE_LIMIT = 3


def test_without_a_mill_the_window_says_how_to_begin(empty_bench: Bench) -> None:
    empty_bench.start(None)
    assert empty_bench.frame.middle.currentWidget() is empty_bench.welcome
    assert empty_bench.frame.footer.caution.text() == general_caution()


def test_a_file_that_is_no_mill_file_is_named_in_a_sentence_and_left_alone(empty_bench: Bench, tmp_path: Path) -> None:
    path = tmp_path / "letter.mill"
    path.write_text("Dear miller")
    empty_bench.start(str(path))
    assert "letter.mill" in empty_bench.strip.words.text()
    assert empty_bench.strip.isVisible()
    assert path.read_text() == "Dear miller"


def test_the_mill_opened_last_is_opened_again_and_listed(bench: Bench, mill_file: Path) -> None:
    assert bench.files.recent() == [mill_file.resolve()]
    bench.work.open(None)
    bench.start(None)
    assert bench.work.mill.path.resolve() == mill_file.resolve()


def test_the_caution_and_the_cost_stay_on_every_page_and_in_every_zone(bench: Bench) -> None:
    for place in (0, 1, 2, None):
        if place is None:
            bench.show_sheet()
        else:
            bench.widen(place)
        QApplication.processEvents()
        assert bench.frame.footer.caution.isVisible()
        assert bench.frame.header.cost.figure.isVisible()
        assert bench.frame.header.formula.isVisible()


def test_a_zone_takes_the_whole_window_and_gives_it_back(bench: Bench, hands: Hands) -> None:
    hands.click(bench.frame.meet.widen)
    assert [zone.isVisible() for zone in bench.frame.zones] == [False, True, False]
    hands.click(bench.frame.meet.widen)
    assert [zone.isVisible() for zone in bench.frame.zones] == [True, True, True]


def test_keys_reach_each_zone(bench: Bench, hands: Hands) -> None:
    for key, pane in ((Qt.Key.Key_1, bench.have), (Qt.Key.Key_2, bench.meet), (Qt.Key.Key_3, bench.mix)):
        hands.key(key, CONTROL)
        assert pane.table.has_keyboard()


def test_tab_goes_from_cell_to_cell_and_every_cell_has_words(bench: Bench, hands: Hands) -> None:
    hands.go(bench.meet.table, 1, "name")
    seen = []
    for _step in range(4):
        hands.key(Qt.Key.Key_Tab)
        seen.append(bench.meet.model.key(bench.meet.table.currentIndex()))
    assert seen == ["minimum", "maximum", "rail", "now"]
    for pane in (bench.have, bench.meet):
        model = pane.model
        for row in range(model.rowCount()):
            for column in range(model.columnCount()):
                look = model.look(row, column)
                assert look.words or look.text or not look.editable or look.typed == ""


def test_anything_is_found_by_typing_and_chosen_with_enter(bench: Bench, hands: Hands) -> None:
    hands.key(Qt.Key.Key_K, CONTROL)
    hands.write("finish")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.formula is not None
    assert bench.work.formula.name == "Finisher"
    hands.key(Qt.Key.Key_K, CONTROL)
    hands.write("limest")
    hands.key(Qt.Key.Key_Return)
    assert bench.have.model.owner(bench.have.table.currentIndex()) == 3
    assert bench.have.table.has_keyboard()


def test_a_command_is_found_and_done(bench: Bench, hands: Hands) -> None:
    hands.key(Qt.Key.Key_K, CONTROL)
    hands.write("new formula")
    hands.key(Qt.Key.Key_Return)
    bench.ask.field.clear()
    hands.write("Starter")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.formula is not None
    assert bench.work.formula.name == "Starter"
    assert bench.frame.header.formula._name == "Starter"


def test_a_taken_name_keeps_the_question_open_and_says_why(bench: Bench, hands: Hands) -> None:
    bench.records.new_formula()
    bench.ask.field.clear()
    hands.write("grower")
    hands.key(Qt.Key.Key_Return)
    assert bench.ask.isVisible()
    assert bench.ask.fault.isVisible()
    hands.key(Qt.Key.Key_Escape)
    assert not bench.ask.isVisible()
    assert len(bench.work.library.formulas) == 2


def test_a_formula_is_copied_renamed_removed_and_all_of_it_undone(bench: Bench, hands: Hands) -> None:
    before = bench.work.mill.store.dump()
    records = {kind: rows for kind, rows in before.items() if kind in ("formula", "limit")}
    bench.records.copy_formula()
    hands.key(Qt.Key.Key_Return)
    bench.records.rename_formula()
    hands.write("Grower for winter")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.formula is not None
    assert bench.work.formula.name == "Grower for winter"
    assert len(bench.work.library.limits(bench.work.formula.id)) == 3
    bench.records.remove_formula()
    for _step in range(3):
        bench.work.undo()
    after = bench.work.mill.store.dump()
    assert {kind: rows for kind, rows in after.items() if kind in ("formula", "limit")} == records


def test_the_mix_stands_largest_first_with_its_total(bench: Bench) -> None:
    lines = [line for line in bench.mix.model.lines if line.part is Part.INGREDIENT]
    result = bench.work.result
    assert result is not None
    assert [line.text for line in lines] == [one.name for one in result.mix]
    amounts = [float(line.amount) for line in lines]
    assert amounts == sorted(amounts, reverse=True)
    assert sum(amounts) == pytest.approx(100, abs=0.02)
    total = next(line for line in bench.mix.model.lines if line.part is Part.TOTAL)
    assert total.cost == bench.frame.header.cost.figure.text().split()[0]


def test_an_unpriced_ingredient_is_named_as_left_out(bench: Bench) -> None:
    assert any("Peas" in line.text and "left out" in line.text for line in bench.mix.model.lines)


def test_an_ingredients_rail_opens_under_its_line_and_its_end_is_dragged(bench: Bench, hands: Hands) -> None:
    hands.go(bench.mix.table, 2, "name")
    hands.key(Qt.Key.Key_Return)
    assert bench.mix.model.lines[1].part is Part.RAIL
    hands.drag_rail(bench.mix.table, 3, "bar", 90, 70)
    stored = bench.work.library.limit(MAIZE_LIMIT).maximum
    assert stored == pytest.approx(70, abs=1)
    hands.key(Qt.Key.Key_Z, CONTROL)
    assert bench.work.library.limit(MAIZE_LIMIT).maximum == 90


def test_folds_open_with_enter_and_close_again(bench: Bench, hands: Hands) -> None:
    model = bench.mix.model
    fold = next(at for at, line in enumerate(model.lines) if line.part is Part.FOLD and line.fold == "nutrients")
    count = len(model.lines)
    hands.go(bench.mix.table, model.owners[fold], "name")
    hands.key(Qt.Key.Key_Return)
    assert len(model.lines) > count
    hands.key(Qt.Key.Key_Return)
    assert len(model.lines) == count


def test_an_incomplete_formula_shows_no_figure(bench: Bench, hands: Hands) -> None:
    for owner in (1, 2):
        hands.go(bench.have.table, owner, "price")
        hands.key(Qt.Key.Key_Delete)
    assert bench.frame.header.cost.figure.text() == "incomplete"
    assert all(not line.amount and not line.cost for line in bench.mix.model.lines)


def test_a_slow_formula_is_solved_aside_and_says_stale_until_then(bench: Bench, hands: Hands, qtbot: QtBot) -> None:
    assert bench.work.formula_id is not None
    bench.work._slow.add(bench.work.formula_id)
    states: list[tuple[bool, str]] = []
    bench.work.answered.connect(lambda: states.append((bench.work.stale, bench.frame.header.cost.since_last.text())))
    old = bench.work.result
    hands.go(bench.have.table, 1, "price")
    hands.write("230")
    hands.key(Qt.Key.Key_Return)
    qtbot.waitUntil(lambda: not bench.work.stale, timeout=10000)
    assert [stale for stale, _words in states] == [True, False]
    assert "stale" in states[0][1]
    assert "stale" not in states[1][1]
    assert bench.work.result is not old


def test_undo_says_what_it_takes_back(bench: Bench, hands: Hands) -> None:
    assert not bench.frame.header.undo.isEnabled()
    hands.go(bench.have.table, 1, "stock_kg")
    hands.write("12")
    hands.key(Qt.Key.Key_Return)
    assert "Maize" in bench.frame.header.undo.toolTip()
    hands.click(bench.frame.header.undo)
    assert bench.work.library.ingredient(1).stock_kg is None


def test_what_a_formula_is_for_is_stored_as_it_is_changed(bench: Bench, hands: Hands) -> None:
    bench.commands.run("about formula")
    about = bench.meet.about
    about.stage.setFocus()
    hands.write("from 25 kg")
    hands.key(Qt.Key.Key_Return)
    about.numbers["batch_kg"].setFocus()
    about.numbers["batch_kg"].clear()
    hands.write("-5")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.formula is not None
    assert bench.work.formula.stage == "from 25 kg"
    assert bench.work.formula.batch_kg == 1000
    assert about.fault.isVisible()


def test_a_copy_of_the_mill_file_opens_equal(bench: Bench, tmp_path: Path) -> None:
    bench.files.ask_save = lambda _title, _name, _kinds: str(tmp_path / "copy")
    bench.commands.run("copy file")
    copy = open_mill(tmp_path / "copy.mill")
    assert copy.library.records == bench.work.library.records
    copy.close()


def test_every_command_has_words_and_no_two_share_keys(bench: Bench) -> None:
    keys: dict[str, str] = {}
    for command in bench.commands.by_key.values():
        assert command.words
        for one in filter(None, command.keys.split(" | ")):
            assert one not in keys, f"{one} is {keys.get(one)} and {command.key}"
            keys[one] = command.key


def test_buttons_fields_and_tables_have_names_for_a_screen_reader(bench: Bench) -> None:
    kinds = (QAbstractButton, QComboBox, QLineEdit, QTableView)
    # Qt names its own parts inside tables and fields "qt_..." and gives them no words.
    inside = ("qt_", "ScrollLeft", "ScrollRight")
    nameless = [
        widget
        for kind in kinds
        for widget in bench.frame.findChildren(kind)
        if not widget.objectName().startswith(inside) and not widget.accessibleName()
        and not (isinstance(widget, QAbstractButton) and widget.text())
        and not isinstance(widget.parent(), QComboBox | QLineEdit)
    ]
    assert not nameless, nameless


def test_the_keyboard_goes_back_to_where_it_was_when_the_finder_closes(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, 2, "price")
    hands.key(Qt.Key.Key_K, CONTROL)
    hands.key(Qt.Key.Key_Escape)
    assert bench.have.table.has_keyboard()
    hands.key(Qt.Key.Key_L, CONTROL)
    hands.write("fin")
    hands.key(Qt.Key.Key_Return)
    assert bench.have.table.has_keyboard()


def test_what_was_said_leaves_with_the_next_edit_undo_or_command_and_stays_while_one_looks_about(
    bench: Bench, hands: Hands
) -> None:
    hands.go(bench.have.table, 1, "price")
    bench.strip.say("Three cells stand below.", ["one", "two", "three"])
    hands.key(Qt.Key.Key_Down)
    hands.key(Qt.Key.Key_2, Qt.KeyboardModifier.ControlModifier)
    assert bench.strip.isVisible()
    hands.go(bench.have.table, 1, "price")
    hands.write("dear")
    hands.key(Qt.Key.Key_Return)
    assert bench.strip.isVisible()
    hands.write("205")
    hands.key(Qt.Key.Key_Return)
    assert not bench.strip.isVisible()
    bench.strip.say("Again.")
    hands.key(Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert not bench.strip.isVisible()
    bench.strip.say("Again.")
    bench.work.choose(2)
    assert not bench.strip.isVisible()


@pytest.mark.parametrize(("text", "stored"), [("211", 211), ("dear", 200)])
def test_a_window_closed_while_one_types_takes_what_can_be_taken(
    bench: Bench, hands: Hands, mill_file: Path, text: str, stored: float
) -> None:
    hands.go(bench.have.table, 1, "price")
    hands.write(text)
    bench.frame.close()
    with contextlib.closing(open_mill(mill_file)) as mill:
        assert mill.library.price_per_t(1, bench.work.on) == stored
