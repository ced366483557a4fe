"""Lists of analyses: where the table stands, what each column measures, in which unit, and per kg of what."""

from __future__ import annotations

from typing import Any

import openpyxl
import pytest

from blendapp.domain.list_rows import LEAVE_OUT, Answer, Fate
from blendapp.domain.mills import Asked
from blendapp.exchange.composition_words import read_heading
from tests.exchange.composition_cases import asked, fates, read, values_of
from tests.exchange.made_lists import write_ods, write_text, write_xls

FED, DRY = "as fed", "dry matter"


@pytest.mark.parametrize(("heading", "value", "nutrient", "expected"), [
    ("Crude protein (%) as fed", 8.4, "Crude protein", (8.4, "%", FED)),
    ("CRUDE  PROTEIN, % as is", 8.4, "Crude protein", (8.4, "%", FED)),
    ("CP % DM", 9.6, "Crude protein", (9.6, "%", DRY)),
    ("CP %DM", 9.6, "Crude protein", (9.6, "%", DRY)),
    ("CP (g/kg DM)", 96, "Crude protein", (96, "g/kg", DRY)),
    ("Protein, % of dry matter", 9.6, "Crude protein", (9.6, "%", DRY)),
    ("Crude protein [% w/w, as received]", 8.4, "Crude protein", (8.4, "%", FED)),
    ("Ether extract g/100 g as fed", 4.1, "Crude fat", (4.1, "%", FED)),
    ("EE% (dry basis)", 4.1, "Crude fat", (4.1, "%", DRY)),
    ("CP % (AR)", 8.4, "Crude protein", (8.4, "%", FED)),
    ("Crude fiber % as fed", 2.2, "Crude fibre", (2.2, "%", FED)),
    ("Lysine g/kg as fed", 2.5, "Lysine", (2.5, "g/kg", FED)),
    ("Lys (%DM)", 0.29, "Lysine", (0.29, "%", DRY)),
    ("Digestible lysine % as fed", 0.2, "Digestible lysine", (0.2, "%", FED)),
    ("Ca % as fed", 0.02, "Calcium", (0.02, "%", FED)),
    ("Calcium (Ca) g/kg as fed", 0.2, "Calcium", (0.2, "g/kg", FED)),
    ("Phosphorus % as fed", 0.28, "Total phosphorus", (0.28, "%", FED)),
    ("P, mg/100 g as fed", 280, "Total phosphorus", (2800, "mg/kg", FED)),
    ("Available P % as fed", 0.08, "Available phosphorus", (0.08, "%", FED)),
    ("Zn ppm as fed", 21, "Zinc", (21, "ppm", FED)),
    ("Zinc (\u00b5g/g, as fed)", 21, "Zinc", (21, "mg/kg", FED)),
    ("ME poultry MJ/kg as fed", 14.1, "ME poultry", (14.1, "MJ/kg", FED)),
    ("ME poultry (kcal/kg as fed)", 3370, "ME poultry", (3370, "kcal/kg", FED)),
    ("Electrolyte balance mEq/kg as fed", -42, "Electrolyte balance", (-42, "mEq/kg", FED)),
    ("Vitamin A, added (IU/g as fed)", 5, "Vitamin A, added", (5000, "IU/kg", FED)),
])
def test_a_heading_names_nutrient_unit_and_basis(
    heading: str, value: float, nutrient: str, expected: tuple[float, str, str]
) -> None:
    reading = read([["Ingredient", heading], ["Maize", value]])
    assert [row.reason for row in reading.rows[1:]] == [""]
    assert values_of(reading.rows[1]) == {nutrient: expected}


@pytest.mark.parametrize(("heading", "value", "percent"), [
    ("Dry matter %", 87.5, 87.5), ("DM (%)", 87.5, 87.5), ("DM g/kg", 875, 87.5), ("% DM", 87.5, 87.5),
    ("Moisture %", 12.5, 87.5), ("Water (g/kg)", 125, 87.5), ("Moisture (as received) %", 12.5, 87.5),
    ("Dry matter, % as received", 87.5, 87.5),
])
def test_dry_matter_is_read_and_moisture_is_what_is_missing_to_the_whole(
    heading: str, value: float, percent: float
) -> None:
    row = read([["Ingredient", heading], ["Maize", value]]).rows[1]
    assert (row.fate, values_of(row)) == (Fate.ACCEPTED, {"Dry matter": (percent, "%", FED)})


