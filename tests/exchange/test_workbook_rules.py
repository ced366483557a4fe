"""What the cells of an exchange workbook mean."""

from __future__ import annotations

import datetime
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from blendapp.domain.formulas import DRY_MATTER_SUBJECT, Admits, Amounts, LimitBasis, SubjectKind
from blendapp.domain.ingredients import Basis, Origin, Tag
from blendapp.domain.library import Library
from blendapp.exchange import read_workbook
from tests.exchange.altered_mill import Reader, said
from tests.exchange.made_files import write_sheets
from tests.mills import TODAY


@pytest.fixture
def mill(tmp_path: Path) -> Reader:
    return Reader(tmp_path)


def test_a_plain_workbook_is_read_without_a_warning(mill: Reader) -> None:
    library = mill.read()
    assert mill.warnings == []
    assert library.mill.name == "Larkwater"
    assert [i.name for i in library.ingredients] == ["Maize", "Soybean meal"]
    assert library.value(1, 1).amount == 8.5
    assert library.price_per_t(2, TODAY) == 400
    assert [x.minimum for x in library.limits(1)] == [None, 5, 16]


def test_columns_may_stand_in_any_order(mill: Reader) -> None:
    plain = mill.read().copy()
    for rows in mill.sheets.values():
        rows[:] = [list(reversed(row)) for row in rows]
    other = Reader(mill.folder)
    other.sheets = mill.sheets
    library = other.read()
    for kind in ("nutrient", "ingredient", "formula", "limit", "quote"):
        assert library.all(kind) == plain.all(kind)
    assert {(v.ingredient_id, v.nutrient_id, v.amount) for v in library.all("value")} == {
        (v.ingredient_id, v.nutrient_id, v.amount) for v in plain.all("value")
    }


def test_a_blank_value_is_unknown_and_0_is_none_of_it(mill: Reader) -> None:
    mill.column("Ingredients", "Crude protein (%)", [None, 0])
    library = mill.read()
    assert library.value(1, 1) is None
    assert library.value(2, 1).amount == 0


def test_a_blank_price_is_unknown_and_not_zero(mill: Reader) -> None:
    mill.column("Ingredients", "Price", [None, 400])
    assert mill.read().price_per_t(1, TODAY) is None


def test_a_price_of_0_counts_as_typed_and_is_said(mill: Reader) -> None:
    mill.column("Ingredients", "Price", [0, -12])
    library = mill.read()
    assert (library.price_per_t(1, TODAY), library.price_per_t(2, TODAY)) == (0, -12)
    assert said(mill, "book.xlsx:Ingredients:2:Price: The price 0 is 0 or below")
    assert said(mill, "book.xlsx:Ingredients:3:Price: The price -12")


def test_unknown_sheets_and_columns_are_named_and_left_alone(mill: Reader) -> None:
    mill.sheets["Jottings"] = [["anything"], [1]]
    mill.column("Ingredients", "Colour", ["yellow", "brown"])
    mill.read()
    assert said(mill, "The sheet “Jottings” is not known here and was left alone.")
    assert said(mill, "The column “Colour” is not known here and was left alone.")


def test_a_heading_that_is_nearly_right_is_suggested(mill: Reader) -> None:
    mill.column("Ingredients", "Buschel lb", [56, None])
    mill.read()
    assert said(mill, "Did you mean “Bushel lb”?")


def test_a_column_of_values_without_a_heading_is_named(mill: Reader) -> None:
    mill.sheets["Ingredients"][1].append(7)
    mill.read()
    assert said(mill, "Column J has no heading and was left alone.")


def test_the_basis_of_a_row_holds_for_its_values_and_a_dm_heading_for_its_column(mill: Reader) -> None:
    mill.column("Ingredients", "Basis", ["dry matter", None])
    mill.sheets["Ingredients"][0][8] = "Energy (MJ/kg DM)"
    library = mill.read()
    assert [library.value(1, n).basis for n in (1, 2)] == [Basis.DRY_MATTER, Basis.DRY_MATTER]
    assert [library.value(2, n).basis for n in (1, 2)] == [Basis.AS_FED, Basis.DRY_MATTER]


def test_a_column_may_be_in_another_unit_of_the_nutrient_and_is_kept_so(mill: Reader) -> None:
    mill.sheets["Ingredients"][0][7] = "Crude protein (g/kg)"
    value = mill.read().value(1, 1)
    assert (value.amount, value.unit) == (8.5, "g/kg")


