"""Price lists: read with a fate for every row, recorded whole as one undo, opened again and rolled back."""

from __future__ import annotations

import datetime
import json
from collections.abc import Sequence
from dataclasses import replace
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING, Any

from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import PriceList
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote, Terms
from blendapp.domain.records import Change, added, removed
from blendapp.domain.wording import _
from blendapp.services.mill import Edit, Mill
from blendapp.services.price_memory import memory_changes

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
    kept = PriceList(
        mill.new_id("price_list"), reading.file_name, reading.digest, datetime.datetime.now(datetime.UTC),
        len(reading.rows), len(rows), reading.supplier_id, _report(reading), reading.source, site_id=reading.site_id,
    )
    changes: list[Change] = [added(kept)]
    for row in rows:
        assert row.ingredient_id is not None
        assert row.price is not None
        assert row.per is not None
        changes.append(added(Quote(
            mill.new_id("quote"), row.ingredient_id, row.price, row.per, row.bushel_lb, reading.site_id,
            reading.supplier_id, terms=row.terms, valid_from=row.valid_from or on, valid_to=row.valid_to, recorded=on,
            source=reading.file_name, entered=row.entered, price_list_id=kept.id,
        )))
    changes += memory_changes(mill, reading)
    what = _("Prices from {file}").format(file=reading.file_name)
    return mill.apply(what, changes)


def applied_lists(mill: Mill) -> list[PriceList]:
    """Every price list that was applied, the latest first."""
    found: list[PriceList] = mill.library.all("price_list")
    return found[::-1]


def open_price_list(mill: Mill, price_list_id: int) -> list[PriceRow]:
    """The rows of an applied list with the fates that they had, as the record keeps them.

    Raises Refused where there is no such list, or its record cannot be read.
    """
    kept = _kept(mill, price_list_id)
    try:
        plain = json.loads(kept.report)
        return [_row(one) for one in plain]
    except (ValueError, TypeError, KeyError):
        text = _("The report of {file} cannot be read; the prices themselves stand under their ingredients.")
        raise Refused(text.format(file=kept.file_name)) from None


def roll_back(mill: Mill, price_list_id: int) -> Edit:
    """Withdraw exactly the quotes of an applied list, as one edit that can be undone; earlier prices count again.

    Its answers stay remembered. Raises Refused where there is no such list, or it was rolled back before.
    """
    kept = _kept(mill, price_list_id)
    if kept.withdrawn is not None:
        text = _("The prices from {file} were rolled back before; undo that, or apply the file again.")
        raise Refused(text.format(file=kept.file_name))
    quotes = [quote for quote in mill.library.all("quote") if quote.price_list_id == kept.id]
    changes = [removed(quote) for quote in quotes]
    changes.append(Change(kept, replace(kept, withdrawn=datetime.datetime.now(datetime.UTC))))
    return mill.apply(_("Roll back the prices from {file}").format(file=kept.file_name), changes)


def _kept(mill: Mill, price_list_id: int) -> PriceList:
    kept: PriceList | None = mill.library.records["price_list"].get(price_list_id)
    if kept is None:
        raise Refused(_("There is no such price list; it was undone."))
    return kept


# What the record of a list keeps of each row; a date as text.
_KEPT = (
    "sheet", "row", "fate", "reason", "source_name", "ingredient_id", "ingredient", "price", "per", "bushel_lb",
    "price_per_t", "unit", "valid_from", "old_price_per_t", "entered", "valid_to", "terms", "dry_matter_price_per_t",
)


def _report(reading: PriceListReading) -> str:
    plain = [
        {name: str(value) if isinstance(value, datetime.date | StrEnum) else value
         for name in _KEPT if (value := getattr(row, name)) not in (None, "")}
        for row in reading.rows
    ]
    return json.dumps(plain, ensure_ascii=False)


def _row(plain: dict[str, Any]) -> PriceRow:
    known = {name: plain[name] for name in _KEPT if name in plain}
    for name in ("valid_from", "valid_to"):
        if name in known:
            known[name] = datetime.date.fromisoformat(known[name])
    if "terms" in known:
        known["terms"] = Terms(known["terms"])
    return PriceRow(**{"sheet": "", "row": 0, **known, "fate": Fate(known["fate"])})
