"""Where an answer is typed: a name, a unit, or a rate with its day."""

from __future__ import annotations

import datetime

from PySide6.QtCore import QEvent
from PySide6.QtGui import QKeyEvent, QKeySequence
from PySide6.QtWidgets import QHBoxLayout, QLabel, QLineEdit, QWidget

from blendapp.desk.prices.asking import FIGURE, NAMES, Open, rate_answer
from blendapp.desk.theme import GAP_PX
from blendapp.domain.list_rows import Answer
from blendapp.domain.wording import _

_FIGURE_PX, _DAY_PX = 110, 120


class AnswerField(QLineEdit):
    """A line that leaves undo and redo to the page while nothing is typed in it."""

    def __init__(self) -> None:
        super().__init__()
        self.setAccessibleName(_("Answer"))

    def event(self, event: QEvent) -> bool:
        if isinstance(event, QKeyEvent) and event.type() == QEvent.Type.ShortcutOverride and not self.text() and (
            event.matches(QKeySequence.StandardKey.Undo) or event.matches(QKeySequence.StandardKey.Redo)
        ):
            event.ignore()
            return True
        return super().event(event)

    def ask(self, typed: str, has_choices: bool) -> None:
        """Say what is to be typed here."""
        if typed == NAMES:
            words = _("or type a name") if has_choices else _("type a name")
        elif typed == FIGURE:
            # What is typed stands in place of the whole price of the row, a freight beside it included.
            words = _("type the whole price, freight and all, or choose with the arrows")
        else:
            words = _("or type another unit") if has_choices else _("type a unit")
        self.setPlaceholderText(words)
        self.setAccessibleName(words)


class RateFields(QWidget):
    """A rate of one currency in another, and its day."""

    def __init__(self) -> None:
        super().__init__()
        self.one = QLabel()
        self.rate = AnswerField()
        self.rate.setFixedWidth(_FIGURE_PX)
        self.on = QLabel()
        self.day = QLineEdit()
        self.day.setFixedWidth(_DAY_PX)
        self.day.setAccessibleName(_("Day of the rate"))
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(GAP_PX)
        for part in (self.one, self.rate, self.on, self.day):
            row.addWidget(part)
        row.addStretch(1)

    def ask(self, theirs: str, own: str, day: datetime.date) -> None:
        """Ask for a rate; the day is that one until another is typed."""
        self.one.setText(_("1 {theirs} is").format(theirs=theirs))
        self.on.setText(_("{own}, the rate of").format(own=own))
        self.rate.setAccessibleName(_("{own} for one {theirs}").format(own=own, theirs=theirs))
        self.rate.clear()
        self.day.setText(day.isoformat())

    def answer(self, one: Open) -> Answer:
        """What was typed. Raises ValueError with a sentence."""
        return rate_answer(one, self.rate.text(), self.day.text())
