from __future__ import annotations

import datetime
from dataclasses import replace
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from blendapp.domain.formulas import Admits, Formula, Limit, LimitKind, Subject, SubjectKind
from blendapp.domain.ingredients import Ingredient, Tag, Value
from blendapp.domain.library import NAMED_KINDS, Library
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.quotes import Quote
from blendapp.domain.records import KINDS, Change
from tests.domain.made_records import records
from tests.mills import TODAY, Maker

# Few identifiers and names, so that edits of one record, of one cell and of one name come up again and again.
FEW = st.integers(1, 3)
NAME = st.sampled_from(["Wheat", "wheat ", "Maize"])
SMALL = {
    "nutrient": st.builds(Nutrient, FEW, NAME),
    "ingredient": st.builds(Ingredient, FEW, NAME, st.sampled_from(["", "Cereals"])),
    "formula": st.builds(Formula, FEW, NAME),
    "quote": st.builds(Quote, FEW, FEW, st.floats(0, 9), valid_from=st.sampled_from([None, TODAY])),
    "limit": st.builds(Limit, FEW, FEW, st.just(LimitKind.INGREDIENT), FEW.map(lambda n: Subject.ingredients(n))),
}


@st.composite
def histories(draw: st.DrawFn) -> list[Change]:
    """Changes that follow each other: each finds what the one before left."""
    standing: dict[tuple[str, int], Any] = {}
    made = []
    for kind in draw(st.lists(st.sampled_from(list(SMALL)), max_size=25)):
        wanted = draw(SMALL[kind])
        before = standing.get((kind, wanted.id))
        after = None if before is not None and draw(st.booleans()) else wanted
        made.append(Change(before, after))
        standing[kind, wanted.id] = after
    return made


def seen(library: Library) -> dict[str, Any]:
    """Everything that a library can be asked."""
    return {
        "all": {kind: library.all(kind) for kind in KINDS},
        "names": {
            kind: {name: sorted(r.id for r in library.all_named(kind, name)) for name in ("Wheat", "Maize")}
            for kind in NAMED_KINDS
        },
        "quotes": [library.quotes_of(n) for n in range(4)],
        "prices": [library.price_per_t(n, TODAY) for n in range(4)],
        "limits": [library.limits(n) for n in range(4)],
        "listed": [library.listed_ids(n) for n in range(4)],
        "values": [dict(library.values_of(n)) for n in range(4)],
    }


@settings(max_examples=200)
@given(histories(), histories())
def test_changes_taken_and_reversed_leave_what_was(first: list[Change], second: list[Change]) -> None:
    library = Library()
    library.apply(first)
    before = seen(library)
    # a second history on the same identifiers continues from what stands now
    following = []
    for change in second:
        record = change.after or change.before
        following.append(Change(library.records[change.kind].get(record.id), change.after))
        library.apply(following[-1:])
    library.apply(change.reversed for change in reversed(following))
    assert seen(library) == before


@given(histories())
def test_a_library_knows_the_same_by_whatever_road_it_came_to_hold_it(history: list[Change]) -> None:
    library = Library()
    library.apply(history)
    afresh = Library.of({kind: library.all(kind) for kind in KINDS})
    assert seen(library) == seen(afresh)


@given(histories(), histories())
def test_a_copy_does_not_follow_later_changes(first: list[Change], second: list[Change]) -> None:
    library = Library()
    library.apply(first)
    copy, before = library.copy(), seen(library)
    for change in second:
        record = change.after or change.before
        library.apply([Change(library.records[change.kind].get(record.id), change.after)])
    assert seen(copy) == before


@pytest.mark.parametrize("kind", KINDS)
@given(data=st.data())
def test_any_record_can_come_and_go(kind: str, data: st.DataObject) -> None:
    record = data.draw(records(kind))
    library = Library()
    library.apply([Change(None, record)])
    assert library.all(kind) == [record]
    library.apply([Change(record, None)])
    assert library.all(kind) == []


def test_the_composition_of_an_ingredient_follows_its_values() -> None:
    make = Maker()
    make.nutrient("Protein")
    make.ingredient("Wheat", 200, {"Protein": 12})
    library = make.library
    value = library.value(1, 1)
    assert isinstance(value, Value)
    library.apply([Change(value, replace(value, amount=13.0))])
    assert library.values_of(1)[1].amount == 13.0
    library.apply([Change(library.value(1, 1), None)])
    assert library.value(1, 1) is None


