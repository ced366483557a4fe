"""What an approved version is worth today: its mix held against today's analyses, and weighed as a batch."""

from __future__ import annotations

import datetime
from collections.abc import Collection, Mapping
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from blendapp.domain import cautions
from blendapp.domain.batches import Batch, CleanOut
from blendapp.domain.figures import write_measure
from blendapp.domain.formulas import Limit, LimitKind, Subject
from blendapp.domain.library import Library
from blendapp.domain.mills import FormulaVersion, VersionState
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.records import Record
from blendapp.domain.results import LimitResult, Result, UnknownValue
from blendapp.domain.versions import Snapshot, alterations, approved_version, sound_snapshot
from blendapp.domain.wording import _
from blendapp.optimise.build.batch import broken_by, weighed
from blendapp.optimise.build.formula import build, unknown_values
from blendapp.services.batch import SEARCH_S, make_batch
from blendapp.services.makers import CannotBeMade, Makers
from blendapp.services.versions import approval_text, version_text

if TYPE_CHECKING:
    from blendapp.services.mill import Mill

# A limit counts as left only by more than this share of its bound beyond where the approved mix stood.
_MOVED = 1e-6


@dataclass(frozen=True)
class Left:
    """A limit that an approved mix no longer keeps. limit: with today's value; by: how far outside, in its unit, below
    0 under a minimum; was: the value when it was approved."""

    limit: LimitResult
    by: float
    was: float | None


@dataclass(frozen=True)
class Outside:
    """An approved version whose mix may not be fed as it stands. reasons: what else stands against it, in sentences."""

    formula_id: int
    formula: str
    version: int
    limits: tuple[Left, ...]
    reasons: tuple[str, ...]

    @property
    def sentences(self) -> list[str]:
        """One a limit and one a reason, with figures in the notation in use."""
        under = _("{limit} comes to {value} {unit}, {by} below its minimum of {bound}.")
        over = _("{limit} comes to {value} {unit}, {by} above its maximum of {bound}.")
        said = []
        for left in self.limits:
            limit = left.limit
            name = limit.name if limit.per is None else _("{name} over {per}").format(name=limit.name, per=limit.per)
            said.append((under if left.by < 0 else over).format(
                limit=name, value=write_measure(limit.value), unit=limit.unit, by=write_measure(abs(left.by)),
                bound=write_measure(limit.minimum if left.by < 0 else limit.maximum),
            ).replace("  ", " ").replace(" ,", ","))
        return [*said, *self.reasons]


def outside_their_limits(mill: Mill, on: datetime.date | None = None) -> list[Outside]:
    """The approved versions that have fallen outside their own limits since, by new analyses or corrected values.

    The approved amounts are held against the composition of today; nothing is solved. Versions that were altered
    outside the program are not among them, see domain.versions.alterations.
    """
    day, library = on or datetime.date.today(), mill.library
    altered = {(one.formula_id, one.number) for one in alterations(library)}
    standing: list[FormulaVersion] = [
        version for version in library.records["version"].values()
        if version.state is VersionState.APPROVED and (version.formula_id, version.number) not in altered
    ]
    found = (_outside(library, version, day) for version in sorted(standing, key=lambda version: version.formula_id))
    return [one for one in found if one is not None]


def _outside(library: Library, version: FormulaVersion, on: datetime.date) -> Outside | None:
    snapshot = Snapshot.decode(version.snapshot)
    today = as_today(library, snapshot, on)
    limits, unknown = _held(today, snapshot, on)
    left = [(limit, by) for limit in limits if (by := broken_by(limit)) is not None]
    then = {limit.index: limit for limit in _held(snapshot.library, snapshot, snapshot.on)[0]} if left else {}
    moved = tuple(
        Left(limit, by, then[limit.index].value)
        for limit, by in left
        if abs(by) - abs(broken_by(then[limit.index]) or 0.0) > _MOVED * abs(_bound(limit, by))
    )
    reasons = tuple(_reasons(library, today, snapshot, unknown))
    if not (moved or reasons):
        return None
    formula = library.formula(version.formula_id)
    return Outside(formula.id, formula.name, version.number, moved, reasons)


