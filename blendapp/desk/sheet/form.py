"""The form of a batch: order, proportions, mixer, what went before, rework, and what its pages are printed on."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QFormLayout, QLabel, QLineEdit, QVBoxLayout, QWidget

from blendapp.desk.choice import Choice
from blendapp.desk.sheet.asked import AskedBatch
from blendapp.desk.sheet.rework import NEXT, ReworkRows
from blendapp.desk.sheet.words import clean_out_words
from blendapp.desk.shell.page import add_labelled, labelled
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, ROW_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.batches import Batch, CleanOut
from blendapp.domain.notation import notation
from blendapp.domain.versions import approved_version
from blendapp.domain.wording import _
from blendapp.services import batch as batches
from blendapp.services import typed

REWORK_ROWS = 4


class BatchForm(QWidget):
    """changed: something else is asked for. paper_changed: only how the same batch is printed."""

    changed = Signal()
    paper_changed = Signal()

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.order, self.before = QLineEdit(), QLineEdit()
        self.made, self.mixer, self.clean_out, self.paper, self.mass = (Choice() for _at in range(5))
        for box in (self.made, self.mixer, self.clean_out, self.paper, self.mass):
            # Long words are for the open list; closed, a box is as wide as the form.
            box.setSizeAdjustPolicy(Choice.SizeAdjustPolicy.AdjustToMinimumContentsLengthWithIcon)
            box.setMinimumContentsLength(8)
        for one, words in clean_out_words().items():
            self.clean_out.addItem(words, one)
        for words, key in ((_("A4"), "A4"), (_("US letter"), "letter")):
            self.paper.addItem(words, key)
        self.mass.addItem(_("kg"), "kg")
        self.mass.addItem(_("lb"), "lb")
        self.why_clean = QLabel()
        self.why_clean.setWordWrap(True)
        self.why_clean.setFont(text_font(strong=True))
        self.why_clean.hide()
        self.rework = ReworkRows(work, self.changed.emit, self)
        self.rework_table = DeskTable(self.rework, self)
        self.rework_table.setAccessibleName(_("Rework"))
        self.rework_table.setVerticalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAsNeeded)
        self.rework_table.cleared.connect(self._take_out)
        self.rework_table.pasted.connect(self._paste)
        self._labels: dict[QWidget, QLabel] = {}
        self._lay()
        self._connect()

    def _lay(self) -> None:
        form = labelled()
        for words, field in (
            (_("Order, kg"), self.order), (_("Made"), self.made), (_("Mixer"), self.mixer),
            (_("Went before"), self.before), (_("Clean-out"), self.clean_out),
        ):
            self._row(form, words, field)
        paper = labelled()
        self.order.setToolTip(_("In kg, or with a unit behind it: 2 t, 4000 lb"))
        self._row(paper, _("Paper"), self.paper)
        self._row(paper, _("Masses in"), self.mass)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(GAP_PX)
        column.addLayout(form)
        column.addWidget(self.why_clean)
        column.addWidget(self.rework_table)
        column.addLayout(paper)
        self._fit_rework()

    def _row(self, form: QFormLayout, words: str, field: QWidget) -> None:
        self._labels[field] = add_labelled(form, words, field)

    def _connect(self) -> None:
        self.order.textEdited.connect(lambda _text: self.changed.emit())
        self.before.textEdited.connect(lambda _text: self.changed.emit())
        for box in (self.made, self.mixer, self.clean_out):
            box.activated.connect(lambda _at: self.changed.emit())
        for box in (self.paper, self.mass):
            box.currentIndexChanged.connect(lambda _at: self.paper_changed.emit())
        self.rework.modelReset.connect(self._fit_rework)
        self.rework.named.connect(lambda owner: self.rework_table.go_to(owner, "percent"))

    def _fit_rework(self) -> None:
        rows = min(len(self.rework.owners), REWORK_ROWS)
        self.rework_table.setFixedHeight(28 + rows * ROW_PX + 2)

    # -- what is shown

    def begin(self, order_kg: float) -> None:
        """Ask for the usual batch of the chosen formula."""
        library, formula_id = self.work.library, self.work.formula_id
        assert formula_id is not None
        self.order.setText(notation().write_exact(order_kg))
        self.before.clear()
        self.clean_out.setCurrentIndex(0)
        self.rework.forget()
        version = approved_version(library, formula_id)
        self.made.clear()
        self.made.addItem(_("as it stands now"), False)
        if version is not None:
            self.made.addItem(_("as approved (version {number})").format(number=version.number), True)
            self.made.setCurrentIndex(1)
        self._show(self.made, version is not None)
        self.mixer.clear()
        self.mixer.addItem(_("the one that takes it"), None)
        for mixer in library.mixers:
            self.mixer.addItem(mixer.name, mixer.id)
        self._show(self.mixer, self.mixer.count() > 2)
        for box, key in ((self.paper, library.mill.paper), (self.mass, library.mill.sheet_mass)):
            box.blockSignals(True)
            box.setCurrentIndex(max(box.findData(key), 0))
            box.blockSignals(False)
        self.say_before(None)

    def _show(self, field: QWidget, shown: bool) -> None:
        field.setVisible(shown)
        self._labels[field].setVisible(shown)

    def say_before(self, batch: Batch | None) -> None:
        """What the last sheet says of the mixer, and why it must be cleaned out."""
        known = "" if batch is None or self.before.text().strip() else batch.previous_feed
        self.before.setPlaceholderText(known or _("not known"))
        self.before.setToolTip(known)
        reason = "" if batch is None else batch.clean_out_reason
        self.why_clean.setText(reason)
        self.why_clean.setVisible(bool(reason))

    # -- what is asked

    def asked(self, fixed: dict[int, float]) -> AskedBatch:
        """What is asked for; raises ValueError for an order that is no mass."""
        order_kg = self._order_kg(self.order.text().strip())
        if order_kg <= 0:
            text = _("An order must be above 0 kg; {mass} is not.")
            raise ValueError(text.format(mass=self.order.text().strip()))
        said = self.before.text().strip()
        clean_out = self.clean_out.currentData()
        assert self.work.formula_id is not None
        return AskedBatch(
            self.work.formula_id, order_kg, self.work.on, str(self.paper.currentData()), str(self.mass.currentData()),
            approved=bool(self.made.currentData()), mixer_id=self.mixer.currentData(), fixed=dict(fixed),
            rework=self.rework.shares, previous_feed=said or None,
            clean_out=None if clean_out is None else CleanOut(clean_out),
        )

    def _order_kg(self, text: str) -> float:
        """An order in kg, or with another unit of mass behind it: "2 t", "4000 lb"."""
        try:
            return notation().read(text)
        except ValueError:
            if not text[:1].isdigit() or self.work.formula is None:
                raise
            kg = typed.read_typed(self.work.library, self.work.formula, "batch_kg", text)
            assert kg is not None
            return float(kg)

    @property
    def as_approved(self) -> bool:
        """Whether the approved proportions are asked for, which need no answer of today."""
        return bool(self.made.currentData())

    def usual_kg(self) -> float:
        """The batch that the chosen formula usually makes."""
        assert self.work.formula_id is not None
        return batches.usual_batch_kg(self.work.library, self.work.formula_id)

    # -- rework

    def _take_out(self, cells: list[tuple[int, str]]) -> None:
        for owner in {owner for owner, key in cells if key == "name" and owner != NEXT}:
            self.rework.take_out(owner)

    def _paste(self, cells: list[tuple[int, str, str]], _outside: list[str]) -> None:
        for owner, key, text in cells:
            if owner in self.rework.owners and self.rework.column_of(key) is not None:
                self.rework.setData(self.rework.cell(owner, key), text)
