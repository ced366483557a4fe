"""The day that the window works on: it follows the calendar while the window stays open."""

from __future__ import annotations

from PySide6.QtCore import QObject, Qt, QTimer
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QApplication, QLineEdit

from blendapp.desk.work import Work
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.price_history import day_words
from blendapp.domain.wording import _, plural
from blendapp.services.price_history import Turn, turned

LOOK_MS = 20_000


class DayWatch(QObject):
    """Looks at the calendar now and then, and when the window comes to the front; tells what turned over night."""

    def __init__(self, work: Work) -> None:
        super().__init__(work)
        self.work = work
        self._timer = QTimer(self, interval=LOOK_MS)
        self._timer.timeout.connect(self.look)
        self._timer.start()
        app = QGuiApplication.instance()
        assert isinstance(app, QGuiApplication)
        app.applicationStateChanged.connect(self._state_changed)

    def _state_changed(self, state: Qt.ApplicationState) -> None:
        if state == Qt.ApplicationState.ApplicationActive:
            self.look()

    def look(self) -> None:
        """Work on today's prices from now on, if another day has come. Not while a value is being tried or typed."""
        typing = QApplication.focusWidget()
        if self.work.trying or (isinstance(typing, QLineEdit) and typing.objectName() == "cell"):
            return
        before = self.work.on
        if not self.work.take_day():
            return
        found = turned(self.work.library, before, self.work.on)
        if found:
            self.work.said.emit(
                plural("It is {day}: {count} price is another one than yesterday.",
                       "It is {day}: {count} prices are others than yesterday.", len(found)).format(
                    day=day_words(self.work.on), count=len(found)),
                [turn_words(self.work.library, one) for one in found])


def turn_words(library: Library, turn: Turn) -> str:
    """"Maize: 200.00 to 210.00", or that its price has expired."""
    name = library.ingredient(turn.ingredient_id).name
    write = notation().write
    if turn.after is None:
        return _("{name}: {before} has ended, and no price is in force; it is left out of every mix.").format(
            name=name, before=write(turn.before, 2))
    if turn.before is None:
        return _("{name}: {after} is in force.").format(name=name, after=write(turn.after, 2))
    return _("{name}: {before} to {after}").format(
        name=name, before=write(turn.before, 2), after=write(turn.after, 2))
