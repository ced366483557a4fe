"""Files of an older revision: a copy is kept beside, and the file is upgraded whole or not at all.

The revision after the newest stands in later_steps/ and nowhere else.
"""

from __future__ import annotations

import sqlite3
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest
from alembic.script import ScriptDirectory

from blendapp.domain.plant import Site
from blendapp.domain.records import Record, added
from blendapp.storage import Cause, MillFileError, Store, open_store, schema, upgrading
from blendapp.storage.connections import pragma

HERE = Path(__file__).resolve().parent
Child = Callable[..., "subprocess.Popen[str]"]


@pytest.fixture
def old(tmp_path: Path) -> Path:
    """A mill file that revision 0001 made, from its text in data/."""
    path = tmp_path / "old.mill"
    raw = sqlite3.connect(path)
    raw.executescript((HERE / "data" / "mill_0001.sql").read_text(encoding="utf-8"))
    raw.close()
    return path


def _newer_program(monkeypatch: pytest.MonkeyPatch, steps: str = "later_steps") -> None:
    """This program as it may be one revision on."""
    monkeypatch.setattr(schema, "REVISIONS", ("0001", "0002", "0003"))
    monkeypatch.setattr(schema, "REVISION", "0003")
    monkeypatch.setattr(upgrading, "STEPS", (*upgrading.STEPS, HERE / steps))


def _raw(path: Path, statement: str) -> list[tuple[object, ...]]:
    raw = sqlite3.connect(path)
    rows = raw.execute(statement).fetchall()
    raw.close()
    return rows


def test_the_steps_form_one_line_that_ends_at_the_revision_of_this_program() -> None:
    steps = list(ScriptDirectory.from_config(upgrading._config(upgrading.STEPS)).walk_revisions())
    assert [step.revision for step in reversed(steps)] == list(schema.REVISIONS)
    assert len(set(schema.REVISIONS)) == len(schema.REVISIONS)


def test_a_file_that_the_first_revision_made_opens_with_every_record(old: Path, first_records: list[Record]) -> None:
    opened = open_store(old)
    assert [record for kind in opened.read_all().values() for record in kind] == _by_kind(first_records)
    assert [change.after for change in opened.entries()[0].changes] == first_records
    opened.write("goes on", [added(Site(9, "West"))])
    opened.close()


def _by_kind(records: list[Record]) -> list[Record]:
    from blendapp.domain.records import KIND_OF, KINDS

    order = list(KINDS)
    return sorted(records, key=lambda record: (order.index(KIND_OF[type(record)]), record.id))


def test_a_current_file_is_not_copied_when_it_is_opened(store: Store, tmp_path: Path) -> None:
    store.close()
    open_store(store.path).close()
    assert list(tmp_path.glob("*upgrade*")) == []


def test_an_older_file_is_upgraded_and_keeps_its_records_and_links(old: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    opened = open_store(old)
    records, log = opened.dump(), opened.entries()
    opened.close()
    _newer_program(monkeypatch)
    opened = open_store(old)
    assert opened.writable
    assert (opened.dump(), opened.entries()) == (records, log)
    assert pragma(opened._connection, "foreign_keys") == [(1,)]
    assert pragma(opened._connection, "foreign_key_check") == []
    assert pragma(opened._connection, "integrity_check") == [("ok",)]
    with pytest.raises(MillFileError):  # the links are still kept
        opened.write("cut", [added(Site(9, "West")), *(c.reversed for c in log[0].changes if c.kind == "ingredient")])
    opened.close()
    assert _raw(old, "SELECT version_num FROM alembic_version") == [("0003",)]
    assert _raw(old, "SELECT DISTINCT origin_country FROM ingredient") == [("",)]


def test_the_copy_beside_is_the_file_as_it_was(old: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    opened = open_store(old)
    records = opened.dump()
    opened.close()
    with monkeypatch.context() as newer:
        _newer_program(newer)
        open_store(old).close()
    copy = old.with_name("old before upgrade from 0001.mill")
    assert _raw(copy, "SELECT version_num FROM alembic_version") == [("0001",)]
    opened = open_store(copy)
    assert opened.dump() == records
    opened.close()


def test_an_earlier_copy_is_never_overwritten(old: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    earlier = old.with_name("old before upgrade from 0001.mill")
    earlier.write_text("an earlier copy")
    _newer_program(monkeypatch)
    open_store(old).close()
    assert earlier.read_text() == "an earlier copy"
    assert _raw(old.with_name("old before upgrade from 0001 2.mill"), "SELECT count(*) FROM site") == [(1,)]


def test_a_step_that_fails_half_way_leaves_the_file_as_it_was(old: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    with monkeypatch.context() as newer:
        _newer_program(newer, "broken_steps")
        with pytest.raises(MillFileError, match="could not be upgraded") as caught:
            open_store(old)
    assert caught.value.cause is Cause.OLDER
    opened = open_store(old)
    assert opened.writable
    assert len(opened.read_all()["ingredient"]) == 3
    opened.close()
    assert _raw(old, "SELECT name FROM sqlite_schema WHERE name = 'half_made'") == []


def test_an_older_file_that_may_not_be_written_is_not_upgraded(old: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    old.chmod(0o444)
    _newer_program(monkeypatch)
    content = old.read_bytes()
    with pytest.raises(MillFileError, match="must be upgraded") as caught:
        open_store(old)
    assert caught.value.cause is Cause.OLDER
    assert old.read_bytes() == content
    assert list(old.parent.glob("*upgrade*")) == []


KILLED = """
import sys
from pathlib import Path
from blendapp.storage import open_store, schema, upgrading
schema.REVISIONS, schema.REVISION = ("0001", "0002", "0003"), "0003"
upgrading.STEPS = (*upgrading.STEPS, Path(sys.argv[2]))
open_store(sys.argv[1])
"""


@pytest.mark.skipif(sys.platform == "win32", reason="kill -9 is a thing of POSIX")
def test_a_file_whose_upgrade_was_killed_is_as_it_was_and_can_be_upgraded(
    old: Path, run_child: Child, monkeypatch: pytest.MonkeyPatch
) -> None:
    opened = open_store(old)
    records = opened.dump()
    opened.close()
    assert run_child(KILLED, old, HERE / "killed_steps").wait() == -9
    assert old.with_name("old before upgrade from 0001.mill").exists()
    opened = open_store(old)  # by a program of the old revision
    assert opened.dump() == records
    opened.close()
    _newer_program(monkeypatch)
    opened = open_store(old)
    assert opened.dump() == records
    opened.close()
