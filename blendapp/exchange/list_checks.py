"""What can be asked only when a whole list is read, of prices or of analyses: twins, and figures that leap."""

from __future__ import annotations

import math
from collections import defaultdict
from collections.abc import Callable, Sequence
from dataclasses import replace
from typing import TypeVar

from blendapp.domain.list_rows import LEAVE_OUT, TAKE, Fate, ListRow, Question
from blendapp.domain.mills import Asked
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers

# A figure this near to 10, 100 or 1000 times the old one has more likely lost its decimal sign or its unit.
_NEAR_POWER = 0.35

# Twins that a question names one by one.
MOST_NAMED = 6

Row = TypeVar("Row", bound=ListRow)


def ask_about_twins(
    rows: Sequence[Row], key_of: Callable[[Row], object | None], answers: Answers, left_out: str, text: str
) -> list[Row]:
    """Every row that stands for the same as another one becomes a question that names the others.

    key_of: what a row stands for, None where it has no twin. Where one row was answered to hold, others are ignored.
    left_out: the reason then, with {place} of the row that holds. text: the question, with {name} and {others}.
    """
    places: dict[object, list[Row]] = defaultdict(list)
    for row in rows:
        if row.fate in (Fate.ACCEPTED, Fate.QUESTION) and (key := key_of(row)) is not None:
            places[key].append(row)
    held = {
        key: [twin for twin in twins if answers.of_row(Asked.TWIN, twin.sheet, twin.row) == TAKE]
        for key, twins in places.items() if len(twins) > 1
    }
    found = []
    for row in rows:
        key = key_of(row) if row.fate in (Fate.ACCEPTED, Fate.QUESTION) else None
        found.append(_asked_about_twins(row, places[key], held[key], left_out, text) if key in held else row)
    return found


def _asked_about_twins(row: Row, twins: list[Row], held: list[Row], left_out: str, text: str) -> Row:
    if len(held) == 1:
        if held[0] is row:
            return row
        reason = left_out.format(place=place_of(held[0], row))
        return replace(row, fate=Fate.IGNORED, reason=reason, questions=())
    named = [place_of(twin, row) for twin in twins[: MOST_NAMED + 1] if twin is not row][:MOST_NAMED]
    if len(twins) - 1 > len(named):
        named.append(_("{count} more").format(count=len(twins) - 1 - len(named)))
    others = _(" and ").join(named)
    return asked(row, text.format(name=row.ingredient, others=others), Asked.TWIN)


def place_of(row: ListRow, seen_from: ListRow) -> str:
    """A row as the reader of another row finds it."""
    if row.sheet == seen_from.sheet:
        return _("row {row}").format(row=row.row)
    return _("row {row} of the sheet “{sheet}”").format(row=row.row, sheet=row.sheet)


def asked(row: Row, text: str, question: Asked) -> Row:
    """The row as a question, with one more reason."""
    earlier = row.reason if row.fate is Fate.QUESTION else ""
    more = Question(question, "", text, (TAKE, LEAVE_OUT))
    return replace(
        row, fate=Fate.QUESTION, reason=f"{earlier} {text}".strip(), questions=(*row.questions, more)
    )


def leaps(old: float | None, new: float | None, largest: float) -> bool:
    """Whether a figure moves by more than a fraction of the old one; False where either is unknown."""
    return old is not None and new is not None and abs(new - old) > largest * abs(old) * (1 + 1e-9)


def near_power(old: float, new: float) -> int:
    """The power of ten, from -3 to 3, that a figure is about that many times the old one; 0 for none."""
    if old * new <= 0:
        return 0
    power = round(math.log10(new / old))
    near = abs(power) <= 3 and abs(math.log(new / old / 10.0**power)) < _NEAR_POWER
    return power if near else 0
