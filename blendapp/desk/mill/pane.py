"""The page of the mill: its name and money on the left, its tables on the right, stored as they are typed."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QFormLayout, QHBoxLayout, QLabel, QLineEdit, QPushButton, QVBoxLayout, QWidget

from blendapp.desk.choice import Choice
from blendapp.desk.mill.model import RecordTable
from blendapp.desk.mill.people import PasswordForm, PeopleTable
from blendapp.desk.shell.glyphs import GlyphButton
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain import units
from blendapp.domain.fields import field_of
from blendapp.domain.mills import Person
from blendapp.domain.problems import Refused
from blendapp.domain.records import added
from blendapp.domain.wording import _
from blendapp.services import edits, plant
from blendapp.services.mill import Edit, Mill

SIDE_PX = 300


class MillPane(QWidget):
    """closed: back to the bench. said: a sentence with what can be listed below it."""

    closed = Signal()
    said = Signal(str, list)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.name = QLineEdit()
        self.currency = QLineEdit()
        self.ton = Choice()
        self.cwt = Choice()
        for box, meanings in ((self.ton, units.TON_MEANINGS), (self.cwt, units.CWT_MEANINGS)):
            box.addItem(_("ask each time"), "")
            for meaning in meanings:
                box.addItem(_(meaning), meaning)
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        self.tables: dict[str, DeskTable] = {}
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX, 0)
        row.setSpacing(MARGIN_PX * 2)
        row.addLayout(self._side())
        right = QVBoxLayout()
        right.setSpacing(GAP_PX)
        for kind, title, words, stretch in (
            ("person", _("Persons"), _("Add a person"), 3),
            ("scale", _("Scales"), _("Add a scale"), 3), ("mixer", _("Mixers"), _("Add a mixer"), 2),
            ("nutrient", _("Nutrients"), _("Add a nutrient"), 6),
        ):
            self._add_table(right, kind, title, words, stretch)
        row.addLayout(right, 1)
        self.setFocusProxy(self.name)
        work.opened.connect(self.fill)
        work.edited.connect(self._edited)
        for kind in self.tables:
            work.reversed.connect(self.model(kind).forgive_all)

    def _side(self) -> QVBoxLayout:
        title = QLabel(_("The mill"))
        title.setFont(text_font(strong=True))
        form = QFormLayout()
        form.setSpacing(GAP_PX)
        form.setLabelAlignment(Qt.AlignmentFlag.AlignLeft)
        for key, field in (("name", self.name), ("currency", self.currency), ("ton_means", self.ton),
                           ("cwt_means", self.cwt)):
            label = QLabel(field_of("mill", key).label)
            label.setObjectName("quiet")
            label.setBuddy(field)
            field.setAccessibleName(label.text())
            field.setToolTip(field_of("mill", key).help_text)
            form.addRow(label, field)
        self.name.editingFinished.connect(lambda: self._set(name=self.name.text().strip()))
        self.currency.editingFinished.connect(lambda: self._set(currency=self.currency.text().strip().upper()))
        self.ton.activated.connect(lambda _at: self._set(ton_means=self.ton.currentData()))
        self.cwt.activated.connect(lambda _at: self._set(cwt_means=self.cwt.currentData()))
        self.leave = QPushButton(_("Back to the bench"))
        self.leave.setObjectName("plain")
        self.leave.setFixedWidth(SIDE_PX)
        self.leave.clicked.connect(self.closed)
        side = QVBoxLayout()
        side.setSpacing(GAP_PX + 4)
        side.addWidget(title)
        side.addLayout(form)
        side.addWidget(self.fault)
        side.addWidget(self.leave)
        self.passwords = PasswordForm(self.work)
        self.passwords.setFixedWidth(SIDE_PX)
        side.addWidget(self.passwords)
        side.addStretch(1)
        return side

    def _add_table(self, column: QVBoxLayout, kind: str, title: str, words: str, stretch: int) -> None:
        label = QLabel(title)
        label.setFont(text_font(strong=True))
        add = GlyphButton("add", words)
        add.clicked.connect(partial(self.add, kind))
        head = QHBoxLayout()
        head.addWidget(label)
        head.addWidget(add)
        head.addStretch(1)
        model = PeopleTable(self.work, self) if kind == "person" else RecordTable(self.work, kind, self)
        table = DeskTable(model, self)
        table.setAccessibleName(title)
        table.cleared.connect(partial(self._clear, kind))
        table.pasted.connect(partial(self._paste, kind))
        self.tables[kind] = table
        column.addLayout(head)
        column.addWidget(table, stretch)

    # -- what is shown

    def model(self, kind: str) -> RecordTable | PeopleTable:
        """The model of one of the tables."""
        model = self.tables[kind].grid
        assert isinstance(model, RecordTable | PeopleTable)
        return model

    def _edited(self, edit: Edit) -> None:
        for kind in self.tables:
            self.model(kind).forgive_owners({change.id for change in edit.changes if change.kind == kind})
        if edit.touches("mill", *self.tables) or not edit.changes:
            self.fill()

    def fill(self) -> None:
        """Show what is stored."""
        for kind in self.tables:
            self.model(kind).rebuild()
        if self.work.is_open:
            self.passwords.fill()
        mill = self.work.library.mill
        for field, text in ((self.name, mill.name), (self.currency, mill.currency)):
            if not field.hasFocus():
                field.setText(text)
        self.ton.setCurrentIndex(max(self.ton.findData(mill.ton_means), 0))
        self.cwt.setCurrentIndex(max(self.cwt.findData(mill.cwt_means), 0))

    # -- changing

    def _set(self, **fields: str) -> None:
        mill = self.work.library.mill
        self.fault.clear()
        if self.work.is_open and any(getattr(mill, name) != value for name, value in fields.items()):
            try:
                self.work.do(lambda one: edits.set_mill(one, **fields))
            except (Refused, ValueError) as fault:
                self.fault.setText(sentence_of(fault))

    def add(self, kind: str) -> None:
        """Add a record under a free name and open the name for typing."""
        words = {"scale": _("New scale"), "mixer": _("New mixer"), "nutrient": _("New nutrient"),
                 "person": _("New person")}[kind]
        name = edits.free_name(self.work.library, kind, words)
        jobs: dict[str, Callable[[Mill], Edit]] = {
            "scale": lambda mill: plant.add_scale(mill, name, 1.0), "mixer": lambda mill: plant.add_mixer(mill, name),
            "nutrient": lambda mill: edits.add_nutrient(mill, name),
            "person": lambda mill: mill.apply(
                _("Add {name}").format(name=name), [added(Person(mill.new_id("person"), name))]),
        }
        edit = self._try(jobs[kind])
        if edit is not None and edit.changes and self.tables[kind].go_to(edit.changes[0].id, "name"):
            self.tables[kind].edit(self.tables[kind].currentIndex())

    def _clear(self, kind: str, cells: list[tuple[int, str]]) -> None:
        """Delete on a name removes the record; on another cell it empties it."""
        removers: dict[str, Callable[[Mill, int], Edit]] = {
            "scale": plant.remove_scale, "mixer": plant.remove_mixer, "nutrient": edits.remove_nutrient,
        }
        if kind == "person":
            cells = [(owner, key) for owner, key in cells if key == "capacity"]
            if not cells:
                self.said.emit(_("A person stays on record; write no under Active instead."), [])
                return
        elif len(cells) == 1 and cells[0][1] == "name":
            self._try(lambda mill: removers[kind](mill, cells[0][0]))
            return
        self._paste(kind, [(owner, key, "") for owner, key in cells if key != "name"], [],
                    _("Clear cells"))

    def _paste(
        self, kind: str, cells: list[tuple[int, str, str]], outside: list[str], what: str = ""
    ) -> None:
        what = what or _("Paste")
        model = self.model(kind)
        if isinstance(model, PeopleTable):
            for owner, key, text in cells:
                index = model.cell(owner, key)
                if model.look(index.row(), index.column()).editable:
                    model.setData(index, text)
        elif cells:
            try:
                model.write_block(cells, what)
            except (Refused, ValueError) as fault:
                self.said.emit(sentence_of(fault), [])
        if outside:
            self.said.emit(_("These cells fell where nothing is typed in:"), outside)

    def _try(self, job: Callable[[Mill], Edit]) -> Edit | None:
        try:
            return self.work.do(job)
        except (Refused, ValueError) as fault:
            self.said.emit(sentence_of(fault), [])
            return None

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.closed.emit()
        else:
            super().keyPressEvent(event)
