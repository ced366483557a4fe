"""Pages of batches onto paper and into files. A batch sheet gets its number with it; the other two pages have none."""

from __future__ import annotations

import tempfile
from collections.abc import Callable
from pathlib import Path
from typing import TypeVar

from PySide6.QtCore import QObject, Signal
from PySide6.QtGui import QPageSize, QPainter
from PySide6.QtWidgets import QFileDialog, QWidget

from blendapp.desk.sheet.pages import images_for_printer
from blendapp.desk.work import Work
from blendapp.domain.batches import Batch, BatchPage
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import batch as batches
from blendapp.services import sheets
from blendapp.services.mill import MillFileError

Done = TypeVar("Done")


class Printing(QObject):
    """said: a sentence. ask_save, choose_printer and print_pdf can be replaced by a test."""

    said = Signal(str, list)

    def __init__(self, work: Work, window: QWidget) -> None:
        super().__init__(window)
        self.work = work
        self._window = window
        self.ask_save: Callable[[str, str], str] = self._system_save
        self.choose_printer: Callable[[str], bool] = self._system_choose
        self.print_pdf: Callable[[bytes], bool] = self._system_print

    # -- a batch

    def to_file(self, batch: Batch, page: BatchPage, reason: str = "", by: str = "") -> Batch | None:
        """Keep a page as a PDF; returns the batch as it was kept, None where it was not."""
        path = self.ask_save(_title(page), _file_name(batch, page))
        if not path:
            return None
        target = _pdf(path)
        done = self._try(lambda: self._write(batch, page, target, reason, by))
        if done is not None:
            if page is BatchPage.SHEET:
                self.said.emit(_("Batch sheet {number} is in {file}.").format(number=done.number, file=target), [])
            else:
                self.said.emit(_("The page is in {file}.").format(file=target), [])
        return done

    def to_printer(
        self, batch: Batch, page: BatchPage, reason: str = "", by: str = "",
        still: Callable[[], bool] = lambda: True,
    ) -> Batch | None:
        """Print a page. still: whether the batch is still the one in view once the printer is chosen."""
        if not self.choose_printer(batch.paper):
            return None
        if not still():
            self.said.emit(_("The batch changed while the printer was chosen; nothing was printed."), [])
            return None
        with tempfile.TemporaryDirectory() as folder:
            path = Path(folder) / "page.pdf"
            done = self._try(lambda: self._write(batch, page, path, reason, by))
            if done is not None and self.print_pdf(path.read_bytes()):
                if page is BatchPage.SHEET:
                    self.said.emit(_("Batch sheet {number} is printed.").format(number=done.number), [])
                else:
                    self.said.emit(_("The page is printed."), [])
        return done

    def _write(self, batch: Batch, page: BatchPage, path: Path, reason: str, by: str) -> Batch:
        if page is BatchPage.SHEET:
            return batches.print_sheet(self.work.mill, batch, path, reason=reason, by=by)
        sheets.write_page(batch, path, page)
        return batch

    # -- a copy

    def copy_to_file(self, record_id: int) -> Batch | None:
        """Keep a printed sheet again, marked as a copy."""
        number = self.work.library.records["batch"][record_id].number
        name = _("Copy of batch sheet {number}").format(number=number)
        path = self.ask_save(_("Keep the copy as"), f"{name}.pdf")
        if not path:
            return None
        target = _pdf(path)
        done = self._try(lambda: batches.print_copy(self.work.mill, record_id, target))
        if done is not None:
            text = _("Copy {count} of batch sheet {number} is in {file}.")
            self.said.emit(text.format(count=done.copy, number=done.number, file=target), [])
        return done

    def copy_to_printer(self, record_id: int, paper: str) -> Batch | None:
        """Print a printed sheet again, marked as a copy."""
        if not self.choose_printer(paper):
            return None
        with tempfile.TemporaryDirectory() as folder:
            path = Path(folder) / "copy.pdf"
            done = self._try(lambda: batches.print_copy(self.work.mill, record_id, path))
            if done is not None and self.print_pdf(path.read_bytes()):
                text = _("Copy {count} of batch sheet {number} is printed.")
                self.said.emit(text.format(count=done.copy, number=done.number), [])
        return done

    def _try(self, job: Callable[[], Done]) -> Done | None:
        try:
            return job()
        except (Refused, MillFileError, OSError) as fault:
            self.said.emit(str(fault), [])
            return None

    # -- the system's own dialogs

    def _system_save(self, title: str, name: str) -> str:
        folder = str(self.work.mill.path.parent / name)
        kinds = _("PDF files ({pattern})").format(pattern="*.pdf")
        return QFileDialog.getSaveFileName(self._window, title, folder, kinds)[0]

    def _system_choose(self, paper: str) -> bool:
        from PySide6.QtPrintSupport import QPrintDialog, QPrinter

        self._printer = QPrinter(QPrinter.PrinterMode.HighResolution)
        size = QPageSize.PageSizeId.Letter if paper == "letter" else QPageSize.PageSizeId.A4
        self._printer.setPageSize(QPageSize(size))
        self._printer.setFullPage(True)
        return bool(QPrintDialog(self._printer, self._window).exec())

    def _system_print(self, pdf: bytes) -> bool:
        painter = QPainter(self._printer)
        if not painter.isActive():
            self.said.emit(_("The printer does not answer; a sheet has its number and can be printed as a copy."), [])
            return False
        for number, image in enumerate(images_for_printer(pdf, min(self._printer.resolution(), 300))):
            if number:
                self._printer.newPage()
            painter.drawImage(painter.viewport(), image)
        painter.end()
        return True


def _title(page: BatchPage) -> str:
    return {
        BatchPage.SHEET: _("Keep the batch sheet as"), BatchPage.MASTER: _("Keep the master formula record as"),
        BatchPage.BLANK: _("Keep the blank batch record as"),
    }[page]


def _file_name(batch: Batch, page: BatchPage) -> str:
    words = {
        BatchPage.SHEET: _("{formula}"), BatchPage.MASTER: _("{formula}, master formula record"),
        BatchPage.BLANK: _("{formula}, blank batch record"),
    }[page]
    plain = "".join("-" if sign in '/\\:*?"<>|' else sign for sign in batch.formula)
    return words.format(formula=plain) + ".pdf"


def _pdf(path: str) -> Path:
    return Path(path) if Path(path).suffix else Path(path).with_suffix(".pdf")
