"""What stands beside one price: remarks, footnotes that a mark leads to. Few say that the price is another one."""

from __future__ import annotations

import datetime

import pytest

from blendapp.domain.list_rows import LEAVE_OUT, TAKE, Answer, Fate
from blendapp.domain.mills import Asked
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED
HEAD = ["Ingredient", "$/t", "Remarks"]

CHANGING = [
    "per short ton", "short tons", "$/cwt", "price per 25 kg", "per bushel", "plus freight 12.00", "+ haulage",
    "haulage extra", "carriage not included", "old price, do not use", "EUR", "price in GBP", "€", "price on DM basis",
    "DM basis", "per t dry matter", "discontinued", "withdrawn", "expired", "sold out", "out of stock",
    "indicative only", "tbc", "now 212.50", "should read 250", "corrected: 195", "less 5.00 discount",
    "plus levy of 2.00", "valid until 1/2/2026", "from next week", "valid to end March", "not available",
    "cents per lb",
]
HARMLESS = [
    "subject to unsold", "new crop", "origin Ukraine", "ex port", "delivered Larkwater", "per tonne", "per t, new crop",
    "MT", "per ton", "USD", "$", "min 25 t", "minimum 28 t loads", "44 % protein", "DM 88 %", "88 % DM",
    "protein on DM", "25 kg", "1000 kg",
    "max 14 % moisture", "less than 12 % moisture", "13 MJ/kg", "440 g/kg protein", "2 kg/t in feed", "25 kg bags",
    "freight included", "carriage paid", "available from 1 May 2026", "delivery from 1/4/2026", "GMO free", "bulk",
    "contract 4711", "as fed", "prompt", "firm", "price revised", "spot", "Oct-Dec shipment",
]


@pytest.mark.parametrize("words", CHANGING)
def test_a_remark_that_may_change_the_price_is_asked_about_with_its_words(read: Read, words: str) -> None:
    reading = read([HEAD, ["Maize", 205, words], ["Wheat", 212, "new crop"]])
    assert [row.fate for row in reading.rows] == [IGNORED, Q, A]
    (question,) = reading.questions
    assert question.asked is Asked.REMARK
    assert f"“{words}”" in question.text


@pytest.mark.parametrize("words", HARMLESS)
def test_a_remark_that_says_nothing_of_the_price_asks_nothing(read: Read, words: str) -> None:
    assert [row.fate for row in read([HEAD, ["Maize", 205, words]]).rows] == [IGNORED, A]


@pytest.mark.parametrize(("heading", "fate"), [
    ("Notes", Q), ("Comment", Q), ("Status", Q), (None, Q), ("Rem.", Q), ("Origin", A), ("Code", A), ("Last week", A),
])
def test_remarks_stand_where_the_heading_says_so_or_none_says_anything(
    read: Read, heading: str | None, fate: Fate
) -> None:
    assert read([["Ingredient", "$/t", heading], ["Maize", 205, "per short ton"]]).rows[1].fate is fate


def test_a_remark_is_answered_by_taking_the_price_by_another_price_or_by_leaving_it_out(read: Read) -> None:
    rows: Rows = [HEAD, ["Maize", 186, "per short ton"]]
    assert [
        [row.price_per_t for row in read(rows, Answer(Asked.REMARK, "", answer, sheet="Prices", row=2)).accepted]
        for answer in (TAKE, "205.03", LEAVE_OUT)
    ] == [[186], [205.03], []]
    wrong = read(rows, Answer(Asked.REMARK, "", "much", sheet="Prices", row=2))
    assert wrong.rows[1].fate is Q


