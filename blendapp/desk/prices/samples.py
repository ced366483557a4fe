"""The rows of a list of analyses as they were understood: a line a value, grouped by sample."""

from __future__ import annotations

from blendapp.desk.prices.asking import answer_words
from blendapp.desk.prices.understood import UnderstoodRows
from blendapp.desk.table.grid import Heading
from blendapp.desk.table.look import EMPTY, Look, fitting_decimals, number_look
from blendapp.domain.composition_rows import CompositionRow
from blendapp.domain.ingredients import Basis
from blendapp.domain.list_rows import Fate, ListReading, ListRow
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.wording import _


class SampleRows(UnderstoodRows):
    """A line a value: sample and day stand on the first line of their row."""

    stretch = "nutrient"

    def make_headings(self, reading: ListReading) -> list[Heading]:
        return [
            Heading("fate", "", 72), Heading("place", _("row"), 40, True), Heading("ingredient", _("Ingredient"), 130),
            Heading("sample", _("sample"), 84), Heading("sampled", _("day"), 88),
            Heading("nutrient", _("nutrient"), 130), Heading("value", _("value"), 74, True),
            Heading("old", _("was"), 70, True), Heading("change", _("change"), 78, True),
        ]

    def lines_of(self, row: ListRow) -> int:
        assert isinstance(row, CompositionRow)
        return max(len(row.values), 1)

    def line_look(self, row: ListRow, line: int, key: str) -> Look:
        assert isinstance(row, CompositionRow)
        quiet = row.fate is Fate.IGNORED
        if key in ("ingredient", "sample", "sampled"):
            if line:
                return EMPTY
            if key == "ingredient":
                name = row.ingredient or row.source_name
                return Look(text=name, quiet=quiet, italic=row.ingredient is None, hint=name)
            text = row.sample if key == "sample" else "" if row.sampled is None else row.sampled.isoformat()
            return Look(text=text, quiet=True, hint=text)
        if line >= len(row.values):
            return EMPTY
        value = row.values[line]
        if key == "nutrient":
            unit = value.unit if value.basis is Basis.AS_FED else _("{unit} DM").format(unit=value.unit)
            return Look(text=value.nutrient, unit=unit, quiet=quiet, hint=_("{nutrient}, {unit} {basis}").format(
                nutrient=value.nutrient, unit=value.unit, basis=answer_words(Asked.BASIS, value.basis.value)))
        decimals = max(fitting_decimals(value.amount, 1, 4), 1)
        if key == "change":
            if value.old is None:
                return EMPTY
            change = value.amount - value.old
            if abs(change) < 0.5 * 10.0**-decimals:
                return Look(text="0", number=True, quiet=True, lack=decimals)
            return Look(text=("+" if change > 0 else "−") + notation().write(abs(change), decimals), number=True)
        amount = value.amount if key == "value" else value.old
        return number_look(amount, decimals, unknown="", quiet=key == "old" or quiet, strong=key == "value")

    def detail(self, row: ListRow, line: int) -> str:
        assert isinstance(row, CompositionRow)
        if line:
            return ""
        listed = ""
        other_name = bool(row.ingredient) and fold(row.ingredient or "") != fold(row.source_name)
        if other_name and row.source_name and row.source_name not in row.reason:
            listed = _("“{name}” in the list").format(name=row.source_name)
        return " ".join(part for part in (listed + "." if listed and row.reason else listed, row.reason) if part)
