"""Lists of analyses: the fate of every row, by names, samples, days, amounts, and what stands where there is none."""

from __future__ import annotations

import datetime
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from blendapp.domain.list_rows import DAY_FIRST, LEAVE_OUT, TAKE, Answer, Fate
from blendapp.domain.mills import Asked, Synonym
from blendapp.domain.problems import Refused
from blendapp.domain.records import added
from tests.exchange.composition_cases import LIBRARY, asked, fates, mill, read, values_of
from tests.exchange.made_lists import write_text, write_xlsx

HEAD = ["Ingredient", "Sample", "Date", "CP % as fed", "Starch % as fed"]


def one(*cells: Any, answers: tuple[Answer, ...] = (), **more: Any) -> Any:
    """The row of a list of one sample."""
    return read([HEAD, list(cells)], *answers, **more).rows[1]


# -- what a cell holds


@pytest.mark.parametrize("words", [
    "n.d.", "ND", "<0.01", "< 0,5", "trace", "Tr.", "not detected", "n/a", "bdl", "<LOD", "> 90", "pending", "*",
    "below detection limit",
])
def test_what_is_below_detection_or_not_measured_stays_unknown_and_is_said(words: str) -> None:
    row = one("Maize", "A", None, 8.5, words)
    assert row.fate is Fate.ACCEPTED
    assert set(values_of(row)) == {"Crude protein"}
    assert f"Left unknown, which is not 0: “Starch % as fed” ({words})." in row.reason


@pytest.mark.parametrize("words", [None, "", "-", " \u2013 ", "--"])
def test_a_blank_or_a_dash_is_unknown_without_a_word(words: str | None) -> None:
    row = one("Maize", "A", None, 8.5, words)
    assert (row.fate, row.reason, set(values_of(row))) == (Fate.ACCEPTED, "", {"Crude protein"})


def test_a_known_absence_is_0() -> None:
    assert values_of(one("Maize", "A", None, 8.5, 0))["Starch"] == (0, "%", "as fed")


@pytest.mark.parametrize("words", [
    "12-14", "8.5 ± 0.3", "ca. 8.5", "8.5*", "8.5 / 8.7", "about 8", "8.5 g/kg", "8.5 %CP", "8.5 (2)", True,
    datetime.date(2026, 8, 5),
])
def test_what_is_not_one_amount_is_a_question(words: Any) -> None:
    row = one("Maize", "A", None, words, 60)
    assert row.fate is Fate.QUESTION
    assert set(values_of(row)) == {"Starch"}


def test_an_amount_may_bring_its_unit() -> None:
    assert values_of(one("Maize", "A", None, "8.5 %", "61.2%"))["Starch"][:2] == (61.2, "%")
    rows = [["Ingredient", "CP", "Ca"], ["Maize", "8.5 % as fed", "0.2 g/kg as fed"]]
    assert values_of(read(rows).rows[1]) == {
        "Crude protein": (8.5, "%", "as fed"), "Calcium": (0.2, "g/kg", "as fed")
    }


def test_a_cell_shown_as_a_percentage_is_in_percent() -> None:
    def write(path: Path, rows: Any) -> Path:
        book = openpyxl.Workbook()
        for row in rows:
            book.worksheets[0].append(row)
        book.worksheets[0]["B2"].number_format = "0.0%"
        book.save(path)
        return path

    row = read([["Ingredient", "CP as fed"], ["Maize", 0.084]], write=write).rows[1]
    assert values_of(row) == {"Crude protein": (8.4, "%", "as fed")}
    assert fates(read([["Ingredient", "CP g/kg as fed"], ["Maize", 0.084]], write=write))[1] == "question"


