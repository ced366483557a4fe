"""A list of analyses is looked at on the same page as a price list, and taken as one undo."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtCore import Qt

from blendapp.desk.bench import Bench
from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import ListAbout
from tests.desk.arriving import Rows, count, read, wait, watch, write
from tests.desk.conftest import Hands

RESULTS: Rows = [
    ["Tidewater Laboratory"], ["Sample", "Material", "Date", "Crude protein (%)", "Lysine (%)"],
    ["M-1", "Maize", "2026-02-20", 9.0, 0.28], ["M-2", "Maize", "2026-02-21", 9.4, 0.30],
    ["S-1", "Soya ml", "2026-02-22", 46.5, None],
]


@pytest.fixture(autouse=True)
def testers(bench: Bench) -> Iterator[None]:
    found = watch(bench)
    yield
    assert found


def answer_both(bench: Bench, hands: Hands) -> None:
    """As fed, and the first candidate for the name."""
    for _question in range(2):
        hands.key(Qt.Key.Key_1)
        wait(bench)


def shown(bench: Bench, key: str) -> list[str]:
    rows = bench.prices.parts.sample_rows
    return [str(rows.cell(owner, key).data()) for owner in rows.owners]


def test_every_value_stands_in_a_line_with_the_one_in_use(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    read(bench, write(tmp_path / "tidewater.xlsx", RESULTS), ListAbout.COMPOSITION)
    assert bench.prices.parts.table is bench.prices.parts.sample_table
    assert [bench.prices.source.head.words(at)[0] for at in range(5)] == [
        "sample", "name", "day of the sample", "nutrient", "nutrient"]
    assert bench.prices.questions.count.text() == "2 questions left"
    answer_both(bench, hands)
    assert shown(bench, "fate") == ["accepted", "", "accepted", "", "accepted"]
    assert shown(bench, "sample") == ["M-1", "", "M-2", "", "S-1"]
    assert shown(bench, "nutrient") == ["Crude protein", "Lysine", "Crude protein", "Lysine", "Crude protein"]
    assert shown(bench, "value") == ["9.0", "0.28", "9.4", "0.3", "46.5"]
    assert shown(bench, "old") == ["10.0", "0.30", "10.0", "0.3", "46.0"]
    assert shown(bench, "change") == ["−1.0", "−0.02", "−0.6", "0", "+0.5"]
    assert bench.prices.take.text() == "Take 3 samples"
    assert not bench.prices.look.isVisible()


def test_taking_analyses_changes_the_composition_as_one_undo(bench: Bench, hands: Hands, tmp_path: Path) -> None:
    library = bench.work.library
    read(bench, write(tmp_path / "tidewater.xlsx", RESULTS), ListAbout.COMPOSITION)
    answer_both(bench, hands)
    hands.key(Qt.Key.Key_Return, Qt.KeyboardModifier.ControlModifier)
    assert bench.frame.middle.currentWidget() is bench.frame.bench
    assert bench.strip.words.text() == "3 samples from tidewater.xlsx are taken; Ctrl+Z takes them back."
    protein = {one.ingredient_id: one.amount for one in library.all("value") if one.nutrient_id == 1}
    assert (protein[1], protein[2]) == (pytest.approx(9.2), pytest.approx(46.5))
    assert len(library.all("lot")) == 3
    hands.key(Qt.Key.Key_Z, Qt.KeyboardModifier.ControlModifier)
    assert not library.all("lot")
    assert {one.amount for one in library.all("value") if one.nutrient_id == 1} == {10, 46, 0, 22}


def test_a_list_that_was_read_as_the_wrong_thing_is_read_as_the_other(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    read(bench, write(tmp_path / "tidewater.xlsx", RESULTS))
    hands.click(bench.prices.parts.other)
    wait(bench)
    assert bench.prices.parts.table is bench.prices.parts.sample_table
    assert count(bench, Fate.QUESTION) == 3
    hands.click(bench.prices.parts.other)
    wait(bench)
    assert bench.prices.parts.table is bench.prices.parts.price_table
