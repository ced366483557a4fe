"""Every question of a price list can be settled by an answer, and by nothing else."""

from __future__ import annotations

import datetime
from typing import Any

import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import ADD, DAY_FIRST, LEAVE_OUT, MONTH_FIRST, TAKE, Answer, Fate, Question
from blendapp.domain.mills import Asked
from blendapp.domain.plant import Site, Supplier
from blendapp.domain.quotes import Quote
from blendapp.domain.records import added
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows
from tests.exchange.test_price_list_messes import HEADINGS, UNITS
from tests.mills import TODAY

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED
HEAD = ["Ingredient", "Price", "Unit"]
PAST = datetime.date(2026, 2, 1)

# The rows of a list, one of which is a question; what is asked, about what; the answer; the price per tonne then.
SETTLED: dict[str, tuple[Rows, Asked, str, dict[str, Any], float]] = {
    "a price without a name": ([HEAD, [None, 205, "t"]], Asked.NAMELESS, "", {"ingredient_id": 1}, 205),
    "two prices in one cell": ([HEAD, ["Maize", "205/210", "t"]], Asked.AMOUNT, "", {"answer": "207.5"}, 207.5),
    "a date where the price should be": ([HEAD, ["Maize", PAST, "t"]], Asked.AMOUNT, "", {"answer": "205"}, 205),
    "a truth value where the price should be": ([HEAD, ["Maize", True, "t"]], Asked.AMOUNT, "", {"answer": "205"}, 205),
    "a number written otherwise than its column": (
        [HEAD, ["Wheat", "-", "t"], ["Maize", "1.205.50", "t"]], Asked.AMOUNT, "", {"answer": "205.5"}, 205.5),
    "base and freight that do not add up": (
        [["Ingredient", "Price", "Freight", "Total", "Unit"], ["Maize", 190, 15, 206, "t"]],
        Asked.AMOUNT, "", {"answer": "205"}, 205),
    "a word where a day should stand": (
        [[*HEAD, "Valid from"], ["Maize", 205, "t", "soon"]], Asked.DATES, "soon", {"answer": TAKE}, 205),
    "a number where a day should stand": (
        [[*HEAD, "Valid from"], ["Maize", 205, "t", 46090]], Asked.DATES, "46090", {"answer": TAKE}, 205),
    "a day that may be two": (
        [[*HEAD, "Valid from"], ["Maize", 205, "t", "3/4/2026"]], Asked.DATES, "Valid from",
        {"answer": MONTH_FIRST}, 205),
    "a day that may be two in a note": (
        [["Prices valid from 3/4/2026"], HEAD, ["Maize", 205, "t"]],
        Asked.DATES, "3/4/2026", {"answer": DAY_FIRST}, 205),
    "an end before the beginning": (
        [[*HEAD, "Valid from", "Valid to"], ["Maize", 205, "t", datetime.date(2026, 4, 1), PAST]],
        Asked.EXPIRED, "", {"answer": TAKE}, 205),
    "an expired price": (
        [[*HEAD, "Valid to"], ["Maize", 205, "t", PAST]], Asked.EXPIRED, "", {"answer": TAKE}, 205),
    "words that name no currency": (
        [[*HEAD, "Currency"], ["Maize", 205, "t", "florins"]], Asked.RATE, "florins", {"answer": "usd"}, 205),
    "words that name no currency, at a rate": (
        [[*HEAD, "Currency"], ["Maize", 410, "t", "florins"]], Asked.RATE, "florins",
        {"rate": 0.5, "given": TODAY}, 205),
    "another currency": (
        [["Ingredient", "EUR/t"], ["Maize", 205]], Asked.RATE, "EUR", {"rate": 1.0, "given": TODAY}, 205),
    "dry matter of goods that have none entered": (
        [["Ingredient", "Price USD/t DM"], ["Limestone", 30]], Asked.BASIS, "Limestone", {"answer": "as fed"}, 30),
    "a bushel without a legal weight": (
        [HEAD, ["Molasses", 5.1, "bu"]], Asked.UNIT, "Molasses", {"answer": "56 lb"}, 200.78),
    "a bushel without a legal weight, said in kg": (
        [HEAD, ["Molasses", 5.1, "bu"]], Asked.UNIT, "Molasses", {"answer": "25.4011727 kg"}, 200.78),
    "a unit that is not known": ([HEAD, ["Maize", 205, "wagon"]], Asked.UNIT, "wagon", {"answer": "t"}, 205),
    "two units of one price": (
        [["Ingredient", "Price per t", "Unit"], ["Maize", 205, "kg"]], Asked.UNIT, "kg / t", {"answer": "t"}, 205),
}


def the_question(read: Read, rows: Rows) -> tuple[int, Question]:
    """The row that is a question, and what it asks."""
    (row,) = (one for one in read(rows).rows if one.fate is Q)
    (question,) = row.questions
    assert question.text in row.reason
    return row.row, question


@pytest.mark.parametrize("mess", SETTLED)
def test_a_question_is_settled_by_its_answer(read: Read, mess: str) -> None:
    rows, asked, about, answer, per_t = SETTLED[mess]
    row, question = the_question(read, rows)
    assert (question.asked, question.about) == (asked, about)
    given = Answer(asked, about, **answer, sheet="Prices", row=row)
    assert given.key == Answer(question.asked, question.about, sheet="Prices", row=row).key
    reading = read(rows, given)
    assert [(one.row, round(one.price_per_t or 0, 2)) for one in reading.accepted] == [(row, per_t)]
    assert [one.row for one in reading.rows] == [one.row for one in read(rows).rows]


