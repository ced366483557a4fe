"""The lines of a batch as a table: where each stands, on what it is weighed, and how near it comes to its share.

A person fixes how many kilograms of a line are taken by typing them; hand-adds stand apart, the total below.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, fitting_decimals, number_look
from blendapp.domain.batches import Batch, BatchLine
from blendapp.domain.figures import write_measure
from blendapp.domain.notation import notation
from blendapp.domain.wording import _

# Owners of the rows that are no line.
HAND_ADDS, TOTAL = -1, -2
WIDEST = 3


class LineModel(Grid):
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
        lines = () if batch is None else batch.lines
        self._line = {line.ingredient_id: line for line in lines}
        self.set_headings(_headings(lines))
        plain = [line.ingredient_id for line in lines if not line.hand_add]
        apart = [line.ingredient_id for line in lines if line.hand_add]
        self.set_rows([*plain, *([HAND_ADDS, *apart] if apart else []), *([TOTAL] if lines else [])])
        self.refresh()

    def forget(self) -> None:
        """Let every line free."""
        self.fixed = {}
        self.refusals.clear()

    def say_stale(self, stale: bool) -> None:
        """Grey the lines while others are worked out."""
        self.stale = stale
        self.refresh()

    def line(self, owner: int) -> BatchLine | None:
        """The line of a row, None where it is none."""
        return self._line.get(owner)

    def make_look(self, owner: int, key: str) -> Look:
        if self.batch is None:
            return EMPTY
        if owner == HAND_ADDS:
            hint = _("Weighed apart, and checked by a second person.")
            return Look(text=_("Hand-adds"), strong=True, hint=hint, stale=self.stale) if key == "name" else EMPTY
        if owner == TOTAL:
            return replace(self._total_look(self.batch, key), stale=self.stale)
        line = self._line.get(owner)
        return EMPTY if line is None else replace(self._line_look(line, key), stale=self.stale)

    def _total_look(self, batch: Batch, key: str) -> Look:
        if key == "name":
            return Look(text=_("Total of one batch"), strong=True)
        if key == "share_kg":
            return _mass(batch.batch_kg)
        if key == "kg":
            # With the decimals of the finest step, so that the targets above it add up to what is shown.
            decimals = max((fitting_decimals(line.step_kg, 0, WIDEST) for line in batch.lines), default=0)
            return number_look(batch.total_kg, decimals, widest=WIDEST, strong=True)
        if key == "deviation" and batch.residue_kg:
            return _signed(batch.residue_kg)
        return EMPTY

    def _line_look(self, line: BatchLine, key: str) -> Look:
        if key == "name":
            fixed = line.ingredient_id in self.fixed
            words = _("{name}, fixed") if fixed else "{name}"
            return Look(text=line.ingredient, words=words.format(name=line.ingredient), unit=_kind_of_line(line),
                        hint=_about(line))
        if key == "bins":
            text = ", ".join(line.bins)
            return Look(text=text, hint=text)
        if key == "scale":
            return Look(text=line.scale, hint=line.scale)
        if key == "step":
            step = line.step_kg if line.step_l is None else line.step_l
            words = _("{step} kg") if line.step_l is None else _("{step} l")
            return Look(text=words.format(step=notation().write(step, fitting_decimals(step, 0))), number=True)
        if key == "share_kg":
            return _mass(line.share_kg)
        if key == "kg":
            return self._kg_look(line)
        if key == "litres":
            litres = line.target_l
            return EMPTY if litres is None else number_look(litres, fitting_decimals(litres, 0), widest=WIDEST)
        if key == "tolerance_kg":
            return _mass(line.tolerance_kg)
        return _signed(line.target_kg - line.share_kg)

    def _kg_look(self, line: BatchLine) -> Look:
        fixed = line.ingredient_id in self.fixed
        kg = self.fixed.get(line.ingredient_id, line.target_kg)
        hint = _("Fixed by hand; Delete lets it free.") if fixed else _("Type a mass to fix it.")
        return number_look(kg, fitting_decimals(kg, 0), widest=WIDEST, editable=True, strong=fixed, hint=hint)

    def write(self, owner: int, key: str, text: str) -> None:
        if key != "kg" or owner not in self._line:
            raise ValueError(_("Only kilograms are fixed here."))
        if not text.strip():
            self.fixed.pop(owner, None)
        else:
            kg = notation().read(text)
            if kg < 0:
                raise ValueError(_("A line takes 0 kg or more; {kg} is not.").format(kg=text.strip()))
            self.fixed[owner] = kg
        self.changed(owner)


def _headings(lines: tuple[BatchLine, ...]) -> list[Heading]:
    """The columns; bins and litres only where some line has them."""
    found = [Heading("name", _("Ingredient"), 130)]
    if any(line.bins for line in lines):
        found.append(Heading("bins", _("Bin, lot"), 84))
    found += [
        Heading("scale", _("Scale"), 80), Heading("step", _("Step"), 62, True),
        Heading("share_kg", _("Share kg"), 72, True, _("The exact share of one batch")),
        Heading("kg", _("Target kg"), 78, True, _("What is weighed: whole steps of the scale")),
    ]
    if any(line.target_l is not None for line in lines):
        found.append(Heading("litres", _("Target l"), 66, True))
    return [
        *found,
        Heading("tolerance_kg", _("May be off"), 78, True, _("How many kg the target may lie from the share")),
        Heading("deviation", _("Is off kg"), 66, True, _("Target less share")),
    ]


def _kind_of_line(line: BatchLine) -> str:
    return _("rework") if line.rework else ""


def _about(line: BatchLine) -> str:
    parts = [line.ingredient]
    if line.of_opened:
        parts.append(_("In place of {made}, in part.").format(made=", ".join(line.of_opened)))
    parts.append(_("{share} kg would be its exact share.").format(share=write_measure(line.share_kg)))
    return " ".join(parts) if len(parts) == 2 else "\n".join(parts)


def _mass(kg: float | None) -> Look:
    if kg is None:
        return EMPTY
    size = abs(kg)
    decimals = 1 if size >= 100 else 2 if size >= 1 else 3
    return number_look(kg, decimals, widest=WIDEST, quiet=True)


def _signed(kg: float) -> Look:
    """A difference with its sign; what would show as nothing is 0."""
    decimals = 2 if abs(kg) >= 1 else 3
    if abs(kg) < 0.0005:
        return number_look(0.0, 0, widest=WIDEST, quiet=True)
    text = ("+" if kg > 0 else "−") + notation().write(abs(kg), decimals)
    return Look(text=text, number=True, lack=WIDEST - decimals, quiet=True)
