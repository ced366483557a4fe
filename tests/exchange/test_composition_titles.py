"""Titles that say the basis of all results, and amounts above the whole that the mill knows already."""

from __future__ import annotations

import pytest

from blendapp.domain.mills import Asked
from tests.exchange.composition_cases import asked, fates, mill, read, values_of


@pytest.mark.parametrize(
    "title", ["Results as fed", "All results as fed", "All results are as received", "Analysis: as is", "Values as fed"]
)
def test_a_title_of_results_as_fed_is_their_basis(title: str) -> None:
    reading = read([[title], ["Sample", "Lab no", "Dry matter %", "Crude protein %"], ["Maize", "A1", 88, 8.4]])
    assert fates(reading) == ["ignored", "ignored", "accepted"]
    assert values_of(reading.rows[2])["Crude protein"] == (8.4, "%", "as fed")


@pytest.mark.parametrize(
    "title",
    ["Results relate to the sample as received", "Samples as received", "Results of material as received", "Results"],
)
def test_a_title_that_speaks_of_the_samples_is_no_basis(title: str) -> None:
    reading = read([[title], ["Sample", "Crude protein %"], ["Maize", 8.4]])
    assert fates(reading) == ["ignored", "ignored", "question"]
    assert asked(reading) == {(str(Asked.BASIS), "")}


ABOVE = [["Ingredient", "Crude protein % as fed"], ["Maize", 284]]


def test_an_amount_above_the_whole_is_asked_about() -> None:
    reading = read(ABOVE)
    assert "more than the whole" in reading.rows[1].reason


@pytest.mark.parametrize(("own", "fate"), [(281.0, "accepted"), (150.0, "question")])
def test_where_the_mill_itself_has_more_than_the_whole_only_the_change_is_asked_about(own: float, fate: str) -> None:
    reading = read(ABOVE, library=mill(**{"Crude protein": own}))
    assert fates(reading) == ["ignored", fate]
    assert "more than the whole" not in reading.rows[1].reason
