"""An approved mix against today's analyses, and its batches."""

from __future__ import annotations

import sqlite3
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest

from blendapp.domain.batches import Batch
from blendapp.domain.formulas import Amounts
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.notation import COMMA, PLAIN, use_notation
from blendapp.domain.problems import Refused
from blendapp.domain.results import Result
from blendapp.services import edits
from blendapp.services import formulate as formulating
from blendapp.services.approved import Outside, approved_batch, outside_their_limits
from blendapp.services.batch import make_batch
from blendapp.services.formulate import formulate
from blendapp.services.mill import Mill, open_mill
from tests.mills import TODAY, Maker
from tests.services.approving import BARLEY, LAMB, MAIZE, MASH, MEAL, approve, feed_library, staffed

Opened = Callable[[Library], Mill]
pytestmark = pytest.mark.usefixtures("quick_hashing")
PROTEIN, LYSINE, ASH = 1, 2, 3


@pytest.fixture
def mill(opened: Opened) -> Mill:
    found = opened(feed_library())
    staffed(found)
    for formula_id in (MASH, LAMB):
        approve(found, formula_id)
    return found


def outside(mill: Mill) -> list[Outside]:
    return outside_their_limits(mill, TODAY)


def amount(mill: Mill, formula_id: int, ingredient_id: int) -> float:
    from blendapp.domain.versions import approved_amounts

    amounts = approved_amounts(mill.library, formula_id)
    assert amounts is not None
    return amounts[ingredient_id]


def test_versions_just_approved_are_within_their_limits(mill: Mill) -> None:
    assert outside(mill) == []


def test_a_new_analysis_lists_the_formula_with_the_limit_and_by_how_much(mill: Mill) -> None:
    edits.set_value(mill, MEAL, PROTEIN, 44.0, source="lab 9")
    mash, lamb = outside(mill)
    assert (mash.formula, mash.version, lamb.formula) == ("Mash", 1, "Lamb")
    (left,) = mash.limits
    assert (left.limit.name, left.was, left.limit.unit) == ("Crude protein", 18.0, "%")
    assert left.by == pytest.approx(-2.0 * amount(mill, MASH, MEAL), rel=1e-9)
    assert left.limit.value == pytest.approx(18.0 + left.by, rel=1e-12)
    assert mash.reasons == ()


def test_a_limit_that_is_still_kept_and_what_the_draft_asks_are_not_listed(mill: Mill) -> None:
    edits.set_value(mill, MEAL, PROTEIN, 47.0)
    edits.set_bound(mill, 1, "minimum", 25.0)  # of the draft of Mash
    edits.set_price(mill, MAIZE, 900.0, TODAY)
    edits.set_price(mill, MEAL, None, TODAY)
    assert outside(mill) == []


def test_a_value_that_is_withdrawn_counts_as_nothing_and_is_said(mill: Mill) -> None:
    edits.set_value(mill, BARLEY, ASH, None)
    (lamb,) = outside(mill)
    assert lamb.limits == ()
    assert lamb.reasons == ("Ash of Barley is unknown now and counts as 0.",)


def test_a_new_tag_that_forbids_is_a_reason(mill: Mill) -> None:
    edits.change(mill, mill.library.ingredient(BARLEY), tags=(Tag.RUMINANT_PROTEIN,))
    found = {one.formula: one for one in outside(mill)}
    assert "prohibited in feed for sheep" in found["Lamb"].reasons[0]
    assert amount(mill, LAMB, BARLEY) > 0
    assert all(not one.limits for one in found.values())


def test_an_ingredient_that_may_no_longer_be_used_unlisted_is_a_reason_and_still_counts(mill: Mill) -> None:
    edits.change(mill, mill.library.ingredient(MEAL), tags=(Tag.ONLY_WHEN_LISTED,))
    mash = outside(mill)[0]
    assert mash.limits == ()
    assert mash.reasons == ("Soybean meal is no longer used unless a formula lists it.",)


def test_a_nutrient_kept_in_another_unit_leaves_the_approved_limits_as_they_were(mill: Mill) -> None:
    edits.change(mill, mill.library.nutrient(PROTEIN), unit="g/kg")
    assert outside(mill) == []


def test_an_ingredient_that_is_gone_counts_as_it_was(mill: Mill) -> None:
    for limit in [x for x in mill.library.all("limit") if x.subject.ids == (BARLEY,) and not x.subject.is_nutrient]:
        edits.remove_limit(mill, limit.id)
    edits.remove_ingredient(mill, BARLEY)
    assert outside(mill) == []


def test_sentences_name_value_distance_and_bound_in_the_notation_in_use(mill: Mill) -> None:
    edits.set_value(mill, MEAL, ASH, 60.0)
    (lamb,) = outside(mill)
    value, by = lamb.limits[0].limit.value, lamb.limits[0].by
    assert by == pytest.approx((value or 0) - 5.0)
    assert lamb.sentences == [f"Ash comes to {value:.3f} %, {by:.3f} above its maximum of 5.000."]
    use_notation(COMMA)
    try:
        assert "5,000" in lamb.sentences[0]
    finally:
        use_notation(PLAIN)


