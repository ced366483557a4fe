"""The page that says what new prices do to every formula, worked out beside the window."""

from __future__ import annotations

import threading
from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import QModelIndex, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QProgressBar, QPushButton, QVBoxLayout

from blendapp.desk.aside import Aside
from blendapp.desk.prices.effect_model import EffectRows
from blendapp.desk.shell.page import Page
from blendapp.desk.shell.zone import Elided
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services.effect_table import summary, write_effect
from blendapp.services.kept_answers import AnswersNow
from blendapp.services.mill import Edit
from blendapp.services.movers import Mover, movers

LEAST_MIX_PX = 260


class EffectPane(Page):
    """closed: away from here, to the bench or back to the list. chosen: the identifier of a formula to show. said: a
    sentence with a list below it. table_wanted: the rows are to be written into a file, see write_table."""

    table_wanted = Signal()
    chosen = Signal(int)
    said = Signal(str, list)
    _went_on = Signal(int, int)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.rows = EffectRows(self)
        self.table = DeskTable(self.rows, self)
        self.table.setAccessibleName(_("What the new prices do"))
        self.title = QLabel(_("What the new prices do"))
        self.title.setFont(text_font(strong=True))
        self.remark = Elided()
        self.remark.setObjectName("quiet")
        self.bar = QProgressBar()
        self.bar.setTextVisible(False)
        self.bar.setFixedWidth(160)
        self.bar.setAccessibleName(_("Formulas worked out"))
        self.stop = QPushButton(_("Stop"))
        self.stop.setObjectName("plain")
        self.stop.clicked.connect(self._stop_or_go)
        self.write = QPushButton(_("Write the table…"))
        self.write.setObjectName("plain")
        self.write.setToolTip(_("All formulas and their ingredients, as .xlsx or .csv"))
        self.write.setEnabled(False)
        self.write.clicked.connect(self.table_wanted)
        self.leave = QPushButton(_("Back to the bench"))
        self.leave.setObjectName("plain")
        self.leave.clicked.connect(self.closed)
        head = QHBoxLayout()
        head.setSpacing(GAP_PX * 2)
        head.addWidget(self.title)
        head.addWidget(self.remark, 1)
        for one in (self.bar, self.stop, self.write, self.leave):
            head.addWidget(one)
        column = QVBoxLayout(self)
        column.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX, 0)
        column.setSpacing(GAP_PX)
        column.addLayout(head)
        column.addWidget(self.table, 1)
        self.setFocusProxy(self.table)
        self._both: tuple[Library, Library] | None = None
        self._answers: AnswersNow | None = None
        self._enough = threading.Event()
        self._of = 0
        self.found: list[Mover] = []
        self._on = work.on
        # The lists that stand after these prices and not before: of a preview none.
        self._brought: frozenset[int] = frozenset()
        self._title = ""
        self._is_edited = False
        self.running = False
        self._aside = Aside(self, (Refused, ValueError))
        self._aside.done.connect(self._take)
        self._went_on.connect(self._show_progress)
        self.table.resized.connect(self._fit_mix)
        self.rows.modelReset.connect(self._fit_mix)
        self.table.asked.connect(self._choose)
        self.table.doubleClicked.connect(self._choose)
        work.opened.connect(self._forget)
        work.edited.connect(self._edited)
        work.day_came.connect(self._day_came)

    def begin(self, before: Library, after: Library, title: str, leave: str) -> None:
        """Work out what prices do between two libraries that nobody edits. leave: words of the way back."""
        self._both = (before, after)
        self._brought = frozenset(after.records["price_list"]) - frozenset(before.records["price_list"])
        self._is_edited = False
        self._answers = self.work.mill.answers.view()
        self._title = title
        self.title.setText(title)
        self.leave.setText(leave)
        self.rows.show([], self.work.library.mill.currency)
        self._run()

    def _run(self) -> None:
        if self._both is None:
            return
        self._enough.set()
        enough = self._enough = threading.Event()
        before, after = self._both
        on, tell = self.work.on, self._teller(enough)
        self._on = on
        self.running = True
        self.write.setEnabled(False)
        self._of = 0
        self.bar.setRange(0, 0)
        self.bar.show()
        self.stop.setText(_("Stop"))
        self.stop.show()
        self.remark.say(_("being worked out"))
        answers = self._answers
        self._aside.ask(lambda: movers(before, after, on, lambda: not enough.is_set(), tell, answers))

    def _teller(self, enough: threading.Event) -> Callable[[int, int], None]:
        def tell(done: int, of: int) -> None:
            if not enough.is_set():
                self._went_on.emit(done, of)

        return tell

    def _show_progress(self, done: int, of: int) -> None:
        self._of = of
        if self.running:
            self.bar.setRange(0, max(of, 1))
            self.bar.setValue(done)
            self.remark.say(_("{done} of {count} formulas").format(done=done, count=of))

    def _stop_or_go(self) -> None:
        if self.running:
            self._enough.set()
        else:
            self._run()

    def _take(self, found: list[Mover] | None, fault: Exception | None) -> None:
        self.running = False
        self.bar.hide()
        if found is None:
            self.said.emit(str(fault), [])
            return
        self.found = found
        self.write.setEnabled(bool(found))
        self.rows.show(found, self.work.library.mill.currency)
        if len(found) < self._of:
            self.stop.setText(_("Work them all out"))
        else:
            self.stop.hide()
        self._say()

    def _say(self) -> None:
        """Say what was worked out, and whether the mill still stands so."""
        if self._both is None:
            return
        back = self._is_taken_back
        self.title.setText(_("Taken back: what the new prices did") if back else self._title)
        if self.running:
            return
        what = summary(self.found)
        if len(self.found) < self._of:
            what = _("stopped after {done} of {count} formulas").format(done=len(self.found), count=self._of)
        if back:
            what = _("the prices before them count again; they had: {what}").format(what=what)
        elif self._is_edited:
            what = _("{what}; edited since").format(what=what)
        if self._on != self.work.on:
            what = _("{what}; at the prices of {day}").format(what=what, day=self._on.isoformat())
        self.remark.say(what)

    @property
    def _is_taken_back(self) -> bool:
        lists = self.work.library.records["price_list"]
        return any(key not in lists or lists[key].withdrawn is not None for key in self._brought)

    def _fit_mix(self) -> None:
        """Let what changes in a mix take the width that the other columns leave."""
        column = self.rows.column_of("mix")
        if column is not None and not self.table.has_own_width("mix"):
            others = sum(self.table.columnWidth(at) for at in range(self.rows.columnCount()) if at != column)
            self.table.setColumnWidth(column, max(self.table.viewport().width() - others, LEAST_MIX_PX))

    def write_table(self, path: Path) -> None:
        """Write the rows as they stand, as .xlsx or .csv. Raises Refused."""
        write_effect(path, self.rows.shown, self.work.library.mill.currency)

    def _choose(self, index: QModelIndex) -> None:
        if index.isValid():
            self.chosen.emit(self.rows.owner(index))

    @property
    def has_any(self) -> bool:
        """Whether there is anything to come back to."""
        return self._both is not None

    def _edited(self, edit: Edit) -> None:
        """What stands here is of two sets of prices, and stays so; it says when they are no longer today's."""
        lists = [one for one in edit.changes if one.kind == "price_list"]
        is_own = any(record.id in self._brought for one in lists for record in (one.before, one.after) if record)
        if not is_own and edit.touches("quote", "value", "limit", "ingredient", "formula", "mill"):
            self._is_edited = True
        self._say()

    def _day_came(self) -> None:
        self._say()

    def stop_all(self) -> None:
        """Nobody waits any more: the window closes, or another mill is opened."""
        self._forget()

    def _forget(self) -> None:
        self.found = []
        self.write.setEnabled(False)
        self._enough.set()
        self._aside.forget()
        self._both = None
        self.running = False
        self.rows.show([], "")
