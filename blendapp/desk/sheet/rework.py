"""What of earlier batches goes in again: an ingredient of the mill each, at a stated percent of the batch."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING, Any

from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import Look, fitting_decimals, number_look
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.wording import _

if TYPE_CHECKING:
    from blendapp.desk.work import Work

# The row in which the next one is typed.
NEXT = 0


class ReworkRows(Grid):
    """Owners are ingredients, and NEXT. changed: after a share was given, changed or taken away.

    An ingredient that was named and has no share yet counts for nothing until it has one.
    """

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
            return Look(editable=True, choices=names, hint=hint, words=_("none"))
        text = library.ingredient(owner).name if owner in library.records["ingredient"] else ""
        return Look(text=text, typed=text, editable=True, choices=names, hint=hint)

    def write(self, owner: int, key: str, text: str) -> None:
        text = text.strip()
        if key == "percent":
            self.percent[owner] = self._read(text)
        elif not text:
            self.take_out(owner)
            return
        else:
            found = self.work.library.named("ingredient", text)
            if found is None:
                words = _("There is no ingredient “{name}”; rework is entered as an ingredient first.")
                raise ValueError(words.format(name=text))
            if found.id in self.percent and found.id != owner:
                raise ValueError(_("“{name}” goes in as rework already; change its share.").format(name=found.name))
            self.percent = {
                found.id if one == owner else one: percent for one, percent in self.percent.items()
            } | ({found.id: None} if owner == NEXT else {})
        self.show()
        if key == "percent" or self.percent.get(owner) is not None:
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
        self.show()