@pytest.mark.parametrize(("words", "first", "last"), [
    ("from 1 April 2026", datetime.date(2026, 4, 1), None), ("valid until 30/4/2026", None, datetime.date(2026, 4, 30)),
    ("valid from 1 April 2026 to 30 April 2026", datetime.date(2026, 4, 1), datetime.date(2026, 4, 30)),
])
def test_days_in_a_remark_are_read(
    read: Read, words: str, first: datetime.date | None, last: datetime.date | None
) -> None:
    (row,) = read([HEAD, ["Maize", 205, words]]).accepted
    assert (row.valid_from, row.valid_to) == (first, last)


def test_a_price_whose_remark_says_that_it_expired_is_asked_about(read: Read) -> None:
    reading = read([HEAD, ["Maize", 205, "valid until 15/2/2026"], ["Wheat", 212, None]])
    assert [one.asked for one in reading.rows[1].questions] == [Asked.EXPIRED]
    assert reading.rows[2].fate is A


# Rows, and the fates of those with a price.
MARKED: dict[str, tuple[Rows, list[Fate]]] = {
    "a star and a unit": ([HEAD[:2], ["Maize*", 205], ["Wheat", 212], ["* short tons"]], [Q, A]),
    "a star, a unit and more": (
        [HEAD[:2], ["Maize*", 205], ["Wheat", 212], ["* per short ton, new crop"]], [Q, A]),
    "a star and prices in the footnote": (
        [HEAD[:2], ["Maize *", 205], ["Wheat", 212], ["* prices per short ton"]], [Q, A]),
    "a star that says nothing of the price": ([HEAD[:2], ["Maize*", 205], ["* new crop"]], [A]),
    "two marks": (
        [HEAD[:2], ["Maize*", 205], ["Wheat**", 212], ["* new crop"], ["** plus freight 12.00"]], [A, Q]),
    "a mark on the heading": ([["Ingredient", "$/t*"], ["Maize", 205], ["* per short ton"]], [Q]),
    "a star on no row": ([HEAD[:2], ["Maize", 205], ["* short tons"]], [Q]),
    "a star on no row, of all prices": ([HEAD[:2], ["Maize", 205], ["* all prices per short ton"]], [Q]),
    "a star on no row that says nothing": ([HEAD[:2], ["Maize", 205], ["* new crop"]], [A]),
}


@pytest.mark.parametrize("mess", MARKED)
def test_a_footnote_counts_for_the_rows_that_lead_to_it(read: Read, mess: str) -> None:
    rows, fates = MARKED[mess]
    reading = read(rows)
    assert [row.fate for row in reading.rows if row.fate is not IGNORED] == fates
    assert all(row.questions for row in reading.rows if row.fate is Q)


# What a unit says, and a price of 1 per that in money per tonne; None where it is asked about.
EXPLICIT: dict[str, float | None] = {
    "LT": 0.984207, "lt": None, "MTS": 1, "ST": None, "st": None, "cwt (100 lb)": 22.046226, "cwt (112 lb)": 19.684131,
    "ton (2000 lb)": 1.102311, "2240 lb ton": 0.984207, "ton (1000 kg)": 1, "60 lb bushel": 36.743710,
    "bushel (60 lb)": 36.743710, "25kg": 40, "50 lb": 44.092452, "stone": 157.473044, "14 lb": 157.473044, "bag": None,
    "bale": None, "ton": None,
}


@pytest.mark.parametrize("unit", EXPLICIT)
def test_a_unit_that_says_what_it_is_is_read(read: Read, unit: str) -> None:
    row = read([["Ingredient", "Price", "Unit"], ["Limestone", 1, unit]]).rows[1]
    per_t = EXPLICIT[unit]
    assert row.fate is (Q if per_t is None else A)
    assert per_t is None or row.price_per_t == pytest.approx(per_t, rel=1e-6)
    if unit.casefold() == "st":
        assert row.questions[0].choices == ("short ton", "14 lb")


def test_a_price_for_a_mass_beside_it_is_read(read: Read) -> None:
    assert read([["Ingredient", "Price"], ["Limestone", "$72.00/25kg"]]).accepted[0].price_per_t == pytest.approx(2880)
