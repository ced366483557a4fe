"""Made-up mills, formulated by the program and by GLPK from the same records through a second feed arithmetic."""

from __future__ import annotations

from typing import Any

import pytest
import swiglpk as glpk
from hypothesis import event, given, settings
from hypothesis import strategies as st

from blendapp.domain.formulas import Admits, Amounts, Formula, Limit, LimitBasis, LimitKind, Subject, SubjectKind
from blendapp.domain.ingredients import Basis, Ingredient, Tag, Value
from blendapp.domain.library import Library
from blendapp.domain.mills import MillInfo
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.quotes import Quote
from blendapp.domain.results import Result, Status
from blendapp.services.formulate import formulate
from tests.mills import TODAY
from tests.outside import plain_feed

MASS = ["%", "g/kg", "mg/kg", "ug/kg", "ppm", "ppb", "g/t", "g/short ton", "mg/lb"]
ENERGY = ["MJ/kg", "kJ/kg", "kcal/kg", "kcal/lb", "Mcal/kg"]
FAMILIES = [MASS, ENERGY, ["IU/kg", "IU/lb"], ["mEq/kg"], [""]]
DAYS = {0: ["kg/day", "g/day", "mg/day", ""], 1: ["MJ/day", "kcal/day", "Mcal/day", ""], 2: ["IU/day", ""],
        3: ["mEq/day", ""], 4: ["/day", ""]}


def digits(draw: st.DrawFn, low: int, high: int) -> float:
    """A number of three digits between two whole numbers, as tables have."""
    return draw(st.integers(low * 100, high * 100)) / 100


@st.composite
def mills(draw: st.DrawFn) -> Library:
    """A mill with a formula whose limits lie about those of a mix that exists, some a little beyond what it reaches."""
    records: dict[str, list[Any]] = {"mill": [MillInfo()], "nutrient": [], "ingredient": [], "value": [], "quote": [],
                                     "formula": [], "limit": []}
    families = draw(st.lists(st.integers(0, 4), min_size=1, max_size=4))
    for number, family in enumerate(families, 1):
        unit = draw(st.sampled_from(FAMILIES[family]))
        records["nutrient"].append(Nutrient(number, f"N{number}", unit, never_negative=family != 3))
    for number in range(1, draw(st.integers(2, 7)) + 1):
        made = Ingredient(
            number, f"I{number}", draw(st.sampled_from(["", "Cereals", "Meals"])),
            draw(st.none() | st.integers(100, 1000).map(lambda n: n / 10)),
            draw(st.sampled_from(Basis)), tags=draw(st.sampled_from([(), (), (), (Tag.ONLY_WHEN_LISTED,)])),
        )
        records["ingredient"].append(made)
        if draw(st.integers(0, 7)):
            price = digits(draw, 1, 60) if draw(st.integers(0, 9)) else digits(draw, -5, 0)
            per = draw(st.sampled_from(["t", "kg", "100 kg", "lb", "cwt", "short ton", "long ton", "bu"]))
            records["quote"].append(Quote(number, number, price, per, 56.0 if per == "bu" else None))
        for nutrient, family in zip(records["nutrient"], families, strict=True):
            if draw(st.integers(0, 8)):
                amount = digits(draw, -20 if family == 3 else 0, 90)
                unit = draw(st.sampled_from([nutrient.unit, nutrient.unit, *FAMILIES[family]]))
                size = plain_feed.WORTH[nutrient.unit] / plain_feed.WORTH[unit]
                value = Value(len(records["value"]) + 1, number, nutrient.id, amount * size, unit, made.basis)
                records["value"].append(value)
    amounts, admits = draw(st.sampled_from(Amounts)), draw(st.sampled_from([Admits.ALL, Admits.ALL, Admits.LISTED]))
    records["formula"].append(Formula(1, "Feed", amounts, admits=admits))
    library = Library.of(records)
    weights = [draw(st.integers(0, 10)) for _i in records["ingredient"]]
    weights[draw(st.integers(0, len(weights) - 1))] += 1
    whole = sum(weights) if amounts is Amounts.BLEND else 1
    mix = {i.id: w / whole for i, w in zip(records["ingredient"], weights, strict=True)}
    for number in range(1, draw(st.integers(1, 8)) + 1):
        limit = draw(limits(library, number, families, mix))
        records["limit"].append(limit)
    return Library.of(records)


