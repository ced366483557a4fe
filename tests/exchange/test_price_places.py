"""Prices per site and per supplier: by a column of the list, or by its title."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from blendapp.domain.list_rows import LEAVE_OUT, Answer, Fate
from blendapp.domain.mills import Asked
from blendapp.domain.plant import Site, Supplier
from blendapp.domain.price_rows import PriceListReading
from blendapp.exchange import read_price_list
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows, write_xlsx
from tests.mills import TODAY, Maker

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED
SITES: Rows = [["Ingredient", "Site", "$/t"], ["Maize", "Larkwater", 205], ["Maize", "FELLGATE  store", 208],
               ["Wheat", None, 212], ["Oats", "Nowhere", 225]]


@pytest.fixture
def read_in_mill(tmp_path: Path) -> Callable[..., PriceListReading]:
    """Reads rows against a mill of two sites and two suppliers; its wheat is bought from the first."""
    maker = Maker()
    maker.put(Supplier(1, "Marram Grain"))
    maker.put(Supplier(2, "Tarnbeck"))
    maker.put(Site(1, "Larkwater"))
    maker.put(Site(2, "Fellgate store"))
    maker.ingredient("Maize", 200.0)
    maker.ingredient("Wheat", 210.0, supplier_id=1)
    maker.ingredient("Oats", 225.0)

    def reader(rows: Rows, *answers: Answer) -> PriceListReading:
        return read_price_list(write_xlsx(tmp_path / "Broker.xlsx", rows), maker.library, TODAY, answers=answers)

    return reader


def fates(reading: PriceListReading) -> list[Fate]:
    return [row.fate for row in reading.rows]


def test_a_column_of_sites_tells_for_which_site_each_price_is(read_in_mill: Read) -> None:
    reading = read_in_mill(SITES)
    assert fates(reading) == [IGNORED, A, A, A, Q]
    assert [(row.ingredient, row.site_id) for row in reading.accepted] == [("Maize", 1), ("Maize", 2), ("Wheat", None)]
    assert reading.rows[2].reason == "For the site “Fellgate store”."
    (question,) = reading.questions
    assert (question.asked, question.about) == (Asked.SITE, "Nowhere")
    assert question.choices == ("Larkwater", "Fellgate store", LEAVE_OUT)


@pytest.mark.parametrize(
    ("answer", "site", "fate"), [("Larkwater", 1, A), (LEAVE_OUT, None, IGNORED), ("Elsewhere", None, Q)]
)
def test_a_site_that_the_mill_has_not_is_settled_by_an_answer(
    read_in_mill: Read, answer: str, site: int | None, fate: Fate
) -> None:
    last = read_in_mill(SITES, Answer(Asked.SITE, "Nowhere", answer)).rows[-1]
    assert (last.site_id, last.fate) == (site, fate)


def test_two_prices_of_an_ingredient_at_one_site_are_a_question(read_in_mill: Read) -> None:
    rows = [*SITES, ["MAIZE", "Larkwater", 207]]
    assert fates(read_in_mill(rows)) == [IGNORED, Q, A, A, Q, Q]


@pytest.mark.parametrize("heading", ["Site", "Location", "Delivered to", "Depot"])
def test_every_heading_over_sites_is_read(read_in_mill: Read, heading: str) -> None:
    rows: Rows = [["Ingredient", heading, "$/t"], ["Maize", "Larkwater", 205], ["Maize", "Fellgate store", 208]]
    assert [row.site_id for row in read_in_mill(rows).accepted] == [1, 2]


def test_a_column_of_places_that_are_no_sites_stays_a_note(read_in_mill: Read) -> None:
    rows: Rows = [["Ingredient", "Port", "$/t"], ["Maize", "Bay", 205], ["Wheat", "Sound", 212]]
    reading = read_in_mill(rows)
    assert [row.site_id for row in reading.accepted] == [None, None]


def test_a_mill_without_sites_and_suppliers_reads_such_columns_as_notes(read: Read) -> None:
    rows: Rows = [["Ingredient", "Site", "Supplier", "$/t"], ["Maize", "Larkwater", "Marram Grain", 205]]
    assert [(row.price_per_t, row.site_id, row.supplier_id) for row in read(rows).accepted] == [(205, None, None)]


OFFERS: Rows = [["Ingredient", "Supplier", "$/t"], ["Wheat", "Marram Grain", 212], ["Wheat", "Tarnbeck", 209],
                ["Maize", "Marram Grain", 205], ["Oats", "Unknown & Sons", 226]]


def test_prices_of_two_suppliers_stand_beside_each_other_where_the_mill_buys_from_one_of_them(
    read_in_mill: Read
) -> None:
    reading = read_in_mill(OFFERS)
    assert fates(reading) == [IGNORED, A, A, A, A]
    assert [row.supplier_id for row in reading.accepted] == [1, 2, 1, None]
    assert "no supplier “Unknown & Sons”" in reading.rows[4].reason


def test_where_the_mill_buys_from_neither_it_is_asked_which_price_holds(read_in_mill: Read) -> None:
    reading = read_in_mill([*OFFERS, ["Maize", "Tarnbeck", 201]])
    assert fates(reading) == [IGNORED, A, A, Q, A, Q]


@pytest.mark.parametrize(
    ("title", "site"),
    [
        ("Delivered Fellgate store", 2), ("Prices delivered to Larkwater, in USD", 1), ("Larkwater", 1),
        ("Larkwater Grain Ltd", None), ("Prices of Larkwater Grain", None), ("For Larkwater Farms of Bay", None),
        ("Delivered Larkwater; collected Fellgate store", 1), ("Our prices", None),
    ],
)
def test_a_title_that_names_the_place_of_delivery_tells_the_site(
    read_in_mill: Read, title: str, site: int | None
) -> None:
    rows: Rows = [[title], ["Ingredient", "$/t"], ["Maize", 205]]
    reading = read_in_mill(rows)
    assert reading.site_id == site
    assert any("After its title" in note for note in reading.notes) == (site is not None)
    whole = read_in_mill(rows, Answer(Asked.SITE, "", LEAVE_OUT))
    assert whole.site_id is None
