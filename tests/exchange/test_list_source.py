"""Whom a list is from: two brokers' files of one name do not share their answers."""

from __future__ import annotations

from pathlib import Path

import pytest

from blendapp.domain.library import Library
from blendapp.domain.mills import Synonym
from blendapp.domain.records import added
from blendapp.exchange import read_price_list
from tests.exchange.made_lists import Rows, write_text, write_xlsx
from tests.mills import TODAY

HEAD = ["Ingredient", "Price", "Unit"]


def made(tmp_path: Path, place: str, *titles: str) -> Path:
    path = tmp_path / place
    path.parent.mkdir(parents=True, exist_ok=True)
    rows: Rows = [*([title] for title in titles), HEAD, ["Maize", 205, "t"]]
    return (write_xlsx if path.suffix == ".xlsx" else write_text)(path, rows)


@pytest.mark.parametrize(
    ("place", "titles", "source", "noted"),
    [
        ("Bay Grain 2026-03-02.xlsx", ["Seaboard Traders Ltd"], "bay grain", ""),
        ("any/prices.xlsx", ["Price list week 10", "Seaboard Traders Ltd - offers March 2026"], "seaboard traders ltd",
         "after its title"),
        ("Bay Grain/prices.xlsx", ["Seaboard Traders Ltd"], "seaboard traders ltd", "after its title"),
        ("any/Price list (3).csv", ["Larkwater Grain"], "larkwater grain", "after its title"),
        ("Larkwater/prices 9 March 2026.xlsx", ["Grain prices", "All prices per t"], "larkwater", "after its folder"),
        ("Larkwater/Book1.xlsx", [], "larkwater", "after its folder"),
        ("Downloads/prices.xlsx", [], "prices", "Nothing says"),
        ("2026/list week 3.csv", ["Feed grain prices"], "list", "Nothing says"),
    ],
)
def test_the_source_is_what_says_something(
    tmp_path: Path, library: Library, place: str, titles: list[str], source: str, noted: str
) -> None:
    reading = read_price_list(made(tmp_path, place, *titles), library, TODAY)
    assert reading.source == source
    assert [noted in note and f"“{source}”" in note for note in reading.notes] == [True] * bool(noted)


def test_what_a_person_says_comes_first(tmp_path: Path, library: Library) -> None:
    path = made(tmp_path, "any/prices.xlsx", "Seaboard Traders Ltd")
    reading = read_price_list(path, library, TODAY, source="Bay Grain")
    assert (reading.source, reading.notes) == ("bay grain", ())


def test_two_brokers_of_one_file_name_keep_their_answers_apart(tmp_path: Path, library: Library) -> None:
    library.apply([added(Synonym(1, "seaboard traders ltd", "Maize", 2))])
    first = read_price_list(made(tmp_path, "one/prices.xlsx", "Seaboard Traders Ltd"), library, TODAY)
    second = read_price_list(made(tmp_path, "two/prices.xlsx", "Larkwater Mills"), library, TODAY)
    assert [row.ingredient for row in (*first.accepted, *second.accepted)] == ["Wheat", "Maize"]
