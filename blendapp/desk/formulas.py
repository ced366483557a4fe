"""Formulas and nutrients by name: make, copy, rename, remove, choose."""

from __future__ import annotations

import re
from collections.abc import Callable
from functools import partial

from PySide6.QtCore import QObject

from blendapp.desk.finder.ask import Ask
from blendapp.desk.finder.search import Found
from blendapp.desk.work import Work
from blendapp.domain import units
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import edits
from blendapp.services.mill import Edit, Mill

_UNIT = re.compile(r"(.*\S)\s*\(([^()]*)\)\s*$")


class Records(QObject):
    """What the menu and the finder do with formulas and nutrients. ask: the panel that asks for names."""

    def __init__(self, work: Work, ask: Ask) -> None:
        super().__init__(ask)
        self.work = work
        self.ask = ask

    # -- formulas

    def new_formula(self) -> None:
        """Ask for a name and make an empty formula."""
        def take(name: str) -> None:
            edit = self.work.do(lambda mill: edits.add_formula(mill, name))
            self.work.choose(edit.changes[0].id)

        begin = edits.free_name(self.work.library, "formula", _("New formula"))
        self.ask.open(_("New formula"), begin, _("Make it"), take)

    def copy_formula(self) -> None:
        """Ask for a name and copy the chosen formula with its limits."""
        formula = self.work.formula
        if formula is None:
            return

        def take(name: str) -> None:
            edit = self.work.do(lambda mill: edits.duplicate_formula(mill, formula.id, name))
            self.work.choose(next(change.id for change in edit.changes if change.kind == "formula"))

        begin = edits.free_name(self.work.library, "formula", formula.name)
        self.ask.open(_("Copy {name} as").format(name=formula.name), begin, _("Copy it"), take)

    def rename_formula(self) -> None:
        """Ask for another name of the chosen formula."""
        formula = self.work.formula
        if formula is not None:
            self.ask.open(
                _("Rename {name}").format(name=formula.name), formula.name, _("Rename it"),
                lambda name: self.work.do(lambda mill: edits.change(mill, formula, name=name.strip())),
            )

    def remove_formula(self) -> None:
        """Remove the chosen formula; undo brings it back with its limits."""
        formula = self.work.formula
        if formula is not None:
            self._try(lambda mill: edits.remove_formula(mill, formula.id))

    def formulas(self) -> list[Found]:
        """Every formula, as things to find."""
        return [
            Found(one.name, ", ".join(part for part in (_(str(one.animal)) if one.animal else "", one.stage) if part)
                  or _("formula"), partial(self.work.choose, one.id))
            for one in sorted(self.work.library.formulas, key=lambda one: one.name.casefold())
        ]

    # -- nutrients

    def new_nutrient(self) -> None:
        """Ask for a nutrient and its unit."""
        def take(text: str) -> None:
            name, unit = read_nutrient(text)
            self.work.do(lambda mill: edits.add_nutrient(mill, name, unit))

        hint = _("Its name with its unit in brackets, for example Lysine (%) or Copper (mg/kg).")
        self.ask.open(_("New nutrient"), "", _("Add it"), take, hint)

    def change_nutrient(self, nutrient_id: int) -> None:
        """Ask for another name or unit of a nutrient."""
        nutrient = self.work.library.nutrient(nutrient_id)

        def take(text: str) -> None:
            name, unit = read_nutrient(text, nutrient.unit)
            self.work.do(lambda mill: edits.change(mill, nutrient, name=name, unit=unit))

        begin = f"{nutrient.name} ({nutrient.unit})" if nutrient.unit else nutrient.name
        self.ask.open(_("Rename {name}").format(name=nutrient.name), begin, _("Rename it"), take,
                      _("Its name with its unit in brackets; values stay as they were entered."))

    def turn_never_negative(self, nutrient_id: int) -> None:
        """Say that a nutrient can, or cannot, be below zero."""
        nutrient = self.work.library.nutrient(nutrient_id)
        self._try(lambda mill: edits.change(mill, nutrient, never_negative=not nutrient.never_negative))

    def remove_nutrient(self, nutrient_id: int) -> None:
        """Remove a nutrient with its values; undo brings them back."""
        self._try(lambda mill: edits.remove_nutrient(mill, nutrient_id))

    def _try(self, job: Callable[[Mill], Edit]) -> None:
        try:
            self.work.do(job)
        except (Refused, ValueError) as fault:
            problems = fault.problems if isinstance(fault, Refused) else []
            self.work.said.emit(" ".join(one.text for one in problems) or str(fault), [])


def read_nutrient(text: str, unit: str = "%") -> tuple[str, str]:
    """A nutrient's name and unit from "Lysine (%)"; without brackets the given unit. Raises ValueError."""
    found = _UNIT.fullmatch(text.strip())
    name = text.strip()
    if found and (not found.group(2).strip() or found.group(2).strip() in units.CONCENTRATION):
        name, unit = found.group(1), found.group(2).strip()
    elif found:
        units.concentration(found.group(2))
    if not name:
        raise ValueError(_("Give the nutrient a name."))
    return name, unit
