"""Words that say what comes on top of all prices of a list: asked once, with the amount to add where they name one."""

from __future__ import annotations

import pytest

from blendapp.domain.list_rows import ADD, TAKE, Answer, Fate
from blendapp.domain.mills import Asked
from blendapp.domain.quotes import Terms
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED
HEAD = ["Ingredient", "Price $/t"]
BODY: list[list[object]] = [["Maize", 205], ["Wheat", 212]]

# The words, and what they add per tonne; None where they name no amount that can be reckoned with.
ON_TOP: dict[str, float | None] = {
    "Prices ex works; add $12.00/t haulage": 12,
    "Terminal offers, all prices FOB; freight to Larkwater 14.00 $/t extra": 14,
    "* All the above plus 8.50 $/t delivery": 8.5,
    "All prices plus freight at 0.5 $/100 kg": 5,
    "Freight to your yard: 9.50 USD per short ton": 10.47,
    "All prices plus a surcharge of 2.00 $/t": 2,
    "Haulage is extra, 12 $/t to 28 t and 15 $/t above": None,
    "Add 12 EUR/t haulage": None,
    "Add 1.200 $/t haulage": None,
    "Carriage not included": None,
}


@pytest.mark.parametrize("words", ON_TOP)
@pytest.mark.parametrize("is_title", [True, False])
def test_what_comes_on_top_of_all_prices_is_one_question(read: Read, words: str, is_title: bool) -> None:
    rows: Rows = [[words], HEAD, *BODY] if is_title else [HEAD, *BODY, [words]]
    reading = read(rows)
    assert [row.fate for row in reading.rows if row.fate is not IGNORED] == [Q, Q]
    (question,) = reading.questions
    amount = ON_TOP[words]
    assert question.asked is Asked.PRICE
    assert question.choices == ((TAKE,) if amount is None else (ADD, TAKE))
    taken = read(rows, Answer(Asked.PRICE, question.about, TAKE)).accepted
    assert [row.price_per_t for row in taken] == [205, 212]
    if amount is not None:
        added = read(rows, Answer(Asked.PRICE, question.about, ADD)).accepted
        assert [round(row.price_per_t or 0, 2) for row in added] == [205 + amount, 212 + amount]
        assert {row.terms for row in added} == {Terms.DELIVERED}


@pytest.mark.parametrize("words", [
    "Freight included", "All prices with carriage paid to Larkwater", "Free delivery above 25 t",
    "Delivery in loads of 28 t", "Delivery within 3 days, extra bags on request", "Haulage arranged at cost",
    "Bags of 25 kg, packing of your choice", "Prices include freight of 12.00 $/t, freight paid",
])
def test_words_that_add_nothing_ask_nothing(read: Read, words: str) -> None:
    assert [row.fate for row in read([[words], HEAD, *BODY]).rows] == [IGNORED, IGNORED, A, A]


def test_an_amount_is_added_to_a_price_in_another_unit_per_tonne(read: Read) -> None:
    words = "Add $12.00/t haulage"
    rows: Rows = [[words], ["Ingredient", "Price $/short ton"], ["Maize", 186]]
    (row,) = read(rows, Answer(Asked.PRICE, words, ADD)).accepted
    assert row.price_per_t == pytest.approx(217.03, abs=0.005)
    assert (row.price, row.per) == (row.price_per_t, "t")


def test_freight_goes_on_top_of_a_price_as_fed(read: Read) -> None:
    words = "Add $12.00/t haulage"
    rows: Rows = [[words], ["Ingredient", "Price $/t DM"], ["Maize", 233]]
    (row,) = read(rows, Answer(Asked.PRICE, words, ADD)).accepted
    assert row.price_per_t == pytest.approx(233 * 0.88 + 12)