def test_the_sheet_values_wins_over_the_columns(mill: Reader) -> None:
    mill.sheets["Values"] = [
        ["Ingredient", "Nutrient", "Value", "Unit", "Basis", "Origin", "Source", "Date", "n", "SD"],
        ["maize", "crude protein", 9.1, "%", "dry matter", "measured", "our lab", datetime.date(2026, 1, 5), 12, 0.4],
    ]
    value = mill.read().value(1, 1)
    assert (value.amount, value.basis) == (9.1, Basis.DRY_MATTER)
    assert (value.origin, value.source) == (Origin.MEASURED, "our lab")
    assert (value.date, value.n, value.sd) == (datetime.date(2026, 1, 5), 12, 0.4)


def test_a_value_without_a_unit_is_in_that_of_its_nutrient(mill: Reader) -> None:
    mill.sheets["Values"] = [["Ingredient", "Nutrient", "Value"], ["Maize", "Energy", 13.9]]
    assert mill.read().value(1, 2).unit == "MJ/kg"


def test_a_number_stored_as_text_is_read_with_a_decimal_point_and_said_once_a_column(mill: Reader) -> None:
    mill.column("Ingredients", "Crude protein (%)", ["8.75", "46.5"])
    library = mill.read()
    assert (library.value(1, 1).amount, library.value(1, 1).entered) == (8.75, "8.75")
    texts = [warning for warning in mill.warnings if "stored as text" in warning]
    assert texts == [
        "book.xlsx:Ingredients:2:Crude protein (%): 2 numbers are stored as text, the first is “8.75”; "
        "they were read with a decimal point."
    ]


def test_numbers_are_names_and_codes_where_text_is_meant(mill: Reader) -> None:
    mill.sheets["Ingredients"][1][0] = 48
    mill.sheets["Limits"][1][2] = 48
    mill.column("Ingredients", "Code", [1200, "007"])
    library = mill.read()
    assert [(i.name, i.code) for i in library.ingredients] == [("48", "1200"), ("Soybean meal", "007")]


def test_tags_are_read_from_a_list_joined_by_commas(mill: Reader) -> None:
    mill.column("Ingredients", "Tags", ["Medicated, only when listed", None])
    assert mill.read().ingredient(1).tags == (Tag.MEDICATED, Tag.ONLY_WHEN_LISTED)


@pytest.mark.parametrize(
    ("words", "per", "per_t"),
    [
        ("t", "t", 100), ("tonne", "t", 100), ("kg", "kg", 100_000), ("100 kg", "100 kg", 1000),
        ("lb", "lb", 220462.262),
        ("cwt", "cwt", 2204.62262), ("Short Ton", "short ton", 110.231131), ("long ton", "long ton", 98.4206528),
        ("bu", "bu", 3936.8261),
    ],
)
def test_a_price_may_be_per_any_mass_of_the_trade(mill: Reader, words: str, per: str, per_t: float) -> None:
    mill.column("Ingredients", "Price", [100, 400])
    mill.column("Ingredients", "Price per", [words, "t"])
    library = mill.read()
    assert library.quotes_of(1)[0].per == per
    assert library.price_per_t(1, TODAY) == pytest.approx(per_t, rel=1e-8)


def test_a_bare_ton_is_what_the_mill_sheet_says(mill: Reader) -> None:
    mill.column("Ingredients", "Price per", ["ton", "t"])
    mill.sheets["Mill"].append(["Ton means", "short ton"])
    assert mill.read().quotes_of(1)[0].per == "short ton"


def test_a_hundredweight_is_100_lb_unless_the_mill_sheet_says_112(mill: Reader) -> None:
    mill.column("Ingredients", "Price per", ["cwt", "t"])
    mill.sheets["Mill"].append(["Cwt means", "112 lb"])
    assert mill.read().price_per_t(1, TODAY) == pytest.approx(200 / (112 * 0.45359237) * 1000)


def test_a_bushel_weighs_what_is_entered_before_what_is_legal(mill: Reader) -> None:
    mill.column("Ingredients", "Price per", ["bu", "t"])
    mill.column("Ingredients", "Bushel lb", [54, None])
    assert mill.read().quotes_of(1)[0].bushel_lb == 54


