"""The steps of making a feed, as tables in their order: those of every formula, and those of the chosen one."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent

from blendapp.desk.mill.model import RecordTable, Shown
from blendapp.desk.table.grid import Heading
from blendapp.desk.table.look import EMPTY, Look
from blendapp.desk.table.view import DeskTable
from blendapp.domain.fields import field_of
from blendapp.domain.formulas import MixingStep
from blendapp.domain.wording import _
from blendapp.services import mixing

if TYPE_CHECKING:
    from blendapp.desk.work import Work

_COLUMNS = (("text", 420), ("minutes", 90), ("setting", 230))


class StepRows(RecordTable):
    """own: the steps of the chosen formula; else those of every formula without steps of its own."""

    def __init__(self, work: Work, parent: Any = None, *, own: bool) -> None:
        super().__init__(work, Shown("mixing_step", _COLUMNS), parent)
        self.own = own

    @property
    def formula_id(self) -> int | None:
        """Whose steps these are."""
        return self.work.formula_id if self.own else None

    def rebuild(self) -> None:
        """Show what the mill holds now."""
        self._names.clear()
        self.set_headings([
            Heading("position", field_of("mixing_step", "position").label, 56, True),
            *(self._heading(field_of(self.kind, key), width) for key, width in _COLUMNS),
        ])
        self.set_rows(self.rows())
        self.refresh()

    def rows(self) -> list[int]:
        if self.own and self.work.formula_id is None:
            return []
        return [step.id for step in mixing.own_steps(self.work.library, self.formula_id)]

    def make_look(self, owner: int, key: str) -> Look:
        step: MixingStep | None = self.record(owner)
        if step is None:
            return EMPTY
        if key == "position":
            hint = _("Alt with an arrow key moves the step up or down; Delete removes it.")
            return Look(text=str(step.position), number=True, quiet=True, hint=hint)
        return super().make_look(owner, key)

    def write(self, owner: int, key: str, text: str) -> None:
        if key == "position":
            raise ValueError(_("Steps are numbered in their order; move one with Alt and an arrow key."))
        super().write(owner, key, text)

    def called(self, record: Any) -> str:
        return _("step {number}").format(number=record.position)


class StepTable(DeskTable):
    """moved: the step of a row is to go so many places down, below 0 up."""

    moved = Signal(int, int)

    def keyPressEvent(self, event: QKeyEvent) -> None:
        by = {Qt.Key.Key_Up: -1, Qt.Key.Key_Down: 1}.get(Qt.Key(event.key()))
        if by is not None and event.modifiers() & Qt.KeyboardModifier.AltModifier and self.currentIndex().isValid():
            self.moved.emit(self.grid.owner(self.currentIndex()), by)
        else:
            super().keyPressEvent(event)
