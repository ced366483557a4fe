"""Versions of a formula: which one stands, preparing a draft, approving it, and what differs.

What only preparing and approving need is imported there: the window asks for versions before it shows.
"""

from __future__ import annotations

import datetime
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from blendapp.domain import cautions
from blendapp.domain.differences import ENTERED, Area, Difference, differences
from blendapp.domain.library import Library
from blendapp.domain.mills import Acknowledgement, FormulaVersion, Person, VersionState
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.records import Change, added
from blendapp.domain.results import Result, Status
from blendapp.domain.versions import (
    Snapshot,
    acknowledgements_of,
    alterations,
    approved_version,
    draft_number,
    in_state,
    seal,
    sound_snapshot,
    versions_of,
)
from blendapp.domain.wording import _

if TYPE_CHECKING:
    from blendapp.optimise.build.composition import Composition
    from blendapp.services.mill import Mill


@dataclass(frozen=True)
class Standing:
    """What a formula, as it stands today, is: its approved version, or a draft.

    number: of that version or draft. draft: whether anything entered differs from the approved version, or there is
    none. text: "version 3" or "draft 4"; approved_by: "NAME, CAPACITY, DATE", "" of a draft. altered: a sentence for
    every version that was altered outside the program; such a version counts as not approved.
    """

    number: int
    draft: bool
    text: str
    approved_by: str
    altered: tuple[str, ...]


def standing(
    library: Library, formula_id: int, on: datetime.date | None = None, *, site_id: int | None = None,
    result: Result | None = None,
) -> Standing:
    """Whether a formula stands as it was approved, found by comparing and not by a mark.

    on: the day of the prices, today unless given. result: an answer that must have the approved amounts as well.
    """
    altered = alterations(library, formula_id)
    texts = tuple(one.text for one in altered)
    number = draft_number(library, formula_id)
    draft = Standing(number, True, _("draft {number}").format(number=number), "", texts)
    version = in_state(library, formula_id, VersionState.APPROVED)
    if version is None or any(one.number == version.number for one in altered):
        return draft
    snapshot = sound_snapshot(library, version)
    now = Snapshot.of(library, formula_id, on or datetime.date.today(), site_id, result, snapshot.whole)
    if any(row.area in ENTERED or row.area is Area.MIX for row in differences(snapshot, now)):
        return draft
    return Standing(version.number, False, version_text(version), approval_text(version), texts)


def altered(mill: Mill) -> list[str]:
    """What to say when a mill is opened: every version that other hands have changed or taken out, a sentence each."""
    found = [one.text for one in alterations(mill.library)]
    last = max(mill.library.records["version"], default=0)
    if mill.store.next_ids()["version"] != last + 1:
        found.append(_("The last version on record was taken out of the file outside this program."))
    return found


def current_version(library: Library, formula_id: int, on: datetime.date | None = None) -> str:
    """ "version 3" where a formula stands as it was approved, else "draft 4"."""
    return standing(library, formula_id, on).text


def version_text(version: FormulaVersion) -> str:
    return _("version {number}").format(number=version.number)


def approval_text(version: FormulaVersion) -> str:
    """Who approved a version: name, capacity and day."""
    day = "" if version.approved is None else version.approved.astimezone().date().isoformat()
    return ", ".join(part for part in (version.approved_by, version.capacity, day) if part)


def approved_result(library: Library, formula_id: int) -> Result | None:
    """The answer that was approved, as it was, or None."""
    version = approved_version(library, formula_id)
    return None if version is None else sound_snapshot(library, version).result


def differences_from_approved(
    library: Library, formula_id: int, on: datetime.date, *, site_id: int | None = None, result: Result | None = None
) -> tuple[Difference, ...] | None:
    """What is different today from the approved version; None where there is none.

    result: today's answer; without it mix, cost and cautions are left out. Raises Refused for an altered version.
    """
    version = in_state(library, formula_id, VersionState.APPROVED)
    if version is None:
        return None
    snapshot = sound_snapshot(library, version)
    return differences(snapshot, Snapshot.of(library, formula_id, on, site_id, result, snapshot.whole))


def differences_between(library: Library, before_id: int, after_id: int) -> tuple[Difference, ...]:
    """What is different between two versions on record. Raises Refused for one that was altered."""
    before, after = (sound_snapshot(library, library.records["version"][key]) for key in (before_id, after_id))
    return differences(before, after)


# -- preparing


@dataclass(frozen=True)
class WorkedDraft:
    """A draft that may be put on record: what it holds, and who prepared it."""

    snapshot: Snapshot
    person: Person