def _bound(limit: LimitResult, by: float) -> float:
    return (limit.minimum if by < 0 else limit.maximum) or 0.0


def _held(library: Library, snapshot: Snapshot, on: datetime.date) -> tuple[list[LimitResult], list[UnknownValue]]:
    """The limits of a snapshot at its amounts, by the composition of a library, and what is unknown there."""
    built = build(library, library.formula(snapshot.formula.id), on)
    limits, _nutrients = weighed(library, built, snapshot.amounts, sum(snapshot.amounts.values()))
    own = {limit.id for limit in snapshot.limits}
    used = {library.ingredient(key).name for key in snapshot.amounts}
    unknown = [one for one in unknown_values(library, built) if one.ingredient in used]
    return [limit for limit in limits if limit.limit_id in own], unknown


def _reasons(library: Library, today: Library, snapshot: Snapshot, unknown: list[UnknownValue]) -> list[str]:
    """What forbids the approved mix today besides a limit."""
    assert snapshot.result is not None
    found = [text for text in (_forbidden(today, snapshot),) if text]
    admitted = {i.id for i in library.admitted(snapshot.formula)} | _listed(snapshot)
    for key in snapshot.amounts:
        ingredient = today.ingredient(key)
        if key in library.records["ingredient"] and key not in admitted:
            text = _("{ingredient} is no longer used unless a formula lists it.")
            found.append(text.format(ingredient=ingredient.name))
    known_then = {(one.ingredient, one.nutrient) for one in snapshot.result.unknown}
    for one in unknown:
        if one.unsafe and (one.ingredient, one.nutrient) not in known_then:
            text = _("{nutrient} of {ingredient} is unknown now and counts as 0.")
            found.append(text.format(nutrient=one.nutrient, ingredient=one.ingredient))
    return found


def _listed(snapshot: Snapshot) -> set[int]:
    return {key for limit in snapshot.limits if limit.kind is LimitKind.INGREDIENT for key in limit.subject.ids}


def _forbidden(today: Library, snapshot: Snapshot) -> str | None:
    """The forbidding caution on an approved mix by what is known of its ingredients today, or None."""
    used = [today.ingredient(key) for key in snapshot.amounts]
    formula = snapshot.formula
    return cautions.forbidden_by_admission(formula, used) or cautions.forbidden_in_mix(
        formula, today, list(snapshot.amounts.items())
    )


def as_today(
    library: Library, snapshot: Snapshot, on: datetime.date, also: Collection[int] = ()
) -> Library:
    """A library in which the formula stands as it was approved, among the ingredients, analyses and prices of today.

    It holds what the approved mix and its limits need, and the plant with its bins, lots and steps. also: identifiers
    of ingredients of today that a batch holds besides. An ingredient or nutrient that is gone today, and
    a price that is not known today, are as they were then.
    """
    records, then = library.records, snapshot.library
    named = {i.id for limit in snapshot.limits for s in (limit.subject, limit.per)
             if s is not None and not s.is_nutrient for i in then.members(s)}
    keys = sorted({*snapshot.amounts, *named, *also})
    nutrients = {**records["nutrient"], **{n.id: n for n in snapshot.nutrients}}
    values: list[Record] = []
    quotes: list[Record] = []
    for key in keys:
        gone = key not in records["ingredient"]
        now = then.values_of(key) if gone else library.values_of(key)
        values += now.values()
        if not gone:  # a nutrient that is gone took its values along
            values += [v for n, v in then.values_of(key).items() if n not in records["nutrient"]]
        quote = library.quote_in_force(key, on, snapshot.site_id)
        priced = quote if quote is not None and quote.price is not None else None
        kept = priced or next((q for q in snapshot.quotes if q.ingredient_id == key), None)
        if kept is not None:
            quotes.append(replace(kept, valid_from=None, valid_to=None, site_id=None))
    made = Library.of({
        "mill": [library.mill], "formula": [snapshot.formula], "nutrient": nutrients.values(),
        "ingredient": [records["ingredient"].get(key) or then.ingredient(key) for key in keys],
        "limit": snapshot.limits, "value": values, "quote": quotes,
        **{kind: library.all(kind) for kind in ("site", "scale", "mixer", "bin", "lot", "mixing_step")},
    })
    return _admitting(made, snapshot)


