"""Snapshots, seals, and what shows of a version that other hands have changed."""

from __future__ import annotations

import datetime
import json
from collections.abc import Callable
from dataclasses import fields, replace
from typing import Any

import pytest

from blendapp.domain import versions
from blendapp.domain.formulas import Admits
from blendapp.domain.ingredients import Basis, Origin
from blendapp.domain.library import Library
from blendapp.domain.mills import Acknowledgement, FormulaVersion, Person, VersionState
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change, added, removed
from blendapp.domain.versions import Snapshot, seal
from tests.mills import TODAY, Maker

MOMENT = datetime.datetime(2026, 3, 2, 8, 15, 30, 123456, tzinfo=datetime.UTC)
DRAFT, APPROVED, SUPERSEDED = VersionState.DRAFT, VersionState.APPROVED, VersionState.SUPERSEDED


def library() -> Library:
    make = Maker()
    make.nutrient("Crude protein")
    make.nutrient("Ash")
    make.ingredient("Maize", 200.0, {"Crude protein": 8.5, "Ash": 1.2}, class_name="Cereals")
    make.ingredient("Oats", 150.0, {"Crude protein": 11.0, "Ash": 2.9}, class_name="Cereals")
    make.ingredient("Meal", 400.0, {"Crude protein": 46.0}, basis=Basis.DRY_MATTER, dry_matter_percent=89.0)
    feed = make.formula("Mash", admits=Admits.LISTED)
    make.formula("Other")
    make.limit(feed, "nutrient", "Crude protein", 18.0)
    make.limit(feed, "ingredient", "Maize")
    make.limit(feed, "ingredient", "Meal")
    make.limit(feed, "group", ["Maize", "Oats"], None, 80.0)
    return make.library


def test_a_snapshot_comes_back_equal_from_its_text_and_gives_the_same_text() -> None:
    held = library()
    held.apply([Change(v := held.value(1, 1), replace(v, source="Lab “7” / é", origin=Origin.MEASURED, n=3, sd=0.25,
                                                      date=TODAY))])
    snapshot = Snapshot.of(held, 1, TODAY, whole={1})
    text = snapshot.encode()
    assert Snapshot.decode(text) == snapshot
    assert Snapshot.decode(text).encode() == text
    assert json.loads(text)["on"] == "2026-03-02"


def test_a_snapshot_holds_what_is_admitted_and_names_what_limits_name() -> None:
    snapshot = Snapshot.of(library(), 1, TODAY, whole={1})
    assert snapshot.admitted == {1, 3}
    assert [i.name for i in snapshot.ingredients] == ["Maize", "Oats", "Meal"]
    assert [(v.ingredient_id, v.nutrient_id) for v in snapshot.values] == [(1, 1), (1, 2), (3, 1)]
    assert [i.name for i in snapshot.library.admitted(snapshot.formula)] == ["Maize", "Meal"]
    assert snapshot.speaks_of(1, 2)
    assert not snapshot.speaks_of(3, 2)
    assert not snapshot.speaks_of(2, 1)


@pytest.mark.parametrize("text", ["", "{}", "[]", '{"shape": 2}', '{"shape": 1, "on": "x"}', "null"])
def test_a_text_that_is_no_snapshot_is_a_value_error(text: str) -> None:
    with pytest.raises(ValueError):  # noqa: PT011 - the caller says it in a sentence
        Snapshot.decode(text)


def approved(number: int, former: str, state: VersionState = APPROVED, formula_id: int = 1) -> FormulaVersion:
    version = FormulaVersion(
        formula_id * 100 + number, formula_id, number, state, Snapshot.of(library(), formula_id, TODAY).encode(),
        MOMENT, "Ann", 1, MOMENT, "Ben", 2, "vet", "seen",
    )
    return replace(version, seal=seal(version, acknowledged(version), former))


def acknowledged(version: FormulaVersion) -> list[Acknowledgement]:
    return [Acknowledgement(version.id * 10 + n, version.id, f"caution {n}", "known", 2, MOMENT, "Ben") for n in (1, 2)]


def with_versions() -> Library:
    """Two superseded versions, an approved one and a draft of formula 1; one approved of formula 2."""
    held = library()
    held.apply(map(added, [Person(1, "Ann"), Person(2, "Ben")]))
    former = ""
    for number, state in ((1, SUPERSEDED), (2, SUPERSEDED), (3, APPROVED)):
        version = approved(number, former, state)
        held.apply(map(added, [version, *acknowledged(version)]))
        former = version.seal
    held.apply([added(FormulaVersion(104, 1, 4, DRAFT, "{}", MOMENT, "Ann", 1))])
    other = approved(1, "", APPROVED, 2)
    held.apply(map(added, [other, *acknowledged(other)]))
    return held


def test_what_was_approved_and_left_alone_shows_no_alteration() -> None:
    held = with_versions()
    assert versions.alterations(held) == []
    assert versions.alterations(Library()) == []
    assert [v.number for v in versions.versions_of(held, 1)] == [1, 2, 3, 4]
    assert versions.draft_number(held, 1) == 4
    assert versions.draft_number(held, 2) == 2
    assert versions.draft_number(held, 77) == 1


