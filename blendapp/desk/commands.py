"""What the window can do, declared once: the menu, the finder and the keys all read this list."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass
from functools import partial

from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QMenu, QWidget

from blendapp.desk.finder.search import Found
from blendapp.domain.wording import _


@dataclass(frozen=True)
class Command:
    """One thing to do. key names it for good; group parts the menu; keys are a shortcut in Qt's portable form.

    able: whether it can be done now. in_menu: whether the menu shows it, or only the finder and the keys. words_now:
    what it is called while it would do something in particular.
    """

    key: str
    words: str
    group: str
    run: Callable[[], object]
    keys: str = ""
    able: Callable[[], bool] = lambda: True
    in_menu: bool = True
    words_now: Callable[[], str] | None = None

    @property
    def called(self) -> str:
        """What it is called now."""
        return self.words if self.words_now is None else self.words_now()


class Commands:
    """The commands of one window, as actions with keys, as a menu, and as things to find.

    before: called with each command just before it runs.
    """

    def __init__(
        self, window: QWidget, commands: Sequence[Command], before: Callable[[Command], object] = lambda _one: None
    ) -> None:
        self.before = before
        self.by_key = {command.key: command for command in commands}
        self.actions: dict[str, QAction] = {}
        for command in commands:
            action = QAction(command.words, window)
            if command.keys:
                action.setShortcuts([QKeySequence(keys) for keys in command.keys.split(" | ")])
            action.triggered.connect(partial(self._triggered, command.key))
            window.addAction(action)
            self.actions[command.key] = action

    def run(self, key: str) -> None:
        """Do one, if it can be done now."""
        command = self.by_key[key]
        if command.able():
            self.before(command)
            command.run()

    def _triggered(self, key: str, _checked: bool = False) -> None:
        self.run(key)

    def fill(self, menu: QMenu, before: dict[str, QMenu] | None = None) -> None:
        """Put the commands into a menu, a line between groups; before: submenus set after a command's key."""
        menu.clear()
        group = None
        for command in self.by_key.values():
            if not command.in_menu:
                continue
            if group is not None and command.group != group:
                menu.addSeparator()
            group = command.group
            action = self.actions[command.key]
            action.setText(command.called)
            action.setEnabled(command.able())
            menu.addAction(action)
            if before and command.key in before:
                menu.addMenu(before[command.key])
        menu.aboutToHide.connect(self.all_able)

    def all_able(self) -> None:
        """Keys must reach every action; run() asks whether it can be done."""
        for action in self.actions.values():
            action.setEnabled(True)

    def found(self) -> list[Found]:
        """The commands that can be done now, as things to find."""
        return [
            Found(command.called.rstrip("…"), _("command"), partial(self.run, key), _shown(command.keys))
            for key, command in self.by_key.items()
            if command.able()
        ]


def _shown(keys: str) -> str:
    first = keys.split(" | ")[0]
    return QKeySequence(first).toString(QKeySequence.SequenceFormat.NativeText) if first else ""
