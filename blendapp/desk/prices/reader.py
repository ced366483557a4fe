"""Reads lists beside the window: the last reading asked for wins."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QObject, Signal

from blendapp.desk.aside import Aside
from blendapp.desk.prices.session import Session
from blendapp.desk.work import Work
from blendapp.domain.list_rows import ListReading
from blendapp.domain.problems import Refused
from blendapp.services.arriving import read_list

Read = Callable[..., ListReading]


class ListReader(QObject):
    """came: the reading of a session. failed: the sentence why there is none. read can be replaced by a test."""

    came = Signal(object)
    failed = Signal(str)

    def __init__(self, work: Work, parent: QObject) -> None:
        super().__init__(parent)
        self.work = work
        self.running = False
        self.read: Read = read_list
        self._aside = Aside(self, (Refused, OSError, ValueError))
        self._aside.done.connect(self._take)

    def begin(self, session: Session) -> None:
        """Read the list of a session as the mill is now, with the answers given so far."""
        library, on, read = self.work.library.copy(), self.work.on, self.read
        path, about, answers, source = session.path, session.about, tuple(session.answers), session.source
        self.running = True
        self._aside.ask(lambda: read(library, path, on, about, answers, source))

    def forget(self) -> None:
        """Nobody waits any more."""
        self.running = False
        self._aside.forget()

    def _take(self, reading: ListReading | None, fault: Exception | None) -> None:
        self.running = False
        if reading is not None:
            self.came.emit(reading)
        elif isinstance(fault, Refused):
            self.failed.emit(" ".join(str(one) for one in fault.problems))
        else:
            self.failed.emit(str(fault))
