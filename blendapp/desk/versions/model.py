"""The versions of a formula, and what is different between two states of it, as tables."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from typing import Any

from blendapp.desk.head import signed
from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, fitting_decimals
from blendapp.domain.differences import ENTERED, Difference
from blendapp.domain.figures import decimals_of
from blendapp.domain.mills import FormulaVersion, VersionState
from blendapp.domain.notation import notation
from blendapp.domain.wording import _


def state_word(state: VersionState) -> str:
    """What a version is."""
    return {VersionState.DRAFT: _("draft, prepared"), VersionState.APPROVED: _("approved"),
            VersionState.SUPERSEDED: _("superseded")}[state]


class VersionRows(Grid):
    """Owners are versions, the newest first. altered: numbers of those that other hands have changed."""

    def __init__(self, parent: Any = None) -> None:
        super().__init__(parent)
        self._version: dict[int, FormulaVersion] = {}
        self.altered: dict[int, str] = {}

    def show(self, versions: Sequence[FormulaVersion], altered: dict[int, str]) -> None:
        """Show the versions of one formula. altered: what is wrong, by the number of a version."""
        self.altered = altered
        self._version = {one.id: one for one in reversed(versions)}
        self.set_headings([
            Heading("number", _("version"), 76, True), Heading("state", "", 130),
            Heading("made_by", _("prepared by"), 140),
            Heading("made", _("on"), 96), Heading("approved_by", _("approved by"), 140),
            Heading("capacity", _("as"), 150), Heading("approved", _("on"), 96), Heading("note", _("Note"), 140),
        ])
        self.set_rows(list(self._version))
        self.refresh()

    def version(self, owner: int) -> FormulaVersion | None:
        """The version of a row."""
        return self._version.get(owner)

    def make_look(self, owner: int, key: str) -> Look:
        one = self._version.get(owner)
        if one is None:
            return EMPTY
        fault = self.altered.get(one.number, "")
        if key == "number":
            return Look(text=str(one.number), number=True, strong=one.state is VersionState.APPROVED, fault=fault)
        if key == "state":
            text = _("altered, not approved") if fault else state_word(one.state)
            return Look(text=text, strong=bool(fault), fault=fault, quiet=one.state is VersionState.SUPERSEDED)
        if key in ("made", "approved"):
            return Look(text=_day(getattr(one, key)), quiet=True)
        text = str(getattr(one, key))
        return Look(text=text, hint=text)

    def write(self, owner: int, key: str, text: str) -> None:
        raise ValueError(_("A version on record never changes; edit the formula and prepare a new one."))


class DifferenceRows(Grid):
    """Owners are places among the rows."""

    def __init__(self, parent: Any = None) -> None:
        super().__init__(parent)
        self.rows: list[Difference] = []
        self._widest = 0

    def show(self, rows: Sequence[Difference]) -> None:
        """Show differences."""
        self.rows = list(rows)
        self._widest = max((_decimals(row) for row in rows), default=0)
        self.set_headings([
            Heading("area", _("what"), 140), Heading("name", "", 250), Heading("detail", "", 130),
            Heading("before", _("before"), 120, True), Heading("after", _("after"), 120, True),
            Heading("change", _("change"), 100, True), Heading("unit", "", 90),
        ])
        self.set_rows([])
        self.set_rows(list(range(len(self.rows))))

    def make_look(self, owner: int, key: str) -> Look:
        if owner >= len(self.rows):
            return EMPTY
        row = self.rows[owner]
        decimals = _decimals(row)
        lack = self._widest - decimals
        if key == "area":
            first = owner == 0 or self.rows[owner - 1].area is not row.area
            return Look(text=_(str(row.area)) if first else "", quiet=True, words=_(str(row.area)))
        if key in ("before", "after"):
            value = row.before if key == "before" else row.after
            if isinstance(value, str):
                return Look(text=value, hint=value, strong=key == "after")
            return Look(text="" if value is None else notation().write(value, decimals), number=True, lack=lack,
                        strong=key == "after", words="" if value is not None else _("none"))
        if key == "change":
            return EMPTY if row.change is None else Look(text=signed(row.change, decimals), number=True, quiet=True,
                                                             lack=lack)
        text = str(getattr(row, key))
        return Look(text=text, quiet=key != "name", hint=text if key == "name" else "")

    def write(self, owner: int, key: str, text: str) -> None:
        raise ValueError(_("A difference is found by comparing, not typed in."))


def _decimals(row: Difference) -> int:
    """Enough for both values and for the change to show; what a person entered is shown as it was entered."""
    change = row.change
    values = [value for value in (row.before, row.after) if isinstance(value, float | int)]
    if row.area in ENTERED:
        return max((fitting_decimals(value, 0) for value in values), default=0)
    if change:
        return max(2, min(decimals_of(abs(change), significant=2), 4))
    return max((min(decimals_of(value), 4) for value in values), default=2)


def _day(moment: datetime.datetime | None) -> str:
    return "" if moment is None else moment.astimezone().date().isoformat()
