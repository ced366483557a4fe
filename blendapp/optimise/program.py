"""A linear program whose rows know which limit they serve. Rows and columns only: nothing here knows feed."""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]


@dataclass(frozen=True)
class Row:
    """One limit: minimum <= (numerator . x) / (divisor . x or 1) <= maximum.

    numerator: shape (n,). divisor: shape (n,), or None for a plain right-hand side; where given, the bound r
    multiplies amounts and the row is (numerator - r divisor) . x >= 0 (or <= 0), exact wherever divisor . x >= 0.
    minimum, maximum: None where open, in units of the quotient (displayed units are converted before and after).
    limit: index of the limit that the row serves, None for a balance (the sum of the mix). One limit is served by one
    row, one Bound, one Count or one least amount, so that it has one value.
    """

    numerator: Array
    minimum: float | None
    maximum: float | None
    divisor: Array | None = None
    limit: int | None = None


@dataclass(frozen=True)
class Bound:
    """A limit that is a bound of one column: minimum <= x[column] <= maximum; limit as in Row."""

    column: int
    minimum: float | None
    maximum: float | None
    limit: int


@dataclass(frozen=True)
class Count:
    """At most `most` of the columns may be above zero; limit as in Row."""

    columns: tuple[int, ...]
    most: int
    limit: int


@dataclass(frozen=True)
class Program:
    """Minimise cost . x subject to rows, bounds and x >= lower.

    cost, lower, upper: shape (n,); upper may be inf. The columns' own lower and upper (0 and 1 of a mix, 0 and inf
    of a ration) belong to no limit; bounds holds those that do, several per column allowed.
    whole: columns that must be whole numbers. least_if_used: shape (n,), 0 where there is none, else x is 0 or
    at least that; least_limit: index of the limit behind each, -1 where none. counts: limits on how many columns
    may be above zero. names: for messages of failed checks only.
    """

    cost: Array
    lower: Array
    upper: Array
    rows: tuple[Row, ...]
    bounds: tuple[Bound, ...] = ()
    whole: NDArray[np.bool_] | None = None
    least_if_used: Array | None = None
    least_limit: NDArray[np.int64] | None = None
    counts: tuple[Count, ...] = ()
    names: tuple[str, ...] = field(default=())

    @property
    def size(self) -> int:
        """Count of columns."""
        return int(self.cost.shape[0])

    @property
    def integral(self) -> bool:
        """Whether the program needs a mixed-integer solve."""
        return bool(
            self.counts
            or (self.whole is not None and self.whole.any())
            or (self.least_if_used is not None and (self.least_if_used > 0).any())
        )
