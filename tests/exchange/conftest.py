"""A small mill, and price lists read against it."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer
from blendapp.domain.price_rows import PriceListReading
from blendapp.exchange import read_price_list
from tests.exchange.made_lists import Rows, write_xlsx
from tests.mills import TODAY, Maker

Read = Callable[..., PriceListReading]


@pytest.fixture
def library() -> Library:
    maker = Maker()
    for name, price, dry in (
        ("Maize", 200.0, 88.0), ("Wheat", 210.0, 87.0), ("Soybean meal", 400.0, 89.0), ("Limestone", None, None),
        ("Molasses", None, 75.0),
    ):
        maker.ingredient(name, price, dry_matter_percent=dry)
    return maker.library


@pytest.fixture
def read(tmp_path: Path, library: Library) -> Read:
    """read(rows, *answers): the reading of a workbook made of rows, or of what `write` makes of them."""
    def reader(rows: Rows, *answers: Answer, write: Any = write_xlsx, **more: Any) -> PriceListReading:
        return read_price_list(write(tmp_path / "Larkwater", rows), library, TODAY, answers=answers, **more)

    return reader
