"""The body of the third zone: the answer, its folds, its rails, and the repairs where there is none."""

from __future__ import annotations

from PySide6.QtCore import QModelIndex, Signal
from PySide6.QtWidgets import QLabel, QVBoxLayout, QWidget

from blendapp.desk.meet.bounds import with_bound
from blendapp.desk.mix.lines import Line, Part
from blendapp.desk.mix.model import MixModel
from blendapp.desk.mix.view import MixTable
from blendapp.desk.mix.why import repaired
from blendapp.desk.rail.geometry import End
from blendapp.desk.shell.zone import Zone
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.work import Work
from blendapp.domain.formulas import Amounts
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change
from blendapp.domain.wording import _, plural
from blendapp.services import edits


class MixPane(QWidget):
    """What to mix. limit_wanted: the name of an ingredient that is to get a limit of its own."""

    limit_wanted = Signal(str)

    def __init__(self, work: Work, zone: Zone) -> None:
        super().__init__()
        self.work = work
        self.zone = zone
        self.model = MixModel(work, self)
        self.table = MixTable(self.model, self)
        self.table.setAccessibleName(_("Mix"))
        self.empty = QLabel()
        self.empty.setObjectName("quiet")
        self.empty.setWordWrap(True)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.addWidget(self.empty)
        column.addWidget(self.table, 1)
        self.setFocusProxy(self.table)
        work.answered.connect(self._answered)
        work.learned.connect(self._answered)
        work.opened.connect(self._forget)
        self.table.clicked.connect(self._ask)
        self.table.asked.connect(self._ask)
        self.table.grip.proposed.connect(self._propose)
        self.table.grip.given.connect(self._give)
        self.table.grip.taken_back.connect(self._take_back)

    def _forget(self) -> None:
        self.model.opened = frozenset()
        self.model.opened_ids = frozenset()

    def _answered(self) -> None:
        self.model.rebuild()
        self.table.lay()
        result = self.work.result
        self.empty.setVisible(self.work.is_open and result is None)
        if result is None:
            self.empty.setText(_("The answer stands here as soon as there is a formula with limits and prices."))
        self.zone.remark.say(self._remark())

    def _remark(self) -> str:
        result = self.work.result
        if self.work.stale:
            return _("stale")
        if result is None or not result.has_answer:
            return _("no answer") if result is not None else ""
        count = len(result.mix)
        if result.amounts is Amounts.BLEND:
            return plural("{count} ingredient", "{count} ingredients", count).format(count=count)
        return plural("{count} ingredient, per head and day", "{count} ingredients, per head and day", count).format(
            count=count)

    def _ask(self, index: QModelIndex) -> None:
        if not index.isValid() or index.row() >= len(self.model.lines):
            return
        line = self.model.line(index.row())
        if line.part is Part.ACTION and line.repairs:
            self._repair(line)
        elif line.part is Part.RAIL and self.model.limit_of(line) is None:
            self.limit_wanted.emit(line.text)
        elif self.model.toggle(line):
            row, column = index.row(), index.column()
            self._answered()
            self.table.setCurrentIndex(self.model.index(min(row, len(self.model.lines) - 1), column))

    def _repair(self, line: Line) -> None:
        """Apply every change of a button as one undo."""
        result = self.work.result
        if result is None or self.work.stale:
            return
        bounds = [
            (result.limits[one.limit].limit_id, str(one.bound), repaired(one)[0])
            for one in line.repairs if one.to is not None
        ]
        what = line.text if len(bounds) == 1 else _("Repair {formula}").format(formula=result.formula)
        try:
            self.work.do(lambda mill: edits.set_bounds(mill, what, bounds))
        except (Refused, ValueError) as fault:
            self.work.said.emit(sentence_of(fault), [])

    # -- an inclusion by hand

    def _propose(self, owner: tuple[int, str], end: End, value: float) -> None:
        limit = self.model.limit_of(self.model.line_of(owner[0]))
        if limit is None:
            return
        self.model.try_bound(limit.id, end, value)
        self.work.try_changes([Change(limit, with_bound(limit, end, value))])
        self.model.refresh()

    def _give(self, owner: tuple[int, str], end: End, value: float) -> None:
        limit = self.model.limit_of(self.model.line_of(owner[0]))
        if limit is None:
            return
        self.model.try_bound(limit.id, end, None)
        try:
            self.work.do(lambda mill: edits.set_bound(mill, limit.id, end.value, value))
        except (Refused, ValueError) as fault:
            self.work.end_trial()
            self.work.said.emit(str(fault), [])

    def _take_back(self, _owner: tuple[int, str]) -> None:
        self.model.try_bound(-1, End.MINIMUM, None)
        self.work.end_trial()
        self.model.refresh()
