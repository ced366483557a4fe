"""Price lists as they come: each made file is one mess or several, with the expected fate of every row."""

from __future__ import annotations

import datetime
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from openpyxl.styles import Font

from blendapp.domain.library import Library
from blendapp.domain.list_rows import ADD, LEAVE_OUT, TAKE, Answer, Fate, source_of
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.domain.quotes import Quote, Terms
from blendapp.domain.records import added
from blendapp.exchange import read_price_list
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows, write_ods, write_text, write_xls, write_xlsx
from tests.mills import TODAY

A, Q, R, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.REFUSED, Fate.IGNORED
HEAD = ["Ingredient", "Price", "Unit"]


def fates(reading: PriceListReading) -> list[Fate]:
    return [row.fate for row in reading.rows]


def prices(reading: PriceListReading) -> list[float | None]:
    return [None if row.price_per_t is None else round(row.price_per_t, 2) for row in reading.rows if row.fate is A]


def asked(row: PriceRow) -> list[Asked]:
    return [question.asked for question in row.questions]


# Headings and tables: the rows of a file, the fates of its rows that are not blank, the accepted prices per tonne.
HEADINGS: dict[str, tuple[Rows, list[Fate], list[float]]] = {
    "units in a second heading row": (
        [["Ingredient", "Price"], [None, "USD/t"], ["Maize", 205], ["Wheat", 212]],
        [IGNORED, IGNORED, A, A], [205, 212],
    ),
    "a second heading row goes on with the first": (
        [["Ingredient", "Price", "Valid"], ["name", "per short ton", "from"], ["Maize", 200, "2026-03-09"]],
        [IGNORED, IGNORED, A], [220.46],
    ),
    "a wide heading over the prices": (
        [[None, "Price USD/t"], ["Product", "Spot"], ["Maize", 205]], [IGNORED, IGNORED, A], [205],
    ),
    "a wide heading over base, freight and sum": (
        [[None, "USD per tonne"], ["Product", "Price", "Freight", "Delivered", "Unit"], ["Maize", 190, 15, 205, "t"]],
        [IGNORED, IGNORED, A], [205],
    ),
    "prices of two months under one heading": (
        [["Ingredient", "Price $/t", None], [None, "March", "April"], ["Maize", 205, 207]], [IGNORED, IGNORED, Q], [],
    ),
    "last week beside this week": (
        [[None, "Last week", "This week"], ["Product", "Price $/t", "Price $/t"], ["Maize", 200, 205]],
        [IGNORED, IGNORED, A], [205],
    ),
    "two columns headed alike": (
        [["Product", "Price $/t", "Price $/t"], ["Maize", 200, 205]], [IGNORED, Q], [],
    ),
    "a week in the heading": (
        [["Commodity", "Price $/t week 10"], ["Maize", 205]], [IGNORED, A], [205],
    ),
    "a month and a year in the heading": (
        [["Commodity", "Price March 2026", "Unit"], ["Maize", 205, "t"]], [IGNORED, A], [205],
    ),
    "title rows, a logo's caption and an address": (
        [["Larkwater Grain"], ["Yard Lane 3", None, "Phone 55"], [], HEAD, ["Maize", 205, "t"]],
        [IGNORED, IGNORED, IGNORED, A], [205],
    ),
    "two tables, the lower one with two heading rows": (
        [HEAD, ["Maize", 205, "t"], [], ["Product", "Price"], [None, "$/kg"], ["Soybean meal", 0.41]],
        [IGNORED, A, IGNORED, IGNORED, A], [205, 410],
    ),
    "two tables with different columns": (
        [HEAD, ["Maize", 205, "t"], ["Meals", "Unit", "Price"], ["Product", "Unit", "Price"],
         ["Soybean meal", "kg", 0.41]],
        [IGNORED, A, IGNORED, IGNORED, A], [205, 410],
    ),
    "tables side by side": (
        [["Grain", "Price $/t", None, "Product", "Price $/t"], ["Maize", 205, None, "Soybean meal", 410]],
        [IGNORED, Q], [],
    ),
    "the name stands last": ([["Price", "Unit", "Product"], [205, "t", "Maize"]], [IGNORED, A], [205]),
    "a blank row below the headings": ([HEAD, [], ["Maize", 205, "t"]], [IGNORED, A], [205]),
    "footnotes, a subtotal and a section": (
        [HEAD, ["Cereals:"], ["Maize", 205, "t"], ["Subtotal", 205, "t"], ["* subject to confirmation"]],
        [IGNORED, IGNORED, A, IGNORED, IGNORED], [205],
    ),
}


