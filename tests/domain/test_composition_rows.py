"""Means of samples, by hand."""

from __future__ import annotations

import datetime

import pytest

from blendapp.domain.composition_rows import CompositionRow, ReadValue, SampleMean, sample_means
from blendapp.domain.ingredients import Basis
from blendapp.domain.list_rows import Fate

FED, DRY = Basis.AS_FED, Basis.DRY_MATTER


def row(*values: ReadValue, ingredient_id: int | None = 1, day: int | None = None) -> CompositionRow:
    sampled = None if day is None else datetime.date(2026, 2, day)
    return CompositionRow("", 1, Fate.ACCEPTED, ingredient_id=ingredient_id, sampled=sampled, values=values)


def protein(amount: float, unit: str = "%", basis: Basis = FED) -> ReadValue:
    return ReadValue(1, "Crude protein", amount, unit, basis)


def dry(amount: float) -> ReadValue:
    return ReadValue(None, "Dry matter", amount, "%", FED)


def test_the_mean_and_the_standard_deviation_of_the_sample_are_those_worked_by_hand() -> None:
    # (2 + 4 + 4 + 4 + 5 + 5 + 7 + 9) / 8 = 5; squares 9 + 1 + 1 + 1 + 0 + 0 + 4 + 16 = 32; 32 / 7; root 2.13808993...
    rows = [row(protein(amount), day=day) for day, amount in enumerate((2, 4, 4, 4, 5, 5, 7, 9), start=1)]
    (mean,) = sample_means(rows)
    assert mean == SampleMean(1, 1, 5, "%", FED, 8, mean.sd, datetime.date(2026, 2, 8))
    assert mean.sd == pytest.approx(2.138089935299395, rel=1e-11)


def test_one_sample_has_no_standard_deviation_and_two_alike_have_one_of_0() -> None:
    assert sample_means([row(protein(8.3))]) == [SampleMean(1, 1, 8.3, "%", FED, 1, None, None)]
    assert sample_means([row(protein(8.3))] * 2) == [SampleMean(1, 1, 8.3, "%", FED, 2, 0, None)]


def test_a_mean_has_no_residue_of_floating_point() -> None:
    (mean,) = sample_means([row(protein(8.1)), row(protein(8.4)), row(protein(8.1))])
    assert (mean.amount, mean.n) == (8.2, 3)


def test_ingredients_and_nutrients_are_apart_and_rows_without_an_ingredient_do_not_count() -> None:
    rows = [row(protein(8), dry(88)), row(protein(46), ingredient_id=2), row(protein(1), ingredient_id=None),
            row(dry(90))]
    assert [(one.ingredient_id, one.nutrient_id, one.amount, one.n) for one in sample_means(rows)] == [
        (1, 1, 8, 1), (1, None, 89, 2), (2, 1, 46, 1)
    ]


def test_units_and_bases_are_turned_into_those_of_the_first_sample() -> None:
    # 90 g/kg is 9 %; 10 % of a dry matter of 88 % is 8.8 % as fed: (8.2 + 9 + 8.8) / 3.
    rows = [row(protein(8.2)), row(protein(90, "g/kg")), row(protein(10, "%", DRY), dry(88))]
    mean = sample_means(rows)[0]
    assert (mean.amount, mean.unit, mean.basis) == (pytest.approx(26 / 3, rel=1e-11), "%", FED)
    # 8.8 % as fed at a dry matter of 88 % is 10 % of it.
    mean = sample_means([row(protein(10, "%", DRY)), row(protein(8.8), dry(88))])[0]
    assert (mean.amount, mean.basis, mean.sd) == (10, DRY, 0)


def test_a_basis_that_cannot_be_turned_is_the_callers_fault() -> None:
    with pytest.raises(ValueError, match="dry matter"):
        sample_means([row(protein(8.2)), row(protein(10, "%", DRY))])
