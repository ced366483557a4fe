"""Every fault of an exchange workbook is refused at once, each with its place and the mend."""

from __future__ import annotations

import datetime
from pathlib import Path
from typing import Any

import pytest

from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.exchange import read_workbook
from tests.exchange.made_files import Rows, small_mill, write_sheets
from tests.mills import TODAY


def refused(folder: Path, sheets: dict[str, Rows], library: Library | None = None) -> list[str]:
    """The sentences for which a workbook is refused."""
    path = write_sheets(folder / "b.xlsx", sheets)
    with pytest.raises(Refused) as caught:
        read_workbook(path, library or Library(), {}, TODAY)
    return [str(problem) for problem in caught.value.problems]


def set_cell(sheets: dict[str, Rows], sheet: str, row: int, heading: str, value: Any) -> None:
    """Fills a cell; row as the spreadsheet shows it. A heading that is not there is added."""
    rows = sheets[sheet]
    if heading not in rows[0]:
        for cells in rows:
            cells.append(heading if cells is rows[0] else None)
    rows[row - 1][rows[0].index(heading)] = value


def test_all_faults_are_told_together_in_the_order_of_the_reading(tmp_path: Path) -> None:
    sheets = small_mill()
    set_cell(sheets, "Nutrients", 3, "Unit", "MJ/lbs")
    set_cell(sheets, "Ingredients", 2, "Dry matter %", 187)
    set_cell(sheets, "Ingredients", 3, "Price per", "sack")
    set_cell(sheets, "Limits", 3, "Minimum", 50)
    set_cell(sheets, "Limits", 4, "Name", "Crude protien")
    places = [line.rsplit(": ", 1)[0].split(": ")[0] for line in refused(tmp_path, sheets)]
    assert places == [
        "b.xlsx:Nutrients:3:Unit", "b.xlsx:Ingredients:2:Dry matter %", "b.xlsx:Ingredients:3:Price per",
        "b.xlsx:Limits:3:Minimum", "b.xlsx:Limits:4:Name",
    ]


@pytest.mark.parametrize(
    ("sheet", "row", "heading", "value", "sentence"),
    [
        ("Ingredients", 2, "Dry matter %", 101, "Dry matter % must lie between 0 and 100 %; 101 does not."),
        ("Ingredients", 2, "Dry matter %", "high", "“high” is not a number"),
        ("Ingredients", 2, "Dry matter %", True, "holds a truth value and not a number"),
        ("Ingredients", 2, "Dry matter %", datetime.date(2026, 1, 1), "holds a date or a time and not a number"),
        ("Ingredients", 2, "Crude protein (%)", "8,5", "“8,5” is not a number; type it with a decimal point"),
        ("Ingredients", 2, "Crude protein (%)", "1e400", "is not a number"),
        ("Ingredients", 2, "Crude protein (%)", -1, "Crude protein can never be negative; -1 is."),
        ("Ingredients", 2, "Price", "call", "“call” is not a number"),
        ("Ingredients", 2, "Price per", "ton", "“ton” may be a short ton, a long ton or a tonne"),
        ("Ingredients", 2, "Price per", "tone", "Did you mean"),
        ("Ingredients", 3, "Price per", "bu", "needs the weight of a bushel"),
        ("Ingredients", 2, "Basis", "wet", "“wet” is not known here; use one of as fed, dry matter."),
        ("Ingredients", 2, "Tags", "medicated, ionofore", "“ionofore” is not known here"),
        ("Ingredients", 2, "Tags", "ionofore", "Did you mean “ionophore”?"),
        ("Ingredients", 2, "Scale", "Hopper", "There is no scale “Hopper”; add it to the sheet Scales."),
        ("Ingredients", 2, "Made by formula", "Starter", "There is no formula “Starter”"),
        ("Ingredients", 2, "Bushel lb", 0, "Bushel lb must be above 0"),
        ("Ingredients", 2, "Ingredient", None, "A name is needed here."),
        ("Ingredients", 2, "Note", "=A1", "The formula in this cell has no stored result"),
        ("Nutrients", 2, "Unit", "percent", "The unit “percent” is not known"),
        ("Nutrients", 2, "Key", "protein, crude", "The key “protein, crude” is not known"),
        ("Nutrients", 2, "Never negative", "perhaps", "“perhaps” is neither yes nor no"),
        ("Nutrients", 2, "Nutrient", "Dry matter", "“Dry matter” is built in; choose another name."),
        ("Formulas", 2, "Amounts", "mix", "“mix” is not known here; use one of blend, ration."),
        ("Formulas", 2, "Animal", "hen", "“hen” is not known here"),
        ("Formulas", 2, "Admits", "some", "“some” is not known here; use one of listed, all."),
        ("Formulas", 2, "Batch kg", 0, "Batch kg must be above 0 kg; 0 is not."),
        ("Limits", 2, "Formula", "Layers", "There is no formula “Layers”"),
        ("Limits", 2, "Formula", None, "The row names no formula"),
        ("Limits", 2, "Kind", "nutriment", "Did you mean “nutrient”?"),
        ("Limits", 2, "Kind", None, "The row names no kind"),
        ("Limits", 2, "Name", "Maise", "There is no ingredient “Maise”"),
        ("Limits", 2, "Name", "Maise", "Did you mean “Maize”?"),
        ("Limits", 3, "Maximum", 140, "An inclusion cannot be above the whole; 140 % is."),
        ("Limits", 3, "Minimum", -2, "An inclusion cannot be below 0; -2 is."),
        ("Limits", 3, "Minimum", 60, "The minimum 60 is above the maximum 40; correct one of them."),
        ("Limits", 3, "Unit", "kg/day", "The unit “kg/day” is not known here"),
        ("Limits", 3, "Basis", "dry matter", "A basis belongs to rows of the kind nutrient"),
        ("Limits", 3, "Per", "Maize", "Per belongs to rows of the kind ratio"),
        ("Limits", 4, "Unit", "MJ/kg", "does not measure what % measures"),
        ("Limits", 4, "Basis", "per day", "A blend has no amount per day"),
        ("Limits", 4, "Basis", "at 120 % dry matter", "A stated dry matter must lie above 0 and at most 100 %"),
        ("Limits", 4, "Basis", "per kg", "The basis “per kg” is not known"),
        ("Mill", 3, "Value", "dollars", "is no currency code"),
    ],
)
def test_a_cell_that_cannot_be_taken_is_refused_at_its_place(
    tmp_path: Path, sheet: str, row: int, heading: str, value: Any, sentence: str
) -> None:
    sheets = small_mill()
    set_cell(sheets, sheet, row, heading, value)
    lines = refused(tmp_path, sheets)
    assert any(line.startswith(f"b.xlsx:{sheet}:{row}:{heading}: ") and sentence in line for line in lines), lines