@pytest.mark.parametrize("write", [write_xlsx, write_ods, write_xls, write_text])
@pytest.mark.parametrize("mess", HEADINGS)
def test_the_table_is_found_under_any_headings(read: Read, mess: str, write: Any) -> None:
    rows, expected, per_t = HEADINGS[mess]
    reading = read(rows, write=write)
    assert fates(reading) == expected
    assert prices(reading) == per_t


def test_a_merged_heading_stands_over_every_column_that_it_covers(tmp_path: Path, library: Library) -> None:
    path = tmp_path / "list.xlsx"
    write_xlsx(path, [["Product", "Price USD/t", None], [None, "ex works", "delivered"], ["Maize", 195, 205]])
    book = openpyxl.load_workbook(path)
    book["Prices"].merge_cells("A1:A2")
    book["Prices"].merge_cells("B1:C1")
    book.save(path)
    (question,) = read_price_list(path, library, TODAY).questions
    assert question.choices == ("Price USD/t ex works", "Price USD/t delivered")
    answer = Answer(Asked.PRICE, question.about, "Price USD/t delivered")
    (row,) = read_price_list(path, library, TODAY, answers=[answer]).accepted
    assert (row.row, row.price_per_t, row.terms) == (3, 205, Terms.DELIVERED)


# Units: the rows of a file, and the price per tonne of its one row with a price, None for a question.
UNITS: dict[str, tuple[Rows, float | None]] = {
    "in a title": ([["Prices in USD per tonne"], HEAD[:2], ["Maize", 205]], 205),
    "in a footnote": ([HEAD[:2], ["Maize", 200], ["All prices per short ton, ex store."]], 220.46),
    "in a note that the row outdoes": ([["Quotes are in $/t unless said"], HEAD, ["Maize", 0.205, "kg"]], 205),
    "in two notes that differ": ([["Prices per t"], HEAD[:2], ["Maize", 205], ["Prices per short ton"]], None),
    "in a note in another currency": ([["Prices in EUR/t"], HEAD[:2], ["Maize", 205]], None),
    "a note about freight": ([["Prices plus freight of $12/t"], HEAD[:2], ["Maize", 205]], None),
    "a note that speaks of something else": ([["We deliver 25 t per day"], HEAD[:2], ["Maize", 205]], None),
    "a bag of 25 kg": ([HEAD, ["Maize", 5.1, "25 kg bag"]], 204),
    "a bag of 50 lb": ([HEAD, ["Maize", 4.6, "bag of 50 lb"]], 202.83),
    "a bag beside the number": ([HEAD[:2], ["Maize", "$ 5.10 / 25 kg bag"]], 204),
    "a bag in the heading": ([["Product", "Price per 25 kg bag"], ["Maize", 5.1]], 204),
    "a bag with its weight in a column": ([[*HEAD, "Bag weight"], ["Maize", 5.1, "bag", "25 kg"]], 204),
    "a bag without a weight": ([HEAD, ["Maize", 5.1, "bag"]], None),
    "per 100 kg": ([HEAD, ["Maize", 20.5, "100 kg"]], 205),
    "per lb": ([HEAD, ["Maize", 0.09, "lb"]], 198.42),
    "per cwt of 100 lb": ([HEAD, ["Maize", 9.3, "100 lb"]], 205.03),
    "per long ton": ([HEAD, ["Maize", 205, "long ton"]], 201.76),
    "per bushel of the legal weight": ([HEAD, ["Maize", 5.1, "bu"]], 200.78),
    "a bare ton": ([HEAD, ["Maize", 205, "ton"]], None),
    "a bare cwt": ([HEAD, ["Maize", 10, "cwt"]], None),
    "no unit": ([HEAD, ["Maize", 205, None]], None),
}


@pytest.mark.parametrize("mess", UNITS)
def test_the_unit_is_read_wherever_it_stands_and_else_asked(read: Read, mess: str) -> None:
    rows, per_t = UNITS[mess]
    priced = [row for row in read(rows).rows if row.fate is not IGNORED]
    assert [row.fate for row in priced] == [Q if per_t is None else A]
    if per_t is not None:
        assert priced[0].price_per_t == pytest.approx(per_t, abs=0.01)


