"""Making and opening: one clear sentence for each thing that can be wrong, and nothing damaged."""

from __future__ import annotations

import contextlib
import dataclasses
import os
import shutil
import sqlite3
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from blendapp.domain.mills import PrintedBatch
from blendapp.domain.plant import Site
from blendapp.domain.records import Record, added
from blendapp.storage import Cause, MillFileError, Store, create, files, open_store
from blendapp.storage.connections import pragma


@pytest.fixture
def closed(store: Store) -> Path:
    store.close()
    return store.path


def _refused(path: Path, cause: Cause) -> str:
    """Opening is refused with that cause, in one sentence that names the file, and every byte stays as it is."""
    before = path.read_bytes() if path.is_file() else None
    beside = set(path.parent.iterdir())
    with pytest.raises(MillFileError) as caught:
        open_store(path)
    text = str(caught.value)
    assert caught.value.cause is cause
    assert str(path) in text
    assert text.endswith(".")
    assert "\n" not in text
    assert (path.read_bytes() if path.is_file() else None) == before
    assert {p for p in path.parent.iterdir() if not p.name.endswith(".lock")} <= beside
    return text


def test_a_file_that_is_not_there_is_said_to_be_missing(tmp_path: Path) -> None:
    _refused(tmp_path / "none.mill", Cause.MISSING)
    assert list(tmp_path.iterdir()) == []


def test_a_folder_is_said_to_be_a_folder(tmp_path: Path) -> None:
    _refused(tmp_path, Cause.FOLDER)


@pytest.mark.parametrize(
    "content", [b"", b"Ingredient,Price\nMaize,200\n", b"PK\x03\x04" + bytes(500), b"SQLite format 3\0"]
)
def test_a_file_of_another_kind_is_not_a_mill_file(tmp_path: Path, content: bytes) -> None:
    path = tmp_path / "renamed.mill"
    path.write_bytes(content)
    _refused(path, Cause.NOT_A_MILL_FILE)


