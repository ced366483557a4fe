"""A panel that asks for one line of text: a name, for the most part. Not modal; the error stands under the field."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QHBoxLayout, QLabel, QLineEdit, QPushButton, QVBoxLayout, QWidget

from blendapp.desk.finder.focus import Return
from blendapp.desk.finder.raised import Raised
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.theme import GAP_PX, text_font
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _

WIDTH_PX = 420


class Ask(Raised):
    """Opened with a question and what to do with the answer, which may refuse it."""

    def __init__(self, window: QWidget) -> None:
        super().__init__(window)
        self._return = Return()
        self._take: Callable[[str], object] = str
        self.title = QLabel()
        self.title.setFont(text_font(strong=True))
        self.field = QLineEdit()
        self.field.setAccessibleName(_("Name"))
        self.hint = QLabel()
        self.hint.setObjectName("quiet")
        self.hint.setWordWrap(True)
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        self.leave_button = QPushButton(_("Leave"))
        self.leave_button.setObjectName("plain")
        self.leave_button.clicked.connect(self.leave)
        self.go = QPushButton(_("Take it"))
        self.go.setObjectName("first")
        self.go.clicked.connect(self.take)
        buttons = QHBoxLayout()
        buttons.setSpacing(GAP_PX)
        buttons.addStretch(1)
        buttons.addWidget(self.leave_button)
        buttons.addWidget(self.go)
        column = QVBoxLayout(self)
        column.setContentsMargins(20, 16, 20, 16)
        column.setSpacing(GAP_PX)
        for part in (self.title, self.field, self.hint, self.fault):
            column.addWidget(part)
        column.addLayout(buttons)

    def open(self, title: str, begin: str, go: str, take: Callable[[str], object], hint: str = "") -> None:
        """Ask for a text. take: what is done with it; where it raises Refused or ValueError the panel says so."""
        self._return.remember(self)
        self._take = take
        self.title.setText(title)
        self.field.setAccessibleName(title)
        self.field.setText(begin)
        self.field.selectAll()
        self.go.setText(go)
        self.hint.setText(hint)
        self.hint.setVisible(bool(hint))
        self.fault.hide()
        self._lay()
        self.show()
        self.raise_()
        self.field.setFocus()

    def _lay(self) -> None:
        window = self.inside
        self.setFixedWidth(min(WIDTH_PX, window.width() - 32))
        self.adjustSize()
        self.move((window.width() - self.width()) // 2, 96)

    def take(self) -> None:
        """Hand the text on."""
        try:
            self._take(self.field.text())
        except (Refused, ValueError) as fault:
            self.fault.setText(sentence_of(fault))
            self.fault.show()
            self._lay()
            self.field.setFocus()
            return
        self.leave()

    def leave(self) -> None:
        """Go away."""
        self.hide()
        self._return.give_back()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.leave()
        elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
            self.take()
        else:
            super().keyPressEvent(event)
