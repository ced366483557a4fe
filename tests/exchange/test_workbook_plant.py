"""Sites, suppliers, meters, lots, bins and mixing steps in the exchange workbook."""

from __future__ import annotations

import datetime
from pathlib import Path
from typing import Any

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from blendapp.domain.checks import faults
from blendapp.domain.library import Library
from blendapp.domain.mills import MillInfo
from blendapp.domain.plant import Bin, Scale, Site
from blendapp.domain.problems import Problems, Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change
from blendapp.exchange import read_workbook
from blendapp.exchange.workbook_tables import tables_of
from tests.exchange.altered_mill import Reader, said
from tests.exchange.made_files import Rows, small_mill, write_sheets
from tests.exchange.test_workbook_faults import refused, set_cell
from tests.mills import TODAY

DAY = datetime.date(2026, 2, 20)


@pytest.fixture
def mill(tmp_path: Path) -> Reader:
    return Reader(tmp_path)


def equipped() -> dict[str, Rows]:
    """The small mill with everything that these sheets hold."""
    sheets = small_mill()
    sheets["Mill"] += [["Site", "north"], ["Sheets in", "LB"], ["Paper", "Letter"]]
    sheets["Sites"] = [["Site"], ["North"], ["South"]]
    sheets["Suppliers"] = [["Supplier", "Note"], ["Vela Grain", "Mondays"], ["Moor Oils", None]]
    sheets["Scales"] = [
        ["Scale", "Step kg", "Least kg", "Step l", "Least l", "Greatest l", "Site"],
        ["Hopper", 5, 20, None, None, None, "North"], ["Fat pump", None, None, 0.5, 2, 200, None],
    ]
    sheets["Mixers"] = [["Mixer", "Greatest kg", "Site"], ["Drum", 2000, "South"]]
    sheets["Lots"] = [
        ["Ingredient", "Lot", "Received", "Mass kg", "Supplier", "Note", "Dry matter %"],
        ["Maize", "M-7", DAY, 28000, "Vela grain", "wet", 84.5], ["Soybean meal", "M-7", *[None] * 5],
    ]
    sheets["Lot values"] = [
        ["Ingredient", "Lot", "Nutrient", "Value", "Unit", "Basis", "Source", "Date"],
        ["Maize", "m-7", "Crude protein", 84, "g/kg", None, "own laboratory", DAY],
        ["Maize", "M-7", "Crude protein", 9.6, None, "dry matter", None, None],
    ]
    sheets["Bins"] = [
        ["Bin", "Ingredient", "Lot", "Site"],
        ["1", "Maize", "M-7", "North"], ["2", "maize", None, "North"], ["1", "Soybean meal", None, "South"],
        ["3", None, None, None],
    ]
    sheets["Steps"] = [
        ["Formula", "Step", "What to do", "Minutes", "Setting"],
        [None, 2, "Mix dry", 3, "40 rpm"], [None, 1, "Grind the grain", None, None], ["Layer", None, "Press", 1.5, ""],
    ]
    return sheets


