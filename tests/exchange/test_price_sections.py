"""Headings within a table, and titles over it, that say of prices what the heading of their column does not."""

from __future__ import annotations

import pytest

from blendapp.domain.list_rows import Answer, Fate
from blendapp.domain.mills import Asked
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED
PER_T, BARE = ["Ingredient", "Price $/t"], ["Ingredient", "Price"]
MAIZE, WHEAT, MEAL = ["Maize", 205], ["Wheat", 212], ["Soybean meal", 365]
LIMESTONE = ["Limestone", 44]

# Rows of a file; what becomes of those that hold a price, and the accepted prices.
SECTIONS: dict[str, tuple[Rows, list[Fate], list[float]]] = {
    "a unit that is not that of the column": (
        [PER_T, MAIZE, [], ["Meals $ per short ton"], MEAL], [A, A], [205, 402.34]),
    "a unit where the column has none": (
        [BARE, ["Grains, $/t"], MAIZE, ["Meals, $/short ton"], MEAL], [A, A], [205, 402.34]),
    "a unit in the column of prices": (
        [PER_T, MAIZE, ["Meals", "$/short ton"], MEAL], [A, A], [205, 402.34]),
    "a unit in brackets": ([PER_T, MAIZE, ["Meals (per short ton)"], MEAL], [A, A], [205, 402.34]),
    "the same unit again": ([PER_T, MAIZE, ["Meals, $/t"], ["Soybean meal", 402]], [A, A], [205, 402]),
    "nothing but a name": ([PER_T, ["GRAINS"], MAIZE, [], ["MEALS"], ["Soybean meal", 402]], [A, A], [205, 402]),
    "a plain heading right below one with a unit": (
        [PER_T, ["Meals $ per short ton"], ["Soya"], MEAL], [A], [402.34]),
    "a plain heading that may end one with a unit": (
        [PER_T, ["Meals $ per short ton"], MEAL, [], ["MINERALS"], LIMESTONE], [A, Q], [402.34]),
    "a further heading with a unit": (
        [PER_T, ["Meals $ per short ton"], MEAL, ["Minerals, $/t"], LIMESTONE], [A, A], [402.34, 44]),
    "dry matter": ([PER_T, LIMESTONE, ["Grains, $/t dry matter"], ["Maize", 233]], [A, A], [44, 205.04]),
    "as fed under a column of dry matter": (
        [["Ingredient", "Price $/t DM"], ["Maize", 233], ["Wheat, as fed", None], ["Bought as fed"], WHEAT], [A, A],
        [205.04, 212]),
    "a plain heading below one of dry matter": (
        [PER_T, ["Grains, $/t dry matter"], ["Maize", 233], ["MINERALS"], LIMESTONE], [A, Q], [205.04]),
    "another currency": ([PER_T, MAIZE, ["Meals, €/t"], MEAL], [A, Q], [205]),
    "a unit that nobody knows": ([PER_T, MAIZE, ["Meals, $ per wagon"], MEAL], [A, Q], [205]),
    "a unit beside the number that is not that of the section": (
        [PER_T, ["Meals $ per short ton"], ["Soybean meal", "402 / t"]], [Q], []),
    "a name that is known and has no price": (
        [PER_T, MAIZE, ["Wheat"], ["Soybean meal", 402]], [A, A], [205, 402]),
    "what is said of something else": (
        [PER_T, MAIZE, ["Minimum per 25 kg bag"], ["Soybean meal", 402]], [A, A], [205, 402]),
    "what an analysis is of": (
        [PER_T, MAIZE, ["Meals: protein on dry matter"], ["Soybean meal", 402]], [A, A], [205, 402]),
    "the title of a further table": (
        [PER_T, MAIZE, [], ["Meals $ per short ton"], ["Meal", "Price", "Origin"], [*MEAL, "port"]], [A, A],
        [205, 402.34]),
}


@pytest.mark.parametrize("mess", SECTIONS)
def test_a_heading_within_a_table_holds_for_the_rows_below_it(read: Read, mess: str) -> None:
    rows, fates, prices = SECTIONS[mess]
    reading = read(rows)
    assert len(reading.rows) == len([row for row in rows if row])
    assert [row.fate for row in reading.rows if row.fate is not IGNORED] == fates
    assert [round(row.price_per_t or 0, 2) for row in reading.accepted] == prices
    assert all(row.questions for row in reading.rows if row.fate is Q)