OTHER: dict[str, Any] = {
    "formula_id": 2, "number": 9, "snapshot": "{}", "made": MOMENT.replace(year=2025), "made_by": "Eve",
    "made_by_id": 2, "approved": MOMENT.replace(year=2025), "approved_by": "Eve", "approved_by_id": 1,
    "capacity": "owner", "note": "", "seal": "0" * 64, "id": 199,
}


@pytest.mark.parametrize("field", [f.name for f in fields(FormulaVersion) if f.name != "state"])
@pytest.mark.parametrize("number", [1, 3])
def test_every_field_of_an_approved_version_is_under_its_seal(field: str, number: int) -> None:
    held = with_versions()
    version = held.records["version"][100 + number]
    held.apply([Change(version, replace(version, **{field: OTHER[field]}))] if field != "id" else [
        removed(version), added(replace(version, id=199))])
    found = versions.alterations(held)
    assert found, field
    assert all("outside this program" in one.text for one in found)


def change(kind: str, record_id: int, **new: Any) -> Callable[[Library], list[Change]]:
    def of(held: Library) -> list[Change]:
        record = held.records[kind][record_id]
        return [Change(record, replace(record, **new))]

    return of


TAMPERED: dict[str, tuple[Callable[[Library], list[Change]], set[int]]] = {
    "a reason": (change("acknowledgement", 1031, reason="because"), {3}),
    "who took it on": (change("acknowledgement", 1031, by="Eve"), {3}),
    "an acknowledgement gone": (lambda x: [removed(x.records["acknowledgement"][1012])], {1}),
    "one more": (lambda x: [added(Acknowledgement(9, 102, "c", "r", 1, MOMENT))], {2}),
    "a version gone from the middle": (
        lambda x: [*(removed(a) for a in versions.acknowledgements_of(x, 102)), removed(x.records["version"][102])],
        {2, 3}),
    "an old one in force again": (change("version", 102, state=APPROVED), {2}),
    "the one in force no more": (change("version", 103, state=SUPERSEDED), {3}),
    "approved made a draft": (change("version", 103, state=DRAFT), {3}),
    "the draft made approved": (change("version", 104, state=APPROVED), {3, 4}),
    "the draft given an approver": (change("version", 104, approved=MOMENT), {4}),
}


@pytest.mark.parametrize("name", TAMPERED)
def test_what_other_hands_do_to_versions_shows_by_its_number(name: str) -> None:
    tamper, numbers = TAMPERED[name]
    held = with_versions()
    held.apply(tamper(held))
    found = versions.alterations(held)
    assert {(one.formula_id, one.number) for one in found} >= {(1, number) for number in numbers}
    assert all(one.formula_id == 1 and "Mash" in one.text for one in found)
    assert versions.alterations(held, 2) == []


def test_an_altered_version_is_not_read() -> None:
    held = with_versions()
    assert versions.sound_snapshot(held, held.records["version"][103]).formula.name == "Mash"
    held.apply(change("version", 103, snapshot=Snapshot.of(held, 2, TODAY).encode())(held))
    with pytest.raises(Refused, match="Version 3 of Mash was altered"):
        versions.sound_snapshot(held, held.records["version"][103])


def test_a_draft_whose_text_is_damaged_is_refused_with_a_sentence() -> None:
    held = with_versions()
    with pytest.raises(Refused, match="Version 4 of Mash cannot be read"):
        versions.sound_snapshot(held, held.records["version"][104])


def test_only_superseding_may_change_an_approved_version() -> None:
    held = with_versions()
    standing = held.records["version"].get
    one, two, draft = (held.records["version"][key] for key in (103, 102, 104))
    allowed = [
        Change(one, replace(one, state=SUPERSEDED)), Change(draft, replace(draft, snapshot="[]")),
        Change(draft, replace(draft, state=APPROVED, seal="x")), added(replace(draft, id=5, number=5)),
        added(Acknowledgement(9, 104, "c", "r", 1, MOMENT)), added(Acknowledgement(9, 555, "c", "r", 1, MOMENT)),
    ]
    for some in allowed:
        assert versions.forbidden([some], standing) is None, some
    taken = held.records["acknowledgement"][1031]
    refused = [
        removed(draft), removed(one), removed(two), removed(taken), Change(one, replace(one, state=DRAFT)),
        Change(two, replace(two, state=APPROVED)),
        Change(one, replace(one, state=SUPERSEDED, note="more")),
        Change(taken, replace(taken, by="Eve")),
        *(Change(one, replace(one, **{name: value})) for name, value in OTHER.items() if name != "id"),
        added(Acknowledgement(9, 103, "c", "r", 1, MOMENT)), Change(taken, replace(taken, version_id=104)),
    ]
    for some in refused:
        sentence = versions.forbidden([*allowed, some], standing)
        assert sentence is not None, some
        assert "never" in sentence
