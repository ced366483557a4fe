"""An end of a rail as a bound of a limit."""

from __future__ import annotations

from dataclasses import replace

from blendapp.desk.rail.geometry import End
from blendapp.domain.formulas import Limit


def with_bound(limit: Limit, end: End, value: float | None) -> Limit:
    """The same limit with one side elsewhere; None opens it."""
    return replace(limit, minimum=value) if end is End.MINIMUM else replace(limit, maximum=value)
