"""The process in which foreign workbooks are opened: it may take only so much memory and time, and can do no harm.

It is run as a script, or by the frozen program with the flag FLAG. For each file it takes a line on standard input with
the number of bytes of the file, its greatest memory in bytes and its greatest seconds of processor time, and then the
file; on standard output it gives eight bytes with a length and what `parsed` returns, pickled. It ends when standard
input does, also in the midst of a file, so that it outlives nobody. It imports as little as it can.
"""

from __future__ import annotations

import os
import pickle
import sys
from typing import TYPE_CHECKING, BinaryIO

if __name__ == "__main__":  # run as a script: the program is found from here, whoever started it
    sys.path.insert(0, os.path.dirname(os.path.dirname(os.path.dirname(os.path.abspath(__file__)))))

if TYPE_CHECKING:
    from queue import SimpleQueue

    from blendapp.exchange.tables import RawTable

FLAG = "--parse-table"
LENGTH_BYTES = 8


def parsed(data: bytes) -> tuple[str, list[RawTable]] | tuple[str, dict[str, object]]:
    """Format and sheets of a packed file, or why it is not opened: the reason and values of a file_guard.Unfit.

    The format goes by its text, since some versions of Python pickle an enumeration by a call.
    """
    from blendapp.exchange.file_guard import Unfit, packed_format
    from blendapp.exchange.spreadsheets import parse_spreadsheet

    try:
        found = packed_format(data)
        return found.value, parse_spreadsheet(data, found)
    except Unfit as unfit:
        return unfit.reason, unfit.values
    except MemoryError:
        return "memory", {}


def main() -> int:
    """Serves until standard input ends."""
    import queue
    import threading

    asked: SimpleQueue[tuple[int, float, bytes]] = queue.SimpleQueue()
    source, target = os.fdopen(0, "rb"), os.fdopen(os.dup(1), "wb")
    threading.Thread(target=_listen, args=(source, asked), daemon=True).start()
    while True:
        memory, seconds, data = asked.get()
        _limit(memory, seconds)
        answer = pickle.dumps(parsed(data), pickle.HIGHEST_PROTOCOL)
        _limit(memory, 0)
        target.write(len(answer).to_bytes(LENGTH_BYTES, "big") + answer)
        target.flush()


def _listen(source: BinaryIO, asked: SimpleQueue[tuple[int, float, bytes]]) -> None:
    """Takes in files; ends this process with standard input: the parent is gone, or waits no longer."""
    while line := source.readline():
        size, memory, seconds = line.split()
        asked.put((int(memory), float(seconds), source.read(int(size))))
    os._exit(0)


def _limit(memory: int, seconds: float) -> None:
    """Limits of memory and time where the system has them, 0 s for no limit; the parent keeps its own clock besides."""
    try:
        import resource
        import signal

        signal.setitimer(signal.ITIMER_PROF, seconds)  # its signal ends the process, whatever the parser is doing
        resource.setrlimit(resource.RLIMIT_CORE, (0, 0))
        resource.setrlimit(resource.RLIMIT_AS, (memory, memory))
    except (ImportError, AttributeError, ValueError, OSError):
        return


if __name__ == "__main__":
    sys.exit(main())
