"""One of the three zones: a title, a quiet remark beside it, its own small buttons, and a body put in later."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from blendapp.desk.shell.glyphs import GlyphButton
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.domain.wording import _

INSET_PX = 6


class Elided(QLabel):
    """A label that shortens its text instead of widening its neighbours; the whole text is its tool tip."""

    def __init__(self, text: str = "", parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._whole = text
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Preferred)
        self.say(text)

    def say(self, text: str) -> None:
        """Show a text."""
        self._whole = text
        self.setAccessibleName(text)
        self._fit()

    @property
    def whole(self) -> str:
        """The text before shortening."""
        return self._whole

    def resizeEvent(self, event: object) -> None:
        self._fit()

    def _fit(self) -> None:
        room = max(self.width() - 2, 0)
        shown = self.fontMetrics().elidedText(self._whole, Qt.TextElideMode.ElideRight, room)
        if shown != self.text():
            super().setText(shown)
        self.setToolTip(self._whole if shown != self._whole else "")


class Zone(QWidget):
    """A third of the bench. widen_asked: the person wants it to take the whole window, or to give it back."""

    widen_asked = Signal()

    def __init__(self, title: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAccessibleName(title)
        self.title = QLabel(title)
        self.title.setFont(text_font(strong=True))
        self.remark = Elided()
        self.remark.setObjectName("quiet")
        self.widen = GlyphButton("widen", _("Give this part the whole window"))
        self.widen.clicked.connect(self.widen_asked)
        self.tools = QHBoxLayout()
        self.tools.setSpacing(2)
        head = QHBoxLayout()
        # Cells have a margin of their own; the title stands above their text.
        head.setContentsMargins(INSET_PX, 0, 0, 0)
        head.setSpacing(GAP_PX * 2)
        head.addWidget(self.title)
        head.addWidget(self.remark, 1)
        head.addLayout(self.tools)
        head.addWidget(self.widen)
        self._whole = QVBoxLayout(self)
        self._whole.setContentsMargins(MARGIN_PX - INSET_PX, GAP_PX * 2, MARGIN_PX - GAP_PX, 0)
        self._whole.setSpacing(GAP_PX)
        self._whole.addLayout(head)
        self.body: QWidget | None = None
        self._empty = QWidget()
        self._whole.addWidget(self._empty, 1)

    def put(self, body: QWidget) -> None:
        """Put the body in, once."""
        self._whole.replaceWidget(self._empty, body)
        self._empty.deleteLater()
        self.body = body
        self.setFocusProxy(body)

    def show_wide(self, wide: bool) -> None:
        """Say on the button what pressing it does now."""
        if wide:
            self.widen.say(_("Show all three parts again"), "narrow")
        else:
            self.widen.say(_("Give this part the whole window"), "widen")
