"""What a person asks of a batch, and the batch that comes of it. No Qt, so that a thread can work it out."""

from __future__ import annotations

import datetime
from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from blendapp.domain.batches import Batch, CleanOut
from blendapp.domain.library import Library
from blendapp.domain.results import Result
from blendapp.services.approved import approved_batch
from blendapp.services.batch import make_batch


@dataclass(frozen=True)
class AskedBatch:
    """approved: in the proportions of the approved version, whatever the formula has become since. mixer_id: None is
    the one that takes the order. fixed: kg of one batch, rework: percent of it, by ingredient. previous_feed: None is
    what the last sheet of the mixer says. paper, mass_unit: of the pages."""

    formula_id: int
    order_kg: float
    on: datetime.date
    paper: str
    mass_unit: str
    approved: bool = False
    mixer_id: int | None = None
    fixed: Mapping[int, float] = field(default_factory=dict)
    rework: Mapping[int, float] = field(default_factory=dict)
    previous_feed: str | None = None
    clean_out: CleanOut | None = None

    def make(self, library: Library, result: Result | None) -> Batch:
        """The batch; result: today's answer, not needed for what was approved. Raises as services.batch does."""
        if self.approved:
            made = approved_batch(
                library, self.formula_id, self.order_kg, self.on, fixed=self.fixed, rework=self.rework,
                mixer_id=self.mixer_id, previous_feed=self.previous_feed, clean_out=self.clean_out)
        else:
            made = make_batch(
                library, self.formula_id, self.order_kg, self.on, result=result, fixed=self.fixed, rework=self.rework,
                mixer_id=self.mixer_id, previous_feed=self.previous_feed, clean_out=self.clean_out)
        return replace(made, paper=self.paper, mass_unit=self.mass_unit)
