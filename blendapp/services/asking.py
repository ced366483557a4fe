"""What more can be asked of an answer, after it was shown: how else the feed could be mixed at nearly the same cost."""

from __future__ import annotations

import datetime
import math
from collections.abc import Callable, Sequence
from dataclasses import replace

from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.domain.results import IngredientResult, Result, Status
from blendapp.domain.wording import _
from blendapp.optimise.build.composition import Composition
from blendapp.optimise.near import near_optimal
from blendapp.services.formulate import Answer, answer_to

NEAR_PERCENT = 0.5


def with_near(
    answer: Answer, near_percent: float = NEAR_PERCENT, go_on: Callable[[], bool] | None = None
) -> Result:
    """The result with the near-optimal range of every ingredient: over all mixes at most near_percent dearer.

    go_on is asked between solves; where it says no, what is not worked out stays None. A result that is not optimal
    comes back as it is. Raises Refused for a tolerance below 0.
    """
    if not (math.isfinite(near_percent) and near_percent >= 0):
        raise Refused(_("A near-optimal tolerance must be 0 % or more; {value} is not.").format(value=near_percent))
    if answer.solution is None or answer.result.status is not Status.OPTIMAL:
        return answer.result
    found = near_optimal(answer.solution, near_percent, go_on)
    ends = zip(answer.result.ingredients, found.low.tolist(), found.high.tolist(), strict=True)
    return replace(answer.result, ingredients=tuple(_ranged(*one) for one in ends))


def _ranged(one: IngredientResult, low: float, high: float) -> IngredientResult:
    return one if math.isnan(low) or math.isnan(high) else replace(one, near_optimal=(low, high))


def formulate_whole(
    library: Library, formula_ids: Sequence[int], on: datetime.date, composition: Composition | None = None,
    near_percent: float = NEAR_PERCENT,
) -> list[Result]:
    """The results of several formulas with everything that can be asked of them, in their order."""
    composition = composition or Composition(library)
    return [with_near(answer_to(library, key, on, composition), near_percent) for key in formula_ids]
