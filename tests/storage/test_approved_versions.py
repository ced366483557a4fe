"""The file itself takes no change of an approved version, and one version of a number."""

from __future__ import annotations

import datetime
from dataclasses import replace

import pytest

from blendapp.domain.mills import Acknowledgement, FormulaVersion, VersionState
from blendapp.domain.records import Change, added, removed
from blendapp.storage import Cause, MillFileError, Store

MOMENT = datetime.datetime(2026, 3, 9, 8, 0, tzinfo=datetime.UTC)


@pytest.fixture
def approved(store: Store) -> FormulaVersion:
    (version,) = store.read_all()["version"]
    assert version.state is VersionState.APPROVED
    return version


def draft(number: int = 2, id_: int = 2) -> FormulaVersion:
    return FormulaVersion(id_, 1, number, VersionState.DRAFT, "{}", MOMENT, "Ann", 1)


def test_a_change_of_an_approved_version_or_of_what_it_was_approved_with_is_not_stored(
    store: Store, approved: FormulaVersion
) -> None:
    before, entries = store.dump(), len(store.entries())
    (taken,) = store.read_all()["acknowledgement"]
    for changes in (
        [Change(approved, replace(approved, snapshot="[]"))], [Change(approved, replace(approved, seal=""))],
        [Change(approved, replace(approved, state=VersionState.DRAFT))], [removed(taken), removed(approved)],
        [Change(taken, replace(taken, reason="else"))], [added(Acknowledgement(2, 1, "c", "r", 1, MOMENT))],
        [added(draft()), Change(approved, replace(approved, number=7))],
    ):
        with pytest.raises(ValueError, match="never changes"):
            store.write("alter", changes, role="record")
    assert (store.dump(), len(store.entries())) == (before, entries)


def test_a_draft_becomes_approved_and_the_former_superseded_in_one_write(
    store: Store, approved: FormulaVersion
) -> None:
    store.write("prepare", [added(draft())])
    new = replace(draft(), state=VersionState.APPROVED, approved=MOMENT, seal="cd" * 32)
    taken = Acknowledgement(2, 2, "caution", "reason", 1, MOMENT, "Ann")
    old = replace(approved, state=VersionState.SUPERSEDED)
    store.write("approve", [Change(approved, old), Change(draft(), new), added(taken)], role="record")
    found = store.read_all()
    assert found["version"] == [old, new]
    assert taken in found["acknowledgement"]
    with pytest.raises(ValueError, match="never changes"):
        store.write("in force again", [Change(old, approved)])


def test_the_second_of_two_writes_from_one_reading_is_refused(store: Store) -> None:
    store.write("prepare", [added(draft())])
    first, second = (replace(draft(), state=VersionState.APPROVED, note=note, seal="x") for note in ("one", "two"))
    store.write("approve", [Change(draft(), first)], role="record")
    with pytest.raises(MillFileError) as refused:
        store.write("approve", [Change(draft(), second)], role="record")
    assert refused.value.cause is Cause.CHANGED_ELSEWHERE
    assert first in store.read_all()["version"]


def test_a_number_stands_once_within_a_formula(store: Store) -> None:
    store.write("prepare", [added(draft())])
    with pytest.raises(MillFileError) as refused:
        store.write("prepare", [added(draft(id_=3))])
    assert refused.value.cause is Cause.INCONSISTENT
    store.write("of another formula", [added(replace(draft(id_=3), formula_id=2))])
