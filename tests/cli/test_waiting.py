"""A command that writes waits a while for a mill file that another process has open; one that reads does not."""

from __future__ import annotations

import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from pathlib import Path
from types import SimpleNamespace

import pytest

from blendapp.cli import commands
from tests.cli.conftest import Run

Runner = Callable[..., Run]
HOLD = """
import sys
from blendapp.services.mill import open_mill
mill = open_mill(sys.argv[1])
print("held" if mill.writable else "not held", flush=True)
sys.stdin.read()
mill.close()
"""


@pytest.fixture
def holder(mill: Path) -> Iterator[subprocess.Popen[str]]:
    """Another process that has the mill file open until its standard input ends."""
    with subprocess.Popen(
        [sys.executable, "-c", HOLD, str(mill)], stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True
    ) as other:
        assert other.stdout is not None
        assert other.stdout.readline() == "held\n"
        yield other


def let_go(other: subprocess.Popen[str]) -> None:
    assert other.stdin is not None
    other.stdin.close()
    other.wait(30)


def sheet(run: Runner, mill: Path, folder: Path, *more: str) -> Run:
    return run("sheet", mill, "Sound", "--batch-kg", 1000, "-o", folder / "a.pdf", *more)


def test_a_sheet_is_printed_once_another_process_lets_the_file_go(
    run: Runner, mill: Path, tmp_path: Path, holder: subprocess.Popen[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    looked: list[float] = []

    def sleep(seconds: float) -> None:
        looked.append(seconds)
        if len(looked) == 2:
            let_go(holder)

    monkeypatch.setattr(commands, "WAIT_S", 600.0)
    monkeypatch.setattr(commands, "time", SimpleNamespace(monotonic=time.monotonic, sleep=sleep))
    found = sheet(run, mill, tmp_path)
    assert len(looked) == 2
    assert (found.status, found.err) == (0, "")
    assert "Batch sheet 1 " in found.out


def test_a_file_that_is_not_let_go_is_refused_and_nothing_written(
    run: Runner, mill: Path, tmp_path: Path, holder: subprocess.Popen[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(commands, "WAIT_S", 0.0)
    (line,) = sheet(run, mill, tmp_path).faults
    assert mill.name in line
    assert not (tmp_path / "a.pdf").exists()


def test_what_only_reads_waits_for_nobody(
    run: Runner, mill: Path, tmp_path: Path, holder: subprocess.Popen[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    def sleep(_seconds: float) -> None:
        raise AssertionError("waited")

    monkeypatch.setattr(commands, "time", SimpleNamespace(monotonic=time.monotonic, sleep=sleep))
    assert run("formulate", mill, "Sound").status == 0
    assert sheet(run, mill, tmp_path, "--page", "blank").status == 0
