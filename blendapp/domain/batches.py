"""A batch as the mill weighs it."""

from __future__ import annotations

import datetime
from dataclasses import dataclass

from blendapp.domain.notation import notation
from blendapp.domain.results import LimitResult, NutrientResult
from blendapp.domain.wording import _


@dataclass(frozen=True)
class BatchLine:
    """One line of a batch sheet. share_kg: the exact share of the batch; target_kg: a multiple of step_kg.

    scale: its name, "" in a mill without scales. drug, drug_level, drug_species, withdrawal: as entered, of a
    medicated line. tolerance_kg: how far target_kg may lie from share_kg, None in a batch that did not keep it. fixed:
    whether a person set target_kg.
    """

    ingredient_id: int
    ingredient: str
    scale: str
    step_kg: float
    share_kg: float
    target_kg: float
    hand_add: bool = False
    drug: str = ""
    drug_level: str = ""
    drug_species: str = ""
    withdrawal: str = ""
    tolerance_kg: float | None = None
    fixed: bool = False


@dataclass(frozen=True)
class Batch:
    """The whole batches of one order: every figure describes one of `batches` equal ones, as weighed.

    limits: from the target kilograms; broken: indices of those that do not hold. cause: why no sheet can be made, or
    None. residue_kg: target total less batch_kg. number: of the sheet once it was printed, None before. unproven: the
    first aim ("total", "limits", "deviation" or "cost", in this order) in which a better batch may exist, "" where
    none does; gap: by how much it could at most be better (kg, limits, sum of relative deviations, money), else None.
    draft: whether the formula stood otherwise than approved, or never was; approved_by: else name, capacity and day.
    """

    formula_id: int
    formula: str
    version: str
    mill: str
    currency: str
    made: datetime.date
    order_kg: float
    batches: int
    batch_kg: float
    lines: tuple[BatchLine, ...]
    limits: tuple[LimitResult, ...]
    nutrients: tuple[NutrientResult, ...]
    broken: tuple[int, ...]
    cautions: tuple[str, ...]
    cause: str | None = None
    number: int | None = None
    copy: int = 0
    accepted_reason: str = ""
    accepted_by: str = ""
    unproven: str = ""
    gap: float | None = None
    draft: bool = True
    approved_by: str = ""

    @property
    def total_kg(self) -> float:
        return round(sum(line.target_kg for line in self.lines), 9)

    @property
    def residue_kg(self) -> float:
        return round(self.total_kg - self.batch_kg, 9)

    @property
    def proven(self) -> bool:
        """Whether no batch of the same lines and scales is better in any aim."""
        return not self.unproven

    @property
    def deviation(self) -> float:
        """Sum over the lines of |target - share|, each divided by its tolerance."""
        return sum(abs(line.target_kg - line.share_kg) / line.tolerance_kg for line in self.lines if line.tolerance_kg)

    @property
    def fit_to_mix(self) -> bool:
        """Whether it may be mixed: nothing is broken, or what is was accepted by name and with a reason."""
        return not self.broken or bool(self.accepted_reason and self.accepted_by)


def proof_words(batch: Batch) -> str:
    """How much better another batch could at most be where time was up before it was known; "" if it is the best."""
    short = notation().write_short
    if batch.proven:
        return ""
    if batch.unproven == "total":
        text = _("Time was up before it was proven best: its total may come up to {kg} kg nearer.")
        return text.format(kg=short(batch.gap, 3))
    if batch.unproven == "limits":
        text = _("Time was up before it was proven best: up to {count} fewer limits may be broken.")
        return text.format(count=short(batch.gap, 0))
    if batch.unproven == "deviation":
        return _("Time was up before it was proven best: its lines may keep closer to their shares.")
    text = _("Time was up before it was proven best: it may be up to {money} {currency} cheaper.")
    return text.format(money=short(batch.gap, 2), currency=batch.currency)