def test_a_unit_in_doubt_is_asked_once_and_answered_for_every_row(read: Read) -> None:
    rows: Rows = [HEAD, ["Maize", 200, "ton"], ["Wheat", 210, "Ton"], ["Soybean meal", 410, "t"]]
    (question,) = read(rows).questions
    assert (question.asked, question.about) == (Asked.UNIT, "ton")
    assert question.choices == ("short ton", "long ton", "t")
    assert prices(read(rows, Answer(Asked.UNIT, "ton", "short ton"))) == [220.46, 231.49, 410]


def test_a_bag_may_be_answered_with_its_weight(read: Read) -> None:
    rows: Rows = [HEAD, ["Maize", 5, "bag"]]
    assert read(rows).questions[0].about == "bag"
    assert prices(read(rows, Answer(Asked.UNIT, "bag", "25 kg bag"))) == [200]


def test_another_currency_wants_a_rate_and_its_day(read: Read) -> None:
    rows: Rows = [["Product", "Price EUR/t"], ["Maize", 180], ["Wheat", 190]]
    (question,) = read(rows).questions
    assert (question.asked, question.about) == (Asked.RATE, "EUR")
    undated = read(rows, Answer(Asked.RATE, "EUR", rate=1.1))
    assert fates(undated) == [IGNORED, Q, Q]
    assert [row.price_per_t for row in undated.rows] == [None, None, None]
    reading = read(rows, Answer(Asked.RATE, "EUR", rate=1.1, given=TODAY))
    assert prices(reading) == [198, 209]
    assert "2026-03-02" in reading.accepted[0].reason
    assert reading.accepted[0].entered == "180"


def test_hundredths_are_asked_once_and_divided(read: Read) -> None:
    rows: Rows = [["Product", "Price"], ["Maize", "510 p/bu"]]
    assert asked(read(rows).rows[1]) == [Asked.CENTS]
    assert prices(read(rows, Answer(Asked.CENTS, "", TAKE))) == [200.78]


FREIGHT = ["Ingredient", "Price", "Freight", "Unit"]


def test_freight_is_added_once_and_only_as_answered(read: Read) -> None:
    rows: Rows = [FREIGHT, ["Maize", 190, 15, "t"], ["Wheat", 195, 14.5, "t"], ["Limestone", 30, None, "t"]]
    (question,) = read(rows).questions
    assert (question.asked, question.choices) == (Asked.PRICE, (ADD, "Price"))
    added = read(rows, Answer(Asked.PRICE, question.about, ADD))
    assert fates(added) == [IGNORED, A, A, Q]
    assert prices(added) == [205, 209.5]
    assert (added.accepted[0].terms, added.accepted[0].entered) == (Terms.DELIVERED, "190 + 15")
    assert prices(read(rows, Answer(Asked.PRICE, question.about, "Price"))) == [190, 195, 30]


def test_freight_in_another_unit_is_added_per_tonne(read: Read) -> None:
    rows: Rows = [["Ingredient", "Price $/bu", "Freight $/t"], ["Maize", 4.8, 12]]
    about = read(rows).questions[0].about
    (row,) = read(rows, Answer(Asked.PRICE, about, ADD)).accepted
    assert (row.per, row.price_per_t) == ("t", pytest.approx(4.8 * 39.36826 + 12, rel=1e-6))


@pytest.mark.parametrize("rows", [
    [["Product", "Price $/t + freight"], ["Maize", 205]],
    [["Product", "Price $/t excl. freight"], ["Maize", 205]],
    [["Prices plus haulage as agreed"], HEAD, ["Maize", 205, "t"]],
    [HEAD, ["Maize", 205, "t"], ["* carriage is extra"]],
    [[*HEAD, "Terms"], ["Maize", 205, "t", "delivery not included"]],
    [[*HEAD, "Discount"], ["Maize", 205, "t", 5]],
])
def test_what_comes_on_top_of_a_price_is_asked_once_and_remembered(read: Read, rows: Rows) -> None:
    (question,) = read(rows).questions
    assert (question.asked, question.choices) == (Asked.PRICE, (TAKE,))
    assert prices(read(rows, Answer(Asked.PRICE, question.about, TAKE))) == [205]


@pytest.mark.parametrize("heading", ["Price $/t incl. freight", "Price $/t, carriage paid"])
def test_a_price_with_its_freight_is_delivered(read: Read, heading: str) -> None:
    assert read([["Product", heading], ["Maize", 205]]).accepted[0].terms is Terms.DELIVERED


