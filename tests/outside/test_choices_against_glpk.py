"""Practical minima and counts against every choice of ingredients tried one by one with GLPK."""

from __future__ import annotations

import itertools
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from blendapp.domain.formulas import Limit, LimitKind, Subject
from blendapp.domain.library import Library
from blendapp.domain.records import Change
from blendapp.domain.results import Status
from blendapp.services.formulate import formulate
from tests.mills import TODAY, Maker
from tests.outside import plain_feed
from tests.outside.test_mills_against_glpk import by_glpk


@st.composite
def mills(draw: st.DrawFn) -> Library:
    """A blend of up to six ingredients under two nutrients, with practical minima and counts on some."""
    make = Maker()
    make.nutrient("A")
    make.nutrient("B", "g/kg")
    count = draw(st.integers(3, 6))
    for n in range(count):
        values = {"A": draw(st.integers(0, 500)) / 10, "B": float(draw(st.integers(0, 300)))}
        make.ingredient(f"I{n}", float(draw(st.integers(50, 900))), values)
    feed = make.formula()
    make.limit(feed, "nutrient", "A", draw(st.integers(5, 350)) / 10)
    make.limit(feed, "nutrient", "B", float(draw(st.integers(10, 200))), 250.0)
    for n in draw(st.sets(st.integers(0, count - 1), max_size=3)):
        make.limit(feed, "practical", f"I{n}", draw(st.sampled_from([0.5, 5.0, 20.0, 45.0])))
    if draw(st.booleans()):
        group = sorted(draw(st.sets(st.integers(0, count - 1), min_size=2)))
        make.limit(feed, "count", [f"I{n}" for n in group], None, float(draw(st.integers(1, len(group)))))
    return make.library


def best_of_all_choices(library: Library) -> float | None:
    """The least cost per kg over every set of ingredients that may be used together, by GLPK; None where none can."""
    everything = library.ingredients
    least = {x.subject.ids[0]: x.minimum for x in library.limits(1) if x.kind is LimitKind.PRACTICAL}
    counts = [x for x in library.limits(1) if x.kind is LimitKind.COUNT]
    linear = library.copy()
    linear.apply(Change(x, None) for x in library.limits(1) if x.kind in (LimitKind.PRACTICAL, LimitKind.COUNT))
    best: float | None = None
    for size in range(1, len(everything) + 1):
        for chosen in itertools.combinations(everything, size):
            ids = {i.id for i in chosen}
            if any(len(ids & set(x.subject.ids)) > (x.maximum or 0) for x in counts):
                continue
            tried = linear.copy()
            tried.apply(
                Change(None, Limit(900 + key, 1, LimitKind.INGREDIENT, Subject.ingredients(key), minimum=least[key]))
                for key in ids & set(least)
            )
            _status, cost = by_glpk(tried, list(chosen), set())
            if cost is not None and (best is None or cost < best):
                best = cost
    return best


@settings(max_examples=60, deadline=None)
@given(mills())
def test_the_cost_is_that_of_the_best_choice_of_ingredients(library: Library) -> None:
    best = best_of_all_choices(library)
    result = formulate(library, 1, TODAY)
    if best is None:
        assert result.status is Status.CONFLICT
        return
    assert result.status is Status.OPTIMAL
    assert result.cost == pytest.approx(1000 * best, rel=2e-7)
    amounts = {i.ingredient_id: i.amount or 0.0 for i in result.ingredients}
    for limit, one in zip(library.limits(1), result.limits, strict=True):
        used = plain_feed.value(library, library.formula(1), limit, amounts)
        assert used is not None
        assert one.value == pytest.approx(used, rel=1e-6, abs=1e-9)
        if limit.kind is LimitKind.PRACTICAL:
            assert used == 0 or used >= (limit.minimum or 0) - 1e-7
        if limit.kind is LimitKind.COUNT:
            assert used <= (limit.maximum or 0)
            assert (one.tighten_cost, one.relax_saving, one.shadow_price_unique) == (None, None, None)


def figures(library: Library) -> list[tuple[Any, ...]]:
    return [(x.value, x.binding, x.minimum, x.maximum) for x in formulate(library, 1, TODAY).limits]


def test_a_practical_minimum_binds_where_it_is_used_at_its_bound_and_not_where_it_is_left_out() -> None:
    make = Maker()
    make.nutrient("A")
    make.ingredient("Base", 100, {"A": 10.0})
    make.ingredient("Rich", 300, {"A": 60.0})
    feed = make.formula()
    need = make.limit(feed, "nutrient", "A", 12.0)
    make.limit(feed, "practical", "Rich", 10.0)
    library = make.library
    assert figures(library)[1] == (10.0, "minimum", 10.0, None)
    assert formulate(library, 1, TODAY).given_ingredients is True
    library.apply([Change(need, replace(need, minimum=9.0))])
    assert figures(library)[1] == (0.0, None, 10.0, None)
    library.apply([Change(library.limit(need.id), replace(need, minimum=25.0))])
    value, binding, _minimum, _maximum = figures(library)[1]
    assert value == pytest.approx(30.0)
    assert binding is None
