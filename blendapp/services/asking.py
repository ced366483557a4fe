"""What more can be asked of an answer after it was shown: other mixes at nearly the same cost, or why there is none."""

from __future__ import annotations

import datetime
import math
from collections.abc import Callable, Sequence
from dataclasses import replace

from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.problems import Refused
from blendapp.domain.results import IngredientResult, Result, Status
from blendapp.domain.wording import _
from blendapp.optimise.build.composition import Composition
from blendapp.optimise.build.no_mix import conflict_shown
from blendapp.optimise.choice_conflicts import explain
from blendapp.optimise.exact import NotProven, Proof, prove
from blendapp.optimise.linear import FailedSolve
from blendapp.optimise.near import near_optimal
from blendapp.optimise.solution import Solution
from blendapp.services.formulate import Answer, FailedCertificate, answer_to

NEAR_PERCENT = 0.5
CONFLICT_S = 2.0


def with_near(
    answer: Answer, near_percent: float = NEAR_PERCENT, go_on: Callable[[], bool] | None = None
) -> Result:
    """The result with the near-optimal range of every ingredient: over all mixes at most near_percent dearer.

    go_on is asked between solves; where it says no, what is not worked out stays None. A result that is not optimal
    comes back as it is. Raises Refused for a tolerance below 0, FailedCertificate where no status is clear.
    """
    if not (math.isfinite(near_percent) and near_percent >= 0):
        raise Refused(_("A near-optimal tolerance must be 0 % or more; {value} is not.").format(value=near_percent))
    if answer.solution is None or answer.result.status is not Status.OPTIMAL:
        return answer.result
    try:
        found = near_optimal(answer.solution, near_percent, go_on)
    except FailedSolve as failure:
        text = _("The near-optimal ranges of {formula} could not be settled ({failure}).")
        raise FailedCertificate(text.format(formula=answer.result.formula, failure=failure)) from failure
    ends = zip(answer.result.ingredients, found.low.tolist(), found.high.tolist(), strict=True)
    return replace(answer.result, ingredients=tuple(_ranged(*one) for one in ends))


def _ranged(one: IngredientResult, low: float, high: float) -> IngredientResult:
    return one if math.isnan(low) or math.isnan(high) else replace(one, near_optimal=(low, high))


def with_conflict(answer: Answer, time_limit_s: float | None = CONFLICT_S) -> Result:
    """The result with why no mix exists: what each limit could reach, limits that clash, and the least repairs.

    Any other result than a conflict of limits comes back as it is. time_limit_s: of each mixed-integer step. Raises
    FailedCertificate where a verdict did not stand up to its check.
    """
    built = answer.built
    if built is None or answer.result.status is not Status.CONFLICT or not built.ingredients:
        return answer.result
    try:
        found = explain(built.program, time_limit_s)
    except FailedSolve as failure:
        text = _("Why {formula} has no answer could not be settled ({failure}).")
        raise FailedCertificate(text.format(formula=built.formula.name, failure=failure)) from failure
    return answer.result if found is None else replace(answer.result, conflict=conflict_shown(built, found))


def ask_all(
    answer: Answer, near_percent: float = NEAR_PERCENT, go_on: Callable[[], bool] | None = None
) -> Result:
    """Everything that can be asked of an answer, or of why there is none."""
    if answer.result.status is Status.CONFLICT:
        return with_conflict(answer)
    return with_near(answer, near_percent, go_on)


def proven(answer: Answer) -> Result:
    """The result with the sentence that its cost is the least there is, proven in exact fractions on its basis.

    Of a formula with practical or count limits that is proven for the chosen ingredients. A result that is not optimal
    comes back as it is. Raises FailedCertificate where no proof was found.
    """
    if answer.solution is None or answer.result.status is not Status.OPTIMAL:
        return answer.result
    try:
        proof = _proof(answer.solution)
    except NotProven as failure:
        text = _("The answer to {formula} could not be proven ({failure}) and is not shown.")
        raise FailedCertificate(text.format(formula=answer.result.formula, failure=failure)) from failure
    text = _("Proven in exact fractions: no mix costs less than {cost} {currency}/{per}.")
    said = text.format(
        cost=notation().write(float(proof.objective), 6), currency=answer.result.currency, per=answer.result.cost_per
    )
    return replace(answer.result, proof=said)


def _proof(solution: Solution) -> Proof:
    """Numbers as the decimals that were typed, since binary fractions of 10 % and 90 % need not make 1; numbers that
    were worked out (a dry-matter value as fed) may hold only as they stand."""
    try:
        return prove(solution, as_typed=True)
    except NotProven:
        return prove(solution)


def formulate_whole(
    library: Library, formula_ids: Sequence[int], on: datetime.date, composition: Composition | None = None,
    near_percent: float = NEAR_PERCENT, prove_too: bool = False,
) -> list[Result]:
    """The results of several formulas with everything that can be asked of them, in their order."""
    composition = composition or Composition(library)
    answers = [answer_to(library, key, on, composition) for key in formula_ids]
    if prove_too:
        answers = [replace(answer, result=proven(answer)) for answer in answers]
    return [ask_all(answer, near_percent) for answer in answers]

