"""The form that adds or changes a limit: inside the zone, never modal, each error under the field it belongs to."""

from __future__ import annotations

from typing import Any

from PySide6.QtCore import QStringListModel, Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QCompleter, QGridLayout, QHBoxLayout, QLabel, QLineEdit, QPushButton, QWidget

from blendapp.desk.choice import Choice
from blendapp.desk.meet.subjects import limit_from, names_for, units_for
from blendapp.desk.meet.words import kind_word
from blendapp.desk.shell.zone import INSET_PX
from blendapp.desk.theme import GAP_PX
from blendapp.desk.work import Work
from blendapp.domain.formulas import Amounts, Limit, LimitBasis, LimitKind, write_basis
from blendapp.domain.notation import notation
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import edits


class AddLimit(QWidget):
    """added: the identifier of the new or changed limit. closed: the form went away."""

    added = Signal(int)
    closed = Signal()

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self._changing: Limit | None = None
        self.kind = Choice()
        self.name = QLineEdit()
        self.per = QLineEdit()
        self.basis = Choice()
        self.unit = Choice()
        self.minimum = QLineEdit()
        self.maximum = QLineEdit()
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        self.fault.hide()
        self._names = QStringListModel(self)
        for named in (self.name, self.per):
            completer = QCompleter(self._names, named)
            completer.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
            completer.setFilterMode(Qt.MatchFlag.MatchContains)
            named.setCompleter(completer)
        for kind in LimitKind:
            self.kind.addItem(kind_word(kind), kind)
        self._lay()
        self.kind.currentIndexChanged.connect(self._kind_changed)
        self.name.editingFinished.connect(self._fill_units)
        self.basis.currentTextChanged.connect(lambda _text: self._fill_units())

    def _lay(self) -> None:
        grid = QGridLayout(self)
        grid.setContentsMargins(INSET_PX, 0, 0, GAP_PX)
        grid.setHorizontalSpacing(GAP_PX)
        grid.setVerticalSpacing(4)
        self.per_label = QLabel(_("over"))
        places: tuple[tuple[str, QWidget, int, int, int], ...] = (
            (_("Kind"), self.kind, 0, 0, 1), (_("Name"), self.name, 0, 1, 2), (_("over"), self.per, 0, 3, 1),
            (_("at least"), self.minimum, 2, 0, 1), (_("at most"), self.maximum, 2, 1, 1),
            (_("in"), self.unit, 2, 2, 1), (_("basis"), self.basis, 2, 3, 1),
        )
        for words, field, row, column, span in places:
            label = self.per_label if field is self.per else QLabel(words)
            label.setObjectName("quiet")
            label.setBuddy(field)
            field.setAccessibleName(words)
            field.setMinimumWidth(90)
            grid.addWidget(label, row, column, 1, span)
            grid.addWidget(field, row + 1, column, 1, span)
        for column, stretch in enumerate((3, 2, 2, 3)):
            grid.setColumnStretch(column, stretch)
        self.go = QPushButton(_("Add"))
        self.go.setObjectName("first")
        self.go.clicked.connect(self.add)
        self.leave = QPushButton(_("Leave"))
        self.leave.setObjectName("plain")
        self.leave.clicked.connect(self.close_form)
        last = QHBoxLayout()
        last.setSpacing(GAP_PX)
        last.addWidget(self.fault, 1)
        last.addStretch(0)
        last.addWidget(self.leave)
        last.addWidget(self.go)
        grid.addLayout(last, 4, 0, 1, 4)

    # -- opening and closing

    def begin(self, kind: LimitKind = LimitKind.NUTRIENT, name: str = "") -> None:
        """Open the form, empty but for a kind and a name."""
        self.basis.clear()
        formula = self.work.formula
        ration = formula is not None and formula.amounts is Amounts.RATION
        for words, plain in (
            (_("as fed"), "as fed"), (_("dry matter"), "dry matter"), (_("at 88 % dry matter"), "at 88 % dry matter"),
            *([(_("per day"), "per day")] if ration else []),
        ):
            self.basis.addItem(words, plain)
        self.basis.setEditable(True)
        self._changing = None
        self.go.setText(_("Add"))
        self.kind.setCurrentIndex(self.kind.findData(kind))
        self.name.setText(name)
        for field in (self.per, self.minimum, self.maximum):
            field.clear()
        self.fault.hide()
        self._kind_changed()
        self.show()
        (self.minimum if name else self.name).setFocus()

    def begin_change(self, limit: Limit) -> None:
        """Open the form on a limit, to change what it is about, its unit or its basis."""
        library = self.work.library
        self.begin(limit.kind, library.subject_name(limit.subject))
        self._changing = limit
        self.go.setText(_("Change"))
        if limit.per is not None:
            self.per.setText(library.subject_name(limit.per))
        self.minimum.setText(notation().write_exact(limit.minimum))
        self.maximum.setText(notation().write_exact(limit.maximum))
        basis = write_basis(limit.basis, limit.at_dry_matter_percent)
        at = self.basis.findData(basis)
        self.basis.setCurrentText(basis if at < 0 else self.basis.itemText(at))
        self._fill_units()
        self.unit.setCurrentText(limit.unit or self.unit.itemText(0))
        self.name.setFocus()

    def close_form(self) -> None:
        """Leave without adding."""
        self.hide()
        self.closed.emit()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.close_form()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.add()
        else:
            super().keyPressEvent(event)

    # -- what is offered

    def chosen_basis(self) -> str:
        """The basis as the workbook writes it: one of those offered, or what was typed."""
        at = self.basis.findText(self.basis.currentText())
        return self.basis.currentText() if at < 0 else str(self.basis.itemData(at))

    def chosen_kind(self) -> LimitKind:
        """The kind that stands in the form."""
        return LimitKind(self.kind.currentData())

    def _kind_changed(self) -> None:
        kind = self.chosen_kind()
        ratio, nutrient = kind is LimitKind.RATIO, kind is LimitKind.NUTRIENT
        self.per.setVisible(ratio)
        self.per_label.setVisible(ratio)
        self.basis.setEnabled(nutrient)
        self.minimum.setEnabled(kind is not LimitKind.COUNT)
        self.maximum.setEnabled(kind is not LimitKind.PRACTICAL)
        self._names.setStringList(names_for(self.work.library, kind))
        hints = {
            LimitKind.GROUP: _("a class, or ingredients joined by “ + ”"),
            LimitKind.COUNT: _("a class, or ingredients joined by “ + ”"),
            LimitKind.RATIO: _("a nutrient, or a group"),
        }
        self.name.setPlaceholderText(hints.get(kind, ""))
        self._fill_units()

    def _fill_units(self) -> None:
        before = self.unit.currentText()
        formula = self.work.formula
        offered = [] if formula is None else units_for(
            self.work.library, self.chosen_kind(), self.name.text(), self.chosen_basis(), formula.amounts)
        if [self.unit.itemText(at) for at in range(self.unit.count())] == offered:
            return
        self.unit.clear()
        self.unit.addItems(offered)
        if before in offered:
            self.unit.setCurrentText(before)
        ratio = self.chosen_kind() is LimitKind.RATIO
        self.unit.setEditable(ratio)
        self.unit.setEnabled(ratio or len(offered) > 1)

    # -- taking

    def add(self) -> None:
        """Add the limit, or say under the fields why not."""
        formula = self.work.formula
        if formula is None:
            return
        kind = self.chosen_kind()
        try:
            subject, fields = limit_from(
                self.work.library, kind, self.name.text(), self.per.text(), self.chosen_basis(),
                self.unit.currentText(), self.minimum.text(), self.maximum.text(),
            )
            old = self._changing
            if old is None:
                edit = self.work.do(lambda mill: edits.add_limit(mill, formula.id, kind, subject, **fields))
            else:
                blank: dict[str, Any] = {"per": None, "basis": LimitBasis.AS_FED, "at_dry_matter_percent": None}
                wanted = {**blank, **fields, "kind": kind, "subject": subject}
                edit = self.work.do(lambda mill: edits.change(mill, old, **wanted))
        except (Refused, ValueError) as fault:
            problems = fault.problems if isinstance(fault, Refused) else None
            self.fault.setText(" ".join(one.text for one in problems) if problems else str(fault))
            self.fault.show()
            return
        self.hide()
        self.added.emit(old.id if old is not None else edit.changes[0].id)