def _admitting(library: Library, snapshot: Snapshot) -> Library:
    """The library with every ingredient of the mix admitted, so that its amounts count whatever became of its tags."""
    admitted = {i.id for i in library.admitted(snapshot.formula)}
    first = max((limit.id for limit in snapshot.limits), default=0) + 1
    lacking = [key for key in snapshot.amounts if key not in admitted]
    extra = [
        Limit(first + place, snapshot.formula.id, LimitKind.INGREDIENT, Subject.ingredients(key))
        for place, key in enumerate(lacking)
    ]
    if not extra:
        return library
    return Library.of({**{kind: library.all(kind) for kind in library.records}, "limit": [*snapshot.limits, *extra]})


def approved_batch(
    library: Library, formula_id: int, order_kg: float, on: datetime.date, *,
    fixed: Mapping[int, float] | None = None, rework: Mapping[int, float] | None = None,
    mixer_id: int | None = None, previous_feed: str | None = None, clean_out: CleanOut | None = None,
    time_limit_s: float = SEARCH_S,
) -> Batch:
    """The batches of the approved version in its approved proportions, whatever the draft has become since.

    Its limits are those approved, held against today's composition: one that breaks is named on the batch. What made
    ingredients are made of, and whether they are opened, is as the mill has it today. See make_batch for the others;
    raises Refused where no version is approved (or the one that was is altered), and as make_batch does.
    """
    version = approved_version(library, formula_id)
    if version is None:
        raise Refused(_not_approved(library, formula_id))
    snapshot = sound_snapshot(library, version)
    assert snapshot.result is not None
    makers = Makers(library, on)
    today = as_today(library, snapshot, on, _besides(makers, snapshot, rework or {}))
    _limits, unknown = _held(today, snapshot, on)
    forbidden = _forbidden(today, snapshot)
    answer: Result = replace(snapshot.result, on=on, unknown=tuple(unknown))
    if forbidden is not None:
        answer = replace(answer, cost=None, cause=forbidden)
    batch = make_batch(
        today, formula_id, order_kg, on, result=answer, fixed=fixed, rework=rework, mixer_id=mixer_id,
        previous_feed=previous_feed, clean_out=clean_out, time_limit_s=time_limit_s, makers=makers,
    )
    own = {limit.id for limit in snapshot.limits}
    return replace(
        batch, version=version_text(version), draft=False, approved_by=approval_text(version),
        limits=tuple(limit for limit in batch.limits if limit.limit_id in own),
    )


def _not_approved(library: Library, formula_id: int) -> list[Problem]:
    """Why a formula has no approved version: each that other hands have changed or taken out, else that none was."""
    name = library.formula(formula_id).name
    altered = [Problem(one.text, Place(record=name)) for one in alterations(library, formula_id)]
    none = _("{formula} has no approved version; prepare and approve one.")
    return altered or [Problem(none.format(formula=name))]


def _besides(makers: Makers, snapshot: Snapshot, rework: Mapping[int, float]) -> set[int]:
    """Identifiers of the ingredients of today that a batch of a version holds besides its mix."""
    found = set(rework)
    for key in snapshot.amounts:
        try:
            found.update(makers.opened(key) if makers.is_opened(key) else ())
        except CannotBeMade:  # the batch itself says so
            continue
    return found & makers.library.records["ingredient"].keys()