def limit_fault(folder: Path, *row: Any) -> list[str]:
    sheets = small_mill()
    sheets["Limits"].append(["Layer", *row, *[None] * (7 - len(row))])
    return refused(folder, sheets)


@pytest.mark.parametrize(
    ("row", "heading", "sentence"),
    [
        (("practical", "Maize", None, 1, 5), "Maximum", "A practical minimum has no maximum"),
        (("practical", "Maize"), "Minimum", "A practical minimum needs the least amount"),
        (("count", "Maize + Soybean meal", None, 1, 2), "Minimum", "A count has a maximum only"),
        (("count", "Maize + Soybean meal", None, None, 1.5), "Maximum", "A count needs a whole number"),
        (("group", "Maize + Oats", None, None, 9), "Name", "There is no ingredient “Oats” for this group"),
        (("group", "Legumes", None, None, 9), "Name", "“Legumes” is neither an ingredient nor a class"),
        (("ratio", "Crude protein", "Maize", 1), "Per", "of two nutrients or of two groups, not of one of each"),
        (("ratio", "Crude protein", None, 1), "Per", "A ratio needs what it is over"),
        (("ratio", "Crude protein", "Lysin", 1), "Per", "There is no nutrient “Lysin”"),
        (("ratio", "Crude protein", "Energy", 1, None, "g/kcal/kg"), "Unit", "does not fit"),
        (("nutrient", "Moisture", None, None, 13, None, "dry matter"), "Basis", "Moisture is limited as fed"),
    ],
)
def test_a_limit_that_means_nothing_is_refused(
    tmp_path: Path, row: tuple[Any, ...], heading: str, sentence: str
) -> None:
    lines = limit_fault(tmp_path, *row)
    assert len(lines) == 1
    assert lines[0].startswith(f"b.xlsx:Limits:5:{heading}: ")
    assert sentence in lines[0]


@pytest.mark.parametrize("sheet", ["Nutrients", "Ingredients", "Formulas"])
def test_two_records_of_one_name_are_refused_with_both_rows(tmp_path: Path, sheet: str) -> None:
    sheets = small_mill()
    first = sheets[sheet][1]
    sheets[sheet].append([first[0].upper(), *first[1:]])
    last = len(sheets[sheet])
    heading = sheets[sheet][0][0]
    assert refused(tmp_path, sheets) == [
        f"b.xlsx:{sheet}:{last}:{heading}: “{first[0].upper()}” stands in row 2 and again in row {last}; "
        "rename or delete one of them."
    ]


