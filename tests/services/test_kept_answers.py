"""Kept answers follow prices from their bases, and are forgotten when anything else changes."""

from __future__ import annotations

from dataclasses import replace

import pytest

from blendapp.domain.library import Library
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
