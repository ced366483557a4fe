"""Versions of a formula: what a snapshot holds, how an approved one is sealed, and how an alteration shows.

The seal is a SHA-256 over everything that was approved and over the seal before it, so that a version which is changed
in the file by other hands no longer fits. It tells of a change; it is no secret, and does not stop who recomputes it.
"""

from __future__ import annotations

import datetime
import hashlib
import json
from collections.abc import Callable, Collection, Iterable, Mapping
from dataclasses import dataclass, replace
from functools import cached_property, lru_cache
from typing import Any

from blendapp.domain import plain
from blendapp.domain.formulas import Formula, Limit
from blendapp.domain.ingredients import Ingredient, Value
from blendapp.domain.library import Library
from blendapp.domain.mills import Acknowledgement, FormulaVersion, MillInfo, VersionState
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change, Record, from_plain, to_plain
from blendapp.domain.results import Result
from blendapp.domain.wording import _

_SHAPE = 1  # of the plain form of a snapshot
_TABLES = ("ingredient", "nutrient", "limit", "value", "quote")


@dataclass(frozen=True)
class Snapshot:
    """All that the answer to a formula rests on, on one day, and that answer.

    admitted: identifiers of the ingredients that the formula may use; ingredients holds them and those that a limit
    names besides. whole: those whose whole composition is here, for the nutrients of the mix; of the others only the
    nutrients that a limit is about. quotes: the one in force of every admitted ingredient that has a price. result:
    None where only what goes into an answer is of interest.
    """

    on: datetime.date
    site_id: int | None
    mill: MillInfo
    formula: Formula
    admitted: frozenset[int]
    whole: frozenset[int]
    ingredients: tuple[Ingredient, ...]
    nutrients: tuple[Nutrient, ...]
    limits: tuple[Limit, ...]
    values: tuple[Value, ...]
    quotes: tuple[Quote, ...]
    result: Result | None = None

    @staticmethod
    def of(
        library: Library, formula_id: int, on: datetime.date, site_id: int | None = None,
        result: Result | None = None, whole: Collection[int] = (),
    ) -> Snapshot:
        """The snapshot of a formula as it stands. whole: see above; the mix of `result` is always among them."""
        formula, limits = library.formula(formula_id), library.limits(formula_id)
        admitted = frozenset(i.id for i in library.admitted(formula))
        if result is not None:
            whole = {*whole, *(i.ingredient_id for i in result.mix)}
        in_whole = admitted & frozenset(whole)
        limited = _limited(limits)
        named = {
            i.id for limit in limits for s in (limit.subject, limit.per)
            if s is not None and not s.is_nutrient for i in library.members(s)
        }
        values = [
            value
            for ingredient_id in sorted(admitted)
            for nutrient_id, value in sorted(library.values_of(ingredient_id).items())
            if nutrient_id in limited or ingredient_id in in_whole
        ]
        nutrients = limited | {value.nutrient_id for value in values}
        quotes = [library.quote_in_force(ingredient_id, on, site_id) for ingredient_id in sorted(admitted)]
        return Snapshot(
            on, site_id, library.mill, formula, admitted, in_whole,
            tuple(library.ingredient(key) for key in sorted(admitted | named)),
            tuple(library.nutrient(key) for key in sorted(nutrients)), tuple(limits), tuple(values),
            tuple(quote for quote in quotes if quote is not None and quote.price is not None), result,
        )

    @cached_property
    def library(self) -> Library:
        """A library of this snapshot alone. The same formula has the same answer there as it had then."""
        return Library.of({
            "mill": [self.mill], "formula": [self.formula], "ingredient": self.ingredients,
            "nutrient": self.nutrients, "limit": self.limits, "value": self.values, "quote": self.quotes,
        })

    @property
    def amounts(self) -> dict[int, float]:
        """The mix by ingredient identifier: fractions of a blend, or kg per day."""
        return {} if self.result is None else {i.ingredient_id: i.amount or 0.0 for i in self.result.mix}

    def speaks_of(self, ingredient_id: int, nutrient_id: int) -> bool:
        """Whether the snapshot would hold the value of a nutrient in an ingredient if it were known."""
        return ingredient_id in self.admitted and (
            ingredient_id in self.whole or nutrient_id in self._limited_nutrients
        )

    @cached_property
    def _limited_nutrients(self) -> frozenset[int]:
        return frozenset(_limited(self.limits))

    def encode(self) -> str:
        """The snapshot as one JSON text, equal for equal snapshots."""
        records = {"ingredient": self.ingredients, "nutrient": self.nutrients, "limit": self.limits,
                   "value": self.values, "quote": self.quotes}
        return plain.canonical({
            "shape": _SHAPE,
            "on": self.on.isoformat(),
            "site_id": self.site_id,
            "mill": to_plain(self.mill),
            "formula": to_plain(self.formula),
            "admitted": sorted(self.admitted),
            "whole": sorted(self.whole),
            "result": plain.to_plain(self.result),
            **{kind: _table(found) for kind, found in records.items()},
        })

    @staticmethod
    def decode(text: str) -> Snapshot:
        """The snapshot behind its text. Raises ValueError for any other text."""
        try:
            return _decoded(text)
        except (KeyError, IndexError, TypeError, AttributeError) as error:
            raise ValueError(f"This is no snapshot of a formula: {error!r}") from error


