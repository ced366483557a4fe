"""Kept answers follow prices from their bases, and are forgotten when anything else changes."""

from __future__ import annotations

from dataclasses import replace

import pytest

from blendapp.domain.formulas import MixingStep
from blendapp.domain.library import Library
from blendapp.domain.plant import Bin, Lot, Site, Supplier
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change, added
from blendapp.optimise.build.composition import Composition
from blendapp.services import kept_answers
from blendapp.services.formulate import formulate
from blendapp.services.kept_answers import KeptAnswers, prices_of
from tests.mills import TODAY, three_ingredients


def at_price(library: Library, ingredient_id: int, price: float) -> Library:
    """A copy in which an ingredient has another price."""
    copy = library.copy()
    copy.apply([added(Quote(900, ingredient_id, price, valid_from=TODAY))])
    return copy


def count_solves(monkeypatch: pytest.MonkeyPatch) -> list[int]:
    solved: list[int] = []
    real = kept_answers.answer_to

    def counting(library: Library, formula_id: int, *more: object, **named: object) -> object:
        solved.append(formula_id)
        return real(library, formula_id, *more, **named)

    monkeypatch.setattr(kept_answers, "answer_to", counting)
    return solved


@pytest.mark.parametrize("price", [150.0, 210.0, 600.0, 2000.0])
def test_at_other_prices_the_cost_is_that_of_formulating_and_nothing_is_solved_anew(
    price: float, monkeypatch: pytest.MonkeyPatch
) -> None:
    library, feed = three_ingredients()
    solved = count_solves(monkeypatch)
    answers, composition = KeptAnswers().view(), Composition(library)
    assert answers.at(library, feed, TODAY, composition, prices_of(library, TODAY)).cost == pytest.approx(255)
    for ingredient_id in (1, 2, 3):
        moved = at_price(library, ingredient_id, price)
        found = answers.at(moved, feed, TODAY, composition, prices_of(moved, TODAY))
        assert found.cost == pytest.approx(formulate(moved, feed.id, TODAY).cost, rel=1e-9)
    assert answers.at(library, feed, TODAY, composition, prices_of(library, TODAY)).cost == pytest.approx(255)
    assert solved == [feed.id]


def test_a_changed_limit_solves_again(monkeypatch: pytest.MonkeyPatch) -> None:
    library, feed = three_ingredients()
    kept, composition = KeptAnswers(), Composition(library)
    kept.view().at(library, feed, TODAY, composition, prices_of(library, TODAY))
    limit = library.limits(feed.id)[0]
    change = Change(limit, replace(limit, minimum=21.0))
    library.apply([change])
    kept.refresh([change])
    found = kept.view().at(library, feed, TODAY, composition, prices_of(library, TODAY))
    assert found.cost == pytest.approx(formulate(library, feed.id, TODAY).cost)


def test_a_worker_with_an_older_library_leaves_nothing_behind_for_the_edited_mill() -> None:
    library, feed = three_ingredients()
    kept, older = KeptAnswers(), library.copy()
    view = kept.view()
    limit = library.limits(feed.id)[0]
    change = Change(limit, replace(limit, minimum=21.0))
    library.apply([change])
    kept.refresh([change])
    assert view.at(older, feed, TODAY, Composition(older), prices_of(older, TODAY)).cost == pytest.approx(255)
    now = kept.view().at(library, feed, TODAY, Composition(library), prices_of(library, TODAY))
    assert now.cost == pytest.approx(formulate(library, feed.id, TODAY).cost)
    assert now.cost != pytest.approx(255)


def test_an_ingredient_that_loses_its_price_is_no_longer_in_the_mix() -> None:
    library, feed = three_ingredients()
    answers, composition = KeptAnswers().view(), Composition(library)
    answers.at(library, feed, TODAY, composition, prices_of(library, TODAY))
    gone = library.copy()
    gone.apply([added(Quote(900, 2, None, valid_from=TODAY))])
    found = answers.at(gone, feed, TODAY, composition, prices_of(gone, TODAY))
    assert 2 not in found.amounts
    assert found.cost == pytest.approx(formulate(gone, feed.id, TODAY).cost)


@pytest.mark.parametrize("where", ["site", "supplier"])
def test_another_site_or_supplier_is_followed_like_any_other_price(where: str) -> None:
    library, feed = three_ingredients()
    library.apply([
        added(Site(1, "North")), added(Supplier(1, "Vela")), added(Supplier(2, "Moor")),
        added(Quote(901, 1, 300.0, site_id=1)), added(Quote(902, 2, 500.0, supplier_id=1)),
        added(Quote(903, 2, 420.0, supplier_id=2)),
    ])
    kept, composition = KeptAnswers(), Composition(library)
    before = kept.view().at(library, feed, TODAY, composition, prices_of(library, TODAY)).cost
    if where == "site":
        change = Change(library.mill, replace(library.mill, site_id=1))
    else:
        meal = library.ingredient(2)
        change = Change(meal, replace(meal, supplier_id=1))
    library.apply([change])
    kept.refresh([change])
    composition.refresh(library, [change])
    after = kept.view().at(library, feed, TODAY, composition, prices_of(library, TODAY)).cost
    assert before == pytest.approx(255.0)  # 75 % at 200 and 25 % at 420
    # In the north 75 % at 300; from the supplier of the meal 25 % at 500.
    assert after == pytest.approx({"site": 330.0, "supplier": 275.0}[where])


def test_a_new_step_bin_or_lot_leaves_kept_answers_alone(monkeypatch: pytest.MonkeyPatch) -> None:
    library, feed = three_ingredients()
    solved = count_solves(monkeypatch)
    kept, composition = KeptAnswers(), Composition(library)
    view = kept.view()
    view.at(library, feed, TODAY, composition, prices_of(library, TODAY))
    kept.refresh([added(MixingStep(1, None, 1, "mix")), added(Lot(1, 1, "L")), added(Bin(1, "1", 1))])
    view.at(library, feed, TODAY, composition, prices_of(library, TODAY))
    assert solved == [feed.id]
