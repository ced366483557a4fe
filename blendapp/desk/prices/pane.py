"""The page on which a price list is looked at before it is taken."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QModelIndex, Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QCheckBox, QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from blendapp.desk.prices.model import PriceRows
from blendapp.desk.prices.view import PriceTable
from blendapp.desk.shell.zone import Elided
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.list_rows import Fate
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _, plural
from blendapp.services import plant, prices
from blendapp.services.movers import with_prices


class PricesPane(QWidget):
    """closed: back to the bench. said: a sentence with what can be listed below it. ingredient_wanted: the person is to
    say which ingredient a name is. effect_wanted: the person wants to see what prices do, between two libraries, with
    whether they are taken.
    """

    closed = Signal()
    said = Signal(str, list)
    ingredient_wanted = Signal(str)
    effect_wanted = Signal(object, object, bool)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.reading: PriceListReading | None = None
        self.rows = PriceRows(self)
        self.table = PriceTable(self.rows, self)
        self.table.setAccessibleName(_("Rows of the price list"))
        self.title = QLabel(_("Price list"))
        self.title.setFont(text_font(strong=True))
        self.remark = Elided()
        self.remark.setObjectName("quiet")
        self.ignored = QCheckBox(_("Show rows that are no price"))
        self.ignored.toggled.connect(self._turn_ignored)
        self.notes = QLabel()
        self.notes.setObjectName("quiet")
        self.notes.setWordWrap(True)
        self.leave = QPushButton(_("Leave it"))
        self.leave.setObjectName("plain")
        self.leave.clicked.connect(self.closed)
        self.take = QPushButton(_("Take the prices"))
        self.take.setObjectName("first")
        self.take.clicked.connect(self.apply)
        self.look = QPushButton(_("What they would do"))
        self.look.setObjectName("plain")
        self.look.clicked.connect(self.preview)
        head = QHBoxLayout()
        head.setSpacing(GAP_PX * 2)
        head.addWidget(self.title)
        head.addWidget(self.remark, 1)
        head.addWidget(self.ignored)
        head.addWidget(self.look)
        head.addWidget(self.leave)
        head.addWidget(self.take)
        column = QVBoxLayout(self)
        column.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX, 0)
        column.setSpacing(GAP_PX)
        column.addLayout(head)
        column.addWidget(self.notes)
        column.addWidget(self.table, 1)
        self.setFocusProxy(self.table)
        self.path: Path | None = None
        self.table.asked.connect(self._ask)
        self.table.doubleClicked.connect(self._ask)

    def read(self, path: Path) -> bool:
        """Read a price list and show it; False where it cannot be read, which is said."""
        try:
            self.reading = prices.read_price_list(self.work.mill, path, self.work.on)
        except Refused as refusal:
            self.said.emit(str(refusal), [])
            return False
        self.path = path
        self.ignored.setChecked(False)
        self._show()
        return True

    def _ask(self, index: QModelIndex) -> None:
        row = self.rows.row(index)
        if row is not None and row.fate is Fate.QUESTION and row.source_name:
            self.ingredient_wanted.emit(row.source_name)

    def answer(self, name: str, ingredient_id: int) -> None:
        """Remember which ingredient the list means by a name, and read the list again."""
        reading, path = self.reading, self.path
        if reading is None or path is None:
            return
        try:
            self.work.do(lambda mill: plant.name_means(mill, reading.file_name, name, ingredient_id))
        except Refused as refusal:
            self.said.emit(str(refusal), [])
            return
        self.read(path)
        self.table.setFocus()

    def _turn_ignored(self, shown: bool) -> None:
        self.rows.with_ignored = shown
        if self.reading is not None:
            self.rows.show(self.reading)

    def _show(self) -> None:
        reading = self.reading
        assert reading is not None
        self.rows.show(reading)
        self.title.setText(reading.file_name)
        accepted = reading.count(Fate.ACCEPTED)
        parts = [plural("{count} price to take", "{count} prices to take", accepted).format(count=accepted)]
        for fate, one, many in (
            (Fate.QUESTION, _("{count} question"), _("{count} questions")),
            (Fate.REFUSED, _("{count} refused"), _("{count} refused")),
            (Fate.IGNORED, _("{count} left alone"), _("{count} left alone")),
        ):
            count = reading.count(fate)
            if count:
                parts.append((one if count == 1 else many).format(count=count))
        self.remark.say(", ".join(parts))
        self.notes.setText("\n".join(reading.notes))
        self.notes.setVisible(bool(reading.notes))
        self.take.setText(plural("Take {count} price", "Take {count} prices", accepted).format(count=accepted))
        self.take.setEnabled(accepted > 0)
        self.look.setEnabled(accepted > 0)

    def preview(self) -> None:
        """Show what the accepted prices would do, with nothing stored."""
        if self.reading is not None:
            before = self.work.library.copy()
            self.effect_wanted.emit(before, with_prices(before, self.reading, self.work.on), False)

    def apply(self) -> None:
        """Record every accepted row as one undo, and show what they do."""
        reading = self.reading
        if reading is None:
            return
        before = self.work.library.copy()
        try:
            self.work.do(lambda mill: prices.apply_price_list(mill, reading, self.work.on))
        except Refused as refusal:
            self.said.emit(str(refusal), [])
            return
        count = reading.count(Fate.ACCEPTED)
        self.effect_wanted.emit(before, self.work.library.copy(), True)
        left = [f"{row.sheet} {row.row}, {row.source_name}: {row.reason}" for row in reading.rows
                if row.fate in (Fate.QUESTION, Fate.REFUSED)]
        text = plural("{count} price from {file} is in force; Ctrl+Z takes it back.",
                      "{count} prices from {file} are in force; Ctrl+Z takes them back.", count)
        self.said.emit(text.format(count=count, file=reading.file_name), left)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.closed.emit()
        else:
            super().keyPressEvent(event)