@pytest.mark.parametrize(("texts", "amounts"), [
    (["8,5", "12,25", "9"], [8.5, 12.25, 9]), (["8.5", "12.25", "9"], [8.5, 12.25, 9]),
    (["1.234,5", "900", "1.000"], [1234.5, 900, 1000]), (["0,950", "1,234"], [0.95, 1.234]),
])
def test_the_decimal_sign_is_decided_over_the_column(texts: list[str], amounts: list[float]) -> None:
    rows = [["Ingredient", "No of sample", "Zn mg/kg as fed"], *(["Wheat bran", f"S{t}", t] for t in texts)]
    reading = read([["Ingredient", "Sample", "ME poultry kcal/kg as fed"], *rows[1:]])
    got = [values_of(row)["ME poultry"][0] for row in reading.rows[1:]]
    assert got == amounts
    assert all("stored as text" in row.reason for row in reading.rows[1:])


def test_a_column_that_fits_both_ways_is_asked_once() -> None:
    rows = [["Ingredient", "Sample", "ME poultry kcal/kg as fed"], ["Maize", 1, "3,350"], ["Maize", 2, "3,410"]]
    reading = read(rows)
    assert asked(reading) == {("decimal", "ME poultry kcal/kg as fed")}
    answered = read(rows, Answer(Asked.DECIMAL, "ME poultry kcal/kg as fed", "."))
    assert [values_of(row)["ME poultry"][0] for row in answered.accepted] == [3350, 3410]


@pytest.mark.parametrize("text", ["#N/A", "#DIV/0!", "=B2/2"])
@pytest.mark.parametrize("column", [0, 1, 3])
def test_an_error_in_a_cell_that_is_read_refuses_its_row(text: str, column: int) -> None:
    cells: list[Any] = ["Maize", "A", None, "8.5", "60"]
    cells[column] = text
    row = one(*cells, write=write_text)
    assert row.fate is Fate.REFUSED
    assert row.values == ()


def test_an_error_in_a_column_that_is_left_out_does_no_harm() -> None:
    rows = [["Ingredient", "Mould 1/g", "CP % as fed"], ["Maize", "#N/A", "8.5"], ["Maize", "12", "8.6"]]
    reading = read(rows, Answer(Asked.NUTRIENT, "Mould 1/g", LEAVE_OUT), write=write_text)
    assert reading.count(Fate.REFUSED) == 0


# -- impossible and unusual values


@pytest.mark.parametrize(("heading", "value"), [("Starch % as fed", 105), ("CP % DM", 101), ("Ca g/kg as fed", 1200)])
def test_more_than_the_whole_is_a_question_that_a_person_may_confirm(heading: str, value: float) -> None:
    rows = [["Ingredient", heading, "DM %"], ["Wheat bran", value, 88]]
    reading = read(rows)
    assert fates(reading)[1] == "question"
    assert "more than the whole" in reading.rows[1].reason
    taken = Answer(Asked.CHANGE, "", TAKE, sheet="Prices", row=2)
    assert read(rows, taken).rows[1].fate is Fate.ACCEPTED


@pytest.mark.parametrize(("heading", "value"), [
    ("CP % as fed", -3), ("DM %", 101), ("DM %", -1), ("Moisture %", 120), ("DM g/kg", 1100), ("Ca g/kg as fed", -0.1),
])
def test_what_cannot_be_is_refused(heading: str, value: float) -> None:
    row = read([["Ingredient", heading], ["Wheat bran", value]]).rows[1]
    assert (row.fate, row.questions, row.values) == (Fate.REFUSED, (), ())


@pytest.mark.parametrize(("value", "fate", "words"), [
    (8.5, Fate.ACCEPTED, ""), (11.0, Fate.ACCEPTED, ""), (6.0, Fate.ACCEPTED, ""), (11.1, Fate.QUESTION, "moves from"),
    (5.9, Fate.QUESTION, "moves from"), (85, Fate.QUESTION, "about 10 times"), (0.85, Fate.QUESTION, "a 10th"),
    (0.0085, Fate.QUESTION, "a 1000th"), (0, Fate.QUESTION, "moves from"), (880, Fate.QUESTION, "about 100 times"),
])
def test_a_change_beyond_30_percent_or_by_a_power_of_ten_is_a_question(value: float, fate: Fate, words: str) -> None:
    row = one("Maize", "A", None, value, None)
    assert row.fate is fate
    assert words in row.reason
    taken = Answer(Asked.CHANGE, "", TAKE, sheet="Prices", row=2)
    assert one("Maize", "A", None, value, None, answers=(taken,)).fate is Fate.ACCEPTED
    left = Answer(Asked.CHANGE, "", LEAVE_OUT, sheet="Prices", row=2)
    if fate is Fate.QUESTION:
        assert one("Maize", "A", None, value, None, answers=(left,)).fate is Fate.IGNORED


