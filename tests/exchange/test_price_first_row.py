"""A row that holds the name of an ingredient and a number is never taken for a heading or a title."""

from __future__ import annotations

import pytest

from blendapp.domain.list_rows import Answer, Fate
from blendapp.domain.mills import Asked
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows, write_text

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED


@pytest.mark.parametrize(
    ("rows", "prices"),
    [
        ([["Maize", "205", "$/t"], ["Wheat", "212", "$/t"]], [205, 212]),
        ([["Maize", "$/t", "205"], ["Wheat", "$/t", "212"]], [205, 212]),
    ],
)
def test_a_list_without_headings_keeps_its_first_row(read: Read, rows: Rows, prices: list[float]) -> None:
    reading = read(rows, write=write_text)
    assert [row.fate for row in reading.rows] == [A, A]
    assert [row.price_per_t for row in reading.accepted] == prices


def test_a_first_row_whose_unit_is_not_understood_is_asked_about(read: Read) -> None:
    rows: Rows = [["Maize", "205", "price per t"], ["Wheat", "212", "t"], ["Limestone", "44", "t"]]
    assert [row.fate for row in read(rows, write=write_text).rows] == [Q, Q, Q]


def test_a_heading_that_names_an_ingredient_without_a_number_stays_one(read: Read) -> None:
    reading = read([["Maize", "Price $/t"], ["Wheat", 212]])
    assert [row.fate for row in reading.rows] == [IGNORED, A]


def test_a_price_above_the_headings_is_a_question_that_their_row_settles(read: Read) -> None:
    rows: Rows = [["Offers of the week", 10], ["Maize", 205], ["Ingredient", "$/t"], ["Wheat", 212]]
    reading = read(rows)
    assert [row.fate for row in reading.rows] == [IGNORED, Q, IGNORED, A]
    (question,) = reading.questions
    assert question.asked is Asked.TABLE
    settled = read(rows, Answer(Asked.TABLE, "Prices", "row 3"))
    assert [row.fate for row in settled.rows] == [IGNORED, IGNORED, IGNORED, A]


def test_the_same_headings_half_way_down_are_still_found(read: Read) -> None:
    head = ["Ingredient", "Price", "Unit"]
    reading = read([head, ["Maize", "205", "t"], head, ["Wheat", "212", "t"]], write=write_text)
    assert [row.fate for row in reading.rows] == [IGNORED, A, IGNORED, A]
