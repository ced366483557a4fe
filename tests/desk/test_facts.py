"""Facts that batches need of formulas and ingredients: loss, dry matter of the product, maker, opened, supplier."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.table.names import NameField
from blendapp.domain.formulas import Admits
from blendapp.services import edits, plant
from tests.desk.conftest import Hands


def test_loss_and_dry_matter_of_the_product_are_stored_as_they_are_left(bench: Bench, hands: Hands) -> None:
    bench.commands.run("about formula")
    about = bench.meet.about
    for key, text in (("loss_percent", "1.5"), ("product_dry_matter_percent", "88 %")):
        about.numbers[key].setFocus()
        hands.write(text)
        hands.key(Qt.Key.Key_Return)
    formula = bench.work.formula
    assert formula is not None
    assert (formula.loss_percent, formula.product_dry_matter_percent) == (1.5, 88.0)
    about.numbers["loss_percent"].setFocus()
    about.numbers["loss_percent"].selectAll()
    hands.write("100")
    hands.key(Qt.Key.Key_Return)
    assert about.fault.isVisible()
    assert "leaves nothing" in about.fault.text()
    assert bench.work.formula == formula


def test_who_makes_an_ingredient_is_typed_and_only_then_can_it_be_opened(bench: Bench, hands: Hands) -> None:
    bench.have.show_set("keeping")
    table = bench.have.table
    hands.go(table, 4, "opened")
    hands.write("y")
    hands.key(Qt.Key.Key_Return)
    look = table.grid.look(table.grid.owners.index(4), table.grid.column_of("opened") or 0)
    assert "Only an ingredient that a formula makes" in look.fault
    hands.key(Qt.Key.Key_Escape)
    hands.go(table, 4, "made_by_formula_id")
    hands.write("fin")
    field = QApplication.focusWidget()
    assert isinstance(field, NameField)
    assert field.offered == ["Finisher"]
    hands.key(Qt.Key.Key_Return)
    # Finisher admits every ingredient, Peas among them: it would go into itself.
    made = table.grid.look(table.grid.owners.index(4), table.grid.column_of("made_by_formula_id") or 0)
    assert "go into itself" in made.fault


def test_from_whom_an_ingredient_is_bought_is_chosen_by_name(bench: Bench, hands: Hands) -> None:
    bench.work.do(lambda mill: plant.add_supplier(mill, "Marsh & Sons"))
    bench.have.show_set("keeping")
    hands.go(bench.have.table, 1, "supplier_id")
    hands.write("marsh")
    hands.key(Qt.Key.Key_Return)
    assert bench.work.library.ingredient(1).supplier_id == 1
    hands.go(bench.have.table, 1, "supplier_id")
    hands.key(Qt.Key.Key_Delete)
    assert bench.work.library.ingredient(1).supplier_id is None


def test_a_made_ingredient_takes_composition_and_price_from_its_formula_as_one_undo(bench: Bench, hands: Hands) -> None:
    work = bench.work
    work.do(lambda mill: edits.set_admits(mill, 2, Admits.LISTED))
    work.do(lambda mill: edits.admit(mill, 2, 1))
    work.do(lambda mill: edits.admit(mill, 2, 2))
    bench.have.show_set("keeping")
    hands.go(bench.have.table, 4, "made_by_formula_id")
    hands.write("finisher")
    hands.key(Qt.Key.Key_Return)
    assert work.library.ingredient(4).made_by_formula_id == 2
    assert work.library.price_per_t(4, work.on) is None
    hands.go(bench.have.table, 4, "name")
    entries = len(work.mill.store.entries())
    bench.find_anything()
    hands.write("take composition")
    field = QApplication.focusWidget()
    assert field is bench.finder.field
    assert bench.finder.found.found[0].words == "Take composition and price of Peas from its formula"
    hands.key(Qt.Key.Key_Return)
    assert len(work.mill.store.entries()) == entries + 1
    value = work.library.value(4, 1)
    assert value is not None
    assert value.amount == pytest.approx(15.0)
    price = work.library.price_per_t(4, work.on)
    assert price is not None
    assert 200 < price < 420
    assert "Finisher" in bench.strip.words.text()
    bench.commands.run("compare made")
    assert "Every made ingredient" in bench.strip.words.text()
    work.do(lambda mill: edits.set_value(mill, 4, 1, 16.0))
    bench.commands.run("compare made")
    assert "Peas is no longer what Finisher makes" in bench.strip.list.text()
    work.undo()
    work.undo()
    assert work.library.value(4, 1).amount == 22.0  # type: ignore[union-attr]
    actions = [one.text() for one in bench.have.row_menu(4).actions()]
    assert "Take composition and price of Peas from its formula" in actions