def test_every_sheet_of_the_plant_is_read(mill: Reader) -> None:
    mill.sheets = equipped()
    mill.column("Ingredients", "Supplier", ["Vela Grain", None])
    mill.column("Formulas", "Loss %", [1.5])
    mill.column("Formulas", "Product dry matter %", [88])
    library = mill.read()
    assert mill.warnings == []
    assert (library.mill.site_id, library.mill.sheet_mass, library.mill.paper) == (1, "lb", "letter")
    assert [s.name for s in library.all("site")] == ["North", "South"]
    assert [(s.name, s.note) for s in library.all("supplier")] == [("Vela Grain", "Mondays"), ("Moor Oils", "")]
    assert library.all("scale") == [
        Scale(1, "Hopper", 5, 20, site_id=1), Scale(2, "Fat pump", None, step_l=0.5, least_l=2, greatest_l=200),
    ]
    assert library.all("mixer")[0].site_id == 2
    lot = library.all("lot")[0]
    assert (lot.ingredient_id, lot.received, lot.mass_kg, lot.supplier_id, lot.note) == (1, DAY, 28000, 1, "wet")
    assert lot.dry_matter_percent == 84.5
    assert [(v.lot_id, v.amount, v.unit, v.basis, v.source, v.date) for v in library.all("lot_value")] == [
        (1, 84, "g/kg", "as fed", "own laboratory", DAY), (1, 9.6, "%", "dry matter", "", None),
    ]
    assert library.all("bin") == [
        Bin(1, "1", 1, 1, 1), Bin(2, "2", 1, None, 1), Bin(3, "1", 2, None, 2), Bin(4, "3"),
    ]
    assert [(s.text, s.minutes, s.setting) for s in library.steps_of(99)] == [
        ("Grind the grain", None, ""), ("Mix dry", 3, "40 rpm"),
    ]
    assert [(s.position, s.text, s.minutes) for s in library.steps_of(1)] == [(1, "Press", 1.5)]
    formula = library.formulas[0]
    assert (formula.loss_percent, formula.product_dry_matter_percent) == (1.5, 88)
    assert library.ingredient(1).supplier_id == 1


def test_the_same_workbook_read_again_changes_nothing(mill: Reader) -> None:
    mill.sheets = equipped()
    mill.read()
    mill.read()
    assert mill.changes == []


def test_a_workbook_without_these_sheets_and_columns_leaves_what_the_mill_has(mill: Reader) -> None:
    mill.sheets = equipped()
    before = mill.read().copy()
    mill.sheets = small_mill()
    mill.sheets["Scales"] = [["Scale", "Step kg"], ["Hopper", None], ["Fat pump", None]]
    mill.sheets["Mixers"] = [["Mixer"], ["Drum"]]
    mill.read()
    assert mill.changes == []
    assert mill.library.records == before.records


def test_a_mill_without_any_of_it_writes_no_sheet_and_no_column_for_it(mill: Reader) -> None:
    mill.sheets["Scales"] = [["Scale", "Step kg"], ["Hopper", 5]]
    tables = tables_of(mill.read(), TODAY, Problems())
    assert list(tables) == ["Mill", "Nutrients", "Ingredients", "Values", "Scales", "Mixers", "Formulas", "Limits"]
    assert tables["Scales"][0] == ["Scale", "Step kg", "Least kg", "Greatest kg", "Tolerance %", "Hand add"]
    assert tables["Formulas"][0][-1] == "Note"
    assert "Opened" not in tables["Ingredients"][0]


def test_the_plant_of_every_site_is_written_wherever_the_mill_works(mill: Reader) -> None:
    mill.sheets = equipped()
    library = mill.read()
    assert library.mill.site_id == 1
    tables = tables_of(library, TODAY, Problems())
    assert [row[0] for row in tables["Mixers"][1:]] == ["Drum"]  # of the other site
    assert len(tables["Bins"]) == 5
    assert tables["Steps"][1:3] == [[None, 1, "Grind the grain", None, ""], [None, 2, "Mix dry", 3, "40 rpm"]]


def test_a_scale_becomes_a_meter_by_a_step_in_litres_and_loses_its_bounds_in_kg(mill: Reader) -> None:
    mill.sheets = equipped()
    mill.read()
    mill.sheets["Scales"] = [["Scale", "Step kg", "Step l"], ["Hopper", None, 1], ["Fat pump", 2, None]]
    library = mill.read()
    assert library.all("scale") == [Scale(1, "Hopper", None, step_l=1, site_id=1), Scale(2, "Fat pump", 2)]


def test_rows_of_steps_replace_those_of_their_formula_and_leave_the_others(mill: Reader) -> None:
    mill.sheets = equipped()
    mill.read()
    mill.sheets["Steps"] = [["Step", "What to do"], [None, "Everything at once"]]
    library = mill.read()
    assert [s.text for s in library.steps_of(99)] == ["Everything at once"]
    assert [s.text for s in library.steps_of(1)] == ["Press"]


