"""The process that opens workbooks: whatever becomes of it, there is one sentence, and the next file is read."""

from __future__ import annotations

import os
import signal
import subprocess
import sys
import threading
import time
from collections.abc import Iterator
from enum import Enum
from pathlib import Path
from typing import Any

import pytest

from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.exchange import parse_child, parsing, read_price_list
from blendapp.exchange.file_guard import Format
from tests.exchange.made_lists import Rows, write_ods, write_text, write_xls, write_xlsx
from tests.mills import TODAY

ROOT = Path(__file__).resolve().parent.parent.parent
ROWS: Rows = [["Ingredient", "Price", "Unit"], ["Maize", 205, "t"]]
posix = pytest.mark.skipif(os.name != "posix", reason="limits of processes are those of POSIX systems")


@pytest.fixture(autouse=True)
def _no_process_left() -> Iterator[None]:
    parsing.end_process()
    yield
    parsing.end_process()


def child_that(tmp_path: Path, monkeypatch: pytest.MonkeyPatch, does: str) -> None:
    """Every process started from now on does something else in place of parsing."""
    script = tmp_path / "child.py"
    script.write_text(
        f"import sys\nsys.path.insert(0, {str(ROOT)!r})\nimport os, pickle, time\n"
        "from blendapp.exchange import parse_child, spreadsheets\n"
        f"def instead(*_given):\n    {does}\n"
        "spreadsheets.parse_spreadsheet = instead\nparse_child.main()\n"
    )
    monkeypatch.setattr(parse_child, "__file__", str(script))


def sentence(path: Path) -> str:
    with pytest.raises(Refused) as caught:
        read_price_list(path, Library(), TODAY)
    (problem,) = caught.value.problems
    return str(problem)


@posix
@pytest.mark.parametrize(
    ("does", "said"),
    [
        ("while True: pass", "takes too long"), ("time.sleep(60)", "takes too long"), ("os.abort()", "damaged"),
        ("os._exit(0)", "damaged"), ("raise ValueError(_given)", "damaged"),
        ("return bytearray(1 << 32)", "more memory"),
        ("return [os.system]", "damaged"), ("os.write(1, b'\\0' * 8); time.sleep(60)", "damaged"),
        ("os.close(1); os._exit(0)", "damaged"),
    ],
)
def test_a_process_that_breaks_down_is_one_sentence(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, library: Library, does: str, said: str
) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", ROWS)
    with monkeypatch.context() as changed:
        child_that(tmp_path, changed, does)
        changed.setattr(parsing, "LEAST_SECONDS", 0.3)
        changed.setattr(parsing, "LEAST_WAIT_SECONDS", 1.0)
        assert said in sentence(path)
    assert len(read_price_list(path, library, TODAY).accepted) == 1


@posix
def test_the_process_ends_with_its_parent_in_the_midst_of_a_file(tmp_path: Path) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", ROWS)
    pid = tmp_path / "pid"
    script = tmp_path / "child.py"
    script.write_text(
        f"import sys\nsys.path.insert(0, {str(ROOT)!r})\nimport os, time\n"
        "from blendapp.exchange import parse_child, spreadsheets\n"
        f"def instead(*_given):\n    open({str(pid)!r}, 'w').write(str(os.getpid()))\n    time.sleep(600)\n"
        "spreadsheets.parse_spreadsheet = instead\nparse_child.main()\n"
    )
    parent = subprocess.Popen([sys.executable, "-c", (
        f"import sys\nsys.path.insert(0, {str(ROOT)!r})\nfrom blendapp.exchange import parse_child, parsing\n"
        f"parse_child.__file__ = {str(script)!r}\nparsing.parse_packed(open({str(path)!r}, 'rb').read())\n"
    )])
    until = time.monotonic() + 30
    while not (pid.exists() and pid.read_text()) and time.monotonic() < until:
        time.sleep(0.02)
    child = int(pid.read_text())
    parent.send_signal(signal.SIGKILL)
    parent.wait()
    while is_running(child) and time.monotonic() < until:
        time.sleep(0.02)
    assert not is_running(child)


def is_running(pid: int) -> bool:
    try:
        state = Path(f"/proc/{pid}/stat").read_text().rpartition(")")[2].split()[0]
    except OSError:
        try:
            os.kill(pid, 0)
        except OSError:
            return False
        return not Path("/proc/self").exists()
    return state != "Z"


def test_one_process_is_kept_for_the_next_file(tmp_path: Path, library: Library) -> None:
    for write in (write_xlsx, write_ods, write_xls):
        assert len(read_price_list(write(tmp_path / "list", ROWS), library, TODAY).accepted) == 1
        kept = parsing._kept
        assert kept is not None
        read_price_list(tmp_path / "list", library, TODAY)
        assert parsing._kept is kept


def test_a_kept_process_that_has_gone_is_replaced(tmp_path: Path, library: Library) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", ROWS)
    read_price_list(path, library, TODAY)
    kept = parsing._kept
    assert kept is not None
    kept._process.kill()
    kept._process.wait()
    assert len(read_price_list(path, library, TODAY).accepted) == 1


def test_threads_read_at_the_same_time(tmp_path: Path, library: Library) -> None:
    paths = [write_xlsx(tmp_path / f"{n}.xlsx", [*ROWS, ["Wheat", 200 + n, "t"]]) for n in range(4)]
    found: dict[int, float | None] = {}

    def read(number: int) -> None:
        found[number] = read_price_list(paths[number], library, TODAY).accepted[1].price_per_t

    threads = [threading.Thread(target=read, args=(number,)) for number in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert found == {number: 200.0 + number for number in range(4)}


def test_where_no_process_can_be_started_text_is_read_and_a_workbook_refused(
    tmp_path: Path, library: Library, monkeypatch: pytest.MonkeyPatch
) -> None:
    def refuse(*_given: Any, **_more: Any) -> None:
        raise PermissionError

    monkeypatch.setattr(subprocess, "Popen", refuse)
    assert "No process can be started" in sentence(write_xlsx(tmp_path / "list.xlsx", ROWS))
    assert len(read_price_list(write_text(tmp_path / "list.csv", ROWS), library, TODAY).accepted) == 1


def test_the_program_itself_serves_as_the_process_where_it_is_frozen(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    started: list[list[str]] = []
    real = subprocess.Popen

    def start(command: list[str], **more: Any) -> Any:
        started.append(command)
        return real([sys.executable, "-c", (
            f"import sys\nsys.path.insert(0, {str(ROOT)!r})\nfrom blendapp.__main__ import main\n"
            f"sys.exit(main({command[1:]!r}))"
        )], **more)

    monkeypatch.setattr(sys, "frozen", True, raising=False)
    monkeypatch.setattr(subprocess, "Popen", start)
    found, (table,) = parsing.parse_packed(write_xlsx(tmp_path / "list.xlsx", ROWS).read_bytes())
    assert started == [[sys.executable, "--parse-table"]]
    assert (found, table.rows[1]) == (Format.XLSX, ["Maize", 205.0, "t"])


def test_what_the_process_answers_holds_no_enumeration(tmp_path: Path) -> None:
    """Python 3.11.0 to 3.11.3 pickles one as a call of getattr, which is not taken back."""
    first, tables = parse_child.parsed(write_xlsx(tmp_path / "list.xlsx", ROWS).read_bytes())
    assert type(first) is str
    assert isinstance(tables, list)
    assert not any(isinstance(value, Enum) for table in tables for row in table.rows for value in row)
