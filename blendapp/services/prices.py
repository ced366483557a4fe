"""Price lists: read with a fate for every row, then recorded whole, as one undo."""

from __future__ import annotations

import datetime
import json
from pathlib import Path
from typing import TYPE_CHECKING

from blendapp.domain.mills import PriceList
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change, added
from blendapp.domain.wording import _
from blendapp.services.mill import Edit, Mill

if TYPE_CHECKING:
    from blendapp.domain.price_rows import PriceListReading


def read_price_list(mill: Mill, path: Path | str, on: datetime.date, sheet: str | None = None) -> PriceListReading:
    """What a price list says, row by row; nothing is written. sheet None: every visible sheet.

    Raises Refused for a file that cannot be read.
    """
    from blendapp.exchange import read_price_list as read

    return read(Path(path), mill.library, on, sheet)


def apply_price_list(mill: Mill, reading: PriceListReading, on: datetime.date) -> Edit:
    """Record every accepted row as a quote, with a dated record of the list, in one transaction and one undo.

    Raises Refused where no row was accepted.
    """
    rows = reading.accepted
    if not rows:
        raise Refused(_("No row of {file} was accepted; there is no price to record.").format(file=reading.file_name))
    kept = PriceList(
        mill.new_id("price_list"), reading.file_name, reading.digest, datetime.datetime.now(datetime.UTC),
        len(reading.rows), len(rows), report=_report(reading),
    )
    changes: list[Change] = [added(kept)]
    for row in rows:
        assert row.ingredient_id is not None
        assert row.price is not None
        assert row.per is not None
        changes.append(added(Quote(
            mill.new_id("quote"), row.ingredient_id, row.price, row.per, row.bushel_lb,
            valid_from=row.valid_from or on, recorded=on, source=reading.file_name, entered=row.entered,
            price_list_id=kept.id,
        )))
    what = _("Prices from {file}").format(file=reading.file_name)
    return mill.apply(what, changes)


def _report(reading: PriceListReading) -> str:
    plain = [
        {"sheet": r.sheet, "row": r.row, "fate": str(r.fate), "reason": r.reason, "source_name": r.source_name}
        for r in reading.rows
    ]
    return json.dumps(plain, ensure_ascii=False)
