"""What became of every row of a list of analyses."""

from __future__ import annotations

import datetime
from dataclasses import dataclass

from blendapp.domain.ingredients import Basis
from blendapp.domain.list_rows import Fate, ListReading, ListRow


@dataclass(frozen=True)
class ReadValue:
    """One analysis of one sample. amount: in `unit`, per kg of `basis`; entered: the cell as it stands.

    nutrient_id None, nutrient "Dry matter": of the sample as fed, in %. old: the value in use, in the same unit and
    basis, None where unknown.
    """

    nutrient_id: int | None
    nutrient: str
    amount: float
    unit: str
    basis: Basis
    entered: str = ""
    old: float | None = None


@dataclass(frozen=True)
class CompositionRow(ListRow):
    """One row of a list of analyses: one sample. sample: what the laboratory calls it, "" if nothing."""

    sample: str = ""
    sampled: datetime.date | None = None
    values: tuple[ReadValue, ...] = ()


@dataclass(frozen=True)
class CompositionReading(ListReading):
    """A list of analyses read whole."""

    rows: tuple[CompositionRow, ...]

    @property
    def accepted(self) -> list[CompositionRow]:
        return [row for row in self.rows if row.fate is Fate.ACCEPTED]
