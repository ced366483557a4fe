"""Where the keyboard was before a panel opened, so that it goes back there."""

from __future__ import annotations

from PySide6.QtWidgets import QApplication, QWidget
from shiboken6 import isValid


class Return:
    """Remembers a widget; give_back() puts the keyboard there, if it can still take it."""

    def __init__(self) -> None:
        self._widget: QWidget | None = None

    def remember(self, panel: QWidget) -> None:
        """Remember what has the keyboard now, unless it is the panel itself."""
        focus = QApplication.focusWidget()
        if focus is not None and focus is not panel and not panel.isAncestorOf(focus):
            self._widget = focus

    def give_back(self) -> None:
        """Put the keyboard back."""
        widget, self._widget = self._widget, None
        if widget is not None and isValid(widget) and widget.isVisible():
            widget.setFocus()
