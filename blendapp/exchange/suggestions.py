"""Names that a person may have meant by one that is not known."""

from __future__ import annotations

import difflib
from collections import Counter
from collections.abc import Iterable

from blendapp.domain.names import fold
from blendapp.domain.wording import _

LEAST_LIKENESS = 0.6
MOST_SUGGESTED = 3
# Only names that share most pairs of letters are compared letter by letter, which takes long.
_MOST_COMPARED = 25


class Suggester:
    """Finds the few names most like a text among many."""

    def __init__(self, names: Iterable[str], least_likeness: float = LEAST_LIKENESS) -> None:
        self._names = {fold(name): name for name in names}
        self._least = least_likeness
        self._holding: dict[str, list[str]] = {}
        for folded in self._names:
            for pair in _pairs(folded):
                self._holding.setdefault(pair, []).append(folded)

    def close_names(self, text: str) -> list[str]:
        """The names most like a text, best first."""
        shared: Counter[str] = Counter()
        for pair in _pairs(fold(text)):
            shared.update(self._holding.get(pair, ()))
        likely = [name for name, _count in shared.most_common(_MOST_COMPARED)]
        found = difflib.get_close_matches(fold(text), likely, MOST_SUGGESTED, self._least)
        return [self._names[name] for name in found]


def _pairs(folded: str) -> set[str]:
    padded = f" {folded} "
    return {padded[i : i + 2] for i in range(len(padded) - 1)}


def did_you_mean(text: str, known: Iterable[str] | Suggester) -> str:
    """A closing sentence with the names most like a text, or nothing."""
    suggester = known if isinstance(known, Suggester) else Suggester(known)
    names = suggester.close_names(text)
    if not names:
        return ""
    return " " + _("Did you mean {names}?").format(names=_(" or ").join(f"“{name}”" for name in names))
