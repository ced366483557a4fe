"""The dry matter that a list gives beside its price of dry matter comes before the mill's own."""

from __future__ import annotations

import pytest

from blendapp.domain.list_rows import Fate
from tests.exchange.conftest import Read


@pytest.mark.parametrize(
    ("heading", "cell", "price"),
    [("DM %", 86, 200.38), ("Dry matter (%)", "86", 200.38), ("DM g/kg", 860, 200.38), ("Moisture %", 14, 200.38),
     ("DM %", None, 205.04), ("DM %", "n/a", 205.04), ("Protein %", 8, 205.04)],
)
def test_the_dry_matter_of_the_row_turns_its_price_to_one_as_fed(
    read: Read, heading: str, cell: object, price: float
) -> None:
    reading = read([["Ingredient", "USD/t DM", heading], ["Maize", 233, cell]])
    (row,) = reading.accepted
    assert row.price_per_t == pytest.approx(price, abs=0.01)
    assert ("the mill 88 %" in row.reason) == (price != 205.04)


def test_goods_of_which_the_mill_knows_no_dry_matter_are_not_asked_about_then(read: Read) -> None:
    reading = read([["Ingredient", "USD/t DM", "DM %"], ["Limestone", 44, 99]])
    assert [row.fate for row in reading.rows] == [Fate.IGNORED, Fate.ACCEPTED]


def test_a_price_as_fed_is_left_as_it_is(read: Read) -> None:
    (row,) = read([["Ingredient", "USD/t", "DM %"], ["Maize", 205, 86]]).accepted
    assert row.price_per_t == 205
