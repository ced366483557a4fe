"""Equally cheap mixes: one rule chooses, and the others are said."""

from __future__ import annotations

from blendapp.services.formulate import formulate
from tests.mills import TODAY, Maker


def twins(**wheat_limit: float):
    make = Maker()
    make.nutrient("Crude protein")
    make.ingredient("Barley", 180, {"Crude protein": 11})
    make.ingredient("Wheat", 180, {"Crude protein": 11})
    make.ingredient("Soya", 400, {"Crude protein": 46})
    feed = make.formula()
    make.limit(feed, "nutrient", "Crude protein", 18)
    make.limit(feed, "ingredient", "Wheat", **wheat_limit)
    return make.library, feed


def test_of_two_equally_cheap_ingredients_the_one_entered_first_is_taken_whole() -> None:
    library, feed = twins(maximum=50)
    amounts = {one.name: one.amount for one in formulate(library, feed.id, TODAY).ingredients}
    assert amounts["Barley"] == 0.8
    assert amounts["Wheat"] == 0


def test_what_can_be_exchanged_at_the_same_cost_is_said_with_its_amount() -> None:
    library, feed = twins(maximum=30)
    assert formulate(library, feed.id, TODAY).tie == "30.000 % of Barley can be Wheat at the same cost."


def test_nothing_is_said_where_the_optimum_is_unique() -> None:
    library, feed = twins(maximum=0)
    assert formulate(library, feed.id, TODAY).tie is None
