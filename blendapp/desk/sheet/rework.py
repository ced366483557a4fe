"""What of earlier batches goes in again: an ingredient of the mill each, at a stated percent of the batch."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

from PySide6.QtCore import QTimer, Signal

from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import Look, fitting_decimals, number_look
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.wording import _

if TYPE_CHECKING:
    from blendapp.desk.work import Work

# The row in which the next one is typed.
NEXT = 0


class ReworkRows(Grid):
    """Owners are ingredients, and NEXT. changed: after a share was given, changed or taken away. named: the share of
    an ingredient is to be typed now.

    An ingredient that was named and has no share yet counts for nothing until it has one.
    """

    named = Signal(int)

    def __init__(self, work: Work, changed: Callable[[], None], parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work
        self.changed = changed
        self.percent: dict[int, float | None] = {}
        self.show()

    @property
    def shares(self) -> dict[int, float]:
        """Percent of the batch by ingredient."""
        return {key: percent for key, percent in self.percent.items() if percent is not None}

    def show(self) -> None:
        """Show what is asked for now."""
        self.set_headings([Heading("name", _("Rework"), 184), Heading("percent", _("% of batch"), 84, True)])
        self.set_rows([*self.percent, NEXT])
        self.refresh()

    def forget(self) -> None:
        """No rework."""
        self.percent = {}
        self.refusals.clear()
        self.show()

    def make_look(self, owner: int, key: str) -> Look:
        library = self.work.library
        if key == "percent":
            if owner == NEXT:
                return Look(number=True)
            percent = self.percent[owner]
            return number_look(percent, fitting_decimals(percent, 0), widest=2, editable=True,
                               hint=_("How much of the batch it is; Delete on the name takes it out."))
        hint = _("Type the name of an ingredient; enter rework as an ingredient with its own composition.")
        names = tuple(sorted((one.name for one in library.ingredients), key=fold))
        if owner == NEXT:
            return Look(text=_("type a name…"), quiet=True, editable=True, choices=names, hint=hint, words=_("none"))
        text = library.ingredient(owner).name if owner in library.records["ingredient"] else ""
        return Look(text=text, typed=text, editable=True, choices=names, hint=hint)

    def write(self, owner: int, key: str, text: str) -> None:
        text = text.strip()
        # The rows change once the cell that is typed into is shut.
        QTimer.singleShot(0, self, self.show)
        if key == "percent":
            self.percent[owner] = self._read(text)
            self.changed()
        elif text:
            self._name(owner, text)
        else:
            self.take_out(owner)

    def _name(self, owner: int, text: str) -> None:
        found: Ingredient | None = self.work.library.named("ingredient", text)
        if found is None:
            words = _("There is no ingredient “{name}”; rework is entered as an ingredient first.")
            raise ValueError(words.format(name=text))
        key = found.id
        if key in self.percent and key != owner:
            raise ValueError(_("“{name}” goes in as rework already; change its share.").format(name=found.name))
        self.percent = {key if one == owner else one: percent for one, percent in self.percent.items()}
        if owner == NEXT:
            self.percent[key] = None
        if self.percent[key] is None:
            QTimer.singleShot(0, self, lambda: self.named.emit(key))
        else:
            self.changed()

    @staticmethod
    def _read(text: str) -> float:
        percent = notation().read(text.removesuffix("%").strip())
        if not 0 < percent < 100:
            raise ValueError(_("Rework goes in at a share above 0 and below 100 %; {text} is none.").format(text=text))
        return percent

    def take_out(self, owner: int) -> None:
        """Take a rework out again."""
        if self.percent.pop(owner, None) is not None:
            self.changed()
        self.forgive_owners({owner})
        QTimer.singleShot(0, self, self.show)
