"""What a solve hands out: a frozen snapshot. Nobody reads a live solver."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal, NamedTuple

from blendapp.optimise.arrays import Arrays
from blendapp.optimise.face import Face
from blendapp.optimise.program import Array, Program

Status = Literal["optimal", "infeasible", "unbounded", "stopped"]
Side = Literal["minimum", "maximum"]


class LimitState(NamedTuple):
    """How one limit stands at the answer.

    value: numerator . x / divisor . x, or the column's x; None where divisor . x is 0; for a count, how many of its
    columns are in use. binding: the side at whose bound the value stands, whatever its price. unique: whether the
    shadow price is a single figure; None for a count. price: d(optimum)/d(bound) per unit of the value: >= 0 at a
    minimum, <= 0 at a maximum, either sign where minimum = maximum, 0 where not binding, None where not unique.
    """

    value: float | None
    binding: Side | None
    unique: bool | None
    price: float | None


@dataclass(frozen=True, eq=False)
class Solution:
    """The answer to a program.

    x: shape (n,), None without an answer; objective = cost . x. gap: (objective - dual bound) over the money that
    flows, sum |cost_j x_j|. Prices are d(optimum)/d(bound): minimum_price (>= 0) and maximum_price (<= 0), shape
    (rows,), per unit of a row's right-hand side (for a row with a divisor, of (numerator - bound divisor) . x);
    lower_price (>= 0) and upper_price (<= 0), shape (n,), of the tightest column bounds. An equality has its price,
    of either sign, in minimum_price.
    limits: state of each limit by its index. program: what was solved. priced: the linear program that the prices
    belong to: the program itself, or, of a mixed-integer one, the linear program with the choice fixed (given is
    then true).
    arrays, face, duals: the solver arrays of priced, the face on which x lies and the prices of the arrays' rows
    (shape (m,), >= 0 for inequalities), for sensitivity. seconds: time it took.
    """

    status: Status
    x: Array | None = None
    objective: float | None = None
    gap: float | None = None
    minimum_price: Array | None = None
    maximum_price: Array | None = None
    lower_price: Array | None = None
    upper_price: Array | None = None
    limits: Mapping[int, LimitState] = field(default_factory=dict)
    program: Program | None = None
    priced: Program | None = None
    given: bool = False
    arrays: Arrays | None = None
    face: Face | None = None
    duals: Array | None = None
    seconds: float = 0.0
