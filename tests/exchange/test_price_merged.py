"""Cells that are merged downwards: a name over several prices, a price over several names, a day over all rows."""

from __future__ import annotations

import datetime
from pathlib import Path

import openpyxl
import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT, TAKE, Answer, Fate
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceListReading
from blendapp.exchange import read_price_list
from tests.exchange.made_lists import Rows, write_xlsx
from tests.mills import TODAY

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED


def merged(path: Path, library: Library, rows: Rows, cells: str, *answers: Answer) -> PriceListReading:
    write_xlsx(path, rows)
    book = openpyxl.load_workbook(path)
    for one in cells.split():
        book["Prices"].merge_cells(one)
    book.save(path)
    return read_price_list(path, library, TODAY, answers=answers)


LOADS: Rows = [["Ingredient", "Load", "$/t"], ["Maize", "28 t", 198], [None, "10 t", 204], ["Wheat", None, 212]]
ONE_PRICE: Rows = [["Ingredient", "$/t"], ["Maize", 205], ["Wheat", None], ["Limestone", 44]]


def test_a_name_over_two_prices_makes_both_a_question(tmp_path: Path, library: Library) -> None:
    reading = merged(tmp_path / "Larkwater.xlsx", library, LOADS, "A2:A3")
    assert [row.fate for row in reading.rows] == [IGNORED, Q, Q, A]
    assert [row.ingredient for row in reading.rows] == [None, "Maize", "Maize", "Wheat"]
    assert {one.asked for one in reading.questions} == {Asked.TWIN}
    holds = Answer(Asked.TWIN, "", TAKE, sheet="Prices", row=3)
    taken = merged(tmp_path / "Larkwater.xlsx", library, LOADS, "A2:A3", holds)
    assert [row.price_per_t for row in taken.accepted] == [204, 212]


def test_a_row_below_a_name_that_is_not_merged_has_no_name(tmp_path: Path, library: Library) -> None:
    reading = merged(tmp_path / "Larkwater.xlsx", library, LOADS, "B2:B3")
    assert [one.asked for one in reading.questions] == [Asked.NAMELESS]


def test_a_price_over_two_names_is_asked_about_for_the_second(tmp_path: Path, library: Library) -> None:
    reading = merged(tmp_path / "Larkwater.xlsx", library, ONE_PRICE, "B2:B3")
    assert [row.fate for row in reading.rows] == [IGNORED, A, Q, A]
    (question,) = reading.questions
    assert question.choices == ("205", LEAVE_OUT)
    assert "The price 205 in B2 is merged over this row too" in question.text


@pytest.mark.parametrize(("answer", "prices"), [("205", [205, 205, 44]), (LEAVE_OUT, [205, 44])])
def test_a_merged_price_holds_for_the_second_name_or_not_as_answered(
    tmp_path: Path, library: Library, answer: str, prices: list[float]
) -> None:
    said = Answer(Asked.AMOUNT, "", answer, sheet="Prices", row=3)
    reading = merged(tmp_path / "Larkwater.xlsx", library, ONE_PRICE, "B2:B3", said)
    assert [row.price_per_t for row in reading.accepted] == prices


def test_an_empty_price_that_is_not_merged_is_empty(tmp_path: Path, library: Library) -> None:
    reading = merged(tmp_path / "Larkwater.xlsx", library, ONE_PRICE, "A4:A5")
    assert [row.fate for row in reading.rows] == [IGNORED, A, IGNORED, A]


def test_a_name_and_its_price_merged_over_two_rows_are_one_price(tmp_path: Path, library: Library) -> None:
    rows: Rows = [["Ingredient", "$/t", "Remarks"], ["Maize", 205, "new crop"], [None, None, "ex store"]]
    reading = merged(tmp_path / "Larkwater.xlsx", library, rows, "A2:A3 B2:B3")
    assert [row.fate for row in reading.rows] == [IGNORED, A, IGNORED]


def test_a_unit_and_a_day_merged_over_all_rows_hold_for_all(tmp_path: Path, library: Library) -> None:
    day = datetime.date(2027, 1, 4)
    rows: Rows = [["Ingredient", "Price", "Unit", "Valid from"], ["Maize", 0.205, "kg", day], ["Wheat", 0.212]]
    reading = merged(tmp_path / "Larkwater.xlsx", library, rows, "C2:C3 D2:D3")
    assert [(row.price_per_t, row.valid_from) for row in reading.accepted] == [
        (pytest.approx(205), day), (pytest.approx(212), day)
    ]
