"""The independent solver (GLPK, not HiGHS): a program's status and optimum from the program as stated."""

from __future__ import annotations

import swiglpk as glpk

from blendapp.optimise.program import Program


def optimum(program: Program) -> tuple[str, float | None]:
    """("optimal", cost), ("infeasible", None) or ("unbounded", None), by the simplex and then the exact simplex."""
    glpk.glp_term_out(glpk.GLP_OFF)
    problem = glpk.glp_create_prob()
    try:
        n = program.size
        glpk.glp_add_cols(problem, n)
        for j in range(n):
            low, high = float(program.lower[j]), float(program.upper[j])
            for bound in program.bounds:
                if bound.column == j:
                    low = low if bound.minimum is None else max(low, bound.minimum)
                    high = high if bound.maximum is None else min(high, bound.maximum)
            if low > high + 1e-12 * abs(high):
                return "infeasible", None
            _set(glpk.glp_set_col_bnds, problem, j + 1, low, max(low, high))
            glpk.glp_set_obj_coef(problem, j + 1, float(program.cost[j]))
        for row in program.rows:
            for side, end in (("low", row.minimum), ("high", row.maximum)):
                if end is None:
                    continue
                coefficients = row.numerator - (0.0 if row.divisor is None else end * row.divisor)
                rhs = end if row.divisor is None else 0.0
                size = max(abs(float(v)) for v in coefficients) or 1.0
                i = glpk.glp_add_rows(problem, 1)
                used = [j for j in range(n) if coefficients[j] != 0.0]
                index = glpk.intArray(n + 1)
                value = glpk.doubleArray(n + 1)
                for k, j in enumerate(used):
                    index[k + 1] = j + 1
                    value[k + 1] = float(coefficients[j]) / size
                glpk.glp_set_mat_row(problem, i, len(used), index, value)
                if side == "low":
                    glpk.glp_set_row_bnds(problem, i, glpk.GLP_LO, rhs / size, 0.0)
                else:
                    glpk.glp_set_row_bnds(problem, i, glpk.GLP_UP, 0.0, rhs / size)
        parameters = glpk.glp_smcp()
        glpk.glp_init_smcp(parameters)
        parameters.msg_lev = glpk.GLP_MSG_OFF
        parameters.tol_bnd = 1e-9
        parameters.tol_dj = 1e-9
        glpk.glp_std_basis(problem)
        glpk.glp_simplex(problem, parameters)
        status = glpk.glp_get_status(problem)
        if status == glpk.GLP_OPT:
            return "optimal", float(glpk.glp_get_obj_val(problem))
        return ("unbounded" if status == glpk.GLP_UNBND else "infeasible"), None
    finally:
        glpk.glp_delete_prob(problem)


def _set(setter: object, problem: object, at: int, low: float, high: float) -> None:
    inf = float("inf")
    if low == -inf and high == inf:
        kind = glpk.GLP_FR
    elif high == inf:
        kind = glpk.GLP_LO
    elif low == -inf:
        kind = glpk.GLP_UP
    else:
        kind = glpk.GLP_FX if low == high else glpk.GLP_DB
    setter(problem, at, kind, 0.0 if low == -inf else low, 0.0 if high == inf else high)  # type: ignore[operator]
