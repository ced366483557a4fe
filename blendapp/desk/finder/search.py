"""Which of many things fit what was typed, the best first. No Qt."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass

from blendapp.domain.names import fold


@dataclass(frozen=True)
class Found:
    """Something that can be found: its words, what kind of thing it is, its keys if it has some, and what it does."""

    words: str
    kind: str
    run: Callable[[], object]
    keys: str = ""


def rank(words: str, typed: str) -> int | None:
    """How well words fit: 0 they begin so, 1 a word of them does, 2 all typed parts stand in them, None not at all."""
    plain, wanted = fold(words), fold(typed)
    if not wanted or plain.startswith(wanted):
        return 0
    if f" {wanted}" in plain:
        return 1
    return 2 if all(part in plain for part in wanted.split()) else None


def best(things: Sequence[Found], typed: str, most: int = 60) -> list[Found]:
    """The things that fit, the best first, those of equal rank in their order."""
    ranked = [(rank(f"{thing.words} {thing.kind}", typed), place, thing) for place, thing in enumerate(things)]
    fitting = [(fit, place, thing) for fit, place, thing in ranked if fit is not None]
    return [thing for _fit, _place, thing in sorted(fitting, key=lambda one: (one[0], one[1]))[:most]]