# Rows; the fate of the one that holds a price, what it is asked, and the accepted price.
TITLES: dict[str, tuple[Rows, Fate, Asked | None, float | None]] = {
    "dry matter in a title": ([["Grain prices on a dry matter basis"], PER_T, ["Maize", 233]], A, None, 205.04),
    "dry matter of an analysis": ([["Protein values on dry matter"], PER_T, MAIZE], A, None, 205),
    "as fed over prices, dry matter over all": (
        [["Prices on dry matter basis"], ["Ingredient", "Price $/t as fed"], MAIZE], A, None, 205),
    "a unit as fed under a heading of dry matter": (
        [["Ingredient", "Price DM", "Unit"], ["Maize", 205, "$/t as fed"]], A, None, 205),
    "a unit as fed": ([["Ingredient", "Price", "Unit"], ["Maize", 205, "$/t as fed"]], A, None, 205),
    "a price as fed beside the number under a heading of dry matter": (
        [["Ingredient", "Price $/t DM"], ["Maize", "205 /t as fed"]], Q, Asked.AMOUNT, None),
    "a share of dry matter that the price is at": (
        [["Grain", "Price $/t at 85 % DM"], MAIZE], Q, Asked.BASIS, None),
    "a share of dry matter of the goods": ([["Grain", "Price $/t, 85 % DM"], MAIZE], A, None, 205),
    "another unit in the title": ([["All prices per short ton"], PER_T, MAIZE], Q, Asked.UNIT, None),
    "another unit in the footnote": ([PER_T, MAIZE, ["All prices are per short ton"]], Q, Asked.UNIT, None),
    "another unit in a title without the word": ([["Grain $ per short ton"], PER_T, MAIZE], Q, Asked.UNIT, None),
    "the same unit in the title": ([["All prices per tonne"], PER_T, MAIZE], A, None, 205),
    "a ton in the title that may be a tonne": ([["All prices per ton"], PER_T, MAIZE], A, None, 205),
    "a title that says what a ton is": (
        [["All prices per short ton"], ["Ingredient", "Price $/ton"], ["Maize", 186]], A, None, 205.03),
    "a title that is about something else": ([["Freight per short ton on request"], PER_T, MAIZE], A, None, 205),
    "a unit in the row goes before the title": (
        [["All prices per short ton"], ["Ingredient", "Price", "Unit"], ["Maize", 205, "t"]], A, None, 205),
    "a title that goes on with where": (
        [["All prices in US$ per short ton, delivered Larkwater"], BARE, ["Maize", 186]], A, None, 205.03),
}


@pytest.mark.parametrize("mess", TITLES)
def test_what_a_title_says_is_read_or_asked_about(read: Read, mess: str) -> None:
    rows, fate, asked, price = TITLES[mess]
    (row,) = (row for row in read(rows).rows if row.fate is not IGNORED)
    assert (row.fate, [one.asked for one in row.questions]) == (fate, [asked] if asked else [])
    assert price is None or row.price_per_t == pytest.approx(price, abs=0.005)


@pytest.mark.parametrize(("answer", "prices"), [("t", [205, 212]), ("short ton", [225.97, 233.69])])
def test_two_units_of_one_list_are_asked_about_once(read: Read, answer: str, prices: list[float]) -> None:
    rows: Rows = [["All prices per short ton"], PER_T, MAIZE, WHEAT]
    (question,) = read(rows).questions
    assert question.choices == ("t", "short ton")
    reading = read(rows, Answer(Asked.UNIT, question.about, answer))
    assert [round(row.price_per_t or 0, 2) for row in reading.accepted] == prices


@pytest.mark.parametrize(("answer", "price"), [("as fed", 205), ("dry matter", 180.4)])
def test_a_price_at_a_share_of_dry_matter_is_taken_as_answered(read: Read, answer: str, price: float) -> None:
    rows: Rows = [["Grain", "Price $/t at 85 % DM"], MAIZE]
    (question,) = read(rows).questions
    (row,) = read(rows, Answer(Asked.BASIS, question.about, answer)).accepted
    assert row.price_per_t == pytest.approx(price)


def test_a_section_that_may_have_ended_is_settled_by_one_answer(read: Read) -> None:
    rows: Rows = [PER_T, ["Meals $ per short ton"], MEAL, [], ["MINERALS"], LIMESTONE, ["Molasses", 90]]
    (question,) = read(rows).questions
    reading = read(rows, Answer(Asked.UNIT, question.about, "t"))
    assert [round(row.price_per_t or 0, 2) for row in reading.accepted] == [402.34, 44, 90]
