from __future__ import annotations

import pytest

from blendapp.domain.formulas import Admits
from blendapp.domain.making import cycle, cycle_fault, used_ids
from tests.mills import Maker


def test_what_a_formula_shuts_out_with_a_maximum_of_0_it_does_not_use() -> None:
    make = Maker()
    for name in ("Maize", "Wheat", "Premix"):
        make.ingredient(name, 200)
    feed = make.formula()
    make.limit(feed, "ingredient", "Premix", maximum=0)
    make.limit(feed, "ingredient", "Wheat", maximum=10)
    assert used_ids(make.library, feed) == {1, 2}


def test_a_chain_of_makings_back_to_itself_is_found_by_the_shortest_way() -> None:
    make = Maker()
    premix_formula, mash_formula = make.formula("A", admits=Admits.LISTED), make.formula("B", admits=Admits.LISTED)
    make.ingredient("Premix", 900, made_by_formula_id=premix_formula.id)
    make.ingredient("Mash", 300, made_by_formula_id=mash_formula.id)
    make.limit(mash_formula, "ingredient", "Premix")
    assert cycle(make.library, 1) == []
    assert cycle_fault(make.library, 1) is None
    make.limit(premix_formula, "ingredient", "Mash")
    assert cycle(make.library, 1) == ["Premix", "Mash", "Premix"]
    assert "(Premix < Mash < Premix)" in (cycle_fault(make.library, 1) or "")


@pytest.mark.timeout(20)
def test_a_cycle_of_others_does_not_hold_the_search_up() -> None:
    make = Maker()
    first, second, third = (make.formula(name, admits=Admits.LISTED) for name in "ABC")
    make.ingredient("One", 1, made_by_formula_id=first.id)
    make.ingredient("Two", 1, made_by_formula_id=second.id)
    make.ingredient("Three", 1, made_by_formula_id=third.id)
    make.limit(first, "ingredient", "Two")
    make.limit(second, "ingredient", "Three")
    make.limit(third, "ingredient", "Two")
    assert cycle(make.library, 1) == []
    assert cycle(make.library, 2) == ["Two", "Three", "Two"]