def test_the_value_in_use_is_compared_in_the_unit_and_on_the_basis_of_the_list() -> None:
    (value,) = read([["Ingredient", "CP g/kg DM"], ["Maize", 96]]).rows[1].values
    assert value.old == pytest.approx(8.5 * 10 / 0.88)
    assert read([["Ingredient", "CP g/kg DM"], ["Maize", 960]]).rows[1].fate is Fate.QUESTION
    (dry,) = read([["Ingredient", "DM %"], ["Maize", 50]]).rows[1].values
    assert dry.old == 88
    assert read([["Ingredient", "DM %"], ["Maize", 50]]).rows[1].fate is Fate.QUESTION


def test_one_of_several_new_samples_that_is_a_power_of_ten_off_is_a_question() -> None:
    rows = [["Ingredient", "Sample", "Starch % as fed"], *(["Maize", n, v] for n, v in enumerate((62, 6.3, 61, 60)))]
    assert fates(read(rows)) == ["ignored", "accepted", "question", "accepted", "accepted"]


def test_moisture_and_dry_matter_that_do_not_add_up_are_a_question() -> None:
    rows = [["Ingredient", "DM %", "Moisture %"], ["Maize", 88, 12.3]]
    (value,) = read(rows).accepted[0].values
    assert value.amount == 88
    assert fates(read([rows[0], ["Maize", 88, 14]]))[1] == "question"


def test_values_on_dry_matter_need_a_dry_matter() -> None:
    assert fates(read([["Ingredient", "CP % DM"], ["Wheat bran", 17]]))[1] == "question"
    assert fates(read([["Ingredient", "CP % DM", "DM %"], ["Wheat bran", 17, 88]]))[1] == "accepted"
    assert fates(read([["Ingredient", "CP % DM"], ["Soybean meal", 51]]))[1] == "accepted"


# -- names, samples and days


def test_names_are_exact_then_answered_and_never_taken_by_likeness() -> None:
    rows = [HEAD, ["MAIZE ", 1, None, 8.5], ["Soy bean meal", 2, None, 45], ["Soya meal", 3, None, 45],
            ["Maize meal", 4, None, 9]]
    reading = read(rows)
    assert [(row.fate, row.ingredient) for row in reading.rows[1:]] == [
        (Fate.ACCEPTED, "Maize"), (Fate.ACCEPTED, "Soybean meal"), (Fate.QUESTION, None), (Fate.QUESTION, None)
    ]
    assert "Soybean meal" in reading.rows[3].questions[0].choices
    answers = Answer(Asked.INGREDIENT, "Soya meal", ingredient_id=2), Answer(Asked.INGREDIENT, "Maize meal", LEAVE_OUT)
    assert fates(read(rows, *answers))[3:] == ["accepted", "ignored"]


def test_a_name_that_a_price_list_taught_is_known_to_the_laboratory_too() -> None:
    library = mill()
    library.apply([added(Synonym(1, "seaboard", "Yellow corn", 1))])
    assert one("Yellow corn", "A", None, 8.5, None, library=library).ingredient == "Maize"


