"""Work on a thread beside the window: the last asked for wins, and a closed window gets nothing."""

from __future__ import annotations

import contextlib
import threading
from collections.abc import Callable
from typing import Any

from PySide6.QtCore import QObject, Signal


class Aside(QObject):
    """done: what the job gave, or the exception it raised; only of the job that was asked for last."""

    done = Signal(object, object)
    _came = Signal(int, object, object)

    def __init__(self, parent: QObject, expected: tuple[type[Exception], ...]) -> None:
        super().__init__(parent)
        self._expected = expected
        self._asked = 0
        self._taken = 0
        self._running = False
        self._next: Callable[[], Any] | None = None
        self._thread: threading.Thread | None = None
        self._gave: tuple[int, object, object] | None = None
        self._came.connect(self._take)

    def ask(self, job: Callable[[], Any]) -> None:
        """Have a job done; one that is running is let finish, and what it gives is dropped."""
        self._asked += 1
        self._next = job
        if not self._running:
            self._begin()

    def forget(self) -> None:
        """Drop what is running and what waits."""
        self._asked += 1
        self._next = None

    def _begin(self) -> None:
        job, self._next = self._next, None
        assert job is not None
        self._running = True
        asked = self._asked

        def run() -> None:
            given: Any = None
            fault: Exception | None = None
            try:
                given = job()
            except self._expected as failure:
                fault = failure
            self._gave = (asked, given, fault)
            # The window may have been closed meanwhile; then nobody waits for this.
            with contextlib.suppress(RuntimeError):
                self._came.emit(asked, given, fault)

        self._thread = threading.Thread(target=run, daemon=True, name="aside")
        self._thread.start()

    @property
    def running(self) -> bool:
        """Whether a job is being done."""
        return self._running

    def finish(self) -> None:
        """Wait for the job that is being done, and hand on what it gives: for what must not be lost."""
        if self._running and self._thread is not None:
            self._thread.join()
            if self._gave is not None:
                self._take(*self._gave)

    def _take(self, asked: int, given: object, fault: object) -> None:
        if asked <= self._taken:
            # It was waited for, and has been handed on.
            return
        self._taken = asked
        self._running = False
        if self._next is not None:
            self._begin()
        elif asked == self._asked:
            self.done.emit(given, fault)
