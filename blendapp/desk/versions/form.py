"""The form on which a draft is prepared, and a prepared one approved with a reason for every caution."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QLabel, QLineEdit, QPushButton, QVBoxLayout, QWidget

from blendapp.desk.choice import Choice
from blendapp.desk.shell.page import labelled
from blendapp.desk.theme import GAP_PX, text_font
from blendapp.domain.mills import Person
from blendapp.domain.wording import _


class VersionForm(QWidget):
    """prepare, approve: the person has pressed the button. The one part is shown that can be done now."""

    prepare = Signal()
    approve = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.cautions: tuple[str, ...] = ()
        self.reasons: dict[str, QLineEdit] = {}
        self._kept: dict[str, str] = {}
        self.person = Choice()
        self.password = QLineEdit()
        self.password.setEchoMode(QLineEdit.EchoMode.Password)
        self.capacity = QLineEdit()
        self.note = QLineEdit()
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        self.fault.hide()
        self.prepare_button = QPushButton(_("Prepare this draft for approval"))
        self.prepare_button.setObjectName("plain")
        self.prepare_button.clicked.connect(self.prepare)
        self.approve_button = QPushButton(_("Approve"))
        self.approve_button.setObjectName("first")
        self.approve_button.clicked.connect(self.approve)
        form = labelled((
            (_("Person"), self.person), (_("Password"), self.password), (_("Approves as"), self.capacity),
            (_("Note"), self.note),
        ))
        self.taking_on = QVBoxLayout()
        self.taking_on.setSpacing(4)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(GAP_PX + 2)
        column.addLayout(form)
        column.addWidget(self.prepare_button)
        column.addLayout(self.taking_on)
        column.addWidget(self.approve_button)
        column.addWidget(self.fault)
        self.person.activated.connect(lambda _at: self.password.setFocus())

    def fill(self, people: Sequence[Person], cautions: tuple[str, ...], draft: str, approving: str) -> None:
        """Show who may act and what they must take on. draft, approving: words of what each button acts on, "" hides
        the button."""
        chosen = self.person.currentData()
        self.person.clear()
        for one in people:
            words = one.name if one.password_hash else _("{name}, no password yet").format(name=one.name)
            self.person.addItem(words, one.id)
        self.person.setCurrentIndex(max(self.person.findData(chosen), 0) if people else -1)
        self.prepare_button.setText(_("Prepare {draft} for approval").format(draft=draft))
        self.prepare_button.setVisible(bool(draft))
        self.approve_button.setText(_("Approve {draft}").format(draft=approving))
        self.approve_button.setVisible(bool(approving))
        for field in (self.capacity, self.note):
            field.setEnabled(bool(approving))
        if cautions != self.cautions:
            self._take_cautions(cautions)

    def _take_cautions(self, cautions: tuple[str, ...]) -> None:
        """What was typed for a caution that still stands stays."""
        self._kept.update({text: field.text() for text, field in self.reasons.items()})
        while self.taking_on.count():
            item = self.taking_on.takeAt(0)
            widget = item.widget() if item is not None else None
            if widget is not None:
                widget.deleteLater()
        self.cautions, self.reasons = cautions, {}
        if cautions:
            head = QLabel(_("Take on one by one, each with a reason:"))
            head.setFont(text_font(strong=True))
            head.setWordWrap(True)
            self.taking_on.addWidget(head)
        for text in cautions:
            words = QLabel(text)
            words.setWordWrap(True)
            field = QLineEdit(self._kept.get(text, ""))
            field.setPlaceholderText(_("reason"))
            field.setAccessibleName(_("Reason for taking on: {caution}").format(caution=text))
            words.setBuddy(field)
            self.reasons[text] = field
            self.taking_on.addWidget(words)
            self.taking_on.addWidget(field)

    def given(self) -> dict[str, str]:
        """The reasons that were typed, by the caution."""
        return {text: field.text() for text, field in self.reasons.items()}

    def person_id(self) -> int | None:
        """Who acts, None where the mill knows no person."""
        found = self.person.currentData()
        return None if found is None else int(found)

    def say(self, sentence: str) -> None:
        """Say what stands against it, or nothing."""
        self.fault.setText(sentence)
        self.fault.setVisible(bool(sentence))

    def say_busy(self, words: str) -> None:
        """Say that something is being worked out, and let nothing be asked for meanwhile; "" is over."""
        for button in (self.prepare_button, self.approve_button):
            button.setEnabled(not words)
        self.say(words)

    def done(self) -> None:
        """Nobody's password stays in a field."""
        self.password.clear()
        self.say("")