def test_one_value_given_twice_is_refused_with_both_rows(tmp_path: Path) -> None:
    sheets = small_mill()
    sheets["Values"] = [["Ingredient", "Nutrient", "Value"], ["Maize", "Energy", 14], ["maize", "energy", 15]]
    assert "stands in row 2 and again in row 3" in refused(tmp_path, sheets)[0]


def test_one_nutrient_in_two_columns_of_a_row_is_refused(tmp_path: Path) -> None:
    sheets = small_mill()
    set_cell(sheets, "Ingredients", 2, "Crude protein (% DM)", 10)
    lines = refused(tmp_path, sheets)
    assert lines == [
        "b.xlsx:Ingredients:2:Crude protein (% DM): Crude protein stands in the columns “Crude protein (%)” and "
        "“Crude protein (% DM)” of this row; blank one of them."
    ]


@pytest.mark.parametrize("heading", ["Energy (%)", "Energy (MJ per kg)"])
def test_a_heading_whose_unit_does_not_fit_its_nutrient_is_refused(tmp_path: Path, heading: str) -> None:
    sheets = small_mill()
    sheets["Ingredients"][0][8] = heading
    assert refused(tmp_path, sheets)[0].startswith(f"b.xlsx:Ingredients:1:{heading}: ")


def test_a_heading_that_stands_twice_is_refused(tmp_path: Path) -> None:
    sheets = small_mill()
    sheets["Limits"][0][4] = "Maximum"
    lines = refused(tmp_path, sheets)
    assert "“Maximum” stands in column E and again in F" in lines[0]
    assert any("must have the headings “Minimum”" in line for line in lines)


@pytest.mark.parametrize("sheet", ["Nutrients", "Ingredients", "Formulas", "Limits"])
def test_a_sheet_that_a_new_mill_needs_is_asked_for(tmp_path: Path, sheet: str) -> None:
    sheets = small_mill()
    del sheets[sheet]
    assert any(f"The workbook has no sheet “{sheet}”; add it" in line for line in refused(tmp_path, sheets))


def test_a_workbook_of_other_things_is_refused_in_one_sentence(tmp_path: Path) -> None:
    lines = refused(tmp_path, {"Sheet1": [["a", "b"], [1, 2]]})
    assert len(lines) == 1
    assert "This is no exchange workbook" in lines[0]


def test_a_refused_nutrient_is_not_refused_again_wherever_it_is_used(tmp_path: Path) -> None:
    sheets = small_mill()
    set_cell(sheets, "Nutrients", 2, "Unit", "percent")
    assert len(refused(tmp_path, sheets)) == 1


def test_an_ingredient_that_goes_into_itself_is_refused(tmp_path: Path) -> None:
    sheets = small_mill()
    set_cell(sheets, "Ingredients", 2, "Made by formula", "Layer")
    lines = refused(tmp_path, sheets)
    assert len(lines) == 1
    assert lines[0].startswith("b.xlsx:Ingredients:2:Made by formula: “Maize” would go into itself (Maize < Maize)")


def test_ingredients_that_go_into_each_other_through_formulas_are_refused(tmp_path: Path) -> None:
    sheets = small_mill()
    sheets["Formulas"].append(["Grower", "blend", "pig", None, None, "listed", None])
    sheets["Limits"].append(["Grower", "ingredient", "Maize", None, None, None, None, None])
    sheets["Ingredients"].append(["Premix", None, None, None, None, None, None, None, None])
    sheets["Limits"][2][2] = "Premix"  # Layer uses maize and the premix
    set_cell(sheets, "Ingredients", 3, "Made by formula", "Layer")
    sheets["Limits"][4][2] = "Soybean meal"  # Grower uses what Layer makes
    set_cell(sheets, "Ingredients", 4, "Made by formula", "Grower")
    lines = refused(tmp_path, sheets)
    assert [line.partition(": ")[0] for line in lines] == [
        "b.xlsx:Ingredients:3:Made by formula", "b.xlsx:Ingredients:4:Made by formula"
    ]
    assert "(Soybean meal < Premix < Soybean meal)" in lines[0]


