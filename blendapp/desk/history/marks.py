"""How the quotes of one supplier are told from those of another: a mark and its name, the same in plot and table."""

from __future__ import annotations

from blendapp.domain.price_history import PriceHistory, QuoteLine, Standing
from blendapp.domain.wording import _

# As text, and as the plot calls it. Each is told from the others by its outline alone.
SIGNS: tuple[tuple[str, str], ...] = (("●", "o"), ("■", "s"), ("▲", "t1"), ("◆", "d"), ("▼", "t"), ("✚", "+"))
WITHDRAWN = "✕"
# Quotes whose mark in the plot is not filled.
HOLLOW = (Standing.TO_COME, Standing.ELSEWHERE)


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


def legend(history: PriceHistory) -> str:
    """The marks in words, for the line under the plot."""
    parts = [f"{SIGNS[at][0]} {supplier_words(name)}" for name, at in marks_of(history).items()]
    if any(line.standing in HOLLOW for line in history.lines):
        parts.append(_("hollow: to come, or of another site"))
    if any(line.site for line in history.lines):
        parts.append(_("by name: a site's own"))
    return "   ".join(parts)
