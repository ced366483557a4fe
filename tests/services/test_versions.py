"""Draft, approved, superseded: what may be approved, by whom, and what stands after it."""

from __future__ import annotations

import sqlite3
import threading
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest

from blendapp.domain.differences import Area
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.mills import FormulaVersion, VersionState
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change, added, removed
from blendapp.domain.results import Result, Status
from blendapp.domain.versions import Snapshot, acknowledgements_of, alterations, approved_amounts
from blendapp.optimise import certificate
from blendapp.services import batch, edits, people, versions
from blendapp.services import formulate as formulating
from blendapp.services.formulate import formulate
from blendapp.services.mill import Mill, MillFileError
from tests.mills import TODAY
from tests.services.approving import ANN_WORD, BARLEY, BEN_WORD, LAMB, MAIZE, MASH, approve, feed_library, staffed

Opened = Callable[[Library], Mill]
Reopened = Callable[[Mill], Mill]
pytestmark = pytest.mark.usefixtures("quick_hashing")


@pytest.fixture
def mill(opened: Opened) -> Mill:
    found = opened(feed_library())
    staffed(found)
    return found


def ids(mill: Mill) -> tuple[int, int]:
    return mill.library.named("person", "Ann").id, mill.library.named("person", "Ben").id


def prepare(mill: Mill, formula_id: int = MASH) -> FormulaVersion:
    return versions.prepare(mill, formula_id, ids(mill)[0], ANN_WORD, TODAY)


def stands(mill: Mill, formula_id: int = MASH) -> str:
    return versions.current_version(mill.library, formula_id, TODAY)


# -- the life of a version


def test_a_formula_is_draft_1_until_it_is_approved_and_then_version_1(mill: Mill, reopened: Reopened) -> None:
    assert stands(mill) == "draft 1"
    draft = prepare(mill)
    assert (draft.number, draft.state, draft.made_by, stands(mill)) == (1, VersionState.DRAFT, "Ann", "draft 1")
    version = versions.approve(mill, draft.id, ids(mill)[1], BEN_WORD, note=" for spring ", on=TODAY)
    state = versions.standing(mill.library, MASH, TODAY)
    day = version.approved.astimezone().date().isoformat() if version.approved else ""
    assert (state.number, state.draft, state.text) == (1, False, "version 1")
    assert state.approved_by == f"Ben, production manager, {day}"
    assert (version.snapshot, version.note, version.approved_by_id) == (draft.snapshot, "for spring", ids(mill)[1])
    again = reopened(mill)
    assert again.library.records["version"] == {version.id: version}
    assert alterations(again.library) == []
    assert stands(again) == "version 1"
    assert [e.role for e in again.store.entries()][-2:] == ["record", "record"]


def test_an_edit_makes_the_next_draft_and_taking_it_back_the_approved_version_again(mill: Mill) -> None:
    approve(mill)
    edits.set_bound(mill, 1, "minimum", 18.5)
    assert stands(mill) == "draft 2"
    rows = versions.differences_from_approved(mill.library, MASH, TODAY, result=formulate(mill.library, MASH, TODAY))
    assert rows is not None
    assert [(r.area, r.name, r.before, r.after) for r in rows[:1]] == [(Area.LIMITS, "Crude protein", 18.0, 18.5)]
    assert {r.area for r in rows} == {Area.LIMITS, Area.MIX, Area.COST}
    mill.undo()
    assert stands(mill) == "version 1"
    assert versions.differences_from_approved(mill.library, MASH, TODAY) == ()
    assert stands(mill, LAMB) == "draft 1"
    assert versions.differences_from_approved(mill.library, LAMB, TODAY) is None


EDITS: list[Callable[[Mill], Any]] = [
    lambda m: edits.set_price(m, BARLEY, 120.0, TODAY),
    lambda m: edits.set_value(m, MAIZE, 2, 0.27),
    lambda m: edits.change(m, m.library.ingredient(MAIZE), dry_matter_percent=87.0),
    lambda m: edits.add_ingredient(m, "Peas"),
    lambda m: edits.change(m, m.library.formula(MASH), stage="grower"),
    lambda m: edits.admit(m, MASH, MAIZE),
]


@pytest.mark.parametrize("edit", EDITS)
def test_whatever_an_answer_rests_on_makes_a_draft_when_edited(mill: Mill, edit: Callable[[Mill], Any]) -> None:
    approve(mill)
    edit(mill)
    assert stands(mill) == "draft 2"


