"""Whatever is answered to whatever list: nothing fails, and every row that is not blank has exactly one fate."""

from __future__ import annotations

import random
from pathlib import Path

import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import ADD, DAY_FIRST, LEAVE_OUT, MONTH_FIRST, TAKE, Answer, ColumnRole, Fate
from blendapp.domain.mills import Asked
from blendapp.exchange import read_price_list
from tests.exchange.made_lists import write_text
from tests.exchange.made_messes import MESSES
from tests.exchange.test_price_list_messes import HEADINGS
from tests.mills import TODAY

WORDS = [
    "", ADD, TAKE, LEAVE_OUT, DAY_FIRST, MONTH_FIRST, ".", ",", "t", "kg", "25 kg bag", "bag", "ton", "56 lb", "0",
    "-1", "205.5", "1e400", "nan", "row 0", "row 1", "row 2", "row 999999", "row", "as fed", "USD", "EUR",
    "Nobody", "“”{}%",
    *(role.value for role in ColumnRole),
]
LISTS = {**{name: one[0] for name, one in MESSES.items()}, **{name: one[0] for name, one in HEADINGS.items()}}


def any_answer(chance: random.Random, abouts: list[str], rows: int) -> Answer:
    return Answer(
        chance.choice(list(Asked)), chance.choice(abouts), chance.choice(WORDS),
        chance.choice([None, 1, 2, 99]), chance.choice([None, 0.0, -1.0, 1.1, float("inf"), float("nan")]),
        chance.choice([None, TODAY]), "", chance.randint(0, rows + 1),
    )


@pytest.mark.parametrize("mess", LISTS)
def test_no_answer_makes_a_list_fail_or_lose_a_row(tmp_path: Path, library: Library, mess: str) -> None:
    chance = random.Random(mess)
    path = write_text(tmp_path / "list.csv", LISTS[mess])
    first = read_price_list(path, library, TODAY)
    abouts = ["", "column 1", "column 2", "column 99", "Nobody", *(one.about for one in first.questions)]
    abouts += [column.heading for sheet in first.sheets for table in sheet.tables for column in table.columns]
    for _round in range(25):
        answers = [any_answer(chance, abouts, len(first.rows)) for _answer in range(chance.randint(1, 6))]
        answers += [
            Answer(
                one.asked, one.about, chance.choice([*one.choices, *WORDS]), chance.choice([None, 1]),
                chance.choice([None, 1.1, 1e300, float("inf"), float("nan")]), TODAY, row.sheet, row.row,
            )
            for row in first.rows for one in row.questions if chance.random() < 0.5
        ]
        reading = read_price_list(path, library, TODAY, answers=answers)
        assert [row.row for row in reading.rows] == [row.row for row in first.rows]
        for row in reading.rows:
            price = row.price_per_t
            assert price is None or abs(price) < float("inf")
            if row.fate is Fate.ACCEPTED:
                assert row.ingredient_id in (1, 2, 3, 4, 5)
                assert price is not None
                assert row.questions == ()