@pytest.mark.parametrize(
    ("heading", "terms"),
    [("Price ex works", Terms.EX_WORKS), ("Delivered price", Terms.DELIVERED), ("Price FOB", Terms.EX_WORKS),
     ("Price", None)],
)
def test_the_terms_of_a_price_are_kept(read: Read, heading: str, terms: Terms | None) -> None:
    assert read([["Ingredient", heading, "Unit"], ["Maize", 205, "t"]]).accepted[0].terms is terms


def test_other_terms_than_those_of_the_price_in_force_are_asked_about(read: Read, library: Library) -> None:
    library.apply([added(Quote(99, 1, 200.0, terms=Terms.DELIVERED))])
    rows: Rows = [[*HEAD, "Terms"], ["Maize", 205, "t", "ex works"]]
    assert asked(read(rows).rows[1]) == [Asked.TERMS]
    assert asked(read([[*HEAD, "Terms"], ["Maize", 205, "t", "delivered"]]).rows[1]) == []
    assert prices(read(rows, Answer(Asked.TERMS, "", TAKE, sheet="Prices", row=2))) == [205]


@pytest.mark.parametrize(
    ("heading", "unit", "cell"),
    [("Price USD/t DM", None, 230), ("Price on dry matter basis", "t", 230), ("Price", "t dry matter", 230),
     ("Price", "t", "230 / t DM"), ("Price (dry basis)", "t", 230), ("Price per tonne of dry matter", None, 230)],
)
def test_a_price_of_dry_matter_is_converted_and_shown_both_ways(
    read: Read, heading: str, unit: str | None, cell: Any
) -> None:
    (row,) = read([["Ingredient", heading, "Unit"], ["Maize", cell, unit]]).accepted
    assert (row.price_per_t, row.dry_matter_price_per_t) == (pytest.approx(202.4), pytest.approx(230))
    assert "230.00" in row.reason
    assert "202.40" in row.reason


@pytest.mark.parametrize("basis", ["DM", "dry matter", "Dry basis"])
def test_dry_matter_may_be_said_in_a_column_of_its_own(read: Read, basis: str) -> None:
    (row,) = read([[*HEAD, "Basis"], ["Maize", 230, "t", basis]]).accepted
    assert (row.price_per_t, row.dry_matter_price_per_t) == (pytest.approx(202.4), pytest.approx(230))
    (row,) = read([[*HEAD, "Basis"], ["Maize", 205, "t", "as fed"]]).accepted
    assert (row.price_per_t, row.dry_matter_price_per_t) == (205, None)


def test_dry_matter_in_a_note_counts_for_every_price(read: Read) -> None:
    (row,) = read([["All prices in USD/t of dry matter"], HEAD[:2], ["Maize", 230]]).accepted
    assert row.price_per_t == pytest.approx(202.4)


def test_a_price_of_dry_matter_without_a_dry_matter_is_a_question(read: Read) -> None:
    row = read([["Ingredient", "Price USD/t DM"], ["Limestone", 30]]).rows[1]
    assert (row.fate, row.price_per_t) == (Q, None)


def test_a_stated_dry_matter_of_the_goods_is_no_price_of_dry_matter(read: Read) -> None:
    (row,) = read([["Ingredient", "Price USD/t, 88 % dry matter"], ["Maize", 205]]).accepted
    assert (row.price_per_t, row.dry_matter_price_per_t) == (205, None)


def test_what_is_struck_through_or_hidden_is_asked_row_by_row(tmp_path: Path, library: Library) -> None:
    rows: Rows = [HEAD, ["Maize", 205, "t"], ["Wheat", 212, "t"], ["Soybean meal", 410, "t"]]
    path = write_xlsx(tmp_path / "list.xlsx", rows)
    book = openpyxl.load_workbook(path)
    book["Prices"]["B2"].font = Font(strike=True)
    book["Prices"].row_dimensions[3].hidden = True
    book["Prices"]["C4"].font = Font(strike=False)
    book.save(path)
    reading = read_price_list(path, library, TODAY)
    assert [asked(row) for row in reading.rows] == [[], [Asked.STRUCK], [Asked.HIDDEN], []]
    answers = [
        Answer(Asked.STRUCK, "", LEAVE_OUT, sheet="Prices", row=2),
        Answer(Asked.HIDDEN, "", TAKE, sheet="Prices", row=3),
    ]
    assert fates(read_price_list(path, library, TODAY, answers=answers)) == [IGNORED, IGNORED, A, A]