def test_a_new_approval_supersedes_the_former_and_both_stay_as_they_were(mill: Mill, reopened: Reopened) -> None:
    first = approve(mill)
    edits.set_bound(mill, 1, "minimum", 18.5)
    second = approve(mill, note="more protein")
    assert (second.number, stands(mill)) == (2, "version 2")
    assert mill.library.records["version"][first.id] == replace(first, state=VersionState.SUPERSEDED)
    rows = versions.differences_between(mill.library, first.id, second.id)
    assert (Area.LIMITS, 18.0, 18.5) in [(r.area, r.before, r.after) for r in rows]
    assert alterations(reopened(mill).library) == []


def test_preparing_again_replaces_the_draft_under_its_number(mill: Mill) -> None:
    first = prepare(mill)
    edits.set_bound(mill, 1, "minimum", 18.5)
    second = prepare(mill)
    assert (second.id, second.number) == (first.id, 1)
    assert second.snapshot != first.snapshot
    assert len(mill.library.records["version"]) == 1


def test_nothing_new_is_not_prepared_again(mill: Mill) -> None:
    approve(mill)
    with pytest.raises(Refused, match="Version 1 of Mash is approved, and nothing has changed since"):
        prepare(mill)


def test_the_snapshot_alone_gives_the_answer_that_was_approved(mill: Mill) -> None:
    for formula_id in (MASH, LAMB):
        snapshot = Snapshot.decode(approve(mill, formula_id).snapshot)
        again = formulate(snapshot.library, formula_id, TODAY)
        assert snapshot.result is not None
        assert again.cost == pytest.approx(snapshot.result.cost, rel=1e-12)
        assert {i.ingredient_id: i.amount for i in again.mix} == pytest.approx(snapshot.amounts, abs=1e-12)


def test_the_approved_amounts_and_answer_stay_whatever_the_draft_becomes(mill: Mill) -> None:
    assert approved_amounts(mill.library, MASH) is None
    assert versions.approved_result(mill.library, MASH) is None
    before = formulate(mill.library, MASH, TODAY)
    approve(mill)
    edits.set_price(mill, MAIZE, 900.0, TODAY)
    amounts = approved_amounts(mill.library, MASH)
    assert amounts == {i.ingredient_id: i.amount for i in before.mix}
    assert versions.approved_result(mill.library, MASH) == before


# -- what is refused


def test_who_prepared_a_draft_may_not_approve_it_unless_the_mill_says_so(mill: Mill) -> None:
    draft, ann = prepare(mill), ids(mill)[0]
    with pytest.raises(Refused, match="Ann prepared this draft; another person must approve it"):
        versions.approve(mill, draft.id, ann, ANN_WORD, on=TODAY)
    edits.set_mill(mill, one_person_approves=True)
    assert versions.approve(mill, draft.id, ann, ANN_WORD, on=TODAY).approved_by == "Ann"


def test_a_wrong_password_neither_prepares_nor_approves(mill: Mill) -> None:
    ann, ben = ids(mill)
    with pytest.raises(Refused, match="not the password of Ann"):
        versions.prepare(mill, MASH, ann, BEN_WORD, TODAY)
    draft = prepare(mill)
    for word in ("", ANN_WORD):
        with pytest.raises(Refused, match="not the password of Ben"):
            versions.approve(mill, draft.id, ben, word, on=TODAY)
    people.change_person(mill, ben, active=False)
    with pytest.raises(Refused, match="no longer active"):
        versions.approve(mill, draft.id, ben, BEN_WORD, on=TODAY)
    assert mill.library.records["version"] == {draft.id: draft}


def test_a_capacity_is_asked_for_where_none_is_on_record(mill: Mill) -> None:
    draft, ben = prepare(mill), ids(mill)[1]
    people.change_person(mill, ben, capacity="")
    with pytest.raises(Refused, match="in which capacity Ben approves"):
        versions.approve(mill, draft.id, ben, BEN_WORD, on=TODAY)
    assert versions.approve(mill, draft.id, ben, BEN_WORD, capacity="stand-in", on=TODAY).capacity == "stand-in"