def test_an_error_cell_is_refused_with_its_error(tmp_path: Path) -> None:
    sheets = small_mill()
    set_cell(sheets, "Ingredients", 3, "Energy (MJ/kg)", "#N/A")
    path = write_sheets(tmp_path / "b.xlsx", sheets)
    with pytest.raises(Refused) as caught:
        read_workbook(path, Library(), {}, TODAY)
    assert [str(problem) for problem in caught.value.problems] == [
        "b.xlsx:Ingredients:3:Energy (MJ/kg): The cell holds the error #N/A; correct it, or leave it blank if unknown."
    ]


def test_a_percentage_is_refused_since_it_stores_another_number_than_it_shows(tmp_path: Path) -> None:
    import openpyxl

    path = write_sheets(tmp_path / "b.xlsx", small_mill())
    book = openpyxl.load_workbook(path)
    book["Ingredients"]["H2"] = 0.085
    book["Ingredients"]["H2"].number_format = "0.0%"
    book.save(path)
    with pytest.raises(Refused, match=r"shows 8\.5 % and stores 0\.085"):
        read_workbook(path, Library(), {}, TODAY)


def test_prices_in_another_currency_than_those_of_the_mill_are_refused(tmp_path: Path) -> None:
    library = Library()
    library.apply(read_workbook(write_sheets(tmp_path / "a.xlsx", small_mill()), Library(), {}, TODAY).changes)
    sheets = small_mill()
    sheets["Mill"][2][1] = "EUR"
    lines = refused(tmp_path, sheets, library)
    assert lines == [
        "b.xlsx:Mill:3:Value: The prices of the workbook are in EUR, those of the mill in USD; convert them first."
    ]


def places(lines: list[str]) -> list[str]:
    """Where the sentences stand: sheet, row and heading."""
    return [line.partition(": ")[0].removeprefix("b.xlsx:") for line in lines]


def test_a_row_with_a_repeated_name_is_read_to_its_end(tmp_path: Path) -> None:
    sheets = small_mill()
    sheets["Ingredients"].append(["MAIZE", None, 120, "abc", "heap", "wet", None, "high", None])
    set_cell(sheets, "Ingredients", 4, "Tags", "medicted")
    set_cell(sheets, "Ingredients", 4, "Made by formula", "Starter")
    assert sorted(places(refused(tmp_path, sheets))) == [
        f"Ingredients:4:{heading}" for heading in (
            "Basis", "Crude protein (%)", "Dry matter %", "Ingredient", "Made by formula", "Price", "Price per", "Tags"
        )
    ]


def test_two_rows_without_a_name_of_their_own_do_not_get_into_each_others_way(tmp_path: Path) -> None:
    sheets = small_mill()
    sheets["Ingredients"] += [
        ["Maize", None, 87, 200, "t", None, None, 8.5, 14], [None, None, 87, 200, "t", None, None, 8.5, -14],
    ]
    assert places(refused(tmp_path, sheets)) == [
        "Ingredients:4:Ingredient", "Ingredients:5:Ingredient", "Ingredients:5:Energy (MJ/kg)"
    ]


@pytest.mark.parametrize(
    ("sheet", "row", "headings"),
    [
        ("Nutrients", ["Energy", "joule", "perhaps", "strength", None], ["Key", "Never negative", "Nutrient", "Unit"]),
        ("Formulas", ["Layer", "mix", "hen", None, 0, "some", None],
         ["Admits", "Amounts", "Animal", "Batch kg", "Formula"]),
    ],
)
def test_a_repeated_nutrient_or_formula_hides_none_of_its_faults(
    tmp_path: Path, sheet: str, row: list[Any], headings: list[str]
) -> None:
    sheets = small_mill()
    sheets[sheet].append(row)
    last = len(sheets[sheet])
    assert sorted(places(refused(tmp_path, sheets))) == [f"{sheet}:{last}:{heading}" for heading in headings]


def test_a_scale_without_a_step_and_a_repeated_mixer_hide_none_of_their_faults(tmp_path: Path) -> None:
    sheets = small_mill()
    sheets["Scales"] = [["Scale", "Step kg", "Least kg", "Tolerance %"], ["Hopper", None, "few", 200]]
    sheets["Mixers"] = [["Mixer", "Least kg", "Greatest kg"], ["Drum", 1, 2], ["drum", 900, 500]]
    assert sorted(places(refused(tmp_path, sheets))) == [
        "Mixers:3:Least kg", "Mixers:3:Mixer", "Scales:2:Least kg", "Scales:2:Step kg", "Scales:2:Tolerance %"
    ]


