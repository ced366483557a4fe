"""Ingredients that the mill makes itself: taken from their formula again, and compared with it."""

from __future__ import annotations

from PySide6.QtCore import QObject

from blendapp.desk.table.grid import sentence_of
from blendapp.desk.table.view import DeskTable
from blendapp.desk.work import Work
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import from_formula


class Making(QObject):
    """table: of the ingredients, whose row under the keyboard commands act on."""

    def __init__(self, work: Work, table: DeskTable) -> None:
        super().__init__(table)
        self.work = work
        self.table = table

    def chosen(self) -> int | None:
        """The ingredient under the keyboard where a formula makes it, else None."""
        index = self.table.currentIndex()
        owner = self.table.grid.owner(index) if index.isValid() else None
        return owner if owner is not None and self.maker(owner) is not None else None

    def maker(self, ingredient_id: int) -> str | None:
        """The name of the formula that makes an ingredient, None where it is bought."""
        ingredient = self.work.library.records["ingredient"].get(ingredient_id)
        formula_id = None if ingredient is None else ingredient.made_by_formula_id
        return None if formula_id is None else self.work.library.formula(formula_id).name

    def words(self, ingredient_id: int) -> str:
        """What taking it is called."""
        text = _("Take composition and price of {ingredient} from its formula")
        return text.format(ingredient=self.work.library.ingredient(ingredient_id).name)

    def words_now(self) -> str:
        """What taking it is called for the ingredient under the keyboard."""
        owner = self.chosen()
        return _("Take composition and price from its formula") if owner is None else self.words(owner)

    def take_chosen(self) -> None:
        """Take the ingredient under the keyboard."""
        owner = self.chosen()
        if owner is not None:
            self.take(owner)

    def take(self, ingredient_id: int) -> None:
        """Write into an ingredient what its formula makes, as one undo."""
        name, formula = self.work.library.ingredient(ingredient_id).name, self.maker(ingredient_id)
        try:
            edit = self.work.do(lambda mill: from_formula.take_from_formula(mill, ingredient_id, self.work.on))
        except (Refused, ValueError) as fault:
            self.work.said.emit(sentence_of(fault), [])
            return
        if not edit.changes:
            text = _("{ingredient} is already what {formula} makes.")
        else:
            text = _("{ingredient} is now what {formula} makes; Ctrl+Z takes it back.")
        self.work.said.emit(text.format(ingredient=name, formula=formula), [one.text for one in edit.oddities])

    @property
    def has_any(self) -> bool:
        """Whether the mill makes any ingredient itself."""
        return any(one.made_by_formula_id is not None for one in self.work.library.ingredients)

    def compare_all(self) -> None:
        """Say which made ingredients are no longer what their formula makes."""
        found = from_formula.stale(self.work.mill, self.work.on)
        if found:
            self.work.said.emit(_("Made ingredients that differ from what their formula makes today:"),
                                [one.text for one in found])
        else:
            self.work.said.emit(_("Every made ingredient is what its formula makes today."), [])