def test_every_caution_needs_its_own_reason_and_is_kept_with_it(mill: Mill) -> None:
    edits.set_value(mill, BARLEY, 3, None)
    draft, ben = prepare(mill, LAMB), ids(mill)[1]
    result = Snapshot.decode(draft.snapshot).result
    assert result is not None
    copper, ash = versions.to_acknowledge(result)
    assert "adds copper to a feed for sheep" in copper
    assert ash.startswith("Ash of Barley is unknown")
    cases = (({}, [copper, ash]), ({copper: "tested flock"}, [ash]), ({copper: " ", ash: "low"}, [copper]))
    for reasons, missing in cases:
        with pytest.raises(Refused) as refused:
            versions.approve(mill, draft.id, ben, BEN_WORD, reasons=reasons, on=TODAY)
        assert [p.text.partition(": ")[2] for p in refused.value.problems] == missing
    with pytest.raises(Refused, match="does not stand on the draft"):
        versions.approve(mill, draft.id, ben, BEN_WORD, reasons={copper: "a", ash: "b", "other": "c"}, on=TODAY)
    assert mill.library.records["acknowledgement"] == {}
    version = versions.approve(mill, draft.id, ben, BEN_WORD, reasons={copper: "tested flock", ash: "low"}, on=TODAY)
    kept = acknowledgements_of(mill.library, version.id)
    assert [(a.caution, a.reason, a.by) for a in kept] == [(copper, "tested flock", "Ben"), (ash, "low", "Ben")]


def test_all_that_stands_against_an_approval_is_said_together(mill: Mill) -> None:
    draft, ann = prepare(mill, LAMB), ids(mill)[0]
    people.change_person(mill, ann, capacity="")
    with pytest.raises(Refused) as refused:
        versions.approve(mill, draft.id, ann, ANN_WORD, on=TODAY)
    assert len(refused.value.problems) == 3


STALE: list[tuple[Callable[[Mill], Any], str]] = [
    (lambda m: edits.set_bound(m, 1, "minimum", 18.5), "limits: Crude protein"),
    (lambda m: edits.set_price(m, MAIZE, 199.0, TODAY), "prices: Maize"),
    (lambda m: edits.set_value(m, MAIZE, 1, 9.1), "composition: Maize"),
    (lambda m: edits.change(m, m.library.ingredient(MAIZE), tags=(Tag.ADDED_SELENIUM,)), "admitted ingredients: Maize"),
]


@pytest.mark.parametrize(("edit", "what"), STALE)
def test_a_draft_that_is_no_longer_what_the_formula_comes_to_is_not_approved(
    mill: Mill, edit: Callable[[Mill], Any], what: str
) -> None:
    draft, ben = prepare(mill), ids(mill)[1]
    edit(mill)
    with pytest.raises(Refused, match="Draft 1 is not what Mash comes to now") as refused:
        versions.approve(mill, draft.id, ben, BEN_WORD, on=TODAY)
    assert what in str(refused.value)
    mill.undo()
    assert versions.approve(mill, draft.id, ben, BEN_WORD, on=TODAY).number == 1


def test_a_formula_without_an_answer_is_neither_prepared_nor_approved(mill: Mill) -> None:
    draft = prepare(mill)
    edits.set_bound(mill, 1, "minimum", 60.0)
    with pytest.raises(Refused, match="Mash has no answer that could be approved"):
        versions.approve(mill, draft.id, ids(mill)[1], BEN_WORD, on=TODAY)
    with pytest.raises(Refused, match="Mash has no answer that could be approved"):
        prepare(mill)


def test_a_forbidding_caution_cannot_be_acknowledged_away(mill: Mill) -> None:
    edits.change(mill, mill.library.ingredient(MAIZE), tags=(Tag.RUMINANT_PROTEIN,))
    edits.admit(mill, LAMB, MAIZE)
    with pytest.raises(Refused, match="prohibited in feed for sheep"):
        prepare(mill, LAMB)


def test_a_search_that_was_stopped_is_not_approved(mill: Mill, monkeypatch: pytest.MonkeyPatch) -> None:
    def stopped(*given: Any, **named: Any) -> Result:
        return replace(formulate(*given, **named), status=Status.STOPPED)

    draft = prepare(mill)
    monkeypatch.setattr(formulating, "formulate", stopped)
    with pytest.raises(Refused, match=r"no answer that could be approved \(stopped\)"):
        prepare(mill)
    with pytest.raises(Refused, match=r"no answer that could be approved \(stopped\)"):
        versions.approve(mill, draft.id, ids(mill)[1], BEN_WORD, on=TODAY)


