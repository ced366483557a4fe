"""Scales, mixers and nutrients as tables that are typed into."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import TYPE_CHECKING, Any

from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, fitting_decimals, number_look
from blendapp.domain import units
from blendapp.domain.fields import Field, field_of
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.nutrients import KEYS
from blendapp.domain.records import Change
from blendapp.domain.wording import _
from blendapp.services import edits

if TYPE_CHECKING:
    from blendapp.desk.work import Work

SHOWN: dict[str, tuple[tuple[str, int], ...]] = {
    "scale": (("name", 220), ("step_kg", 110), ("least_kg", 110), ("greatest_kg", 110), ("tolerance_percent", 120),
              ("hand_add", 110)),
    "mixer": (("name", 220), ("least_kg", 110), ("greatest_kg", 110)),
    "nutrient": (("name", 220), ("unit", 110), ("never_negative", 130), ("key", 210), ("note", 320)),
}


class RecordTable(Grid):
    """All records of a kind, a row each, in the order of their names for nutrients and of identifiers otherwise."""

    def __init__(self, work: Work, kind: str, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work
        self.kind = kind

    def rebuild(self) -> None:
        """Show what the mill holds now."""
        self.set_headings([self._heading(field_of(self.kind, key), width) for key, width in SHOWN[self.kind]])
        self.set_rows([record.id for record in self.work.library.all(self.kind)])

    def _heading(self, field: Field, width: int) -> Heading:
        return Heading(field.name, field.label, width, field.decimals is not None, field.help_text)

    def make_look(self, owner: int, key: str) -> Look:
        record = self.work.library.records[self.kind].get(owner)
        if record is None:
            return EMPTY
        value, field = getattr(record, key), field_of(self.kind, key)
        if field.decimals is not None:
            return number_look(value, fitting_decimals(value, 0), widest=field.decimals, editable=True, unknown="")
        if isinstance(value, bool):
            text = _("yes") if value else _("no")
            return Look(text=text, typed=text, editable=True, choices=(_("yes"), _("no")))
        if key == "key":
            return Look(text=value, typed=value, editable=True, choices=("", *KEYS))
        if key == "unit":
            return Look(text=value, typed=value, editable=True, choices=tuple(
                "" if name == "/kg" else name for name in units.CONCENTRATION))
        return Look(text=value, typed=value, editable=True)

    def write(self, owner: int, key: str, text: str) -> None:
        record = self.work.library.records[self.kind][owner]
        value = self._read(record, key, text.strip())
        what = _("Change {field} of {name}").format(field=field_of(self.kind, key).label, name=record.name)
        self.work.do(lambda mill: edits.change(mill, record, what, **{key: value}))

    def write_block(self, cells: list[tuple[int, str, str]], what: str) -> None:
        """Take every cell of a block that can be taken, as one undo; the others keep what was typed, and say why."""
        def thunk(owner: int, key: str, text: str) -> Callable[[], Sequence[Change]]:
            def changes() -> Sequence[Change]:
                record = self.work.library.records[self.kind][owner]
                return edits.field_changes(self.work.mill, record, **{key: self._read(record, key, text.strip())})

            return changes

        many = self.work.do(lambda mill: edits.many(mill, what, [thunk(*cell) for cell in cells]))
        for at, (owner, key, text) in enumerate(cells):
            if at in many.refused:
                self.refuse(owner, key, text, " ".join(problem.text for problem in many.refused[at]))
            else:
                self.forgive(owner, key)

    def _read(self, record: Any, key: str, text: str) -> Any:
        field = field_of(self.kind, key)
        if field.decimals is not None:
            value = notation().read(text) if text else None
            sentence = field.fault(value)
            if sentence:
                raise ValueError(sentence)
            if value is None and key == "step_kg":
                raise ValueError(_("A scale needs a step above 0 kg."))
            return value
        if isinstance(getattr(record, key), bool):
            if fold(text) in (fold(_("yes")), fold(_("no"))):
                return fold(text) == fold(_("yes"))
            raise ValueError(_("Write {yes} or {no}.").format(yes=_("yes"), no=_("no")))
        return text


