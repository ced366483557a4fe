"""What can be asked only when a whole price list is read: an ingredient that stands twice, a price that leaps."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Sequence
from dataclasses import replace

from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT, TAKE, Fate, Question
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers

# A price this near to 10, 100 or 1000 times the old one has more likely lost its decimal sign or its unit.
_NEAR_POWER = 0.35


def ask_about_duplicates(rows: Sequence[PriceRow], answers: Answers) -> list[PriceRow]:
    """Every row of an ingredient that several rows price becomes a question that names the others.

    Prices that begin on different days to come are no twins. Where one row was answered to hold, others are ignored.
    """
    places: dict[object, list[PriceRow]] = defaultdict(list)
    for row in rows:
        if row.ingredient_id is not None and row.fate in (Fate.ACCEPTED, Fate.QUESTION):
            places[_goods(row, answers)].append(row)
    return [
        _asked_about_twins(row, places[_goods(row, answers)], answers)
        if row.fate in (Fate.ACCEPTED, Fate.QUESTION) and len(places.get(_goods(row, answers), ())) > 1
        else row
        for row in rows
    ]


def _goods(row: PriceRow, answers: Answers) -> object:
    begins = row.valid_from if row.valid_from is not None and row.valid_from > answers.today else None
    return row.ingredient_id, begins


def _asked_about_twins(row: PriceRow, twins: list[PriceRow], answers: Answers) -> PriceRow:
    held = [twin for twin in twins if answers.of_row(Asked.TWIN, twin.sheet, twin.row) == TAKE]
    if len(held) == 1:
        if held[0] is row:
            return row
        text = _("Left out, as answered: the price in {place} holds.").format(place=place_of(held[0], row))
        return replace(row, fate=Fate.IGNORED, reason=text, questions=())
    others = _(" and ").join(place_of(twin, row) for twin in twins if twin is not row)
    text = _("“{name}” has another price in {others}; say which holds.").format(name=row.ingredient, others=others)
    return asked(row, text, Asked.TWIN)


def place_of(row: PriceRow, seen_from: PriceRow) -> str:
    """A row as the reader of another row finds it."""
    if row.sheet == seen_from.sheet:
        return _("row {row}").format(row=row.row)
    return _("row {row} of the sheet “{sheet}”").format(row=row.row, sheet=row.sheet)


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
    if old is None or new is None or old <= 0 or new <= 0 or abs(new - old) <= largest * old * (1 + 1e-9):
        return row
    power = round(math.log10(new / old))
    times = 10.0 ** abs(power)
    near = power != 0 and abs(power) <= 3 and abs(math.log(new / old / 10.0**power)) < _NEAR_POWER
    prices = {"old": f"{old:.2f}", "new": f"{new:.2f}"}
    if near and power > 0:
        text = _("The price of {new} per t is about {times} times the old one of {old}; check the unit.")
        return asked(row, text.format(times=f"{times:g}", **prices), Asked.CHANGE)
    if near:
        text = _("The price of {new} per t is about a {times}th of the old one of {old}; check the unit.")
        return asked(row, text.format(times=f"{times:g}", **prices), Asked.CHANGE)
    text = _("The price moves from {old} to {new} per t, by {change} %; confirm it.")
    return asked(row, text.format(change=f"{(new - old) / old * 100:+.0f}", **prices), Asked.CHANGE)


def asked(row: PriceRow, text: str, question: Asked) -> PriceRow:
    """The row as a question, with one more reason."""
    earlier = row.reason if row.fate is Fate.QUESTION else ""
    more = Question(question, "", text, (TAKE, LEAVE_OUT))
    return replace(
        row, fate=Fate.QUESTION, reason=f"{earlier} {text}".strip(), questions=(*row.questions, more)
    )
