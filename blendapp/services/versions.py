"""Which version of a formula stands."""

from __future__ import annotations

from blendapp.domain.library import Library
from blendapp.domain.wording import _


def current_version(library: Library, formula_id: int) -> str:
    """The draft that edits go into: one above the last version on record."""
    numbers = [v.number for v in library.all("version") if v.formula_id == formula_id]
    return _("draft {number}").format(number=max(numbers, default=0) + 1)
