"""What can be asked only when a whole price list is read: an ingredient that stands twice, a price that leaps."""

from __future__ import annotations

from collections import defaultdict
from collections.abc import Sequence

from blendapp.domain.library import Library
from blendapp.domain.list_rows import TAKE, Fate
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_checks import ask_about_twins, asked, leaps, near_power


def ask_about_duplicates(rows: Sequence[PriceRow], answers: Answers, library: Library) -> list[PriceRow]:
    """Every row of an ingredient that several rows price becomes a question that names the others.

    Prices that begin on different days to come, or that are for different sites, are no twins; those of different
    suppliers neither, where the ingredient's own supplier is among them, whose price then is in force. Where one row
    was answered to hold, others are ignored.
    """
    offered: dict[object, set[int | None]] = defaultdict(set)

    def place(row: PriceRow) -> tuple[object, ...]:
        begins = row.valid_from if row.valid_from is not None and row.valid_from > answers.today else None
        return row.ingredient_id, begins, row.site_id

    for one in rows:
        if one.ingredient_id is not None:
            offered[place(one)].add(one.supplier_id)

    def goods(row: PriceRow) -> object | None:
        if row.ingredient_id is None:
            return None
        own = library.ingredient(row.ingredient_id).supplier_id
        by_supplier = own is not None and own in offered[place(row)] and None not in offered[place(row)]
        return (*place(row), row.supplier_id if by_supplier else None)

    return ask_about_twins(
        rows, goods, answers, _("Left out, as answered: the price in {place} holds."),
        _("“{name}” has another price in {others}; say which holds."),
    )


def ask_about_leaps(rows: Sequence[PriceRow], answers: Answers, library: Library) -> list[PriceRow]:
    """An accepted price that differs from the old one by more than is usual for its class becomes a question."""
    return [
        _asked_about_leap(row, answers.largest_usual_change(_class_of(row, library)))
        if row.fate is Fate.ACCEPTED and answers.of_row(Asked.CHANGE, row.sheet, row.row) != TAKE else row
        for row in rows
    ]


def _class_of(row: PriceRow, library: Library) -> str:
    return "" if row.ingredient_id is None else library.ingredient(row.ingredient_id).class_name


def _asked_about_leap(row: PriceRow, largest: float) -> PriceRow:
    old, new = row.old_price_per_t, row.price_per_t
    if old is None or new is None or min(old, new) <= 0 or not leaps(old, new, largest):
        return row
    power = near_power(old, new)
    times = 10.0 ** abs(power)
    prices = {"old": f"{old:.2f}", "new": f"{new:.2f}"}
    if power > 0:
        text = _("The price of {new} per t is about {times} times the old one of {old}; check the unit.")
        return asked(row, text.format(times=f"{times:g}", **prices), Asked.CHANGE)
    if power < 0:
        text = _("The price of {new} per t is about a {times}th of the old one of {old}; check the unit.")
        return asked(row, text.format(times=f"{times:g}", **prices), Asked.CHANGE)
    text = _("The price moves from {old} to {new} per t, by {change} %; confirm it.")
    return asked(row, text.format(change=f"{(new - old) / old * 100:+.0f}", **prices), Asked.CHANGE)
