"""The rows of a price list as they were understood."""

from __future__ import annotations

from blendapp.desk.prices.asking import listed_price
from blendapp.desk.prices.understood import UnderstoodRows
from blendapp.desk.table.grid import Heading
from blendapp.desk.table.look import EMPTY, Look, number_look
from blendapp.domain.list_rows import Fate, ListReading, ListRow
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.domain.wording import _


class PriceRows(UnderstoodRows):
    """A line a row: ingredient, price as read and per tonne, the old one and the change."""

    def make_headings(self, reading: ListReading) -> list[Heading]:
        assert isinstance(reading, PriceListReading)
        per_t = _("{currency}/t").format(currency=reading.currency)
        # Wide enough for a price that came out ten times too high, which is the one that has to be read.
        return [
            Heading("fate", "", 72), Heading("place", _("row"), 40, True), Heading("ingredient", _("Ingredient"), 170),
            Heading("entered", _("as listed"), 132, True), Heading("price", per_t, 78, True),
            Heading("old", _("was"), 74, True), Heading("change", _("change"), 84, True),
            Heading("percent", "%", 66, True),
        ]

    def line_look(self, row: ListRow, line: int, key: str) -> Look:
        assert isinstance(row, PriceRow)
        quiet = row.fate is Fate.IGNORED
        if key in ("price", "old"):
            value = row.price_per_t if key == "price" else row.old_price_per_t
            return number_look(value, 2, unknown="", quiet=key == "old" or quiet, strong=key == "price" and not quiet)
        if key in ("change", "percent"):
            return _change(row, key == "percent")
        if key == "entered":
            text = listed_price(row)
            return Look(text=text, quiet=quiet, number=True, hint=text)
        name = row.ingredient or row.source_name
        # A name that only the list knows is set apart from one of the mill's.
        return Look(text=name, quiet=quiet, italic=row.ingredient is None, hint=name)

    def detail(self, row: ListRow, line: int) -> str:
        assert isinstance(row, PriceRow)
        parts = []
        other_name = bool(row.ingredient) and fold(row.ingredient or "") != fold(row.source_name)
        if other_name and row.source_name and row.source_name not in row.reason:
            parts.append(_("“{name}” in the list").format(name=row.source_name))
        first, last = row.valid_from, row.valid_to
        if first is not None:
            parts.append(_("from {day}").format(day=first.isoformat()))
        if last is not None:
            parts.append(_("to {day}").format(day=last.isoformat()))
        if row.terms is not None:
            parts.append(_(row.terms.value))
        if row.dry_matter_price_per_t is not None:
            figure = notation().write(row.dry_matter_price_per_t, 2)
            parts.append(_("{price} per t of dry matter").format(price=figure))
        facts = ", ".join(parts)
        if facts and row.reason:
            return f"{row.reason}   {facts}" if row.fate is not Fate.ACCEPTED else f"{facts}. {row.reason}"
        return facts or row.reason


def _change(row: PriceRow, percent: bool) -> Look:
    if row.price_per_t is None or not row.old_price_per_t or row.fate is Fate.IGNORED:
        return EMPTY
    change = row.price_per_t - row.old_price_per_t
    value, decimals = (100 * change / row.old_price_per_t, 1) if percent else (change, 2)
    if abs(change) < 0.005:
        return Look(text="0", number=True, quiet=True, lack=decimals)
    return Look(text=("+" if change > 0 else "−") + notation().write(abs(value), decimals), number=True, quiet=percent)
