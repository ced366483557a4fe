"""What the window works on: the open mill, the chosen formula and its answer. The one place where the desk calls jobs.

Every edit of the window goes through do() or apply(): the mill takes it, everyone is told what changed, and the
answer follows. Small formulas are solved at once; one that has been slow is solved on a thread, and its old answer
is stale until then.
"""

from __future__ import annotations

import datetime
import threading
import time
from collections.abc import Callable, Sequence
from typing import TypeVar

from PySide6.QtCore import QObject, QTimer, Signal

from blendapp.desk.aside import Aside
from blendapp.domain.formulas import Formula, LimitKind
from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change
from blendapp.domain.results import IngredientResult, Result
from blendapp.domain.wording import _
from blendapp.services.asking import ask_all
from blendapp.services.formulate import Answer, FailedCertificate, answer_to, formulate
from blendapp.services.mill import Edit, Mill, MillFileError, today

SLOW_S = 0.06
# Of a program with choices: the new answer, or the best mix found so far, is to be there within two seconds.
CHOICE_S = 1.6
# What more can be said of an answer waits until the window has shown it and the hand rests.
REST_MS = 70
Done = TypeVar("Done")
Extra = TypeVar("Extra")


class Work(QObject):
    """opened: another mill, or none. edited: an Edit was taken. chosen: another formula, or none.

    leaving: the mill is about to be closed; what is to be put on record is finished now.
    reversed: after the Edit of an undo or a redo.
    answered: the result changed, or its staleness did; trying is true while a value is being tried and not stored.
    day_came: it is another day than before, whose prices count from now on.
    learned: more is known of the result that is shown already: near-optimal ranges, or why there is none.
    said: a sentence for the person, with what can be listed below it.
    """

    opened = Signal()
    leaving = Signal()
    reversed = Signal()
    day_came = Signal()
    edited = Signal(object)
    chosen = Signal()
    answered = Signal()
    learned = Signal()
    said = Signal(str, list)

    def __init__(self, parent: QObject | None = None, day: Callable[[], datetime.date] = today) -> None:
        super().__init__(parent)
        self._mill: Mill | None = None
        self._empty = Library()
        self.day = day
        self.on = day()
        self.formula_id: int | None = None
        self.result: Result | None = None
        self.stored_result: Result | None = None
        self.cost_before: float | None = None
        self.stale = False
        self.trying = False
        self.admitted_ids: set[int] = set()
        self.solve_s = 0.0
        self._slow: set[int] = set()
        self._by_id: dict[int, IngredientResult] = {}
        self._trial_base: Library | None = None
        self.answer: Answer | None = None
        self._aside = Aside(self, (FailedCertificate, Refused, ValueError))
        self._aside.done.connect(self._take_solved)
        self._enough = threading.Event()
        self._further = Aside(self, (FailedCertificate, Refused, ValueError))
        self._further.done.connect(self._take_further)
        self._rest = QTimer(self, singleShot=True, interval=REST_MS)
        self._rest.timeout.connect(self._ask_further)

    # -- what is open

    @property
    def mill(self) -> Mill:
        """The open mill. Only asked where there is one."""
        assert self._mill is not None
        return self._mill

    @property
    def is_open(self) -> bool:
        return self._mill is not None

    @property
    def library(self) -> Library:
        """The library of the open mill, an empty one without."""
        return self._empty if self._mill is None else self._mill.library

    @property
    def formula(self) -> Formula | None:
        """The chosen formula, or None."""
        if self.formula_id is None:
            return None
        return self.library.records["formula"].get(self.formula_id)

    def open(self, mill: Mill | None) -> None:
        """Work on a mill from now on, and close the one before."""
        if self._mill is not None and mill is not self._mill:
            self.leaving.emit()
        before, self._mill = self._mill, mill
        if before is not None and before is not mill:
            before.close()
        self._slow.clear()
        self.formula_id = None
        self.result = self.stored_result = self.answer = None
        self.on = self.day()
        self.opened.emit()
        formulas = self.library.formulas
        self.choose(formulas[0].id if formulas else None)

    def close(self) -> None:
        """Close the mill file."""
        if self._mill is not None:
            self.leaving.emit()
        self._aside.forget()
        self._leave_further()
        if self._mill is not None:
            self._mill.close()
            self._mill = None

    def take_day(self) -> bool:
        """Work on the prices of today from now on. Returns whether that is another day than before."""
        if self.day() == self.on:
            return False
        self.on = self.day()
        self.day_came.emit()
        self.solve()
        return True

    def choose(self, formula_id: int | None) -> None:
        """Work on another formula."""
        self.formula_id = formula_id
        self.cost_before = None
        self.result = self.stored_result = self.answer = None
        self._by_id = {}
        self._admit()
        self.chosen.emit()
        self.solve()

    def _admit(self) -> None:
        formula = self.formula
        self.admitted_ids = set() if formula is None else {one.id for one in self.library.admitted(formula)}

    # -- edits

    def do(self, job: Callable[[Mill], Done]) -> Done:
        """Run a job that edits the mill, tell everyone, and have the answer follow.

        Raises Refused, also for a file that cannot take the edit.
        """
        self._forget_trial()
        try:
            done = job(self.mill)
        except MillFileError as error:
            raise Refused(str(error)) from error
        edit = done if isinstance(done, Edit) else getattr(done, "edit", None)
        if isinstance(edit, Edit):
            self.took(edit)
        return done

    def do_with(self, job: Callable[[Mill], tuple[Edit, Extra]]) -> tuple[Edit, Extra]:
        """As do, for a job that gives something besides its edit."""
        kept: list[Extra] = []

        def inner(mill: Mill) -> Edit:
            edit, extra = job(mill)
            kept.append(extra)
            return edit

        return self.do(inner), kept[0]

    def apply(self, what: str, changes: Sequence[Change]) -> Edit:
        """As do, for changes that are worked out already."""
        return self.do(lambda mill: mill.apply(what, changes))

    def took(self, edit: Edit) -> None:
        """Tell everyone of an edit that the mill has taken."""
        if not edit.changes:
            self.answered.emit()
            return
        if self.formula_id is not None and self.formula is None:
            remaining = self.library.formulas
            self.formula_id = remaining[0].id if remaining else None
            self.cost_before = None
            self._admit()
            self.edited.emit(edit)
            self.chosen.emit()
        else:
            self._admit()
            self.edited.emit(edit)
        if edit.oddities:
            self.said.emit(_("Taken, but unusual:"), [str(one) for one in edit.oddities])
        self.solve()

    def recorded(self) -> None:
        """Tell everyone of what the mill has put on record that cannot be undone."""
        self.edited.emit(Edit(0, "", ()))
        self.solve()

    def undo(self) -> None:
        """Take the last edit back."""
        self._reverse(lambda mill: mill.undo())

    def redo(self) -> None:
        """Take the last undo back."""
        self._reverse(lambda mill: mill.redo())

    def _reverse(self, job: Callable[[Mill], Edit | None]) -> None:
        if self._mill is None:
            return
        try:
            if self.do(job) is not None:
                self.reversed.emit()
        except Refused as refusal:
            self.said.emit(" ".join(problem.text for problem in refusal.problems), [])

    # -- trying

    def try_changes(self, changes: Sequence[Change]) -> None:
        """Show the answer to changes that are not stored: what a hand on a rail sees."""
        if self.formula_id is None or self.formula_id in self._slow or self._mill is None:
            return
        if self._trial_base is None:
            self._trial_base = self.library.copy()
        self._trial_base.apply(changes)
        try:
            found = formulate(self._trial_base, self.formula_id, self.on, self.mill.composition)
        except (FailedCertificate, Refused, ValueError):
            return
        finally:
            self._trial_base.apply([change.reversed for change in reversed(changes)])
        self.trying = True
        self._show(found)

    def end_trial(self) -> None:
        """Show the stored answer again."""
        if self._forget_trial() and self.stored_result is not None:
            self._show(self.stored_result)

    def _forget_trial(self) -> bool:
        was, self.trying, self._trial_base = self.trying, False, None
        return was

    # -- answers

    def solve(self) -> None:
        """Have the answer follow what the mill holds now."""
        self._aside.forget()
        self._leave_further()
        if self.formula_id is None or self._mill is None:
            self.stored_result = None
            self.stale = False
            self._show(None)
            return
        if self._is_slow(self.formula_id):
            self.stale = True
            self.answered.emit()
            self._solve_aside()
            return
        begun = time.perf_counter()
        try:
            found = answer_to(self.library, self.formula_id, self.on, self.mill.composition)
        except (FailedCertificate, Refused, ValueError) as fault:
            self._take(None, fault)
            return
        self.solve_s = time.perf_counter() - begun
        if self.solve_s > SLOW_S and self.stored_result is not None:
            self._slow.add(self.formula_id)
        self._take(found, None)

    def _is_slow(self, formula_id: int) -> bool:
        whole = (LimitKind.PRACTICAL, LimitKind.COUNT)
        return formula_id in self._slow or any(one.kind in whole for one in self.library.limits(formula_id))

    def _solve_aside(self) -> None:
        library, formula_id, on = self.library.copy(), self.formula_id, self.on
        assert formula_id is not None

        def solve() -> tuple[Answer, float]:
            begun = time.perf_counter()
            found = answer_to(library, formula_id, on, time_limit_s=CHOICE_S)
            return found, time.perf_counter() - begun

        self._aside.ask(solve)

    def _take_solved(self, given: tuple[Answer, float] | None, fault: Exception | None) -> None:
        if self._mill is None:
            return
        if given is not None:
            self.solve_s = given[1]
        self._take(None if given is None else given[0], fault)

    def _take(self, given: Answer | None, fault: Exception | None) -> None:
        if fault is not None:
            self.said.emit(str(fault), [])
        old, found = self.stored_result, None if given is None else given.result
        if old is not None and found is not None and old.formula_id == found.formula_id:
            self.cost_before = old.cost
        self.answer = given
        self.stored_result = found
        self.stale = False
        self._show(found)
        if given is not None:
            self._rest.start()

    # -- what more there is to say of an answer

    @property
    def has_further(self) -> bool:
        """Whether all that can be said of the answer is known."""
        return self.answer is not None and self.stored_result is not self.answer.result

    def _ask_further(self) -> None:
        answer, enough = self.answer, self._enough
        if answer is None or answer.built is None or self.stale:
            return
        self._further.ask(lambda: (answer, ask_all(answer, go_on=lambda: not enough.is_set())))

    def _leave_further(self) -> None:
        """What is being worked out about an answer is of no use once anything was edited."""
        self._rest.stop()
        self._further.forget()
        self._enough.set()
        self._enough = threading.Event()

    def _take_further(self, given: tuple[Answer, Result] | None, fault: Exception | None) -> None:
        if fault is not None:
            self.said.emit(str(fault), [])
        if given is None or given[0] is not self.answer or self._mill is None:
            return
        self.stored_result = given[1]
        if not self.trying:
            self.result = given[1]
            self._by_id = {one.ingredient_id: one for one in given[1].ingredients}
            self.learned.emit()

    def _show(self, found: Result | None) -> None:
        self.result = found
        self._by_id = {} if found is None else {one.ingredient_id: one for one in found.ingredients}
        self.answered.emit()

    def ingredient_result(self, ingredient_id: int) -> IngredientResult | None:
        """What the answer says of an ingredient, None where it says nothing."""
        return self._by_id.get(ingredient_id)
