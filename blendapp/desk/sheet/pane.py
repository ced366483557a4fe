"""The page on which a batch is sized, looked at, printed and kept as PDF."""

from __future__ import annotations

import tempfile
from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtGui import QKeyEvent, QPageSize, QPainter
from PySide6.QtWidgets import (
    QFileDialog,
    QFormLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from blendapp.desk.choice import Choice
from blendapp.desk.sheet.pages import PageView, images_for_printer
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.batches import Batch
from blendapp.domain.notation import notation
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _, plural
from blendapp.services import batch as batches
from blendapp.services import sheets
from blendapp.services.mill import MillFileError

REST_MS = 200
COPIES_SHOWN = 5


class SheetPane(QWidget):
    """closed: back to the bench. said: a sentence with a list below it. ask_save can be replaced by a test."""

    closed = Signal()
    said = Signal(str, list)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.batch: Batch | None = None
        self.ask_save: Callable[[str, str], str] = self._system_save
        self.print_pdf: Callable[[bytes], bool] = self._system_print
        self.order = QLineEdit()
        self.paper = Choice()
        for words, paper in ((_("A4"), "A4"), (_("US letter"), "letter")):
            self.paper.addItem(words, paper)
        self.words = QLabel()
        self.words.setWordWrap(True)
        self.reason = QLineEdit()
        self.by = QLineEdit()
        self.pages = PageView()
        self.copies = QVBoxLayout()
        self._rest = QTimer(self, singleShot=True, interval=REST_MS)
        self._rest.timeout.connect(self.make)
        self._lay()
        self.order.textEdited.connect(lambda _text: self._rest.start())
        self.paper.currentIndexChanged.connect(lambda _at: self._rest.start())
        self.pages.failed.connect(lambda sentence: self.said.emit(sentence, []))
        work.answered.connect(lambda: self._rest.start() if self.isVisible() else None)

    def _lay(self) -> None:
        title = QLabel(_("Batch sheet"))
        title.setFont(text_font(strong=True))
        form = QFormLayout()
        form.setSpacing(GAP_PX)
        form.setLabelAlignment(Qt.AlignmentFlag.AlignLeft)
        self.accepting = QWidget()
        accept = QFormLayout(self.accepting)
        accept.setContentsMargins(0, 0, 0, 0)
        accept.setSpacing(GAP_PX)
        for layout, words, field in (
            (form, _("Order, kg"), self.order), (form, _("Paper"), self.paper),
            (accept, _("Reason"), self.reason), (accept, _("Accepted by"), self.by),
        ):
            label = QLabel(words)
            label.setObjectName("quiet")
            label.setBuddy(field)
            field.setAccessibleName(words)
            layout.addRow(label, field)
        self.print_button = QPushButton(_("Print…"))
        self.print_button.setObjectName("first")
        self.print_button.clicked.connect(self.to_printer)
        self.save_button = QPushButton(_("Keep as PDF…"))
        self.save_button.setObjectName("plain")
        self.save_button.clicked.connect(self.to_file)
        self.leave = QPushButton(_("Back to the bench"))
        self.leave.setObjectName("plain")
        self.leave.clicked.connect(self.closed)
        inside = QWidget()
        side = QVBoxLayout(inside)
        side.setContentsMargins(0, 0, GAP_PX, GAP_PX)
        side.setSpacing(GAP_PX + 4)
        side.addWidget(title)
        side.addLayout(form)
        side.addWidget(self.words)
        side.addWidget(self.accepting)
        for button in (self.print_button, self.save_button, self.leave):
            side.addWidget(button)
        side.addLayout(self.copies)
        side.addStretch(1)
        scroll = QScrollArea()
        scroll.setWidget(inside)
        scroll.setWidgetResizable(True)
        scroll.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        scroll.setFixedWidth(300)
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX, GAP_PX * 2, 0, 0)
        row.setSpacing(MARGIN_PX)
        row.addWidget(scroll)
        row.addWidget(self.pages, 1)
        self.setFocusProxy(self.order)

    # -- looking

    def begin(self) -> None:
        """Show the usual batch of the chosen formula."""
        assert self.work.formula_id is not None
        usual = batches.usual_batch_kg(self.work.library, self.work.formula_id)
        self.order.setText(notation().write_short(usual))
        self.reason.clear()
        self.by.clear()
        self.pages.clear()
        self.make()
        self.order.selectAll()

    def make(self) -> None:
        """Work the batch out again and show its page."""
        self._rest.stop()
        self.batch = None
        if self.work.formula_id is None or not self.work.is_open:
            return
        if self.work.stale or self.work.trying:
            self._say(_("The answer is stale; the sheet follows as soon as the new one is in."), ready=False)
            return
        try:
            found = batches.make_batch(
                self.work.library, self.work.formula_id, notation().read(self.order.text()), self.work.on,
                self.work.mill.composition, result=self.work.stored_result,
            )
        except (Refused, ValueError) as fault:
            self._say(str(fault), ready=False)
            self.pages.clear()
            return
        self._fill_copies()
        if found.cause is not None:
            self._say(found.cause, ready=False)
            self.pages.clear()
            return
        self.batch = found
        self._say(_batch_words(found), ready=True)
        paper = self._paper()
        self.pages.show_pdf(lambda: sheets.batch_pdf(found, paper))

    def _say(self, words: str, *, ready: bool) -> None:
        self.words.setText(words)
        self.accepting.setVisible(ready and self.batch is not None and bool(self.batch.broken))
        for button in (self.print_button, self.save_button):
            button.setEnabled(ready and self.work.mill.writable)

    def _fill_copies(self) -> None:
        while self.copies.count():
            item = self.copies.takeAt(0)
            widget = item.widget() if item is not None else None
            if widget is not None:
                widget.deleteLater()
        printed = [one for one in self.work.library.all("batch") if one.formula_id == self.work.formula_id]
        if printed:
            head = QLabel(_("Printed before"))
            head.setObjectName("quiet")
            self.copies.addWidget(head)
        for record in reversed(printed[-COPIES_SHOWN:]):
            text = _("Copy of sheet {number}, {day}…")
            button = QPushButton(text.format(number=record.number, day=record.printed.date().isoformat()))
            button.setObjectName("left")
            button.clicked.connect(lambda _checked=False, key=record.id: self.copy_to_file(key))
            self.copies.addWidget(button)

    def _paper(self) -> str:
        return str(self.paper.currentData())

    # -- to paper

    def _system_save(self, title: str, name: str) -> str:
        folder = str(self.work.mill.path.parent / name)
        return QFileDialog.getSaveFileName(self, title, folder, _("PDF files ({pattern})").format(pattern="*.pdf"))[0]

    def to_file(self) -> None:
        """Give the batch its number and keep its sheet as a PDF."""
        batch = self.batch
        if batch is None:
            return
        path = self.ask_save(_("Keep the batch sheet as"), f"{batch.formula}.pdf")
        if path:
            target = _pdf(path)
            printed = self._print_to(target)
            if printed is not None:
                text = _("Batch sheet {number} is in {file}.")
                self.said.emit(text.format(number=printed.number, file=target), [])

    def to_printer(self) -> None:
        """Give the batch its number and print its sheet."""
        if self.batch is None:
            return
        with tempfile.TemporaryDirectory() as folder:
            path = Path(folder) / "sheet.pdf"
            if not self._choose_printer():
                return
            printed = self._print_to(path)
            if printed is not None and self.print_pdf(path.read_bytes()):
                self.said.emit(_("Batch sheet {number} is printed.").format(number=printed.number), [])

    def copy_to_file(self, record_id: int) -> None:
        """Keep a printed sheet again, marked as a copy."""
        path = self.ask_save(_("Keep the copy as"), _("copy") + ".pdf")
        if path:
            self._try(lambda: batches.print_copy(self.work.mill, record_id, _pdf(path), paper=self._paper()))
            self._fill_copies()

    def _print_to(self, path: Path) -> Batch | None:
        batch = self.batch
        assert batch is not None
        done = self._try(lambda: batches.print_sheet(
            self.work.mill, batch, path, reason=self.reason.text(), by=self.by.text(), paper=self._paper()))
        self._fill_copies()
        return done

    def _try(self, job: Callable[[], Batch]) -> Batch | None:
        try:
            return job()
        except (Refused, MillFileError, OSError) as fault:
            self.said.emit(str(fault), [])
            return None

    def _choose_printer(self) -> bool:
        from PySide6.QtPrintSupport import QPrintDialog, QPrinter

        self._printer = QPrinter(QPrinter.PrinterMode.HighResolution)
        size = QPageSize.PageSizeId.A4 if self._paper() == "A4" else QPageSize.PageSizeId.Letter
        self._printer.setPageSize(QPageSize(size))
        self._printer.setFullPage(True)
        return bool(QPrintDialog(self._printer, self).exec())

    def _system_print(self, pdf: bytes) -> bool:
        painter = QPainter(self._printer)
        if not painter.isActive():
            self.said.emit(_("The printer does not answer; the sheet has its number and can be kept as a copy."), [])
            return False
        for number, image in enumerate(images_for_printer(pdf, min(self._printer.resolution(), 300))):
            if number:
                self._printer.newPage()
            painter.drawImage(painter.viewport(), image)
        painter.end()
        return True

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.closed.emit()
        else:
            super().keyPressEvent(event)


def _pdf(path: str) -> Path:
    return Path(path) if Path(path).suffix else Path(path).with_suffix(".pdf")


def _batch_words(batch: Batch) -> str:
    write = notation().write_short
    lines = [plural("{count} batch of {kg} kg", "{count} equal batches of {kg} kg", batch.batches).format(
        count=batch.batches, kg=write(batch.batch_kg, 3))]
    if batch.residue_kg:
        text = _("The lines come to {kg} kg less than the batch.") if batch.residue_kg < 0 else _(
            "The lines come to {kg} kg more than the batch.")
        lines.append(text.format(kg=write(abs(batch.residue_kg), 3)))
    if batch.broken:
        names = ", ".join(batch.limits[at].name for at in batch.broken)
        lines.append(_("Rounding to the scales breaks: {names}. It may be mixed only if somebody accepts that.").format(
            names=names))
    return "\n".join(lines)