def test_the_mass_of_a_price_is_read_beside_a_price_that_is_none(tmp_path: Path) -> None:
    sheets = small_mill()
    set_cell(sheets, "Ingredients", 2, "Price", "call")
    set_cell(sheets, "Ingredients", 2, "Price per", "ton")
    set_cell(sheets, "Ingredients", 3, "Price", "call")
    set_cell(sheets, "Ingredients", 3, "Price per", "bu")
    assert places(refused(tmp_path, sheets)) == [
        "Ingredients:2:Price", "Ingredients:2:Price per", "Ingredients:3:Price", "Ingredients:3:Price per"
    ]


def test_every_fault_of_a_row_of_values_is_told(tmp_path: Path) -> None:
    sheets = small_mill()
    head = ["Ingredient", "Nutrient", "Value", "Unit", "Basis", "Origin", "Date", "n", "SD"]
    sheets["Values"] = [
        head,
        ["Maise", "Fat", "low", "percent", "wet", "guess", "June", 1.5, -1],
        ["Maize", "Crude protein", 8.6, "%", None, None, None, None, None],
        ["Maize", "Crude protein", -8.7, "MJ/kg", None, "guess", None, 0, None],
    ]
    lines = refused(tmp_path, sheets)
    assert {p for p in places(lines) if p.startswith("Values:2")} == {f"Values:2:{heading}" for heading in head}
    assert {p for p in places(lines) if p.startswith("Values:4")} == {
        "Values:4:Nutrient", "Values:4:Unit", "Values:4:Origin", "Values:4:n"
    }


@pytest.mark.parametrize(
    ("row", "headings"),
    [
        (["Layers", "ingredient", "Maise", "Maize", 60, 40, "stone", "dry matter"],
         ["Formula", "Name", "Per", "Minimum", "Unit", "Basis"]),
        (["Layer", "nutrient", "Fat", None, 60, 40, "stone", "wet"], ["Name", "Minimum", "Unit", "Basis"]),
        (["Layer", "nutrient", "Fat", None, 40, 60, "MJ/kg", None], ["Name"]),
        (["Layer", "nutriment", "Fat", None, 60, 40, "stone", None], ["Kind", "Minimum", "Unit"]),
        (["Layer", "ratio", "Fat", "Energy", -1, None, None, None], ["Name", "Minimum"]),
        (["Layers", "ingredient", "Maize", None, None, 140, "kg/day", None], ["Formula"]),
        (["Layers", "nutrient", "Energy", None, 3, 2, "%", None], ["Formula", "Minimum", "Unit"]),
        (["Layer", "count", "Oats", None, 1, 1.5, None, None], ["Name", "Minimum", "Maximum"]),
        (["Layer", "practical", "Oats", None, "some", 2, None, None], ["Name", "Minimum", "Maximum"]),
    ],
)
def test_a_limit_is_told_everything_that_is_wrong_whatever_its_unread_part_is(
    tmp_path: Path, row: list[Any], headings: list[str]
) -> None:
    sheets = small_mill()
    sheets["Limits"].append(row)
    lines = places(refused(tmp_path, sheets))
    assert sorted(lines) == sorted(f"Limits:5:{heading}" for heading in headings)


@pytest.mark.parametrize("filled", [True, False])
def test_a_nutrient_column_without_its_unit_is_refused_since_its_values_would_be_lost(
    tmp_path: Path, filled: bool
) -> None:
    sheets = small_mill()
    sheets["Nutrients"].append(["P", "%", "yes", None, None])
    set_cell(sheets, "Ingredients", 2, "p", 0.3 if filled else None)
    assert refused(tmp_path, sheets) == [
        "b.xlsx:Ingredients:1:p: The heading “p” names a nutrient without its unit; write it as “P (%)”."
    ]


def test_a_currency_that_is_no_code_is_quoted_as_it_was_typed(tmp_path: Path) -> None:
    sheets = small_mill()
    sheets["Mill"][2][1] = "Dollar"
    assert refused(tmp_path, sheets)[0].startswith("b.xlsx:Mill:3:Value: “Dollar” is no currency code; ")


def test_a_missing_heading_that_is_nearly_there_is_named(tmp_path: Path) -> None:
    sheets = small_mill()
    sheets["Limits"][0][1] = "Knd"
    sheets["Limits"][0][4] = "Least"
    assert refused(tmp_path, sheets) == [
        "b.xlsx:Limits:1: The first row of the sheet must have the headings “Kind”, “Minimum”; add what is missing. "
        "For “Kind”, did you mean the column “Knd”?"
    ]
