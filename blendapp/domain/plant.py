"""What the mill weighs and mixes with, and what it keeps where."""

from __future__ import annotations

import datetime
from dataclasses import dataclass


@dataclass(frozen=True)
class Site:
    id: int
    name: str


@dataclass(frozen=True)
class Supplier:
    id: int
    name: str
    note: str = ""


@dataclass(frozen=True)
class Span:
    """What can be given of a material in one load: multiples of step_kg, between least_kg and greatest_kg."""

    step_kg: float
    least_kg: float | None = None
    greatest_kg: float | None = None


@dataclass(frozen=True)
class Scale:
    """A scale shows multiples of step_kg, between least_kg and greatest_kg; a liquid meter doses multiples of step_l.

    Exactly one of step_kg and step_l is set; least_l and greatest_l bound what a meter doses.
    tolerance_percent: None is 2 %, and 1 % for a hand-add or a medicated line.
    """

    id: int
    name: str
    step_kg: float | None
    least_kg: float | None = None
    greatest_kg: float | None = None
    tolerance_percent: float | None = None
    hand_add: bool = False
    site_id: int | None = None
    step_l: float | None = None
    least_l: float | None = None
    greatest_l: float | None = None

    @property
    def by_volume(self) -> bool:
        return self.step_l is not None

    def span(self, density_kg_per_l: float | None) -> Span | None:
        """What it can give of a material; None for a meter where the density is not known."""
        if self.step_l is None:
            return None if self.step_kg is None else Span(self.step_kg, self.least_kg, self.greatest_kg)
        if density_kg_per_l is None:
            return None
        least = None if self.least_l is None else self.least_l * density_kg_per_l
        greatest = None if self.greatest_l is None else self.greatest_l * density_kg_per_l
        return Span(self.step_l * density_kg_per_l, least, greatest)


@dataclass(frozen=True)
class Mixer:
    id: int
    name: str
    least_kg: float | None = None
    greatest_kg: float | None = None
    site_id: int | None = None


@dataclass(frozen=True)
class Bin:
    """A place that holds an ingredient, or one lot of it; an ingredient may stand in several."""

    id: int
    name: str
    ingredient_id: int | None = None
    lot_id: int | None = None
    site_id: int | None = None


@dataclass(frozen=True)
class Lot:
    """One delivery or sample of an ingredient. price_list_id: the list of analyses that brought it, if one did.

    dry_matter_percent: of the lot as fed, None if unknown.
    """

    id: int
    ingredient_id: int
    name: str
    received: datetime.date | None = None
    mass_kg: float | None = None
    supplier_id: int | None = None
    note: str = ""
    price_list_id: int | None = None
    dry_matter_percent: float | None = None


@dataclass(frozen=True)
class LotValue:
    """One analysis of one lot; unit and basis as in ingredients.Value."""

    id: int
    lot_id: int
    nutrient_id: int
    amount: float
    unit: str
    basis: str = "as fed"
    source: str = ""
    date: datetime.date | None = None
