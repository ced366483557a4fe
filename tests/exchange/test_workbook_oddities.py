"""What an exchange workbook lets in and says: sheets that contradict each other, and limits that are odd together."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import pytest

from tests.exchange.altered_mill import Reader, said


@pytest.fixture
def mill(tmp_path: Path) -> Reader:
    return Reader(tmp_path)


def values_sheet(mill: Reader, *rows: list[Any]) -> None:
    mill.sheets["Values"] = [["Ingredient", "Nutrient", "Value", "Unit", "Basis"], *rows]


def test_a_column_that_says_otherwise_than_values_is_said_once_a_row_with_both_amounts(mill: Reader) -> None:
    values_sheet(mill, ["Maize", "Crude protein", 9, "%", None], ["Maize", "Energy", 3.5, "Mcal/kg", None])
    library = mill.read()
    assert library.value(1, 1).amount == 9
    assert [line for line in mill.warnings if "Values" in line] == [
        "book.xlsx:Ingredients:2:Crude protein (%): The sheet Values says otherwise and was taken: "
        "Crude protein (8.5 here, 9 in Values), Energy (14.2 here, 14.644 in Values); blank one of the two."
    ]


@pytest.mark.parametrize(
    "row",
    [
        ["Maize", "Crude protein", 8.5, "%", "as fed"], ["Maize", "Crude protein", 85, "g/kg", "as fed"],
        ["Maize", "Crude protein", 9.77, "%", "dry matter"], ["Maize", "Crude protein", None, "%", None],
    ],
)
def test_a_column_that_says_the_same_as_values_in_other_words_is_not_said(mill: Reader, row: list[Any]) -> None:
    values_sheet(mill, row)
    mill.read()
    assert not said(mill, "says otherwise")


def test_another_basis_without_dry_matter_cannot_be_compared_and_is_not_said(mill: Reader) -> None:
    mill.column("Ingredients", "Dry matter %", [None])
    values_sheet(mill, ["Maize", "Crude protein", 30, "%", "dry matter"])
    mill.read()
    assert not said(mill, "says otherwise")


def test_a_formula_that_lists_nothing_is_said_when_its_limits_are_known(mill: Reader) -> None:
    mill.sheets["Formulas"].append(["Grower", "blend", "pig", None, None, "listed", None])
    mill.limits(["nutrient", "Energy", None, 12], formula="Grower")
    mill.read()
    assert [line for line in mill.warnings if "lists none" in line] == [
        "book.xlsx:Formulas:3:Admits: “Grower” admits the listed ingredients and lists none; "
        "give it ingredient limits, or let it admit all."
    ]


def test_what_is_odd_between_limits_and_values_is_said_at_its_row(mill: Reader) -> None:
    mill.sheets["Nutrients"].append(["Balance", "mEq/kg", "no", None, None])
    mill.column("Ingredients", "Balance (mEq/kg)", [-60, 40])
    mill.limits(["ratio", "Crude protein", "Balance", 1], ["practical", "Soybean meal", None, 41])
    mill.read()
    assert said(mill, "book.xlsx:Limits:5:Per: Balance of Maize is below 0")
    assert said(mill, "book.xlsx:Limits:6:Minimum: The practical minimum of Soybean meal, 41 %, is above its maximum")
