"""The sheet Steps of the exchange workbook: how each feed is made."""

from __future__ import annotations

import math
from dataclasses import replace

from blendapp.domain.formulas import Formula, MixingStep
from blendapp.domain.wording import _
from blendapp.exchange.workbook_draft import Draft
from blendapp.exchange.workbook_sheet import Row, Sheet

# Under which formula steps stand, None for every formula, with the row that each came from.
Read = dict[int | None, list[tuple[float, Row, MixingStep]]]


def read_steps(draft: Draft, sheet: Sheet) -> None:
    """The steps of every formula that has rows, and of every formula together; they replace those that it had.

    They are put in the order of their numbers, those without one behind in the order of rows, and numbered from 1.
    """
    by_formula: Read = {}
    unknown = _("There is no formula “{name}”; add it to the sheet Formulas.")
    for row in sheet.rows():
        formula: Formula | None = draft.find("formula", row, "Formula", unknown)
        number = row.whole_number("Step")
        step = MixingStep(
            0, formula.id if formula else None, 1 if number is None else number, row.text("What to do").strip(),
            row.number_in("Minutes"), row.text("Setting"),
        )
        faultless = draft.is_faultless(step, row)
        if (formula is None and row.has("Formula")) or not faultless:
            continue
        steps = by_formula.setdefault(step.formula_id, [])
        if number is not None and _says_twice(row, number, steps):
            continue
        steps.append((math.inf if number is None else number, row, step))
    for formula_id, steps in by_formula.items():
        _replace(draft, formula_id, [step for _number, _row, step in sorted(steps, key=lambda read: read[0])])


def _says_twice(row: Row, number: int, steps: list[tuple[float, Row, MixingStep]]) -> bool:
    first = next((earlier.number for known, earlier, _step in steps if known == number), None)
    if first is None:
        return False
    text = _("Step {number} stands in row {first} and again in row {second}; give one of them another number.")
    row.fault("Step", text.format(number=number, first=first, second=row.number))
    return True


def _replace(draft: Draft, formula_id: int | None, steps: list[MixingStep]) -> None:
    """The n-th step takes the place and identifier of the n-th that stood; what is over is added or removed."""
    standing = sorted(
        (one for one in draft.library.all("mixing_step") if one.formula_id == formula_id),
        key=lambda one: (one.position, one.id),
    )
    for index, step in enumerate(steps):
        before = standing[index] if index < len(standing) else None
        step_id = before.id if before else draft.new_id("mixing_step")
        draft.put(before, replace(step, id=step_id, position=index + 1))
    for before in standing[len(steps) :]:
        draft.put(before, None)
