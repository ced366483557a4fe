"""The day of a whole list: a price of a day to come is not in force today, whatever place tells its day."""

from __future__ import annotations

import datetime

import pytest

from blendapp.domain.list_rows import DAY_FIRST, LEAVE_OUT, TAKE, Answer, Fate
from blendapp.domain.mills import Asked
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows
from tests.mills import TODAY

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED
HEAD = ["Ingredient", "$/t"]
MARCH_9, APRIL_1 = datetime.date(2026, 3, 9), datetime.date(2026, 4, 1)


def test_today_is_the_second_of_march() -> None:
    assert datetime.date(2026, 3, 2) == TODAY


@pytest.mark.parametrize(
    ("title", "first"),
    [
        (["Prices effective Monday 9th March 2026"], MARCH_9), (["Prices effective from Mon, 9 March 2026"], MARCH_9),
        (["Price list for week commencing 9 March 2026"], MARCH_9), (["Valid from the 9th March 2026"], MARCH_9),
        (["Prices for April 2026"], APRIL_1), (["Price list Apr 2026"], APRIL_1),
        (["Prices for delivery April 2026"], APRIL_1), (["Prices for week 11"], MARCH_9),
        (["Price list, week 11/2026"], MARCH_9), (["Date: 28/02/2026"], datetime.date(2026, 2, 28)),
        (["Date:", MARCH_9], MARCH_9), (["Valid from", "2026-03-09"], MARCH_9),
        (["Our harvest of April 2026"], None), (["Freight rates from 9 March 2026"], None), (["Prices"], None),
        (["Prices for Larkwater 2026"], None), (["Week 99 prices"], None),
    ],
)
def test_a_title_that_tells_a_day_dates_every_price(
    read: Read, title: list[object], first: datetime.date | None
) -> None:
    reading = read([title, HEAD, ["Maize", 205], ["Wheat", 212]])
    assert [row.fate for row in reading.rows] == [IGNORED, IGNORED, A, A]
    assert [row.valid_from for row in reading.accepted] == [first, first]


def test_prices_for_a_month_end_with_it(read: Read) -> None:
    (row,) = read([["Prices for April 2026"], HEAD, ["Maize", 205]]).accepted
    assert row.valid_to == datetime.date(2026, 4, 30)


EXPIRED: Rows = [["Prices for February 2026"], HEAD, ["Maize", 205], ["Wheat", 212]]


def test_prices_for_a_month_that_is_over_are_one_question(read: Read) -> None:
    (question,) = read(EXPIRED).questions
    assert (question.asked, question.about) == (Asked.EXPIRED_LIST, "2026-02-28")
    taken = read(EXPIRED, Answer(Asked.EXPIRED_LIST, "2026-02-28", TAKE))
    assert [(row.valid_from, row.valid_to) for row in taken.accepted] == [(None, None)] * 2
    left = read(EXPIRED, Answer(Asked.EXPIRED_LIST, "2026-02-28", LEAVE_OUT))
    assert [row.fate for row in left.rows] == [IGNORED] * 4


@pytest.mark.parametrize(
    ("heading", "first"),
    [
        ("Price 13.03.2026 $/t", datetime.date(2026, 3, 13)), ("$/t from 2026-03-09", MARCH_9),
        ("April 2026 $/t", APRIL_1), ("Price $/t", None),
    ],
)
def test_the_heading_of_the_prices_may_tell_their_day(read: Read, heading: str, first: datetime.date | None) -> None:
    reading = read([["Ingredient", heading], ["Maize", 205]])
    assert [row.valid_from for row in reading.accepted] == [first]


def test_of_two_months_the_one_that_is_answered_dates_its_price(read: Read) -> None:
    rows: Rows = [["Ingredient", "March 2026 $/t", "April 2026 $/t"], ["Maize", 205, 207]]
    (question,) = read(rows).questions
    (row,) = read(rows, Answer(Asked.PRICE, question.about, "April 2026 $/t")).accepted
    assert (row.price_per_t, row.valid_from) == (207, APRIL_1)


def test_a_day_in_the_row_comes_before_the_title(read: Read) -> None:
    rows: Rows = [["Prices for April 2026"], [*HEAD, "Valid from"], ["Maize", 205, "2026-03-09"], ["Wheat", 212, None]]
    assert [row.valid_from for row in read(rows).accepted] == [MARCH_9, APRIL_1]


def test_a_title_with_two_readings_is_asked_about_where_one_is_to_come(read: Read) -> None:
    rows: Rows = [["Date: 9/3/2026"], HEAD, ["Maize", 205]]
    (question,) = read(rows).questions
    assert (question.asked, question.about) == (Asked.DATES, "9/3/2026")
    (row,) = read(rows, Answer(Asked.DATES, "9/3/2026", DAY_FIRST)).accepted
    assert row.valid_from == MARCH_9


def test_a_title_with_two_readings_that_are_both_past_is_not_asked_about(read: Read) -> None:
    (row,) = read([["Date: 1/2/2026"], HEAD, ["Maize", 205]]).accepted
    assert row.valid_from is None


@pytest.mark.parametrize("day", ["2062-03-09", "1926-03-09"])
def test_a_first_day_far_from_today_is_a_question(read: Read, day: str) -> None:
    rows: Rows = [[*HEAD, "Valid from"], ["Maize", 205, day], ["Wheat", 212, "2027-06-01"]]
    reading = read(rows)
    assert [row.fate for row in reading.rows] == [IGNORED, Q, A]
    taken = read(rows, Answer(Asked.EXPIRED, "", TAKE, sheet="Prices", row=2))
    assert [row.fate for row in taken.rows] == [IGNORED, A, A]
    assert taken.rows[1].valid_from == datetime.date.fromisoformat(day)