def test_the_legal_bushel_is_said_when_it_was_taken(mill: Reader) -> None:
    mill.column("Ingredients", "Price per", ["bu", "t"])
    mill.read()
    assert said(mill, "the legal bushel of 56 lb was taken")


def test_a_price_without_a_mass_is_per_tonne_and_said(mill: Reader) -> None:
    mill.column("Ingredients", "Price per", [None, "t"])
    mill.read()
    assert said(mill, "book.xlsx:Ingredients:2:Price per: The price names no mass; it was taken per t.")


def test_blank_admits_is_listed_with_an_ingredient_row_and_all_without_and_is_said(mill: Reader) -> None:
    mill.sheets["Formulas"][1][5] = None
    mill.sheets["Formulas"].append(["Grower", "blend", "pig", None, None, None, None])
    mill.limits(["nutrient", "Energy", None, 12], formula="Grower")
    library = mill.read()
    assert [formula.admits for formula in library.formulas] == [Admits.LISTED, Admits.ALL]
    assert said(mill, "“Layer” has ingredient rows, so listed applied")
    assert said(mill, "“Grower” has no ingredient row, so all applied")


def test_a_formula_without_an_animal_is_said(mill: Reader) -> None:
    mill.sheets["Formulas"][1][2] = None
    mill.read()
    assert said(mill, "The formula “Layer” names no animal")


def test_every_basis_of_a_nutrient_limit_is_read(mill: Reader) -> None:
    mill.sheets["Formulas"].append(["Cow", "ration", "cattle", None, None, "all", None])
    mill.limits(
        ["nutrient", "Crude protein", None, 14, None, None, "dry matter"],
        ["nutrient", "Crude protein", None, 14, None, "g/kg", "at 88 % dry matter"],
        ["nutrient", "Energy", None, 200, None, None, "per day"],
        ["nutrient", "Dry matter", None, 20, 24, None, "per day"],
        formula="Cow",
    )
    found = mill.read().limits(2)
    assert [(x.basis, x.at_dry_matter_percent) for x in found] == [
        (LimitBasis.DRY_MATTER, None), (LimitBasis.AT_DRY_MATTER, 88), (LimitBasis.PER_DAY, None),
        (LimitBasis.PER_DAY, None),
    ]
    assert found[3].subject == DRY_MATTER_SUBJECT
    assert mill.library.formula(2).amounts is Amounts.RATION


def test_a_group_is_names_joined_by_plus_or_a_class(mill: Reader) -> None:
    mill.limits(["group", "Maize + soybean meal", None, None, 90], ["group", "cereals", None, 10])
    found = mill.read().limits(1)
    assert found[3].subject.ids == (1, 2)
    assert (found[4].subject.kind, found[4].subject.class_name) == (SubjectKind.CLASS, "Cereals")


def test_a_name_with_a_plus_in_it_stands_in_double_quotes(mill: Reader) -> None:
    mill.sheets["Ingredients"].append(['Fat "A" + B', None, None, None, None, None, None, None, None])
    mill.sheets["Limits"].append(["Layer", "ingredient", 'Fat "A" + B', None, None, 3, None, None])
    mill.limits(["group", '"Fat ""A"" + B" + Maize', None, None, 60])
    assert mill.read().limits(1)[4].subject.ids == (3, 1)


def test_an_ingredient_wins_over_a_class_of_its_name_and_it_is_said(mill: Reader) -> None:
    mill.column("Ingredients", "Class", ["Maize", "Maize"])
    mill.limits(["group", "Maize", None, None, 60])
    assert mill.read().limits(1)[3].subject.ids == (1,)
    assert said(mill, "“Maize” is an ingredient and a class; the ingredient was taken")


def test_a_group_that_names_an_ingredient_not_admitted_warns(mill: Reader) -> None:
    mill.sheets["Ingredients"].append(["Oats", "Cereals", 88, None, None, None, None, None, None])
    mill.limits(["group", "Maize + Oats", None, None, 60])
    mill.read()
    assert said(mill, "book.xlsx:Limits:5:Name: Oats is not admitted by the formula and counts as 0 here.")


def test_a_ratio_is_of_two_nutrients_or_two_groups(mill: Reader) -> None:
    mill.limits(
        ["ratio", "Crude protein", "Energy", 12, None, "g/MJ"], ["ratio", "Maize", "Soybean meal", 1],
        ["ratio", "Cereals", "Maize + Soybean meal", None, 1],
    )
    found = mill.read().limits(1)
    assert found[3].subject.is_nutrient
    assert found[3].per.is_nutrient
    assert (found[4].subject.ids, found[4].per.ids) == ((1,), (2,))
    assert (found[5].subject.class_name, found[5].per.ids) == ("Cereals", (1, 2))