def test_rows_of_analyses_replace_those_of_their_lot(mill: Reader) -> None:
    mill.sheets = equipped()
    mill.read()
    mill.sheets["Lot values"] = [["Ingredient", "Lot", "Nutrient", "Value"], ["Maize", "M-7", "Crude protein", 8.8]]
    assert [(v.id, v.amount, v.unit) for v in mill.read().all("lot_value")] == [(1, 8.8, "%")]


def test_another_ingredient_in_a_bin_takes_the_lot_out(mill: Reader) -> None:
    mill.sheets = equipped()
    mill.read()
    mill.sheets["Bins"] = [["Bin", "Site", "Ingredient"], ["1", "North", "Soybean meal"]]
    found = mill.read().records["bin"][1]
    assert (found.ingredient_id, found.lot_id) == (2, None)


def test_a_bin_of_one_site_only_is_found_without_its_site(mill: Reader) -> None:
    mill.sheets = equipped()
    mill.read()
    mill.sheets["Bins"] = [["Bin", "Ingredient"], ["2", "Soybean meal"]]
    library = mill.read()
    assert (len(library.all("bin")), library.records["bin"][2].ingredient_id) == (4, 2)


def test_a_bin_without_a_site_gets_one_and_does_not_become_two(mill: Reader) -> None:
    mill.sheets = equipped()
    mill.read()
    mill.sheets["Bins"] = [["Bin", "Site"], ["3", "South"]]
    library = mill.read()
    assert (len(library.all("bin")), library.records["bin"][4].site_id) == (4, 2)


def test_an_ingredient_that_a_formula_makes_is_opened_and_closed(mill: Reader) -> None:
    mill.sheets["Ingredients"].append(["Layer premix", *[None] * 8])
    mill.column("Ingredients", "Made by formula", [None, None, "Layer"])
    mill.column("Ingredients", "Opened", [None, None, "yes"])
    library = mill.read()
    assert library.ingredient(3).opened is True
    tables = tables_of(library, TODAY, Problems())
    at = tables["Ingredients"][0].index("Opened")
    assert [row[at] for row in tables["Ingredients"]] == ["Opened", None, None, "yes"]
    mill.column("Ingredients", "Made by formula", [None, None, None])
    mill.column("Ingredients", "Opened", [None, None, None])
    assert mill.read().ingredient(3).opened is True
    mill.column("Ingredients", "Opened", [None, None, "no"])
    assert mill.read().ingredient(3).opened is False


def test_a_made_ingredient_without_the_tags_of_its_parts_is_warned_of(mill: Reader) -> None:
    mill.sheets["Ingredients"].append(["Layer premix", *[None] * 8])
    mill.column("Ingredients", "Made by formula", [None, None, "Layer"])
    mill.column("Ingredients", "Tags", [None, "medicated", None])
    mill.read()
    assert said(mill, "Ingredients:4:Tags: Layer premix may hold Soybean meal and lacks their tags: medicated.")


def test_a_price_of_the_workbook_counts_where_the_mill_works(mill: Reader) -> None:
    library = mill.read()
    library.apply([
        Change(None, Site(1, "North")), Change(None, Quote(90, 1, 300.0, site_id=1)),
        Change(library.mill, MillInfo(1, "Larkwater", site_id=1)),
    ])
    mill.column("Ingredients", "Price", [310, None])
    assert mill.read().price_per_t(1, TODAY) == 310


def test_a_lot_that_a_workbook_cannot_tell_from_another_is_left_out_and_said(mill: Reader) -> None:
    mill.sheets = equipped()
    library = mill.read()
    twin = library.all("lot")[0]
    library.apply([Change(None, type(twin)(9, 1, "m-7"))])
    problems = Problems()
    tables = tables_of(library, TODAY, problems)
    assert len(tables["Lots"]) == 3
    assert "A lot “m-7” of Maize has the name of another one" in str(problems.oddities[0])