@pytest.mark.parametrize(("heading", "about", "choice"), [
    ("CF % as fed", Asked.NUTRIENT, "Crude fibre"), ("CF % as fed", Asked.NUTRIENT, "Crude fat"),
    ("Cu mg/kg as fed", Asked.NUTRIENT, LEAVE_OUT),  # total copper: added copper is another thing
    ("Copper mg/kg as fed", Asked.NUTRIENT, LEAVE_OUT),
    ("Vitamin A IU/kg as fed", Asked.NUTRIENT, LEAVE_OUT),
    ("SID lysine % as fed", Asked.NUTRIENT, LEAVE_OUT),
    ("Energy MJ/kg as fed", Asked.NUTRIENT, LEAVE_OUT), ("ME MJ/kg as fed", Asked.NUTRIENT, LEAVE_OUT),
    ("Fibre % as fed", Asked.NUTRIENT, "Crude fibre"), ("Zearalenone ug/kg as fed", Asked.NUTRIENT, LEAVE_OUT),
    ("Crud protien % as fed", Asked.NUTRIENT, "Crude protein"),
])
def test_what_may_be_several_things_or_none_is_asked_and_never_taken_by_likeness(
    heading: str, about: Asked, choice: str
) -> None:
    reading = read([["Ingredient", heading, "Ash", "Starch % as fed"], ["Maize", 5, None, 63]])
    row = reading.rows[1]
    assert row.fate is Fate.QUESTION
    assert set(values_of(row)) == {"Starch"}
    (question,) = row.questions
    assert (question.asked, question.about) == (about, heading)
    assert choice in question.choices
    assert LEAVE_OUT in question.choices


def test_an_answer_says_what_a_heading_means_or_leaves_its_column_out() -> None:
    rows = [["Ingredient", "CF % as fed", "Starch % as fed"], ["Maize", 2.2, 63]]
    row = read(rows, Answer(Asked.NUTRIENT, "cf % as fed", "Crude fibre")).rows[1]
    assert values_of(row) == {"Crude fibre": (2.2, "%", FED), "Starch": (63, "%", FED)}
    row = read(rows, Answer(Asked.NUTRIENT, "CF % as fed", LEAVE_OUT)).rows[1]
    assert values_of(row) == {"Starch": (63, "%", FED)}
    row = read([["Ingredient", "TS %"], ["Maize", 88]], Answer(Asked.NUTRIENT, "TS %", "Dry matter")).rows[1]
    assert values_of(row) == {"Dry matter": (88, "%", FED)}


@pytest.mark.parametrize(("heading", "unit", "answer", "expected"), [
    ("Ca as fed", "Ca as fed", "%", (0.02, "%", FED)), ("Ca as fed", "Ca as fed", "mg/kg", (0.02, "mg/kg", FED)),
    ("Ca MJ/kg as fed", "Ca MJ/kg as fed", "g/kg", (0.02, "g/kg", FED)),
    ("Ca % (g/kg) as fed", "Ca % (g/kg) as fed", "g/kg", (0.02, "g/kg", FED)),
])
def test_a_missing_a_double_or_an_unfitting_unit_is_asked_once(
    heading: str, unit: str, answer: str, expected: tuple[float, str, str]
) -> None:
    rows = [["Ingredient", heading], ["Maize", 0.02], ["Soybean meal", 0.02]]
    reading = read(rows)
    assert asked(reading) == {("concentration", unit)}
    assert fates(reading) == ["ignored", "question", "question"]
    assert answer in reading.questions[0].choices
    reading = read(rows, Answer(Asked.CONCENTRATION, unit, answer))
    assert [values_of(row) for row in reading.accepted] == [{"Calcium": expected}] * 2


