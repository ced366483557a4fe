"""The page behind the header's standing: versions, differences, preparing and approving. Nothing here is undone."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from typing import Any

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QVBoxLayout

from blendapp.desk.aside import Aside
from blendapp.desk.shell.page import Page, side_column
from blendapp.desk.shell.zone import Elided
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.versions.form import VersionForm
from blendapp.desk.versions.model import DifferenceRows, VersionRows
from blendapp.desk.work import Work
from blendapp.domain.library import Library
from blendapp.domain.mills import FormulaVersion, Person, VersionState
from blendapp.domain.problems import Refused
from blendapp.domain.results import Status
from blendapp.domain.versions import alterations, in_state, sound_snapshot, versions_of
from blendapp.domain.wording import _
from blendapp.services import versions
from blendapp.services.formulate import FailedCertificate
from blendapp.services.mill import Mill, MillFileError

SIDE_PX = 340


class VersionsPane(Page):
    """closed: back to the bench. people_wanted: to where the mill's persons are kept."""

    people_wanted = Signal()
    said = Signal(str, list)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.title = QLabel()
        self.title.setFont(text_font(strong=True))
        self.title.setWordWrap(True)
        self.standing = QLabel()
        self.standing.setWordWrap(True)
        self.form = VersionForm()
        self.people = QPushButton(_("Persons and passwords…"))
        self.people.setObjectName("plain")
        self.people.clicked.connect(self.people_wanted)
        self.leave = QPushButton(_("Back to the bench"))
        self.leave.setObjectName("plain")
        self.leave.clicked.connect(self.closed)
        self.rows = VersionRows(self)
        self.table = DeskTable(self.rows, self)
        self.table.setAccessibleName(_("Versions"))
        self.heading = Elided()
        self.heading.setFont(text_font(strong=True))
        self.found = DifferenceRows(self)
        self.differences = DeskTable(self.found, self)
        self.differences.setAccessibleName(_("Differences"))
        self._record: Callable[[Mill, Any], FormulaVersion] | None = None
        self._done_text = ""
        # Working an answer out once more may take seconds, and checking a password is slow by intention.
        self._aside = Aside(self, (Exception,))
        self._aside.done.connect(self._take)
        work.leaving.connect(self._aside.finish)
        self._lay()
        self.setFocusProxy(self.table)
        self.form.prepare.connect(self._prepare)
        self.form.approve.connect(self._approve)
        self.table.selectionModel().currentRowChanged.connect(lambda _now, _before: self._compare())
        for signal in (work.edited, work.answered, work.chosen, work.opened):
            signal.connect(lambda *_what: self.fill() if self.isVisible() else None)

    def _lay(self) -> None:
        scroll = side_column((self.title, self.standing, self.form, self.people, self.leave), SIDE_PX)
        right = QVBoxLayout()
        right.setSpacing(GAP_PX)
        right.addWidget(self.table, 2)
        right.addWidget(self.heading)
        right.addWidget(self.differences, 5)
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX, 0)
        row.setSpacing(MARGIN_PX)
        row.addWidget(scroll)
        row.addLayout(right, 1)

    # -- what is shown

    def begin(self) -> None:
        """Show the versions of the chosen formula."""
        self.form.done()
        self.table.selectionModel().clear()
        self.fill()

    def fill(self) -> None:
        """Show what is on record, and what can be done now."""
        work, formula = self.work, self.work.formula
        if formula is None:
            self.rows.show([], {})
            self.found.show([])
            return
        library = work.library
        altered = {one.number: one.text for one in alterations(library, formula.id)}
        self.rows.show(versions_of(library, formula.id), altered)
        state = versions.standing(library, formula.id, work.on)
        self.title.setText(formula.name)
        approved = ", ".join(part for part in (state.text, state.approved_by) if part)
        lines = [approved if not state.draft else _("{draft}, not approved").format(draft=state.text.capitalize())]
        self.standing.setText("\n".join([*lines, *altered.values()]))
        draft = in_state(library, formula.id, VersionState.DRAFT)
        people: list[Person] = [one for one in library.all("person") if one.active]
        writable = work.mill.writable
        self.form.fill(people, self._cautions(draft), state.text if state.draft and writable else "",
                       "" if draft is None or not writable else _("draft {number}").format(number=draft.number))
        self.people.setVisible(writable)
        self._compare()

    def _cautions(self, draft: FormulaVersion | None) -> tuple[str, ...]:
        if draft is None:
            return ()
        try:
            result = sound_snapshot(self.work.library, draft).result
        except Refused:
            return ()
        return () if result is None else versions.to_acknowledge(result)

    def _compare(self) -> None:
        """Today against the approved version, or a chosen version against the one before it."""
        formula = self.work.formula
        if formula is None:
            return
        library, index = self.work.library, self.table.currentIndex()
        chosen = self.rows.version(self.rows.owner(index)) if index.isValid() else None
        try:
            if chosen is not None:
                earlier = [one for one in versions_of(library, formula.id) if one.number < chosen.number]
                if not earlier:
                    self._say_found(_("Version {number} is the first.").format(number=chosen.number), [])
                    return
                text = _("What version {number} changed since version {before}")
                found = versions.differences_between(library, earlier[-1].id, chosen.id)
                self._say_found(text.format(number=chosen.number, before=earlier[-1].number), list(found))
                return
            result = None if self.work.stale else self.work.stored_result
            rows = versions.differences_from_approved(library, formula.id, self.work.on, result=result)
        except Refused as refusal:
            self._say_found(str(refusal), [])
            return
        approved = in_state(library, formula.id, VersionState.APPROVED)
        if rows is None or approved is None:
            self._say_found(_("No version is approved yet, so there is nothing to compare with."), [])
        elif rows:
            text = _("What is different today from approved version {number}")
            self._say_found(text.format(number=approved.number), list(rows))
        else:
            text = _("Nothing is different today from approved version {number}.")
            self._say_found(text.format(number=approved.number), [])

    def _say_found(self, heading: str, rows: list[Any]) -> None:
        self.heading.say(heading)
        self.found.show(rows)
        self.differences.setVisible(bool(rows))

    # -- what is done

    def _prepare(self) -> None:
        """Work the draft out on a thread, and put it on record."""
        ready = self._ready()
        if ready is None:
            return
        formula_id, person_id, password, on = ready
        self._begin(
            lambda library: versions.work_out_draft(library, formula_id, person_id, password, on),
            versions.record_draft, _("Draft {number} of {formula} is prepared; another person approves it."),
        )

    def _approve(self) -> None:
        """Work the answer out again on a thread, and put the approval on record."""
        ready = self._ready()
        if ready is None:
            return
        formula_id, person_id, password, on = ready
        draft = in_state(self.work.library, formula_id, VersionState.DRAFT)
        if draft is None:
            self._refuse(_("There is no prepared draft; prepare the formula first."))
            return
        version_id, form = draft.id, self.form
        capacity, note, reasons = form.capacity.text(), form.note.text(), form.given()
        self._begin(
            lambda library: versions.work_out_approval(
                library, version_id, person_id, password, capacity=capacity, note=note, reasons=reasons, on=on),
            versions.record_approval, _("Version {number} of {formula} is approved."),
        )

    def _ready(self) -> tuple[int, int, str, datetime.date] | None:
        """Formula, person, password and day of what was asked for; None, with the reason said, where it cannot be."""
        work, person_id = self.work, self.form.person_id()
        # A second press asks for what is being done already.
        if work.formula_id is None or self._record is not None:
            return None
        if person_id is None:
            self._refuse(_("This mill knows no person yet; add one with a password first."))
        elif work.stale or work.trying:
            self._refuse(_("The answer is stale; wait until the new one is in."))
        elif work.stored_result is not None and work.stored_result.status is Status.STOPPED:
            self._refuse(_("Time was up before this answer was proven; it cannot be approved as if it were."))
        else:
            return work.formula_id, person_id, self.form.password.text(), work.on
        return None

    def _begin(
        self, job: Callable[[Library], Any], record: Callable[[Mill, Any], FormulaVersion], done_text: str
    ) -> None:
        library = self.work.library.copy()
        self._record, self._done_text = record, done_text
        self.form.say_busy(_("The answer is worked out once more…"))
        self._aside.ask(lambda: job(library))

    def _take(self, worked: object, fault: Exception | None) -> None:
        """Record what was worked out: here, since one thread alone writes the mill."""
        record, self._record = self._record, None
        self.form.say_busy("")
        if record is None or not self.work.is_open:
            return
        try:
            if fault is not None:
                raise fault
            done = record(self.work.mill, worked)
        except (Refused, MillFileError, ValueError, FailedCertificate) as failure:
            texts = [one.text for one in failure.problems] if isinstance(failure, Refused) else [str(failure)]
            self._refuse("\n".join(texts))
            return
        self.form.done()
        if done.state is VersionState.APPROVED:
            self.form.note.clear()
            self.form.capacity.clear()
        self.work.recorded()
        formula = self.work.library.formula(done.formula_id)
        self.said.emit(self._done_text.format(number=done.number, formula=formula.name), [])

    def _refuse(self, sentence: str) -> None:
        """Say what stands against it: under the form, and on the strip where the person has gone elsewhere."""
        self.form.say(sentence)
        if not self.isVisible():
            self.said.emit(sentence, [])
            return
        self.form.password.setFocus()
        self.form.password.selectAll()
