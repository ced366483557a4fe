"""Mill files and other people's files: what the menu does with them. Questions about files are the system's own."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QObject, QSettings, Signal
from PySide6.QtWidgets import QFileDialog, QWidget

from blendapp.desk.work import Work
from blendapp.domain.mills import ListAbout
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import workbook
from blendapp.services.mill import MillFileError, open_mill

RECENT, MOST_RECENT = "recent", 8


class Files(QObject):
    """said: a sentence with what can be listed below it. ask_open, ask_save can be replaced by a test."""

    said = Signal(str, list)
    recent_changed = Signal()

    def __init__(self, work: Work, window: QWidget, settings: QSettings) -> None:
        super().__init__(window)
        self.work = work
        self.window_of = window
        self.settings = settings
        self.ask_open: Callable[[str, str], str] = self._system_open
        self.ask_save: Callable[[str, str, str], str] = self._system_save
        self._begin_in: Path | None = None

    def _system_open(self, title: str, kinds: str) -> str:
        return QFileDialog.getOpenFileName(self.window_of, title, self._folder(), kinds)[0]

    def _system_save(self, title: str, name: str, kinds: str) -> str:
        return QFileDialog.getSaveFileName(self.window_of, title, str(Path(self._folder()) / name), kinds)[0]

    def _folder(self) -> str:
        if self._begin_in is not None:
            return str(self._begin_in)
        return str(self.work.mill.path.parent) if self.work.is_open else str(Path.home())

    # -- mill files

    def new(self) -> None:
        """Make an empty mill file and work on it."""
        path = self.ask_save(_("New mill file"), _("mill") + ".mill", _mills())
        if path:
            self.make(with_ending(path, ".mill"), None)

    def new_from(self) -> None:
        """Make a mill file from an exchange workbook and work on it."""
        source = self.ask_open(_("Workbook to begin with"), _workbooks())
        if not source:
            return
        path = self.ask_save(_("New mill file"), Path(source).stem + ".mill", _mills())
        if path:
            self.make(with_ending(path, ".mill"), Path(source))

    def make(self, path: Path, source: Path | None) -> None:
        """Make a mill file at a path, from a workbook if one is given."""
        def job() -> None:
            mill, warnings = workbook.new_mill(path, source, on=self.work.on, name=path.stem)
            self.work.open(mill)
            self._remember(path)
            if warnings:
                self.said.emit(_("The mill is made. The workbook had these oddities:"), [str(one) for one in warnings])

        self._try(job)

    def open(self) -> None:
        """Choose a mill file and work on it."""
        path = self.ask_open(_("Open a mill file"), _mills())
        if path:
            self.open_path(Path(path))

    def open_path(self, path: Path) -> None:
        """Work on a mill file."""
        def job() -> None:
            if self.work.is_open and self.work.mill.path.resolve() == path.resolve():
                return
            mill = open_mill(path)
            self.work.open(mill)
            self._remember(path)
            if not mill.writable:
                self.said.emit(mill.why_read_only or _("This mill file can only be read here."), [])

        self._try(job)

    def save_copy(self) -> None:
        """Write a whole copy of the mill file elsewhere; work goes on in this one."""
        mill = self.work.mill
        path = self.ask_save(_("Save a copy as"), mill.path.stem + _(" copy") + ".mill", _mills())
        if not path:
            return
        target = with_ending(path, ".mill")

        def job() -> None:
            mill.store.backup(target)
            text = _("A copy is in {file}. You go on working in {mill}.")
            self.said.emit(text.format(file=target, mill=mill.path.name), [])

        self._try(job)

    # -- workbooks

    def import_workbook(self) -> None:
        """Take a workbook into the open mill as one undo."""
        path = self.ask_open(_("Bring in a workbook"), _workbooks())
        if not path:
            return

        def job() -> None:
            edit, warnings = self.work.do_with(lambda mill: workbook.import_workbook(mill, path, self.work.on))
            text = _("{count} records came in from {file}; Ctrl+Z takes them all back.")
            self.said.emit(text.format(count=len(edit.changes), file=Path(path).name), [str(one) for one in warnings])

        self._try(job)

    def export_workbook(self) -> None:
        """Write the whole library as a workbook."""
        name = self.work.mill.path.stem + ".xlsx"
        path = self.ask_save(_("Write the workbook"), name, _workbooks())
        if not path:
            return
        target = with_ending(path, ".xlsx")

        def job() -> None:
            warnings = workbook.export_workbook(self.work.library, target, self.work.on)
            self.said.emit(_("The workbook is in {file}.").format(file=target), [str(one) for one in warnings])

        self._try(job)

    def write_table(self, title: str, name: str, write: Callable[[Path], object]) -> None:
        """Have a table written where the person says. name: of the file that is proposed."""
        kinds = _("Workbooks ({workbook});;Delimited text ({text})").format(workbook="*.xlsx", text="*.csv")
        path = self.ask_save(title, name, kinds)
        if not path:
            return
        target = with_ending(path, ".xlsx")

        def job() -> None:
            write(target)
            self.said.emit(_("The table is in {file}.").format(file=target), [])

        self._try(job)

    def ask_list(self, about: ListAbout, folder: Path | None) -> Path | None:
        """Choose a list of prices or of analyses, beginning in a folder."""
        patterns = "*.xlsx *.xlsm *.xls *.xlsb *.ods *.csv *.txt *.tsv"
        kinds = _("Lists ({patterns});;All files (*)").format(patterns=patterns)
        self._begin_in = folder
        path = self.ask_open(_("Read a price list") if about is ListAbout.PRICES else _("Read analyses"), kinds)
        self._begin_in = None
        return Path(path) if path else None

    # -- recent

    def recent(self) -> list[Path]:
        """The mill files opened last, the latest first, those that are still there."""
        stored = self.settings.value(RECENT, [])
        names = [stored] if isinstance(stored, str) else stored if isinstance(stored, list) else []
        return [Path(name) for name in names if Path(name).is_file()]

    def _remember(self, path: Path) -> None:
        whole = path.resolve()
        kept = [whole, *(one for one in self.recent() if one != whole)][:MOST_RECENT]
        self.settings.setValue(RECENT, [str(one) for one in kept])
        self.recent_changed.emit()

    def _try(self, job: Callable[[], object]) -> None:
        try:
            job()
        except Refused as refusal:
            lines = [str(problem) for problem in refusal.problems]
            if len(lines) == 1:
                self.said.emit(lines[0], [])
            else:
                text = _("Nothing was taken; {count} things must be mended first:")
                self.said.emit(text.format(count=len(lines)), lines)
        except (MillFileError, OSError) as error:
            self.said.emit(str(error), [])


def with_ending(path: str, ending: str) -> Path:
    """A path with an ending, if it has none."""
    chosen = Path(path)
    return chosen if chosen.suffix else chosen.with_suffix(ending)


def _mills() -> str:
    return _("Mill files ({pattern})").format(pattern="*.mill")


def _workbooks() -> str:
    return _("Workbooks ({pattern})").format(pattern="*.xlsx *.xlsm")
