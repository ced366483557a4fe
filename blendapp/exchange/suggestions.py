"""Names that a person may have meant by one that is not known."""

from __future__ import annotations

import difflib
from collections.abc import Iterable

from blendapp.domain.names import fold
from blendapp.domain.wording import _

LEAST_LIKENESS = 0.6
MOST_SUGGESTED = 3


def close_names(text: str, known: Iterable[str], least: float = LEAST_LIKENESS) -> list[str]:
    """The few known names most like a text, best first."""
    by_folded = {fold(name): name for name in known}
    found = difflib.get_close_matches(fold(text), by_folded, MOST_SUGGESTED, least)
    return [by_folded[name] for name in found]


def did_you_mean(text: str, known: Iterable[str]) -> str:
    """A closing sentence with the names most like a text, or nothing."""
    names = close_names(text, known)
    if not names:
        return ""
    return " " + _("Did you mean {names}?").format(names=_(" or ").join(f"“{name}”" for name in names))
