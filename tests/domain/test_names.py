from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from blendapp.domain.library import join_names, split_names
from blendapp.domain.names import fold

NAMES = st.text(min_size=1, max_size=12).map(lambda text: text.strip()).filter(bool)
HARD = st.lists(st.sampled_from(["Wheat", " + ", "+", '"', '""', " ", "a"]), min_size=1).map(
    lambda parts: "".join(parts).strip()).filter(bool)


@pytest.mark.parametrize(
    ("one", "other"), [("Wheat", " wheat "), ("Soybean  meal", "soybean meal"), ("STRASSE", "straße"),
                       ("Ｗｈｅａｔ", "wheat"), ("Mais\u00a0gelb", "mais gelb"), ("Café", "Cafe\u0301")]
)
def test_case_spacing_and_form_of_letters_do_not_make_another_name(one: str, other: str) -> None:
    assert fold(one) == fold(other)


@pytest.mark.parametrize(("one", "other"), [("Wheat 1", "Wheat 11"), ("Maïs", "Mais"), ("Soy bean", "Soybean")])
def test_other_letters_make_another_name(one: str, other: str) -> None:
    assert fold(one) != fold(other)


@given(NAMES)
def test_a_name_folded_twice_is_as_folded_once(name: str) -> None:
    assert fold(fold(name)) == fold(name)


@given(st.lists(st.one_of(NAMES, HARD), min_size=1, max_size=5))
def test_names_joined_to_a_group_split_into_the_same_names(names: list[str]) -> None:
    assert split_names(join_names(names)) == names


@pytest.mark.parametrize(
    ("text", "names"),
    [("Wheat + Maize", ["Wheat", "Maize"]), ('"Salt + iodine" + Wheat', ["Salt + iodine", "Wheat"]),
     ('"A ""fine"" one"', ['A "fine" one']), ("C+ grade", ["C+ grade"]), ("  Wheat  +  Maize ", ["Wheat", "Maize"])],
)
def test_a_group_is_read_as_people_write_it(text: str, names: list[str]) -> None:
    assert split_names(text) == names


@pytest.mark.parametrize("text", ['"Wheat', '"Wheat" Maize', '"Wheat" + "Maize'])
def test_a_quote_left_open_or_followed_by_a_word_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match=r"Wheat|Maize"):
        split_names(text)
