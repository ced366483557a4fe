"""How many rows a list has and what became of them: figures that add up, each of which shows only its rows."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QLabel, QPushButton, QWidget

from blendapp.desk.prices.understood import counts, fate_word
from blendapp.domain.list_rows import Fate, ListReading
from blendapp.domain.wording import _, plural


class FateCounts(QWidget):
    """chosen: the fate whose rows are to be shown, or None for all that are not left alone."""

    chosen = Signal(object)

    def __init__(self) -> None:
        super().__init__()
        self.read = QLabel()
        self.group = QButtonGroup(self)
        self.buttons: dict[Fate | None, QPushButton] = {}
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(2)
        row.addWidget(self.read)
        for fate in (None, Fate.ACCEPTED, Fate.QUESTION, Fate.REFUSED, Fate.IGNORED):
            button = self.buttons[fate] = QPushButton("" if fate is None else fate_word(fate))
            button.setObjectName("set")
            button.setCheckable(True)
            button.clicked.connect(lambda _checked=False, fate=fate: self.chosen.emit(fate))
            self.group.addButton(button)
            row.addWidget(button)
        self.buttons[None].setText(_("what counts"))
        self.buttons[None].setToolTip(_("All rows but those that are left alone"))
        self.buttons[None].setChecked(True)
        row.addStretch(1)

    def show_reading(self, reading: ListReading) -> None:
        """Say the counts of a reading."""
        self.read.setText(plural("{count} row read:", "{count} rows read:", len(reading.rows))
                          .format(count=len(reading.rows)))
        words = {
            Fate.ACCEPTED: (_("{count} accepted"), _("{count} accepted")),
            Fate.QUESTION: (_("{count} in question"), _("{count} in question")),
            Fate.REFUSED: (_("{count} refused"), _("{count} refused")),
            Fate.IGNORED: (_("{count} left alone"), _("{count} left alone")),
        }
        for fate, count in counts(reading):
            one, many = words[fate]
            button = self.buttons[fate]
            button.setText((one if count == 1 else many).format(count=count))
            button.setEnabled(count > 0)