def test_an_answer_that_fails_its_check_is_not_approved(mill: Mill, monkeypatch: pytest.MonkeyPatch) -> None:
    def fails(*_given: Any) -> None:
        raise certificate.FailedCheck("a row is broken")

    draft = prepare(mill)
    monkeypatch.setattr(certificate, "check", fails)
    for attempt in (
        lambda: prepare(mill), lambda: versions.approve(mill, draft.id, ids(mill)[1], BEN_WORD, on=TODAY),
    ):
        with pytest.raises(Refused, match="failed its check"):
            attempt()
    assert mill.library.records["version"] == {draft.id: draft}


def test_what_is_approved_already_is_not_approved_again(mill: Mill) -> None:
    version = approve(mill)
    for version_id in (version.id, 77):
        with pytest.raises(Refused, match="no draft that was prepared"):
            versions.approve(mill, version_id, ids(mill)[1], BEN_WORD, on=TODAY)


# -- never changes


def test_the_program_changes_no_approved_version_by_any_road(mill: Mill) -> None:
    version = approve(mill, LAMB)
    taken = acknowledgements_of(mill.library, version.id)[0]
    attempts = [
        [Change(version, replace(version, note="else"))], [Change(version, replace(version, state=VersionState.DRAFT))],
        [removed(taken), removed(version)], [Change(taken, replace(taken, reason="else"))],
        [added(replace(taken, id=99))],
    ]
    for changes in attempts:
        for road in (mill.apply, mill.record):
            with pytest.raises(Refused, match="never"):
                road("alter", changes)
        with pytest.raises(ValueError, match="never"):
            mill.store.write("alter", changes)
    assert mill.store.read_all()["version"] == [version]
    with pytest.raises(Refused, match="stay on record"):
        edits.remove_formula(mill, LAMB)


def test_an_approval_is_not_undone(mill: Mill) -> None:
    edits.set_bound(mill, 1, "minimum", 18.5)
    approve(mill)
    assert mill.undo_text == "Change the minimum of Crude protein"
    mill.undo()
    assert stands(mill) == "draft 2"
    mill.redo()
    assert stands(mill) == "version 1"


def altered(mill: Mill, statement: str, reopened: Reopened) -> Mill:
    """The mill opened again after other hands have run a statement on its closed file."""
    mill.close()
    raw = sqlite3.connect(mill.path)
    assert raw.execute(statement).rowcount == 1
    raw.commit()
    raw.close()
    return reopened(mill)


@pytest.mark.parametrize("statement", [
    """UPDATE version SET snapshot = replace(snapshot, '"minimum"', '"minimun"')""",
    "UPDATE version SET approved_by = 'Eve'", "UPDATE version SET approved = '2020-01-01 00:00:00.000000'",
    "UPDATE version SET state = 'superseded'", "UPDATE version SET note = 'else'",
    "UPDATE acknowledgement SET reason = 'none'", "DELETE FROM acknowledgement",
])
def test_what_sql_from_outside_alters_is_found_and_counts_as_not_approved(
    mill: Mill, statement: str, reopened: Reopened
) -> None:
    approve(mill, LAMB)
    again = altered(mill, statement, reopened)
    (found,) = alterations(again.library)
    assert "Version 1 of Lamb was altered outside this program" in found.text
    state = versions.standing(again.library, LAMB, TODAY)
    assert (state.text, state.draft, state.altered) == ("draft 2", True, (found.text,))
    assert approved_amounts(again.library, LAMB) is None
    sheet = batch.make_batch(again.library, LAMB, 1000.0, TODAY)
    assert sheet.draft
    assert found.text in sheet.cautions


@pytest.mark.parametrize("statement", ["DELETE FROM version WHERE number = 1", "DELETE FROM version WHERE number = 2"])
def test_a_version_that_sql_takes_out_is_missed(mill: Mill, statement: str, reopened: Reopened) -> None:
    approve(mill)
    edits.set_bound(mill, 1, "minimum", 18.5)
    approve(mill)
    assert versions.altered(mill) == []
    again = altered(mill, statement, reopened)
    said = versions.altered(again)
    assert any("missing" in text or "taken out" in text for text in said)


def test_a_prepare_that_another_window_forestalled_leaves_no_false_alarm(mill: Mill, reopened: Reopened) -> None:
    other = Mill(mill.store)
    prepare(mill)
    with pytest.raises(MillFileError):
        versions.prepare(other, LAMB, ids(mill)[0], ANN_WORD, TODAY)  # the same identifier
    versions.prepare(other, LAMB, ids(mill)[0], ANN_WORD, TODAY)  # the next one
    assert versions.altered(reopened(mill)) == []


