"""Scenes of the pages behind prices: their history, the lists that were applied, and what is remembered of them."""

from __future__ import annotations

import datetime
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from blendapp.desk.bench import Bench
from blendapp.domain.list_rows import ADD, DAY_FIRST, LEAVE_OUT, Answer
from blendapp.domain.mills import Asked
from blendapp.domain.quotes import QuoteKind, Terms
from blendapp.services import edits, list_memory, plant, price_history
from blendapp.services.lists import applied_lists, roll_back
from blendapp.services.prices import apply_price_list, read_price_list

if TYPE_CHECKING:
    from blendapp.desk.studio import Studio

DAY = datetime.timedelta(days=1)


def history(studio: Studio, bench: Bench, _price_list: Path) -> None:
    """A year of one ingredient's prices, of two suppliers and for one site."""
    work, on = bench.work, bench.work.on
    first = work.library.ingredients[0]
    price = work.library.price_per_t(first.id, on) or 200.0
    if not work.library.all("site"):
        work.do(lambda mill: plant.add_site(mill, "Riverside"))
    site = work.library.all("site")[0]
    work.do(lambda mill: edits.set_mill(mill, site_id=site.id))

    work.do(lambda mill: price_history.buy_from(mill, first.id, ""))

    def add(days: int, change: float | None, supplier: str, lasting: int | None = None, **more: object) -> None:
        begin = on + days * DAY
        work.do(lambda mill: price_history.add_quote(
            mill, first.id, None if change is None else round(price * (1 + change / 100), 2), min(begin, on),
            supplier=supplier, valid_from=begin, valid_to=None if lasting is None else begin + lasting * DAY, **more))  # type: ignore[arg-type]

    for weeks in range(26):
        wave = 4 * ((weeks * 7) % 5 - 2) / 2 + 0.3 * weeks
        add(7 * weeks - 190, wave, "Marsh & Sons", terms=Terms.DELIVERED, source="marsh.xlsx")
        if weeks % 4 == 1:
            add(7 * weeks - 188, wave - 5, "North Quay Meals", 20, terms=Terms.EX_WORKS, source="north quay.csv")
    add(-100, None, "Marsh & Sons", 12)
    add(-30, 2, "North Quay Meals", 60, site=site.name, kind=QuoteKind.CONTRACT)
    add(9, 6, "Marsh & Sons")
    last = work.library.quotes_of(first.id)[-1]
    work.do(lambda mill: price_history.change_quote(mill, last.id, on, valid_from=on + 12 * DAY))
    bench.show_history(first.id)
    studio.settle()
    studio.take(bench.frame, "30-price-history")
    bench.history.spans.buttons()[0].click()
    bench.history.replaced.setChecked(True)
    bench.history.form.price.setText("cheap")
    bench.history.form.add.emit()
    studio.settle()
    studio.take(bench.frame, "31-price-history-3-months")
    bench.history.spans.buttons()[-1].click()
    bench.history.replaced.setChecked(False)
    bench.frame.resize(1100, 700)
    studio.settle()
    studio.take(bench.frame, "32-price-history-small-window")
    bench.frame.resize(1440, 900)


def lists(studio: Studio, bench: Bench, price_list: Path) -> None:
    """Lists that were applied, one of them rolled back, and what is remembered of their sources."""
    work = bench.work
    first = work.library.ingredients[0]
    for source, answer in (
        ("marsh", Answer(Asked.INGREDIENT, "Corn, yellow no 2", ingredient_id=first.id)),
        ("marsh", Answer(Asked.INGREDIENT, "Pallet deposit", LEAVE_OUT)),
        ("marsh", Answer(Asked.UNIT, "ton", "short ton")), ("marsh", Answer(Asked.PRICE, "Price | Freight", ADD)),
        ("north quay", Answer(Asked.DATES, "Valid from", DAY_FIRST)),
        ("north quay", Answer(Asked.RATE, "EUR", "", rate=1.085, given=work.on)),
        ("north quay", Answer(Asked.COLUMN, "Rem.", "note")),
    ):
        work.do(partial(list_memory.remember, source=source, answer=answer))
    work.do(lambda mill: list_memory.set_usual_change(mill, "", 25.0))
    for _time in range(2):
        reading = read_price_list(work.mill, price_list, work.on)
        work.do(partial(apply_price_list, reading=reading, on=work.on))
    work.do(lambda mill: roll_back(mill, applied_lists(mill)[-1].id))
    bench.show_applied()
    studio.settle()
    studio.take(bench.frame, "33-applied-lists")
    bench.show_memory()
    studio.settle()
    studio.take(bench.frame, "34-what-is-remembered")
