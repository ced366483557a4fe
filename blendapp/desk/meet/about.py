"""What a formula is for: animal, stage, amounts, batch, loss, what it admits. Stored as it is changed."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial
from typing import Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QGridLayout, QLabel, QLineEdit, QPushButton, QWidget

from blendapp.desk.choice import Choice
from blendapp.desk.shell.zone import INSET_PX
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.theme import GAP_PX
from blendapp.desk.work import Work
from blendapp.domain.fields import field_of
from blendapp.domain.formulas import Admits, Amounts, Animal
from blendapp.domain.notation import notation
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import edits, typed

NUMBERS = ("batch_kg", "loss_percent", "product_dry_matter_percent")


class AboutFormula(QWidget):
    """closed: the form went away."""

    closed = Signal()

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.animal = Choice()
        self.animal.addItem(_("not stated"), "")
        for animal in Animal:
            self.animal.addItem(_(str(animal)), str(animal))
        self.amounts = Choice()
        self.amounts.addItem(_("blend, in %"), str(Amounts.BLEND))
        self.amounts.addItem(_("ration, in kg per head and day"), str(Amounts.RATION))
        self.admits = Choice()
        self.admits.addItem(_("every ingredient that may be used unlisted"), str(Admits.ALL))
        self.admits.addItem(_("only ingredients with a limit of their own"), str(Admits.LISTED))
        self.stage = QLineEdit()
        self.numbers = {key: QLineEdit() for key in NUMBERS}
        self.note = QLineEdit()
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        self.fault.hide()
        grid = QGridLayout(self)
        grid.setContentsMargins(INSET_PX, 0, 0, GAP_PX)
        grid.setHorizontalSpacing(GAP_PX)
        grid.setVerticalSpacing(6)
        grid.setColumnStretch(1, 1)
        self._fields: tuple[tuple[str, QWidget], ...] = (
            (field_of("formula", "animal").label, self.animal), (field_of("formula", "stage").label, self.stage),
            (field_of("formula", "amounts").label, self.amounts), (field_of("formula", "admits").label, self.admits),
            *((field_of("formula", key).label, field) for key, field in self.numbers.items()),
            (field_of("formula", "note").label, self.note),
        )
        for row, (words, field) in enumerate(self._fields):
            label = QLabel(words)
            label.setObjectName("quiet")
            label.setBuddy(field)
            field.setAccessibleName(words)
            grid.addWidget(label, row, 0)
            grid.addWidget(field, row, 1)
        self.leave = QPushButton(_("Done"))
        self.leave.setObjectName("plain")
        self.leave.clicked.connect(self.close_form)
        grid.addWidget(self.fault, len(self._fields), 0, 1, 2)
        grid.addWidget(self.leave, len(self._fields) + 1, 1, Qt.AlignmentFlag.AlignRight)
        self._connect()
        work.edited.connect(lambda _edit: self.fill())
        work.chosen.connect(self.fill)

    def _connect(self) -> None:
        self.animal.activated.connect(lambda _at: self._set(
            animal=Animal(self.animal.currentData()) if self.animal.currentData() else None))
        self.amounts.activated.connect(lambda _at: self._set(amounts=Amounts(self.amounts.currentData())))
        self.admits.activated.connect(lambda _at: self._set(admits=Admits(self.admits.currentData())))
        self.stage.editingFinished.connect(lambda: self._set(stage=self.stage.text().strip()))
        self.note.editingFinished.connect(lambda: self._set(note=self.note.text().strip()))
        for key, field in self.numbers.items():
            field.setToolTip(field_of("formula", key).help_text)
            field.editingFinished.connect(partial(self._set_number, key))

    def begin(self) -> None:
        """Open the form."""
        self.fault.hide()
        self.fill()
        self.show()
        self.animal.setFocus()

    def fill(self) -> None:
        """Show what is stored."""
        formula = self.work.formula
        if formula is None:
            self.hide()
            return
        self.animal.setCurrentIndex(max(self.animal.findData(str(formula.animal or "")), 0))
        self.amounts.setCurrentIndex(self.amounts.findData(str(formula.amounts)))
        self.admits.setCurrentIndex(self.admits.findData(str(formula.admits)))
        numbers = [(field, notation().write_exact(getattr(formula, key))) for key, field in self.numbers.items()]
        for field, text in ((self.stage, formula.stage), (self.note, formula.note), *numbers):
            if not field.hasFocus():
                field.setText(text)

    def _set_number(self, key: str) -> None:
        text = self.numbers[key].text()

        def take() -> None:
            formula = self.work.formula
            if formula is not None:
                self._store(**{key: typed.read_typed(self.work.library, formula, key, text)})

        self._try(take)

    def _set(self, **fields: Any) -> None:
        self._try(lambda: self._store(**fields))

    def _store(self, **fields: Any) -> None:
        formula = self.work.formula
        if formula is not None and any(getattr(formula, name) != value for name, value in fields.items()):
            self.work.do(lambda mill: edits.change(mill, formula, **fields))

    def _try(self, job: Callable[[], None]) -> None:
        self.fault.hide()
        try:
            job()
        except (Refused, ValueError) as fault:
            self.fault.setText(sentence_of(fault))
            self.fault.show()

    def close_form(self) -> None:
        """Leave; everything is stored already."""
        self.hide()
        self.closed.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.fill()
            self.close_form()
        else:
            super().keyPressEvent(event)
