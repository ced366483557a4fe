"""A small mill, and lists of analyses read against it."""

from __future__ import annotations

import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

from blendapp.domain.composition_rows import CompositionReading, CompositionRow
from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer
from blendapp.exchange import read_composition_list
from tests.exchange.made_lists import Rows, write_xlsx
from tests.mills import TODAY, Maker

NUTRIENTS = (
    ("Crude protein", "%", "crude protein"), ("Crude fat", "%", "crude fat"), ("Crude fibre", "%", "crude fibre"),
    ("Starch", "%", "starch"), ("Calcium", "g/kg", "calcium"), ("Total phosphorus", "%", "total phosphorus"),
    ("Available phosphorus", "%", "available phosphorus"), ("Lysine", "%", "lysine"),
    ("Digestible lysine", "%", ""), ("Zinc", "mg/kg", "total zinc"), ("Added copper", "mg/kg", "added copper"),
    ("ME poultry", "kcal/kg", "energy"), ("Vitamin A, added", "IU/kg", "vitamin A"),
    ("Electrolyte balance", "mEq/kg", "electrolyte balance"),
)


def mill(**values: float) -> Library:
    """Maize with its protein, soybean meal with its dry matter, wheat bran of which nothing is known."""
    maker = Maker()
    for name, unit, key in NUTRIENTS:
        maker.nutrient(name, unit, key=key, never_negative=name != "Electrolyte balance")
    maker.ingredient("Maize", 200.0, {"Crude protein": 8.5, **values}, dry_matter_percent=88, class_name="Cereals")
    maker.ingredient("Soybean meal", 400.0, dry_matter_percent=89)
    maker.ingredient("Wheat bran", 150.0)
    return maker.library


LIBRARY = mill()


def read(
    rows: Rows, *answers: Answer, write: Callable[..., Path] = write_xlsx, library: Library = LIBRARY, **more: Any
) -> CompositionReading:
    with tempfile.TemporaryDirectory() as folder:
        return read_composition_list(write(Path(folder, "Larkwater"), rows), library, TODAY, answers=answers, **more)


def fates(reading: CompositionReading) -> list[str]:
    return [str(row.fate) for row in reading.rows]


def values_of(row: CompositionRow) -> dict[str, tuple[float, str, str]]:
    """What a row gives of each nutrient: amount, unit, basis."""
    return {one.nutrient: (one.amount, one.unit, str(one.basis)) for one in row.values}


def asked(reading: CompositionReading) -> set[tuple[str, str]]:
    return {(str(one.asked), one.about) for one in reading.questions}