def test_an_altered_version_is_mended_by_a_new_approval_and_still_shows(mill: Mill, reopened: Reopened) -> None:
    approve(mill)
    again = altered(mill, "UPDATE version SET note = 'else'", reopened)
    assert approve(again).number == 2
    assert stands(again) == "version 2"
    assert [one.number for one in alterations(again.library)] == [1]


# -- two at once


def test_of_two_windows_that_approve_one_draft_one_does(mill: Mill) -> None:
    draft, ben = prepare(mill), ids(mill)[1]
    other = Mill(mill.store)
    first = versions.approve(mill, draft.id, ben, BEN_WORD, note="first", on=TODAY)
    with pytest.raises(MillFileError, match="was changed elsewhere"):
        versions.approve(other, draft.id, ben, BEN_WORD, note="second", on=TODAY)
    assert other.library.records["version"] == {draft.id: draft}  # as it was read
    assert Mill(mill.store).library.records["version"] == {first.id: first}


def test_of_two_windows_that_prepare_at_once_one_does(mill: Mill) -> None:
    other = Mill(mill.store)
    edits.set_bound(other, 1, "minimum", 18.5)
    draft = prepare(mill)
    with pytest.raises(MillFileError):
        prepare(other)
    assert Mill(mill.store).library.records["version"] == {draft.id: draft}


def test_of_many_threads_that_approve_at_once_exactly_one_does(mill: Mill) -> None:
    draft, ben = prepare(mill), ids(mill)[1]
    windows = [Mill(mill.store) for _window in range(6)]
    start = threading.Barrier(len(windows))
    done: list[str] = []

    def run(window: Mill, note: str) -> None:
        start.wait()
        try:
            versions.approve(window, draft.id, ben, BEN_WORD, note=note, on=TODAY)
            done.append(note)
        except MillFileError:
            pass

    threads = [threading.Thread(target=run, args=(w, f"window {n}")) for n, w in enumerate(windows)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    now = Mill(mill.store).library
    assert len(done) == 1
    assert [v.note for v in now.records["version"].values()] == done
    assert alterations(now) == []


# -- on a sheet


def test_a_sheet_says_the_approved_version_or_that_it_is_of_a_draft(mill: Mill) -> None:
    sheet = batch.make_batch(mill.library, MASH, 1000.0, TODAY)
    assert (sheet.version, sheet.draft, sheet.approved_by) == ("draft 1", True, "")
    version = approve(mill)
    sheet = batch.make_batch(mill.library, MASH, 1000.0, TODAY)
    assert (sheet.version, sheet.draft) == ("version 1", False)
    assert sheet.approved_by == versions.approval_text(version)
    edits.set_price(mill, MAIZE, 210.0, TODAY)
    sheet = batch.make_batch(mill.library, MASH, 1000.0, TODAY)
    assert (sheet.version, sheet.draft, sheet.approved_by) == ("draft 2", True, "")


def test_a_batch_of_another_mix_is_a_draft_though_nothing_was_entered(mill: Mill) -> None:
    approve(mill)
    result = formulate(mill.library, MASH, TODAY)
    first, second = result.mix[:2]
    moved = {first.ingredient_id: (first.amount or 0) - 0.01, second.ingredient_id: (second.amount or 0) + 0.01}
    other = replace(result, ingredients=tuple(
        replace(i, amount=moved.get(i.ingredient_id, i.amount)) for i in result.ingredients
    ))
    assert batch.make_batch(mill.library, MASH, 1000.0, TODAY, result=other).draft


def test_a_copy_of_a_sheet_names_the_approver_of_then(mill: Mill, tmp_path: Any) -> None:
    approve(mill)
    printed = batch.print_sheet(mill, batch.make_batch(mill.library, MASH, 1000.0, TODAY), tmp_path / "a.pdf")
    edits.set_price(mill, MAIZE, 210.0, TODAY)
    people.change_person(mill, ids(mill)[1], name="Benjamin")
    copy = batch.print_copy(mill, max(mill.library.records["batch"]), tmp_path / "b.pdf")
    assert replace(copy, copy=0) == printed
    assert (copy.version, copy.draft, copy.approved_by.split(",")[0]) == ("version 1", False, "Ben")
