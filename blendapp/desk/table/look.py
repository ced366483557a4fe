"""How one cell looks and what it says: all that a painter, a screen reader and an editor need, worked out once."""

from __future__ import annotations

from dataclasses import dataclass

from blendapp.desk.rail.geometry import Axis, RailState
from blendapp.domain.notation import notation

DOT = "·"


@dataclass(frozen=True, slots=True)
class Look:
    """One cell. text: as shown; typed: as an editor opens on it; words: for a screen reader, text if empty.

    unit: shown in quiet ink after the text. lack: decimals that the cell has less than its column, so that decimal
    signs stand under each other. bar: share of the cell's width that is filled, 0 to 1; bar_range: the stretch of it
    that is as good, drawn under it. fault: the sentence about a refused text. choices: what an editor offers, where
    only those are taken.
    """

    text: str = ""
    typed: str = ""
    words: str = ""
    unit: str = ""
    hint: str = ""
    fault: str = ""
    number: bool = False
    italic: bool = False
    quiet: bool = False
    strong: bool = False
    accent: bool = False
    stale: bool = False
    editable: bool = False
    lack: int = 0
    bar: float | None = None
    bar_range: tuple[float, float] | None = None
    rail: RailState | None = None
    axis: Axis | None = None
    choices: tuple[str, ...] = ()


EMPTY = Look()


def number_look(
    value: float | None, decimals: int, *, widest: int | None = None, editable: bool = False, hint: str = "",
    italic: bool = False, strong: bool = False, quiet: bool = False, accent: bool = False, stale: bool = False,
    unknown: str = DOT, words: str = "",
) -> Look:
    """A cell with a number. None is unknown: an empty cell with a dot, never 0.

    decimals: those of this cell; widest: the most decimals in its column.
    """
    if value is None:
        return Look(text=unknown, number=True, editable=editable, hint=hint, quiet=True, words=words, stale=stale,
                    lack=0 if unknown != DOT else decimals if widest is None else widest)
    write = notation()
    if value == 0:
        # Zero is 0, told from an unknown at a glance, and stands where whole numbers stand.
        widest, decimals = (decimals if widest is None else widest), 0
    return Look(
        text=write.write(value, decimals), typed=write.write_exact(value), number=True, editable=editable, hint=hint,
        italic=italic, strong=strong, quiet=quiet, accent=accent, stale=stale, words=words,
        lack=max((decimals if widest is None else widest) - decimals, 0),
    )


def fitting_decimals(value: float | None, least: int, most: int = 6) -> int:
    """As many decimals as show a value as it was entered, between least and most."""
    if value is None:
        return least
    for decimals in range(least, most):
        if round(value, decimals) == value:
            return decimals
    return most
