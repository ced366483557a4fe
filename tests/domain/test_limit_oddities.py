"""What is let in and said about a limit among the other limits and values of its formula."""

from __future__ import annotations

from typing import Any

import pytest

from blendapp.domain.checks import faults, oddities
from blendapp.domain.formulas import Admits, Amounts, Formula, Limit
from tests.mills import Maker


def mill(amounts: Amounts = Amounts.BLEND) -> tuple[Maker, Formula]:
    """Maize with phosphorus, salt and oil without, all listed without bounds."""
    make = Maker()
    make.nutrient("Phosphorus")
    make.nutrient("Calcium")
    make.nutrient("Balance", "mEq/kg", never_negative=False)
    make.ingredient("Maize", 200, {"Phosphorus": 0.3, "Calcium": 0.02, "Balance": 40})
    make.ingredient("Salt", 90, {"Phosphorus": 0, "Calcium": 0, "Balance": -5})
    make.ingredient("Oil", 900, {"Phosphorus": 0, "Calcium": 0, "Balance": 0})
    return make, make.formula(amounts=amounts, admits=Admits.LISTED)


def listed(make: Maker, feed: Formula, **bounds: tuple[float | None, float | None]) -> None:
    for name in ("Maize", "Salt", "Oil"):
        make.limit(feed, "ingredient", name, *bounds.get(name, (None, None)))


def said(make: Maker, limit: Limit) -> list[tuple[str, str]]:
    assert faults(limit, make.library) == []
    return oddities(limit, make.library)


def test_a_formula_that_admits_the_listed_and_lists_none_is_odd() -> None:
    make, feed = mill()
    ((field, text),) = oddities(feed, make.library)
    assert field == "admits"
    assert "lists none" in text
    make.limit(feed, "ingredient", "Maize")
    assert oddities(feed, make.library) == []
    assert oddities(make.formula("Mash", admits=Admits.ALL), make.library) == []


@pytest.mark.parametrize(
    ("amounts", "practical", "maximum", "odd"),
    [
        (Amounts.BLEND, (0.5, "%"), (4.9, "kg/t"), True), (Amounts.BLEND, (0.5, "%"), (5.0, "kg/t"), False),
        (Amounts.BLEND, (0.5, ""), (None, ""), False), (Amounts.RATION, (50, "g/day"), (0.04, "kg/day"), True),
        (Amounts.RATION, (50, "g/day"), (0.06, ""), False),
        (Amounts.RATION, (50, "g/day"), (1, "% of dry matter"), False),
    ],
)
def test_a_practical_minimum_above_the_ingredients_own_maximum_is_odd(
    amounts: Amounts, practical: tuple[float, str], maximum: tuple[float | None, str], odd: bool
) -> None:
    make, feed = mill(amounts)
    make.limit(feed, "ingredient", "Maize", None, 0.01)
    make.limit(feed, "ingredient", "Salt", None, maximum[0], unit=maximum[1])
    found = said(make, make.limit(feed, "practical", "Salt", practical[0], unit=practical[1]))
    assert [field for field, _text in found] == (["minimum"] if odd else [])
    if odd:
        assert "can never be used" in found[0][1]


def test_a_ratio_over_what_is_below_0_in_an_admitted_ingredient_is_odd_and_names_it() -> None:
    make, feed = mill()
    listed(make, feed)
    ((field, text),) = said(make, make.limit(feed, "ratio", "Calcium", 1, per="Balance"))
    assert field == "per"
    assert "Balance of Salt is below 0" in text


def test_a_ratio_over_what_is_below_0_only_in_an_ingredient_that_is_not_admitted_is_not_odd() -> None:
    make, feed = mill()
    make.limit(feed, "ingredient", "Maize")
    assert said(make, make.limit(feed, "ratio", "Calcium", 1, per="Balance")) == []


@pytest.mark.parametrize("name", ["Balance", "Phosphorus"])
def test_a_minimum_above_0_of_the_divisor_answers_the_oddity(name: str) -> None:
    make, feed = mill()
    listed(make, feed)
    ratio = make.limit(feed, "ratio", "Calcium", 1, per=name)
    assert said(make, ratio)
    make.limit(feed, "nutrient", name, 0.2)
    assert said(make, ratio) == []


@pytest.mark.parametrize(
    ("amounts", "bounds", "odd"),
    [
        (Amounts.BLEND, {}, True),
        (Amounts.BLEND, {"Salt": (None, 50), "Oil": (None, 50)}, True),
        (Amounts.BLEND, {"Salt": (None, 50), "Oil": (None, 49)}, False),
        (Amounts.BLEND, {"Maize": (1, None)}, False),
        (Amounts.RATION, {"Salt": (None, 0.05)}, True),
        (Amounts.RATION, {"Maize": (1, None)}, False),
    ],
)
def test_a_ratio_is_odd_where_a_mix_may_hold_nothing_of_its_divisor(
    amounts: Amounts, bounds: dict[str, Any], odd: bool
) -> None:
    make, feed = mill(amounts)
    listed(make, feed, **bounds)
    found = said(make, make.limit(feed, "ratio", "Calcium", 1, per="Phosphorus"))
    assert [field for field, _text in found] == (["per"] if odd else [])
    if odd:
        assert "A mix of Salt, Oil would have no Phosphorus" in found[0][1]
