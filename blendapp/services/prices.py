"""Price lists: read with a fate for every row, and recorded whole as one undo. Afterwards: see lists."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from pathlib import Path
from typing import TYPE_CHECKING

from blendapp.domain.mills import ListAbout
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change, added
from blendapp.domain.wording import _
from blendapp.services.list_memory import memory_changes
from blendapp.services.lists import kept_list
from blendapp.services.mill import Edit, Mill

if TYPE_CHECKING:
    from blendapp.domain.list_rows import Answer
    from blendapp.domain.price_rows import PriceListReading


def read_price_list(
    mill: Mill, path: Path | str, on: datetime.date, sheet: str | None = None,
    answers: Sequence[Answer] = (), source: str = "",
) -> PriceListReading:
    """What a price list says, row by row; nothing is written. sheet None: every visible sheet.

    answers: to questions of an earlier reading of the same file. source: whom the list is from and whom its answers
    are remembered for; "": as the name of the file tells, without dates and numbers.
    Raises Refused for a file that cannot be read.
    """
    from blendapp.exchange import read_price_list as read

    return read(Path(path), mill.library, on, sheet, answers, source)


def apply_price_list(mill: Mill, reading: PriceListReading, on: datetime.date) -> Edit:
    """Record every accepted row as a quote, a dated record of the list, and its answers, as one transaction and undo.

    Raises Refused where no row was accepted.
    """
    rows = reading.accepted
    if not rows:
        raise Refused(_("No row of {file} was accepted; there is no price to record.").format(file=reading.file_name))
    kept = kept_list(mill, reading, len(rows), ListAbout.PRICES)
    changes: list[Change] = [added(kept)]
    for row in rows:
        assert row.ingredient_id is not None
        assert row.price is not None
        assert row.per is not None
        changes.append(added(Quote(
            mill.new_id("quote"), row.ingredient_id, row.price, row.per, row.bushel_lb,
            reading.site_id if row.site_id is None else row.site_id,
            reading.supplier_id if row.supplier_id is None else row.supplier_id,
            terms=row.terms, valid_from=row.valid_from or on, valid_to=row.valid_to, recorded=on,
            source=reading.file_name, entered=row.entered, price_list_id=kept.id,
        )))
    changes += memory_changes(mill, reading)
    what = _("Prices from {file}").format(file=reading.file_name)
    return mill.apply(what, changes)