def test_several_columns_without_a_unit_are_one_question_and_those_kept_in_other_units_their_own() -> None:
    rows = [["Ingredient", "Moisture", "Protein", "Fat", "Zn"], ["Maize", 12.5, 8.4, 4, 22]]
    fed = Answer(Asked.BASIS, "", FED)
    assert asked(read(rows, fed)) == {("concentration", ""), ("concentration", "Zn")}
    answers = fed, Answer(Asked.CONCENTRATION, "", "%"), Answer(Asked.CONCENTRATION, "Zn", "mg/kg")
    (row,) = read(rows, *answers).accepted
    assert values_of(row) == {
        "Dry matter": (87.5, "%", FED), "Crude protein": (8.4, "%", FED), "Crude fat": (4, "%", FED),
        "Zinc": (22, "mg/kg", FED),
    }
    (row,) = read(rows, *answers, Answer(Asked.CONCENTRATION, "Fat", "g/kg")).accepted
    assert values_of(row)["Crude fat"] == (4, "g/kg", FED)


def test_a_title_says_the_unit_of_what_is_kept_in_parts_of_the_whole() -> None:
    rows = [["All values in % as fed"], ["Ingredient", "CP", "Zn"], ["Maize", 8.4, 22]]
    reading = read(rows)
    assert asked(reading) == {("concentration", "Zn")}
    (row,) = read(rows, Answer(Asked.CONCENTRATION, "Zn", "mg/kg")).accepted
    assert values_of(row) == {"Crude protein": (8.4, "%", FED), "Zinc": (22, "mg/kg", FED)}


@pytest.mark.parametrize("heading", ["Lys (% CP)", "Lysine, % of crude protein", "Lysine g/16 g N"])
def test_a_part_of_the_protein_is_no_part_of_the_material(heading: str) -> None:
    (question,) = read([["Ingredient", heading, "CP % as fed"], ["Maize", 3, 8.4]]).questions
    assert (question.asked, question.about, question.choices) == (Asked.NUTRIENT, heading, (LEAVE_OUT,))


def test_columns_of_uncertainty_and_limits_are_no_results() -> None:
    rows = [["Ingredient", "CP % as fed", "+/-", "SD", "Min", "Lab fee"], ["Maize", 8.4, 0.2, 0.1, 8, "none"]]
    (row,) = read(rows).accepted
    assert values_of(row) == {"Crude protein": (8.4, "%", FED)}


def test_a_row_that_stands_for_several_samples_is_asked_about() -> None:
    rows = [["Ingredient", "n", "CP % as fed"], ["Maize", 12, 8.4], ["Soybean meal", 1, 45]]
    assert fates(read(rows)) == ["ignored", "question", "accepted"]
    assert "12 samples" in read(rows).rows[1].reason


def test_an_unknown_basis_is_asked_once_for_the_whole_list() -> None:
    rows = [["Ingredient", "CP %", "Ca %", "DM %"], ["Maize", 8.5, 0.02, 88], ["Soybean meal", 45, 0.3, 89]]
    reading = read(rows)
    assert asked(reading) == {("basis", "")}
    assert fates(reading) == ["ignored", "question", "question"]
    for basis in (FED, DRY):
        answered = read(rows, Answer(Asked.BASIS, "", basis))
        assert {one[2] for row in answered.accepted for name, one in values_of(row).items() if name != "Dry matter"} \
            == {basis}
    of_one = read(rows, Answer(Asked.BASIS, "CP %", DRY), Answer(Asked.BASIS, "", FED)).accepted[0]
    assert [one[2] for one in values_of(of_one).values()] == [FED, DRY, FED]


def test_dry_matter_alone_has_no_basis_to_ask_for() -> None:
    assert fates(read([["Ingredient", "DM %"], ["Maize", 88]])) == ["ignored", "accepted"]


@pytest.mark.parametrize(("title", "basis"), [
    ("All results on dry matter basis", DRY), ("Results expressed on a dry matter basis", DRY),
    ("Values in % dry matter", DRY), ("As received basis", FED), ("Results are given as fed", FED),
    ("Basis: as fed", FED), ("Results reported on DM", DRY),
])
@pytest.mark.parametrize("below", [False, True])
def test_a_title_or_a_footnote_says_the_basis(title: str, basis: str, below: bool) -> None:
    table = [["Ingredient", "CP %"], ["Maize", 8.6]]
    rows = [*table, [], [title]] if below else [["Larkwater laboratory"], [title], [], *table]
    (row,) = read(rows).accepted
    assert values_of(row) == {"Crude protein": (8.6, "%", basis)}


