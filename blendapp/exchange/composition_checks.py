"""What can be asked only when a whole list of analyses is read: a sample that stands twice, values on two bases."""

from __future__ import annotations

import datetime
import statistics
from collections import defaultdict
from collections.abc import Sequence
from dataclasses import replace

from blendapp.domain.composition_rows import CompositionRow, ReadValue
from blendapp.domain.ingredients import Basis
from blendapp.domain.library import Library
from blendapp.domain.list_rows import TAKE, Fate
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.notation import PLAIN
from blendapp.domain.plant import Lot
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_checks import ask_about_twins, asked, near_power, place_of

# From so many samples of an ingredient on one that lies a power of ten off the others is seen.
_LEAST_FOR_MEDIAN = 3


def ask_about_same_samples(rows: Sequence[CompositionRow], answers: Answers) -> list[CompositionRow]:
    """Rows of one ingredient, sample number and day that give the same nutrient are a question.

    Several samples of an ingredient are none, nor is one sample whose analyses stand in several tables.
    """
    seen: set[tuple[object, int | None]] = set()
    twice = set()
    for row in rows:
        if row.fate in (Fate.ACCEPTED, Fate.QUESTION):
            own = {(_sample(row), value.nutrient_id) for value in row.values}
            if not seen.isdisjoint(own):
                twice.add(_sample(row))
            seen |= own

    def twin(row: CompositionRow) -> object | None:
        return _sample(row) if row.ingredient_id is not None and _sample(row) in twice else None

    return ask_about_twins(
        rows, twin, answers, _("Left out, as answered: the sample in {place} holds."),
        _("This sample of “{name}” stands in {others} too; say which holds."),
    )


def _sample(row: CompositionRow) -> tuple[int | None, str, datetime.date | None]:
    return row.ingredient_id, fold(row.sample), row.sampled


def ask_about_known_samples(
    rows: Sequence[CompositionRow], answers: Answers, library: Library
) -> list[CompositionRow]:
    """A sample of which an earlier list brought the same nutrient is a question."""
    known: dict[object, Lot] = {}
    for lot in library.all("lot"):
        if lot.price_list_id is not None:
            known[lot.ingredient_id, fold(lot.name), lot.received] = lot
    held = {(value.lot_id, value.nutrient_id) for value in library.all("lot_value")}
    held |= {(lot.id, None) for lot in known.values() if lot.dry_matter_percent is not None}
    found = []
    for row in rows:
        lot = known.get(_sample(row)) if row.sample else None
        if lot is not None and not any((lot.id, value.nutrient_id) in held for value in row.values):
            lot = None
        kept = None if lot is None else library.records["price_list"].get(lot.price_list_id or 0)
        taken = answers.of_row(Asked.TWIN, row.sheet, row.row) == TAKE
        if row.fate not in (Fate.ACCEPTED, Fate.QUESTION) or kept is None or taken:
            found.append(row)
            continue
        text = _("The sample “{sample}” of “{name}” is on record from {file}; say whether it counts again.")
        said = text.format(sample=row.sample, name=row.ingredient, file=kept.file_name)
        found.append(asked(row, said, Asked.TWIN))
    return found


def ask_about_two_bases(rows: Sequence[CompositionRow]) -> list[CompositionRow]:
    """Samples of one ingredient give a nutrient on one basis, unless each on the other one has its own dry matter."""
    first: dict[tuple[int | None, int | None], tuple[CompositionRow, ReadValue]] = {}
    found = []
    for row in rows:
        if row.fate is Fate.ACCEPTED:
            for value in row.values:
                earlier, one = first.setdefault((row.ingredient_id, value.nutrient_id), (row, value))
                if one.basis is not value.basis and row.dry_matter_percent is None:
                    text = _("{nutrient} is {basis} here and {other} in {place}; give both on one basis.")
                    said = text.format(
                        nutrient=value.nutrient, basis=_on(value.basis), other=_on(one.basis),
                        place=place_of(earlier, row),
                    )
                    row = replace(row, fate=Fate.QUESTION, reason=f"{row.reason} {said}".strip())
                    break
        found.append(row)
    return found


def _on(basis: Basis) -> str:
    return _("as fed") if basis is Basis.AS_FED else _("on dry matter")


def ask_about_outliers(rows: Sequence[CompositionRow], answers: Answers) -> list[CompositionRow]:
    """Where nothing is known of an ingredient yet: a sample that is a power of ten off the others is a question."""
    amounts: dict[object, list[float]] = defaultdict(list)
    for row in rows:
        if row.fate is Fate.ACCEPTED:
            for value in row.values:
                amounts[row.ingredient_id, value.nutrient_id, value.unit, value.basis].append(value.amount)
    middles = {key: statistics.median(of) for key, of in amounts.items() if len(of) >= _LEAST_FOR_MEDIAN}
    found = []
    for row in rows:
        taken = answers.of_row(Asked.CHANGE, row.sheet, row.row) == TAKE
        for value in row.values if row.fate is Fate.ACCEPTED and not taken else ():
            middle = middles.get((row.ingredient_id, value.nutrient_id, value.unit, value.basis))
            if value.old is None and middle and near_power(middle, value.amount):
                text = _("{nutrient} of {value} {unit} is far from the {middle} of the other samples; check the unit.")
                said = text.format(
                    nutrient=value.nutrient, value=PLAIN.write_short(value.amount, 4), unit=value.unit,
                    middle=PLAIN.write_short(middle, 4),
                )
                row = asked(row, said, Asked.CHANGE)
        found.append(row)
    return found


def day_after(rows: Sequence[CompositionRow], today: datetime.date) -> list[CompositionRow]:
    """A sample of a day to come is a question: day and month may have changed places."""
    return [
        replace(row, fate=Fate.QUESTION, reason=_("The sample is of {day}, which is to come; correct the day.").format(
            day=row.sampled.isoformat()
        ))
        if row.fate is Fate.ACCEPTED and row.sampled is not None and row.sampled > today else row
        for row in rows
    ]