def _limited(limits: Iterable[Limit]) -> set[int]:
    """Identifiers of the nutrients that limits are about."""
    subjects = [s for limit in limits for s in (limit.subject, limit.per)]
    return {key for s in subjects if s is not None and s.is_nutrient for key in s.ids}


def _table(records: Iterable[Record]) -> dict[str, Any]:
    """Records with the names of their fields said once, and each source, of which hundreds may be the same, once."""
    rows = [to_plain(record) for record in records]
    columns = list(rows[0]) if rows else []
    sources = list(dict.fromkeys(row["source"] for row in rows if "source" in row))
    place = {text: number for number, text in enumerate(sources)}
    return {
        "columns": columns,
        "sources": sources,
        "rows": [[place[row[name]] if name == "source" else row[name] for name in columns] for row in rows],
    }


def _records(kind: str, table: Mapping[str, Any]) -> tuple[Any, ...]:
    """The records of a kind behind their table."""
    found = []
    for row in table["rows"]:
        fields = dict(zip(table["columns"], row, strict=True))
        if "source" in fields:
            fields["source"] = table["sources"][fields["source"]]
        found.append(from_plain(kind, fields))
    return tuple(found)


@lru_cache(maxsize=128)
def _decoded(text: str) -> Snapshot:
    found = json.loads(text)
    if found["shape"] != _SHAPE:
        raise ValueError(f"A snapshot of shape {found['shape']} is not known here.")
    tables = {kind: _records(kind, found[kind]) for kind in _TABLES}
    return Snapshot(
        datetime.date.fromisoformat(found["on"]), found["site_id"], from_plain("mill", found["mill"]),
        from_plain("formula", found["formula"]), frozenset(found["admitted"]), frozenset(found["whole"]),
        tables["ingredient"], tables["nutrient"], tables["limit"], tables["value"], tables["quote"],
        plain.from_plain(Result, found["result"]),
    )


# -- which versions there are


def versions_of(library: Library, formula_id: int) -> list[FormulaVersion]:
    """The versions of a formula on record, in the order of their numbers."""
    found = [v for v in library.records["version"].values() if v.formula_id == formula_id]
    return sorted(found, key=lambda version: version.number)


def in_state(library: Library, formula_id: int, state: VersionState) -> FormulaVersion | None:
    """The version of a formula in a state; the last of several."""
    return next((v for v in reversed(versions_of(library, formula_id)) if v.state is state), None)


def draft_number(library: Library, formula_id: int) -> int:
    """The number that the draft of a formula has: its own once it was prepared, else one above the last."""
    found = versions_of(library, formula_id)
    if not found:
        return 1
    return found[-1].number + (found[-1].state is not VersionState.DRAFT)


def acknowledgements_of(library: Library, version_id: int) -> list[Acknowledgement]:
    return [a for a in library.all("acknowledgement") if a.version_id == version_id]


# -- seals


def seal(version: FormulaVersion, acknowledgements: Iterable[Acknowledgement], former: str) -> str:
    """The seal of an approved version, in hexadecimal. former: the seal of the version approved before it, or "".

    The state is not part of it, since a later approval makes it superseded; `alterations` holds the states.
    """
    content = to_plain(replace(version, state=VersionState.APPROVED, snapshot=_digest(version.snapshot), seal=""))
    content["acknowledgements"] = [to_plain(a) for a in sorted(acknowledgements, key=lambda a: a.id)]
    content["former"] = former
    return _digest(plain.canonical(content))


def _digest(text: str) -> str:
    return hashlib.sha256(text.encode("utf-8", "surrogatepass")).hexdigest()


@dataclass(frozen=True)
class Alteration:
    """A version that is not as it was approved, or is gone: by its number, and what is wrong in a sentence."""

    formula_id: int
    number: int
    text: str