@pytest.mark.parametrize("title", [
    "The results relate to the samples as received", "Dry matter and protein of the week", "Results at 88 % dry matter",
    "Dry matter by oven, protein by combustion", "Results on air-dry basis",
])
def test_a_title_that_speaks_of_something_else_says_no_basis(title: str) -> None:
    assert asked(read([[title], ["Ingredient", "CP %"], ["Maize", 8.6]])) == {("basis", "")}


@pytest.mark.parametrize(("cell", "basis"), [
    ("as fed", FED), ("As received", FED), ("DM", DRY), ("dry", DRY), ("Dry matter", DRY), ("as is basis", FED),
])
def test_a_column_says_the_basis_of_each_row(cell: str, basis: str) -> None:
    rows = [["Ingredient", "Basis", "CP %"], ["Maize", cell, 8.6]]
    assert values_of(read(rows).rows[1])["Crude protein"][2] == basis
    assert fates(read([rows[0], ["Maize", "wet?", 8.6]])) == ["ignored", "question"]


def test_a_heading_and_a_row_that_name_two_bases_are_a_question() -> None:
    reading = read([["Ingredient", "Basis", "CP % as fed"], ["Maize", "dry matter", 8.6]])
    assert fates(reading) == ["ignored", "question"]
    assert "two bases" in reading.rows[1].reason


def test_a_stated_dry_matter_is_no_basis() -> None:
    reading = read([["Ingredient", "CP % (88 % DM)"], ["Maize", 8.6]], Answer(Asked.BASIS, "", DRY))
    assert fates(reading) == ["ignored", "question"]


def test_values_as_fed_and_on_dry_matter_side_by_side_are_one_question_for_all() -> None:
    rows = [
        ["Ingredient", "CP % as fed", "CP % DM", "Ca % as fed", "Ca % DM"], ["Maize", 8.6, 9.8, 0.02, 0.023],
        ["Soybean meal", 45, 51, 0.3, 0.34],
    ]
    assert asked(read(rows)) == {("basis", "")}
    (row, _other) = read(rows, Answer(Asked.BASIS, "", DRY)).accepted
    assert values_of(row) == {"Crude protein": (9.8, "%", DRY), "Calcium": (0.023, "%", DRY)}
    (row, _other) = read(rows, Answer(Asked.BASIS, "", FED)).accepted
    assert values_of(row) == {"Crude protein": (8.6, "%", FED), "Calcium": (0.02, "%", FED)}


@pytest.mark.parametrize("second", ["Protein % as fed", "CP % as fed"])
def test_one_nutrient_in_two_columns_is_asked_and_one_of_them_left_out(second: str) -> None:
    rows = [["Ingredient", "CP % as fed", second], ["Maize", 8.6, 8.9]]
    reading = read(rows)
    assert fates(reading) == ["ignored", "question"]
    assert len(reading.questions) == 2
    first, other = (one.about for one in reading.questions)
    (row,) = read(rows, Answer(Asked.NUTRIENT, first, LEAVE_OUT)).accepted
    assert values_of(row)["Crude protein"][0] == 8.9
    (row,) = read(rows, Answer(Asked.NUTRIENT, other, LEAVE_OUT)).accepted
    assert values_of(row)["Crude protein"][0] == 8.6


# -- where the table stands

PLAIN: list[list[Any]] = [["Ingredient", "CP % as fed", "Zn mg/kg as fed"], ["Maize", 8.6, 21], ["Wheat bran", 15, 80]]