def prepare(
    mill: Mill, formula_id: int, person_id: int, password: str, on: datetime.date | None = None, *,
    site_id: int | None = None,
) -> FormulaVersion:
    """Put the draft of a formula on record as a snapshot, worked out afresh, for another person to approve.

    A draft that was prepared before gives way to it under the same number. Raises Refused where the formula has no
    checked, proven answer, the person is not who they say, or nothing has changed since the last approval.
    """
    return record_draft(mill, work_out_draft(
        mill.library, formula_id, person_id, password, on, site_id=site_id, composition=mill.composition))


def work_out_draft(
    library: Library, formula_id: int, person_id: int, password: str, on: datetime.date | None = None, *,
    site_id: int | None = None, composition: Composition | None = None,
) -> WorkedDraft:
    """All of prepare that takes time, on a library that a thread may have to itself. Raises Refused as prepare does."""
    from blendapp.services.people import identified

    person = identified(library, person_id, password)
    now = _snapshot(library, formula_id, on or datetime.date.today(), site_id, composition)
    state = standing(library, formula_id, now.on, site_id=site_id, result=now.result)
    if not state.draft:
        text = _("{version} of {formula} is approved, and nothing has changed since.")
        raise Refused(text.format(version=state.text.capitalize(), formula=now.formula.name))
    return WorkedDraft(now, person)


def record_draft(mill: Mill, worked: WorkedDraft) -> FormulaVersion:
    """Put a draft on record. Raises Refused where the mill has changed since it was worked out."""
    now, person = worked.snapshot, worked.person
    formula_id = now.formula.id
    _refuse_changed(mill.library, now, person)
    before = in_state(mill.library, formula_id, VersionState.DRAFT)
    draft = FormulaVersion(
        mill.new_id("version") if before is None else before.id, formula_id, draft_number(mill.library, formula_id),
        VersionState.DRAFT, now.encode(), datetime.datetime.now(datetime.UTC), person.name, person.id,
    )
    what = _("Prepare draft {number} of {formula}").format(number=draft.number, formula=now.formula.name)
    mill.record(what, [Change(before, draft)])
    return draft


def _refuse_changed(library: Library, worked: Snapshot, person: Person) -> None:
    """Raises Refused where what was worked out is no longer what the mill holds."""
    if library.records["person"].get(person.id) != person:
        raise Refused(_("{name} was changed meanwhile; do it again.").format(name=person.name))
    if worked.formula.id not in library.records["formula"]:
        raise Refused(_("{formula} was removed meanwhile.").format(formula=worked.formula.name))
    now = Snapshot.of(library, worked.formula.id, worked.on, worked.site_id, worked.result, worked.whole)
    rows = differences(worked, now)
    if rows:
        text = _("{formula} was changed while it was worked out (different: {what}); do it again.")
        raise Refused(text.format(formula=worked.formula.name, what=_first_of(rows)))


def _first_of(rows: Sequence[Difference]) -> str:
    return ", ".join(dict.fromkeys(f"{_(row.area)}: {row.name}" for row in rows[:3]))


def _snapshot(
    library: Library, formula_id: int, on: datetime.date, site_id: int | None, composition: Composition | None
) -> Snapshot:
    """The formula with an answer that may be approved. Raises Refused where it has none."""
    from blendapp.services.formulate import FailedCertificate, formulate

    name = library.formula(formula_id).name
    try:
        result = formulate(library, formula_id, on, composition, site_id=site_id)
    except FailedCertificate as failure:
        raise Refused(Problem(str(failure), Place(record=name))) from failure
    if result.status is not Status.OPTIMAL or not result.mix:
        text = _("{formula} has no answer that could be approved ({reason}).")
        reason = result.cause or (_(result.status) if result.status is not Status.OPTIMAL else _("a mix of nothing"))
        raise Refused(text.format(formula=name, reason=reason))
    return Snapshot.of(library, formula_id, on, site_id, result)


def to_acknowledge(result: Result) -> tuple[str, ...]:
    """The cautions of an answer, unsafe unknowns among them, that an approval must take on one by one.

    The caution that stands on every answer is not among them: the approval itself is what it asks for.
    """
    general = cautions.general_caution()
    return tuple(dict.fromkeys(text for text in result.cautions if text != general))


# -- approving


@dataclass(frozen=True)
class WorkedApproval:
    """An approval that may be put on record. now: what the formula came to when it was worked out; said: the capacity
    and the note; given: the reason for every caution."""

    draft: FormulaVersion
    now: Snapshot
    person: Person
    said: tuple[str, str]
    given: Mapping[str, str]


def approve(
    mill: Mill, version_id: int, person_id: int, password: str, *, capacity: str = "", note: str = "",
    reasons: Mapping[str, str] | None = None, on: datetime.date | None = None,
) -> FormulaVersion:
    """Approve a prepared draft, and supersede the version approved before it, in one transaction.

    capacity: in which the person approves, as on record unless given. reasons: for every text of to_acknowledge the
    reason why it is taken on. Raises Refused with all that stands against it: the person (unknown, not active, wrong
    password, the one who prepared it), a draft that is no longer what the formula comes to, a caution without a
    reason; and MillFileError where another window or program was first.
    """
    return record_approval(mill, work_out_approval(
        mill.library, version_id, person_id, password, capacity=capacity, note=note, reasons=reasons, on=on,
        composition=mill.composition))


