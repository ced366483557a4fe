"""The lines of a batch beside its page, where a person fixes how many kilograms of one are taken."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, fitting_decimals, number_look
from blendapp.domain.batches import Batch, BatchLine
from blendapp.domain.figures import write_measure
from blendapp.domain.notation import notation
from blendapp.domain.wording import _


class FixModel(Grid):
    """Owners are ingredients. changed: called with the line that was fixed or let free."""

    def __init__(self, changed: Callable[[int], None], parent: Any = None) -> None:
        super().__init__(parent)
        self.changed = changed
        self.batch: Batch | None = None
        self.fixed: dict[int, float] = {}
        self.stale = False
        self._line: dict[int, BatchLine] = {}

    def show(self, batch: Batch | None) -> None:
        """Show the lines of a batch; None shows none."""
        self.batch = batch
        self.set_headings([Heading("name", _("Ingredient"), 158), Heading("kg", _("kg"), 98, True)])
        self._line = {} if batch is None else {line.ingredient_id: line for line in batch.lines}
        self.set_rows(list(self._line))
        self.refresh()

    def forget(self) -> None:
        """Let every line free."""
        self.fixed = {}
        self.refusals.clear()

    def say_stale(self, stale: bool) -> None:
        """Grey the lines while others are worked out."""
        self.stale = stale
        self.refresh()

    def make_look(self, owner: int, key: str) -> Look:
        line = None if self.batch is None else self._line.get(owner)
        if line is None:
            return EMPTY
        fixed = owner in self.fixed
        share = _("{share} kg would be its exact share.").format(share=write_measure(line.share_kg))
        if key == "name":
            words = _("{name}, fixed") if fixed else "{name}"
            return Look(text=line.ingredient, words=words.format(name=line.ingredient), hint=share, stale=self.stale)
        kg = self.fixed.get(owner, line.target_kg)
        hint = share + " " + (_("Fixed by hand; Delete lets it free.") if fixed else _("Type a mass to fix it."))
        return number_look(kg, fitting_decimals(kg, 0), widest=3, editable=True, strong=fixed, stale=self.stale,
                           hint=hint)

    def write(self, owner: int, key: str, text: str) -> None:
        if key != "kg":
            raise ValueError(_("Only kilograms are fixed here."))
        if not text.strip():
            self.fixed.pop(owner, None)
        else:
            kg = notation().read(text)
            if kg < 0:
                raise ValueError(_("A line takes 0 kg or more; {kg} is not.").format(kg=text.strip()))
            self.fixed[owner] = kg
        self.changed(owner)
