"""Why and by whom what stands against a batch is accepted; persons of the mill are offered by name."""

from __future__ import annotations

from PySide6.QtCore import QStringListModel, Qt
from PySide6.QtWidgets import QCompleter, QFormLayout, QLabel, QLineEdit, QWidget

from blendapp.desk.theme import GAP_PX
from blendapp.desk.work import Work
from blendapp.domain.wording import _
from blendapp.services.accepting import who_may_accept


class Accepting(QWidget):
    """Two fields, empty where nothing is accepted."""

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.reason, self.by = QLineEdit(), QLineEdit()
        self.names = QStringListModel(self)
        offered = QCompleter(self.names, self.by)
        offered.setCaseSensitivity(Qt.CaseSensitivity.CaseInsensitive)
        offered.setFilterMode(Qt.MatchFlag.MatchContains)
        self.by.setCompleter(offered)
        accept = QFormLayout(self)
        accept.setContentsMargins(0, 0, 0, 0)
        accept.setSpacing(GAP_PX)
        for words, field in ((_("Reason"), self.reason), (_("Accepted by"), self.by)):
            label = QLabel(words)
            label.setObjectName("quiet")
            label.setBuddy(field)
            field.setAccessibleName(words)
            accept.addRow(label, field)
        self.hide()

    def ask(self, wanted: bool) -> None:
        """Show the fields where something is to be accepted, with the names that the mill knows today."""
        if wanted:
            names = who_may_accept(self.work.library)
            self.names.setStringList(names)
            self.by.setPlaceholderText(_("a person of the mill") if names else "")
            self.by.setToolTip("\n".join(names))
        self.setVisible(wanted)

    def clear(self) -> None:
        """Accept nothing."""
        self.reason.clear()
        self.by.clear()
