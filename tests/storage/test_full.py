"""A file that cannot grow: the edit is refused in a sentence, what stands stays, and with room it goes on."""

from __future__ import annotations

import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from blendapp.domain.ingredients import Ingredient
from blendapp.domain.plant import Site
from blendapp.domain.records import added
from blendapp.storage import Cause, MillFileError, Store, open_store
from blendapp.storage.connections import pragma

Child = Callable[..., "subprocess.Popen[str]"]


def test_an_edit_that_the_file_has_no_room_for_is_refused_and_leaves_it_whole(store: Store) -> None:
    ((pages,),) = pragma(store._connection, "page_count")
    pragma(store._connection, f"max_page_count = {pages}")
    before, log, ids = store.dump(), store.entries(), store.next_ids()
    with pytest.raises(MillFileError, match="cannot grow") as caught:
        store.write("many", [added(Ingredient(100 + n, f"New {n}", note="x" * 900)) for n in range(50)])
    assert caught.value.cause is Cause.FULL
    assert str(store.path) in str(caught.value)
    assert (store.dump(), store.entries(), store.next_ids()) == (before, log, ids)
    assert pragma(store._connection, "integrity_check") == [("ok",)]

    pragma(store._connection, "max_page_count = 1073741823")
    store.write("few", [added(Site(9, "West"))])
    store.close()
    again = open_store(store.path)
    assert Site(9, "West") in again.read_all()["site"]
    again.close()


# Writes until the system lets no file grow past the limit, says how many edits were acknowledged, tries once more.
GROWS = """
import resource, signal, sys
from blendapp.domain.plant import Site
from blendapp.domain.records import added
from blendapp.storage import MillFileError, open_store
store = open_store(sys.argv[1])
signal.signal(signal.SIGXFSZ, signal.SIG_IGN)
resource.setrlimit(resource.RLIMIT_FSIZE, (int(sys.argv[2]), resource.RLIM_INFINITY))
done = 0
try:
    while done < 5000:
        store.write("x" * 2000, [added(Site(100 + done, f"Site {done}"))])
        done += 1
except MillFileError as error:
    print(error.cause.value)
print(done, len(store.read_all()["site"]))
store.close()
"""


@pytest.mark.skipif(sys.platform == "win32", reason="no limit on the size of files")
def test_a_disk_that_takes_no_more_loses_no_edit_that_was_acknowledged(store: Store, run_child: Child) -> None:
    store.close()
    said, _none = run_child(GROWS, store.path, store.path.stat().st_size + 60_000).communicate()
    cause, counts = said.split("\n")[:2]
    assert cause in (Cause.FULL.value, Cause.DISK.value)
    done, seen = map(int, counts.split())
    assert 0 < done < 5000
    assert seen == done + 1  # and the one that stood before
    again = open_store(store.path)
    assert len(again.read_all()["site"]) == done + 1
    assert pragma(again._connection, "integrity_check") == [("ok",)]
    again.write("room again", [added(Site(9, "West"))])
    again.close()


@pytest.mark.skipif(sys.platform == "win32", reason="no limit on the size of files")
def test_a_copy_for_which_there_is_no_room_leaves_nothing(store: Store, tmp_path: Path, run_child: Child) -> None:
    program = (
        "import resource, signal, sys\n"
        "from blendapp.storage import MillFileError, open_store\n"
        "store = open_store(sys.argv[1])\n"
        "signal.signal(signal.SIGXFSZ, signal.SIG_IGN)\n"
        "resource.setrlimit(resource.RLIMIT_FSIZE, (40000, resource.RLIM_INFINITY))\n"
        "try:\n    store.backup(sys.argv[2])\n"
        "except MillFileError as error:\n    print(error)\n"
    )
    (tmp_path / "target").mkdir()
    said, _none = run_child(program, store.path, tmp_path / "target" / "copy.mill").communicate()
    assert "copy.mill" in said
    assert "cannot grow" in said or "the disk or the network failed" in said
    assert list((tmp_path / "target").iterdir()) == []
