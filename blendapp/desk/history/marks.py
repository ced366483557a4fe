"""How the quotes of one supplier are told from those of another: a mark and its name, the same in plot and table."""

from __future__ import annotations

from collections.abc import Iterable

from blendapp.domain.price_history import PriceHistory, QuoteLine
from blendapp.domain.wording import _

# As text, and as the plot calls it. Each is told from the others by its outline alone.
SIGNS: tuple[tuple[str, str], ...] = (("●", "o"), ("■", "s"), ("▲", "t1"), ("◆", "d"), ("▼", "t"), ("✚", "+"))
WITHDRAWN = "✕"


def marks_of(history: PriceHistory) -> dict[str, int]:
    """The place in SIGNS of each supplier's mark, by name, "" for quotes of nobody in particular. The seventh supplier
    shares the mark of the first; its word still tells them apart."""
    names = sorted({line.supplier for line in history.lines}, key=lambda name: (name != "", name.casefold()))
    return {name: at % len(SIGNS) for at, name in enumerate(names)}


def sign_of(line: QuoteLine, marks: dict[str, int]) -> str:
    """The mark of a quote as text."""
    return WITHDRAWN if line.quote.price is None else SIGNS[marks[line.supplier]][0]


def supplier_words(name: str) -> str:
    """A supplier's name, or that it is nobody's."""
    return name or _("nobody in particular")


def legend(marks: dict[str, int], sites: Iterable[str]) -> str:
    """The marks in words, for the line under the plot."""
    parts = [f"{SIGNS[at][0]} {supplier_words(name)}" for name, at in marks.items()]
    text = "   ".join(parts)
    named = sorted({site for site in sites if site})
    if named:
        text = _("{marks}   by name: a site's own").format(marks=text)
    return text
