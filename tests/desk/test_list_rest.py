"""A list that was taken with questions left is taken once more for what was settled since, and for nothing else."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import Qt

from blendapp.desk.bench import Bench
from blendapp.domain.list_rows import Fate
from blendapp.domain.quotes import Quote
from blendapp.services.lists import roll_back
from tests.desk.arriving import UNKNOWN_NAMES, count, price, read, wait, watch, write
from tests.desk.conftest import Hands

CTRL, ENTER = Qt.KeyboardModifier.ControlModifier, Qt.Key.Key_Return


def brought(bench: Bench) -> list[tuple[int, float | None]]:
    """Ingredient and price of every quote that a list brought."""
    quotes: list[Quote] = [one for one in bench.work.library.all("quote") if one.price_list_id]
    return [(one.ingredient_id, one.price) for one in quotes]


def take(bench: Bench, hands: Hands) -> None:
    hands.key(ENTER, CTRL)
    wait(bench)


def test_what_was_settled_since_is_taken_alone_and_each_taking_is_one_undo(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    testers = watch(bench)
    read(bench, write(tmp_path / "bay grain 49.xlsx", UNKNOWN_NAMES))
    take(bench, hands)
    assert brought(bench) == [(1, 210)]
    bench.arrivals.back()
    wait(bench)
    pane = bench.prices
    assert (pane.take.text(), pane.take.isEnabled()) == ("Taken", False)
    assert (count(bench, Fate.ACCEPTED), count(bench, Fate.QUESTION)) == (0, 3)
    reasons = [row.reason for row in pane.reading.rows if row.ingredient == "Maize"]  # type: ignore[union-attr]
    assert reasons[0].startswith("Taken on ")
    hands.key(Qt.Key.Key_1)
    wait(bench)
    assert pane.take.text() == "Take 1 price"
    assert pane.parts.remark.whole == "taken before; what was settled since is taken alone"
    take(bench, hands)
    assert brought(bench) == [(1, 210), (2, 430)]
    first, second = sorted(bench.work.library.all("price_list"), key=lambda one: one.id)
    assert (first.accepted, second.accepted, first.rows, second.rows) == (1, 1, 5, 5)
    bench.work.undo()
    assert brought(bench) == [(1, 210)]
    bench.arrivals.back()
    wait(bench)
    assert pane.take.text() == "Take 1 price"
    bench.work.undo()
    wait(bench)
    assert brought(bench) == []
    assert pane.take.text() == "Take 2 prices"
    assert testers


def test_the_same_file_chosen_again_offers_only_what_is_not_on_record(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    path = write(tmp_path / "bay grain 49.xlsx", UNKNOWN_NAMES)
    read(bench, path)
    hands.key(Qt.Key.Key_1)
    wait(bench)
    take(bench, hands)
    assert (price(bench, 1), price(bench, 2)) == (210, 430)
    # A price that was typed since stays in force, whatever is settled of the list.
    from blendapp.services import price_history

    bench.work.do(lambda mill: price_history.add_quote(mill, 1, 195.0, bench.work.on))
    read(bench, path)
    assert not bench.prices.take.isEnabled()
    assert bench.prices.parts.remark.whole == "taken before; all that it settles is on record"
    hands.write("lime")
    hands.key(ENTER)
    wait(bench)
    take(bench, hands)
    assert (price(bench, 1), price(bench, 2), price(bench, 3)) == (195, 430, 51)
    # Rolled back, its prices are no longer on record and can be taken again.
    for one in list(bench.work.library.all("price_list")):
        bench.work.do(lambda mill, one=one: roll_back(mill, one.id))
    read(bench, path)
    assert count(bench, Fate.ACCEPTED) == 3


def test_a_price_that_reads_otherwise_than_on_record_is_offered_again(
    bench: Bench, hands: Hands, tmp_path: Path
) -> None:
    from blendapp.services import plant

    bench.work.do(lambda mill: plant.add_supplier(mill, "Bay Grain"))
    path = write(tmp_path / "bay grain 49.xlsx", [["Ingredient", "USD/t"], ["Maize", 210]])
    read(bench, path)
    take(bench, hands)
    read(bench, path)
    assert count(bench, Fate.ACCEPTED) == 0
    # Of a supplier it is another price than that of nobody in particular.
    hands.key(Qt.Key.Key_F6)
    wait(bench)
    assert bench.prices.take.text() == "Take 1 price"