def test_several_samples_of_an_ingredient_are_normal_and_the_same_one_twice_is_a_question() -> None:
    rows = [
        HEAD, ["Maize", "A", "2026-02-01", 8.5], ["Maize", "B", "2026-02-01", 8.6], ["Maize", "A", "2026-02-02", 8.4],
        ["maize", "a", "2026-02-01", 8.7], ["Wheat bran", "A", "2026-02-01", 15],
    ]
    reading = read(rows)
    assert fates(reading)[1:] == ["question", "accepted", "accepted", "question", "accepted"]
    assert "row 5" in reading.rows[1].reason
    answered = read(rows, Answer(Asked.TWIN, "", TAKE, sheet="Prices", row=5))
    assert fates(answered)[1:] == ["ignored", "accepted", "accepted", "accepted", "accepted"]
    assert fates(read([["Ingredient", "CP % as fed"], ["Maize", 8.5], ["Maize", 8.6]]))[1:] == ["question"] * 2


@pytest.mark.parametrize(("text", "day"), [
    (datetime.date(2026, 2, 3), datetime.date(2026, 2, 3)), ("3 Feb 2026", datetime.date(2026, 2, 3)),
    ("2026-02-03", datetime.date(2026, 2, 3)), ("13/2/2026", datetime.date(2026, 2, 13)),
])
def test_the_day_of_a_sample_is_read(text: Any, day: datetime.date) -> None:
    assert one("Maize", "A", text, 8.5, None).sampled == day


def test_a_day_that_could_be_two_is_asked_and_one_to_come_is_a_question() -> None:
    reading = read([HEAD, ["Maize", "A", "3/2/2026", 8.5]])
    assert asked(reading) == {("dates", "Date")}
    (row,) = read([HEAD, ["Maize", "A", "3/2/2026", 8.5]], Answer(Asked.DATES, "Date", DAY_FIRST)).accepted
    assert row.sampled == datetime.date(2026, 2, 3)
    assert one("Maize", "A", "2026-03-03", 8.5, None).fate is Fate.QUESTION


def test_sample_numbers_are_kept_as_they_stand() -> None:
    rows = [["No", "Lab no", "Lot", "Ingredient", "CP % as fed"], [1, "L-26/113", 4711, "Maize", 8.5]]
    assert read(rows).rows[1].sample == "L-26/113 / 4711"


@pytest.mark.parametrize("cells", [
    ["Mean", None, None, 8.5, 60], ["Maize", "Average", None, 8.5, 60], ["Std. dev.", None, None, 0.2, 1],
    [None, "n", None, 3, 3], ["Detection limit", None, None, 0.1, 0.1], ["Method", None, None, "ISO 1", "ISO 2"],
    ["All samples were ground", None, None, None, None], ["Maize", "A", None, None, None], ["Total", None, None, 9, 1],
    ["Maize", "A", None, "n.d.", "-"],
])
def test_rows_that_are_no_sample_are_ignored_and_listed(cells: list[Any]) -> None:
    rows = [HEAD, ["Wheat bran", "W", None, 15, 20], cells]
    assert fates(read(rows)) == ["ignored", "accepted", "ignored"]


def test_two_bases_of_one_nutrient_need_the_dry_matter_of_the_sample() -> None:
    head = ["Ingredient", "Sample", "Basis", "CP %", "DM %"]
    rows = [head, ["Maize", 1, "as fed", 8.5, None], ["Maize", 2, "DM", 9.6, None]]
    assert fates(read(rows))[1:] == ["accepted", "question"]
    assert fates(read([*rows[:2], ["Maize", 2, "DM", 9.6, 88]]))[1:] == ["accepted", "accepted"]


# -- hidden, struck through, blank, and files that are no list


def test_what_is_hidden_or_struck_through_is_asked_about() -> None:
    def write(path: Path, rows: Any) -> Path:
        book = openpyxl.Workbook()
        sheet = book.worksheets[0]
        for row in rows:
            sheet.append(row)
        sheet.row_dimensions[2].hidden = True
        sheet["D3"].font = openpyxl.styles.Font(strike=True)
        book.save(path)
        return path

    rows = [HEAD, ["Maize", 1, None, 8.5], ["Maize", 2, None, 8.6], ["Maize", 3, None, 8.6]]
    reading = read(rows, write=write)
    assert fates(reading) == ["ignored", "question", "question", "accepted"]
    assert [one.asked for one in reading.questions] == [Asked.HIDDEN, Asked.STRUCK]
    taken = [Answer(asked, "", TAKE, sheet="Sheet", row=row) for asked, row in ((Asked.HIDDEN, 2), (Asked.STRUCK, 3))]
    assert fates(read(rows, *taken, write=write)) == ["ignored", "accepted", "accepted", "accepted"]