def work_out_approval(
    library: Library, version_id: int, person_id: int, password: str, *, capacity: str = "", note: str = "",
    reasons: Mapping[str, str] | None = None, on: datetime.date | None = None, composition: Composition | None = None,
) -> WorkedApproval:
    """All of approve that takes time, on a library that a thread may have to itself. Raises Refused as approve does."""
    from blendapp.services.people import identified

    draft: FormulaVersion | None = library.records["version"].get(version_id)
    if draft is None or draft.state is not VersionState.DRAFT:
        raise Refused(_("This is no draft that was prepared; prepare the formula first."))
    person = identified(library, person_id, password)
    snapshot = sound_snapshot(library, draft)
    now = _hold_against_now(library, draft, snapshot, on or datetime.date.today(), composition)
    assert snapshot.result is not None
    given = {text: (reasons or {}).get(text, "").strip() for text in to_acknowledge(snapshot.result)}
    problems = [*_person_faults(library, draft, person, capacity), *_reason_faults(given, reasons or {})]
    if problems:
        raise Refused(problems)
    return WorkedApproval(draft, now, person, (capacity.strip() or person.capacity, note.strip()), given)


def record_approval(mill: Mill, worked: WorkedApproval) -> FormulaVersion:
    """Put an approval on record. Raises Refused where the mill has changed since it was worked out, and MillFileError
    where another window or program was first."""
    if mill.library.records["version"].get(worked.draft.id) != worked.draft:
        text = _("Draft {number} was prepared again or approved meanwhile; look at it before you approve.")
        raise Refused(text.format(number=worked.draft.number))
    _refuse_changed(mill.library, worked.now, worked.person)
    return _approved(mill, worked.draft, worked.person, worked.said, worked.given)


def _hold_against_now(
    library: Library, draft: FormulaVersion, snapshot: Snapshot, on: datetime.date, composition: Composition | None
) -> Snapshot:
    """What a formula comes to now. Raises Refused where its draft is something else."""
    now = _snapshot(library, draft.formula_id, on, snapshot.site_id, composition)
    rows = differences(snapshot, now)
    if rows:
        text = _("Draft {number} is not what {formula} comes to now (different: {what}); prepare it again.")
        raise Refused(text.format(number=draft.number, formula=snapshot.formula.name, what=_first_of(rows)))
    return now


def _person_faults(library: Library, draft: FormulaVersion, person: Person, capacity: str) -> list[Problem]:
    found = []
    if person.id == draft.made_by_id and not library.mill.one_person_approves:
        text = _("{name} prepared this draft; another person must approve it.")
        found.append(Problem(text.format(name=person.name), Place(column="person", record=person.name)))
    if not (capacity.strip() or person.capacity):
        text = _("Say in which capacity {name} approves.")
        found.append(Problem(text.format(name=person.name), Place(column="capacity", record=person.name)))
    return found


def _reason_faults(given: Mapping[str, str], reasons: Mapping[str, str]) -> list[Problem]:
    missing = _("This caution needs a reason why it is taken on: {caution}")
    unknown = _("This caution does not stand on the draft, so it cannot be taken on: {caution}")
    found = [Problem(missing.format(caution=text)) for text, reason in given.items() if not reason]
    return found + [Problem(unknown.format(caution=text)) for text in reasons if text not in given]


def _approved(
    mill: Mill, draft: FormulaVersion, person: Person, said: tuple[str, str], given: Mapping[str, str]
) -> FormulaVersion:
    moment = datetime.datetime.now(datetime.UTC)
    taken_on = [
        Acknowledgement(mill.new_id("acknowledgement"), draft.id, text, reason, person.id, moment, person.name)
        for text, reason in given.items()
    ]
    earlier = [v for v in versions_of(mill.library, draft.formula_id) if v.state is not VersionState.DRAFT]
    former_seal = earlier[-1].seal if earlier else ""
    version = replace(
        draft, state=VersionState.APPROVED, approved=moment, approved_by=person.name, approved_by_id=person.id,
        capacity=said[0], note=said[1],
    )
    stands_on = [*acknowledgements_of(mill.library, draft.id), *taken_on]
    version = replace(version, seal=seal(version, stands_on, former_seal))
    changes = [
        *(Change(v, replace(v, state=VersionState.SUPERSEDED)) for v in earlier if v.state is VersionState.APPROVED),
        Change(draft, version), *map(added, taken_on),
    ]
    name = mill.library.formula(draft.formula_id).name
    mill.record(_("Approve version {number} of {formula}").format(number=version.number, formula=name), changes)
    return version
