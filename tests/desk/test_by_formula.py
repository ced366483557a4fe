"""A made ingredient without a price or values: the answer says, in text and window, that its formula can give them."""

from __future__ import annotations

from blendapp.cli import as_text
from blendapp.desk.mix.lines import lines_of
from blendapp.domain.formulas import Admits
from blendapp.domain.library import Library
from blendapp.domain.results import Result, Status
from blendapp.services.formulate import formulate
from tests.mills import TODAY, Maker

WORDS = "can give its price and composition: in the window, “Take composition and price from its formula”."


def library(price: float | None, lysine: float | None, least: float | None = 1.0, maize: float | None = 0.3) -> Library:
    """Feed of maize and a premix that the formula Base makes of salt."""
    make = Maker()
    make.nutrient("Lysine")
    make.ingredient("Salt", 90.0, {"Lysine": 0.0})
    base = make.formula("Base", admits=Admits.LISTED)
    make.limit(base, "ingredient", "Salt")
    make.ingredient("Maize", 200.0, {} if maize is None else {"Lysine": maize})
    make.ingredient("Premix", price, {} if lysine is None else {"Lysine": lysine}, made_by_formula_id=base.id)
    feed = make.formula("Feed", admits=Admits.LISTED)
    make.limit(feed, "ingredient", "Maize")
    make.limit(feed, "ingredient", "Premix", least, 2.0)
    make.limit(feed, "nutrient", "Lysine", 0.1)
    return make.library


def said(result: Result) -> list[str]:
    """The sentence as the text and as the window say it."""
    text = [line.strip() for line in as_text.formula(result).splitlines() if "from its formula" in line]
    window = [line.text for line in lines_of(result, frozenset(), frozenset()) if "from its formula" in line.text]
    assert text == window
    return text


def test_no_answer_for_want_of_a_price_that_a_formula_can_give_says_so() -> None:
    result = formulate(library(None, 0.2), 2, TODAY)
    assert result.status is Status.INCOMPLETE
    assert said(result) == ["The formula that makes Premix " + WORDS]


def test_a_made_ingredient_left_out_for_its_price_is_named_beside_an_answer() -> None:
    result = formulate(library(None, 0.2, None), 2, TODAY)
    assert result.status is Status.OPTIMAL
    assert said(result) == ["The formula that makes Premix " + WORDS]


def test_a_value_that_is_unknown_is_one_that_a_formula_can_give() -> None:
    assert said(formulate(library(300.0, None), 2, TODAY)) == ["The formula that makes Premix " + WORDS]


def test_where_nothing_is_lacking_and_where_what_lacks_is_bought_nothing_is_said() -> None:
    assert said(formulate(library(300.0, 0.2), 2, TODAY)) == []
    bought = formulate(library(300.0, 8.0, maize=None), 2, TODAY)
    assert [one.ingredient for one in bought.unknown] == ["Maize"]
    assert said(bought) == []