def test_a_hidden_column_of_values_is_asked_about_once() -> None:
    def write(path: Path, rows: Any) -> Path:
        book = openpyxl.Workbook()
        for row in rows:
            book.worksheets[0].append(row)
        book.worksheets[0].column_dimensions["D"].hidden = True
        book.save(path)
        return path

    rows = [HEAD, ["Maize", 1, None, 8.5], ["Maize", 2, None, 8.6]]
    assert asked(read(rows, write=write)) == {("hidden column", "CP % as fed")}
    taken = Answer(Asked.HIDDEN_COLUMN, "CP % as fed", TAKE)
    assert fates(read(rows, taken, write=write)) == ["ignored", "accepted", "accepted"]


def test_every_visible_sheet_is_read_and_hidden_ones_are_named() -> None:
    def write(path: Path, rows: Any) -> Path:
        book = openpyxl.Workbook()
        for name in ("North", "South", "Old"):
            sheet = book.create_sheet(name)
            for row in rows:
                sheet.append([name if cell == "A" else cell for cell in row])
        book["Old"].sheet_state = "hidden"
        book.remove(book["Sheet"])
        book.save(path)
        return path

    reading = read([HEAD, ["Maize", "A", None, 8.5]], write=write)
    assert [(row.sheet, row.sample) for row in reading.accepted] == [("North", "North"), ("South", "South")]
    assert "Old" in reading.notes[0]
    reading = read([HEAD, ["Maize", "A", None, 8.5]], write=write, sheet="south")
    assert [row.sheet for row in reading.accepted] == ["South"]


def test_a_blank_tail_has_no_entries(tmp_path: Path) -> None:
    rows = [HEAD, ["Maize", "A", None, 8.5], *([[None]] * 2000)]
    assert [row.row for row in read(rows, write=lambda path, r: write_xlsx(path, r)).rows] == [1, 2]


@pytest.mark.parametrize("content", [b"", b"\x00\x01\x02" * 99, b"PK\x03\x04broken"])
def test_a_file_that_is_no_list_is_refused_in_one_sentence(content: bytes) -> None:
    def write(path: Path, _rows: Any) -> Path:
        path.write_bytes(content)
        return path

    with pytest.raises(Refused) as caught:
        read([], write=write)
    assert len(caught.value.problems) == 1


def test_nothing_of_the_mill_changes_by_reading() -> None:
    before = {kind: dict(found) for kind, found in LIBRARY.records.items()}
    read([HEAD, ["Maize", "A", None, 85]])
    assert LIBRARY.records == before


def test_a_cell_of_very_much_text_is_a_question_in_few_words() -> None:
    row = one("Maize", "A", None, "1" * 20_000 + " %", 60)
    assert row.fate is Fate.QUESTION
    assert len(row.reason) < 300
    assert fates(read([["Ingredient", "CP % as fed" + " x" * 5000], ["Maize", 8.5]])) == ["ignored", "question"]


def test_more_tables_than_anybody_makes_are_refused() -> None:
    with pytest.raises(Refused, match="rows of headings"):
        read([["Ingredient", "CP % as fed"], ["Maize", 8.5]] * 600, write=write_text)


def test_very_many_rows_of_one_sample_are_each_a_question() -> None:
    reading = read([["Ingredient", "CP % as fed"], *([["Maize", 8.5]] * 5000)], write=write_text)
    assert reading.count(Fate.QUESTION) == 5000
    assert max(len(row.reason) for row in reading.rows) < 300
