"""Tables that are worked out to be written into a file for other programs."""

from __future__ import annotations

from dataclasses import dataclass
from typing import NamedTuple


class Figure(NamedTuple):
    """A number with the decimals that it is shown with."""

    value: float
    decimals: int


WrittenCell = str | Figure | None


@dataclass(frozen=True)
class WrittenTable:
    """A table with a name and headings; every row has as many cells. None is an empty cell."""

    name: str
    headings: tuple[str, ...]
    rows: tuple[tuple[WrittenCell, ...], ...]
