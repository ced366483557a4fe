"""The mill's records as tables that are typed into: which columns each shows, and how each cell looks."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, Any

from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, fitting_decimals, number_look
from blendapp.domain import units
from blendapp.domain.fields import N_, Field, field_of
from blendapp.domain.names import fold
from blendapp.domain.records import Change
from blendapp.domain.wording import _
from blendapp.services import edits, typed
from blendapp.services.mill import record_name

if TYPE_CHECKING:
    from blendapp.desk.work import Work

# The tolerance of a scale that has none of its own, in % (numbers.md, whole batches).
_USUAL_TOLERANCE = {False: "2", True: "1"}


@dataclass(frozen=True)
class Shown:
    """What one table shows: records of a kind, of those only what `keep` lets through, in columns of given widths.

    called: the heading of the names, where it is not that of the kind.
    """

    kind: str
    columns: tuple[tuple[str, int], ...]
    called: str = ""
    keep: Callable[[Any], bool] = lambda _record: True


SHOWN: dict[str, Shown] = {
    "site": Shown("site", (("name", 280),)),
    "scale": Shown("scale", (
        ("name", 200), ("step_kg", 90), ("least_kg", 90), ("greatest_kg", 100), ("tolerance_percent", 106),
        ("hand_add", 90), ("site_id", 120)), keep=lambda scale: not scale.by_volume),
    "meter": Shown("scale", (
        ("name", 200), ("step_l", 90), ("least_l", 90), ("greatest_l", 100), ("tolerance_percent", 106),
        ("site_id", 120)), N_("Liquid meter"), lambda scale: scale.by_volume),
    "mixer": Shown("mixer", (("name", 220), ("least_kg", 110), ("greatest_kg", 110), ("site_id", 140))),
    "bin": Shown("bin", (("name", 140), ("ingredient_id", 230), ("lot_id", 170), ("site_id", 140))),
    "lot": Shown("lot", (
        ("name", 150), ("ingredient_id", 200), ("received", 106), ("mass_kg", 90), ("supplier_id", 140), ("note", 190),
    )),
    "supplier": Shown("supplier", (("name", 240), ("note", 380))),
    "nutrient": Shown("nutrient", (
        ("name", 200), ("unit", 90), ("never_negative", 116), ("key", 170), ("note", 320))),
}


class RecordTable(Grid):
    """The records of one table of SHOWN, a row each, in the order in which they were entered."""

    def __init__(self, work: Work, shown: Shown, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work
        self.shown = shown
        self._names: dict[str, tuple[str, ...]] = {}

    @property
    def kind(self) -> str:
        return self.shown.kind

    def rebuild(self) -> None:
        """Show what the mill holds now. Sites are shown where the mill has some."""
        self._names.clear()
        sites = bool(self.work.library.records["site"])
        self.set_headings([
            self._heading(field_of(self.kind, key), width) for key, width in self.shown.columns
            if key != "site_id" or sites
        ])
        self.set_rows(self.rows())
        self.refresh()

    def rows(self) -> list[int]:
        """The records that are shown now."""
        return [record.id for record in self.work.library.all(self.kind) if self.shown.keep(record)]

    def record(self, owner: int) -> Any:
        """The record of a row, None where it is gone."""
        return self.work.library.records[self.kind].get(owner)

    def _heading(self, field: Field, width: int) -> Heading:
        words = _(self.shown.called) if self.shown.called and field.name == "name" else field.label
        return Heading(field.name, words, width, field.decimals is not None, field.help_text)

    def make_look(self, owner: int, key: str) -> Look:
        record = self.record(owner)
        if record is None:
            return EMPTY
        look = self._plain_look(record, key)
        at = self.work.library.mill.site_id
        elsewhere = at is not None and getattr(record, "site_id", None) not in (None, at)
        if not elsewhere:
            return look
        return replace(look, quiet=True, hint=look.hint or _("Stands at another site than the one the mill works at."))

    def _plain_look(self, record: Any, key: str) -> Look:
        value, field, library = getattr(record, key), field_of(self.kind, key), self.work.library
        if key == "tolerance_percent" and value is None:
            usual = _USUAL_TOLERANCE[record.hand_add]
            hint = _("Blank: {percent} % of the line, as is common practice.").format(percent=usual)
            return replace(number_look(None, 0, editable=True, unknown=usual, hint=hint), lack=field.decimals or 0)
        if field.decimals is not None:
            return number_look(value, fitting_decimals(value, 0), widest=field.decimals, editable=True, unknown="")
        if key in typed.LINKS:
            text = typed.shown_link(library, record, key)
            names = self._names_of(record, key)
            return Look(text=text, typed=text, editable=True, choices=names, hint=field.help_text)
        if isinstance(value, bool):
            text = _("yes") if value else _("no")
        else:
            text = "" if value is None else value.isoformat() if key == "received" else str(value)
        names = tuple(typed.choices(library, record, key) or ())
        if key == "unit":
            names = tuple(name for name in units.CONCENTRATION if name != "/kg")
        return Look(text=text, typed=text, editable=True, choices=names, hint=text if key in ("text", "note") else "")

    def _names_of(self, record: Any, key: str) -> tuple[str, ...]:
        """What a link may hold; of all but lots the same in every row, and a mill may have many ingredients."""
        if key in self._names:
            return self._names[key]
        found = tuple(sorted(typed.choices(self.work.library, record, key) or (), key=fold))
        if key != "lot_id":
            self._names[key] = found
        return found

    def write(self, owner: int, key: str, text: str) -> None:
        record = self.record(owner)
        what = _("Change {field} of {name}").format(field=field_of(self.kind, key).label, name=self.called(record))
        self.work.do(lambda mill: mill.apply(what, typed.typed_changes(mill, record, key, text)))

    def called(self, record: Any) -> str:
        """What a person calls a record of this table."""
        return record_name(record, self.work.library)

    def write_block(self, cells: list[tuple[int, str, str]], what: str) -> None:
        """Take every cell of a block that can be taken, as one undo; the others keep what was typed, and say why."""
        def thunk(owner: int, key: str, text: str) -> Callable[[], Sequence[Change]]:
            def changes() -> Sequence[Change]:
                return typed.typed_changes(self.work.mill, self.record(owner), key, text)

            return changes

        many = self.work.do(lambda mill: edits.many(mill, what, [thunk(*cell) for cell in cells]))
        for at, (owner, key, text) in enumerate(cells):
            if at in many.refused:
                self.refuse(owner, key, text, " ".join(problem.text for problem in many.refused[at]))
            else:
                self.forgive(owner, key)
