"""The list of rails: typed, nudged, dragged; added and removed; the answer following."""

from __future__ import annotations

from dataclasses import replace

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.desk.mix.lines import lines_of
from blendapp.desk.rail.grip import SETTLE_MS
from blendapp.domain.formulas import LimitBasis, LimitKind, Subject
from blendapp.services import edits
from tests.desk.conftest import Hands

PROTEIN, CALCIUM, MAIZE_LIMIT = 1, 2, 3
CONTROL = Qt.KeyboardModifier.ControlModifier


def test_a_typed_minimum_is_stored_and_the_answer_follows(bench: Bench, hands: Hands) -> None:
    before = bench.work.result
    hands.go(bench.meet.table, PROTEIN, "minimum")
    hands.write("20")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.limit(PROTEIN).minimum == 20
    assert bench.work.result is not before
    assert bench.work.result is not None
    assert bench.work.result.limits[0].value == pytest.approx(20)


def test_a_minimum_above_the_maximum_is_refused_where_it_is_typed(bench: Bench, hands: Hands) -> None:
    hands.go(bench.meet.table, PROTEIN, "minimum")
    hands.write("30")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.limit(PROTEIN).minimum == 19
    index = bench.meet.model.cell(PROTEIN, "minimum")
    assert bench.meet.model.look(index.row(), index.column()).fault


def test_a_dragged_end_tries_while_it_moves_and_is_one_undo_when_let_go(bench: Bench, hands: Hands) -> None:
    cost = bench.frame.header.cost.figure.text()
    entries = len(bench.work.mill.store.entries())
    hands.drag_rail(bench.meet.table, PROTEIN, "rail", 19, 21, drop=False)
    assert bench.frame.header.cost.figure.text() != cost
    assert bench.frame.footer.check.whole == "trying, not stored"
    assert bench.work.library.limit(PROTEIN).minimum == 19
    assert len(bench.work.mill.store.entries()) == entries
    QTest.mouseRelease(bench.meet.table.viewport(), Qt.MouseButton.LeftButton)
    assert bench.work.library.limit(PROTEIN).minimum == pytest.approx(21, abs=0.2)
    assert len(bench.work.mill.store.entries()) == entries + 1
    hands.key(Qt.Key.Key_Z, CONTROL)
    assert bench.work.library.limit(PROTEIN).minimum == 19
    assert bench.frame.header.cost.figure.text() == cost


def test_escape_takes_a_dragged_end_back_and_stores_nothing(bench: Bench, hands: Hands) -> None:
    cost = bench.frame.header.cost.figure.text()
    hands.drag_rail(bench.meet.table, PROTEIN, "rail", 19, 21, drop=False)
    hands.key(Qt.Key.Key_Escape)
    assert bench.frame.header.cost.figure.text() == cost
    QTest.mouseRelease(bench.meet.table.viewport(), Qt.MouseButton.LeftButton)
    assert bench.work.library.limit(PROTEIN).minimum == 19


def test_arrow_keys_nudge_an_end_and_a_rest_gives_it_once(bench: Bench, hands: Hands) -> None:
    entries = len(bench.work.mill.store.entries())
    hands.go(bench.meet.table, PROTEIN, "rail")
    hands.key(Qt.Key.Key_Right)
    hands.key(Qt.Key.Key_Right)
    assert bench.work.library.limit(PROTEIN).minimum == 19
    QTest.qWait(SETTLE_MS + 200)
    stored = bench.work.library.limit(PROTEIN).minimum
    assert stored is not None
    assert 19 < stored < 20
    assert len(bench.work.mill.store.entries()) == entries + 1


def test_shift_nudges_further_and_home_and_end_choose_the_end(bench: Bench, hands: Hands) -> None:
    hands.go(bench.meet.table, PROTEIN, "rail")
    hands.key(Qt.Key.Key_End)
    hands.key(Qt.Key.Key_Left, Qt.KeyboardModifier.ShiftModifier)
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.limit(PROTEIN).minimum == 19
    assert bench.work.library.limit(PROTEIN).maximum == pytest.approx(23)


def test_a_figure_typed_on_a_rail_types_its_end(bench: Bench, hands: Hands) -> None:
    hands.go(bench.meet.table, PROTEIN, "rail")
    hands.key(Qt.Key.Key_Home)
    hands.write("20.5")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.limit(PROTEIN).minimum == 20.5


def test_deleting_an_end_opens_it_and_undo_closes_it_again(bench: Bench, hands: Hands) -> None:
    hands.go(bench.meet.table, PROTEIN, "maximum")
    hands.key(Qt.Key.Key_Delete)
    assert bench.work.library.limit(PROTEIN).maximum is None
    hands.key(Qt.Key.Key_Z, CONTROL)
    assert bench.work.library.limit(PROTEIN).maximum == 24


