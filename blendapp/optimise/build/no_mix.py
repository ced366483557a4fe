"""Why there is no mix, in the limits of the formula and their own units again."""

from __future__ import annotations

from collections.abc import Sequence

from blendapp.domain import results
from blendapp.optimise import conflicts
from blendapp.optimise.build.formula import FormulaProgram


def conflict_shown(built: FormulaProgram, found: conflicts.Conflict) -> results.Conflict:
    """A conflict as displayed: bounds in the units of their limits, what is asked digit for digit as it was entered."""
    return results.Conflict(
        reach=tuple(
            results.Reach(
                one.limit, results.Side(one.side), _asked(built, one.limit, one.side),
                _shown(built, one.limit, one.reachable),
            )
            for one in found.reach
        ),
        members=found.members,
        repairs=_repairs(built, found.repairs),
        total=_repairs(built, found.total),
    )


def _repairs(built: FormulaProgram, found: Sequence[conflicts.Repair]) -> tuple[results.Repair, ...]:
    return tuple(
        results.Repair(
            one.limit, results.Side(one.side), _asked(built, one.limit, one.side), _shown(built, one.limit, one.to)
        )
        for one in found
    )


def _asked(built: FormulaProgram, index: int, side: str) -> float:
    limit = built.limits[index]
    bound = limit.minimum if side == results.Side.MINIMUM else limit.maximum
    assert bound is not None
    return bound


def _shown(built: FormulaProgram, index: int, bound: float | None) -> float | None:
    return None if bound is None else bound / built.factors[index]
