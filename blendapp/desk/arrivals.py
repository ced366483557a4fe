"""How lists come into the window: chosen, dropped, or the latest of the folder in which they arrive."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from pathlib import Path

from PySide6.QtCore import QEvent, QObject, QSettings, QTimer
from PySide6.QtGui import QDropEvent
from PySide6.QtWidgets import QLineEdit, QWidget

from blendapp.desk.files import Files
from blendapp.desk.finder.search import Found
from blendapp.desk.prices.pane import ListPane
from blendapp.desk.strip import Strip
from blendapp.domain.mills import ListAbout
from blendapp.domain.wording import _
from blendapp.services.arriving import likely_about

FOLDER, MOST_OFFERED = "lists folder", 8
ENDINGS = (".xlsx", ".xlsm", ".xls", ".xlsb", ".ods", ".csv", ".txt", ".tsv")
# A list that takes longer than this is said to be on its way.
PATIENCE_MS = 250


class Arrivals(QObject):
    """show: brings the page of lists into view."""

    def __init__(
        self, window: QWidget, pane: ListPane, files: Files, strip: Strip, settings: QSettings,
        show: Callable[[QWidget], object],
    ) -> None:
        super().__init__(window)
        self.pane, self.files, self.strip, self.settings, self.show = pane, files, strip, settings, show
        self._reading: Path | None = None
        self._from_list = False
        self._patience = QTimer(self, singleShot=True, interval=PATIENCE_MS)
        self._patience.timeout.connect(self._say_wait)
        pane.arrived.connect(self._arrived)
        # What was said of the list leaves with the next answer, before its reading says anything new.
        pane.questions.answered.connect(lambda _answer: strip.clear())
        pane.reader.failed.connect(lambda _sentence: self._patience.stop())
        window.setAcceptDrops(True)
        for field in window.findChildren(QLineEdit):
            # A field would take a file that is dropped on it for a text.
            field.setAcceptDrops(False)
        window.installEventFilter(self)

    # -- choosing

    def choose(self, about: ListAbout, path: Path | None = None) -> None:
        """Read a list that is named, or chosen in the system's own panel."""
        if not self._can_read():
            return
        chosen = path or self.files.ask_list(about, self.folder)
        if chosen is not None:
            self._read(chosen, about)

    def drop(self, path: Path) -> None:
        """Take in a file that was dropped: a mill file is opened, a list is read as what its last one was."""
        if path.suffix.casefold() == ".mill":
            self.files.open_path(path)
        elif self._can_read():
            self._read(path, likely_about(self.pane.work.library, path.name))

    def latest(self) -> None:
        """Read the list that came last into the folder of lists."""
        found = self.in_folder()
        if not found:
            self.strip.say(_("No list stands in {folder}.").format(folder=self.folder or _("any folder yet")))
        elif self._can_read():
            self._read(found[0], likely_about(self.pane.work.library, found[0].name))

    def back(self) -> None:
        """Show the list again that was looked at last."""
        if self.has_list:
            self.show(self.pane)
            self.pane.focus_first()

    def leave_for_memory(self) -> None:
        """What is remembered is looked at from the page of a list; afterwards that page comes back."""
        self._from_list = True

    def return_from_memory(self) -> None:
        if self._from_list:
            self._from_list = False
            self.back()

    @property
    def has_list(self) -> bool:
        return self.pane.reading is not None

    @property
    def folder(self) -> Path | None:
        """Where the last list was read from."""
        stored = self.settings.value(FOLDER, "")
        return Path(stored) if isinstance(stored, str) and stored and Path(stored).is_dir() else None

    def in_folder(self) -> list[Path]:
        """The lists in that folder, the latest first."""
        folder = self.folder
        if folder is None:
            return []
        try:
            found = [one for one in folder.iterdir() if one.suffix.casefold() in ENDINGS and one.name[:1] not in "~."]
            return sorted(found, key=lambda one: one.stat().st_mtime, reverse=True)[:MOST_OFFERED]
        except OSError:
            return []

    def found(self) -> list[Found]:
        """The lists that have arrived, as things to find."""
        if not self._can_read():
            return []
        return [Found(path.name, _("list that arrived"), partial(self.drop, path)) for path in self.in_folder()]

    def _can_read(self) -> bool:
        return self.pane.work.is_open and self.pane.work.mill.writable

    def _read(self, path: Path, about: ListAbout) -> None:
        self._reading = path
        self._patience.start()
        self.pane.begin(path, about)

    def _arrived(self) -> None:
        self._patience.stop()
        if self._reading is not None:
            self.settings.setValue(FOLDER, str(self._reading.resolve().parent))
        self.show(self.pane)
        self.pane.focus_first()

    def _say_wait(self) -> None:
        if self._reading is not None and self.pane.reader.running:
            self.strip.say(_("Reading {file}…").format(file=self._reading.name))

    # -- taking back on the page of a list

    def undo_words(self) -> str:
        """What undo would take back of the answers in view, "" for nothing."""
        return self.pane.last_answer if self.pane.isVisible() else ""

    def redo_words(self) -> str:
        """What redo would answer again, "" for nothing."""
        return self.pane.last_taken_back if self.pane.isVisible() else ""

    # -- dropping

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if event.type() in (QEvent.Type.DragEnter, QEvent.Type.DragMove, QEvent.Type.Drop):
            assert isinstance(event, QDropEvent)
            paths = [Path(url.toLocalFile()) for url in event.mimeData().urls() if url.isLocalFile()]
            if len(paths) == 1 and paths[0].is_file():
                event.acceptProposedAction()
                if event.type() == QEvent.Type.Drop:
                    # After this event: whoever dragged the file waits until it returns.
                    QTimer.singleShot(0, self, partial(self.drop, paths[0]))
                return True
        return super().eventFilter(watched, event)
