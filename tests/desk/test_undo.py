"""Everything that the window can change, done, undone and redone, gives equal records each time."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.rail.geometry import End
from blendapp.domain.formulas import Admits, Animal, LimitKind
from blendapp.services import workbook
from tests.desk.arriving import read
from tests.desk.conftest import Hands


def typed(key: str, text: str, owner: int = 1) -> Callable[[Bench, Path], None]:
    def do(bench: Bench, _folder: Path) -> None:
        column_set = "composition" if key.startswith("nutrient") or key == "dry_matter_percent" else (
            "prices" if key in ("price", "quoted", "stock_kg") else "keeping")
        bench.have.show_set(column_set)
        assert bench.have.model.setData(bench.have.model.cell(owner, key), text)

    return do


def asked(run: str, answer: str) -> Callable[[Bench, Path], None]:
    def do(bench: Bench, _folder: Path) -> None:
        bench.commands.run(run)
        bench.ask.field.setText(answer)
        bench.ask.take()
        assert not bench.ask.isVisible()

    return do


def paste(bench: Bench, _folder: Path) -> None:
    QApplication.clipboard().setText("201\t\t5\n421\t\t6")
    bench.have.table.go_to(1, "price")
    bench.have.table.paste()


def add_limit(bench: Bench, _folder: Path) -> None:
    bench.meet.adding.begin(LimitKind.GROUP, "Maize + Peas")
    bench.meet.adding.maximum.setText("95")
    bench.meet.adding.add()


def take_prices(bench: Bench, folder: Path) -> None:
    path = folder / "list.csv"
    path.write_text("Ingredient,Price,Unit\nMaize,210,t\nPeas,300,t\n")
    read(bench, path)
    bench.prices.apply()


def bring_in_workbook(bench: Bench, folder: Path) -> None:
    path = folder / "library.xlsx"
    workbook.export_workbook(bench.work.library, path, bench.work.on)
    bench.have.remove(4)
    bench.files.ask_open = lambda _title, _kinds: str(path)
    bench.commands.run("import")


def scale(change: Callable[[Bench], Any]) -> Callable[[Bench, Path], None]:
    def do(bench: Bench, _folder: Path) -> None:
        bench.show_mill()
        change(bench)

    return do


def change_scale(bench: Bench) -> None:
    model = bench.mill.model("scale")
    assert model.setData(model.cell(1, "step_kg"), "2")


def on_history(bench: Bench, job: Callable[[], object]) -> None:
    """Do a job on the price in force of the first ingredient."""
    bench.show_history(1)
    job()


def add_price(bench: Bench, _folder: Path) -> None:
    bench.show_history(1)
    form = bench.history.form
    form.price.setText("9 / cwt")
    form.supplier.box.setCurrentIndex(form.supplier.box.count() - 1)
    form.supplier.name.setText("Bay Grain")
    form.add.emit()


def change_days(bench: Bench, _folder: Path) -> None:
    bench.show_history(1)
    owner = bench.history.rows.owners[0]
    assert bench.history.rows.setData(bench.history.rows.cell(owner, "valid_to"), "+7")


def buy_from(bench: Bench, _folder: Path) -> None:
    bench.show_history(1)
    suppliers = bench.history.form.buy
    suppliers.box.setCurrentIndex(suppliers.box.count() - 1)
    suppliers.name.setText("Bay Grain")
    suppliers.chosen.emit()


def set_usual_change(bench: Bench, _folder: Path) -> None:
    bench.show_memory()
    bench.memory.percent.setText("20 %")
    bench.memory.set_change.click()


def keep_name(bench: Bench, _folder: Path) -> None:
    bench.show_memory()
    bench.memory.source.setText("Bay Grain.csv")
    bench.memory.name.setText("Corn no 2")
    bench.memory.keep.click()


ACTIONS: dict[str, Callable[[Bench, Path], Any]] = {
    "a price": typed("price", "233"),
    "a price as quoted": typed("quoted", "21 / 100 kg"),
    "a price withdrawn": typed("price", ""),
    "stock": typed("stock_kg", "1200"),
    "a name": typed("name", "Yellow maize"),
    "a class": typed("class_name", "Cereal"),
    "tags": typed("tags", "only when listed, medicated"),
    "a scale of an ingredient": typed("scale_id", ""),
    "dry matter": typed("dry_matter_percent", "88.5"),
    "a value": typed("nutrient 1", "9.2 DM"),
    "a value forgotten": typed("nutrient 1", ""),
    "a pasted block": paste,
    "cells cleared": lambda bench, _folder: bench.have._clear([(1, "price"), (2, "price"), (2, "stock_kg")]),
    "a price dragged": lambda bench, _folder: bench.have._give((1, "holds"), End.MARK, 222.0),
    "an ingredient added": lambda bench, _folder: bench.have.add_ingredient(),
    "an ingredient removed": lambda bench, _folder: bench.have.remove(4),
    "an ingredient admitted": lambda bench, _folder: bench.have.admit(2),
    "an ingredient off the list": lambda bench, _folder: bench.have.unlist(1),
    "a nutrient added": asked("add nutrient", "Copper (mg/kg)"),
    "a nutrient that may be negative": lambda bench, _folder: bench.records.turn_never_negative(2),
    "a nutrient removed": lambda bench, _folder: bench.records.remove_nutrient(2),
    "a bound": lambda bench, _folder: bench.meet.model.setData(bench.meet.model.cell(1, "minimum"), "18"),
    "a bound opened": lambda bench, _folder: bench.meet._clear([(1, "maximum")]),
    "a bound dragged": lambda bench, _folder: bench.meet._give((1, "rail"), End.MINIMUM, 20.0),
    "a limit added": add_limit,
    "a limit removed": lambda bench, _folder: bench.meet.remove(2),
    "a formula made": asked("new formula", "Starter"),
    "a formula copied": asked("copy formula", "Grower 2"),
    "a formula renamed": asked("rename formula", "Grower for spring"),
    "a formula removed": lambda bench, _folder: bench.commands.run("remove formula"),
    "what a formula is for": lambda bench, _folder: bench.meet.about._set(animal=Animal.PIG, admits=Admits.LISTED),
    "the mill": lambda bench, _folder: bench.mill.facts._set(name="Hill mill", ton_means="short ton"),
    "a scale added": scale(lambda bench: bench.mill.add("scale")),
    "a mixer added": scale(lambda bench: bench.mill.add("mixer")),
    "a scale changed": scale(change_scale),
    "a bin added": scale(lambda bench: bench.mill.add("bin")),
    "a step added": scale(lambda bench: bench.mill.add("own step")),
    "a price list": take_prices,
    "a price in the history": add_price, "days of a price": change_days,
    "a price withdrawn in the history": lambda bench, _folder: on_history(bench, bench.history._withdraw),
    "a price ended": lambda bench, _folder: on_history(bench, bench.history._end),
    "whom it is bought from": buy_from,
    "a usual change": set_usual_change, "another name": keep_name,
    "a workbook": bring_in_workbook,
}


def records(bench: Bench) -> dict[str, dict[int, Any]]:
    return {kind: dict(found) for kind, found in bench.work.library.records.items()}


@pytest.mark.parametrize("name", ACTIONS)
def test_what_is_done_is_undone_and_redone_whole(bench: Bench, tmp_path: Path, name: str) -> None:
    before = records(bench)
    entries = len(bench.work.mill.store.entries())
    ACTIONS[name](bench, tmp_path)
    after = records(bench)
    assert after != before, "the action changed nothing"
    steps = len(bench.work.mill.store.entries()) - entries
    assert steps == (2 if name == "a workbook" else 1)
    for _step in range(steps):
        bench.work.undo()
    assert records(bench) == before
    for _step in range(steps):
        bench.work.redo()
    assert records(bench) == after
    # The file holds what the window holds.
    stored = bench.work.mill.store.read_all()
    assert {kind: {one.id: one for one in found} for kind, found in stored.items()} == after


def test_the_menu_and_the_finder_name_what_undo_and_redo_take_back(bench: Bench, hands: Hands) -> None:
    hands.go(bench.have.table, 1, "price")
    hands.write("211")
    hands.key(Qt.Key.Key_Return)
    undo, redo = bench.commands.actions["undo"], bench.commands.actions["redo"]
    bench.commands.fill(bench.menu)
    assert undo.text().startswith("Undo: ")
    assert "Maize" in undo.text()
    assert redo.text() == "Redo"
    assert any(thing.words == undo.text() for thing in bench.commands.found())
    bench.work.undo()
    bench.commands.fill(bench.menu)
    assert redo.text().startswith("Redo: ")
    assert "Maize" in redo.text()
    bench.commands.all_able()
