from __future__ import annotations

import pytest

from blendapp.domain.problems import Place, Problem, Problems, Refused, Severity


def test_a_problem_is_one_line_with_its_place_before_its_sentence() -> None:
    place = Place("valley.xlsx", "Limits", 7, "Minimum", "Layer mash")
    assert str(Problem("Too high.", place)) == "valley.xlsx:Limits:7:Minimum:Layer mash: Too high."
    assert str(Problem("Too high.", Place(row=3))) == "3: Too high."
    assert str(Problem("Too high.")) == "Too high."


def test_every_fault_is_refused_together_and_oddities_alone_refuse_nothing() -> None:
    problems = Problems()
    problems.oddity("Odd.")
    problems.raise_if_faults()
    problems.fault("First.")
    problems.fault("Second.", Place(row=2))
    with pytest.raises(Refused) as refusal:
        problems.raise_if_faults()
    assert [p.text for p in refusal.value.problems] == ["First.", "Second."]
    assert all(p.severity is Severity.FAULT for p in refusal.value.problems)
    assert [p.text for p in problems.oddities] == ["Odd."]
    assert [p.text for p in problems] == ["Odd.", "First.", "Second."]
    assert str(refusal.value) == "First.\n2: Second."


@pytest.mark.parametrize("given", ["A sentence.", Problem("A sentence."), [Problem("A sentence.")]])
def test_a_refusal_carries_problems_however_it_is_raised(given: object) -> None:
    assert [p.text for p in Refused(given).problems] == ["A sentence."]  # type: ignore[arg-type]
