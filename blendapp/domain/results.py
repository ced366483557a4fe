"""What formulating a formula comes to: a frozen snapshot that screens, pages and JSON all read."""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from enum import StrEnum

from blendapp.domain.formulas import Amounts, LimitKind


class Status(StrEnum):
    OPTIMAL = "optimal"
    CONFLICT = "conflict"
    UNBOUNDED = "unbounded"
    INCOMPLETE = "incomplete"
    STOPPED = "stopped"


class Side(StrEnum):
    """The side of a limit that holds a mix."""

    MINIMUM = "minimum"
    MAXIMUM = "maximum"


@dataclass(frozen=True)
class IngredientResult:
    """An admitted, priced ingredient.

    amount: fraction of the mix, or kg as fed per day; None without an answer. price_per_t: money per tonne as fed.
    cost: money per tonne of mix, or per day. price_range: prices per tonne over which the amounts stay optimal, an
    end None where it is open; the whole None where not worked out. break_even_price: per tonne. near_optimal: least
    and greatest amount over all mixes within the tolerance.
    """

    ingredient_id: int
    name: str
    price_per_t: float
    amount: float | None = None
    cost: float | None = None
    price_range: tuple[float | None, float | None] | None = None
    break_even_price: float | None = None
    near_optimal: tuple[float, float] | None = None


@dataclass(frozen=True)
class LimitResult:
    """One limit of the formula as displayed: bounds and value in `unit`; prices in money per cost_per and unit.

    index: its place among the limits of the formula. value: None without an answer, or where a divisor is 0.
    binding: the side whose bound the value stands at. Prices are None where they do not exist or are not unique;
    see files on shadow prices: tighten_cost and relax_saving are never negative, raise_cost and lower_cost are signed.
    room: least and greatest value that all other limits leave, None where not worked out.
    """

    index: int
    limit_id: int
    kind: LimitKind
    name: str
    per: str | None
    basis: str | None
    unit: str
    minimum: float | None
    maximum: float | None
    value: float | None = None
    binding: Side | None = None
    shadow_price_unique: bool | None = None
    tighten_cost: float | None = None
    tighten_holds_to: float | None = None
    relax_saving: float | None = None
    relax_holds_to: float | None = None
    raise_cost: float | None = None
    lower_cost: float | None = None
    room: tuple[float | None, float | None] | None = None


@dataclass(frozen=True)
class NutrientResult:
    """A nutrient of the mix, per kg as fed in its own unit (blend) or in its own per-day unit (ration).

    value: None without an answer or if no ingredient of the mix has a value. missing: names of the ingredients in
    the mix without a value, which count as 0 in `value`. limited: whether a limit of kind nutrient is about it.
    """

    nutrient_id: int
    name: str
    unit: str
    value: float | None
    missing: tuple[str, ...]
    limited: bool


@dataclass(frozen=True)
class UnknownValue:
    """An admitted, priced ingredient without a value of a limited nutrient; unsafe: 0 in its place may do harm."""

    ingredient: str
    nutrient: str
    unsafe: bool


@dataclass(frozen=True)
class Check:
    """What the check without the solver found. largest_violation: in fractions or kg per day of scaled rows;
    duality_gap: relative to the cost. Both None where there is no answer to check."""

    largest_violation: float | None = None
    duality_gap: float | None = None


@dataclass(frozen=True)
class Reach:
    """What one side of a limit could reach alone within the ingredient limits; as displayed."""

    limit: int
    bound: Side
    asked: float
    reachable: float | None


@dataclass(frozen=True)
class Repair:
    """The least change of one bound that alone makes the formula possible; to None where none does."""

    limit: int
    bound: Side
    frm: float
    to: float | None


@dataclass(frozen=True)
class Conflict:
    """Why no mix exists. members: indices of the limits of one irreducible set. repairs: one for each member.
    total: bounds that, all changed together, make a mix possible with the least sum of changes, each weighed by its
    own size."""

    reach: tuple[Reach, ...]
    members: tuple[int, ...]
    repairs: tuple[Repair, ...]
    total: tuple[Repair, ...] = ()


@dataclass(frozen=True)
class Result:
    """The answer to one formula on one day.

    cost: money per tonne of mix (blend) or per head and day (ration). cause: why there is no answer, in a sentence.
    given_ingredients: whether shadow prices hold for the chosen ingredients only. unpriced: admitted ingredients
    without a price in force. general_caution stands first in cautions. tie: what can be exchanged at the same cost, in
    a sentence. proof: the sentence of an exact proof, where one was asked for. by_formula: names of the ingredients
    without a price or with unknown values that another formula makes, which can give them.
    """

    formula_id: int
    formula: str
    amounts: Amounts
    status: Status
    currency: str
    on: datetime.date
    ingredients: tuple[IngredientResult, ...]
    limits: tuple[LimitResult, ...]
    nutrients: tuple[NutrientResult, ...]
    unpriced: tuple[str, ...]
    unknown: tuple[UnknownValue, ...]
    cautions: tuple[str, ...]
    cause: str | None = None
    cost: float | None = None
    gap: float | None = None
    given_ingredients: bool = False
    check: Check = Check()
    conflict: Conflict | None = None
    tie: str | None = None
    proof: str | None = None
    by_formula: tuple[str, ...] = ()

    @property
    def cost_per(self) -> str:
        return "t" if self.amounts is Amounts.BLEND else "day"

    @property
    def has_answer(self) -> bool:
        return self.cost is not None

    @property
    def mix(self) -> list[IngredientResult]:
        """The ingredients in the mix, largest first."""
        used = [i for i in self.ingredients if i.amount]
        return sorted(used, key=lambda i: (-(i.amount or 0.0), i.name))
