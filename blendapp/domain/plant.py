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
class Scale:
    """A scale: it shows multiples of step_kg, between least_kg and greatest_kg.

    tolerance_percent: None is 2 %, and 1 % for a hand-add or a medicated line.
    """

    id: int
    name: str
    step_kg: float
    least_kg: float | None = None
    greatest_kg: float | None = None
    tolerance_percent: float | None = None
    hand_add: bool = False
    site_id: int | None = None


@dataclass(frozen=True)
class Mixer:
    id: int
    name: str
    least_kg: float | None = None
    greatest_kg: float | None = None
    site_id: int | None = None


@dataclass(frozen=True)
class Bin:
    id: int
    name: str
    ingredient_id: int | None = None
    lot_id: int | None = None
    site_id: int | None = None


@dataclass(frozen=True)
class Lot:
    """One delivery of an ingredient."""

    id: int
    ingredient_id: int
    name: str
    received: datetime.date | None = None
    mass_kg: float | None = None
    supplier_id: int | None = None
    note: str = ""


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
