"""Reading and writing an open mill file."""

from __future__ import annotations

import dataclasses
import datetime
import math
import sqlite3
import threading
from collections.abc import Callable
from enum import Enum
from pathlib import Path
from typing import Any, get_args, get_origin

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from blendapp.domain.formulas import Subject
from blendapp.domain.ingredients import Ingredient, Value
from blendapp.domain.mills import MillInfo, PrintedBatch
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.plant import Site
from blendapp.domain.quotes import Quote
from blendapp.domain.records import KIND_OF, KINDS, Change, Record, added, field_types, from_plain, removed, to_plain
from blendapp.storage import Cause, MillFileError, Role, Store, create, open_store
from blendapp.storage.rows import json_of, record_from_json, record_of, row_of

MOMENT = datetime.datetime(2026, 3, 2, 8, 15, 30, tzinfo=datetime.UTC)


def test_every_kind_of_record_comes_back_as_it_was_written(store: Store, records: list[Record]) -> None:
    assert {KIND_OF[type(record)] for record in records} == set(KINDS)
    found = store.read_all()
    assert list(found) == list(KINDS)
    for kind in KINDS:
        assert found[kind] == [record for record in records if KIND_OF[type(record)] == kind]


def test_records_come_back_the_same_after_the_file_was_closed(store: Store, records: list[Record]) -> None:
    before = store.dump()
    store.close()
    again = open_store(store.path)
    assert again.dump() == before
    assert before["value"][0] == to_plain(next(r for r in records if isinstance(r, Value)))
    again.close()


def _field_values(declared: Any) -> st.SearchStrategy[Any]:
    if get_origin(declared) is tuple:
        return st.lists(st.sampled_from(list(get_args(declared)[0])), unique=True).map(tuple)
    if declared is Subject:
        ids = st.lists(st.integers(1, 10**6), min_size=1, max_size=4)
        names = st.text(st.characters(codec="utf-8"), min_size=1)
        return ids.map(lambda found: Subject.ingredients(*found)) | names.map(Subject.of_class)
    if issubclass(declared, Enum):
        return st.sampled_from(list(declared))
    plain: dict[type, st.SearchStrategy[Any]] = {
        float: st.floats(allow_nan=False, allow_infinity=False), int: st.integers(-(2**31), 2**31 - 1),
        bool: st.booleans(),
        str: st.text(st.characters(codec="utf-8")), datetime.date: st.dates(),
        datetime.datetime: st.datetimes(timezones=st.just(datetime.UTC)),
    }
    return plain[declared]


@st.composite
def _any_record(draw: st.DrawFn) -> Record:
    cls = KINDS[draw(st.sampled_from(sorted(KINDS)))]
    given_fields = {}
    for name, (declared, optional) in field_types(cls).items():
        strategy = _field_values(declared)
        given_fields[name] = draw(st.none() | strategy if optional else strategy)
    if cls is MillInfo:
        given_fields["id"] = 1
    for name in given_fields.keys() & {"unit", "per"}:
        given_fields[name] = "%" if name == "unit" else ("kg" if cls is Quote else given_fields[name])
    return cls(**given_fields)


