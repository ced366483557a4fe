"""A process that is killed while it edits loses at most the edit under way."""

from __future__ import annotations

import random
import subprocess
import sys
import threading
from collections.abc import Callable

import pytest

from blendapp.domain.plant import Site
from blendapp.domain.records import added
from blendapp.storage import Store, open_store
from blendapp.storage.connections import pragma

# Each edit renames a site, adds a batch with the next number, and is said only once the file has it.
EDITS = """
import dataclasses, datetime, sys
from blendapp.domain.mills import PrintedBatch
from blendapp.domain.records import Change, added
from blendapp.storage import open_store
store = open_store(sys.argv[1])
site = store.read_all()["site"][0]
now = datetime.datetime.now(datetime.UTC)
while True:
    number, id_ = store.next_batch_number(), store.next_ids()["batch"]
    renamed = dataclasses.replace(site, name=f"after batch {number}")
    batch = PrintedBatch(id_, number, 1, "1", 1.0, now, sheet="x" * 3000)
    store.write("print", [Change(site, renamed), added(batch)], role="record")
    print(number, flush=True)
    site = renamed
"""


@pytest.mark.skipif(sys.platform == "win32", reason="kill -9 is a thing of POSIX")
def test_kill_in_a_loop_loses_nothing_that_was_acknowledged(
    store: Store, run_child: Callable[..., subprocess.Popen[str]]
) -> None:
    store.close()
    chance = random.Random(7)
    acknowledged = 1  # the batch that stands in the file
    for _turn in range(10):
        child = run_child(EDITS, store.path)
        assert child.stdout is not None
        first = int(child.stdout.readline())
        assert acknowledged < first <= acknowledged + 2  # one edit may have been stored and not been said
        timer = threading.Timer(chance.uniform(0.001, 0.08), child.kill)
        timer.start()
        said = [first, *(int(line) for line in child.stdout if line.endswith("\n"))]
        timer.join()
        assert child.wait() == -9
        acknowledged = said[-1]

        opened = open_store(store.path)
        assert opened.writable
        assert pragma(opened._connection, "integrity_check") == [("ok",)]
        assert pragma(opened._connection, "foreign_key_check") == []
        found = opened.read_all()
        numbers = [batch.number for batch in found["batch"]]
        assert numbers == list(range(1, len(numbers) + 1))  # none lost, none twice
        assert acknowledged <= numbers[-1] <= acknowledged + 1
        assert found["site"][0].name == f"after batch {numbers[-1]}"  # an edit is there whole or not at all
        assert opened.next_batch_number() == numbers[-1] + 1
        assert len(opened.entries(with_changes=False)) == numbers[-1]
        acknowledged = numbers[-1]
        opened.close()


MAKES = """
import sys
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.records import added
from blendapp.storage import create, upgrading
changes = [added(Ingredient(n, f"I {n}", note="x" * 200)) for n in range(1, 5000)]
print("making", flush=True)
create(sys.argv[1], changes)
print("made", flush=True)
"""


@pytest.mark.skipif(sys.platform == "win32", reason="kill -9 is a thing of POSIX")
@pytest.mark.parametrize("after_s", [0.02, 0.1, 0.2])
def test_a_file_whose_making_was_killed_is_there_whole_or_not_at_all(
    store: Store, run_child: Callable[..., subprocess.Popen[str]], after_s: float
) -> None:
    path = store.path.with_name("new.mill")
    child = run_child(MAKES, path)
    assert child.stdout is not None
    assert child.stdout.readline() == "making\n"
    threading.Timer(after_s, child.kill).start()
    child.wait()
    if path.exists():
        opened = open_store(path)
        assert len(opened.read_all()["ingredient"]) == 4999
        opened.write("edit", [added(Site(1, "Here"))])
        opened.close()