@pytest.mark.parametrize("mess", [name for name, one in SETTLED.items() if one[1].is_of_row])
def test_a_question_about_a_row_may_be_answered_by_leaving_it_out(read: Read, mess: str) -> None:
    rows, asked, _about, _answer, _per_t = SETTLED[mess]
    row, question = the_question(read, rows)
    assert LEAVE_OUT in question.choices
    reading = read(rows, Answer(asked, "", LEAVE_OUT, sheet="Prices", row=row))
    assert [(one.row, one.fate) for one in reading.rows][-1] == (row, IGNORED)


@pytest.mark.parametrize("mess", [*HEADINGS, *UNITS])
def test_no_question_is_without_an_answer(read: Read, mess: str) -> None:
    rows = HEADINGS[mess][0] if mess in HEADINGS else UNITS[mess][0]
    for row in read(rows).rows:
        assert bool(row.questions) is (row.fate is Q)


def test_an_amount_that_is_no_number_is_asked_again(read: Read) -> None:
    rows: Rows = [HEAD, ["Maize", "205/210", "t"]]
    (row,) = read(rows, Answer(Asked.AMOUNT, "", "a lot", sheet="Prices", row=2)).rows[1:]
    assert row.fate is Q
    assert "not a number" in row.reason


def test_a_foreign_price_is_shown_as_it_was_read(read: Read) -> None:
    rows: Rows = [["Ingredient", "Price £/t"], ["Maize", 180.5], ["Wheat", 190]]
    reading = read(rows)
    (question,) = reading.questions
    maize = reading.rows[1]
    assert (maize.price, maize.currency, maize.price_per_t, maize.entered) == (180.5, "£", None, "180.5")
    assert maize.reason.startswith("180.5 £: ")
    assert "180.5" not in question.text


EXPIRED: Rows = [
    [*HEAD, "Valid to"], ["Maize", 205, "t", PAST], ["Wheat", 212, "t", PAST], ["Limestone", 44, "t", PAST],
]


def test_an_expired_list_asks_once_and_not_for_every_row(read: Read) -> None:
    (question,) = read(EXPIRED).questions
    assert (question.asked, question.about, question.choices) == (
        Asked.EXPIRED_LIST, "2026-02-01", (TAKE, LEAVE_OUT))
    taken = read(EXPIRED, Answer(Asked.EXPIRED_LIST, question.about, TAKE))
    assert [(row.fate, row.valid_to) for row in taken.rows[1:]] == [(A, None)] * 3
    left = read(EXPIRED, Answer(Asked.EXPIRED_LIST, question.about, LEAVE_OUT))
    assert [row.fate for row in left.rows[1:]] == [IGNORED] * 3
    assert not Asked.EXPIRED_LIST.is_remembered


def test_a_list_whose_note_is_past_asks_once_too(read: Read) -> None:
    rows: Rows = [["Prices valid until 2026-02-01"], HEAD, ["Maize", 205, "t"], ["Wheat", 212, "t"]]
    assert [one.asked for one in read(rows).questions] == [Asked.EXPIRED_LIST]


def test_prices_that_expired_on_different_days_are_asked_about_one_by_one(read: Read) -> None:
    rows: Rows = [*EXPIRED, ["Molasses", 99, "t", datetime.date(2026, 2, 2)]]
    assert [one.asked for one in read(rows).questions] == [Asked.EXPIRED] * 4
    some: Rows = [*EXPIRED, ["Molasses", 99, "t", datetime.date(2026, 5, 2)]]
    assert [one.asked for one in read(some).questions] == [Asked.EXPIRED] * 3


def test_supplier_and_site_are_those_that_were_answered(read: Read, library: Library) -> None:
    library.apply([
        added(Site(1, "North yard")), added(Site(2, "South yard")), added(Supplier(7, "Bay Grain")),
        added(Quote(91, 1, 100.0, site_id=2)),
    ])
    rows: Rows = [HEAD, ["Maize", 105, "t"]]
    plain = read(rows)
    assert (plain.supplier_id, plain.site_id, plain.rows[1].fate) == (None, None, Q)
    reading = read(rows, Answer(Asked.SUPPLIER, "", "bay  grain"), Answer(Asked.SITE, "", "south YARD"))
    assert (reading.supplier_id, reading.site_id) == (7, 2)
    assert (reading.accepted[0].old_price_per_t, reading.notes) == (100, ())


def test_a_supplier_that_the_mill_does_not_know_is_a_note(read: Read, library: Library) -> None:
    library.apply([added(Supplier(7, "Bay Grain"))])
    reading = read([HEAD, ["Maize", 205, "t"]], Answer(Asked.SUPPLIER, "", "Bay Grian"), Answer(Asked.SITE, "", "East"))
    assert (reading.supplier_id, reading.site_id) == (None, None)
    assert reading.notes == (
        "The mill has no supplier “Bay Grian”; add it there. Did you mean “Bay Grain”?",
        "The mill has no site “East”; add it there.",
    )
    assert len(reading.accepted) == 1


def test_a_row_with_one_of_several_prices_is_settled_beside_the_answer_for_the_others(read: Read) -> None:
    rows: Rows = [["Ingredient", "USD/t", "Freight USD/t"], ["Maize", 190, 14], ["Wheat", 212, None]]
    (question,) = read(rows).questions
    added_up = Answer(Asked.PRICE, question.about, ADD)
    reading = read(rows, added_up)
    assert [row.fate for row in reading.rows[1:]] == [A, Q]
    (further,) = reading.questions
    assert further.about == "USD/t"
    reading = read(rows, added_up, Answer(Asked.PRICE, further.about, TAKE))
    assert [row.price_per_t for row in reading.accepted] == [204, 212]