@pytest.mark.parametrize(
    ("sheet", "row", "heading", "value", "sentence"),
    [
        ("Mill", 4, "Value", "Nort", "There is no site “Nort”; add it to the sheet Sites. Did you mean “North”?"),
        ("Mill", 5, "Value", "stone", "“stone” is not known here; use one of kg, lb."),
        ("Mill", 6, "Value", "A3", "“A3” is not known here; use one of A4, letter."),
        ("Sites", 3, "Site", "north", "“north” stands in row 2 and again in row 3"),
        ("Scales", 2, "Step kg", 0, "Step kg must be above 0 kg; 0 is not."),
        ("Scales", 3, "Step l", 0, "Step l must be above 0 l; 0 is not."),
        ("Scales", 2, "Step l", 1, "A scale has a step in kg or in l, not both; clear one of them."),
        ("Scales", 3, "Least kg", 5, "A liquid meter is bounded in l"),
        ("Scales", 3, "Least l", 300, "The least dose 300 l is above the greatest 200 l"),
        ("Scales", 2, "Site", "Norht", "There is no site “Norht”; add it to the sheet Sites. Did you mean “North”?"),
        ("Mixers", 2, "Site", "East", "There is no site “East”; add it to the sheet Sites."),
        ("Lots", 2, "Ingredient", "Mais", "There is no ingredient “Mais”; add it to the sheet Ingredients. Did you"),
        ("Lots", 2, "Lot", None, "A name is needed here."),
        ("Lots", 2, "Supplier", "Vela Grian", "There is no supplier “Vela Grian”; add it to the sheet Suppliers. Did"),
        ("Lots", 2, "Dry matter %", 101, "Dry matter % must lie between 0 and 100 %; 101 does not."),
        ("Lots", 2, "Received", "soon", "“soon” is no date; write it like 2024-03-31."),
        ("Lot values", 2, "Lot", "M-8", "There is no lot “M-8” of Maize; add it to the sheet Lots. Did you mean “M-7”"),
        ("Lot values", 2, "Unit", "MJ/kg", "MJ/kg does not measure Crude protein"),
        ("Lot values", 2, "Value", -1, "Crude protein can never be negative; -1 is."),
        ("Bins", 2, "Ingredient", "Maise", "There is no ingredient “Maise”; add it to the sheet Ingredients. Did you"),
        ("Bins", 4, "Lot", "X", "There is no lot “X” of Soybean meal; add it to the sheet Lots."),
        ("Bins", 5, "Lot", "M-7", "The row names a lot and no ingredient; name the ingredient that it is of."),
        ("Bins", 3, "Bin", "1", "“1” stands in row 2 and again in row 3; rename or delete one of them."),
        ("Steps", 4, "Formula", "Layers", "There is no formula “Layers”; add it to the sheet Formulas. Did you mean"),
        ("Steps", 3, "Step", 2, "Step 2 stands in row 2 and again in row 3; give one of them another number."),
        ("Steps", 3, "Step", 1.5, "A whole number is needed here; 1.5 is none."),
        ("Steps", 3, "What to do", None, "A step says what to do."),
        ("Steps", 2, "Minutes", 0, "Minutes must be above 0 min; 0 is not."),
        ("Formulas", 2, "Loss %", 100, "A loss of 100 % leaves nothing; enter less."),
        ("Formulas", 2, "Product dry matter %", 120, "The dry matter of the product lies above 0 and at most 100 %."),
        ("Ingredients", 2, "Supplier", "Moor oil", "There is no supplier “Moor oil”; add it to the sheet Suppliers."),
        ("Ingredients", 2, "Opened", "yes", "Only an ingredient that a formula makes can be opened"),
    ],
)
def test_a_cell_of_the_plant_that_cannot_be_taken_is_refused_at_its_place(
    tmp_path: Path, sheet: str, row: int, heading: str, value: Any, sentence: str
) -> None:
    sheets = equipped()
    set_cell(sheets, sheet, row, heading, value)
    lines = refused(tmp_path, sheets)
    assert any(line.startswith(f"b.xlsx:{sheet}:{row}:{heading}: {sentence}") for line in lines), lines


