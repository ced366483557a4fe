"""Tables side by side: one is read at a time, and no price is ever paired with a name of another table."""

from __future__ import annotations

import pytest

from blendapp.domain.list_rows import Answer, Fate
from blendapp.domain.mills import Asked
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED

# The rows, and the fates and accepted prices of each side.
SIDES: dict[str, tuple[Rows, list[tuple[list[Fate], dict[str, float]]]]] = {
    "a gap between, two headings": (
        [["Grain", "Price $/t", None, "Product", "Price $/t"], ["Maize", 205, None, "Soybean meal", 410],
         ["Wheat", 212, None, None, None]],
        [([IGNORED, A, A], {"Maize": 205, "Wheat": 212}), ([IGNORED, A, IGNORED], {"Soybean meal": 410})],
    ),
    "units that differ, a heading that is no word for names": (
        [["Grain", "$/t", None, "Meal", "$/kg"], ["Maize", 205, None, "Soybean meal", 0.41]],
        [([IGNORED, A], {"Maize": 205}), ([IGNORED, A], {"Soybean meal": 410})],
    ),
    "no gap": (
        [["Ingredient", "$/t", "Ingredient", "$/t"], ["Maize", 205, "Soybean meal", 410],
         [None, None, "Limestone", 44]],
        [([IGNORED, A, IGNORED], {"Maize": 205}), ([IGNORED, A, A], {"Soybean meal": 410, "Limestone": 44})],
    ),
    "names that the mill does not know, beyond a gap": (
        [["Grain", "$/t", None, "Cake", "$/t"], ["Maize", 205, None, "Palm kernel", 180]],
        [([IGNORED, A], {"Maize": 205}), ([IGNORED, Q], {})],
    ),
    "prices stand first": (
        [["$/t", "Grain", "$/t", "Product"], [205, "Maize", 410, "Soybean meal"]],
        [([IGNORED, A], {"Maize": 205}), ([IGNORED, A], {"Soybean meal": 410})],
    ),
    "three tables": (
        [["Grain", "$/t", "Product", "$/t", "Item", "$/t"], ["Maize", 205, "Soybean meal", 410, "Limestone", 44]],
        [([IGNORED, A], {"Maize": 205}), ([IGNORED, A], {"Soybean meal": 410}), ([IGNORED, A], {"Limestone": 44})],
    ),
    "the right table has no headings": (
        [["Grain", "Price", "Unit"], ["Maize", 205, "t", None, "Soybean meal", 410],
         ["Wheat", 212, "t", None, "Limestone", 44]],
        [([IGNORED, A, A], {"Maize": 205, "Wheat": 212}), ([IGNORED, Q, Q], {})],
    ),
    "a total on one side": (
        [["Ingredient", "$/t", "Ingredient", "$/t"], ["Maize", 205, "Soybean meal", 410], ["Average", 205, None, None]],
        [([IGNORED, A, IGNORED], {"Maize": 205}), ([IGNORED, A, IGNORED], {"Soybean meal": 410})],
    ),
}


@pytest.mark.parametrize("rows", [rows for rows, _sides in SIDES.values()], ids=list(SIDES))
def test_tables_side_by_side_are_one_question_and_no_row_has_a_price_before(read: Read, rows: Rows) -> None:
    reading = read(rows)
    assert [one.asked for one in reading.questions] == [Asked.SIDE]
    assert not reading.accepted
    assert all(row.price is None and row.ingredient_id is None for row in reading.rows)


@pytest.mark.parametrize(("rows", "sides"), SIDES.values(), ids=list(SIDES))
def test_each_side_is_read_with_its_own_names(
    read: Read, rows: Rows, sides: list[tuple[list[Fate], dict[str, float]]]
) -> None:
    (question,) = read(rows).questions
    assert len(question.choices) == len(sides)
    for choice, (fates, prices) in zip(question.choices, sides, strict=True):
        reading = read(rows, Answer(Asked.SIDE, question.about, choice))
        assert [row.fate for row in reading.rows] == fates
        assert {row.ingredient: row.price_per_t for row in reading.accepted} == pytest.approx(prices)
        assert any("read it once more with the other answer" in note for note in reading.notes)


def test_what_stands_beside_a_row_that_is_read_is_said_of_the_row(read: Read) -> None:
    rows, _sides = SIDES["no gap"]
    (question,) = read(rows).questions
    left = read(rows, Answer(Asked.SIDE, question.about, "columns A to B"))
    assert left.rows[1].reason == "What stands beside it in columns C to D is not read now."
    assert left.rows[2].reason == "Stands in the table in columns C to D, which is not read now."
    assert left.rows[2].source_name == "Limestone"


def test_which_side_is_read_holds_for_one_reading_and_is_asked_again_next_week() -> None:
    assert not Asked.SIDE.is_remembered


@pytest.mark.parametrize("answer", ["$/t", "$/t (D)", "columns B to C", ""])
def test_an_answer_that_names_no_side_leaves_the_question(read: Read, answer: str) -> None:
    rows, _sides = SIDES["no gap"]
    for asked, about in ((Asked.SIDE, "Ingredient | Ingredient"), (Asked.PRICE, "$/t | $/t (D)")):
        reading = read(rows, Answer(asked, about, answer))
        assert not reading.accepted
        assert [one.asked for one in reading.questions] == [Asked.SIDE]


@pytest.mark.parametrize("rows", [
    [["Ingredient", "Last week $/t", "This week $/t", "+/-"], ["Maize", 202, 205, 3]],
    [["Ingredient", "Price $/t", "Remarks"], ["Maize", 205, "new crop"]],
    [["Ingredient", "Price $/t", None, "Contact"], ["Maize", 205, None, "A. Miller"]],
    [["Ingredient", "Description", "$/t"], ["Maize", "Wheat belt", 205]],
    [["Price", "Unit", "Product"], [205, "t", "Maize"]],
])
def test_columns_of_one_table_are_no_second_table(read: Read, rows: Rows) -> None:
    reading = read(rows)
    assert [(row.ingredient, row.price_per_t) for row in reading.accepted] == [("Maize", 205)]