def test_a_working_wall_says_what_it_costs_and_a_slack_one_says_nothing(bench: Bench) -> None:
    model = bench.meet.model
    protein, maize = model.rail(PROTEIN), model.rail(MAIZE_LIMIT)
    assert protein is not None
    assert maize is not None
    assert protein.working
    # Per 1 % of protein the mix trades maize for soybean meal: the price is that of the two, over their difference.
    assert "less saves" in protein.tag
    assert not maize.working
    assert maize.tag == ""


def test_limits_stand_in_the_order_of_their_cost_or_as_entered(bench: Bench, hands: Hands) -> None:
    bench.have.table.setFocus()
    bench.work.solve()
    assert bench.meet.model.owners[0] == PROTEIN
    assert bench.meet.model.owners[-1] == MAIZE_LIMIT
    hands.click(bench.meet.order)
    assert bench.meet.model.owners == [PROTEIN, CALCIUM, MAIZE_LIMIT]


def test_a_nutrient_limit_on_dry_matter_is_added_through_the_form(bench: Bench, hands: Hands) -> None:
    hands.key(Qt.Key.Key_M, CONTROL)
    adding = bench.meet.adding
    hands.write("Lysine")
    adding.basis.setCurrentText("dry matter")
    adding.minimum.setFocus()
    hands.write("0.2")
    hands.key(Qt.Key.Key_Return)
    added = bench.work.library.limits(1)[-1]
    assert added.kind is LimitKind.NUTRIENT
    assert added.basis is LimitBasis.DRY_MATTER
    assert added.minimum == 0.2
    assert adding.isHidden()


def test_a_group_and_a_ratio_are_added_through_the_form(bench: Bench) -> None:
    adding = bench.meet.adding
    adding.begin(LimitKind.GROUP, "Maize + Peas")
    adding.maximum.setText("80")
    adding.add()
    adding.begin(LimitKind.RATIO, "Calcium")
    adding.per.setText("Lysine")
    adding.maximum.setText("3")
    adding.add()
    group, ratio = bench.work.library.limits(1)[-2:]
    assert group.subject.ids == (1, 4)
    assert group.maximum == 80
    assert ratio.per is not None
    assert ratio.per.ids == (2,)


def test_an_unknown_name_is_refused_in_the_form_and_nothing_is_added(bench: Bench) -> None:
    adding = bench.meet.adding
    adding.begin(LimitKind.NUTRIENT, "Lysin")
    adding.add()
    assert adding.isVisible()
    assert "Lysin" in adding.fault.text()
    assert len(bench.work.library.limits(1)) == 3


def test_a_conflict_shows_no_figures_and_says_so(bench: Bench, hands: Hands) -> None:
    hands.go(bench.meet.table, PROTEIN, "maximum")
    hands.key(Qt.Key.Key_Delete)
    hands.go(bench.meet.table, PROTEIN, "minimum")
    hands.write("60")
    hands.key(Qt.Key.Key_Return)
    assert bench.frame.header.cost.figure.text() == "conflict"
    texts = [line.text for line in bench.mix.model.lines]
    assert "No mix can meet all of this." in texts
    assert all(line.amount == "" and line.cost == "" for line in bench.mix.model.lines)
    index = bench.meet.model.cell(PROTEIN, "now")
    assert index.data() == ""


def test_what_a_limit_is_about_and_its_unit_are_changed_as_one_undo(bench: Bench, hands: Hands) -> None:
    hands.go(bench.meet.table, CALCIUM, "name")
    hands.key(Qt.Key.Key_Return)
    adding = bench.meet.adding
    assert adding.name.text() == "Calcium"
    adding.unit.setCurrentText("g/kg")
    adding.minimum.setText("8")
    adding.maximum.setText("12")
    adding.add()
    limit = bench.work.library.limit(CALCIUM)
    assert (limit.unit, limit.minimum, limit.maximum) == ("g/kg", 8, 12)
    bench.work.undo()
    limit = bench.work.library.limit(CALCIUM)
    assert (limit.unit, limit.minimum, limit.maximum) == ("", 0.8, 1.2)


def test_space_says_in_a_sentence_what_a_working_wall_costs(bench: Bench, hands: Hands) -> None:
    hands.go(bench.meet.table, PROTEIN, "rail")
    hands.key(Qt.Key.Key_Space)
    note = bench.meet.table._note
    assert note is not None
    assert note.isVisible()
    assert "Crude protein holds the mix" in note.text()
    assert "USD" in note.text()


def test_the_limit_under_the_keyboard_or_the_pointer_is_told_in_a_sentence(bench: Bench, hands: Hands) -> None:
    hands.go(bench.meet.table, PROTEIN, "rail")
    told = bench.meet.telling.text()
    assert told.startswith("Crude protein holds the mix at its minimum of 19.0 %")
    assert "USD/t" in told
    assert bench.meet.telling.isVisible()
    table = bench.meet.table
    tag = table.visualRect(bench.meet.model.cell(CALCIUM, "rail")).bottomLeft()
    QTest.mouseMove(table.viewport(), tag)
    assert bench.meet.telling.text().startswith("Calcium")


