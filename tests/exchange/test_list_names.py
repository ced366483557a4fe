"""Names whose words a comma turns round."""

from __future__ import annotations

import pytest

from blendapp.domain.list_rows import Answer
from blendapp.domain.mills import Asked
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_names import NameFinder
from tests.mills import TODAY, Maker

MILL = ("Feed wheat", "Wheat feed", "Maize flaked", "Soybean meal 44 %", "Soybean meal 48 %", "Premix 1,5", "Oats")


def _finder(*answers: Answer, names: tuple[str, ...] = MILL) -> NameFinder:
    maker = Maker()
    for name in names:
        maker.ingredient(name)
    return NameFinder(maker.library, Answers(maker.library, "larkwater", answers, TODAY))


@pytest.mark.parametrize("name", ["Wheat, feed", "Feed, wheat", "WHEAT , FEED", "Wheat (feed)", "Wheat - feed"])
def test_a_comma_that_may_turn_two_goods_round_is_a_question_with_both(name: str) -> None:
    match = _finder().find(name)
    assert match.ingredient is None
    assert set(match.candidates) == {"Feed wheat", "Wheat feed"}


@pytest.mark.parametrize(
    ("name", "meant"),
    [
        ("Maize, flaked", "Maize flaked"), ("Soybean meal, 44 %", "Soybean meal 44 %"),
        ("Soybean meal (48 %)", "Soybean meal 48 %"), ("Premix 1,5", "Premix 1,5"), ("Wheat feed", "Wheat feed"),
        ("wheat-feed", "Wheat feed"), ("Feed  Wheat", "Feed wheat"), ("Oats,", "Oats"),
    ],
)
def test_a_comma_that_turns_nothing_round_is_read_over(name: str, meant: str) -> None:
    match = _finder().find(name)
    assert match.ingredient is not None
    assert match.ingredient.name == meant


@pytest.mark.parametrize("name", ["Flaked, maize", "Meal, soybean", "44 %, soybean meal"])
def test_words_turned_round_alone_are_never_taken(name: str) -> None:
    assert _finder().find(name).ingredient is None


def test_a_name_that_the_mill_itself_writes_with_a_comma_is_that_one() -> None:
    match = _finder(names=("Wheat, feed", "Feed wheat")).find("Wheat, feed")
    assert match.ingredient is not None
    assert match.ingredient.name == "Wheat, feed"


def test_an_answer_settles_which_of_the_two_is_meant() -> None:
    match = _finder(Answer(Asked.INGREDIENT, "Wheat, feed", ingredient_id=1)).find("Wheat, feed")
    assert match.ingredient is not None
    assert match.ingredient.name == "Feed wheat"
