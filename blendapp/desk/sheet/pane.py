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

from blendapp.desk.aside import Aside
from blendapp.desk.choice import Choice
from blendapp.desk.sheet.fixing import FixModel
from blendapp.desk.sheet.pages import PageView, images_for_printer
from blendapp.desk.sheet.words import batch_words
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.batches import Batch
from blendapp.domain.notation import notation
from blendapp.domain.problems import Refused
from blendapp.domain.results import Status
from blendapp.domain.wording import _
from blendapp.services import batch as batches
from blendapp.services import sheets
from blendapp.services.formulate import FailedCertificate
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
        self.lines = FixModel(self._fixed, self)
        self.table = DeskTable(self.lines, self)
        self.table.setAccessibleName(_("Lines of the batch"))
        self.table.cleared.connect(self._let_free)
        self.table.pasted.connect(self._paste)
        self._last_fixed: int | None = None
        self._order_wrong = False
        self._rest = QTimer(self, singleShot=True, interval=REST_MS)
        self._rest.timeout.connect(self.make)
        # Whole numbers of scale steps may take a second or two to find.
        self._aside = Aside(self, (Refused, ValueError, FailedCertificate))
        self._aside.done.connect(self._take)
        self._lay()
        self.order.returnPressed.connect(self._mend_order)
        self.order.textEdited.connect(lambda _text: self._wait())
        self.paper.currentIndexChanged.connect(lambda _at: self._wait())
        self.pages.failed.connect(lambda sentence: self.said.emit(sentence, []))
        work.answered.connect(lambda: self._wait() if self.isVisible() else None)
        work.opened.connect(self._forget)
        work.chosen.connect(self._forget)

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
        fixing = QLabel(_("Lines of one batch; type a mass to fix one"))
        fixing.setObjectName("quiet")
        fixing.setWordWrap(True)
        side.addWidget(fixing)
        self.table.setMinimumHeight(180)
        side.addWidget(self.table, 1)
        side.addLayout(self.copies)
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
        self.order.setText(notation().write_exact(usual))
        self.reason.clear()
        self.by.clear()
        self._forget()
        self.make()
        self.order.selectAll()

    def _forget(self) -> None:
        """Nothing of another formula stays."""
        self._rest.stop()
        self._aside.forget()
        self.batch = None
        self.lines.forget()
        self.lines.show(None)
        self.pages.clear()

    def _wait(self) -> None:
        """What is shown is of before the last edit, until the new batch is in."""
        self._go_stale()
        self._rest.start()

    def _go_stale(self) -> None:
        self.batch = None
        self.pages.say_stale(True)
        self.lines.say_stale(True)
        if self.pages.pages:
            self._say(_("Stale: the new batch is being worked out."), ready=False)
        else:
            self._say(_("The batch is being worked out."), ready=False)

    def make(self) -> None:
        """Have the batch worked out again beside the window, and its page shown."""
        self._rest.stop()
        self._aside.forget()
        self._go_stale()
        work, result = self.work, self.work.stored_result
        if work.formula_id is None or not work.is_open or result is None:
            self._refuse(_("Without an answer there is nothing to weigh."))
            return
        if work.stale or work.trying:
            self._say(_("The answer is stale; the sheet follows as soon as the new one is in."), ready=False)
            return
        if result.status is Status.STOPPED:
            self._refuse(_(
                "Time was up before this answer was proven, so it is not printed as if it were the cheapest. "
                "Make the formula easier, or change it back."))
            return
        try:
            order_kg = notation().read(self.order.text())
            if order_kg <= 0:
                text = _("An order must be above 0 kg; {mass} is not.")
                raise ValueError(text.format(mass=self.order.text().strip()))
        except ValueError as fault:
            self._refuse(str(fault), order_wrong=True)
            return
        library, formula_id, on, fixed = work.library.copy(), work.formula_id, work.on, dict(self.lines.fixed)
        self._aside.ask(lambda: batches.make_batch(library, formula_id, order_kg, on, result=result, fixed=fixed))

    def _refuse(self, sentence: str, *, order_wrong: bool = False) -> None:
        """Say why there is no sheet, and show none. order_wrong: the buttons then lead to the order."""
        self._say(sentence, ready=False)
        if order_wrong:
            self._order_wrong = True
            self.words.setFont(text_font(strong=True))
            for button in (self.print_button, self.save_button):
                button.setEnabled(self.work.mill.writable)
        self.pages.clear()
        self.lines.show(None)

    def _take(self, found: Batch | None, fault: Exception | None) -> None:
        if not self.work.is_open:
            return
        if found is None:
            sentence = sentence_of(fault) if fault is not None else ""
            last, self._last_fixed = self._last_fixed, None
            if last is not None and last in self.lines.fixed and self.lines.batch is not None:
                # The line that was just fixed cannot be: it is let free, with the sentence beside it.
                typed = notation().write_exact(self.lines.fixed.pop(last))
                self.make()
                self.lines.refuse(last, "kg", typed, sentence)
                return
            self._refuse(sentence)
            return
        self._last_fixed = None
        self._fill_copies()
        self.lines.say_stale(False)
        self.pages.say_stale(False)
        if found.cause is not None:
            self._refuse(found.cause)
            return
        self.batch = found
        self.lines.show(found)
        self._say(batch_words(found), ready=True)
        paper = self._paper()
        self.pages.show_pdf(lambda: sheets.batch_pdf(found, paper))

    # -- fixing lines

    def _fixed(self, ingredient_id: int) -> None:
        self._last_fixed = ingredient_id
        self.make()

    def _let_free(self, cells: list[tuple[int, str]]) -> None:
        for owner, _key in cells:
            self.lines.fixed.pop(owner, None)
            self.lines.forgive(owner, "kg")
        self.make()

    def _paste(self, cells: list[tuple[int, str, str]], outside: list[str]) -> None:
        lost = list(outside)
        for owner, key, text in cells:
            try:
                if key != "kg":
                    raise ValueError
                self.lines.fixed[owner] = notation().read(text)
            except ValueError:
                lost.append(text)
        self.make()
        if lost:
            self.said.emit(_("These cells fell where no mass is fixed:"), lost)

    def _mend_order(self) -> bool:
        """Put the keyboard into an order that cannot be read; returns whether that is what stands in the way."""
        if self._order_wrong:
            self.order.setFocus()
            self.order.selectAll()
        return self._order_wrong

    def _say(self, words: str, *, ready: bool) -> None:
        self._order_wrong = False
        self.words.setFont(text_font())
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
        if self._mend_order() or batch is None:
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
        batch = self.batch
        if self._mend_order() or batch is None:
            return
        with tempfile.TemporaryDirectory() as folder:
            path = Path(folder) / "sheet.pdf"
            if not self._choose_printer():
                return
            if self.batch is not batch:
                self.said.emit(_("The batch changed while the printer was chosen; nothing was printed."), [])
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
