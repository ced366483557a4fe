"""Each row of a price list has one fate, and no price is ever guessed."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from pathlib import Path
from typing import Any

import openpyxl
import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import Synonym
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.domain.problems import Refused
from blendapp.exchange import read_price_list
from tests.exchange.made_lists import Rows, write_ods, write_text, write_xls, write_xlsx
from tests.mills import TODAY, Maker

HEAD = ["Ingredient", "Price", "Unit"]


def made_mill(**mill: Any) -> Library:
    maker = Maker(**mill)
    maker.ingredient("Maize", 200.0)
    maker.ingredient("Wheat", 210.0)
    maker.ingredient("Soybean meal 44 %", 400.0)
    maker.ingredient("Soybean meal 48 %", 430.0)
    maker.ingredient("Limestone")
    maker.ingredient("Lime")
    maker.ingredient("Rapskuchen, kaltgepreßt", 300.0)
    maker.ingredient("Premix 1.5")
    maker.ingredient("Premix 15")
    return maker.library


@pytest.fixture
def library() -> Library:
    return made_mill()


@pytest.fixture
def read(tmp_path: Path, library: Library) -> Callable[..., list[PriceRow]]:
    """Reads rows as a text separated by semicolons, or as a workbook."""

    def reader(*rows: list[Any], workbook: bool = False, mill: Library | None = None) -> list[PriceRow]:
        write = write_xlsx if workbook else lambda path, rows: write_text(path, rows, ";")
        return list(read_price_list(write(tmp_path / "list", rows), mill or library, TODAY).rows)

    return reader


def only(rows: list[PriceRow]) -> PriceRow:
    """The one row below the heading."""
    assert len(rows) == 2
    assert rows[0].fate is Fate.IGNORED
    return rows[1]


def test_a_plain_row_is_accepted_with_its_price_per_tonne(read: Callable[..., list[PriceRow]]) -> None:
    row = only(read(HEAD, ["Maize", "5.10", "bu"]))
    assert (row.fate, row.ingredient, row.price, row.per, row.bushel_lb) == (Fate.ACCEPTED, "Maize", 5.1, "bu", 56)
    assert row.price_per_t == pytest.approx(5.1 * 39.36826, rel=1e-6)
    assert (row.old_price_per_t, row.unit, row.entered) == (200, "bu", "5.10")


@pytest.mark.parametrize("word", [None, "", "call", "n/q", "-", "N/A", "on request", "see note"])
def test_a_row_without_a_price_is_ignored(read: Callable[..., list[PriceRow]], word: str | None) -> None:
    row = only(read(HEAD, ["Maize", word, "t"]))
    assert (row.fate, row.price) == (Fate.IGNORED, None)


def test_headings_titles_footnotes_and_totals_are_ignored_and_listed(read: Callable[..., list[PriceRow]]) -> None:
    rows = read(
        ["Larkwater Grain, prices of the week"], [], HEAD, ["Cereals"], ["Maize", 205, "t"], ["Wheat", 212, "t"],
        ["Average", 208.5, "t"], [], ["* prices ex store, without obligation"],
    )
    assert [(row.row, row.fate) for row in rows] == [
        (1, Fate.IGNORED), (3, Fate.IGNORED), (4, Fate.IGNORED), (5, Fate.ACCEPTED), (6, Fate.ACCEPTED),
        (7, Fate.IGNORED), (9, Fate.IGNORED),
    ]


def test_an_unknown_name_is_a_question_with_the_likely_ones(read: Callable[..., list[PriceRow]]) -> None:
    row = only(read(HEAD, ["Maise", 205, "t"]))
    assert (row.fate, row.ingredient_id) == (Fate.QUESTION, None)
    assert "“Maize”" in row.reason


@pytest.mark.parametrize(
    "name", ["Soybean meal", "Soybean meal 46 %", "Feed wheat", "Wheat feed", "Limestone flour", "Premix"]
)
def test_likeness_alone_never_accepts(read: Callable[..., list[PriceRow]], name: str) -> None:
    row = only(read(HEAD, [name, 300, "t"]))
    assert (row.fate, row.ingredient_id) == (Fate.QUESTION, None)


@pytest.mark.parametrize(
    ("name", "ingredient"),
    [
        ("MAIZE", "Maize"), (" maize ", "Maize"), ("soybean-meal (44%)", "Soybean meal 44 %"), ("lime", "Lime"),
        ("Soybeanmeal 48", "Soybean meal 48 %"), ("rapskuchen kaltgepresst", "Rapskuchen, kaltgepreßt"),
        ("Limestone", "Limestone"),
        ("premix 1.5", "Premix 1.5"), ("Premix-1,5", "Premix 1.5"), ("PREMIX 15", "Premix 15"),
    ],
)
def test_names_match_without_case_spaces_punctuation_and_accents(
    read: Callable[..., list[PriceRow]], name: str, ingredient: str
) -> None:
    assert only(read(HEAD, [name, 300, "kg"])).ingredient == ingredient


def test_a_synonym_that_the_mill_knows_finds_its_ingredient(read: Callable[..., list[PriceRow]]) -> None:
    maker = Maker()
    maker.ingredient("Maize", 200.0)
    maker.put(Synonym(1, "Larkwater", "Yellow corn No. 2", 1))
    row = only(read(HEAD, ["yellow corn no 2", 210, "t"], mill=maker.library))
    assert (row.fate, row.ingredient) == (Fate.ACCEPTED, "Maize")


def test_a_synonym_with_two_meanings_is_a_question(read: Callable[..., list[PriceRow]]) -> None:
    maker = Maker()
    maker.ingredient("Maize", 200.0)
    maker.ingredient("Maize, flaked", 250.0)
    maker.put(Synonym(1, "one", "corn", 1))
    maker.put(Synonym(2, "other", "Corn", 2))
    assert only(read(HEAD, ["Corn", 210, "t"], mill=maker.library)).fate is Fate.QUESTION


@pytest.mark.parametrize(
    ("heading", "unit", "cell", "per_t"),
    [
        ("Price USD/t", None, 210, 210), ("$/short ton", None, 200, 220.462262),
        ("Price (US$ per cwt of 100 lb)", None, 10, 220.462262), ("Price per 100 kg", None, 21, 210),
        ("Price", "long ton", 200, 196.841306), ("Price", None, "$ 210.50 / t", 210.5),
        ("Price", None, "0.21 per kg", 210), ("Price", "$/lb", 0.1, 220.462262),
        ("Price", None, "USD 4.95/bu", 194.872887),
        ("Price, USD per tonne", "t", "210/t", 210),
    ],
)
def test_the_unit_may_stand_in_the_heading_in_a_column_or_beside_the_number(
    read: Callable[..., list[PriceRow]], heading: str, unit: str | None, cell: Any, per_t: float | None
) -> None:
    row = only(read(["Commodity", heading, "Unit"], ["Maize", cell, unit]))
    if per_t is None:
        assert row.fate is Fate.QUESTION
    else:
        assert (row.fate, row.price_per_t) == (Fate.ACCEPTED, pytest.approx(per_t))


@pytest.mark.parametrize("unit", ["ton", "cwt", None, "bag", "st"])
def test_a_unit_that_is_missing_unknown_or_has_two_meanings_is_a_question(
    read: Callable[..., list[PriceRow]], unit: str | None
) -> None:
    row = only(read(HEAD, ["Maize", 200, unit]))
    assert (row.fate, row.price_per_t) == (Fate.QUESTION, None)


def test_a_ton_and_a_hundredweight_are_what_the_mill_has_said(read: Callable[..., list[PriceRow]]) -> None:
    mill = made_mill(ton_means="long ton", cwt_means="112 lb")
    rows = read(HEAD, ["Maize", 203.2, "ton"], ["Wheat", 10.16, "cwt"], mill=mill)
    assert [row.fate for row in rows[1:]] == [Fate.ACCEPTED, Fate.ACCEPTED]
    assert rows[1].price_per_t == pytest.approx(203.2 / 1.0160469088)
    assert rows[2].price_per_t == pytest.approx(10.16 * 20 / 1.0160469088)


def test_units_that_contradict_each_other_are_a_question(read: Callable[..., list[PriceRow]]) -> None:
    assert only(read(["Ingredient", "Price USD/t", "Unit"], ["Maize", 200, "short ton"])).fate is Fate.QUESTION


def test_a_bushel_of_unknown_weight_is_a_question(read: Callable[..., list[PriceRow]]) -> None:
    row = only(read(HEAD, ["Limestone", 5, "bu"]))
    assert row.fate is Fate.QUESTION
    assert "Bushel lb" in row.reason


@pytest.mark.parametrize(
    ("heading", "cell", "unit"),
    [("Price EUR/t", 200, None), ("Price", "€ 200", "t"), ("Price", 200, "GBP/t"), ("Price", "C$ 200", "t"),
     ("Price", "550 p/bu", None), ("Pence/lb", 9.1, None)],
)
def test_another_currency_or_cents_are_a_question(
    read: Callable[..., list[PriceRow]], heading: str, cell: Any, unit: str | None
) -> None:
    assert only(read(["Ingredient", heading, "Unit"], ["Maize", cell, unit])).fate is Fate.QUESTION


def test_the_currency_that_a_number_format_shows_counts(tmp_path: Path, library: Library) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", [HEAD, ["Maize", 205, "t"], ["Wheat", 212, "t"]])
    book = openpyxl.load_workbook(path)
    book["Prices"]["B2"].number_format = '[$€-2] #,##0.00'
    book["Prices"]["B3"].number_format = '"$"#,##0.00'
    book.save(path)
    rows = read_price_list(path, library, TODAY).rows
    assert [row.fate for row in rows] == [Fate.IGNORED, Fate.QUESTION, Fate.ACCEPTED]


@pytest.mark.parametrize("price", [0, -5, "(205.00)", "205-"])
def test_a_price_of_0_or_below_is_a_question(read: Callable[..., list[PriceRow]], price: Any) -> None:
    assert only(read(HEAD, ["Limestone", price, "t"])).fate is Fate.QUESTION


@pytest.mark.parametrize("price", ["205-215", "205 or best offer", "ca. 205", "12 %", "205*", "two hundred 5"])
def test_what_is_not_one_price_is_a_question(read: Callable[..., list[PriceRow]], price: str) -> None:
    row = only(read(HEAD, ["Maize", price, "t"]))
    assert (row.fate, row.price_per_t) == (Fate.QUESTION, None)


def test_an_ingredient_that_stands_twice_is_a_question_at_both_places(read: Callable[..., list[PriceRow]]) -> None:
    rows = read(HEAD, ["Maize", 205, "t"], ["Wheat", 212, "t"], ["maize", 206, "t"])
    assert [row.fate for row in rows[1:]] == [Fate.QUESTION, Fate.ACCEPTED, Fate.QUESTION]
    assert "row 4" in rows[1].reason
    assert "row 2" in rows[3].reason


def test_a_twin_without_a_price_is_no_twin(read: Callable[..., list[PriceRow]]) -> None:
    rows = read(HEAD, ["Maize", 205, "t"], ["Maize", "call", "t"])
    assert [row.fate for row in rows[1:]] == [Fate.ACCEPTED, Fate.IGNORED]


@pytest.mark.parametrize(
    ("price", "fate"),
    [(260, Fate.ACCEPTED), (261, Fate.QUESTION), (140, Fate.ACCEPTED), (139, Fate.QUESTION), (2000, Fate.QUESTION),
     (0.21, Fate.QUESTION)],
)
def test_a_change_of_more_than_30_percent_is_a_question(
    read: Callable[..., list[PriceRow]], price: float, fate: Fate
) -> None:
    assert only(read(HEAD, ["Maize", price, "t"])).fate is fate


@pytest.mark.parametrize(("price", "said"), [(2050, "10 times"), (19500, "100 times"), (0.205, "a 1000th")])
def test_a_lost_decimal_sign_is_named(read: Callable[..., list[PriceRow]], price: float, said: str) -> None:
    assert said in only(read(HEAD, ["Maize", price, "t"])).reason


@pytest.mark.parametrize(
    ("prices", "read_as"),
    [
        (["1,234.50", "210.25"], [1234.5, 210.25]), (["1.234,50", "210,25"], [1234.5, 210.25]),
        (["1 234,50", "1.210"], [1234.5, 1210]), (["1'234.50", "210"], [1234.5, 210]), (["210", "1234"], [210, 1234]),
        (["0,950", "1.210"], [0.95, 1210]), (["1,234", "210"], [None, 210]), (["12.5", "12,5"], [None, None]),
        (["1.234", "1,234"], [None, None]),
    ],
)
def test_the_decimal_sign_is_decided_over_the_column(
    read: Callable[..., list[PriceRow]], prices: list[str], read_as: list[float | None]
) -> None:
    rows = read(HEAD, ["Limestone", prices[0], "t"], ["Lime", prices[1], "t"])
    assert [row.price for row in rows[1:]] == read_as
    assert [row.fate for row in rows[1:]] == [Fate.QUESTION if p is None else Fate.ACCEPTED for p in read_as]


def test_a_number_stored_as_text_is_read_and_said_to_be(read: Callable[..., list[PriceRow]]) -> None:
    row = only(read(HEAD, ["Maize", "205.5", "t"], workbook=True))
    assert (row.fate, row.price) == (Fate.ACCEPTED, 205.5)
    assert "stored as text" in row.reason


def test_base_freight_and_sum_that_add_up_are_one_price(read: Callable[..., list[PriceRow]]) -> None:
    head = ["Ingredient", "Price ex works", "Freight", "Delivered", "Unit"]
    rows = read(head, ["Maize", 190, 15, 205, "t"], ["Wheat", 190, 15, 215, "t"], ["Limestone", 30, 12, None, "t"])
    assert [(row.fate, row.price) for row in rows[1:]] == [
        (Fate.ACCEPTED, 205), (Fate.QUESTION, 215), (Fate.QUESTION, 30)
    ]


def test_several_other_prices_in_a_row_are_a_question(read: Callable[..., list[PriceRow]]) -> None:
    row = only(read(["Ingredient", "Price March", "Price April", "Unit"], ["Maize", 205, 207, "t"]))
    assert row.fate is Fate.QUESTION
    assert "“Price March”, “Price April”" in row.reason


def test_an_old_price_beside_the_new_one_is_no_second_price(read: Callable[..., list[PriceRow]]) -> None:
    row = only(read(["Ingredient", "Old price", "New price", "Unit"], ["Maize", 200, 205, "t"]))
    assert (row.fate, row.price) == (Fate.ACCEPTED, 205)


def test_an_error_or_a_formula_without_a_result_is_refused(tmp_path: Path, library: Library) -> None:
    rows: Rows = [HEAD, ["Maize", "#N/A", "t"], ["Wheat", "=1+1", "t"], ["Limestone", 30, "t"]]
    for path in (write_xlsx(tmp_path / "a.xlsx", rows), write_text(tmp_path / "a.csv", rows)):
        found = read_price_list(path, library, TODAY).rows
        assert [row.fate for row in found[1:]] == [Fate.REFUSED, Fate.REFUSED, Fate.ACCEPTED]
        assert "B2" in found[1].reason
        assert "B3" in found[2].reason


def test_an_error_in_a_column_that_says_nothing_of_prices_does_not_count(read: Callable[..., list[PriceRow]]) -> None:
    assert only(read([*HEAD, "Stock"], ["Maize", 205, "t", "#REF!"], workbook=True)).fate is Fate.ACCEPTED


def test_the_first_day_of_a_price_is_read_from_its_column(read: Callable[..., list[PriceRow]]) -> None:
    head = [*HEAD, "Valid from"]
    day = datetime.date(2026, 3, 9)
    assert only(read(head, ["Maize", 205, "t", day], workbook=True)).valid_from == day
    assert only(read(head, ["Maize", 205, "t", "9 March 2026"])).valid_from == day
    assert only(read(head, ["Maize", 205, "t", None])).valid_from is None


def test_the_order_of_day_and_month_is_decided_over_the_column(read: Callable[..., list[PriceRow]]) -> None:
    head = [*HEAD, "Valid from"]
    rows = read(head, ["Maize", 205, "t", "9/3/2026"], ["Wheat", 212, "t", "13/3/2026"])
    assert [row.valid_from for row in rows[1:]] == [datetime.date(2026, 3, 9), datetime.date(2026, 3, 13)]
    assert only(read(head, ["Maize", 205, "t", "9/3/2026"])).fate is Fate.QUESTION


def test_an_expired_price_is_a_question(read: Callable[..., list[PriceRow]]) -> None:
    head = [*HEAD, "Valid until"]
    rows = read(head, ["Maize", 205, "t", "2026-03-01"], ["Wheat", 212, "t", "2026-03-02"])
    assert [row.fate for row in rows[1:]] == [Fate.QUESTION, Fate.ACCEPTED]


def test_tables_one_above_the_other_are_read_each_by_its_headings(read: Callable[..., list[PriceRow]]) -> None:
    rows = read(
        ["Ingredient", "Price USD/t", "Note"], ["Maize", 205, ""], [], ["Meals", "Remark", "$/short ton"],
        ["Product", "Remark", "$/short ton"], ["Soybean meal 44 %", "new crop", 360],
    )
    assert [row.fate for row in rows] == [
        Fate.IGNORED, Fate.ACCEPTED, Fate.IGNORED, Fate.IGNORED, Fate.ACCEPTED
    ]
    assert rows[-1].per == "short ton"


def test_tables_side_by_side_are_a_question(read: Callable[..., list[PriceRow]]) -> None:
    rows = read(["Grain", "Price $/t", "Product", "Price $/t"], ["Maize", 205, "Soybean meal 44 %", 410])
    assert rows[1].fate is Fate.QUESTION


def test_a_list_without_headings_is_read_if_everything_else_is_plain(read: Callable[..., list[PriceRow]]) -> None:
    rows = read(["Maize", "205", "t"], ["Wheat", "212", "t"])
    assert [(row.fate, row.price) for row in rows] == [(Fate.ACCEPTED, 205), (Fate.ACCEPTED, 212)]


def test_numbers_in_which_no_table_is_found_are_a_question_and_words_are_ignored(
    read: Callable[..., list[PriceRow]]
) -> None:
    rows = read(["Dear miller"], ["our stock of cake is 300"])
    assert [row.fate for row in rows] == [Fate.IGNORED, Fate.QUESTION]


def test_a_hidden_row_and_a_hidden_price_column_are_questions(tmp_path: Path, library: Library) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", [HEAD, ["Maize", 205, "t"], ["Wheat", 212, "t"]])
    book = openpyxl.load_workbook(path)
    book["Prices"].row_dimensions[2].hidden = True
    book.save(path)
    assert [row.fate for row in read_price_list(path, library, TODAY).rows[1:]] == [Fate.QUESTION, Fate.ACCEPTED]
    book["Prices"].column_dimensions["B"].hidden = True
    book.save(path)
    assert [row.fate for row in read_price_list(path, library, TODAY).rows[1:]] == [Fate.QUESTION, Fate.QUESTION]


def test_every_visible_sheet_is_read_unless_one_is_named(tmp_path: Path, library: Library) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", [HEAD, ["Maize", 205, "t"]], "Grain")
    book = openpyxl.load_workbook(path)
    for name, ingredient in (("Meals", "Soybean meal 44 %"), ("Old", "Wheat")):
        sheet = book.create_sheet(name)
        sheet.append(HEAD)
        sheet.append([ingredient, 400 if name == "Meals" else 212, "t"])
    book["Old"].sheet_state = "hidden"
    book.save(path)
    reading = read_price_list(path, library, TODAY)
    assert [(row.sheet, row.row) for row in reading.accepted] == [("Grain", 2), ("Meals", 2)]
    assert any("“Old”" in note for note in reading.notes)
    assert [row.ingredient for row in read_price_list(path, library, TODAY, "meals").accepted] == ["Soybean meal 44 %"]
    assert [row.ingredient for row in read_price_list(path, library, TODAY, "Old").accepted] == ["Wheat"]
    with pytest.raises(Refused, match="Did you mean “Meals”"):
        read_price_list(path, library, TODAY, "Meal")


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "cp1252"])
@pytest.mark.parametrize("separator", [",", ";", "\t"])
def test_text_is_read_in_any_encoding_and_with_any_separator(
    tmp_path: Path, library: Library, encoding: str, separator: str
) -> None:
    rows: Rows = [
        ["Name", "Price ($/t)", "Bemerkung"], ["Rapskuchen, kaltgepreßt", "305,50", "für Kühe; neu"],
        ["Maize", "1.205,00", ""],
    ]
    reading = read_price_list(write_text(tmp_path / "list.dat", rows, separator, encoding), library, TODAY)
    assert [(row.ingredient, row.price) for row in reading.rows[1:]] == [
        ("Rapskuchen, kaltgepreßt", 305.5), ("Maize", 1205)
    ]


@pytest.mark.parametrize("write", [write_xlsx, write_ods, write_xls, write_text])
@pytest.mark.parametrize("name", ["list.txt", "list.xls", "list"])
def test_the_format_is_told_by_content_and_not_by_the_name(
    tmp_path: Path, library: Library, write: Callable[[Path, Rows], Path], name: str
) -> None:
    rows: Rows = [HEAD, ["Maize", 205.25, "t"], [None, None, None], ["Wheat", 212, "short ton"]]
    reading = read_price_list(write(tmp_path / name, rows), library, TODAY)
    assert [(row.row, row.ingredient, row.price, row.per) for row in reading.accepted] == [
        (2, "Maize", 205.25, "t"), (4, "Wheat", 212, "short ton")
    ]


def test_a_row_of_a_text_is_the_line_on_which_it_begins(read: Callable[..., list[PriceRow]]) -> None:
    rows = read([*HEAD, "Note"], ["Maize", 205, "t", "two\nlines"], [], ["Wheat", 212, "t", ""])
    assert [(row.row, row.ingredient) for row in rows[1:]] == [(2, "Maize"), (5, "Wheat")]


def test_a_quote_that_is_never_closed_swallows_no_row(tmp_path: Path, library: Library) -> None:
    path = tmp_path / "list.csv"
    path.write_text('Ingredient,Price,Unit,Note\nMaize,205,t,"3/8\nWheat,212,t,\nLimestone,30,t,\n')
    assert [row.ingredient for row in read_price_list(path, library, TODAY).accepted] == ["Maize", "Wheat", "Limestone"]


def test_every_row_that_is_not_blank_has_exactly_one_entry(tmp_path: Path, library: Library) -> None:
    rows: Rows = [
        ["Larkwater"], [], HEAD, ["Maize", 205, "t"], [], ["Oats", 1, "t"], ["Wheat", "#N/A", "t"],
        ["Limestone", "call"], ["Total", 206], ["a note", None, None, "far out"], [None, 12, None],
    ]
    found: PriceListReading = read_price_list(write_xlsx(tmp_path / "list.xlsx", rows), library, TODAY)
    assert [row.row for row in found.rows] == [number for number, row in enumerate(rows, start=1) if row]
    assert sum(found.count(fate) for fate in Fate) == len(found.rows)


def test_a_reading_carries_the_name_and_the_digest_of_its_file(tmp_path: Path, library: Library) -> None:
    import hashlib

    path = write_text(tmp_path / "week 10.csv", [HEAD, ["Maize", 205, "t"]])
    reading = read_price_list(path, library, TODAY)
    assert (reading.file_name, reading.digest) == ("week 10.csv", hashlib.sha256(path.read_bytes()).hexdigest())


def test_blank_tails_of_formatted_rows_have_no_entries(tmp_path: Path, library: Library) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", [HEAD, ["Maize", 205, "t"]])
    book = openpyxl.load_workbook(path)
    for row in range(3, 2000):
        book["Prices"].cell(row, 2).number_format = "0.00"
    book.save(path)
    assert len(read_price_list(path, library, TODAY).rows) == 2
