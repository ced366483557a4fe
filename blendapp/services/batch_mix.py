"""What goes into a batch: the mix of its formula, opened ingredients replaced by what they are made of, and rework."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.wording import _
from blendapp.optimise.build.contents import Contents
from blendapp.services.makers import Makers


@dataclass(frozen=True)
class BatchMix:
    """contents: what is weighed. of_opened: of a weighed ingredient, names of the made ingredients in whose place it
    stands, in part. opened: identifiers of those of the mix itself. rework: of a weighed ingredient, the part of it
    that goes in as rework."""

    contents: Contents
    of_opened: Mapping[int, tuple[str, ...]]
    opened: frozenset[int]
    rework: Mapping[int, float]

    @property
    def is_plain(self) -> bool:
        """Whether only the mix of the formula is weighed."""
        return not (self.opened or self.rework)


def batch_mix(makers: Makers, mix: Mapping[int, float], rework: Mapping[int, float] | None = None) -> BatchMix:
    """What is weighed of a mix, each ingredient once.

    mix: fractions or kg per day by ingredient identifier. rework: percent of the batch by ingredient identifier; the
    rest of the mix keeps its proportions in what remains: at 5 % rework, maize of 60 % comes to 57 %. Raises Refused
    for rework that is no share, and CannotBeMade.
    """
    shares = _read_rework(makers.library, rework or {})
    total = math.fsum(mix.values())
    rest = 1.0 - math.fsum(shares.values())
    amounts: dict[int, float] = {}
    counts: dict[int, dict[int, float]] = {}
    ways: dict[int, dict[int, None]] = {}
    opened = set()
    for key, amount in mix.items():
        if makers.is_opened(key):
            opened.add(key)
            for part, through in makers.opened_on_the_way(key).items():
                ways.setdefault(part, {}).update(dict.fromkeys(through))
            stands_for = makers.opened(key)
        else:
            stands_for = {key: 1.0}
        for part, fraction in stands_for.items():
            _add(amounts, counts, part, key, amount * rest * fraction)
    for key, share in shares.items():
        _add(amounts, counts, key, key, share * total)
    counted_as = {
        key: {of: mass / amounts[key] for of, mass in parts.items()}
        for key, parts in counts.items() if amounts[key] and set(parts) != {key}
    }
    return BatchMix(
        Contents(amounts, counted_as),
        {key: tuple(makers.library.ingredient(one).name for one in way) for key, way in ways.items()},
        frozenset(opened),
        {key: share * total / amounts[key] for key, share in shares.items()},
    )


def _add(
    amounts: dict[int, float], counts: dict[int, dict[int, float]], key: int, counts_as: int, amount: float
) -> None:
    amounts[key] = amounts.get(key, 0.0) + amount
    parts = counts.setdefault(key, {})
    parts[counts_as] = parts.get(counts_as, 0.0) + amount


def _read_rework(library: Library, rework: Mapping[int, float]) -> dict[int, float]:
    """Fractions of the batch. Raises Refused with every fault."""
    short = notation().write_short
    problems, shares = [], {}
    for key, percent in rework.items():
        if key not in library.records["ingredient"]:
            problems.append(Problem(_("Rework must be an ingredient of the mill; enter it as one.")))
            continue
        place = Place(record=library.ingredient(key).name)
        if not math.isfinite(percent) or percent <= 0:
            text = _("Rework goes in at a share above 0 %; {percent} % is none.")
            problems.append(Problem(text.format(percent=short(percent)), place))
        shares[key] = percent / 100
    whole = 100 * math.fsum(shares.values())
    if not problems and whole >= 100:
        text = _("Rework of {percent} % leaves nothing of the feed itself; together it must stay below 100 %.")
        problems.append(Problem(text.format(percent=short(whole))))
    if problems:
        raise Refused(problems)
    return shares
