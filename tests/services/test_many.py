"""A block of edits: what can be taken is taken as one undo, what cannot is listed."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from blendapp.domain.library import Library
from blendapp.domain.records import removed
from blendapp.services import edits
from blendapp.services.mill import Mill
from tests.mills import TODAY, Maker

Opened = Callable[[Library], Mill]


def library() -> Library:
    make = Maker()
    make.nutrient("Protein")
    for name in ("Maize", "Oats", "Wheat"):
        make.ingredient(name, 200.0, {"Protein": 10.0})
    return make.library


def test_good_edits_are_kept_and_bad_ones_listed_by_their_place_in_the_block(opened: Opened) -> None:
    mill = opened(library())

    def unreadable() -> list[object]:
        raise ValueError("“abc” is not a number here.")

    found = edits.many(mill, "Paste", [
        lambda: edits.value_changes(mill, 1, 1, 11.0),
        lambda: edits.value_changes(mill, 2, 1, -1.0),
        lambda: edits.price_changes(mill, 3, 150.0, TODAY),
        unreadable,
        lambda: edits.field_changes(mill, mill.library.ingredient(3), name="Oats"),
    ])
    assert set(found.refused) == {1, 3, 4}
    assert "never be negative" in found.refused[1][0].text
    assert found.refused[1][0].place.record == "Oats, Protein"
    assert found.refused[3][0].text == "“abc” is not a number here."
    assert "is taken" in found.refused[4][0].text
    value = mill.library.value(1, 1)
    assert value is not None
    assert value.amount == 11.0
    assert mill.library.price_per_t(3, TODAY) == 150.0
    assert mill.library.value(2, 1).amount == 10.0  # type: ignore[union-attr]


def test_a_block_is_one_undo(opened: Opened) -> None:
    mill = opened(library())
    before = mill.store.dump()
    edits.many(mill, "Paste", [lambda i=i: edits.value_changes(mill, i, 1, 20.0 + i) for i in (1, 2, 3)])
    assert mill.undo_text == "Paste"
    mill.undo()
    assert mill.store.dump() == before
    assert mill.undo_text is None


def test_a_later_edit_of_a_block_sees_the_earlier_ones(opened: Opened) -> None:
    mill = opened(library())
    found = edits.many(mill, "Paste", [
        lambda: edits.field_changes(mill, mill.library.ingredient(1), name="Corn"),
        lambda: edits.field_changes(mill, mill.library.ingredient(2), name="Maize"),
        lambda: edits.field_changes(mill, mill.library.ingredient(3), name="corn"),
        lambda: edits.field_changes(mill, mill.library.ingredient(1), name="Yellow corn"),
    ])
    assert list(found.refused) == [2]
    assert [i.name for i in mill.library.ingredients] == ["Yellow corn", "Maize", "Wheat"]
    assert len(found.edit.changes) == 2
    assert mill.library.ingredients == mill.store.read_all()["ingredient"]


def test_names_that_change_places_in_one_block_reach_the_file(opened: Opened) -> None:
    mill = opened(library())
    found = edits.many(mill, "Paste", [
        lambda: edits.field_changes(mill, mill.library.ingredient(1), name="Spare"),
        lambda: edits.field_changes(mill, mill.library.ingredient(2), name="Maize"),
        lambda: edits.field_changes(mill, mill.library.ingredient(1), name="Oats"),
    ])
    assert found.refused == {}
    assert [i.name for i in mill.store.read_all()["ingredient"]] == ["Oats", "Maize", "Wheat"]
    mill.undo()
    assert [i.name for i in mill.store.read_all()["ingredient"]] == ["Maize", "Oats", "Wheat"]


def test_two_prices_for_one_ingredient_in_a_block_end_with_the_last(opened: Opened) -> None:
    mill = opened(library())
    edits.many(mill, "Paste", [
        lambda: edits.price_changes(mill, 1, 150.0, TODAY), lambda: edits.price_changes(mill, 1, 160.0, TODAY),
    ])
    assert mill.library.price_per_t(1, TODAY) == 160.0


def test_a_block_of_nothing_but_faults_changes_nothing(opened: Opened) -> None:
    mill = opened(library())
    before = mill.store.dump()
    found = edits.many(mill, "Paste", [lambda i=i: edits.value_changes(mill, i, 1, -1.0) for i in (1, 2)])
    assert set(found.refused) == {0, 1}
    assert found.edit.changes == ()
    assert mill.store.dump() == before
    assert mill.undo_text is None


def test_an_edit_that_breaks_off_leaves_the_library_as_it_was(opened: Opened) -> None:
    mill = opened(library())
    with pytest.raises(KeyError):
        edits.many(mill, "Paste", [
            lambda: edits.value_changes(mill, 1, 1, 11.0),
            lambda: edits.value_changes(mill, 1, 99, 11.0),
        ])
    assert mill.library.value(1, 1).amount == 10.0  # type: ignore[union-attr]
    assert mill.store.read_all()["value"] == mill.library.all("value")


def test_what_is_added_and_removed_in_one_block_leaves_no_trace(opened: Opened) -> None:
    mill = opened(library())
    before = mill.store.dump()
    edits.many(mill, "Paste", [
        lambda: edits.value_changes(mill, 1, 1, None),
        lambda: edits.value_changes(mill, 1, 1, 10.0, unit="%"),
        lambda: [removed(mill.library.value(1, 1))],
    ])
    assert mill.library.value(1, 1) is None
    mill.undo()
    assert mill.store.dump() == before


def test_an_odd_value_in_a_block_is_taken_and_said(opened: Opened) -> None:
    mill = opened(library())
    found = edits.many(mill, "Paste", [lambda: edits.value_changes(mill, 1, 1, 110.0)])
    assert found.refused == {}
    assert "more than the whole" in found.edit.oddities[0].text
