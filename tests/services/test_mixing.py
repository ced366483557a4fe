"""The steps of making a feed stay numbered from 1, whatever is added, moved or removed."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.services import edits, mixing
from blendapp.services.mill import Mill
from tests.mills import three_ingredients

Opened = Callable[[Library], Mill]


@pytest.fixture
def mill(opened: Opened) -> Mill:
    return opened(three_ingredients()[0])


def order(mill: Mill, formula_id: int | None = None) -> list[tuple[int, str]]:
    return [(step.position, step.text) for step in mixing.own_steps(mill.library, formula_id)]


def add(mill: Mill, *texts: str, formula_id: int | None = None) -> None:
    for text in texts:
        mixing.add_step(mill, formula_id, text)


def key(mill: Mill, text: str) -> int:
    return int(next(step.id for step in mill.library.all("mixing_step") if step.text == text))


def test_a_step_goes_to_the_end_or_between_and_undo_takes_it_out_whole(mill: Mill) -> None:
    add(mill, "Grain", "Fat")
    mixing.add_step(mill, None, " Mix dry ", minutes=3, setting="40 rpm", at=2)
    assert order(mill) == [(1, "Grain"), (2, "Mix dry"), (3, "Fat")]
    step = mixing.own_steps(mill.library, None)[1]
    assert (step.minutes, step.setting) == (3, "40 rpm")
    mill.undo()
    assert order(mill) == [(1, "Grain"), (2, "Fat")]


def test_a_place_beyond_the_end_is_the_end_and_one_before_the_first_the_first(mill: Mill) -> None:
    add(mill, "a")
    mixing.add_step(mill, None, "z", at=99)
    mixing.add_step(mill, None, "first", at=-4)
    assert order(mill) == [(1, "first"), (2, "a"), (3, "z")]


def test_a_step_moves_past_its_neighbours_and_stops_at_the_ends(mill: Mill) -> None:
    add(mill, "a", "b", "c")
    mixing.move_step(mill, key(mill, "c"), -1)
    assert order(mill) == [(1, "a"), (2, "c"), (3, "b")]
    mixing.move_step(mill, key(mill, "a"), 7)
    assert order(mill) == [(1, "c"), (2, "b"), (3, "a")]
    assert not mixing.move_step(mill, key(mill, "a"), 1).changes
    mill.undo()
    assert order(mill) == [(1, "a"), (2, "c"), (3, "b")]


def test_those_below_a_removed_step_move_up(mill: Mill) -> None:
    add(mill, "a", "b", "c")
    mixing.remove_step(mill, key(mill, "a"))
    assert order(mill) == [(1, "b"), (2, "c")]
    mill.undo()
    assert order(mill) == [(1, "a"), (2, "b"), (3, "c")]


def test_the_steps_of_one_formula_leave_those_of_every_formula_alone(mill: Mill) -> None:
    add(mill, "a", "b")
    add(mill, "own", formula_id=1)
    assert order(mill) == [(1, "a"), (2, "b")]
    assert [step.text for step in mill.library.steps_of(1)] == ["own"]
    mixing.remove_step(mill, key(mill, "own"))
    assert [step.text for step in mill.library.steps_of(1)] == ["a", "b"]


def test_a_formula_takes_the_common_steps_as_its_own_to_change_them(mill: Mill) -> None:
    add(mill, "a", "b")
    mixing.own_copy(mill, 1)
    mixing.remove_step(mill, mixing.own_steps(mill.library, 1)[0].id)
    assert order(mill, 1) == [(1, "b")]
    assert order(mill) == [(1, "a"), (2, "b")]
    with pytest.raises(Refused, match="steps of its own already"):
        mixing.own_copy(mill, 1)


def test_a_step_that_says_nothing_is_refused_with_its_place(mill: Mill) -> None:
    with pytest.raises(Refused, match="every formula, step 1: A step says what to do"):
        mixing.add_step(mill, None, "  ")
    with pytest.raises(Refused, match="Minutes must be above 0 min"):
        mixing.add_step(mill, 1, "Mix", minutes=0)


def test_the_own_steps_of_a_formula_are_copied_and_removed_with_it(mill: Mill) -> None:
    add(mill, "own", formula_id=1)
    edits.duplicate_formula(mill, 1, "Twin")
    twin = mill.library.named("formula", "Twin").id
    assert order(mill, twin) == [(1, "own")]
    edits.remove_formula(mill, twin)
    assert [step.formula_id for step in mill.library.all("mixing_step")] == [1]
    mill.undo()
    assert order(mill, twin) == [(1, "own")]