def test_practical_and_count_rows_are_read(mill: Reader) -> None:
    mill.limits(["practical", "Maize", None, 2.5], ["count", "Maize + Soybean meal", None, None, 1])
    found = mill.read().limits(1)
    assert (found[3].minimum, found[4].maximum) == (2.5, 1)


def test_an_ingredient_may_be_made_by_a_formula_of_the_mill(mill: Reader) -> None:
    mill.sheets["Ingredients"].append(["Layer premix", None, None, None, None, None, None, None, None])
    mill.column("Ingredients", "Made by formula", [None, None, "layer"])
    assert mill.read().ingredient(3).made_by_formula_id == 1


def test_scales_and_mixers_are_read_and_an_ingredient_finds_its_scale(mill: Reader) -> None:
    mill.sheets["Scales"] = [
        ["Scale", "Step kg", "Least kg", "Greatest kg", "Tolerance %", "Hand add"],
        ["Hopper", 5, 20, 2000, 1, None], ["Bench", 0.01, None, 30, None, "yes"],
    ]
    mill.sheets["Mixers"] = [["Mixer", "Least kg", "Greatest kg"], ["Big", 500, 2000]]
    mill.column("Ingredients", "Scale", ["hopper", None])
    library = mill.read()
    assert [(s.step_kg, s.tolerance_percent, s.hand_add) for s in library.scales] == [(5, 1, False), (0.01, None, True)]
    assert library.mixers[0].greatest_kg == 2000
    assert library.ingredient(1).scale_id == 1


@pytest.mark.parametrize("yes", ["yes", "Y", True, 1, "x"])
def test_yes_may_be_a_word_a_truth_value_or_a_mark(mill: Reader, yes: Any) -> None:
    mill.column("Nutrients", "Never negative", [yes, None])
    assert [n.never_negative for n in mill.read().nutrients] == [True, False]


def test_a_nutrient_without_a_unit_may_head_its_column_plainly(mill: Reader) -> None:
    mill.sheets["Nutrients"].append(["Palatability", None, "yes", None, None])
    mill.column("Ingredients", "Palatability", [3, 4])
    value = mill.read().value(1, 3)
    assert (value.amount, value.unit) == (3, "")


def test_blank_rows_and_formatted_blank_tails_are_nothing(mill: Reader) -> None:
    path = write_sheets(mill.folder / "tail.xlsx", mill.sheets)
    book = openpyxl.load_workbook(path)
    for row in range(5, 400):
        for column in range(1, 12):
            book["Ingredients"].cell(row, column).number_format = "0.00"
    book["Ingredients"]["A450"] = "   "
    book["Ingredients"]["A500"] = "Oats"
    book.save(path)
    reading = read_workbook(path, Library(), {}, TODAY)
    assert [change.after.name for change in reading.changes if change.kind == "ingredient"] == [
        "Maize", "Soybean meal", "Oats"
    ]
    assert reading.warnings == []


def test_a_formula_counts_by_its_stored_value(mill: Reader, tmp_path: Path) -> None:
    path = write_sheets(tmp_path / "book.xlsx", mill.sheets)
    stored = path.with_name("stored.xlsx")
    replace_in_sheet(path, stored, 3, '<c r="D2" t="n"><v>200</v></c>', '<c r="D2"><f>100*2</f><v>200</v></c>')
    library = Library()
    library.apply(read_workbook(stored, Library(), {}, TODAY).changes)
    assert library.price_per_t(1, TODAY) == 200


def replace_in_sheet(path: Path, to: Path, number: int, old: str, new: str) -> None:
    """A copy of a workbook with a piece of one sheet's XML replaced; openpyxl itself stores no results of formulas."""
    import zipfile

    with zipfile.ZipFile(path) as source, zipfile.ZipFile(to, "w", zipfile.ZIP_DEFLATED) as target:
        for part in source.infolist():
            data = source.read(part)
            if part.filename == f"xl/worksheets/sheet{number}.xml":
                assert old.encode() in data
                data = data.replace(old.encode(), new.encode())
            target.writestr(part.filename, data)




