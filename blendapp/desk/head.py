"""What the header and the footer say of the answer, in words and figures."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QObject, QTimer

from blendapp.desk.mix.lines import cost_decimals
from blendapp.desk.shell.frame import Frame
from blendapp.desk.work import Work
from blendapp.domain.figures import write_tiny
from blendapp.domain.formulas import Amounts
from blendapp.domain.mills import VersionState
from blendapp.domain.notation import notation
from blendapp.domain.results import Result, Status
from blendapp.domain.versions import approved_version, in_state
from blendapp.domain.wording import _
from blendapp.services.versions import approved_result, standing

STANDING_MS = 30


class Head(QObject):
    """Keeps header and footer in step with the work."""

    def __init__(self, work: Work, frame: Frame) -> None:
        super().__init__(frame)
        self.work = work
        self.frame = frame
        # What a page would take back before the mill does, in words; "" for nothing.
        self.page_undo: Callable[[], str] = str
        self.page_redo: Callable[[], str] = str
        self._approved: tuple[object, float | None] = (None, None)
        # What a formula stands as is found by comparing, which must not hold up an edit.
        self._rest = QTimer(self, singleShot=True, interval=STANDING_MS)
        self._rest.timeout.connect(self._say_standing)
        work.opened.connect(self.say_all)
        work.chosen.connect(self.say_all)
        work.day_came.connect(self.say_all)
        work.edited.connect(lambda _edit: self.say_all())
        work.answered.connect(self.say_answer)

    def say_all(self) -> None:
        """Say everything again."""
        work, header = self.work, self.frame.header
        formula = work.formula
        header.formula.say(formula.name if formula is not None else _("No formula") if work.is_open else "")
        header.formula.setVisible(work.is_open)
        if formula is None:
            header.state.say("")
        self._rest.start()
        self.say_undo()
        name = work.library.mill.name if work.is_open else ""
        file = work.mill.path.name if work.is_open else ""
        title = " – ".join(part for part in (formula.name if formula is not None else "", name or file) if part)
        self.frame.setWindowTitle(title or "blendapp")
        self.say_answer()

    def _say_standing(self) -> None:
        work, state = self.work, self.frame.header.state
        formula = work.formula
        if formula is None or work.trying:
            return
        found = standing(work.library, formula.id, work.on)
        approved = approved_version(work.library, formula.id)
        if found.draft and approved is not None:
            text = _("{draft}, from approved {number}").format(draft=found.text, number=approved.number)
        else:
            text = ", ".join(part for part in (found.text, found.approved_by) if part)
        state.say(text)

    def _approved_cost(self) -> float | None:
        """The cost of the approved version, looked up again only when another one is approved."""
        formula = self.work.formula
        version = None if formula is None else in_state(self.work.library, formula.id, VersionState.APPROVED)
        if version is not self._approved[0]:
            result = None if version is None else approved_result(self.work.library, version.formula_id)
            self._approved = (version, None if result is None else result.cost)
        return self._approved[1]

    def _since_approved(self, result: Result) -> str:
        approved = self._approved_cost()
        if approved is None or result.cost is None:
            return ""
        decimals = cost_decimals(result)
        if abs(result.cost - approved) < 0.5 * 10.0**-decimals:
            return _("as approved")
        return _("{change} since approved").format(change=signed(result.cost - approved, decimals))

    def say_undo(self) -> None:
        """Say what undo and redo would do now."""
        work, header = self.work, self.frame.header
        undo = self.page_undo() or (work.mill.undo_text if work.is_open and work.mill.writable else None)
        redo = self.page_redo() or (work.mill.redo_text if work.is_open and work.mill.writable else None)
        header.undo.setEnabled(undo is not None)
        header.undo.say(_("Undo: {what} (Ctrl+Z)").format(what=undo) if undo else _("Nothing to undo"))
        header.redo.setEnabled(redo is not None)
        header.redo.say(_("Redo: {what} (Ctrl+Shift+Z)").format(what=redo) if redo else _("Nothing to redo"))

    def say_answer(self) -> None:
        """Say the cost and the check of the answer."""
        result = self.work.result
        cost, check = self.frame.header.cost, self.frame.footer.check
        if result is None:
            cost.say("")
            check.say("")
            return
        if not result.has_answer or result.cost is None:
            cost.say(no_answer_word(result), stale=self.work.stale)
            check.say("")
            return
        figure = cost_words(result)
        if result.status is Status.STOPPED:
            figure = _("{cost}, stopped").format(cost=figure)
        cost.say(figure, self._since_last(result), self._since_approved(result), stale=self.work.stale)
        check.say(self._check_words(result))

    def _since_last(self, result: Result) -> str:
        before = self.work.stored_result.cost if self.work.trying and self.work.stored_result is not None else (
            self.work.cost_before)
        if before is None or result.cost is None:
            return ""
        change = result.cost - before
        if abs(change) < 0.5 * 10.0 ** -cost_decimals(result):
            return _("as before")
        text = _("{change} against what is stored") if self.work.trying else _("{change} since the last answer")
        return text.format(change=signed(change, cost_decimals(result)))

    def _check_words(self, result: Result) -> str:
        if self.work.trying:
            return _("trying, not stored")
        if result.check.largest_violation is None:
            return ""
        return _("checked: largest violation {violation}, gap {gap}   answer in {ms} ms").format(
            violation=write_tiny(result.check.largest_violation), gap=write_tiny(result.check.duality_gap),
            ms=round(self.work.solve_s * 1000),
        )


def cost_words(result: Result) -> str:
    """The cost with its unit: "246.91 USD/t"."""
    per = "t" if result.amounts is Amounts.BLEND else _("day")
    assert result.cost is not None
    return _("{cost} {currency}/{per}").format(
        cost=notation().write(result.cost, cost_decimals(result)), currency=result.currency, per=per)


def signed(value: float, decimals: int) -> str:
    """A change with its sign, a true minus."""
    text = notation().write(abs(value), decimals)
    return ("+" if value > 0 else "−") + text


def no_answer_word(result: Result) -> str:
    """The state of a formula without an answer, in a word or two: never a figure."""
    return {
        Status.CONFLICT: _("conflict"), Status.UNBOUNDED: _("no cheapest mix"), Status.INCOMPLETE: _("incomplete"),
        Status.STOPPED: _("stopped"),
    }.get(result.status, _("no answer"))
