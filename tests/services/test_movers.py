"""What new prices do: every row against formulating anew at both sets of prices."""

from __future__ import annotations

import random

import pytest

from blendapp.domain.formulas import Admits, Amounts
from blendapp.domain.library import Library
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change
from blendapp.domain.results import Status
from blendapp.services.formulate import formulate
from blendapp.services.movers import movers
from tests.mills import TODAY, Maker

ON = TODAY


def mill() -> Library:
    make = Maker()
    make.nutrient("Protein")
    make.nutrient("Energy", "MJ/kg")
    for name, price, protein, energy in (
        ("Maize", 200.0, 9.0, 14.0), ("Wheat", 210.0, 12.0, 13.0), ("Soya", 420.0, 46.0, 9.5),
        ("Rape", 280.0, 34.0, 8.0), ("Oil", 1000.0, 0.0, 36.0), ("Bran", 150.0, 15.0, 7.0),
    ):
        make.ingredient(name, price, {"Protein": protein, "Energy": energy})
    for number in range(4):
        feed = make.formula(f"Feed {number}", admits=Admits.ALL)
        make.limit(feed, "nutrient", "Protein", 14.0 + 2 * number)
        make.limit(feed, "nutrient", "Energy", 10.5 + 0.3 * number)
        make.limit(feed, "ingredient", "Rape", None, 12.0)
    chosen = make.formula("Choice", admits=Admits.ALL)
    make.limit(chosen, "nutrient", "Protein", 16.0)
    make.limit(chosen, "practical", "Wheat", 5.0)
    day = make.formula("Ration", admits=Admits.ALL, amounts=Amounts.RATION)
    make.limit(day, "nutrient", "Protein", 800.0, unit="g/day", basis="per day")
    listed = make.formula("Oil alone", admits=Admits.LISTED)
    make.limit(listed, "ingredient", "Oil")
    return make.library


def priced(library: Library, prices: dict[int, float | None]) -> Library:
    copy = library.copy()
    copy.apply([
        Change(None, Quote(1000 + key, key, price, "t", valid_from=ON)) for key, price in prices.items()
    ])
    return copy


@pytest.mark.parametrize("seed", range(12))
def test_every_row_agrees_with_formulating_at_both_sets_of_prices(seed: int) -> None:
    before, chance = mill(), random.Random(seed)
    changed = chance.sample(range(1, 7), 3)
    after = priced(before, {
        key: (before.price_per_t(key, ON) or 0) * chance.choice((0.7, 0.97, 1.02, 1.4)) for key in changed
    })
    rows = movers(before, after, ON)
    assert rows
    for row in rows:
        old, new = formulate(before, row.formula_id, ON), formulate(after, row.formula_id, ON)
        assert row.status_after is new.status is Status.OPTIMAL
        assert row.before == pytest.approx(old.cost, rel=1e-7)
        assert row.after == pytest.approx(new.cost, rel=1e-7)
        assert row.as_before is not None
        assert row.as_before >= (row.after or 0) - 1e-6
        same = all(abs((a.amount or 0) - (b.amount or 0)) < 1e-6
                   for a, b in zip(old.ingredients, new.ingredients, strict=True))
        if row.kept:
            assert row.as_before == pytest.approx(row.after, rel=1e-7)
        else:
            assert not same
        assert row.most is None or row.most.ingredient_id in changed


def test_the_price_that_did_most_is_named_with_what_it_did() -> None:
    before = mill()
    after = priced(before, {5: 1100.0, 2: 211.0})
    row = next(one for one in movers(before, after, ON) if one.formula == "Oil alone")
    assert row.kept
    assert row.change == pytest.approx(100.0)
    assert row.most is not None
    assert (row.most.ingredient, row.most.before, row.most.after) == ("Oil", 1000.0, 1100.0)
    assert row.most.effect == pytest.approx(100.0)


def test_a_formula_without_a_changed_price_has_no_row() -> None:
    before = mill()
    assert "Oil alone" not in [one.formula for one in movers(before, priced(before, {1: 190.0}), ON)]
    assert movers(before, before.copy(), ON) == []


def test_a_price_that_goes_leaves_the_formula_without_an_answer_and_is_named() -> None:
    before = mill()
    row = next(one for one in movers(before, priced(before, {5: None}), ON) if one.formula == "Oil alone")
    assert row.status_after is Status.INCOMPLETE
    assert row.after is None
    assert row.change is None
    assert row.kept is None
    assert row.most is not None
    assert row.most.ingredient == "Oil"


def test_stopping_keeps_the_rows_so_far_and_progress_is_told() -> None:
    before = mill()
    after = priced(before, {1: 190.0, 5: 900.0})
    told: list[tuple[int, int]] = []
    rows = movers(before, after, ON, go_on=lambda: len(told) < 3, progress=lambda done, of: told.append((done, of)))
    assert len(rows) == 2
    assert told == [(0, 7), (1, 7), (2, 7)]
    assert rows == movers(before, after, ON)[:2]


def test_neither_library_is_changed() -> None:
    before = mill()
    after = priced(before, {1: 190.0})
    prices = [before.price_per_t(key, ON) for key in range(1, 7)], [after.price_per_t(key, ON) for key in range(1, 7)]
    movers(before, after, ON)
    assert prices == (
        [before.price_per_t(key, ON) for key in range(1, 7)], [after.price_per_t(key, ON) for key in range(1, 7)])

