"""What new prices do, as a table: a row a formula, the greatest change first."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from blendapp.desk.head import signed
from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look
from blendapp.domain.formulas import Amounts
from blendapp.domain.notation import notation
from blendapp.domain.wording import _
from blendapp.services.effect_table import changed_words, status_words
from blendapp.services.movers import Mover, biggest_first

_SHOWN_DECIMALS = 2


class EffectRows(Grid):
    """Owners are formulas."""

    def __init__(self, parent: Any = None) -> None:
        super().__init__(parent)
        self._row: dict[int, Mover] = {}
        self.currency = ""

    def show(self, rows: Sequence[Mover], currency: str) -> None:
        """Show rows: those without an answer on one side first, then by the share of the cost that changes."""
        self.currency = currency
        self._row = {one.formula_id: one for one in biggest_first(rows)}
        self.set_headings([
            Heading("formula", _("formula"), 180),
            Heading("before", _("before, {currency}").format(currency=currency), 96, True),
            Heading("after", _("after, {currency}").format(currency=currency), 96, True),
            Heading("change", _("change"), 84, True), Heading("percent", "%", 70, True), Heading("per", _("per"), 60),
            Heading("most", _("the price that did most"), 310), Heading("mix", _("mix"), 460),
        ])
        self.set_rows(list(self._row))
        self.refresh()

    @property
    def shown(self) -> list[Mover]:
        """The rows in the order in which they stand."""
        return [self._row[owner] for owner in self.owners]

    def make_look(self, owner: int, key: str) -> Look:
        row = self._row.get(owner)
        if row is None:
            return EMPTY
        decimals = 2 if row.amounts is Amounts.BLEND else 4
        lack = 4 - decimals if any(one.amounts is Amounts.RATION for one in self._row.values()) else 0
        if key == "formula":
            return Look(text=row.formula, hint=_("Enter shows the formula"))
        if key in ("before", "after"):
            value = row.before if key == "before" else row.after
            return Look(text=notation().write(value, decimals), number=True, strong=key == "after", lack=lack)
        if key == "change":
            if row.change is None:
                return EMPTY
            if abs(row.change) < 0.5 * 10.0**-decimals:
                return Look(text="0", number=True, quiet=True, lack=max(decimals + lack, 0))
            return Look(text=signed(row.change, decimals), number=True, lack=lack)
        if key == "percent":
            if row.change is None or not row.before or abs(row.change / row.before) < 5e-5:
                return EMPTY
            return Look(text=signed(100 * row.change / abs(row.before), 2), number=True, quiet=True)
        if key == "per":
            return Look(text="t" if row.amounts is Amounts.BLEND else _("day"), quiet=True)
        if key == "mix":
            text = mix_words(row)
            return Look(text=text, quiet=bool(row.kept), strong=bool(row.fault) or row.after is None,
                        hint=self._mix_hint(row, decimals))
        text = most_words(row)
        return Look(text=text, hint=self._most_hint(row))

    def _mix_hint(self, row: Mover, decimals: int) -> str:
        if row.fault or row.kept is not False or row.as_before is None or row.after is None:
            return row.fault
        text = _("{changes}. The old mix would cost {old} now; changing it saves {saved} {currency}.")
        write = notation().write
        return text.format(
            changes=changed_words(row, _SHOWN_DECIMALS), old=write(row.as_before, decimals), currency=self.currency,
            saved=write(row.as_before - row.after, decimals))

    def _most_hint(self, row: Mover) -> str:
        if row.most is None or row.most.effect is None:
            return ""
        text = _("{name} alone moves the cost by {effect} {currency}, at the mean of its amounts before and after.")
        decimals = 2 if row.amounts is Amounts.BLEND else 4
        return text.format(name=row.most.ingredient, effect=signed(row.most.effect, decimals), currency=self.currency)

    def write(self, owner: int, key: str, text: str) -> None:
        raise ValueError(_("What prices do is worked out, not typed in."))


def mix_words(row: Mover) -> str:
    """What becomes of a mix: "kept", or "changed: Wheat 12.00 to 18.50 %, Maize 60.00 to 53.50 %"."""
    changed = changed_words(row, _SHOWN_DECIMALS)
    return _("{status}: {changes}").format(status=status_words(row), changes=changed) if changed else status_words(row)


def most_words(row: Mover) -> str:
    """The price that did most: "Soybean meal, 420.00 to 440.00"."""
    if row.most is None:
        return ""
    write = notation().write
    before, after = (_("no price") if value is None else write(value, 2) for value in (row.most.before, row.most.after))
    words = {"name": row.most.ingredient, "before": before, "after": after}
    if row.most.effect is None:
        return _("{name}, {before} to {after}").format(**words)
    words["effect"] = signed(row.most.effect, 2 if row.amounts is Amounts.BLEND else 4)
    return _("{name}, {before} to {after}, does {effect}").format(**words)
