"""The strip under the header: what the program has to say, with what can be listed below it. Never modal."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QScrollArea, QSizePolicy, QVBoxLayout, QWidget

from blendapp.desk.shell.frame import Rule
from blendapp.desk.shell.glyphs import GlyphButton
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.domain.wording import _

LIST_PX = 132


class Strip(QWidget):
    """One message at a time: a sentence, offers as buttons, and a list that scrolls. It stays until the next edit or
    command, or until it is closed or the next one comes.

    resized: it has another content, and so another height.
    """

    resized = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("strip")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.words = QLabel()
        self.words.setWordWrap(True)
        self.words.setFont(text_font(strong=True))
        self.words.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.list = QLabel()
        self.list.setWordWrap(True)
        self.list.setAlignment(Qt.AlignmentFlag.AlignTop | Qt.AlignmentFlag.AlignLeft)
        self.list.setTextInteractionFlags(Qt.TextInteractionFlag.TextSelectableByMouse)
        self.listing = QScrollArea()
        self.listing.setWidget(self.list)
        self.listing.setWidgetResizable(True)
        self.listing.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.offers = QHBoxLayout()
        self.offers.setSpacing(GAP_PX)
        self.shut = GlyphButton("close", _("Close this message"))
        self.shut.clicked.connect(self.clear)
        head = QHBoxLayout()
        head.setSpacing(GAP_PX)
        head.addWidget(self.words, 1)
        head.addLayout(self.offers)
        head.addWidget(self.shut, 0, Qt.AlignmentFlag.AlignTop)
        inside = QVBoxLayout()
        inside.setContentsMargins(MARGIN_PX, GAP_PX, MARGIN_PX - GAP_PX, GAP_PX)
        inside.setSpacing(4)
        inside.addLayout(head)
        inside.addWidget(self.listing)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addLayout(inside)
        column.addWidget(Rule())
        self.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Maximum)
        self.hide()

    def say(
        self, words: str, listed: Sequence[str] = (), offers: Sequence[tuple[str, Callable[[], object]]] = ()
    ) -> None:
        """Show a sentence, a list below it, and buttons beside it."""
        self._drop_offers()
        self.words.setText(words)
        self.words.setAccessibleName(words)
        self.list.setText("\n".join(listed))
        self.listing.setVisible(bool(listed))
        height = self.list.fontMetrics().lineSpacing() * max(len(listed), 1) + 6
        self.listing.setFixedHeight(min(height, LIST_PX))
        for text, run in offers:
            button = QPushButton(text)
            button.setObjectName("plain")
            button.clicked.connect(lambda _checked=False, run=run: self._take(run))
            self.offers.addWidget(button)
        self.show()
        self.resized.emit()

    def _take(self, run: Callable[[], object]) -> None:
        self.clear()
        run()

    def clear(self) -> None:
        """Close the message."""
        self._drop_offers()
        self.hide()

    def _drop_offers(self) -> None:
        while self.offers.count():
            item = self.offers.takeAt(0)
            widget = item.widget() if item is not None else None
            if widget is not None:
                widget.deleteLater()
