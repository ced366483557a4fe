"""The right of the batch screen: its lines with what they come to, or one of its pages as it will be printed."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import Signal
from PySide6.QtWidgets import (
    QButtonGroup,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from blendapp.desk.sheet.lines import LineModel
from blendapp.desk.sheet.pages import PageView
from blendapp.desk.sheet.words import opened_words, yield_words
from blendapp.desk.table.frozen import FrozenTable
from blendapp.desk.theme import GAP_PX
from blendapp.domain.batches import Batch, BatchPage, ToMake
from blendapp.domain.notation import notation
from blendapp.domain.wording import _

LINES = "lines"
# By how many pixels the columns of words grow where there is room, those that need it most first.
_MAY_GROW = {"name": 70, "bins": 90, "scale": 40}


def view_words() -> dict[str, str]:
    """What can be looked at, and what each is called."""
    return {
        LINES: _("Lines"), BatchPage.SHEET: _("Batch sheet"), BatchPage.MASTER: _("Master formula record"),
        BatchPage.BLANK: _("Blank batch record"),
    }


class BatchView(QWidget):
    """turned: another view was chosen. make_wanted: the batch of an ingredient that must be made first is asked for."""

    turned = Signal(str)
    make_wanted = Signal(object)

    def __init__(self, lines: LineModel) -> None:
        super().__init__()
        self.table = FrozenTable(lines, self)
        self.table.setAccessibleName(_("Lines of the batch"))
        self.table.resized.connect(self._fit)
        lines.modelReset.connect(self._fit)
        self.pages = PageView()
        self.yielding = QLabel()
        self.yielding.setWordWrap(True)
        self.making = QVBoxLayout()
        self.making.setSpacing(4)
        self.print_button = QPushButton(_("Print…"))
        self.print_button.setObjectName("first")
        self.print_button.setToolTip(_("Print the page that is looked at; from the lines, the batch sheet (Ctrl+P)"))
        self.save_button = QPushButton(_("Keep as PDF…"))
        self.save_button.setObjectName("plain")
        self.buttons: dict[str, QPushButton] = {}
        self._group = QButtonGroup(self)
        top = QHBoxLayout()
        top.setSpacing(2)
        for key, words in view_words().items():
            button = QPushButton(words)
            button.setCheckable(True)
            button.setObjectName("set")
            button.setToolTip(_("Ctrl with Page Down or Page Up goes from one to the next"))
            button.clicked.connect(partial(self.turn, key))
            self._group.addButton(button)
            self.buttons[key] = button
            top.addWidget(button)
        self.buttons[LINES].setChecked(True)
        top.addStretch(1)
        top.addWidget(self.save_button)
        top.addSpacing(GAP_PX)
        top.addWidget(self.print_button)
        inside = QWidget()
        column = QVBoxLayout(inside)
        column.setContentsMargins(0, 0, 0, GAP_PX)
        column.setSpacing(GAP_PX)
        column.addWidget(self.table, 1)
        column.addWidget(self.yielding)
        column.addLayout(self.making)
        self.stack = QStackedWidget()
        self.stack.addWidget(inside)
        self.stack.addWidget(self.pages)
        whole = QVBoxLayout(self)
        whole.setContentsMargins(0, 0, 0, 0)
        whole.setSpacing(GAP_PX)
        whole.addLayout(top)
        whole.addWidget(self.stack, 1)
        self.setTabOrder(self.save_button, self.print_button)

    @property
    def shown(self) -> str:
        """Which view is chosen."""
        return next(key for key, button in self.buttons.items() if button.isChecked())

    @property
    def page(self) -> BatchPage:
        """Which page is printed: the one that is looked at, and from the lines the batch sheet."""
        return BatchPage.SHEET if self.shown == LINES else BatchPage(self.shown)

    def turn(self, key: str, _checked: bool = False) -> None:
        """Look at another view."""
        self.buttons[key].setChecked(True)
        self.stack.setCurrentIndex(0 if key == LINES else 1)
        self.turned.emit(key)

    def turn_by(self, by: int) -> None:
        """Look at the view so many places to the right."""
        keys = list(self.buttons)
        self.turn(keys[(keys.index(self.shown) + by) % len(keys)])

    def _fit(self) -> None:
        """Let the words have what the figures leave."""
        table, grid = self.table, self.table.grid
        spare = table.viewport().width() - sum(heading.width for heading in grid.headings)
        for key, most in _MAY_GROW.items():
            at = grid.column_of(key)
            if at is not None and not table.has_own_width(key):
                more = min(max(spare, 0), most)
                table.setColumnWidth(at, grid.headings[at].width + more)
                spare -= more

    def say(self, batch: Batch | None) -> None:
        """Say what the batch gives and what must be made first; None says nothing."""
        parts = [] if batch is None else [opened_words(batch), yield_words(batch)]
        words = "\n".join(part for part in parts if part)
        self.yielding.setText(words)
        self.yielding.setVisible(bool(words))
        while self.making.count():
            item = self.making.takeAt(0)
            widget = item.widget() if item is not None else None
            if widget is not None:
                widget.hide()
                widget.deleteLater()
        for one in () if batch is None else batch.to_make:
            self.making.addWidget(self._to_make(one))

    def _to_make(self, one: ToMake) -> QWidget:
        line = QWidget()
        row = QHBoxLayout(line)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(GAP_PX)
        text = _("Make first: {kg} kg of {ingredient}, by {formula}")
        words = QLabel(text.format(
            kg=notation().write_short(one.mass_kg, 2), ingredient=one.ingredient, formula=one.formula))
        button = QPushButton(_("Open its batch"))
        button.setObjectName("plain")
        button.setAccessibleName(_("Open the batch of {formula}").format(formula=one.formula))
        button.clicked.connect(lambda: self.make_wanted.emit(one))
        row.addWidget(words)
        row.addWidget(button)
        row.addStretch(1)
        return line
