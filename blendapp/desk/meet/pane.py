"""The body of the second zone: the list of rails, and the form that adds a limit."""

from __future__ import annotations

from functools import partial

from PySide6.QtCore import QModelIndex, QPoint, Qt
from PySide6.QtWidgets import QLabel, QMenu, QPushButton, QVBoxLayout, QWidget

from blendapp.desk.finder.search import Found
from blendapp.desk.meet.about import AboutFormula
from blendapp.desk.meet.adding import AddLimit
from blendapp.desk.meet.bounds import with_bound
from blendapp.desk.meet.model import MeetModel
from blendapp.desk.meet.view import LimitTable
from blendapp.desk.meet.words import limit_name, limit_unit
from blendapp.desk.rail.geometry import End
from blendapp.desk.shell.glyphs import GlyphButton
from blendapp.desk.shell.zone import INSET_PX, Zone
from blendapp.desk.theme import GAP_PX
from blendapp.desk.work import Work
from blendapp.domain.formulas import LimitKind, Subject
from blendapp.domain.notation import notation
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change
from blendapp.domain.wording import _
from blendapp.services import edits
from blendapp.services.mill import Edit

TOLD_LINES = 3


class MeetPane(QWidget):
    """The limits of the chosen formula."""

    def __init__(self, work: Work, zone: Zone) -> None:
        super().__init__()
        self.work = work
        self.zone = zone
        self.model = MeetModel(work, self)
        self.table = LimitTable(self.model, self)
        self.table.setAccessibleName(_("Limits"))
        self.adding = AddLimit(work)
        self.adding.hide()
        self.about = AboutFormula(work)
        self.about.hide()
        self.empty = QLabel()
        self.empty.setObjectName("quiet")
        self.empty.setWordWrap(True)
        self.told: int | None = None
        self._sort_due = True
        self.telling = QLabel()
        self.telling.setObjectName("quiet")
        self.telling.setWordWrap(True)
        self.telling.setAlignment(Qt.AlignmentFlag.AlignTop)
        self.telling.setContentsMargins(INSET_PX, 4, 0, 6)
        self.telling.setFixedHeight(TOLD_LINES * self.telling.fontMetrics().lineSpacing() + 10)
        self.order = QPushButton()
        self.order.setObjectName("order")
        self.order.clicked.connect(self._turn_order)
        self.add = GlyphButton("add", _("Add a limit"))
        self.add.clicked.connect(self.start_adding)
        zone.tools.addWidget(self.order)
        zone.tools.addWidget(self.add)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(GAP_PX)
        column.addWidget(self.about)
        column.addWidget(self.adding)
        column.addWidget(self.empty)
        column.addWidget(self.table, 1)
        column.addWidget(self.telling)
        self.setFocusProxy(self.table)
        self._connect()
        self._say()

    def _connect(self) -> None:
        work, table = self.work, self.table
        work.opened.connect(self._chosen)
        work.chosen.connect(self._chosen)
        work.edited.connect(self._edited)
        work.reversed.connect(self.model.forgive_all)
        work.answered.connect(self._answered)
        work.learned.connect(self._learned)
        table.grip.proposed.connect(self._propose)
        table.grip.given.connect(self._give)
        table.grip.taken_back.connect(self._take_back)
        table.pasted.connect(self._paste)
        table.cleared.connect(self._clear)
        table.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        table.customContextMenuRequested.connect(self._offer)
        table.asked.connect(self._change_asked)
        table.doubleClicked.connect(self._change_asked)
        table.entered.connect(lambda index: self._tell(index))
        table.viewportEntered.connect(lambda: self._tell(table.currentIndex()))
        table.left.connect(lambda: self._tell(table.currentIndex()))
        table.selectionModel().currentChanged.connect(lambda current, _before: self._tell(current))
        self.adding.added.connect(self._added)
        self.adding.closed.connect(self.table.setFocus)
        self.about.closed.connect(self.table.setFocus)

    # -- what is shown

    def _chosen(self) -> None:
        self.adding.hide()
        self.model.refusals.clear()
        self._sort_due = True
        self.model.rebuild()
        self.table.go_to_top()
        self._say()

    def _edited(self, edit: Edit) -> None:
        self._sort_due = False
        self.model.forgive_owners({change.id for change in edit.changes if change.kind == "limit"})
        if edit.touches("limit", "ingredient", "nutrient", "formula"):
            self._rebuild(keep_order=True)

    def _answered(self) -> None:
        # Rows that move when a price or a bound is edited would be lost from sight: only before the first edit of a
        # formula does its answer, and what is learned of it, sort them.
        if self._sort_due and self.work.result is not None and not self.work.stale and not self.work.trying:
            self._rebuild(keep_order=False)
        else:
            self.model.take_result()
            self.model.refresh()
        self._say()

    def _learned(self) -> None:
        # Near-optimal ranges change no order, and a list made anew would close what is being typed into.
        if self.work.result is not None and self.work.result.conflict is not None:
            self._answered()
            return
        self.model.take_result()
        self.model.refresh()
        self._say()

    def _rebuild(self, *, keep_order: bool) -> None:
        index = self.table.currentIndex()
        kept = (self.model.owner(index), self.model.key(index)) if index.isValid() else None
        self.model.rebuild(keep_order=keep_order)
        if kept is not None and not self.table.currentIndex().isValid():
            at = self.model.cell(*kept)
            if at.isValid():
                self.table.setCurrentIndex(at)

    def _turn_order(self) -> None:
        if not self.model.by_cost or self.model.is_sorted:
            self.model.by_cost = not self.model.by_cost
        self._rebuild(keep_order=False)
        self._say()

    def _tell(self, index: QModelIndex) -> None:
        """Say what the limit means that one points at, or that the keyboard is on."""
        self.told = self.model.owner(index) if index.isValid() and index.row() < len(self.model.owners) else None
        self._tell_again()

    def _tell_again(self) -> None:
        text = "" if self.told is None or self.work.stale else self.model.sentence(self.told)
        if not text and self.work.formula is not None:
            text = _("Point at a limit, or walk to it with the arrow keys, to read what it costs and how far.")
        if text != self.telling.text():
            self.telling.setText(text)
            self.telling.setAccessibleName(text)

    def _say(self) -> None:
        self._tell_again()
        formula = self.work.formula
        self.order.setVisible(formula is not None)
        self.add.setVisible(formula is not None)
        self.order.setText(self._order_words())
        self.order.setToolTip(_(
            "Order the limits by what a hundredth of each bound changes the cost, or as they were entered"))
        if formula is None:
            self.empty.setText(_("Choose a formula, or make a new one, to see what it must meet."))
        elif not self.model.owners:
            self.empty.setText(_("No limits yet. Add one with the plus above."))
        else:
            self.empty.setText("")
        self.empty.setVisible(bool(self.empty.text()) and self.work.is_open)
        self.zone.remark.say("" if formula is None else formula_words(self.work))

    def _order_words(self) -> str:
        if not self.model.by_cost:
            return _("as entered")
        return _("by what each costs") if self.model.is_sorted else _("as it was sorted; sort again")

    # -- an end by hand

    def _propose(self, owner: tuple[int, str], end: End, value: float) -> None:
        limit = self.model.limit(owner[0])
        if limit is None:
            return
        self.model.try_bound(owner[0], end, value)
        self.model.set_axis(owner[0], self.table.grip.axis)
        self.work.try_changes([Change(limit, with_bound(limit, end, value))])
        self.model.refresh([owner[0]])

    def _give(self, owner: tuple[int, str], end: End, value: float) -> None:
        self.model.try_bound(owner[0], end, None)
        try:
            self.work.do(lambda mill: edits.set_bound(mill, owner[0], end.value, value))
        except (Refused, ValueError) as fault:
            self.work.end_trial()
            self.work.said.emit(str(fault), [])

    def _take_back(self, owner: tuple[int, str]) -> None:
        self.model.try_bound(owner[0], End.MINIMUM, None)
        self.work.end_trial()
        self.model.refresh([owner[0]])

    # -- blocks

    def _paste(self, cells: list[tuple[int, str, str]], outside: list[str]) -> None:
        bad: list[tuple[int, str, str]] = []
        good: list[tuple[int, str, str]] = []
        for owner, key, text in cells:
            (good if key in ("minimum", "maximum") else bad).append((owner, key, text))
        self._write_block(good, _("Paste limits"))
        lost = [text for _owner, _key, text in bad if text.strip()] + outside
        if lost:
            self.work.said.emit(_("These cells fell where nothing is typed in:"), lost)

    def _clear(self, cells: list[tuple[int, str]]) -> None:
        bounds = [(owner, key, "") for owner, key in cells if key in ("minimum", "maximum")]
        if bounds:
            self._write_block(bounds, _("Open limits"))
        elif len({owner for owner, _key in cells}) == 1:
            self.remove(cells[0][0])

    def _write_block(self, cells: list[tuple[int, str, str]], what: str) -> None:
        def thunk(owner: int, key: str, text: str) -> object:
            def changes() -> list[Change]:
                bound = notation().read(text) if text.strip() else None
                return edits.field_changes(self.work.mill, self.work.library.limit(owner), **{key: bound})

            return changes

        if not cells:
            return
        many = self.work.do(lambda mill: edits.many(mill, what, [thunk(*cell) for cell in cells]))  # type: ignore[misc]
        for at, (owner, key, text) in enumerate(cells):
            if at in many.refused:
                self.model.refuse(owner, key, text, " ".join(problem.text for problem in many.refused[at]))
            else:
                self.model.forgive(owner, key)

    # -- rows

    def found(self) -> list[Found]:
        """The limits of the chosen formula, and what else could be limited, as things to find."""
        formula, library = self.work.formula, self.work.library
        if formula is None:
            return []
        limits = library.limits(formula.id)
        named = {limit.subject for limit in limits}
        things = [
            Found(f"{limit_name(library, limit)}, {limit_unit(library, limit, formula.amounts)}", _("limit"),
                  partial(self.table.go_to, limit.id, "rail"))
            for limit in limits
        ]
        things += [
            Found(_("Limit {name}").format(name=one.name), _("new limit"),
                  partial(self.adding.begin, LimitKind.NUTRIENT, one.name))
            for one in library.nutrients
            if Subject.nutrient(one.id) not in named
        ]
        return things

    def start_adding(self) -> None:
        """Open the form that adds a limit."""
        if self.work.formula is not None:
            self.adding.begin()

    def _added(self, limit_id: int) -> None:
        self._rebuild(keep_order=True)
        self._say()
        limit = self.model.limit(limit_id)
        key = "maximum" if limit is not None and limit.minimum is None and limit.maximum is not None else "minimum"
        self.table.go_to(limit_id, key)

    def _change_asked(self, index: QModelIndex) -> None:
        limit = self.model.limit(self.model.owner(index)) if index.isValid() else None
        if limit is not None and self.model.key(index) == "name":
            self.adding.begin_change(limit)

    def _offer(self, point: QPoint) -> None:
        index: QModelIndex = self.table.indexAt(point)
        if index.isValid():
            self.row_menu(self.model.owner(index)).popup(self.table.viewport().mapToGlobal(point))

    def row_menu(self, owner: int) -> QMenu:
        """What can be done with a limit."""
        menu = QMenu(self)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        limit = self.model.limit(owner)
        if limit is not None:
            name = self.work.library.subject_name(limit.subject)
            menu.addAction(_("Change what it is about, its unit or basis"), lambda: self.adding.begin_change(limit))
            menu.addAction(_("Remove the limit on {name}").format(name=name), lambda: self.remove(owner))
        return menu

    def remove(self, owner: int) -> None:
        """Remove a limit; undo brings it back."""
        try:
            self.work.do(lambda mill: edits.remove_limit(mill, owner))
        except (Refused, ValueError) as fault:
            self.work.said.emit(str(fault), [])
        self._say()


def formula_words(work: Work) -> str:
    """What a formula is for, in words: animal, stage, and what its amounts are."""
    formula = work.formula
    if formula is None:
        return ""
    parts = [_(str(formula.animal)) if formula.animal is not None else "", formula.stage]
    return ", ".join(part for part in parts if part)



