"""Lists that were applied, of prices or of analyses: kept with every row, opened again, and rolled back."""

from __future__ import annotations

import datetime
import json
from collections.abc import Callable
from dataclasses import fields, replace
from enum import StrEnum
from typing import Any

from blendapp.domain.composition_rows import CompositionRow, ReadValue
from blendapp.domain.ingredients import Basis
from blendapp.domain.list_rows import Fate, ListReading, ListRow
from blendapp.domain.mills import ListAbout, PriceList
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.problems import Problem, Refused
from blendapp.domain.quotes import Terms
from blendapp.domain.records import Change, removed
from blendapp.domain.wording import _
from blendapp.services.composition_back import composition_withdrawn
from blendapp.services.mill import Edit, Mill

_ROW_OF: dict[ListAbout, type[ListRow]] = {ListAbout.PRICES: PriceRow, ListAbout.COMPOSITION: CompositionRow}


def kept_list(mill: Mill, reading: ListReading, accepted: int, about: ListAbout) -> PriceList:
    """The dated record of a list that is about to be applied."""
    return PriceList(
        mill.new_id("price_list"), reading.file_name, reading.digest, datetime.datetime.now(datetime.UTC),
        len(reading.rows), accepted, report=_report(reading), source=reading.source, about=about,
        supplier_id=reading.supplier_id, site_id=reading.site_id,
    )


def applied_lists(mill: Mill, about: ListAbout | None = None) -> list[PriceList]:
    """Every list that was applied, of prices and of analyses or of one of them, the latest first."""
    found: list[PriceList] = mill.library.all("price_list")
    return [one for one in found[::-1] if about in (None, one.about)]


def open_list(mill: Mill, list_id: int) -> list[ListRow]:
    """The rows of an applied list with the fates that they had: PriceRows or CompositionRows, without their questions.

    Raises Refused where there is no such list, or its record cannot be read.
    """
    kept = _kept(mill, list_id)
    try:
        return [_row(_ROW_OF[kept.about], one) for one in json.loads(kept.report)]
    except (ValueError, TypeError, KeyError):
        text = _("The report of {file} cannot be read; what it brought stands under its ingredients.")
        raise Refused(text.format(file=kept.file_name)) from None


def roll_back(mill: Mill, list_id: int) -> Edit:
    """Withdraw what an applied list brought, as one edit that can be undone; its answers stay remembered.

    Of prices exactly its quotes go, so that earlier ones count again. Of analyses its samples go, and every value that
    still stands as the list left it is again what it was before; one that was changed since stays, and the edit says so
    (oddities). Raises Refused where there is no such list, or it was rolled back before.
    """
    kept = _kept(mill, list_id)
    if kept.withdrawn is not None:
        text = _("{file} was rolled back before; undo that, or apply the file again.")
        raise Refused(text.format(file=kept.file_name))
    changes: list[Change] = [Change(kept, replace(kept, withdrawn=datetime.datetime.now(datetime.UTC)))]
    left: list[Problem] = []
    if kept.about is ListAbout.PRICES:
        changes += [removed(quote) for quote in mill.library.all("quote") if quote.price_list_id == kept.id]
        what = _("Roll back the prices from {file}")
    else:
        more, left = composition_withdrawn(mill, kept)
        changes += more
        what = _("Roll back the analyses from {file}")
    done = mill.apply(what.format(file=kept.file_name), changes)
    return replace(done, oddities=(*left, *done.oddities))


def _kept(mill: Mill, list_id: int) -> PriceList:
    kept: PriceList | None = mill.library.records["price_list"].get(list_id)
    if kept is None:
        raise Refused(_("There is no such list; it was undone."))
    return kept


# -- the report: JSON of every row, without what was asked of it


def _report(reading: ListReading) -> str:
    return json.dumps([_plain(row) for row in reading.rows], ensure_ascii=False)


def _plain(row: Any) -> dict[str, Any]:
    found = {}
    for field in fields(row):
        value = getattr(row, field.name)
        if field.name == "questions" or value in (None, "", ()):
            continue
        if isinstance(value, tuple):
            value = [_plain(one) for one in value]
        found[field.name] = str(value) if isinstance(value, datetime.date | StrEnum) else value
    return found


_READ: dict[str, Callable[[Any], Any]] = {
    "fate": Fate, "terms": Terms, "basis": Basis,
    **dict.fromkeys(("valid_from", "valid_to", "sampled"), datetime.date.fromisoformat),
    "values": lambda values: tuple(_row(ReadValue, {"nutrient_id": None, **one}) for one in values),
}


def _row(cls: type[Any], plain: dict[str, Any]) -> Any:
    known = {field.name for field in fields(cls)}
    read = {name: _READ[name](value) if name in _READ else value for name, value in plain.items() if name in known}
    return cls(**({"sheet": "", "row": 0} if issubclass(cls, ListRow) else {}) | read)