def test_a_trace_under_a_strong_premix_is_not_listed_for_the_dust_of_solving(
    opened: Opened, monkeypatch: pytest.MonkeyPatch
) -> None:
    make = Maker()
    make.nutrient("Selenium", "mg/kg")
    make.nutrient("Lysine")
    make.ingredient("Maize", 200.0, {"Selenium": 0.03, "Lysine": 0.26})
    make.ingredient("Meal", 400.0, {"Selenium": 0.1, "Lysine": 2.9})
    make.ingredient("Selenite", 20000.0, {"Selenium": 450000.0, "Lysine": 0.0})
    feed = make.formula("Feed")
    make.limit(feed, "nutrient", "Selenium", 0.2, 0.2)
    make.limit(feed, "nutrient", "Lysine", 0.9, 0.9)
    mill = opened(make.library)
    staffed(mill)

    def within_tolerance(*given: Any, **named: Any) -> Result:
        """An answer that a check of 1e-9 of the largest coefficient lets through: 0.2 mg/kg missed by a thousandth."""
        exact = formulate(*given, **named)
        return replace(exact, ingredients=tuple(
            replace(i, amount=(i.amount or 0.0) - 4e-10) if i.name == "Selenite" else i for i in exact.ingredients
        ))

    with monkeypatch.context() as patch:
        patch.setattr(formulating, "formulate", within_tolerance)
        approve(mill, feed.id)
    assert outside(mill) == []
    edits.set_value(mill, 3, 1, 449900.0)
    assert [left.limit.name for left in outside(mill)[0].limits] == ["Selenium"]


def test_a_ration_is_held_by_the_day(opened: Opened) -> None:
    make = Maker()
    make.nutrient("Energy", "MJ/kg", never_negative=True)
    make.ingredient("Hay", 100.0, {"Energy": 8.0})
    make.ingredient("Barley", 220.0, {"Energy": 13.0})
    ration = make.formula("Cow", amounts=Amounts.RATION)
    make.limit(ration, "nutrient", "Energy", 100.0, basis="per day", unit="MJ/day")
    make.limit(ration, "ingredient", "Hay", None, 5.0)
    mill = opened(make.library)
    staffed(mill)
    approve(mill, ration.id)
    assert outside(mill) == []
    edits.set_value(mill, 1, 1, 7.5)
    (left,) = outside(mill)[0].limits
    assert (left.limit.unit, left.by, left.was) == ("MJ/day", pytest.approx(-2.5), pytest.approx(100.0))


# -- batches


def values(batch: Batch) -> list[float | None]:
    return [limit.value for limit in batch.limits]


def test_the_batch_of_an_approved_version_is_that_of_the_formula_as_it_was(mill: Mill) -> None:
    before = make_batch(mill.library, MASH, 1000.0, TODAY)
    same = approved_batch(mill.library, MASH, 1000.0, TODAY)
    assert replace(same, limits=before.limits) == before
    assert values(same) == pytest.approx(values(before), rel=1e-14)  # added up in another order
    edits.set_price(mill, MAIZE, 900.0, TODAY)
    edits.set_bound(mill, 1, "minimum", 25.0)
    now = approved_batch(mill.library, MASH, 1000.0, TODAY)
    assert (now.lines, now.limits, now.version, now.draft, now.approved_by) == (
        before.lines, same.limits, "version 1", False, before.approved_by)
    assert make_batch(mill.library, MASH, 1000.0, TODAY).draft


def test_a_new_analysis_breaks_the_limits_of_an_approved_batch_by_name(mill: Mill) -> None:
    edits.set_value(mill, MEAL, PROTEIN, 44.0)
    batch = approved_batch(mill.library, MASH, 1000.0, TODAY)
    assert [batch.limits[index].name for index in batch.broken] == ["Crude protein"]
    assert not batch.fit_to_mix


def test_what_is_forbidden_today_is_not_weighed_though_it_was_approved(mill: Mill) -> None:
    edits.change(mill, mill.library.ingredient(BARLEY), tags=(Tag.RUMINANT_PROTEIN,))
    batch = approved_batch(mill.library, LAMB, 1000.0, TODAY)
    assert batch.lines == ()
    assert "prohibited in feed for sheep" in (batch.cause or "")


UNUSUAL: list[Callable[[Mill], Any]] = [
    lambda m: edits.change(m, m.library.ingredient(MEAL), tags=(Tag.ONLY_WHEN_LISTED,)),
    lambda m: edits.set_price(m, MEAL, None, TODAY),
]


@pytest.mark.parametrize("edit", UNUSUAL)
def test_an_ingredient_that_lost_its_price_or_admission_is_weighed_and_counted(
    mill: Mill, edit: Callable[[Mill], Any]
) -> None:
    before = approved_batch(mill.library, MASH, 1000.0, TODAY)
    edit(mill)
    batch = approved_batch(mill.library, MASH, 1000.0, TODAY)
    assert (batch.lines, batch.limits, batch.nutrients) == (before.lines, before.limits, before.nutrients)


def test_a_formula_without_an_approved_version_has_no_approved_batch(opened: Opened) -> None:
    mill = opened(feed_library())
    with pytest.raises(Refused, match="Mash has no approved version"):
        approved_batch(mill.library, MASH, 1000.0, TODAY)


@pytest.mark.parametrize(("statement", "words"), [
    ("UPDATE version SET note = 'x' WHERE formula_id = 1", "altered outside this program: its seal does not fit"),
    ("UPDATE version SET snapshot = '{}' WHERE formula_id = 1", "altered outside this program: its seal does not fit"),
    ("UPDATE version SET state = 'superseded' WHERE formula_id = 1", "altered outside this program"),
])
def test_a_version_altered_from_outside_is_not_said_to_be_missing(
    mill: Mill, statement: str, words: str
) -> None:
    mill.close()
    raw = sqlite3.connect(mill.path)
    assert raw.execute(statement).rowcount == 1
    raw.commit()
    raw.close()
    again = open_mill(mill.path)
    try:
        with pytest.raises(Refused) as refused:
            approved_batch(again.library, MASH, 1000.0, TODAY)
        (problem,) = refused.value.problems
        assert f"Version 1 of Mash was {words}" in problem.text
        assert "prepare and approve it anew" in problem.text
        assert approved_batch(again.library, LAMB, 1000.0, TODAY).version == "version 1"
    finally:
        again.close()