def test_a_scale_without_either_step_hides_none_of_its_faults(tmp_path: Path) -> None:
    sheets = equipped()
    sheets["Scales"] = [["Scale", "Step kg", "Least kg", "Least l"], ["A", None, None, "few"], ["B", None, "few", None]]
    assert {line.split(": ")[0].removeprefix("b.xlsx:") for line in refused(tmp_path, sheets)} == {
        "Scales:2:Step kg", "Scales:2:Least l", "Scales:3:Step kg", "Scales:3:Least kg",
    }


def test_all_faults_of_the_plant_are_told_together(tmp_path: Path) -> None:
    sheets = equipped()
    for sheet, row, heading, value in (
        ("Scales", 2, "Step kg", 0), ("Mixers", 2, "Site", "East"), ("Lots", 2, "Mass kg", "much"),
        ("Bins", 2, "Site", "East"), ("Steps", 2, "Minutes", "few"),
    ):
        set_cell(sheets, sheet, row, heading, value)
    places = {line.split(": ")[0] for line in refused(tmp_path, sheets)}
    assert places == {
        "b.xlsx:Scales:2:Step kg", "b.xlsx:Mixers:2:Site", "b.xlsx:Lots:2:Mass kg", "b.xlsx:Bins:2:Site",
        "b.xlsx:Steps:2:Minutes",
    }


def test_several_bins_of_one_name_need_a_site_to_be_told_apart(tmp_path: Path, mill: Reader) -> None:
    mill.sheets = equipped()
    library = mill.read()
    sheets = small_mill()
    sheets["Bins"] = [["Bin", "Ingredient"], ["1", "Maize"]]
    assert refused(tmp_path, sheets, library) == [
        "b.xlsx:Bins:2:Site: Several bins are called “1”; name the site of this one."
    ]


def test_an_unknown_item_of_the_mill_is_left_alone_with_the_one_that_was_meant(mill: Reader) -> None:
    mill.sheets["Mill"].append(["Sheet in", "lb"])
    assert mill.read().mill.sheet_mass == "kg"
    assert said(mill, "Did you mean “Sheets in”")
    assert isinstance(mill.library, Library)


_PLANT = ("Mill", "Sites", "Suppliers", "Scales", "Mixers", "Lots", "Lot values", "Bins", "Steps")
_ANYTHING = st.one_of(
    st.none(), st.booleans(), st.integers(-5, 10**6), st.floats(allow_nan=False, allow_infinity=False),
    st.sampled_from(["", " ", "0", "yes", "North", "Maize", "M-7", "1", "2", "Layer", "2026-02-30", "=1+1", "9" * 400]),
    st.text(st.characters(codec="utf-8", exclude_categories=("Cs", "Cc")), max_size=8), st.dates(),
)


@given(st.data())
@settings(max_examples=60, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_whatever_stands_in_cells_of_the_plant_is_read_or_refused_at_its_place(
    tmp_path: Path, data: st.DataObject
) -> None:
    sheets = equipped()
    for _cell in range(data.draw(st.integers(1, 4))):
        rows = sheets[data.draw(st.sampled_from(_PLANT))]
        row = rows[data.draw(st.integers(1, len(rows) - 1))]
        row[data.draw(st.integers(0, len(row) - 1))] = data.draw(_ANYTHING)
    path = write_sheets(tmp_path / "any.xlsx", sheets)
    library, problems = Library(), []
    try:
        library.apply(read_workbook(path, library, {}, TODAY).changes)
    except Refused as refusal:
        problems = refusal.problems
    assert all(problem.place.sheet and problem.place.row for problem in problems)
    assert not [fault for kind in library.records for one in library.all(kind) for fault in faults(one, library)]
    assert problems or read_workbook(path, library, {}, TODAY).changes == []
