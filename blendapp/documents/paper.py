"""Paper sizes."""

from __future__ import annotations

from enum import Enum

MM = 72 / 25.4


class Paper(Enum):
    """A paper size, upright. A4: ISO 216, 210 x 297 mm. Letter: ANSI Y14.1, 8.5 x 11 inches."""

    A4 = "A4"
    LETTER = "letter"

    @property
    def size_pt(self) -> tuple[float, float]:
        """Width and height in points of 1/72 inch."""
        return (210 * MM, 297 * MM) if self is Paper.A4 else (612.0, 792.0)
