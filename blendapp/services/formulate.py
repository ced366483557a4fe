"""Formulating: from a library to a checked result, with every reason why there is none."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from dataclasses import dataclass, replace

from blendapp.domain import cautions, making
from blendapp.domain.formulas import Formula, LimitKind
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.problems import Refused
from blendapp.domain.results import Check, LimitResult, Result, Status, UnknownValue
from blendapp.domain.wording import _
from blendapp.optimise import certificate, rays
from blendapp.optimise.build import answer
from blendapp.optimise.build.composition import Composition
from blendapp.optimise.build.formula import FormulaProgram, build, unknown_values
from blendapp.optimise.linear import FailedSolve
from blendapp.optimise.program import Program
from blendapp.optimise.sensitivity import sensitivity
from blendapp.optimise.solution import Solution
from blendapp.optimise.solve import solve
from blendapp.services import equal_mixes


class FailedCertificate(Exception):
    """An answer that the check without the solver found wrong. It is never shown."""


@dataclass(frozen=True, eq=False)
class Answer:
    """A result with the numbers behind it, for what more can be asked of it (services.asking).

    built: its program; None where a caution forbids an answer before any solve. solution: None where there is no mix.
    """

    result: Result
    built: FormulaProgram | None = None
    solution: Solution | None = None


def formulate(
    library: Library,
    formula_id: int,
    on: datetime.date,
    composition: Composition | None = None,
    *,
    site_id: int | None = None,
    time_limit_s: float | None = None,
    prices: bool = True,
) -> Result:
    """The least-cost answer to a formula at the prices of a day, checked, or why there is none; see answer_to."""
    return answer_to(
        library, formula_id, on, composition, site_id=site_id, time_limit_s=time_limit_s, prices=prices
    ).result


def answer_to(
    library: Library,
    formula_id: int,
    on: datetime.date,
    composition: Composition | None = None,
    *,
    site_id: int | None = None,
    time_limit_s: float | None = None,
    prices: bool = True,
) -> Answer:
    """The least-cost answer to a formula at the prices of a day, checked, or why there is none.

    composition: kept between calls by the mill, for speed. time_limit_s: of a mixed-integer program. prices: whether
    both-sided shadow prices and price ranges are worked out. Raises FailedCertificate where the solver's answer does
    not hold; no answer is shown then.
    """
    formula = library.formula(formula_id)
    admitted = [making.held(library, ingredient) for ingredient in library.admitted(formula)]
    forbidden = cautions.forbidden_by_admission(formula, admitted)
    built = build(library, formula, on, composition, site_id)
    unknown = unknown_values(library, built)
    if forbidden is not None:
        return Answer(_none(library, built, on, Status.CONFLICT, forbidden, unknown))
    solution = _solve(built.program, time_limit_s)
    if solution.status == "infeasible":
        status, cause = _why_infeasible(library, built, on, composition, site_id, time_limit_s)
        return Answer(_none(library, built, on, status, cause, unknown), built)
    if solution.status == "unbounded":
        return Answer(_none(library, built, on, Status.UNBOUNDED, _why_unbounded(built), unknown), built)
    if solution.x is None:
        cause = _("Time was up before any mix was found.")
        return Answer(_none(library, built, on, Status.STOPPED, cause, unknown), built)
    solution, tie = equal_mixes.settle(library, built, solution)
    result = replace(_answer(library, built, on, solution, unknown, prices), tie=tie)
    return Answer(result, built, solution if result.has_answer else None)


def formulas_named(library: Library, names: Sequence[str]) -> list[Formula]:
    """The formulas of these names, or all. Raises Refused with every name that is not one."""
    if not names:
        return library.formulas
    found = [(name, library.named("formula", name)) for name in names]
    missing = [name for name, formula in found if formula is None]
    if missing:
        from blendapp.domain.problems import Place, Problem

        known = ", ".join(f.name for f in library.formulas) or _("none")
        text = _("There is no formula “{name}”; the mill has: {known}.")
        raise Refused([Problem(text.format(name=name, known=known), Place(record=name)) for name in missing])
    return [formula for _name, formula in found if formula is not None]


def _solve(program: Program, time_limit_s: float | None) -> Solution:
    """Without an ingredient there is no mix, not even an empty one that needs nothing."""
    if program.size == 0:
        return Solution("infeasible")
    try:
        return solve(program, time_limit_s)
    except FailedSolve as failure:
        text = _("The solver gave no clear answer ({failure}); nothing is shown.")
        raise FailedCertificate(text.format(failure=failure)) from failure


def _answer(
    library: Library, built: FormulaProgram, on: datetime.date, solution: Solution, unknown: Sequence[UnknownValue],
    prices: bool,
) -> Result:
    try:
        found = certificate.check(built.program, solution)
    except certificate.FailedCheck as failure:
        text = _negative_divisor(library, built, solution) or _(
            "The answer to {formula} failed its check ({failure}) and is not shown."
        )
        raise FailedCertificate(text.format(formula=built.formula.name, failure=failure)) from failure
    assert solution.x is not None
    mix = [(i.id, float(x)) for i, x in zip(built.ingredients, solution.x, strict=True) if x > 1e-12]
    forbidden = cautions.forbidden_in_mix(built.formula, library, mix)
    if forbidden is not None:
        return _none(library, built, on, Status.CONFLICT, forbidden, unknown)
    check = Check(found.largest_violation, found.duality_gap)
    said = cautions.warnings(built.formula, library, mix, unknown)
    worth = sensitivity(solution) if prices and solution.status == "optimal" else None
    result = answer.answered(library, on, built, solution, check, unknown, said, worth)
    return replace(result, cautions=(*result.cautions, *_without_value(result.limits)))


def _negative_divisor(library: Library, built: FormulaProgram, solution: Solution) -> str | None:
    """What to do where a ratio divides by less than 0, which its two sides, multiplied out, do not notice."""
    for row in built.program.rows:
        if row.divisor is None or row.limit is None or solution.x is None or row.divisor @ solution.x >= 0:
            continue
        limit = built.shown[row.limit].limit
        if limit.per is None:
            continue
        low = [i.name for i, value in zip(built.ingredients, row.divisor, strict=True) if value < 0]
        text = _(
            "{name} of {ingredients} is below 0, and the ratio over it means nothing in a mix where it is below 0; set "
            "a minimum of {name} that is above 0."
        )
        said = text.format(name=library.subject_name(limit.per), ingredients=", ".join(low))
        return f"{built.formula.name}: {said}".replace("{", "{{").replace("}", "}}")
    return None


def _without_value(limits: Sequence[LimitResult]) -> list[str]:
    """A sentence for each limit that divides by what this mix has none of: its value is null, and that is said."""
    text = _("{limit} has no value in this mix, since what it is divided by is 0: the limit says nothing about it.")
    divided = (LimitKind.NUTRIENT, LimitKind.INGREDIENT, LimitKind.GROUP, LimitKind.RATIO)
    return [
        text.format(limit=one.name if one.per is None else f"{one.name} : {one.per}")
        for one in limits
        if one.value is None and one.kind in divided
    ]


def _none(
    library: Library, built: FormulaProgram, on: datetime.date, status: Status, cause: str,
    unknown: Sequence[UnknownValue],
) -> Result:
    said = cautions.warnings(built.formula, library, (), unknown)
    return answer.without_answer(library, built, on, status, cause, unknown, said)


def _why_infeasible(
    library: Library, built: FormulaProgram, on: datetime.date, composition: Composition | None, site_id: int | None,
    time_limit_s: float | None,
) -> tuple[Status, str]:
    """Incomplete if the unpriced ingredients would make a mix possible, else a conflict."""
    if built.unpriced:
        whole = build(library, built.formula, on, composition, site_id, with_unpriced=True)
        if _solve(whole.program, time_limit_s).status in ("optimal", "unbounded", "stopped"):
            text = _("No mix without a price for {ingredients}; enter a price, and there is one.")
            return Status.INCOMPLETE, text.format(ingredients=", ".join(i.name for i in built.unpriced))
    if not built.ingredients and not built.unpriced:
        text = _("The formula admits no ingredient; list some for it, or let it admit all.")
        return Status.CONFLICT, text
    if not built.ingredients:
        return Status.CONFLICT, _("The formula admits no ingredient that has a price.")
    return Status.CONFLICT, _("No mix of the admitted ingredients can meet all limits together.")


def _why_unbounded(built: FormulaProgram) -> str:
    """Names the ingredients that can grow for ever, and the price or the missing limit at fault."""
    found = rays.ray(built.program)
    if found is None:
        return _("The cost can fall for ever.")
    if found.at_fault:
        text = _("The cost can fall for ever: nothing limits how much {ingredients} is fed, at a price below 0.")
        columns = found.at_fault
    else:
        text = _("The cost can fall for ever: nothing limits how much of {ingredients} is fed together.")
        columns = found.growing
    names = [f"{built.ingredients[j].name} ({notation().write_short(float(built.price_per_t[j]))})" for j in columns]
    return text.format(ingredients=", ".join(names)) + " " + _("Set a maximum, or correct the price.")
