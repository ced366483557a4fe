"""What more is asked of an answer: near-optimal ranges, and why there is none."""

from __future__ import annotations

from dataclasses import replace

import pytest

from blendapp.domain.problems import Refused
from blendapp.domain.records import Change
from blendapp.domain.results import Side, Status
from blendapp.services.asking import ask_all, with_near
from blendapp.services.formulate import answer_to, formulate
from tests.mills import TODAY, Maker, three_ingredients


def beyond_reach():
    """Protein asked beyond what the ingredients hold, and fibre that clashes with it."""
    make = Maker()
    make.nutrient("Crude protein")
    make.nutrient("Crude fibre")
    make.ingredient("Maize", 200, {"Crude protein": 9, "Crude fibre": 2})
    make.ingredient("Soya", 420, {"Crude protein": 46, "Crude fibre": 6})
    feed = make.formula()
    make.limit(feed, "nutrient", "Crude protein", 30)
    make.limit(feed, "nutrient", "Crude fibre", None, 3)
    make.limit(feed, "ingredient", "Maize", 10)
    return make.library, feed


def test_near_ranges_hold_the_answer_and_are_wider_with_a_larger_tolerance() -> None:
    library, feed = three_ingredients()
    answer = answer_to(library, feed.id, TODAY)
    narrow, wide = with_near(answer, 0.5), with_near(answer, 2)
    for one, other in zip(narrow.ingredients, wide.ingredients, strict=True):
        assert one.near_optimal is not None
        assert other.near_optimal is not None
        assert other.near_optimal[0] <= one.near_optimal[0] <= one.amount
        assert one.amount <= one.near_optimal[1] <= other.near_optimal[1]
    pairs = zip(narrow.ingredients, wide.ingredients, strict=True)
    assert any(other.near_optimal[1] > one.near_optimal[1] for one, other in pairs)


def test_a_tolerance_below_zero_is_refused_in_a_sentence() -> None:
    library, feed = three_ingredients()
    with pytest.raises(Refused, match="0 % or more"):
        with_near(answer_to(library, feed.id, TODAY), -1)


def test_a_conflict_names_the_limits_that_clash_and_shows_no_figure_of_an_answer() -> None:
    library, feed = beyond_reach()
    result = ask_all(answer_to(library, feed.id, TODAY))
    assert result.status is Status.CONFLICT
    assert result.conflict is not None
    assert set(result.conflict.members) == {0, 1}
    assert result.cost is None
    assert all(one.amount is None for one in result.ingredients)


def test_each_repair_makes_the_formula_possible_and_a_hair_less_does_not() -> None:
    library, feed = beyond_reach()
    conflict = ask_all(answer_to(library, feed.id, TODAY)).conflict
    assert conflict is not None
    assert len(conflict.repairs) == 2
    for repair in conflict.repairs:
        assert repair.to is not None
        limit = library.limits(feed.id)[repair.limit]
        less = repair.to + (1e-4 if repair.bound is Side.MINIMUM else -1e-4)
        for bound, status in ((repair.to, Status.OPTIMAL), (less, Status.CONFLICT)):
            tried = library.copy()
            tried.apply([Change(limit, replace(limit, **{str(repair.bound): bound}))])
            assert formulate(tried, feed.id, TODAY).status is status


def test_what_a_limit_could_reach_alone_is_in_its_own_unit() -> None:
    library, feed = beyond_reach()
    limit = library.limits(feed.id)[0]
    library.apply([Change(limit, replace(limit, minimum=500.0, unit="g/kg"))])
    conflict = ask_all(answer_to(library, feed.id, TODAY)).conflict
    assert conflict is not None
    (reach,) = conflict.reach
    assert (reach.limit, reach.asked) == (0, 500.0)
    assert reach.reachable == pytest.approx(0.1 * 90 + 0.9 * 460)
