"""A process that is killed while it approves leaves the file as before or as after, never between."""

from __future__ import annotations

import os
import random
import subprocess
import sys
import threading
from pathlib import Path

import pytest

from blendapp.domain.mills import VersionState
from blendapp.domain.records import KINDS, added
from blendapp.domain.versions import acknowledgements_of, alterations, versions_of
from blendapp.services.mill import Mill, open_mill
from blendapp.storage import create
from tests.services.approving import LAMB, approve, feed_library, staffed

pytestmark = [
    pytest.mark.usefixtures("quick_hashing"),
    pytest.mark.skipif(sys.platform == "win32", reason="kill -9 is a thing of POSIX"),
]
ROOT = Path(__file__).resolve().parents[2]

CHILD = """
import os, signal, sys
from argon2 import PasswordHasher
from blendapp.services import edits, people
from blendapp.services.mill import open_mill
from blendapp.storage import writing
from tests.services.approving import LAMB, approve
people._hasher = PasswordHasher(time_cost=1, memory_cost=8, parallelism=1)
mill = open_mill(sys.argv[1])
where = sys.argv[2]
into_log, into_rows = writing._add_entry, writing.row_of

def killed():
    os.kill(os.getpid(), signal.SIGKILL)

def row_of(kind, record):
    if kind == "acknowledgement":  # the versions are written, what was acknowledged is not
        killed()
    return into_rows(kind, record)

def add_entry(connection, what, *rest):
    entry = into_log(connection, what, *rest)
    if what.startswith("Approve"):
        killed()
    return entry

if where == "rows":
    writing.row_of = row_of
if where == "log":
    writing._add_entry = add_entry
bound = mill.library.limit(4)
while True:
    bound = edits.set_bound(mill, bound.id, "minimum", bound.minimum + 0.001).changes[0].after
    number = approve(mill, LAMB).number
    if where == "said":
        killed()
    print(number, flush=True)
"""


def killed_child(path: Path, where: str, after_s: float | None = None) -> list[int]:
    """The numbers that a child said it had approved before it was killed."""
    environment = {**os.environ, "PYTHONPATH": str(ROOT)}
    with subprocess.Popen([sys.executable, "-c", CHILD, str(path), where], stdout=subprocess.PIPE, text=True,
                          env=environment) as child:
        assert child.stdout is not None
        said = []
        if after_s is not None:
            said.append(int(child.stdout.readline()))
            timer = threading.Timer(after_s, child.kill)
            timer.start()
        said += [int(line) for line in child.stdout if line.endswith("\n")]
    assert child.returncode == -9
    return said


def whole(path: Path) -> Mill:
    """The mill opened again, after it was seen that every version in it is whole."""
    mill = open_mill(path)
    assert alterations(mill.library) == []
    found = versions_of(mill.library, LAMB)
    assert [v.number for v in found] == list(range(1, len(found) + 1))
    approved = [v for v in found if v.state is VersionState.APPROVED]
    assert len(approved) == 1
    for version in found:
        count = len(acknowledgements_of(mill.library, version.id))
        assert count == (0 if version.state is VersionState.DRAFT else 1)
    return mill


@pytest.fixture
def path(tmp_path: Path) -> Path:
    """A mill file with version 1 approved, closed."""
    library = feed_library()
    changes = [added(record) for kind in KINDS for record in library.all(kind)]
    mill = Mill(create(tmp_path / "feed.mill", changes), "Ann")
    staffed(mill)
    approve(mill, LAMB)
    mill.close()
    return mill.path


@pytest.mark.parametrize(("where", "states"), [
    ("rows", ["approved", "draft"]), ("log", ["approved", "draft"]), ("said", ["superseded", "approved"]),
])
def test_a_kill_within_an_approval_leaves_one_outcome(path: Path, where: str, states: list[str]) -> None:
    assert killed_child(path, where) == []
    mill = whole(path)
    assert [v.state.value for v in versions_of(mill.library, LAMB)] == states
    if "draft" in states:
        assert approve(mill, LAMB).number == 2
    mill.close()


def test_kills_at_any_time_lose_no_approval_that_was_said(path: Path) -> None:
    chance = random.Random(3)
    for _turn in range(3):
        said = killed_child(path, "anywhere", chance.uniform(0.0, 0.3))
        mill = whole(path)
        approved = max(v.number for v in versions_of(mill.library, LAMB) if v.state is not VersionState.DRAFT)
        assert said[-1] <= approved <= said[-1] + 1
        mill.close()
