"""What is close is proposed, best first, and never taken by its likeness."""

from __future__ import annotations

import pytest

from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import Asked
from blendapp.exchange import read_price_list
from blendapp.exchange.suggestions import Suggester, did_you_mean
from tests.exchange.made_lists import write_text
from tests.mills import TODAY, Maker

PAIRS = [
    ("Soybean meal 44 %", "Soybean meal 48 %"), ("Feed wheat", "Wheat feed"), ("Limestone", "Lime"),
    ("Dicalcium phosphate", "Monocalcium phosphate"), ("Premix 1.5", "Premix 15"),
    ("Maize gluten feed", "Maize gluten"),
    ("Rapeseed meal", "Rapeseed oil"), ("Sodium bicarbonate", "Sodium carbonate"), ("DL-Methionine", "L-Methionine"),
    ("Copper sulphate", "Cobalt sulphate"), ("Vitamin A 500", "Vitamin A 1000"), ("Fish meal 65", "Fish meal 60"),
]


@pytest.mark.parametrize(("known", "named"), [*PAIRS, *[(b, a) for a, b in PAIRS]])
def test_what_is_alike_is_a_question_with_its_candidate(tmp_path, known: str, named: str) -> None:  # type: ignore[no-untyped-def]
    maker = Maker()
    maker.ingredient(known)
    maker.ingredient("Barley")
    path = write_text(tmp_path / "list.csv", [["Ingredient", "Price", "Unit"], [named, 205, "t"], ["Barley", 1, "t"]])
    row = read_price_list(path, maker.library, TODAY).rows[1]
    assert (row.fate, row.ingredient) == (Fate.QUESTION, None)
    (question,) = row.questions
    assert question.asked is Asked.INGREDIENT
    assert question.choices == (known,)


@pytest.mark.parametrize(("one", "other"), PAIRS)
def test_where_both_are_known_each_is_itself(tmp_path, one: str, other: str) -> None:  # type: ignore[no-untyped-def]
    maker = Maker()
    maker.ingredient(one)
    maker.ingredient(other)
    path = write_text(tmp_path / "list.csv", [
        ["Ingredient", "Price", "Unit"], [other.upper(), 205, "t"], [f" {one.lower()} ", 206, "t"],
    ])
    reading = read_price_list(path, maker.library, TODAY)
    assert [(row.ingredient, row.price_per_t) for row in reading.accepted] == [(other, 205), (one, 206)]


def test_the_same_numbers_come_first_among_names_alike() -> None:
    names = [f"Soybean meal {percent} %" for percent in (42, 44, 46, 48)]
    assert Suggester(names).close_names("Soyabean meal 48%")[0] == "Soybean meal 48 %"


def test_words_in_another_order_are_close() -> None:
    assert Suggester(["Wheat bran", "Rice bran", "Oats"]).close_names("bran, wheat")[0] == "Wheat bran"


def test_a_few_at_most_are_proposed_and_nothing_that_is_not_alike() -> None:
    names = [f"Soybean meal {number}" for number in range(50)]
    assert len(Suggester(names).close_names("Soybean meal")) == 3
    assert did_you_mean("Zebra", names) == ""
    assert did_you_mean("Lmestone", ["Limestone", "Salt"]) == " Did you mean “Limestone”?"
