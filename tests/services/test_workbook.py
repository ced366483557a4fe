"""Workbooks and price lists through the services: whole, as one undo, or not at all."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import openpyxl
import pytest

from blendapp.domain.formulas import Animal
from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.services import edits
from blendapp.services.mill import Mill, MillFileError
from blendapp.services.prices import apply_price_list, read_price_list
from blendapp.services.workbook import export_workbook, import_workbook, new_mill
from tests.mills import TODAY, Maker

Opened = Callable[[Library], Mill]


def library() -> Library:
    make = Maker(currency="EUR")
    make.nutrient("Protein", key="crude protein")
    make.nutrient("Energy", "MJ/kg")
    make.ingredient("Maize", 200.0, {"Protein": 8.5, "Energy": 14.1})
    make.ingredient("Soybean meal", 400.0, {"Protein": 46.0})
    feed = make.formula("Mash", animal=Animal.POULTRY)
    make.limit(feed, "nutrient", "Protein", 16.0)
    make.limit(feed, "group", ["Maize", "Soybean meal"], maximum=90.0)
    return make.library


def workbook(path: Path, mill: Mill) -> openpyxl.Workbook:
    export_workbook(mill.library, path, TODAY)
    return openpyxl.load_workbook(path)


def put(book: openpyxl.Workbook, sheet: str, row: int, heading: str, value: object) -> None:
    page = book[sheet]
    heads = [cell.value for cell in page[1]]
    page.cell(row, heads.index(heading) + 1, value)


def test_an_import_into_an_open_mill_is_one_undo(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    before = mill.store.dump()
    book = workbook(tmp_path / "a.xlsx", mill)
    put(book, "Ingredients", 2, "Price", 225.0)
    put(book, "Ingredients", 2, "Protein (%)", 9.0)
    put(book, "Ingredients", 4, "Ingredient", "Wheat")
    put(book, "Ingredients", 4, "Price", 180.0)
    put(book, "Ingredients", 4, "Price per", "t")
    put(book, "Limits", 2, "Minimum", 17.0)
    book.save(tmp_path / "a.xlsx")
    edit, warnings = import_workbook(mill, tmp_path / "a.xlsx", TODAY)
    assert [str(w) for w in warnings] == []
    assert edit.what == "Import a.xlsx"
    found = mill.library
    assert found.price_per_t(1, TODAY) == 225.0
    assert found.value(1, 1).amount == 9.0  # type: ignore[union-attr]
    assert found.named("ingredient", "Wheat") is not None
    assert [limit.minimum for limit in found.limits(1)] == [17.0, None]
    assert mill.store.read_all()["ingredient"] == found.ingredients
    mill.undo()
    assert mill.store.dump() == before
    mill.redo()
    assert mill.library.named("ingredient", "Wheat") is not None


def test_an_import_of_what_is_there_already_changes_nothing(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    before = mill.store.dump()
    export_workbook(mill.library, tmp_path / "a.xlsx", TODAY)
    import_workbook(mill, tmp_path / "a.xlsx", TODAY)
    after = mill.store.dump()
    assert {kind: rows for kind, rows in after.items() if kind != "limit"} == {
        kind: rows for kind, rows in before.items() if kind != "limit"
    }
    without_ids = [[{**row, "id": 0} for row in dump["limit"]] for dump in (before, after)]
    assert without_ids[0] == without_ids[1]


def test_identifiers_that_an_import_used_are_not_used_again(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    book = workbook(tmp_path / "a.xlsx", mill)
    put(book, "Ingredients", 4, "Ingredient", "Wheat")
    book.save(tmp_path / "a.xlsx")
    import_workbook(mill, tmp_path / "a.xlsx", TODAY)
    wheat = mill.library.named("ingredient", "Wheat")
    mill.undo()
    barley = edits.add_ingredient(mill, "Barley").changes[0].id
    assert barley > wheat.id  # type: ignore[union-attr]


def test_a_workbook_with_faults_changes_nothing_and_tells_all_of_them(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    before = mill.store.dump()
    book = workbook(tmp_path / "a.xlsx", mill)
    put(book, "Ingredients", 2, "Dry matter %", 140.0)
    put(book, "Limits", 2, "Unit", "furlong")
    book.save(tmp_path / "a.xlsx")
    with pytest.raises(Refused) as refusal:
        import_workbook(mill, tmp_path / "a.xlsx", TODAY)
    places = {(p.place.file, p.place.sheet, p.place.row) for p in refusal.value.problems}
    assert {("a.xlsx", "Ingredients", 2), ("a.xlsx", "Limits", 2)} <= {
        (Path(file).name, sheet, row) for file, sheet, row in places
    }
    assert mill.store.dump() == before
    assert mill.undo_text is None


def test_a_new_mill_from_a_workbook_holds_what_it_was_exported_from(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    export_workbook(mill.library, tmp_path / "a.xlsx", TODAY)
    made, warnings = new_mill(tmp_path / "new.mill", tmp_path / "a.xlsx", on=TODAY)
    try:
        assert [str(w) for w in warnings] == []
        assert made.library.mill == replace(mill.library.mill, name=made.library.mill.name)
        for kind in ("nutrient", "ingredient", "formula"):
            assert [replace(r, id=0) for r in made.library.all(kind)] == [
                replace(r, id=0) for r in mill.library.all(kind)
            ]
        assert made.undo_text is None
    finally:
        made.close()


def test_a_new_mill_never_overwrites_and_leaves_nothing_behind_a_fault(tmp_path: Path) -> None:
    (tmp_path / "there.mill").write_text("mine")
    with pytest.raises((Refused, MillFileError)):
        new_mill(tmp_path / "there.mill")
    assert (tmp_path / "there.mill").read_text() == "mine"
    with pytest.raises(Refused):
        new_mill(tmp_path / "new.mill", tmp_path / "gone.xlsx")
    assert [p.name for p in tmp_path.iterdir()] == ["there.mill"]


def test_a_price_list_is_recorded_whole_with_a_dated_record_and_is_one_undo(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    (tmp_path / "monday.csv").write_text("Ingredient,Price,Unit\nMaize,210,t\nSoybean meal,21,cwt\nOatmeal,9,t\n")
    before = mill.store.dump()
    reading = read_price_list(mill, tmp_path / "monday.csv", TODAY)
    assert mill.store.dump() == before, "reading writes nothing"
    edit = apply_price_list(mill, reading, TODAY)
    (kept,) = mill.library.all("price_list")
    assert (kept.file_name, kept.accepted, len(kept.digest)) == ("monday.csv", len(reading.accepted), 64)
    for row in reading.accepted:
        assert row.ingredient_id is not None
        quote = mill.library.quote_in_force(row.ingredient_id, TODAY)
        assert quote is not None
        assert quote.price_per_t == pytest.approx(row.price_per_t, rel=1e-12)
        assert (quote.source, quote.price_list_id, quote.recorded) == ("monday.csv", kept.id, TODAY)
    assert mill.library.price_per_t(1, TODAY) == 210.0
    assert edit.touches("quote")
    mill.undo()
    assert mill.store.dump() == before
    mill.redo()
    assert mill.library.price_per_t(1, TODAY) == 210.0


def test_a_price_list_without_an_accepted_row_is_refused(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    (tmp_path / "monday.csv").write_text("Ingredient,Price,Unit\nOatmeal,9,t\n")
    reading = read_price_list(mill, tmp_path / "monday.csv", TODAY)
    with pytest.raises(Refused, match=r"No row of monday\.csv was accepted"):
        apply_price_list(mill, reading, TODAY)
    assert mill.library.all("price_list") == []
