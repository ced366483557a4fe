"""Keeping what a solver's own code prints off standard output: it can print a line though told not to."""

from __future__ import annotations

import contextlib
import ctypes
import os
import sys
import threading
from collections.abc import Iterator

_lock = threading.Lock()
_inside = 0
_kept: int | None = None


@contextlib.contextmanager
def quiet() -> Iterator[None]:
    """Send standard output nowhere. It is the process's one: the first thread in turns it off, the last out on."""
    global _inside, _kept
    with _lock:
        if _inside == 0:
            _kept = _turn_off()
        _inside += 1
    try:
        yield
    finally:
        with _lock:
            _inside -= 1
            if _inside == 0 and _kept is not None:
                _flush()  # or what was printed stays in C's buffer and comes out later
                os.dup2(_kept, 1)
                os.close(_kept)
                _kept = None


def _turn_off() -> int | None:
    """The descriptor to turn back to; None in a program without a standard output."""
    try:
        sys.stdout.flush()
        kept = os.dup(1)
    except (OSError, ValueError, AttributeError):
        return None
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, 1)
    os.close(nowhere)
    return kept


def _flush() -> None:
    with contextlib.suppress(OSError, AttributeError):
        ctypes.CDLL("ucrtbase" if sys.platform == "win32" else None).fflush(None)
