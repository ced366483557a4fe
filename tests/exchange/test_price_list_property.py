"""Whatever the format, the dialect and the place of the unit: the same table comes back as the same prices."""

from __future__ import annotations

import tempfile
from collections.abc import Callable
from decimal import Decimal
from pathlib import Path
from typing import Any

import pytest
from hypothesis import assume, given, settings
from hypothesis import strategies as st

from blendapp.domain import units
from blendapp.domain.library import Library
from blendapp.exchange import read_price_list
from tests.exchange.made_lists import Rows, write_ods, write_text, write_xls, write_xlsx
from tests.mills import TODAY, Maker

NAMES = (
    "Maize", "Wheat", "Soybean meal 44 %", "Soybean meal 48 %", "Limestone", "Lime", "Rapskuchen, kaltgepreßt",
    "Premix 1.5", "Premix 15", "Feed wheat", "Wheat feed",
)
UNIT_WORDS = {
    "t": ("t", "tonne", "metric ton", "1000 kg"), "kg": ("kg", "kilo"), "100 kg": ("100 kg", "dt"), "lb": ("lb", "lbs"),
    "cwt": ("100 lb", "short cwt"), "short ton": ("short ton", "US ton"), "long ton": ("long ton", "gross ton"),
    "25 kg bag": ("25 kg bag", "bag of 25 kg"),
}
# Group and decimal sign.
DIALECTS = (
    ("", "."), ("", ","), (",", "."), (".", ","), (" ", ","), (" ", "."), ("'", "."), ("\u00a0", ","), ("\u202f", ","),
)
FORMATS: tuple[tuple[str, Callable[[Path, Rows], Path]], ...] = (
    ("xlsx", write_xlsx), ("ods", write_ods), ("xls", write_xls),
    *(
        (f"text {separator!r} {encoding}", lambda path, rows, s=separator, e=encoding: write_text(path, rows, s, e))
        for separator in (",", ";", "\t") for encoding in ("utf-8", "utf-8-sig", "utf-16", "utf-16-be", "cp1252")
    ),
)


def _library() -> Library:
    maker = Maker()
    for name in NAMES:
        maker.ingredient(name)
    return maker.library


LIBRARY = _library()


def shown(price: Decimal, dialect: tuple[str, str]) -> str:
    group, sign = dialect
    return f"{price:,.2f}".replace(",", "\x00").replace(".", sign).replace("\x00", group)


def per_t(price: Decimal, unit: str) -> float:
    if unit == "25 kg bag":
        return float(price) * 40
    return units.price_per_t(float(price), unit)


@st.composite
def tables(draw: st.DrawFn) -> tuple[Rows, dict[str, float], bool]:
    """Rows of a list, the price per tonne of each ingredient in it, and whether its numbers are texts."""
    names = draw(st.lists(st.sampled_from(NAMES), min_size=1, max_size=6, unique=True))
    cents = st.integers(min_value=1, max_value=9_999_999)
    prices = [Decimal(draw(cents)) / 100 for _name in names]
    texts = draw(st.booleans())
    dialect = draw(st.sampled_from(DIALECTS))
    place = draw(st.sampled_from(("column", "heading", "beside" if texts else "column", "note", "second heading")))
    one = draw(st.sampled_from(sorted(UNIT_WORDS)))
    per = [draw(st.sampled_from(sorted(UNIT_WORDS))) if place in ("column", "beside") else one for _name in names]
    words = [draw(st.sampled_from(UNIT_WORDS[unit])) for unit in per]
    money = draw(st.sampled_from(("", "$", "USD ", "US$ ")))
    name_head = draw(st.sampled_from(("Ingredient", "Product", "Commodity", "Description")))
    price_head = draw(st.sampled_from(("Price", "Quote", "Offer price", "Spot")))
    spelled = [draw(st.sampled_from((name, name.upper(), f" {name} ", name.lower()))) for name in names]
    cells: list[Any] = [shown(price, dialect) if texts else float(price) for price in prices]
    if place == "beside":
        cells = [f"{money}{cell} / {word}" for cell, word in zip(cells, words, strict=True)]
    elif texts:
        cells = [money + cell for cell in cells]
    head: list[Any] = [name_head, price_head]
    if place == "heading":
        head[1] = f"{price_head} per {words[0]}"
    titles: tuple[list[list[Any]], ...] = ([], [["Larkwater Grain"], []], [["Larkwater Grain", None, "Yard 3"]])
    note = [[f"All prices are per {words[0]}"]] if place == "note" else []
    rows: list[list[Any]] = [*draw(st.sampled_from(titles)), *note, head]
    if place == "second heading":
        rows.append([None, f"{money}/ {words[0]}"])
    if place == "column":
        head.append("Unit")
    for spelling, cell, word in zip(spelled, cells, words, strict=True):
        rows.append([spelling, cell, word] if place == "column" else [spelling, cell])
    return rows, {name: per_t(price, unit) for name, price, unit in zip(names, prices, per, strict=True)}, texts


@settings(max_examples=150, deadline=None)
@given(tables(), st.sampled_from(FORMATS))
def test_any_table_in_any_format_comes_back_as_the_same_prices(
    table: tuple[Rows, dict[str, float], bool], made: tuple[str, Callable[[Path, Rows], Path]]
) -> None:
    rows, expected, _texts = table
    name, write = made
    assume("cp1252" not in name or not any("\u202f" in str(cell) for cells in rows for cell in cells))
    with tempfile.TemporaryDirectory() as folder:
        reading = read_price_list(write(Path(folder, "list"), rows), LIBRARY, TODAY)
    assert [(row.row, row.reason) for row in reading.rows if row.questions] == []
    assert {row.ingredient: row.price_per_t for row in reading.accepted} == {
        name: pytest.approx(price, rel=1e-12) for name, price in expected.items()
    }
    filled = [number for number, cells in enumerate(rows, start=1) if any(cell is not None for cell in cells)]
    assert [row.row for row in reading.rows] == filled
