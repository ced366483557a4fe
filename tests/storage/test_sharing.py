"""One file, several windows, several processes."""

from __future__ import annotations

import gc
import subprocess
from collections.abc import Callable
from pathlib import Path

import pytest

from blendapp.domain.plant import Site
from blendapp.domain.records import added
from blendapp.storage import Cause, MillFileError, Store, open_store

Child = Callable[..., "subprocess.Popen[str]"]

# Opens the file, adds a site if it may, says so, and waits for a line before it closes.
OPENS = """
import sys
from blendapp.domain.plant import Site
from blendapp.domain.records import added
from blendapp.storage import open_store
store = open_store(sys.argv[1])
if store.writable:
    store.write("by another process", [added(Site(50, "Theirs"))])
print("writes" if store.writable else store.why_read_only, len(store.read_all()["site"]), sep="|", flush=True)
sys.stdin.readline()
store.close()
"""


def _said(child: subprocess.Popen[str]) -> str:
    assert child.stdout is not None
    return child.stdout.readline().strip()


def _go_on(child: subprocess.Popen[str]) -> None:
    assert child.stdin is not None
    child.stdin.write("\n")
    child.stdin.flush()
    assert child.wait(20) == 0


def test_windows_of_one_process_share_one_store_until_the_last_is_closed(store: Store, tmp_path: Path) -> None:
    link = tmp_path / "link.mill"
    link.symlink_to(store.path)
    second, third = open_store(store.path), open_store(link)
    assert second is store
    assert third is store
    second.close()
    third.close()
    store.write("still open", [added(Site(5, "South"))])
    store.close()
    again = open_store(store.path)
    assert again is not store
    assert again.writable
    again.close()


def test_a_store_that_nobody_holds_does_not_keep_the_file(store: Store, tmp_path: Path) -> None:
    copy = tmp_path / "copy.mill"
    store.backup(copy)
    forgotten = open_store(copy)
    forgotten.write("kept", [added(Site(6, "Kept"))])
    del forgotten
    gc.collect()
    again = open_store(copy)
    assert again.writable
    assert Site(6, "Kept") in again.read_all()["site"]
    again.close()


def test_a_second_process_reads_what_the_first_writes_and_cannot_write(store: Store, run_child: Child) -> None:
    child = run_child(OPENS, store.path)
    why, sites = _said(child).split("|")
    assert "open in another process" in why
    assert str(store.path) in why
    assert sites == "1"
    store.write("while the other reads", [added(Site(5, "South"))])
    _go_on(child)
    later = run_child(OPENS, store.path)
    assert _said(later).endswith("|2")
    store.close()  # while the other still reads
    _go_on(later)
    again = open_store(store.path)
    assert len(again.read_all()["site"]) == 2
    again.close()
    assert {p.name for p in store.path.parent.iterdir()} == {"north.mill", ".north.mill.lock"}


def test_the_second_process_may_write_once_the_first_has_closed(store: Store, run_child: Child) -> None:
    store.close()
    child = run_child(OPENS, store.path)
    assert _said(child) == "writes|2"
    here = open_store(store.path)
    assert not here.writable
    with pytest.raises(MillFileError, match="open in another process") as caught:
        here.write("edit", [added(Site(60, "Ours"))])
    assert caught.value.cause is Cause.HELD
    here.close()
    _go_on(child)
    again = open_store(store.path)
    assert again.writable
    assert Site(50, "Theirs") in again.read_all()["site"]
    again.close()


def test_the_lock_of_a_killed_process_holds_nobody_up(store: Store, run_child: Child) -> None:
    store.close()
    child = run_child(OPENS, store.path)
    assert _said(child) == "writes|2"
    child.kill()
    child.wait()
    assert (store.path.parent / ".north.mill.lock").exists()
    again = open_store(store.path)
    assert again.writable
    assert Site(50, "Theirs") in again.read_all()["site"]
    again.close()
