"""The rows of a price list as a table."""

from __future__ import annotations

from typing import Any

from blendapp.desk.table.grid import AnyIndex, Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, number_look
from blendapp.domain.list_rows import Fate
from blendapp.domain.notation import notation
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.domain.wording import _


def fate_word(fate: Fate) -> str:
    """What becomes of a row, in a word."""
    return {Fate.ACCEPTED: _("taken"), Fate.QUESTION: _("question"), Fate.REFUSED: _("refused"),
            Fate.IGNORED: _("left alone")}[fate]


class PriceRows(Grid):
    """Owners are places among the rows of the reading. with_ignored: also rows that are no price."""

    def __init__(self, parent: Any = None) -> None:
        super().__init__(parent)
        self.reading: PriceListReading | None = None
        self.with_ignored = False

    def show(self, reading: PriceListReading) -> None:
        """Show a price list: what needs a look first, then what is taken, then what is left alone."""
        self.reading = reading
        self._looks.clear()
        per_t = _("{currency}/t").format(currency=reading.currency)
        self.set_headings([
            Heading("fate", "", 82), Heading("place", _("row"), 88), Heading("source_name", _("in the list"), 170),
            Heading("ingredient", _("Ingredient"), 170), Heading("entered", _("price as listed"), 110, True),
            Heading("price", per_t, 82, True), Heading("old", _("was"), 82, True),
            Heading("change", _("change"), 72, True),
            *([Heading("from", _("from"), 92)] if any(row.valid_from for row in reading.rows) else []),
            Heading("reason", _("why"), 420),
        ])
        order = {Fate.REFUSED: 0, Fate.QUESTION: 1, Fate.ACCEPTED: 2, Fate.IGNORED: 3}
        shown = [at for at, row in enumerate(reading.rows) if self.with_ignored or row.fate is not Fate.IGNORED]
        self.set_rows(sorted(shown, key=lambda at: (order[reading.rows[at].fate], at)))

    def row(self, index: AnyIndex) -> PriceRow | None:
        """The source row behind a cell."""
        if self.reading is None or not index.isValid():
            return None
        return self.reading.rows[self.owner(index)]

    def make_look(self, owner: int, key: str) -> Look:
        if self.reading is None or owner >= len(self.reading.rows):
            return EMPTY
        row = self.reading.rows[owner]
        quiet = row.fate is Fate.IGNORED
        if key == "fate":
            return Look(text=fate_word(row.fate), strong=row.fate in (Fate.QUESTION, Fate.REFUSED), quiet=quiet,
                        hint=_("Enter says which ingredient it is") if row.fate is Fate.QUESTION else "")
        if key in ("price", "old"):
            value = row.price_per_t if key == "price" else row.old_price_per_t
            return number_look(value, 2, unknown="", quiet=key == "old", strong=key == "price")
        if key == "change":
            return _change(row)
        text = {
            "source_name": row.source_name, "ingredient": row.ingredient or "",
            "entered": f"{row.entered} {row.unit or ''}".strip(), "reason": row.reason,
            "from": "" if row.valid_from is None else row.valid_from.isoformat(),
            "place": _("{sheet} {row}").format(sheet=row.sheet, row=row.row).strip(),
        }[key]
        return Look(text=text, quiet=quiet or key in ("place", "from"), number=key == "entered",
                    hint=text if key in ("reason", "source_name") else "")

    def write(self, owner: int, key: str, text: str) -> None:
        raise ValueError(_("A price list is not changed here; mend it in its file and read it again."))


def _change(row: PriceRow) -> Look:
    if row.price_per_t is None or row.old_price_per_t is None or row.fate is not Fate.ACCEPTED:
        return EMPTY
    change = row.price_per_t - row.old_price_per_t
    if abs(change) < 0.005:
        return Look(text="0", number=True, quiet=True, lack=2)
    return Look(text=("+" if change > 0 else "−") + notation().write(abs(change), 2), number=True)
