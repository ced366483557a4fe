"""Questions of a list answered in writing."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Sequence
from pathlib import Path

import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer, Fate
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.problems import Refused
from blendapp.services.answering import answered, questions
from blendapp.services.mill import Mill
from blendapp.services.prices import apply_price_list, read_price_list
from tests.mills import Maker

Opened = Callable[[Library], Mill]
TODAY = datetime.date(2026, 12, 1)


@pytest.fixture
def mill(opened: Opened) -> Mill:
    made = Maker()
    for name in ("Maize", "Soybean meal", "Maize gluten feed"):
        made.ingredient(name, price=200.0)
    return opened(made.library)


def read(mill: Mill, path: Path, text: str, *written: str) -> PriceListReading:
    path.write_text(text, encoding="utf-8")

    def again(known: Sequence[Answer]) -> PriceListReading:
        return read_price_list(mill, path, TODAY, None, known)

    return answered(mill.library, again, written, TODAY)


LIST = "Commodity,Price per ton,Valid from\nMaize,210.50,2026-12-01\nCorn gluten,180,2026-12-01\n"


def test_what_a_list_leaves_open_is_named_so_that_it_can_be_answered(mill: Mill, tmp_path: Path) -> None:
    found = read(mill, tmp_path / "hill.csv", LIST)
    assert [name for name, _question in questions(found)] == ["unit: ton", "ingredient: Corn gluten"]


def test_answers_in_writing_settle_the_list_and_are_remembered_when_it_is_applied(mill: Mill, tmp_path: Path) -> None:
    found = read(
        mill, tmp_path / "hill.csv", LIST, "unit: ton = short ton", "INGREDIENT: corn gluten=maize gluten feed"
    )
    assert [(row.ingredient, round(row.price_per_t or 0, 2)) for row in found.accepted] == [
        ("Maize", 232.04), ("Maize gluten feed", 198.42)
    ]
    apply_price_list(mill, found, TODAY)
    assert read(mill, tmp_path / "hill.csv", LIST).count(Fate.QUESTION) == 0


def test_an_answer_for_one_row_holds_for_that_row(mill: Mill, tmp_path: Path) -> None:
    leaps = "Commodity,USD/t\nMaize,2100\nSoybean meal,2000\n"
    found = read(mill, tmp_path / "hill.csv", leaps, "row 2=take", "row 3=leave out")
    assert [(row.row, row.fate) for row in found.rows if row.row > 1] == [(2, Fate.ACCEPTED), (3, Fate.IGNORED)]


def test_a_rate_has_a_day_today_unless_one_is_written(mill: Mill, tmp_path: Path) -> None:
    foreign = "Commodity,EUR/t\nMaize,200\n"
    (name, _question), = questions(read(mill, tmp_path / "hill.csv", foreign))
    found = read(mill, tmp_path / "hill.csv", foreign, f"{name}=1.1")
    assert found.accepted[0].price_per_t == pytest.approx(220)
    assert found.answers[-1].given == TODAY
    dated = read(mill, tmp_path / "hill.csv", foreign, f"{name}=1.1 2026-11-30")
    assert dated.answers[-1].given == datetime.date(2026, 11, 30)


@pytest.mark.parametrize(("written", "said"), [
    ("unit: ton", "QUESTION=ANSWER"),
    ("=short ton", "QUESTION=ANSWER"),
    ("cents=take", "does not ask “cents”; open are: unit: ton; ingredient: Corn gluten"),
    ("ingredient: Corn gluten=Unobtainium", "does not answer"),
    ("unit: ton=furlong", "does not answer"),
])
def test_an_answer_that_fits_no_question_is_refused_with_what_may_be_answered(
    mill: Mill, tmp_path: Path, written: str, said: str
) -> None:
    with pytest.raises(Refused, match=said):
        read(mill, tmp_path / "hill.csv", LIST, written)


def test_the_heading_row_may_be_said_without_being_asked(mill: Mill, tmp_path: Path) -> None:
    text = "Commodity,USD/t\nold,list\nCommodity,USD/t\nMaize,210\n"
    found = read(mill, tmp_path / "hill.csv", text, "table=row 3")
    assert [row.ingredient for row in found.accepted] == ["Maize"]


def test_an_answer_that_leaves_its_question_open_is_refused_with_the_choices(mill: Mill, tmp_path: Path) -> None:
    with pytest.raises(Refused, match=r"“furlong” does not answer: .* Use one of: .*short ton"):
        read(mill, tmp_path / "hill.csv", LIST, "unit: ton=furlong")


def test_the_same_answer_given_twice_is_harmless(mill: Mill, tmp_path: Path) -> None:
    found = read(mill, tmp_path / "hill.csv", LIST, "unit: ton=t", "unit: ton=t", "Unit: TON = T")
    assert [row.price_per_t for row in found.accepted] == [210.5]
