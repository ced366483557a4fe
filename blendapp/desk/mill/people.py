"""The persons of a mill: their names and capacities in a table, and the form that sets a password."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFormLayout, QLabel, QLineEdit, QPushButton, QVBoxLayout, QWidget

from blendapp.desk.choice import Choice
from blendapp.desk.table.grid import Grid, Heading, sentence_of
from blendapp.desk.table.look import EMPTY, Look
from blendapp.desk.theme import GAP_PX, text_font
from blendapp.domain.mills import Person
from blendapp.domain.names import fold
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import people
from blendapp.services.mill import MillFileError

if TYPE_CHECKING:
    from blendapp.desk.work import Work


class PeopleTable(Grid):
    """A row a person. One who is no longer active stays on record."""

    def __init__(self, work: Work, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work

    def rebuild(self) -> None:
        """Show who is on record now."""
        self.set_headings([
            Heading("name", _("Name"), 220), Heading("capacity", _("Capacity"), 220),
            Heading("active", _("Active"), 90), Heading("password", _("Password"), 120),
        ])
        self.set_rows([one.id for one in self.work.library.all("person")])
        self.refresh()

    def make_look(self, owner: int, key: str) -> Look:
        person: Person | None = self.work.library.records["person"].get(owner)
        if person is None:
            return EMPTY
        if key == "password":
            return Look(text=_("set") if person.password_hash else _("none yet"), quiet=True)
        if key == "active":
            text = _("yes") if person.active else _("no")
            return Look(text=text, typed=text, editable=True, choices=(_("yes"), _("no")))
        text = str(getattr(person, key))
        return Look(text=text, typed=text, editable=True, quiet=not person.active)

    def write(self, owner: int, key: str, text: str) -> None:
        value: Any = text.strip()
        if key == "active":
            if fold(value) not in (fold(_("yes")), fold(_("no"))):
                raise ValueError(_("Write {yes} or {no}.").format(yes=_("yes"), no=_("no")))
            value = fold(value) == fold(_("yes"))
        self.work.do(lambda mill: people.change_person(mill, owner, **{key: value}))


class PasswordForm(QWidget):
    """Sets the password of a person: with their present one, or, where it is forgotten, with another person's."""

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.person, self.by = Choice(), Choice()
        self.current, self.new, self.again = QLineEdit(), QLineEdit(), QLineEdit()
        for field in (self.current, self.new, self.again):
            field.setEchoMode(QLineEdit.EchoMode.Password)
        self.said = QLabel()
        self.said.setWordWrap(True)
        self.said.hide()
        self.set_button = QPushButton(_("Set the password"))
        self.set_button.setObjectName("plain")
        self.set_button.clicked.connect(self.set_password)
        title = QLabel(_("Password"))
        title.setFont(text_font(strong=True))
        form = QFormLayout()
        form.setSpacing(GAP_PX)
        form.setLabelAlignment(Qt.AlignmentFlag.AlignLeft)
        self._current_label = QLabel()
        rows: tuple[tuple[QLabel, QWidget], ...] = (
            (QLabel(_("Person")), self.person), (QLabel(_("Confirmed by")), self.by),
            (self._current_label, self.current),
            (QLabel(_("New password")), self.new), (QLabel(_("Once more")), self.again),
        )
        for label, box in rows:
            label.setObjectName("quiet")
            label.setBuddy(box)
            box.setAccessibleName(label.text() or _("Present password"))
            form.addRow(label, box)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, GAP_PX, 0, 0)
        column.setSpacing(GAP_PX)
        column.addWidget(title)
        column.addLayout(form)
        column.addWidget(self.set_button)
        column.addWidget(self.said)
        self.person.activated.connect(lambda _at: self._turn())
        self.by.activated.connect(lambda _at: self._turn())

    def fill(self) -> None:
        """Offer who is on record."""
        persons: list[Person] = [one for one in self.work.library.all("person") if one.active]
        for box in (self.person, self.by):
            chosen = box.currentData()
            box.clear()
            for one in persons:
                box.addItem(one.name, one.id)
            box.setCurrentIndex(max(box.findData(chosen), 0) if persons else -1)
        self.setVisible(bool(persons) and self.work.mill.writable)
        self._turn()

    def _turn(self) -> None:
        """What is asked depends on who confirms: nobody for a first password, the person, or another one."""
        person = self._chosen(self.person)
        first = person is not None and not person.password_hash
        own = person is not None and self.by.currentData() == person.id
        self.by.setEnabled(not first)
        self.current.setEnabled(not first)
        text = _("Present password") if own or first else _("Their password")
        self._current_label.setText(text)
        self.current.setAccessibleName(text)

    def _chosen(self, box: Choice) -> Person | None:
        key = box.currentData()
        return None if key is None else self.work.library.records["person"].get(int(key))

    def set_password(self) -> None:
        """Set it, or say what stands against it."""
        person, by = self._chosen(self.person), self._chosen(self.by)
        if person is None or by is None:
            return
        try:
            if self.new.text() != self.again.text():
                raise ValueError(_("The two new passwords are not the same; type both again."))
            if person.password_hash and by.id != person.id:
                people.renew_password(
                    self.work.mill, person.id, self.new.text(), by_id=by.id, by_password=self.current.text())
            else:
                people.set_password(self.work.mill, person.id, self.new.text(), current=self.current.text())
        except (Refused, ValueError, MillFileError) as fault:
            self._say(sentence_of(fault))
            return
        for field in (self.current, self.new, self.again):
            field.clear()
        self.work.recorded()
        self._say(_("The password of {name} is set.").format(name=person.name))

    def _say(self, sentence: str) -> None:
        self.said.setText(sentence)
        self.said.show()