class TestIntoAMillThatHasRecords:
    """Reading a workbook into a library that is not empty."""

    def test_the_same_workbook_changes_nothing(self, mill: Reader) -> None:
        mill.read()
        mill.read()
        assert mill.changes == []

    def test_names_match_whatever_their_case_and_spacing(self, mill: Reader) -> None:
        mill.read()
        mill.sheets["Ingredients"][2][0] = "SOYBEAN   meal"
        mill.sheets["Ingredients"][2][2] = 90
        library = mill.read()
        assert [(i.id, i.name, i.dry_matter_percent) for i in library.ingredients] == [
            (1, "Maize", 87), (2, "Soybean meal", 90)
        ]

    def test_a_blank_cell_forgets_nothing(self, mill: Reader) -> None:
        mill.read()
        mill.sheets["Ingredients"][1][1:] = [None] * 8
        mill.read()
        assert mill.changes == []

    def test_a_new_price_is_a_new_quote_from_today_and_the_old_one_stays(self, mill: Reader) -> None:
        mill.read()
        mill.column("Ingredients", "Price", [210, 400])
        library = mill.read()
        assert [(q.price, q.valid_from) for q in library.quotes_of(1)] == [(200, None), (210, TODAY)]
        assert library.price_per_t(1, TODAY) == 210
        assert len(library.quotes_of(2)) == 1

    def test_an_equal_price_in_another_unit_is_no_new_quote(self, mill: Reader) -> None:
        mill.read()
        mill.column("Ingredients", "Price", [0.2, 400])
        mill.column("Ingredients", "Price per", ["kg", "t"])
        assert len(mill.read().quotes_of(1)) == 1

    def test_limit_rows_replace_the_limits_of_their_formula_only(self, mill: Reader) -> None:
        mill.sheets["Formulas"].append(["Grower", "blend", "pig", None, None, "all", None])
        mill.limits(["nutrient", "Energy", None, 12], formula="Grower")
        mill.read()
        mill.sheets["Limits"] = [mill.sheets["Limits"][0], ["Layer", "ingredient", "Maize", None, 10, None, None, None]]
        library = mill.read()
        assert [(x.kind, x.minimum) for x in library.limits(1)] == [("ingredient", 10)]
        assert [x.minimum for x in library.limits(2)] == [12]

    def test_a_changed_value_loses_the_source_that_spoke_of_the_old_one(self, mill: Reader) -> None:
        mill.sheets["Values"] = [["Ingredient", "Nutrient", "Value", "Source"], ["Maize", "Energy", 14.2, "a table"]]
        mill.read()
        del mill.sheets["Values"]
        mill.column("Ingredients", "Energy (MJ/kg)", [14.2, 13.1])
        assert mill.read().value(1, 2).source == "a table"
        mill.column("Ingredients", "Energy (MJ/kg)", [14.0, 13.1])
        assert mill.read().value(1, 2).source == ""

    def test_a_workbook_of_ingredients_alone_updates_and_says_what_it_lacks(self, mill: Reader) -> None:
        mill.read()
        mill.sheets = {"Ingredients": [["Ingredient", "Stock kg"], ["Maize", 12000]]}
        assert mill.read().ingredient(1).stock_kg == 12000
        assert said(mill, "The workbook has no sheet “Limits”; what the mill has of it stays as it is.")

    def test_the_library_given_is_left_as_it_was(self, mill: Reader) -> None:
        mill.read()
        before = mill.library.copy()
        mill.column("Ingredients", "Price", [1, 2])
        path = write_sheets(mill.folder / "again.xlsx", mill.sheets)
        read_workbook(path, mill.library, {"quote": 50}, TODAY)
        assert mill.library == before


def test_a_misspelt_nutrient_column_is_left_alone_with_the_heading_that_may_be_meant(mill: Reader) -> None:
    mill.column("Ingredients", "Enrgy, MJ/kg", [14, 13])
    mill.sheets["Ingredients"] = [[*row[:8], row[9]] for row in mill.sheets["Ingredients"]]
    mill.read()
    assert said(mill, "“Enrgy, MJ/kg” is not known here and was left alone. Did you mean “Energy (MJ/kg)”?")


def test_a_currency_in_small_letters_is_its_code(mill: Reader) -> None:
    mill.sheets["Mill"][2][1] = "eur"
    assert mill.read().mill.currency == "EUR"
