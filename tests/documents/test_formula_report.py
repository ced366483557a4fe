from __future__ import annotations

import dataclasses
import re

import page_cases as made
import pytest
from page_reading import pieces, squeezed

from blendapp.documents import Paper, formula_report, page_text
from blendapp.documents.report_limits import cost_words
from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.results import Result, Side, Status

MM = 72 / 25.4
CASES = [pytest.param(result, id=name) for name, result in made.REPORTS.items()]
NO_ANSWER = [made.CONFLICT, made.UNBOUNDED, made.INCOMPLETE, made.STOPPED_EMPTY]


def text_of(result: Result) -> str:
    return squeezed(page_text(formula_report(result, mill="Old Weir Mill", version="approved 3")))


@pytest.mark.parametrize("paper", list(Paper))
@pytest.mark.parametrize("result", CASES)
def test_no_text_overlaps_another_or_leaves_the_page(result: Result, paper: Paper) -> None:
    width, height = paper.size_pt
    found = pieces(formula_report(result, mill="Old Weir Mill", version="approved 3", paper=paper))
    for piece in found:
        assert piece.left >= 12 * MM
        assert piece.right <= width - 12 * MM
        assert piece.bottom >= 8 * MM
        assert piece.top <= height - 8 * MM
    clashes = [
        (a.text, b.text)
        for place, a in enumerate(found)
        for b in found[place + 1 :]
        if a.page == b.page and a.overlaps(b)
    ]
    assert clashes == []


@pytest.mark.parametrize("result", CASES)
def test_each_page_has_the_general_caution_and_its_number_of_all(result: Result) -> None:
    pages = page_text(formula_report(result))
    for number, text in enumerate(pages, start=1):
        assert squeezed(GENERAL_CAUTION) in squeezed(text)
        assert f"Page {number} of {len(pages)}" in text


def test_an_answer_shows_cost_amounts_prices_and_cost_shares() -> None:
    text = "\n".join(page_text(formula_report(made.OPTIMAL)))
    assert "255.00" in text
    assert "EUR per tonne" in text
    assert re.search(r"Maize\s+75\.000\s+200\.00\s+150\.00\s+58\.8", text)
    assert re.search(r"Soybean meal\s+25\.000\s+420\.00\s+105\.00\s+41\.2", text)
    assert "381.25 to 512.50" in text
    assert re.search(r"Lysine hydrochloride\s+1500\.00\s+1381\.20", text)


def test_a_ration_is_in_kg_per_day_and_its_cost_per_head_and_day() -> None:
    text = "\n".join(page_text(formula_report(made.RATION)))
    assert "EUR per head per day" in text
    assert "1.3376" in text
    assert "22.5000" in text


@pytest.mark.parametrize("result", NO_ANSWER)
def test_without_an_answer_no_figure_stands_that_could_be_read_as_one(result: Result) -> None:
    text = "\n".join(page_text(formula_report(result)))
    for absent in ("255.00", "per tonne", "75.000", "Comes to", "What it costs", "200.00", "Nutrients of", "Left out"):
        assert absent not in text
    assert squeezed("at least 19 %") in squeezed(text)
    if result.cause:
        assert squeezed(result.cause) in squeezed(text)


def test_each_status_without_an_answer_says_so_in_its_own_sentence() -> None:
    assert squeezed("No mix can meet all limits.") in text_of(made.CONFLICT)
    assert squeezed("The cost can fall without end") in text_of(made.UNBOUNDED)
    assert squeezed("No mix can be made without the ingredients that have no price.") in text_of(made.INCOMPLETE)
    assert squeezed("Time was up before any mix was found.") in text_of(made.STOPPED_EMPTY)


def test_a_stopped_answer_says_how_far_it_may_be_from_the_best() -> None:
    text = text_of(made.STOPPED)
    assert squeezed("Best mix found so far") in text
    assert squeezed("the least cost may be up to 1.23 % lower") in text
    assert squeezed("Least ingredient cost") not in text
    assert squeezed("for the chosen ingredients only") in text


def test_a_conflict_shows_reach_members_and_repairs() -> None:
    text = text_of(made.CONFLICT)
    assert squeezed("Lysine, in dry matter can reach 0.9137 %, asked at least 0.95 %.") in text
    assert squeezed("Calcium : Phosphorus has no value that could be reached; asked 1.6.") in text
    assert squeezed("Crude protein: minimum 19 to 17.44 %.") in text
    assert squeezed("Lysine, in dry matter: no change of its minimum alone is enough.") in text


def test_a_binding_minimum_costs_upwards_and_saves_downwards() -> None:
    words = cost_words(made.OPTIMAL.limits[0], made.OPTIMAL).replace("\u00a0", " ")
    assert words == "1 % more costs 6.111 EUR/t, up to 20.80 %.\n1 % less saves 5.332 EUR/t, down to 18.20 %."


def test_a_binding_maximum_costs_downwards_and_saves_upwards() -> None:
    limit = dataclasses.replace(
        made.OPTIMAL.limits[5], shadow_price_unique=True, tighten_cost=2.5, relax_saving=1.25, relax_holds_to=30.0
    )
    words = cost_words(limit, made.OPTIMAL).replace("\u00a0", " ")
    assert words == "1 % less costs 2.500 EUR/t.\n1 % more saves 1.250 EUR/t, up to 30.00 %."


def test_a_limit_that_can_not_be_tighter_says_so() -> None:
    limit = dataclasses.replace(made.OPTIMAL.limits[0], tighten_cost=None)
    assert cost_words(limit, made.OPTIMAL).startswith("No more can be had.\n")
    limit = dataclasses.replace(made.OPTIMAL.limits[0], binding=Side.MAXIMUM, tighten_cost=None)
    assert cost_words(limit, made.OPTIMAL).startswith("No less can be had.\n")


def test_a_price_that_is_not_unique_shows_no_figure() -> None:
    assert cost_words(made.OPTIMAL.limits[5], made.OPTIMAL) == "Binds; it has no single price here."


def test_a_target_shows_both_signed_costs() -> None:
    words = cost_words(made.OPTIMAL.limits[4], made.OPTIMAL).replace("\u00a0", " ")
    assert words == "1 % more costs 2.200 EUR/t.\n1 % less saves 1.750 EUR/t."


def test_a_limit_that_does_not_bind_shows_no_cost() -> None:
    assert cost_words(made.OPTIMAL.limits[2], made.OPTIMAL) == ""


def test_unknown_values_unpriced_ingredients_and_cautions_are_named() -> None:
    text = text_of(made.OPTIMAL)
    assert squeezed("UNSAFE: Copper is not known for Soybean meal") in text
    assert squeezed("Sodium is not known for Maize; it was taken as 0, which does no harm") in text
    assert squeezed("so not considered: Fish meal.") in text
    assert squeezed("Copper: no more than the law allows.") in text
    assert squeezed("Admitted without bounds: Maize.") in text


def test_long_lists_lose_no_ingredient_limit_or_nutrient() -> None:
    text = text_of(made.LONG_REPORT)
    for ingredient in made.LONG_REPORT.ingredients:
        assert squeezed(ingredient.name) in text
    assert text.count(squeezed("1 % more costs 6.111 EUR/t")) == 6
    assert text.count(squeezed("Added selenium0.3000mg/kg")) == 6


def test_the_same_result_gives_the_same_bytes() -> None:
    assert formula_report(made.LONG_REPORT) == formula_report(made.LONG_REPORT)


def test_every_status_has_a_page() -> None:
    assert {result.status for result in made.REPORTS.values()} == set(Status)