def test_a_hidden_column_is_one_question(tmp_path: Path, library: Library) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", [HEAD, ["Maize", 205, "t"], ["Wheat", 212, "t"]])
    book = openpyxl.load_workbook(path)
    book["Prices"].column_dimensions["B"].hidden = True
    book.save(path)
    (question,) = read_price_list(path, library, TODAY).questions
    assert (question.asked, question.about) == (Asked.HIDDEN_COLUMN, "Price")
    answered = read_price_list(path, library, TODAY, answers=[Answer(Asked.HIDDEN_COLUMN, "Price", TAKE)])
    assert prices(answered) == [205, 212]


@pytest.mark.parametrize("write", [write_ods, write_xls])
def test_a_file_that_does_not_tell_what_is_hidden_says_so(read: Read, write: Any) -> None:
    reading = read([HEAD, ["Maize", 205, "t"]], write=write)
    assert any("hidden" in note for note in reading.notes)


def test_a_decimal_sign_that_the_column_does_not_tell_may_be_answered(read: Read) -> None:
    rows: Rows = [HEAD, ["Limestone", "1.234", "t"], ["Molasses", "2.346", "t"]]
    (question,) = read(rows).questions
    assert question.asked is Asked.DECIMAL
    assert prices(read(rows, Answer(Asked.DECIMAL, "Price", "."))) == [1.23, 2.35]
    assert prices(read(rows, Answer(Asked.DECIMAL, "Price", ","))) == [1234, 2346]


def test_an_answered_name_is_that_ingredient_or_is_left_out(read: Read) -> None:
    rows: Rows = [HEAD, ["Yellow corn", 205, "t"], ["Pallets", 12, "t"]]
    answers = Answer(Asked.INGREDIENT, "yellow corn", ingredient_id=1), Answer(Asked.INGREDIENT, "Pallets", LEAVE_OUT)
    reading = read(rows, *answers)
    assert fates(reading) == [IGNORED, A, IGNORED]
    assert reading.accepted[0].ingredient == "Maize"


def test_the_one_of_two_that_was_answered_to_hold_leaves_the_other_out(read: Read) -> None:
    rows: Rows = [HEAD, ["Maize", 205, "t"], ["maize", 207, "t"]]
    assert [asked(row) for row in read(rows).rows] == [[], [Asked.TWIN], [Asked.TWIN]]
    assert fates(read(rows, Answer(Asked.TWIN, "", TAKE, sheet="Prices", row=3))) == [IGNORED, IGNORED, A]


def test_prices_of_one_ingredient_from_different_days_to_come_are_no_twins(read: Read) -> None:
    days = [TODAY, datetime.date(2026, 3, 9), datetime.date(2026, 4, 9)]
    reading = read([[*HEAD, "Valid from"], *(["Maize", 205 + n, "t", day] for n, day in enumerate(days))])
    assert [row.valid_from for row in reading.accepted] == days


@pytest.mark.parametrize(
    ("price", "kind"), [(2050, Asked.CHANGE), (300, Asked.CHANGE), (-5, Asked.SIGN), (0, Asked.SIGN)]
)
def test_a_leap_and_a_price_of_0_or_below_count_when_answered(read: Read, price: float, kind: Asked) -> None:
    rows: Rows = [HEAD, ["Maize", price, "t"]]
    found = asked(read(rows).rows[1])
    assert found == [kind]
    assert prices(read(rows, Answer(kind, "", TAKE, sheet="Prices", row=2))) == [price]
    assert fates(read(rows, Answer(kind, "", LEAVE_OUT, sheet="Prices", row=2))) == [IGNORED, IGNORED]


@pytest.mark.parametrize(
    ("one", "other"),
    [("Larkwater 2026-03-02.xlsx", "larkwater 2026-03-09.xls"), ("Bay_Grain_week 10.csv", "bay grain week 11.csv"),
     ("Bay Grain wk9.csv", "Bay Grain wk10.csv"), ("prices 2 March 2026.csv", "prices 9 March 2026 (1).csv")],
)
def test_the_files_of_two_weeks_have_one_source(one: str, other: str) -> None:
    assert source_of(one) == source_of(other)
    assert source_of(one) != source_of("Seaboard 2026-03-02.xlsx")