@st.composite
def limits(draw: st.DrawFn, library: Library, number: int, families: list[int], mix: dict[int, float]) -> Limit:
    """A limit of any linear kind, with bounds about the value that a mix has."""
    formula = library.formula(1)
    blend = formula.amounts is Amounts.BLEND
    kind = draw(st.sampled_from([LimitKind.NUTRIENT, LimitKind.NUTRIENT, LimitKind.NUTRIENT, LimitKind.INGREDIENT,
                                 LimitKind.GROUP, LimitKind.RATIO]))
    subject, per, unit, basis, stated = Subject.ingredients(1), None, "", LimitBasis.AS_FED, None
    ids = st.sampled_from([i.id for i in library.ingredients])
    if kind is LimitKind.NUTRIENT:
        at = draw(st.integers(-1, len(families) - 1))
        family = 0 if at < 0 else families[at]
        subject = Subject.nutrient(at + 1) if at >= 0 else Subject(
            draw(st.sampled_from([SubjectKind.DRY_MATTER, SubjectKind.MOISTURE])))
        bases = [LimitBasis.AS_FED] if at < 0 else [LimitBasis.AS_FED, LimitBasis.DRY_MATTER, LimitBasis.AT_DRY_MATTER]
        basis = draw(st.sampled_from(bases if blend else [*bases, LimitBasis.PER_DAY, LimitBasis.PER_DAY]))
        unit = draw(st.sampled_from(DAYS[family] if basis is LimitBasis.PER_DAY else ["", *FAMILIES[family]]))
        stated = draw(st.sampled_from([88.0, 90.0, 100.0])) if basis is LimitBasis.AT_DRY_MATTER else None
    elif kind is LimitKind.RATIO:
        if draw(st.booleans()):
            subject = Subject.nutrient(draw(st.integers(1, len(families))))
            positive = [n + 1 for n, family in enumerate(families) if family != 3]
            per = Subject.nutrient(draw(st.sampled_from(positive))) if positive else Subject(SubjectKind.DRY_MATTER)
        else:
            subject = Subject.ingredients(*draw(st.sets(ids, min_size=1, max_size=3)))
            per = Subject.ingredients(*draw(st.sets(ids, min_size=1, max_size=3)))
    else:
        if kind is LimitKind.GROUP:
            subject = draw(st.one_of(
                st.sampled_from(["Cereals", "Meals"]).map(Subject.of_class),
                st.sets(ids, min_size=1, max_size=4).map(lambda found: Subject.ingredients(*found)),
            ))
        else:
            subject = Subject.ingredients(draw(ids))
        own = ["", "%", "kg/t", "g/t", "lb/short ton"] if blend else ["", "kg/day", "g/day", "lb/day",
                                                                      "% of dry matter"]
        unit = draw(st.sampled_from(own))
    limit = Limit(number, 1, kind, subject, per, None, None, unit, basis, stated)
    here = plain_feed.value(library, formula, limit, mix)
    if here is None or not draw(st.integers(0, 9)):
        return limit
    low = high = None
    # Mostly on the far side of the mix by a little to a lot; now and then a bound that the mix itself breaks.
    if draw(st.booleans()):
        low = float(f"{here - abs(here) * draw(st.sampled_from([0.5, 0.1, 0.01, 0.0, -0.02])):.4g}")
    if low is None or draw(st.integers(0, 3)) == 0:
        high = float(f"{here + abs(here) * draw(st.sampled_from([0.5, 0.1, 0.01, 0.0, -0.02])):.4g}")
    if low is not None and high is not None and low > high:
        low = high
    if kind is not LimitKind.NUTRIENT and low is not None and low < 0:
        low = None
    return Limit(number, 1, kind, subject, per, low, high, unit, basis, stated)


