"""Names that a person may have meant by one that is not known. They are proposed, and never taken for it."""

from __future__ import annotations

import re
from collections.abc import Iterable

from blendapp.domain.names import fold
from blendapp.domain.wording import _

LEAST_LIKENESS = 0.6
MOST_SUGGESTED = 3
LONGEST_NAME = 200
# Of two names equally alike, the one with the same numbers is proposed first: 48 % is rather 48 % than 44 %.
_SAME_NUMBERS = 5.0
# What is so much less alike than the best is no longer meant.
_FAR_BEHIND = 25.0


class Suggester:
    """Finds the few names most like a text among many.

    Likeness: of two texts letter by letter, or with their words in the order of the alphabet, whichever is greater;
    from 0 to 1, the share of letters that need not be taken out or put in (the measure of Levenshtein without
    replacement, 1966, in proportion to both lengths).
    """

    def __init__(self, names: Iterable[str], least_likeness: float = LEAST_LIKENESS) -> None:
        self._names = {fold(name): name for name in names}
        self._plain = {folded: folded for folded in self._names}
        self._sorted = {folded: _in_order(folded) for folded in self._names}
        self._least = least_likeness * 100

    def close_names(self, text: str) -> list[str]:
        """The names most like a text, best first."""
        from rapidfuzz import fuzz, process

        folded = fold(text)
        if len(folded) > LONGEST_NAME:
            return []
        likeness: dict[str, float] = {}
        for query, choices in ((folded, self._plain), (_in_order(folded), self._sorted)):
            found = process.extract(
                query, choices, scorer=fuzz.ratio, limit=3 * MOST_SUGGESTED, score_cutoff=self._least
            )
            for _text, score, name in found:
                likeness[name] = max(score, likeness.get(name, 0.0))
        numbers, most = _numbers(folded), max(likeness.values(), default=0.0)
        near = [name for name, score in likeness.items() if score >= most - _FAR_BEHIND]
        best = sorted(near, key=lambda name: (-likeness[name] - _SAME_NUMBERS * (_numbers(name) == numbers), name))
        return [self._names[name] for name in best[:MOST_SUGGESTED]]


def _in_order(folded: str) -> str:
    return " ".join(sorted(re.findall(r"\w+", folded)))


def _numbers(folded: str) -> list[str]:
    return sorted(re.findall(r"[0-9]+(?:[.,][0-9]+)?", folded))


def did_you_mean(text: str, known: Iterable[str] | Suggester) -> str:
    """A closing sentence with the names most like a text, or nothing."""
    suggester = known if isinstance(known, Suggester) else Suggester(known)
    names = suggester.close_names(text)
    if not names:
        return ""
    return " " + _("Did you mean {names}?").format(names=_(" or ").join(f"“{name}”" for name in names))
