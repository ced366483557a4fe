"""The mill's own facts: name, money, what its tons are, where it works, what its sheets are printed in."""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFormLayout, QLabel, QLineEdit, QVBoxLayout, QWidget

from blendapp.desk.choice import Choice
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.theme import GAP_PX
from blendapp.desk.work import Work
from blendapp.domain import units
from blendapp.domain.fields import field_of
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import edits

FIELD_PX = 340


class MillFacts(QWidget):
    """Every field is stored as it is left; a refusal stands under the form."""

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.name, self.currency = QLineEdit(), QLineEdit()
        self.ton, self.cwt, self.site, self.mass, self.paper, self.approving = (Choice() for _at in range(6))
        for box, meanings in ((self.ton, units.TON_MEANINGS), (self.cwt, units.CWT_MEANINGS)):
            box.addItem(_("ask each time"), "")
            for meaning in meanings:
                box.addItem(_(meaning), meaning)
        self.mass.addItem(_("kg"), "kg")
        self.mass.addItem(_("lb"), "lb")
        self.paper.addItem(_("A4"), "A4")
        self.paper.addItem(_("US letter"), "letter")
        self.approving.addItem(_("another person than the one who prepared it"), False)
        self.approving.addItem(_("also the one who prepared it"), True)
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        form = QFormLayout()
        form.setHorizontalSpacing(GAP_PX * 2)
        form.setVerticalSpacing(GAP_PX)
        form.setLabelAlignment(Qt.AlignmentFlag.AlignLeft)
        form.setFieldGrowthPolicy(QFormLayout.FieldGrowthPolicy.FieldsStayAtSizeHint)
        rows: tuple[tuple[str, str, QWidget], ...] = (
            ("name", "", self.name), ("currency", "", self.currency), ("ton_means", "", self.ton),
            ("cwt_means", "", self.cwt), ("site_id", _("Works at"), self.site), ("sheet_mass", "", self.mass),
            ("paper", "", self.paper), ("one_person_approves", _("A version is approved by"), self.approving),
        )
        for key, words, field in rows:
            label = QLabel(words or field_of("mill", key).label)
            label.setObjectName("quiet")
            label.setBuddy(field)
            field.setFixedWidth(FIELD_PX)
            field.setAccessibleName(label.text())
            field.setToolTip(field_of("mill", key).help_text)
            form.addRow(label, field)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(GAP_PX)
        column.addLayout(form)
        column.addWidget(self.fault)
        column.addStretch(1)
        self.setFocusProxy(self.name)
        self._connect()

    def _connect(self) -> None:
        self.name.editingFinished.connect(lambda: self._set(name=self.name.text().strip()))
        self.currency.editingFinished.connect(lambda: self._set(currency=self.currency.text().strip().upper()))
        for box, key in self._choices():
            box.activated.connect(lambda _at, box=box, key=key: self._set(**{key: box.currentData()}))

    def _choices(self) -> tuple[tuple[Choice, str], ...]:
        return (
            (self.ton, "ton_means"), (self.cwt, "cwt_means"), (self.site, "site_id"), (self.mass, "sheet_mass"),
            (self.paper, "paper"), (self.approving, "one_person_approves"),
        )

    def fill(self) -> None:
        """Show what is stored."""
        mill = self.work.library.mill
        for field, text in ((self.name, mill.name), (self.currency, mill.currency)):
            if not field.hasFocus():
                field.setText(text)
        self.site.clear()
        self.site.addItem(_("no site in particular"), None)
        for site in self.work.library.all("site"):
            self.site.addItem(site.name, site.id)
        self.site.setEnabled(self.site.count() > 1)
        self.site.setToolTip(field_of("mill", "site_id").help_text if self.site.isEnabled() else _(
            "The mill has no sites yet; enter them under Sites."))
        for box, key in self._choices():
            box.setCurrentIndex(max(box.findData(getattr(mill, key)), 0))

    def _set(self, **fields: Any) -> None:
        mill = self.work.library.mill
        self.fault.clear()
        if self.work.is_open and any(getattr(mill, name) != value for name, value in fields.items()):
            try:
                self.work.do(lambda one: edits.set_mill(one, **fields))
            except (Refused, ValueError) as fault:
                self.fault.setText(sentence_of(fault))
                self.fill()