def test_the_database_of_another_program_is_not_a_mill_file(tmp_path: Path) -> None:
    path = tmp_path / "other.mill"
    raw = sqlite3.connect(path)
    raw.executescript("CREATE TABLE ingredient (id INTEGER); PRAGMA application_id = 7;")
    raw.close()
    _refused(path, Cause.NOT_A_MILL_FILE)


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="no pipes here")
def test_a_pipe_is_refused_without_waiting_for_it(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe.mill")
    with pytest.raises(MillFileError) as caught:
        open_store(tmp_path / "pipe.mill")
    assert caught.value.cause is Cause.NOT_A_MILL_FILE


@pytest.mark.parametrize("kept", [0.3, 0.999])
def test_a_file_cut_short_is_damaged(closed: Path, kept: float) -> None:
    content = closed.read_bytes()
    closed.write_bytes(content[: int(len(content) * kept)])
    assert "copy of it that you saved" in _refused(closed, Cause.DAMAGED)


def test_pages_overwritten_in_the_middle_are_damaged(closed: Path) -> None:
    content = bytearray(closed.read_bytes())
    content[8192:-4096] = b"\xa5" * (len(content) - 8192 - 4096)
    closed.write_bytes(content)
    _refused(closed, Cause.DAMAGED)


def test_one_spoilt_page_that_opening_does_not_need_is_found_all_the_same(closed: Path) -> None:
    raw = sqlite3.connect(closed)
    (page,) = raw.execute("SELECT rootpage FROM sqlite_schema WHERE name = 'ix_limit_formula_id'").fetchone()
    raw.close()
    content = bytearray(closed.read_bytes())
    content[(page - 1) * 4096 : page * 4096] = b"\xa5" * 4096
    closed.write_bytes(content)
    _refused(closed, Cause.DAMAGED)


def test_a_file_without_a_revision_is_damaged(closed: Path) -> None:
    _run(closed, "DELETE FROM alembic_version")
    _refused(closed, Cause.DAMAGED)
    _run(closed, "DROP TABLE alembic_version")
    _refused(closed, Cause.DAMAGED)


def test_a_value_that_no_record_can_hold_is_said_when_it_is_read(closed: Path) -> None:
    _run(closed, "UPDATE ingredient SET basis = 'by moonlight' WHERE id = 1")
    opened = open_store(closed)
    with pytest.raises(MillFileError, match="by moonlight") as caught:
        opened.read_all()
    assert caught.value.cause is Cause.DAMAGED
    opened.close()


def test_a_file_of_a_newer_version_is_left_alone(closed: Path) -> None:
    _run(closed, "UPDATE alembic_version SET version_num = '9999'")
    assert "newer version" in _refused(closed, Cause.NEWER)


def _run(path: Path, statement: str) -> None:
    raw = sqlite3.connect(path)
    with raw:
        raw.execute(statement)
    raw.close()


def test_a_database_address_is_refused_honestly() -> None:
    for use in (open_store, create):
        with pytest.raises(MillFileError, match="only mill files can be opened yet") as caught:
            use("postgresql://mill@server/mill")
        assert caught.value.cause is Cause.ADDRESS


# -- making


def test_making_never_overwrites(tmp_path: Path) -> None:
    path = tmp_path / "taken.mill"
    path.write_text("mine")
    with pytest.raises(MillFileError, match="exists already") as caught:
        create(path)
    assert caught.value.cause is Cause.EXISTS
    assert path.read_text() == "mine"
    assert list(tmp_path.iterdir()) == [path]


def test_a_name_taken_while_the_file_was_being_made_is_not_overwritten(tmp_path: Path) -> None:
    path = tmp_path / "raced.mill"
    with contextlib.ExitStack() as making:
        unfinished = making.enter_context(files.made_whole(path))
        unfinished.write_text("ours")
        path.write_text("theirs")
        with pytest.raises(MillFileError, match="exists already"):
            making.close()
    assert path.read_text() == "theirs"
    assert list(tmp_path.iterdir()) == [path]


def test_a_file_that_cannot_take_its_first_records_does_not_appear(tmp_path: Path, records: list[Record]) -> None:
    with pytest.raises(MillFileError):
        create(tmp_path / "half.mill", [added(record) for record in records if not isinstance(record, Site)])
    with pytest.raises(ValueError, match="time zone"):
        create(tmp_path / "half.mill", [added(_without_time_zone(record)) for record in records])
    assert list(tmp_path.iterdir()) == []


def _without_time_zone(record: Record) -> Record:
    if not isinstance(record, PrintedBatch):
        return record
    return dataclasses.replace(record, printed=record.printed.replace(tzinfo=None))


def test_making_in_a_folder_that_is_not_there_names_the_folder(tmp_path: Path) -> None:
    with pytest.raises(MillFileError, match="There is no folder") as caught:
        create(tmp_path / "nowhere" / "new.mill")
    assert caught.value.cause is Cause.MISSING


def test_a_closed_mill_file_stands_alone(closed: Path) -> None:
    assert {p.name for p in closed.parent.iterdir()} == {"north.mill", ".north.mill.lock"}
    assert closed.read_bytes()[18:20] == b"\x01\x01"  # the mark of a file without a write-ahead log


# -- read-only


def test_a_file_marked_read_only_can_be_read_and_not_written(closed: Path) -> None:
    closed.chmod(0o444)
    _opens_read_only(closed, Cause.READ_ONLY)


def test_a_file_in_a_read_only_folder_can_be_read_and_not_written(closed: Path) -> None:
    closed.parent.chmod(0o555)
    try:
        _opens_read_only(closed, Cause.READ_ONLY)
    finally:
        closed.parent.chmod(0o755)


def test_a_file_that_asks_for_a_log_can_be_read_in_a_folder_that_takes_none(closed: Path) -> None:
    raw = sqlite3.connect(closed)
    raw.execute("PRAGMA journal_mode = WAL").fetchall()
    raw.close()
    assert {p.name for p in closed.parent.iterdir()} == {"north.mill", ".north.mill.lock"}
    closed.parent.chmod(0o555)
    try:
        _opens_read_only(closed, Cause.READ_ONLY)
    finally:
        closed.parent.chmod(0o755)


def test_what_a_killed_process_left_in_the_log_is_read_in_a_read_only_folder(store: Store, tmp_path: Path) -> None:
    store.write("only in the log", [added(Site(9, "West"))])
    left = tmp_path / "left"
    left.mkdir()
    for ending in ("", "-wal", "-shm"):
        shutil.copy(f"{store.path}{ending}", f"{left / 'north.mill'}{ending}")
    left.chmod(0o555)
    try:
        opened = open_store(left / "north.mill")
        assert not opened.writable
        assert Site(9, "West") in opened.read_all()["site"]
        opened.close()
    finally:
        left.chmod(0o755)


def _opens_read_only(path: Path, cause: Cause) -> None:
    content = path.read_bytes()
    beside = {p.name for p in path.parent.iterdir()}
    opened = open_store(path)
    assert not opened.writable
    assert str(path) in (opened.why_read_only or "")
    assert opened.read_all()["mill"]
    assert len(opened.entries()) == 1
    with pytest.raises(MillFileError) as caught:
        opened.write("edit", [added(Site(99, "Nowhere"))])
    assert caught.value.cause is cause
    opened.close()
    assert path.read_bytes() == content
    assert {p.name for p in path.parent.iterdir()} == beside


def test_a_copy_can_be_saved_of_a_file_that_can_only_be_read(closed: Path, tmp_path: Path) -> None:
    closed.chmod(0o444)
    opened = open_store(closed)
    (tmp_path / "elsewhere").mkdir()
    opened.backup(tmp_path / "elsewhere" / "copy.mill")
    copy = open_store(tmp_path / "elsewhere" / "copy.mill")
    assert copy.writable
    assert copy.dump() == opened.dump()
    copy.close()
    opened.close()


# -- the file underneath


def test_a_file_replaced_while_open_is_noticed_before_anything_is_written(store: Store, tmp_path: Path) -> None:
    shutil.copy(store.path, tmp_path / "restored.mill")
    os.replace(tmp_path / "restored.mill", store.path)
    content = store.path.read_bytes()
    with pytest.raises(MillFileError, match="moved, deleted or replaced") as caught:
        store.write("edit", [added(Site(99, "Nowhere"))])
    assert caught.value.cause is Cause.MOVED
    assert store.path.read_bytes() == content
    store.backup(tmp_path / "rescued.mill")  # what was read is still to be had
    rescued = open_store(tmp_path / "rescued.mill")
    assert rescued.dump() == store.dump()
    rescued.close()


def test_the_journal_suits_the_disk(closed: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    from blendapp.storage import opening

    for local, journal in ((True, "wal"), (False, "delete")):
        monkeypatch.setattr(opening, "on_local_disk", lambda path, local=local: local)
        opened = open_store(closed)
        assert pragma(opened._connection, "journal_mode") == [(journal,)]
        assert pragma(opened._connection, "synchronous") == [(2,)]  # FULL
        assert pragma(opened._connection, "foreign_keys") == [(1,)]
        opened.write("edit", [added(Site(10 + local, f"Site {local}"))])
        opened.close()
        assert {p.name for p in closed.parent.iterdir()} == {"north.mill", ".north.mill.lock"}


MOUNTS = """\
/dev/sda1 / ext4 rw 0 0
server:/feed /srv/feed nfs4 rw 0 0
//pc/share /mnt/the\\040mill cifs rw 0 0
/dev/sdb1 /srv/feed/local xfs rw 0 0
share /media/host 9p rw 0 0
"""


@pytest.mark.skipif(sys.platform == "win32", reason="Windows names the kind of a drive itself")
@pytest.mark.parametrize(("path", "local"), [
    ("/home/ann/north.mill", True),
    ("/srv/feed/north.mill", False),
    ("/srv/feeder/north.mill", True),
    ("/mnt/the mill/north.mill", False),
    ("/srv/feed/local/north.mill", True),
    ("/media/host/north.mill", False),
])
def test_a_network_folder_is_told_from_a_disk_by_its_mount(tmp_path: Path, path: str, local: bool) -> None:
    mounts = tmp_path / "mounts"
    mounts.write_text(MOUNTS)
    assert files.on_local_disk(Path(path), mounts) is local


@pytest.mark.skipif(sys.platform == "win32", reason="Windows names the kind of a drive itself")
def test_where_the_kind_of_disk_cannot_be_known_it_is_taken_for_a_network_folder(tmp_path: Path) -> None:
    assert files.on_local_disk(Path("/home/north.mill"), tmp_path / "no list of mounts") is False


# -- what loads when


def test_opening_a_current_file_loads_no_upgrade_library(
    closed: Path, run_child: Callable[..., subprocess.Popen[str]]
) -> None:
    program = (
        "import sys; import blendapp.storage as s; assert 'sqlalchemy' not in sys.modules; "
        "opened = s.open_store(sys.argv[1]); opened.read_all(); opened.close(); "
        "assert 'alembic' not in sys.modules; assert 'sqlalchemy.orm' not in sys.modules"
    )
    assert run_child(program, closed).wait() == 0
