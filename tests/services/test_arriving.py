"""A list that arrives: read from a copy of the library, taken as what it is, and known again."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer, Fate
from blendapp.domain.mills import Asked, ListAbout, PriceList
from blendapp.domain.records import Change, added
from blendapp.services.arriving import apply_list, likely_about, read_list, taken_before
from blendapp.services.lists import roll_back
from blendapp.services.mill import Mill
from tests.mills import TODAY, Maker


@pytest.fixture
def mill(opened: Callable[[Library], Mill]) -> Mill:
    make = Maker()
    make.ingredient("Maize", 205.0)
    return opened(make.library)


DAY = datetime.datetime(2026, 3, 2, tzinfo=datetime.UTC)


def test_a_list_is_read_without_the_mill_and_taken_into_it(mill: Mill, tmp_path: Path) -> None:
    path = tmp_path / "Bay Grain 10.csv"
    path.write_text("Ingredient,USD/t\nMaize,212\nCorn,213\n")
    library = mill.library.copy()
    reading = read_list(library, path, TODAY)
    assert [row.fate for row in reading.rows] == [Fate.IGNORED, Fate.ACCEPTED, Fate.QUESTION]
    reading = read_list(library, path, TODAY, answers=[Answer(Asked.INGREDIENT, "Corn", "leave out")])
    assert reading.count(Fate.QUESTION) == 0
    assert taken_before(mill.library, reading.digest) is None
    apply_list(mill, reading, TODAY)
    assert mill.library.price_per_t(1, TODAY) == 212
    assert library.price_per_t(1, TODAY) != 212
    kept = taken_before(mill.library, reading.digest)
    assert kept is not None
    roll_back(mill, kept.id)
    assert taken_before(mill.library, reading.digest) is None


def test_a_list_is_likely_about_what_the_last_one_of_its_source_was(mill: Mill) -> None:
    library = mill.library.copy()
    assert likely_about(library, "Tidewater 11.csv") is ListAbout.PRICES
    analyses = PriceList(1, "Tidewater 10.csv", "", DAY, 1, 1, source="tidewater", about=ListAbout.COMPOSITION)
    library.apply([added(analyses)])
    assert likely_about(library, "tidewater_12.xlsx") is ListAbout.COMPOSITION
    assert likely_about(library, "Bay Grain 11.csv") is ListAbout.PRICES
    library.apply([Change(analyses, replace(analyses, source="bay grain"))])
    assert likely_about(library, "Bay Grain 11.csv") is ListAbout.COMPOSITION


def test_only_what_is_not_on_record_from_the_very_file_is_left_to_take(mill: Mill, tmp_path: Path) -> None:
    path = tmp_path / "Bay Grain 10.csv"
    path.write_text("Ingredient,USD/t\nMaize,212\nCorn,213\n")
    apply_list(mill, read_list(mill.library, path, TODAY), TODAY)
    day = TODAY + datetime.timedelta(days=1)
    again = read_list(mill.library, path, day)
    assert [row.fate for row in again.rows] == [Fate.IGNORED, Fate.IGNORED, Fate.QUESTION]
    assert again.rows[1].reason.startswith("Taken on ")
    settled = read_list(mill.library, path, day, answers=[Answer(Asked.INGREDIENT, "Corn", ingredient_id=1)])
    # Of two prices of one ingredient it is still asked which holds, the one on record or the other.
    assert [row.fate for row in settled.rows] == [Fate.IGNORED, Fate.IGNORED, Fate.QUESTION]
    # The same prices in another file are another list.
    other = tmp_path / "Bay Grain 11.csv"
    other.write_text(path.read_text() + "\n")
    assert read_list(mill.library, other, day).rows[1].fate is Fate.ACCEPTED
    roll_back(mill, max(mill.library.records["price_list"]))
    assert read_list(mill.library, path, day).rows[1].fate is Fate.ACCEPTED
