"""Blank is unknown and is not zero."""

from __future__ import annotations

from typing import Any

import pytest

from blendapp.domain.formulas import Amounts
from blendapp.domain.ingredients import Basis
from blendapp.domain.results import Result
from blendapp.services.formulate import formulate
from tests.mills import TODAY, Maker


def mill(amounts: Amounts = Amounts.BLEND) -> tuple[Maker, Any]:
    """Maize is known whole; wheat lacks aflatoxin and balance, and its dry matter."""
    make = Maker()
    make.nutrient("Aflatoxin", "ug/kg")
    make.nutrient("Balance", "mEq/kg", never_negative=False)
    make.nutrient("Energy", "MJ/kg")
    make.ingredient("Maize", 200, {"Aflatoxin": 5, "Balance": 40, "Energy": 14}, dry_matter_percent=87)
    make.ingredient("Wheat", 190, {"Energy": 13})
    return make, make.formula(amounts=amounts)


def unknown(result: Result) -> list[tuple[str, str, bool]]:
    return [(u.ingredient, u.nutrient, u.unsafe) for u in result.unknown]


CASES: list[tuple[str, Any, float | None, float | None, dict[str, Any], list[tuple[str, str, bool]]]] = [
    ("nutrient", "Aflatoxin", 1, None, {}, [("Wheat", "Aflatoxin", False)]),
    ("nutrient", "Aflatoxin", None, 20, {}, [("Wheat", "Aflatoxin", True)]),
    ("nutrient", "Aflatoxin", 1, 20, {}, [("Wheat", "Aflatoxin", True)]),
    ("nutrient", "Aflatoxin", None, None, {}, []),
    ("nutrient", "Balance", 1, None, {}, [("Wheat", "Balance", True)]),
    ("nutrient", "Energy", 10, 14, {}, []),
    ("nutrient", "Energy", 10, None, {"basis": "dry matter"}, [("Wheat", "Dry matter", True)]),
    ("nutrient", "Energy", 10, None, {"basis": "at 88 % dry matter"}, [("Wheat", "Dry matter", True)]),
    ("nutrient", "Aflatoxin", None, 20, {"basis": "dry matter"},
     [("Wheat", "Aflatoxin", True), ("Wheat", "Dry matter", True)]),
    ("nutrient", "Dry matter", 50, None, {}, [("Wheat", "Dry matter", False)]),
    ("nutrient", "Dry matter", None, 90, {}, [("Wheat", "Dry matter", True)]),
    ("nutrient", "Moisture", None, 14, {}, [("Wheat", "Moisture", True)]),
    ("ratio", "Aflatoxin", 0.1, None, {"per": "Energy"}, [("Wheat", "Aflatoxin", True)]),
    ("ratio", "Energy", 0.1, None, {"per": "Aflatoxin"}, [("Wheat", "Aflatoxin", True)]),
    ("ingredient", "Wheat", None, 50, {}, []),
    ("group", ["Wheat", "Maize"], None, 100, {}, []),
]


@pytest.mark.parametrize(("kind", "name", "minimum", "maximum", "more", "expected"), CASES)
def test_an_unknown_value_under_a_limit_is_named_and_is_unsafe_where_0_may_do_harm(
    kind: str, name: Any, minimum: float | None, maximum: float | None, more: dict[str, Any],
    expected: list[tuple[str, str, bool]],
) -> None:
    make, feed = mill()
    make.limit(feed, kind, name, minimum, maximum, **more)
    result = formulate(make.library, feed.id, TODAY)
    assert unknown(result) == expected
    cautioned = [text for text in result.cautions if "is unknown" in text]
    assert len(cautioned) == sum(unsafe for _i, _n, unsafe in expected)


def test_an_unknown_dry_matter_is_unsafe_under_a_share_of_dry_matter() -> None:
    make, cow = mill(Amounts.RATION)
    make.limit(cow, "ingredient", "Wheat", None, 50, unit="% of dry matter")
    assert unknown(formulate(make.library, cow.id, TODAY)) == [("Wheat", "Dry matter", True)]


def test_a_value_on_dry_matter_of_unknown_dry_matter_is_unknown() -> None:
    make = Maker()
    make.nutrient("Protein")
    make.ingredient("Silage", 30, {"Protein": 9}, basis=Basis.DRY_MATTER)
    feed = make.formula()
    make.limit(feed, "nutrient", "Protein", 0)
    result = formulate(make.library, feed.id, TODAY)
    assert unknown(result) == [("Silage", "Protein", False)]
    assert (result.nutrients[0].value, result.nutrients[0].missing) == (None, ("Silage",))


def test_a_known_absence_is_no_unknown() -> None:
    make = Maker()
    make.nutrient("Aflatoxin", "ug/kg")
    make.ingredient("Salt", 90, {"Aflatoxin": 0})
    feed = make.formula()
    make.limit(feed, "nutrient", "Aflatoxin", None, 20)
    result = formulate(make.library, feed.id, TODAY)
    assert result.unknown == ()
    assert (result.nutrients[0].value, result.nutrients[0].missing) == (0.0, ())


def test_a_nutrient_of_the_mix_names_those_of_its_ingredients_that_lack_it() -> None:
    make, feed = mill()
    make.limit(feed, "ingredient", "Wheat", 40, 40)
    result = formulate(make.library, feed.id, TODAY)
    aflatoxin, balance, energy = result.nutrients
    assert (aflatoxin.value, aflatoxin.missing) == (pytest.approx(3.0), ("Wheat",))
    assert balance.missing == ("Wheat",)
    assert (energy.value, energy.missing) == (pytest.approx(13.6), ())


def test_an_ingredient_that_is_admitted_but_not_used_is_still_an_unknown() -> None:
    make, feed = mill()
    make.limit(feed, "nutrient", "Aflatoxin", None, 20)
    make.limit(feed, "ingredient", "Wheat", None, 0)
    result = formulate(make.library, feed.id, TODAY)
    assert [i.name for i in result.mix] == ["Maize"]
    assert unknown(result) == [("Wheat", "Aflatoxin", True)]


def test_an_unpriced_ingredient_is_left_out_of_the_unknowns() -> None:
    make, feed = mill()
    make.ingredient("Barley")
    make.limit(feed, "nutrient", "Aflatoxin", None, 20)
    assert unknown(formulate(make.library, feed.id, TODAY)) == [("Wheat", "Aflatoxin", True)]


def test_a_nutrient_with_a_limit_of_its_own_is_marked_as_limited() -> None:
    make, feed = mill()
    make.limit(feed, "nutrient", "Aflatoxin", None, 20)
    make.limit(feed, "ratio", "Energy", None, 99, per="Aflatoxin")
    result = formulate(make.library, feed.id, TODAY)
    assert {n.name: n.limited for n in result.nutrients} == {"Aflatoxin": True, "Balance": False, "Energy": False}


def test_a_value_on_dry_matter_without_the_dry_matter_asks_for_the_dry_matter() -> None:
    make, feed = mill()
    make.ingredient("Barley", 150, {"Aflatoxin": 4}, basis=Basis.DRY_MATTER)
    make.limit(feed, "nutrient", "Aflatoxin", None, 20)
    said = formulate(make.library, feed.id, TODAY).cautions
    about = {name: [text for text in said if name in text] for name in ("Wheat", "Barley")}
    (barley,) = about["Barley"]
    (wheat,) = about["Wheat"]
    assert barley.endswith("enter the dry matter.")
    assert "known only in its dry matter" in barley
    assert wheat.endswith("is unknown and counts as 0 under a limit that this may break; enter it.")
