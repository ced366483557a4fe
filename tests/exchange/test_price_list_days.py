"""From when until when a price holds: date cells and texts, columns and notes."""

from __future__ import annotations

import datetime
from pathlib import Path
from typing import Any

import openpyxl
import pytest
from openpyxl.utils.datetime import CALENDAR_MAC_1904, CALENDAR_WINDOWS_1900

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer, Fate
from blendapp.domain.mills import Asked
from blendapp.exchange import read_price_list
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows
from tests.mills import TODAY

A, Q = Fate.ACCEPTED, Fate.QUESTION
HEAD = ["Ingredient", "Price", "Unit"]

# Days: headings beyond those of every list, the cells under them, the fate and both days.
MARCH_5, MARCH_9 = datetime.date(2026, 3, 5), datetime.date(2026, 3, 9)
DAYS: dict[str, tuple[list[Any], list[Any], Fate, datetime.date | None, datetime.date | None]] = {
    "a day to come": (["Valid from"], ["2026-03-09"], A, MARCH_9, None),
    "a day in words": (["Valid from"], ["9th March 2026"], A, MARCH_9, None),
    "a date cell": (["Valid from"], [MARCH_9], A, MARCH_9, None),
    "until a day to come": (["Valid until"], ["9 March 2026"], A, None, MARCH_9),
    "from and to": (["From", "To"], [MARCH_9, datetime.date(2026, 4, 9)], A, MARCH_9, datetime.date(2026, 4, 9)),
    "expired": (["Expiry"], ["2026-03-01"], Q, None, datetime.date(2026, 3, 1)),
    "ends before it begins": (["From", "To"], [MARCH_9, MARCH_5], Q, MARCH_9, MARCH_5),
    "two readings": (["Valid from"], ["9/3/2026"], Q, None, None),
    "no date": (["Valid from"], ["soon"], Q, None, None),
    "a number": (["Valid from"], [12], Q, None, None),
}


@pytest.mark.parametrize("mess", DAYS)
def test_the_days_of_a_price_are_read_or_asked(read: Read, mess: str) -> None:
    more, cells, fate, first, last = DAYS[mess]
    row = read([HEAD + more, ["Maize", 205, "t", *cells]]).rows[1]
    assert (row.fate, row.valid_from, row.valid_to) == (fate, first, last)


@pytest.mark.parametrize(
    ("note", "first", "last"),
    [("Prices valid from 9 March 2026", MARCH_9, None), ("Valid until 2026-03-09", None, MARCH_9),
     ("Offer as of March 9, 2026, expires 20.03.2026", MARCH_9, datetime.date(2026, 3, 20))],
)
def test_the_days_may_stand_in_a_note(
    read: Read, note: str, first: datetime.date | None, last: datetime.date | None
) -> None:
    (row,) = read([[note], HEAD, ["Maize", 205, "t"]]).accepted
    assert (row.valid_from, row.valid_to) == (first, last)


def test_the_order_of_day_and_month_may_be_answered(read: Read) -> None:
    rows: Rows = [[*HEAD, "Valid from"], ["Maize", 205, "t", "9/3/2026"]]
    (question,) = read(rows).questions
    assert (question.asked, question.choices) == (Asked.DATES, ("day first", "month first"))
    assert read(rows, Answer(Asked.DATES, "Valid from", "day first")).accepted[0].valid_from == MARCH_9
    month_first = read(rows, Answer(Asked.DATES, "Valid from", "month first"))
    assert month_first.accepted[0].valid_from == datetime.date(2026, 9, 3)


@pytest.mark.parametrize("epoch", [CALENDAR_WINDOWS_1900, CALENDAR_MAC_1904])
def test_date_cells_of_both_epochs_are_the_same_day(tmp_path: Path, library: Library, epoch: datetime.datetime) -> None:
    book = openpyxl.Workbook()
    book.epoch = epoch
    for row in ([*HEAD, "Valid from"], ["Maize", 205, "t", MARCH_9]):
        book.worksheets[0].append(row)
    book.save(tmp_path / "list.xlsx")
    assert read_price_list(tmp_path / "list.xlsx", library, TODAY).accepted[0].valid_from == MARCH_9
