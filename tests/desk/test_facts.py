"""Facts that batches need of formulas and ingredients: loss, dry matter of the product, maker, opened, supplier."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.table.names import NameField
from blendapp.services import plant
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
