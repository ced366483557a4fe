"""A batch as the mill weighs it."""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from enum import StrEnum

from blendapp.domain.notation import notation
from blendapp.domain.results import LimitResult, NutrientResult
from blendapp.domain.wording import _


class CleanOut(StrEnum):
    """What is done to the mixer between two feeds. Common practice; 21 CFR 225.65 and 225.165 name the three."""

    PHYSICAL = "physical"
    FLUSH = "flush"
    SEQUENCE = "sequence"
    NONE = "none needed"


class BatchPage(StrEnum):
    """The pages that are drawn from one batch."""

    SHEET = "sheet"
    MASTER = "master"
    BLANK = "blank"


@dataclass(frozen=True)
class Step:
    """One step of making the batch, as the operator reads it. minutes: None where it is not timed."""

    text: str
    minutes: float | None = None
    setting: str = ""


@dataclass(frozen=True)
class ToMake:
    """What must be made before a batch: so much of an ingredient, by the formula that makes it, for the whole order."""

    ingredient: str
    formula_id: int
    formula: str
    mass_kg: float


@dataclass(frozen=True)
class BatchLine:
    """One line of a batch sheet. share_kg: the exact share of the batch; target_kg: a multiple of step_kg.

    bins: where it stands, each with its lot if one is known. step_l, target_l: of a line that a liquid meter doses.
    rework: whether it was put in at a stated share. of_opened: the made ingredients in whose place it stands, in part.
    tags: its own and those of all that it is made of, so that a later batch knows what went through the mixer.
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
    bins: tuple[str, ...] = ()
    step_l: float | None = None
    target_l: float | None = None
    rework: bool = False
    of_opened: tuple[str, ...] = ()
    tags: tuple[str, ...] = ()


@dataclass(frozen=True)
class Batch:
    """The whole batches of one order: every figure describes one of `batches` equal ones, as weighed.

    limits: from the target kilograms; broken: indices of those that do not hold. cause: why no sheet can be made, or
    None. residue_kg: target total less batch_kg. number: of the sheet once it was printed, None before. unproven: the
    first aim ("total", "limits", "deviation" or "cost", in this order) in which a better batch may exist, "" where
    none does; gap: by how much it could at most be better (kg, limits, sum of relative deviations, money), else None.
    draft: whether the formula stood otherwise than approved, or never was; approved_by: else name, capacity and day.

    site, mixer: names, "" where none is known. steps: of making it, in order. to_make: for the whole order.
    previous_feed: what went through the mixer before, with its sheet, "" where not known; previous_number: of that
    sheet, None where a person said what it was, or nothing is known. clean_out: what was chosen, None to be filled in
    by hand; clean_out_reason: why one is needed, "" where nothing says so. yield_kg: of one batch, after loss_percent
    is lost and the dry matter of the mix is brought to product_dry_matter_percent; None where yield_unknown says why.
    mass_unit: in which the sheet shows masses, "kg" or "lb". place:
    which of the equal batches a sheet is for, from 1; 0 is all of them.
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
    animal: str = ""
    stage: str = ""
    site: str = ""
    mixer: str = ""
    mixer_id: int | None = None
    steps: tuple[Step, ...] = ()
    to_make: tuple[ToMake, ...] = ()
    previous_feed: str = ""
    clean_out: CleanOut | None = None
    clean_out_reason: str = ""
    loss_percent: float | None = None
    product_dry_matter_percent: float | None = None
    yield_kg: float | None = None
    yield_unknown: str = ""
    mass_unit: str = "kg"
    paper: str = "A4"
    place: int = 0
    previous_number: int | None = None

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
    def lacks_clean_out(self) -> bool:
        """Whether something says that the mixer must be cleaned out and nobody has said that it will be."""
        return bool(self.clean_out_reason) and self.clean_out in (None, CleanOut.NONE)

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