@given(record=_any_record())
@settings(max_examples=150, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_any_record_survives_its_row_and_its_json(record: Record, bare_file: Callable[..., Any]) -> None:
    kind = KIND_OF[type(record)]
    row = bare_file(kind, row_of(kind, record))
    assert record_of(kind, row) == record
    assert record_from_json(kind, json_of(record)) == record
    assert from_plain(kind, to_plain(record)) == record


@pytest.fixture
def bare_file(tmp_path: Path) -> Any:
    """Writes one row to its table without checking links, reads it back, and takes it out again."""
    from sqlalchemy import create_engine, insert

    from blendapp.storage.rows import select_of
    from blendapp.storage.schema import metadata, table_of

    engine = create_engine(f"sqlite:///{tmp_path / 'bare.db'}")
    metadata.create_all(engine)
    with engine.connect() as connection:

        def there_and_back(kind: str, row: dict[str, Any]) -> Any:
            connection.execute(insert(table_of(kind)), row)
            found = connection.execute(select_of(kind)).one()
            connection.rollback()
            return found

        yield there_and_back
    engine.dispose()


def test_the_canonical_columns_follow_the_record_as_entered(store: Store) -> None:
    value = _one(store, "value", 1)
    store.write("unit", [Change(value, dataclasses.replace(value, unit="g/kg"))])
    store.close()
    with sqlite3.connect(store.path) as raw:
        assert raw.execute("SELECT canonical FROM value WHERE id = 1").fetchone() == (8.5 * 1e-3,)
        assert raw.execute("SELECT canonical FROM lot_value WHERE id = 1").fetchone() == (85.0 * 1e-3,)
        assert raw.execute("SELECT price, price_per_t FROM quote WHERE id = 2").fetchone() == (None, None)
        (per_t,) = raw.execute("SELECT price_per_t FROM quote WHERE id = 1").fetchone()
    raw.close()
    assert per_t == pytest.approx(5.6 * 39.36826, rel=1e-6)


def _one(store: Store, kind: str, id_: int) -> Any:
    return next(record for record in store.read_all()[kind] if record.id == id_)


# -- one write


def test_a_write_is_one_entry_of_the_log_with_what_was_before_and_after(store: Store) -> None:
    before = _one(store, "quote", 1)
    after = dataclasses.replace(before, price=6.0, entered="6,00")
    started = datetime.datetime.now(datetime.UTC)
    entry = store.write("Price of Maize", [Change(before, after)], who="ann")
    assert (entry.what, entry.who, entry.role, entry.of) == ("Price of Maize", "ann", Role.EDIT, None)
    assert entry.changes == (Change(before, after),)
    assert started <= entry.made <= datetime.datetime.now(datetime.UTC)
    assert store.entries(after=entry.id - 1) == [entry]
    assert _one(store, "quote", 1) == after


def test_the_first_records_are_an_entry_that_stands_for_good(store: Store, records: list[Record]) -> None:
    (first,) = store.entries()
    assert first.role is Role.RECORD
    assert [change.after for change in first.changes] == records


def test_the_log_is_read_between_two_identifiers_and_without_changes_if_asked(store: Store) -> None:
    entries = [store.write(f"edit {n}", [added(Site(10 + n, f"Site {n}"))]) for n in range(4)]
    assert store.entries(after=entries[0].id, last=entries[2].id) == entries[1:3]
    assert [e.what for e in store.entries(after=1, with_changes=False)] == ["edit 0", "edit 1", "edit 2", "edit 3"]
    assert all(e.changes == () for e in store.entries(with_changes=False))
    assert store.entries(after=entries[-1].id) == []


def test_an_undo_names_what_it_undoes_and_gives_an_equal_dump(store: Store) -> None:
    before = store.dump()
    quote = _one(store, "quote", 1)
    entry = store.write("out", [removed(quote), added(Site(9, "South"))])
    assert store.dump() != before
    undo = store.write("out", [c.reversed for c in reversed(entry.changes)], role="undo", of=entry.id)
    assert (undo.role, undo.of) == (Role.UNDO, entry.id)
    assert store.entries(after=entry.id) == [undo]
    assert store.dump() == before


def test_changes_may_stand_in_any_order_whatever_they_refer_to(store: Store) -> None:
    changes = [added(Value(50, 60, 70, 1.0, "%")), added(Nutrient(70, "Ash")), added(Ingredient(60, "Bran"))]
    store.write("bran", changes)
    store.write("no bran", [removed(change.after) for change in reversed(changes)])
    assert 60 not in [record.id for record in store.read_all()["ingredient"]]


def test_two_ingredients_may_swap_names_in_one_edit_and_keep_what_refers_to_them(store: Store) -> None:
    one, two = _one(store, "ingredient", 1), _one(store, "ingredient", 2)
    values = store.read_all()["value"]
    store.write("swap", [
        Change(one, dataclasses.replace(one, name=two.name)), Change(two, dataclasses.replace(two, name=one.name)),
    ])
    assert (_one(store, "ingredient", 1).name, _one(store, "ingredient", 2).name) == (two.name, one.name)
    assert store.read_all()["value"] == values


def test_several_changes_of_one_record_are_taken_in_their_order(store: Store) -> None:
    site = _one(store, "site", 1)
    first, second = dataclasses.replace(site, name="A"), dataclasses.replace(site, name="B")
    entry = store.write("twice", [Change(site, first), Change(first, second)])
    assert _one(store, "site", 1) == second
    store.write("back", [change.reversed for change in reversed(entry.changes)], role="undo", of=entry.id)
    assert _one(store, "site", 1) == site
    with pytest.raises(ValueError, match="twice"):
        store.write("torn", [Change(site, first), Change(site, second)])


# -- what is refused, with nothing written


def _refused(store: Store, cause: Cause, *changes: Change) -> str:
    rows, log, ids = store.dump(), store.entries(), store.next_ids()
    with pytest.raises(MillFileError) as caught:
        store.write("refused", [added(Site(90, "Written before the fault")), *changes])
    assert caught.value.cause is cause
    assert (store.dump(), store.entries(), store.next_ids()) == (rows, log, ids)
    return str(caught.value)


def test_a_record_that_is_not_as_the_edit_took_it_is_refused(store: Store) -> None:
    quote = _one(store, "quote", 1)
    stale = dataclasses.replace(quote, price=1.0)
    text = _refused(store, Cause.CHANGED_ELSEWHERE, Change(stale, dataclasses.replace(stale, price=2.0)))
    assert str(store.path) in text
    assert "changed elsewhere" in text
    _refused(store, Cause.CHANGED_ELSEWHERE, removed(stale))
    _refused(store, Cause.CHANGED_ELSEWHERE, added(dataclasses.replace(quote)))
    _refused(store, Cause.CHANGED_ELSEWHERE, removed(dataclasses.replace(quote, id=77)))


def test_a_link_to_nothing_is_refused_by_name(store: Store) -> None:
    assert "quote 30" in _refused(store, Cause.INCONSISTENT, added(Quote(30, 999, 1.0)))
    assert "that is gone" in _refused(store, Cause.INCONSISTENT, removed(_one(store, "formula", 1)))


def test_a_second_record_with_a_name_that_only_one_may_have_is_refused(store: Store) -> None:
    assert "ingredient.name" in _refused(store, Cause.INCONSISTENT, added(Ingredient(61, "Maize")))
    _refused(store, Cause.INCONSISTENT, added(Value(51, 1, 1, 2.0, "%")))


@pytest.mark.parametrize("record", [
    Value(52, 3, 1, math.nan, "%"),
    Value(52, 3, 1, math.inf, "%"),
    Value(52, 3, 1, 1.0, "furlongs"),
    Quote(31, 1, 200.0, "ton"),
    dataclasses.replace(PrintedBatch(2, 2, 1, "1", 1.0, MOMENT), printed=datetime.datetime(2026, 1, 1)),
])
def test_what_no_file_can_keep_is_refused_and_nothing_is_written(store: Store, record: Record) -> None:
    rows, log = store.dump(), store.entries()
    with pytest.raises(ValueError, match=r"\w"):
        store.write("refused", [added(Site(90, "Written before the fault")), added(record)])
    assert (store.dump(), store.entries()) == (rows, log)


def test_the_log_cannot_be_changed_even_by_sql(store: Store) -> None:
    store.close()
    raw = sqlite3.connect(store.path)
    for statement in ("UPDATE log_entry SET what = 'x'", "DELETE FROM log_change"):
        with pytest.raises(sqlite3.IntegrityError, match="only added to"):
            raw.execute(statement)
    raw.close()


# -- identifiers and batch numbers


def test_an_identifier_is_never_free_again_after_its_record_is_deleted(store: Store) -> None:
    assert store.next_ids()["site"] == 2
    store.write("add", [added(Site(7, "West"))])
    store.write("drop", [removed(Site(7, "West"))])
    assert store.next_ids()["site"] == 8
    store.close()
    again = open_store(store.path)
    assert again.next_ids() == {**again.next_ids(), "site": 8, "mill": 2, "quote": 4}
    again.close()


def test_an_empty_file_starts_every_kind_at_one(tmp_path: Path) -> None:
    opened = create(tmp_path / "empty.mill")
    assert opened.next_ids() == dict.fromkeys(KINDS, 1)
    assert opened.next_batch_number() == 1
    assert opened.entries() == []
    opened.close()


def test_a_batch_number_is_taken_by_the_write_that_prints_it_and_never_given_twice(store: Store) -> None:
    assert store.next_batch_number() == 2
    batch = PrintedBatch(2, 2, 1, "1", 500.0, MOMENT)
    assert store.next_batch_number() == 2  # asking takes nothing
    store.write("print", [added(batch)], role="record")
    assert store.next_batch_number() == 3
    _refused(store, Cause.CHANGED_ELSEWHERE, added(dataclasses.replace(batch, id=3)))
    store.write("drop", [removed(batch)])
    _refused(store, Cause.CHANGED_ELSEWHERE, added(dataclasses.replace(batch, id=3)))
    assert store.next_batch_number() == 3


def test_a_reprint_keeps_its_number(store: Store) -> None:
    batch = _one(store, "batch", 1)
    store.write("copy", [Change(batch, dataclasses.replace(batch, copies=2))], role="record")
    assert store.next_batch_number() == 2


def test_a_deleted_batch_that_is_brought_back_keeps_its_number(store: Store) -> None:
    batch = _one(store, "batch", 1)
    entry = store.write("drop", [removed(batch)])
    store.write("drop", [added(batch)], role="undo", of=entry.id)
    assert _one(store, "batch", 1) == batch


# -- threads and copies


def test_reads_from_other_threads_see_whole_edits_only(store: Store) -> None:
    sites = [Site(1, "North yard"), Site(2, "0")]
    store.write("second", [added(sites[1])])
    seen: list[set[str]] = []
    stop = threading.Event()

    def read() -> None:
        while not stop.is_set():
            seen.append({site.name.split()[-1] for site in store.read_all()["site"]})

    reader = threading.Thread(target=read)
    reader.start()
    for turn in range(40):
        renamed = [dataclasses.replace(site, name=f"{site.id} {turn}") for site in sites]
        store.write("both", [Change(a, b) for a, b in zip(sites, renamed, strict=True)])
        sites = renamed
    stop.set()
    reader.join()
    assert seen
    assert all(len(names) == 1 for names in seen if names != {"yard", "0"})


def test_a_copy_is_whole_and_never_overwrites(store: Store, tmp_path: Path) -> None:
    copy = tmp_path / "copy of north.mill"
    store.write("not yet in the file itself", [added(Site(8, "East"))])
    store.backup(copy)
    taken = copy.read_bytes()
    with pytest.raises(MillFileError, match="exists already") as caught:
        store.backup(copy)
    assert caught.value.cause is Cause.EXISTS
    with pytest.raises(MillFileError, match="exists already"):
        store.backup(store.path)
    assert copy.read_bytes() == taken
    opened = open_store(copy)
    assert opened.dump() == store.dump()
    assert opened.entries() == store.entries()
    assert opened.writable
    opened.close()
    assert {path.name for path in tmp_path.glob("*copy*")} == {"copy of north.mill", ".copy of north.mill.lock"}


def test_a_copy_into_a_folder_that_is_not_there_is_refused(store: Store, tmp_path: Path) -> None:
    with pytest.raises(MillFileError, match="There is no folder"):
        store.backup(tmp_path / "nowhere" / "copy.mill")