ADMISSION_TAGS = [tag for tag in Tag if tag not in (Tag.ADDED_COPPER, Tag.ADDED_SELENIUM)]


@pytest.mark.parametrize("tag", Tag)
def test_a_formula_that_admits_all_takes_a_tagged_ingredient_unlisted_only_where_that_is_harmless(tag: Tag) -> None:
    make = Maker()
    make.ingredient("Wheat", 200)
    make.ingredient("Tagged", 300, tags=(tag,))
    feed = make.formula(admits=Admits.ALL)
    names = [i.name for i in make.library.admitted(feed)]
    assert names == (["Wheat"] if tag in ADMISSION_TAGS else ["Wheat", "Tagged"])
    make.limit(feed, "ingredient", "Tagged")
    assert [i.name for i in make.library.admitted(feed)] == ["Wheat", "Tagged"]


def test_a_formula_that_admits_what_is_listed_takes_only_ingredients_with_a_row_of_their_own() -> None:
    make = Maker()
    for name in ("Wheat", "Maize", "Barley", "Oats"):
        make.ingredient(name, 200)
    feed = make.formula(admits=Admits.LISTED)
    make.limit(feed, "ingredient", "Oats")
    make.limit(feed, "ingredient", "Maize", maximum=20)
    make.limit(feed, "group", ["Wheat", "Oats"], maximum=50)
    make.limit(feed, "practical", "Barley", 1)
    assert [i.name for i in make.library.admitted(feed)] == ["Maize", "Oats"]


def test_an_unpriced_ingredient_is_admitted_all_the_same() -> None:
    make = Maker()
    make.ingredient("Wheat")
    feed = make.formula(admits=Admits.ALL)
    assert [i.name for i in make.library.admitted(feed)] == ["Wheat"]
    assert make.library.price_per_t(1, TODAY) is None


def test_a_class_counts_whoever_has_it_now_whatever_the_case() -> None:
    make = Maker()
    make.ingredient("Wheat", class_name="Cereals")
    make.ingredient("Maize", class_name="CEREALS ")
    make.ingredient("Soya", class_name="Meals")
    library, subject = make.library, Subject.of_class("cereals")
    assert [i.name for i in library.members(subject)] == ["Wheat", "Maize"]
    soya = library.ingredient(3)
    library.apply([Change(soya, replace(soya, class_name="Cereals"))])
    assert [i.name for i in library.members(subject)] == ["Wheat", "Maize", "Soya"]


def test_a_subject_is_called_as_the_workbook_writes_it() -> None:
    make = Maker()
    make.nutrient("Protein")
    make.ingredient("Wheat")
    make.ingredient("Salt + iodine")
    library = make.library
    named = library.subject_name
    assert named(Subject.nutrient(1)) == "Protein"
    assert named(Subject(SubjectKind.DRY_MATTER)) == "Dry matter"
    assert named(Subject(SubjectKind.MOISTURE)) == "Moisture"
    assert named(Subject.of_class("Cereals")) == "Cereals"
    assert named(Subject.ingredients(2)) == "Salt + iodine"
    assert named(Subject.ingredients(2, 1)) == '"Salt + iodine" + Wheat'


def test_a_name_is_found_whatever_its_case_and_spacing() -> None:
    make = Maker()
    wheat = make.ingredient("Soft  wheat")
    assert make.library.named("ingredient", " soft WHEAT") == wheat
    assert make.library.named("ingredient", "softwheat") is None


def test_a_library_without_a_mill_record_has_the_standard_one() -> None:
    assert Library().mill.currency == "USD"


def test_the_price_of_a_day_is_that_of_the_quote_in_force() -> None:
    make = Maker()
    make.ingredient("Wheat", 200)
    later = TODAY + datetime.timedelta(days=3)
    make.put(Quote(99, 1, 30.0, "cwt", valid_from=later))
    assert make.library.price_per_t(1, TODAY) == 200
    assert make.library.price_per_t(1, later) == pytest.approx(30 * 22.0462262)
