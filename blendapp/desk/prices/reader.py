"""Reads lists beside the window, with what was answered for each: the last reading asked for wins."""

from __future__ import annotations

import traceback
from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QObject, Signal

from blendapp.desk.aside import Aside
from blendapp.desk.prices.replies import AllReplies, Replies
from blendapp.desk.work import Work
from blendapp.domain.list_rows import Answer, ListReading
from blendapp.domain.mills import ListAbout
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services.arriving import read_list

Read = Callable[..., ListReading]


class ListReader(QObject):
    """replies, reading: of the list in view, None before the first. came: after another reading, with whether it is
    the first of its list. unsettled: an answer that changed nothing and was dropped. failed: the sentence why there is
    no reading. refused: whose first reading that was, None where it was a further one. read can be replaced by a test.
    """

    came = Signal(bool)
    failed = Signal(str)

    def __init__(self, work: Work, parent: QObject) -> None:
        super().__init__(parent)
        self.work = work
        self.all_replies = AllReplies()
        self.replies: Replies | None = None
        self.reading: ListReading | None = None
        self.unsettled: Answer | None = None
        self.refused: Replies | None = None
        self.running = False
        self.read: Read = read_list
        self._coming: Replies | None = None
        self._aside = Aside(self, (Refused, OSError, ValueError))
        self._aside.done.connect(self._take)

    def begin(self, path: Path, about: ListAbout) -> None:
        """Read a list, with what was answered for it before; one that was taken begins without answers."""
        replies = self.all_replies.of(path, about)
        if self.is_taken(replies):
            replies = self.all_replies.begin_anew(replies)
        self._coming = replies
        self.again()

    def again(self) -> None:
        """Read the list again, as its file and the mill are now, with the answers given so far."""
        replies = self._coming or self.replies
        if replies is None:
            return
        self.unsettled = None
        self._ask(replies)

    def _ask(self, replies: Replies) -> None:
        library, on, read = self.work.library.copy(), self.work.on, self.read
        path, about, answers, source = replies.path, replies.about, tuple(replies.answers), replies.source
        self.running = True

        def job() -> ListReading:
            try:
                return read(library, path, on, about, answers, source)
            except (Refused, OSError, ValueError):
                raise
            except Exception as fault:
                # A page that waits for ever would be worse; the trace is for whoever mends the program.
                traceback.print_exc()
                text = _("The program failed in reading {file} ({fault}); nothing was changed.")
                raise Refused(text.format(file=path.name, fault=f"{type(fault).__name__}: {fault}")) from fault

        self._aside.ask(job)

    def forget(self) -> None:
        """Nobody waits any more."""
        self.running = False
        self._aside.forget()

    def forget_all(self) -> None:
        """Another mill file is opened: its lists are not these."""
        self.forget()
        self.all_replies.clear()
        self.replies = self._coming = self.reading = self.unsettled = self.refused = None

    def is_taken(self, replies: Replies) -> bool:
        """Whether the list that they answer was taken, and stands."""
        kept = self.work.library.records["price_list"].get(replies.taken_as or 0)
        return kept is not None and kept.withdrawn is None

    def _take(self, reading: ListReading | None, fault: Exception | None) -> None:
        self.running = False
        if reading is not None:
            self._took(reading)
        elif isinstance(fault, Refused):
            self._fail(" ".join(str(one) for one in fault.problems))
        else:
            self._fail(str(fault))

    def _took(self, reading: ListReading) -> None:
        replies = self._coming or self.replies
        if replies is None:
            return
        changed = not replies.is_of(reading)
        replies.digest = reading.digest
        if changed:
            replies.forget_rows()
            self._ask(replies)
            return
        first = self._coming is not None or self.reading is None
        dropped = None if first else replies.drop_unsettled(self.reading, reading)
        if dropped is not None:
            self.unsettled = dropped
            self._ask(replies)
            return
        self.replies, self._coming, self.reading = replies, None, reading
        self.came.emit(first)

    def look_at_refused(self) -> None:
        """The file that was refused is the one in view; there is no reading of it."""
        if self.refused is not None:
            self.replies, self.reading = self.refused, None

    def _fail(self, sentence: str) -> None:
        self.refused, self._coming = self._coming, None
        self.failed.emit(sentence)