def test_an_ingredient_left_out_says_at_which_price_it_comes_in(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, 4, "price")
    hands.write("900")
    hands.key(Qt.Key.Key_Return)
    index = bench.have.model.cell(4, "holds")
    hint = bench.have.model.look(index.row(), index.column()).hint
    assert hint.startswith("Peas is left out at 900.00 USD/t; below ")
    assert any(line.text == "Peas" and line.hint == hint for line in bench.mix.model.lines)


def test_with_a_practical_minimum_prices_are_said_to_hold_for_these_ingredients(
    bench: Bench, hands: Hands, qtbot: QtBot
) -> None:
    formula_id = bench.work.formula_id or 0
    with qtbot.waitSignal(bench.work.answered, timeout=20000):
        bench.work.do(lambda mill: edits.add_limit(
            mill, formula_id, LimitKind.PRACTICAL, Subject.ingredients(1), minimum=5.0))
    assert bench.work.stale or bench.work.result is not None
    qtbot.waitUntil(lambda: not bench.work.stale, timeout=20000)
    assert bench.work.result is not None
    assert bench.work.result.given_ingredients
    hands.go(bench.meet.table, PROTEIN, "rail")
    assert bench.meet.telling.text().startswith("Given these ingredients, Crude protein holds the mix")


def test_a_refused_bound_keeps_the_keyboard_and_moving_the_other_end_frees_it(bench: Bench, hands: Hands) -> None:
    table, model = bench.meet.table, bench.meet.model
    hands.go(table, PROTEIN, "minimum")
    hands.write("30")
    hands.key(Qt.Key.Key_Return)
    assert (model.owner(table.currentIndex()), model.key(table.currentIndex())) == (PROTEIN, "minimum")
    assert table._note is not None
    assert "above the maximum" in table._note.text()
    hands.write("21")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.limit(PROTEIN).minimum == 21
    hands.go(table, PROTEIN, "minimum")
    hands.write("30")
    hands.key(Qt.Key.Key_Return)
    hands.go(table, PROTEIN, "maximum")
    hands.write("40")
    hands.key(Qt.Key.Key_Return)
    assert model.cell(PROTEIN, "minimum").data() == "21.0"
    assert not model.refusals


def test_no_edit_moves_the_limits_and_the_heading_says_so_until_they_are_sorted_again(
    bench: Bench, hands: Hands
) -> None:
    bench.work.do(lambda mill: edits.add_limit(mill, 1, LimitKind.NUTRIENT, Subject.nutrient(2), minimum=0.1))
    lysine = bench.work.library.limits(1)[-1].id
    assert bench.meet.order.text() == "by what each costs"
    order = list(bench.meet.model.owners)
    assert order.index(PROTEIN) < order.index(lysine)
    hands.go(bench.meet.table, lysine, "minimum")
    hands.write("0.97")
    hands.key(Qt.Key.Key_Return)
    bench.have.table.setFocus()
    bench.work.solve()
    assert bench.meet.model.owners == order
    assert bench.meet.order.text() == "as it was sorted; sort again"
    hands.click(bench.meet.order)
    assert bench.meet.model.owners[0] == lysine
    assert bench.meet.order.text() == "by what each costs"
    hands.click(bench.meet.order)
    assert bench.meet.order.text() == "as entered"


def test_choosing_a_formula_sorts_its_limits(bench: Bench) -> None:
    bench.work.do(lambda mill: edits.add_limit(mill, 1, LimitKind.NUTRIENT, Subject.nutrient(2), minimum=0.97))
    lysine = bench.work.library.limits(1)[-1].id
    assert bench.meet.model.owners[-1] == lysine
    bench.work.choose(2)
    bench.work.choose(1)
    assert bench.meet.model.owners[0] == lysine
    assert bench.meet.order.text() == "by what each costs"


@pytest.mark.parametrize(("text", "odd"), [("1.9", False), ("1.85", True), ("23", False)])
def test_a_bound_ten_times_off_is_taken_and_said(bench: Bench, hands: Hands, text: str, odd: bool) -> None:
    hands.go(bench.meet.table, PROTEIN, "minimum")
    hands.write(text)
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.limit(PROTEIN).minimum == float(text)
    assert bench.strip.isVisible() is odd
    if odd:
        assert "Crude protein was 19 and is now 1.85" in bench.strip.list.text()


def test_an_ingredient_that_no_price_brings_in_is_not_given_a_price_below_zero(bench: Bench) -> None:
    bench.work.do(lambda mill: edits.set_price_per_t(mill, 4, 900.0, bench.work.on))
    result = bench.work.result
    assert result is not None
    ingredients = [replace(one, break_even_price=-1105.0) if one.name == "Peas" else one for one in result.ingredients]
    lines = lines_of(replace(result, ingredients=tuple(ingredients)), frozenset(), frozenset())
    (line,) = [line for line in lines if line.text == "Peas" and line.cost]
    assert line.cost == "not at any price above 0, now 900.00"
    assert line.hint == "Peas is left out at 900.00 USD/t; it does not come in at any price above 0."