@pytest.mark.parametrize("rows", [
    PLAIN,
    [["Larkwater laboratory", None, None], ["Report 7", None, None], [], *PLAIN],
    [["Ingredient", "CP", "Zn"], [None, "% as fed", "mg/kg as fed"], *PLAIN[1:]],
    [["Ingredient", "CP", "Zn"], ["unit", "%", "mg/kg"], *PLAIN[1:], ["All results are on as fed basis"]],
    [[None, "As received basis", None], ["Ingredient", "CP %", "Zn mg/kg"], *PLAIN[1:]],
    [["CP % as fed", "Zn mg/kg as fed", "Ingredient"], *([row[1], row[2], row[0]] for row in PLAIN[1:])],
    [["Lab no", "Sample", "CP % as fed", "Zn mg/kg as fed"], *([n, *row] for n, row in enumerate(PLAIN[1:]))],
    [["Sample no", "Product code", "Description", "CP % as fed", "Zn mg/kg as fed"],
     *([n, f"P{n}", *row] for n, row in enumerate(PLAIN[1:]))],
    [[*PLAIN[0], "Remarks"], *([*row, "fine"] for row in PLAIN[1:])],
    [["Material", *PLAIN[0][1:]], *PLAIN[1:]],
    [["Ingredient", "Proximates", "Minerals"], [None, *PLAIN[0][1:]], *PLAIN[1:]],
    [["Ingredient", "CP", "Zn"], ["Method", "Dumas", "ICP"], ["Unit", "% as fed", "mg/kg as fed"], *PLAIN[1:]],
])
@pytest.mark.parametrize("write", [None, write_text, write_ods, write_xls])
def test_the_table_is_found_under_any_headings(rows: list[list[Any]], write: Any) -> None:
    reading = read(rows) if write is None else read(rows, write=write)
    assert [(row.ingredient, *[one[0] for one in values_of(row).values()]) for row in reading.accepted] == [
        ("Maize", 8.6, 21), ("Wheat bran", 15, 80)
    ]
    filled = [n for n, cells in enumerate(rows, start=1) if any(cell is not None for cell in cells)]
    assert [row.row for row in reading.rows] == filled
    assert reading.count(Fate.IGNORED) == len(filled) - 2


def test_tables_one_below_the_other_keep_their_own_headings() -> None:
    rows = [
        *PLAIN, [], ["Minerals"], ["Ingredient", "Ca g/kg as fed"], ["Maize", 0.2], ["Soybean meal", 3],
    ]
    assert [(row.row, row.ingredient, list(values_of(row))) for row in read(rows).accepted] == [
        (2, "Maize", ["Crude protein", "Zinc"]), (3, "Wheat bran", ["Crude protein", "Zinc"]),
        (7, "Maize", ["Calcium"]), (8, "Soybean meal", ["Calcium"]),
    ]


def test_the_ingredient_of_a_title_or_a_sheet_is_that_of_every_sample_without_a_name() -> None:
    table = [["Lab no", "CP % as fed"], ["A1", 8.6], ["A2", 8.4]]
    assert [row.ingredient for row in read([["Product: Maize"], *table]).accepted] == ["Maize", "Maize"]
    assert [row.ingredient for row in read([["Material", "Soybean meal"], [], *table]).rows[1:]][1:] == [
        "Soybean meal", "Soybean meal"
    ]
    reading = read([["Report of March"], *table])
    assert fates(reading) == ["ignored", "ignored", "question", "question"]
    assert {one.asked for one in reading.questions} == {Asked.NAMELESS}
    answer = Answer(Asked.NAMELESS, ingredient_id=3, sheet="Prices", row=3)
    (row,) = read([["Report of March"], *table], answer).accepted
    assert row.ingredient == "Wheat bran"


@pytest.mark.parametrize("rows", [
    [["Parameter", "Unit", "Maize", "Wheat bran"], ["Crude protein", "%", 8.5, 15], ["Zn", "mg/kg", 20, 80]],
    [["Analysis", "Result", "Unit"], ["Crude protein", "8.5", "%"], ["Lysine", "0.3", "%"], ["Moisture", "12", "%"]],
])
@pytest.mark.parametrize("write", [None, write_text])
def test_a_table_with_nutrients_down_the_rows_is_refused_with_the_mend(rows: list[list[Any]], write: Any) -> None:
    reading = read(rows) if write is None else read(rows, write=write)
    assert fates(reading) == ["ignored", *["refused"] * (len(rows) - 1)]
    assert "turn the table" in reading.rows[1].reason


def test_a_sheet_without_a_table_is_a_question_for_every_row_with_a_number() -> None:
    assert fates(read([["Notes of March"], ["Maize", 8.5], ["thanks"]])) == ["ignored", "question", "ignored"]