def by_glpk(library: Library, ingredients: list[Any], free: set[int]) -> tuple[str, float | None]:
    """("optimal", cost per kg of mix or per day), ("infeasible", None) or ("unbounded", None). free: cost nothing."""
    formula = library.formula(1)
    n = len(ingredients)
    if n == 0:
        return "infeasible", None
    rows: list[tuple[list[float], float, bool]] = []
    for limit in library.limits(1):
        top, bottom, factor = plain_feed.quotient(library, formula, limit, ingredients)
        for bound, at_least in ((limit.minimum, True), (limit.maximum, False)):
            if bound is not None:
                r = bound * factor
                below = [0.0 if bottom is None else bottom[i.id] for i in ingredients]
                left = [top[i.id] - r * b for i, b in zip(ingredients, below, strict=True)]
                left = [0.0 if abs(v) < 1e-13 * (abs(top[i.id]) + abs(r * b)) else v
                        for v, i, b in zip(left, ingredients, below, strict=True)]
                rows.append((left, r if bottom is None else 0.0, at_least))
    glpk.glp_term_out(glpk.GLP_OFF)
    problem = glpk.glp_create_prob()
    try:
        glpk.glp_add_cols(problem, n)
        for j, ingredient in enumerate(ingredients, 1):
            glpk.glp_set_col_bnds(problem, j, glpk.GLP_LO, 0.0, 0.0)
            price = 0.0 if ingredient.id in free else plain_feed.price_per_kg(library, ingredient.id)
            assert price is not None
            glpk.glp_set_obj_coef(problem, j, price)
        if formula.amounts is Amounts.BLEND:
            _add(problem, [1.0] * n, 1.0, glpk.GLP_FX)
        for left, right, at_least in rows:
            _add(problem, left, right, glpk.GLP_LO if at_least else glpk.GLP_UP)
        parameters = glpk.glp_smcp()
        glpk.glp_init_smcp(parameters)
        parameters.msg_lev = glpk.GLP_MSG_OFF
        parameters.tol_bnd = parameters.tol_dj = 1e-9
        glpk.glp_std_basis(problem)
        glpk.glp_simplex(problem, parameters)
        status = glpk.glp_get_status(problem)
        if status == glpk.GLP_OPT:
            return "optimal", float(glpk.glp_get_obj_val(problem))
        return ("unbounded" if status == glpk.GLP_UNBND else "infeasible"), None
    finally:
        glpk.glp_delete_prob(problem)


def _add(problem: Any, left: list[float], right: float, kind: int) -> None:
    size = max(map(abs, left)) or 1.0
    row = glpk.glp_add_rows(problem, 1)
    index, value = glpk.intArray(len(left) + 1), glpk.doubleArray(len(left) + 1)
    used = [(j, v / size) for j, v in enumerate(left, 1) if v]
    for k, (j, v) in enumerate(used, 1):
        index[k], value[k] = j, v
    glpk.glp_set_mat_row(problem, row, len(used), index, value)
    glpk.glp_set_row_bnds(problem, row, kind, right / size, right / size)


def expected(library: Library) -> tuple[Status, float | None]:
    """Status and cost per kg (blend) or per day, by GLPK: the unpriced left out, and tried where nothing else helps."""
    admitted = plain_feed.admitted(library, library.formula(1))
    priced = [i for i in admitted if plain_feed.price_per_kg(library, i.id) is not None]
    status, cost = by_glpk(library, priced, set())
    if status == "infeasible" and len(priced) < len(admitted):
        unpriced = {i.id for i in admitted} - {i.id for i in priced}
        if by_glpk(library, admitted, unpriced)[0] != "infeasible":
            return Status.INCOMPLETE, None
    return {"optimal": Status.OPTIMAL, "infeasible": Status.CONFLICT, "unbounded": Status.UNBOUNDED}[status], cost


def agree(library: Library, result: Result) -> None:
    status, cost = expected(library)
    assert result.status is status
    if cost is None:
        assert result.cost is None
        return
    scale = 1000.0 if library.formula(1).amounts is Amounts.BLEND else 1.0
    assert result.cost is not None
    flow = sum(abs(i.cost or 0.0) for i in result.ingredients)
    assert result.cost == pytest.approx(scale * cost, rel=1e-7, abs=1e-7 * flow + 1e-12)


@settings(max_examples=400, deadline=None)
@given(mills())
def test_status_and_cost_of_a_made_up_mill_are_those_that_glpk_finds(library: Library) -> None:
    result = formulate(library, 1, TODAY)
    event(f"{library.formula(1).amounts} {result.status}")
    agree(library, result)


@settings(max_examples=100, deadline=None)
@given(mills())
def test_every_limit_of_a_made_up_answer_holds_by_the_second_arithmetic(library: Library) -> None:
    result = formulate(library, 1, TODAY)
    if result.cost is None:
        return
    formula = library.formula(1)
    amounts = {i.ingredient_id: i.amount or 0.0 for i in result.ingredients}
    for limit, one in zip(library.limits(1), result.limits, strict=True):
        found = plain_feed.value(library, formula, limit, amounts)
        if one.value is None or found is None:
            continue
        near = 1e-6 * max(abs(found), abs(limit.minimum or 0), abs(limit.maximum or 0)) + 1e-9
        assert one.value == pytest.approx(found, abs=near)
        assert limit.minimum is None or found >= limit.minimum - near
        assert limit.maximum is None or found <= limit.maximum + near
