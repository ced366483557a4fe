"""Every made list comes out with the expected fate of each of its rows, in every format that can hold it."""

from __future__ import annotations

from typing import Any

import pytest

from blendapp.domain.list_rows import Fate
from tests.exchange.conftest import Read
from tests.exchange.made_lists import write_ods, write_text, write_xls, write_xlsx
from tests.exchange.made_messes import MESSES
from tests.exchange.test_price_list_messes import HEADINGS, UNITS
from tests.exchange.test_price_questions import SETTLED


@pytest.mark.parametrize("write", [write_xlsx, write_text, write_ods, write_xls])
@pytest.mark.parametrize("mess", MESSES)
def test_each_row_of_a_made_list_has_the_expected_fate(read: Read, mess: str, write: Any) -> None:
    rows, fates, per_t = MESSES[mess]
    reading = read(rows, write=write)
    assert [row.fate for row in reading.rows] == fates
    assert [round(row.price_per_t or 0, 2) for row in reading.accepted] == per_t
    filled = [number for number, cells in enumerate(rows, start=1) if any(cell is not None for cell in cells)]
    assert [row.row for row in reading.rows] == filled
    assert sum(reading.count(fate) for fate in Fate) == len(filled)
    assert all(row.reason for row in reading.rows if row.fate is not Fate.ACCEPTED)
    assert all(bool(row.questions) is (row.fate is Fate.QUESTION) for row in reading.rows)


def test_at_least_sixty_lists_are_made() -> None:
    known = {repr(one[0]) for catalogue in (MESSES, HEADINGS, UNITS, SETTLED) for one in catalogue.values()}
    assert len(MESSES) + len(HEADINGS) >= 60
    assert len(known) >= 100
