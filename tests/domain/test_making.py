"""An ingredient that the mill makes may not go into itself."""

from __future__ import annotations

from dataclasses import replace

import pytest

from blendapp.domain import checks, units
from blendapp.domain.formulas import Admits
from blendapp.domain.library import Library
from blendapp.domain.making import cycle
from blendapp.domain.records import Change
from tests.mills import Maker


def premixes(maximum_of_second: float | None = None) -> Library:
    """Two premixes, each listed in the formula of the other."""
    maker = Maker()
    first, second = maker.formula("First", admits=Admits.LISTED), maker.formula("Second", admits=Admits.LISTED)
    maker.ingredient("Premix one", made_by_formula_id=first.id)
    maker.ingredient("Premix two", made_by_formula_id=second.id)
    maker.ingredient("Chalk")
    maker.limit(first, "ingredient", "Premix two", maximum=maximum_of_second)
    maker.limit(first, "ingredient", "Chalk")
    maker.limit(second, "ingredient", "Premix one")
    return maker.library


def test_a_cycle_through_another_formula_is_found_from_each_of_its_members() -> None:
    library = premixes()
    assert cycle(library, 1) == ["Premix one", "Premix two", "Premix one"]
    assert cycle(library, 2) == ["Premix two", "Premix one", "Premix two"]
    assert cycle(library, 3) == []


def test_an_ingredient_limited_to_0_is_not_used() -> None:
    assert cycle(premixes(maximum_of_second=0), 1) == []


def test_a_formula_that_admits_all_uses_what_it_makes_unless_that_must_be_listed() -> None:
    maker = Maker()
    feed = maker.formula(admits=Admits.ALL)
    made = maker.ingredient("Concentrate", made_by_formula_id=feed.id)
    assert [name for name, _text in checks.faults(made, maker.library)] == ["made_by_formula_id"]
    listed = replace(made, tags=("only when listed",))
    maker.library.apply([Change(made, listed)])
    assert checks.faults(listed, maker.library) == []


@pytest.mark.parametrize(
    ("name", "pounds"),
    [("Maize", 56), ("corn, grain", 56), ("Wheat", 60), ("Soybeans, whole", 60), ("Barley", 48), ("OATS", 32),
     ("Wheat bran", None), ("Maize germ meal", None), ("Soybean meal", None), ("", None)],
)
def test_only_the_grain_itself_has_a_legal_bushel(name: str, pounds: float | None) -> None:
    assert units.legal_bushel_lb(name) == pounds


@pytest.mark.parametrize("unit", sorted(units.CONCENTRATION))
@pytest.mark.parametrize("never_negative", [True, False])
def test_nothing_is_said_of_an_amount_within_the_quiet_range(unit: str, never_negative: bool) -> None:
    maker = Maker()
    nutrient = maker.nutrient("Something", unit, never_negative=never_negative)
    least, greatest = checks.quiet_range(nutrient, unit)
    for amount in (max(least, -1e300), 0.0, greatest):
        maker.library.apply(Change(value, None) for value in maker.library.all("value"))
        maker.ingredient(f"With {amount!r}", values={"Something": amount})
        value = maker.library.all("value")[0]
        assert checks.faults(value, maker.library) == []
        assert checks.oddities(value, maker.library) == []