def alterations(library: Library, formula_id: int | None = None) -> list[Alteration]:
    """What other hands have changed in the approved and superseded versions of a formula, or of all."""
    chosen: dict[int, list[FormulaVersion]] = {}
    for version in library.records["version"].values():
        if formula_id in (None, version.formula_id):
            chosen.setdefault(version.formula_id, []).append(version)
    if not chosen:
        return []
    taken_on: dict[int, list[Acknowledgement]] = {}
    for one in library.records["acknowledgement"].values():
        taken_on.setdefault(one.version_id, []).append(one)
    return [
        Alteration(key, number, text)
        for key in sorted(chosen)
        for number, text in _altered(library, sorted(chosen[key], key=lambda v: v.number), taken_on)
    ]


def _altered(
    library: Library, versions: list[FormulaVersion], taken_on: Mapping[int, list[Acknowledgement]]
) -> list[tuple[int, str]]:
    record = library.records["formula"].get(versions[0].formula_id)
    name = "" if record is None else record.name
    changed = _("Version {number} of {formula} was altered outside this program: its seal does not fit. It counts as "
                "not approved; prepare and approve it anew.")
    missing = _("Version {number} of {formula} is missing: it was taken out of the file outside this program.")
    found: list[tuple[int, str]] = []
    numbers = {v.number for v in versions}
    for number in range(1, max(numbers) + 1):
        if number not in numbers:
            found.append((number, missing.format(number=number, formula=name)))
    last_approved = next((v for v in reversed(versions) if v.state is not VersionState.DRAFT), None)
    former = ""
    for version in versions:
        if version.state is VersionState.DRAFT:
            sound = version is versions[-1] and version.approved is None and not version.seal
        else:
            sound = (version.state is VersionState.APPROVED) is (version is last_approved)
            sound = sound and seal(version, taken_on.get(version.id, ()), former) == version.seal
            former = version.seal
        if not sound:
            found.append((version.number, changed.format(number=version.number, formula=name)))
    return sorted(found)


def sound_snapshot(library: Library, version: FormulaVersion) -> Snapshot:
    """The snapshot of a version, after its seal was held against it. Raises Refused where it was altered."""
    for one in alterations(library, version.formula_id):
        if one.number == version.number:
            raise Refused(one.text)
    try:
        return Snapshot.decode(version.snapshot)
    except ValueError as error:
        text = _("Version {number} of {formula} cannot be read; prepare and approve it anew.")
        name = library.formula(version.formula_id).name
        raise Refused(text.format(number=version.number, formula=name)) from error


# -- what may change


def forbidden(changes: Iterable[Change], standing: Callable[[int], FormulaVersion | None]) -> str | None:
    """Why an edit may not be made because it changes what was approved, in a sentence, or None.

    standing: the version of an identifier as it was before the edit. Of an approved version nothing may change but
    that it becomes superseded; of its acknowledgements nothing, and none may come. No version goes, not even a draft,
    so that a gap among them shows.
    """
    for change in changes:
        if change.kind == "version" and change.before is not None:
            number = change.before.number
            if change.after is None:
                text = _("Version {number} is on record and never goes; prepare its formula anew instead.")
                return text.format(number=number)
            if not _may_become(change.before, change.after):
                text = _("Version {number} was approved and never changes; edit the formula and prepare a new version.")
                return text.format(number=number)
        if change.kind == "acknowledgement":
            for record in (change.before, change.after):
                version = None if record is None else standing(record.version_id)
                if version is not None and version.state is not VersionState.DRAFT:
                    text = _("What was acknowledged for version {number} when it was approved never changes.")
                    return text.format(number=version.number)
    return None


def _may_become(before: FormulaVersion, after: FormulaVersion) -> bool:
    if before.state is VersionState.DRAFT:
        return True
    return before.state is VersionState.APPROVED and after == replace(before, state=VersionState.SUPERSEDED)


def approved_version(library: Library, formula_id: int) -> FormulaVersion | None:
    """The approved version of a formula; None without one, or where it was altered outside the program."""
    version = in_state(library, formula_id, VersionState.APPROVED)
    bad = {one.number for one in alterations(library, formula_id)}
    return None if version is None or version.number in bad else version


def approved_amounts(library: Library, formula_id: int) -> dict[int, float] | None:
    """The amounts of the approved version by ingredient identifier (fractions of a blend, or kg per day), or None.

    Between equally cheap mixes the one nearest to these is chosen.
    """
    version = approved_version(library, formula_id)
    return None if version is None else sound_snapshot(library, version).amounts
