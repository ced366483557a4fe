"""The form that adds a limit: inside the zone, never modal, each error under the field it belongs to."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QComboBox, QCompleter, QGridLayout, QHBoxLayout, QLabel, QLineEdit, QPushButton, QWidget

from blendapp.desk.meet.subjects import limit_from, names_for, units_for
from blendapp.desk.meet.words import kind_word
from blendapp.desk.theme import GAP_PX
from blendapp.desk.work import Work
from blendapp.domain.formulas import Amounts, LimitKind
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import edits
from blendapp.services.mill import Edit


class AddLimit(QWidget):
    """added: the identifier of the new limit. closed: the form went away."""

    added = Signal(int)
    closed = Signal()

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.kind = QComboBox()
        self.name = QLineEdit()
        self.per = QLineEdit()
        self.basis = QComboBox()
        self.unit = QComboBox()
        self.minimum = QLineEdit()
        self.maximum = QLineEdit()
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        self.fault.hide()
        for kind in LimitKind:
            self.kind.addItem(kind_word(kind), kind)
        self._lay()
        self.kind.currentIndexChanged.connect(self._kind_changed)
        self.name.editingFinished.connect(self._fill_units)
        self.basis.currentTextChanged.connect(lambda _text: self._fill_units())

    def _lay(self) -> None:
        grid = QGridLayout(self)
        grid.setContentsMargins(0, 0, 0, GAP_PX)
        grid.setHorizontalSpacing(GAP_PX)
        grid.setVerticalSpacing(4)
        self.per_label = QLabel(_("over"))
        for column, (words, field) in enumerate((
            (_("Kind"), self.kind), (_("Name"), self.name), (_("over"), self.per),
        )):
            label = self.per_label if field is self.per else QLabel(words)
            label.setObjectName("quiet")
            label.setBuddy(field)
            field.setAccessibleName(words)
            grid.addWidget(label, 0, column)
            grid.addWidget(field, 1, column)
        grid.setColumnStretch(1, 1)
        second = QHBoxLayout()
        second.setSpacing(GAP_PX)
        for words, field, width in (
            (_("at least"), self.minimum, 74), (_("at most"), self.maximum, 74), (_("in"), self.unit, 96),
            (_("per"), self.basis, 132),
        ):
            label = QLabel(words)
            label.setObjectName("quiet")
            field.setAccessibleName(words)
            field.setMinimumWidth(width)
            second.addWidget(label)
            second.addWidget(field)
            if field in (self.minimum, self.maximum):
                field.setFixedWidth(width)
        second.addStretch(1)
        self.go = QPushButton(_("Add"))
        self.go.setObjectName("first")
        self.go.clicked.connect(self.add)
        self.leave = QPushButton(_("Leave"))
        self.leave.setObjectName("plain")
        self.leave.clicked.connect(self.close_form)
        third = QHBoxLayout()
        third.setSpacing(GAP_PX)
        third.addWidget(self.fault, 1)
        third.addStretch(0)
        third.addWidget(self.leave)
        third.addWidget(self.go)
        grid.addLayout(second, 2, 0, 1, 3)
        grid.addLayout(third, 3, 0, 1, 3)

    # -- opening and closing

    def begin(self, kind: LimitKind = LimitKind.NUTRIENT, name: str = "") -> None:
        """Open the form, empty but for a kind and a name."""
        self.basis.clear()
        self.basis.addItems(["as fed", "dry matter", "at 88 % dry matter"])
        self.basis.setEditable(True)
        formula = self.work.formula
        if formula is not None and formula.amounts is Amounts.RATION:
            self.basis.addItem("per day")
        self.kind.setCurrentIndex(self.kind.findData(kind))
        self.name.setText(name)
        for field in (self.per, self.minimum, self.maximum):
            field.clear()
        self.fault.hide()
        self._kind_changed()
        self.show()
        (self.minimum if name else self.name).setFocus()

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
        for field in (self.name, self.per):
            old = field.completer()
            completer = QCompleter(names_for(self.work.library, kind), field)
            completer.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
            completer.setFilterMode(Qt.MatchFlag.MatchContains)
            field.setCompleter(completer)
            if old is not None:
                old.deleteLater()
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
            self.work.library, self.chosen_kind(), self.name.text(), self.basis.currentText(), formula.amounts)
        if [self.unit.itemText(at) for at in range(self.unit.count())] == offered:
            return
        self.unit.clear()
        self.unit.addItems(offered)
        if before in offered:
            self.unit.setCurrentText(before)
        self.unit.setEnabled(len(offered) > 1)

    # -- taking

    def add(self) -> None:
        """Add the limit, or say under the fields why not."""
        formula = self.work.formula
        if formula is None:
            return
        kind = self.chosen_kind()
        try:
            subject, fields = limit_from(
                self.work.library, kind, self.name.text(), self.per.text(), self.basis.currentText(),
                self.unit.currentText(), self.minimum.text(), self.maximum.text(),
            )
            edit: Edit = self.work.do(lambda mill: edits.add_limit(mill, formula.id, kind, subject, **fields))
        except (Refused, ValueError) as fault:
            problems = fault.problems if isinstance(fault, Refused) else None
            self.fault.setText(" ".join(one.text for one in problems) if problems else str(fault))
            self.fault.show()
            return
        self.hide()
        self.added.emit(edit.changes[0].id)
