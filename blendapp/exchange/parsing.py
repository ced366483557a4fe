"""Has workbooks opened by a process of their own, under limits of memory and time, and takes their tables from there.

The process is kept for the next file, since a list is read anew with every answer; one that broke down is not.
"""

from __future__ import annotations

import atexit
import io
import os
import pickle
import subprocess
import sys
import threading
from contextlib import suppress
from typing import Any

from blendapp.exchange import parse_child
from blendapp.exchange.file_guard import Format, Unfit
from blendapp.exchange.tables import RawTable

MOST_MEMORY_BYTES = 2_000_000_000
# Of processor time: a small hostile file is given up within two seconds, a large honest one is read to its end.
LEAST_SECONDS = 1.2
SECONDS_PER_MEGABYTE = 8.0
MOST_SECONDS = 60.0
# What has grown by a large file is not kept.
MOST_KEPT_BYTES = 20_000_000
# By the clock, since a busy machine may give a process little of its time.
LEAST_WAIT_SECONDS = 20.0

_PLAIN = {
    ("blendapp.exchange.tables", name)
    for name in ("RawTable", "ErrorCell", "NoStoredValue", "PercentCell", "MergedRange")
} | {("datetime", name) for name in ("date", "datetime", "time", "timedelta")} | {
    ("builtins", "frozenset"),
}


class _TableUnpickler(pickle.Unpickler):
    """Takes tables and nothing else, whatever a broken parser may have been made to write."""

    def find_class(self, module: str, name: str) -> Any:
        if (module, name) not in _PLAIN:
            raise pickle.UnpicklingError(name)
        return super().find_class(module, name)


def parse_packed(data: bytes) -> tuple[Format, list[RawTable]]:
    """Format and sheets of a file that begins as a workbook does. Raises Unfit, whatever becomes of the process.

    Another thread that asks meanwhile gets a process of its own.
    """
    global _kept
    with _lock:
        child, _kept = _kept, None
    if child is None or not child.is_alive:
        child = _Child()
    written = child.ask(data)
    try:
        first, second = _TableUnpickler(io.BytesIO(written)).load()
    except (pickle.UnpicklingError, EOFError, ValueError, TypeError, AttributeError, ImportError, IndexError):
        child.close()
        raise Unfit("broken") from None
    sound = first != "memory" and len(written) <= MOST_KEPT_BYTES
    with _lock:
        spare, _kept = (_kept, child) if sound else (child, _kept)
    if spare is not None:
        spare.close()
    if isinstance(second, list):
        return Format(first), second
    raise Unfit(first, **second)


class _Child:
    """One process that parses. It has gone once `ask` raised, or gave nothing."""

    def __init__(self) -> None:
        command = [sys.executable, "-P", parse_child.__file__]
        if getattr(sys, "frozen", False):
            command = [sys.executable, parse_child.FLAG]
        try:
            self._process = subprocess.Popen(
                command, stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.DEVNULL,
                creationflags=getattr(subprocess, "CREATE_NO_WINDOW", 0),
            )
        except OSError:
            raise Unfit("no process") from None
        self.owner = os.getpid()  # a copy of this process that was forked must not share the pipes

    @property
    def is_alive(self) -> bool:
        return self.owner == os.getpid() and self._process.poll() is None

    def ask(self, data: bytes) -> bytes:
        """What the process says of a file. Raises Unfit where it gave no answer, or none in time."""
        seconds = min(LEAST_SECONDS + SECONDS_PER_MEGABYTE * len(data) / 1e6, MOST_SECONDS)
        source, target = self._process.stdout, self._process.stdin
        assert source is not None
        assert target is not None
        clock = threading.Timer(max(LEAST_WAIT_SECONDS, 3 * seconds), self._process.kill)
        clock.daemon = True
        clock.start()
        try:
            target.write(f"{len(data)} {MOST_MEMORY_BYTES} {seconds}\n".encode() + data)
            target.flush()
            length = source.read(parse_child.LENGTH_BYTES)
            written = source.read(int.from_bytes(length, "big"))
        except OSError:  # it ended before it had read everything
            length = written = b""
        overdue = not clock.is_alive()
        clock.cancel()
        if len(length) == parse_child.LENGTH_BYTES and len(written) == int.from_bytes(length, "big"):
            return written
        raise Unfit("slow" if self._end() or overdue else "broken")

    def _end(self) -> bool:
        """Ends the process; whether its limit of processor time had ended it before."""
        self.close()
        return self._process.returncode == -_signal_of_time()

    def close(self) -> None:
        if self.owner == os.getpid():
            with self._process:
                if self._process.stdin is not None and self._process.poll() is None:
                    with suppress(OSError):
                        self._process.stdin.close()
                    try:
                        self._process.wait(0.2)
                    except subprocess.TimeoutExpired:
                        self._process.kill()


def _signal_of_time() -> int:
    import signal

    return int(getattr(signal, "SIGPROF", 1 << 20))


_kept: _Child | None = None
_lock = threading.Lock()


@atexit.register
def end_process() -> None:
    """Ends the process that is kept, if any; the next file starts another one."""
    global _kept
    with _lock:
        child, _kept = _kept, None
    if child is not None:
        child.close()
