"""The steps of making a feed: added, moved, removed; they stay numbered from 1 within their formula, in one undo.

A formula without steps of its own is made by those of every formula (formula_id None), see Library.steps_of.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace

from blendapp.domain.formulas import MixingStep
from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change, added, removed
from blendapp.domain.wording import _
from blendapp.services.mill import Edit, Mill


def own_steps(library: Library, formula_id: int | None) -> list[MixingStep]:
    """The steps that stand under a formula itself, or (None) under every formula, in order."""
    found: list[MixingStep] = [one for one in library.all("mixing_step") if one.formula_id == formula_id]
    return sorted(found, key=lambda step: (step.position, step.id))


def add_step(
    mill: Mill, formula_id: int | None, text: str, minutes: float | None = None, setting: str = "",
    at: int | None = None,
) -> Edit:
    """Add a step at position `at` (from 1; None is the end); the steps from there on move down.

    Raises Refused for a step that says nothing, or minutes that are not above 0.
    """
    standing = own_steps(mill.library, formula_id)
    place = len(standing) if at is None else min(max(at - 1, 0), len(standing))
    new = MixingStep(mill.new_id("mixing_step"), formula_id, place + 1, text.strip(), minutes, setting.strip())
    order = [*standing[:place], new, *standing[place:]]
    return mill.apply(_("Add a step of {name}").format(name=_owner(mill.library, formula_id)), _renumbered(order, new))


def move_step(mill: Mill, step_id: int, by: int) -> Edit:
    """Move a step by so many places, below 0 is up; it stops at either end. Moving nowhere is no edit."""
    step = _known(mill.library, step_id)
    order = [one for one in own_steps(mill.library, step.formula_id) if one.id != step_id]
    was = sum(one.position < step.position or (one.position == step.position and one.id < step.id) for one in order)
    order.insert(min(max(was + by, 0), len(order)), step)
    what = _("Move a step of {name}").format(name=_owner(mill.library, step.formula_id))
    return mill.apply(what, _renumbered(order))


def remove_step(mill: Mill, step_id: int) -> Edit:
    """Remove a step; those below it move up."""
    step = _known(mill.library, step_id)
    order = [one for one in own_steps(mill.library, step.formula_id) if one.id != step_id]
    what = _("Remove a step of {name}").format(name=_owner(mill.library, step.formula_id))
    return mill.apply(what, [removed(step), *_renumbered(order)])


def own_copy(mill: Mill, formula_id: int) -> Edit:
    """Give a formula the steps of every formula as steps of its own, to be changed for it alone.

    Raises Refused where it has its own already.
    """
    library = mill.library
    if own_steps(library, formula_id):
        raise Refused(_("{formula} has steps of its own already.").format(formula=library.formula(formula_id).name))
    copies = [
        replace(one, id=mill.new_id("mixing_step"), formula_id=formula_id, position=number)
        for number, one in enumerate(own_steps(library, None), start=1)
    ]
    what = _("Own steps for {name}").format(name=library.formula(formula_id).name)
    return mill.apply(what, [added(one) for one in copies])


def _renumbered(order: Sequence[MixingStep], new: MixingStep | None = None) -> list[Change]:
    """The changes that number steps from 1 in this order; new is one that does not stand yet."""
    changes = []
    for number, step in enumerate(order, start=1):
        placed = replace(step, position=number)
        if step is new:
            changes.append(added(placed))
        elif placed != step:
            changes.append(Change(step, placed))
    return changes


def _owner(library: Library, formula_id: int | None) -> str:
    return _("every formula") if formula_id is None else library.formula(formula_id).name


def _known(library: Library, step_id: int) -> MixingStep:
    found: MixingStep = library.records["mixing_step"][step_id]
    return found
