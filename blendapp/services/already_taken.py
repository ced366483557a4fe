"""What of a price list is on record already from this very file, so that only what was settled since is taken."""

from __future__ import annotations

from dataclasses import replace

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import ListAbout, PriceList
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.domain.quotes import Quote
from blendapp.domain.wording import _


def without_taken(library: Library, reading: PriceListReading) -> PriceListReading:
    """The reading with every row left alone whose very price stands on record from the same file.

    The same file is one of the same SHA-256; a list of it that was rolled back or undone does not count. A row whose
    price, unit, days, terms, site or supplier is another than on record stays as it was read.
    """
    lists: dict[int, PriceList] = {
        one.id: one for one in library.all("price_list")
        if one.digest == reading.digest and one.withdrawn is None and one.about is ListAbout.PRICES
    }
    if not lists:
        return reading
    quotes: list[Quote] = [one for one in library.all("quote") if one.price_list_id in lists]
    # Where the list names no first day, it was the day of taking.
    known = {_what(one, one.valid_from): one for one in quotes}
    known |= {_what(one, None): one for one in quotes if one.valid_from == one.recorded}

    def narrowed(row: PriceRow) -> PriceRow:
        if row.fate not in (Fate.ACCEPTED, Fate.QUESTION) or row.currency or None in (row.ingredient_id, row.price):
            return row
        site = reading.site_id if row.site_id is None else row.site_id
        supplier = reading.supplier_id if row.supplier_id is None else row.supplier_id
        quote = known.get((row.ingredient_id, row.price, row.per, row.bushel_lb, site, supplier, row.terms,
                           row.valid_from, row.valid_to))
        if quote is None or quote.price_list_id is None:
            return row
        day = lists[quote.price_list_id].applied.date().isoformat()
        reason = _("Taken on {day} from this very file.").format(day=day)
        return replace(row, fate=Fate.IGNORED, reason=reason, questions=())

    return replace(reading, rows=tuple(narrowed(row) for row in reading.rows))


def _what(quote: Quote, first: object) -> tuple[object, ...]:
    return (quote.ingredient_id, quote.price, quote.per, quote.bushel_lb, quote.site_id, quote.supplier_id, quote.terms,
            first, quote.valid_to)
