"""What became of every row of a list of analyses, and the means of its samples."""

from __future__ import annotations

import datetime
import math
from collections.abc import Iterable
from dataclasses import dataclass

from blendapp.domain import units
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

    @property
    def dry_matter_percent(self) -> float | None:
        """Dry matter of the sample as fed, None where it was not measured."""
        return next((one.amount for one in self.values if one.nutrient_id is None), None)


@dataclass(frozen=True)
class CompositionReading(ListReading):
    """A list of analyses read whole."""

    rows: tuple[CompositionRow, ...]

    @property
    def accepted(self) -> list[CompositionRow]:
        return [row for row in self.rows if row.fate is Fate.ACCEPTED]


@dataclass(frozen=True)
class SampleMean:
    """The mean of one nutrient over the samples of one ingredient, in the unit and on the basis of the first of them.

    nutrient_id: None is dry matter. n: count of samples; sd: standard deviation of the sample, over n - 1, None for one
    sample. sampled: the latest day among them, None where none has one.
    """

    ingredient_id: int
    nutrient_id: int | None
    amount: float
    unit: str
    basis: Basis
    n: int
    sd: float | None
    sampled: datetime.date | None


def sample_means(rows: Iterable[CompositionRow]) -> list[SampleMean]:
    """The means over rows, in the order in which they first appear; rows without an ingredient do not count.

    A value on the other basis than the first one is turned by the dry matter of its own sample, which it must have.
    """
    found: dict[tuple[int, int | None], list[tuple[CompositionRow, ReadValue]]] = {}
    for row in rows:
        if row.ingredient_id is not None:
            for value in row.values:
                found.setdefault((row.ingredient_id, value.nutrient_id), []).append((row, value))
    return [_mean(*key, of) for key, of in found.items()]


def _mean(ingredient_id: int, nutrient_id: int | None, of: list[tuple[CompositionRow, ReadValue]]) -> SampleMean:
    first = of[0][1]
    amounts = [_turned(row, value, first.unit, first.basis) for row, value in of]
    n = len(amounts)
    mean = _exact(math.fsum(amounts) / n)
    spread = math.sqrt(math.fsum((amount - mean) ** 2 for amount in amounts) / (n - 1)) if n > 1 else None
    days = [row.sampled for row, _value in of if row.sampled is not None]
    sd = None if spread is None else _exact(spread)
    return SampleMean(
        ingredient_id, nutrient_id, mean, first.unit, first.basis, n, sd, max(days, default=None)
    )


def _turned(row: CompositionRow, value: ReadValue, unit: str, basis: Basis) -> float:
    amount = value.amount if value.unit == unit else _exact(units.convert(value.amount, value.unit, unit))
    if value.basis is basis:
        return amount
    dry = row.dry_matter_percent
    if not dry:
        raise ValueError(f"{value.nutrient} of row {row.row} cannot be turned without its dry matter")
    return _exact(amount * dry / 100 if basis is Basis.AS_FED else amount * 100 / dry)


def _exact(amount: float) -> float:
    """Without the residue of floating point: a mean of 8.1 and 8.3 is 8.2."""
    return float(f"{amount:.12g}")
