"""Scenes of the pages behind prices: their history, the lists that were applied, and what is remembered of them."""

from __future__ import annotations

import datetime
from pathlib import Path
from typing import TYPE_CHECKING

from blendapp.desk.bench import Bench
from blendapp.domain.quotes import QuoteKind, Terms
from blendapp.services import edits, plant, price_history

if TYPE_CHECKING:
    from blendapp.desk.scenes import Studio

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