def test_a_person_can_point_out_the_headings_and_say_what_a_column_holds() -> None:
    rows = [["Feed", "Result"], ["Maize", 8.6]]
    answers = (
        Answer(Asked.TABLE, "Prices", "row 1"), Answer(Asked.COLUMN, "Result", "nutrient"),
        Answer(Asked.NUTRIENT, "Result", "Crude protein"), Answer(Asked.CONCENTRATION, "Result", "%"),
        Answer(Asked.BASIS, "", FED),
    )
    (row,) = read(rows, *answers).accepted
    assert values_of(row) == {"Crude protein": (8.6, "%", FED)}


def test_the_columns_are_told_for_the_preview() -> None:
    rows = [["Ingredient", "Lab no", "Date", "CP % DM", "Truck"], ["Maize", "A", "2026-02-01", 9.5, "x"]]
    (sheet,) = read(rows).sheets
    (table,) = sheet.tables
    assert (table.heading_rows, table.first_row, table.last_row) == ((1,), 2, 2)
    assert [(one.role.value, one.says) for one in table.columns] == [
        ("name", ""), ("sample", ""), ("day of the sample", ""), ("nutrient", "Crude protein, %, on dry matter"),
        ("note", ""),
    ]


def test_merged_headings_stand_over_all_their_columns(tmp_path: Any) -> None:
    def write(path: Any, rows: Any) -> Any:
        book = openpyxl.Workbook()
        sheet = book.worksheets[0]
        for row in rows:
            sheet.append(row)
        sheet.merge_cells("B1:C1")
        sheet.merge_cells("D1:E1")
        book.save(path)
        return path

    rows = [
        [None, "As received", None, "Dry matter basis", None], ["Ingredient", "CP %", "Ca %", "CP %", "Ca %"],
        ["Maize", 8.6, 0.02, 9.8, 0.023],
    ]
    assert asked(read(rows, write=write)) == {("basis", "")}
    (row,) = read(rows, Answer(Asked.BASIS, "", DRY), write=write).accepted
    assert values_of(row) == {"Crude protein": (9.8, "%", DRY), "Calcium": (0.023, "%", DRY)}


def test_a_name_that_is_merged_over_several_samples_is_that_of_each() -> None:
    def write(path: Any, rows: Any) -> Any:
        book = openpyxl.Workbook()
        for row in rows:
            book.worksheets[0].append(row)
        book.worksheets[0].merge_cells("A2:A3")
        book.save(path)
        return path

    rows = [["Ingredient", "Sample", "CP % as fed"], ["Maize", 1, 8.4], [None, 2, 8.5], [None, 3, 8.6]]
    reading = read(rows, write=write)
    assert [row.ingredient for row in reading.rows[1:]] == ["Maize", "Maize", None]
    assert reading.rows[3].questions[0].asked is Asked.NAMELESS


@pytest.mark.parametrize(("heading", "role"), [
    ("Sample", "sample"), ("Lot/Batch", "sample"), ("Lab. No.", "sample"), ("Our ref", "sample"), ("Lab", "note"),
    ("Certificate nr", "sample"), ("Batch number", "sample"), ("Sr. No", "note"), ("Truck", "note"),
    ("Date of sampling", "day of the sample"),
    ("Sampled", "day of the sample"), ("Supplier", "note"), ("Sample date", "day of the sample"), ("Order no", "note"),
])
def test_what_identifies_a_sample_is_told_from_what_does_not(heading: str, role: str) -> None:
    reading = read([["Ingredient", heading, "CP % as fed"], ["Maize", "7", 8.4]])
    assert reading.sheets[0].tables[0].columns[1].role.value == role


def test_words_of_a_heading_are_told_apart() -> None:
    words = read_heading("Crude protein, % of the dry matter")
    assert (words.name, words.unit, str(words.basis)) == ("crude protein", "%", DRY)
    assert read_heading("DM").is_dry_matter
    assert not read_heading("DM digestibility %").is_dry_matter
    assert read_heading("% DM").says_only_how
    assert read_heading("Mg").name == "mg"
