"""Formulas without an answer say why, and show no figure that could be read as one."""

from __future__ import annotations

import pytest

from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.formulas import Admits, Amounts, Animal
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.results import Result, Status
from blendapp.optimise.linear import FailedSolve
from blendapp.services import formulate as formulating
from blendapp.services.asking import ask_all, formulate_whole
from blendapp.services.formulate import FailedCertificate, answer_to, formulas_named, formulate
from tests.mills import TODAY, Maker, three_ingredients


def refused(library: Library, status: Status, formula_id: int = 1) -> Result:
    """The result, once it is shown to hold no figure of an answer."""
    result = formulate(library, formula_id, TODAY)
    assert result.status is status
    assert result.cause
    assert result.cost is None
    assert result.gap is None
    assert not result.has_answer
    assert result.mix == []
    assert result.nutrients == ()
    assert (result.check.largest_violation, result.check.duality_gap) == (None, None)
    for one in result.ingredients:
        assert (one.amount, one.cost, one.price_range, one.break_even_price, one.near_optimal) == (None,) * 5
    limits = library.limits(formula_id)
    assert [(x.limit_id, x.minimum, x.maximum) for x in result.limits] == [(x.id, x.minimum, x.maximum) for x in limits]
    for limit in result.limits:
        assert (limit.value, limit.binding, limit.shadow_price_unique, limit.tighten_cost, limit.relax_saving,
                limit.raise_cost, limit.lower_cost) == (None,) * 7
    assert result.cautions[0] == GENERAL_CAUTION
    return result


def protein_mill() -> Maker:
    make = Maker()
    make.nutrient("Protein")
    make.ingredient("Maize", 200, {"Protein": 8.0})
    make.ingredient("Soybean meal", 400, {"Protein": 46.0})
    return make


def test_limits_that_no_mix_can_meet_are_a_conflict() -> None:
    make = protein_mill()
    feed = make.formula()
    make.limit(feed, "nutrient", "Protein", 47)
    result = refused(make.library, Status.CONFLICT)
    assert result.unpriced == ()
    assert [i.name for i in result.ingredients] == ["Maize", "Soybean meal"]


def test_bounds_of_one_ingredient_that_cross_in_two_rows_are_a_conflict() -> None:
    make = protein_mill()
    feed = make.formula()
    make.limit(feed, "ingredient", "Maize", 60)
    make.limit(feed, "ingredient", "Maize", None, 50)
    refused(make.library, Status.CONFLICT)


@pytest.mark.parametrize("amounts", Amounts)
def test_a_formula_that_admits_no_ingredient_is_a_conflict_that_says_so(amounts: Amounts) -> None:
    make = Maker()
    make.nutrient("Protein")
    feed = make.formula(amounts=amounts)
    assert "admits no ingredient" in (refused(make.library, Status.CONFLICT).cause or "")
    make.limit(feed, "nutrient", "Protein", 10)
    assert "admits no ingredient" in (refused(make.library, Status.CONFLICT).cause or "")


def test_an_ingredient_without_a_price_is_left_out_and_named() -> None:
    make = protein_mill()
    make.ingredient("Fish meal", values={"Protein": 65.0})
    feed = make.formula()
    make.limit(feed, "nutrient", "Protein", 20)
    result = formulate(make.library, feed.id, TODAY)
    assert result.status is Status.OPTIMAL
    assert result.unpriced == ("Fish meal",)
    assert [i.name for i in result.ingredients] == ["Maize", "Soybean meal"]


def test_a_withdrawn_price_is_unknown_and_a_coming_one_is_not_yet_known() -> None:
    make = protein_mill()
    make.put(Quote(90, 1, None, valid_from=TODAY))
    make.ingredient("Wheat", values={"Protein": 12.0})
    make.put(Quote(91, 3, 150.0, valid_from=TODAY.replace(day=TODAY.day + 1)))
    feed = make.formula()
    assert formulate(make.library, feed.id, TODAY).unpriced == ("Maize", "Wheat")
    assert formulate(make.library, feed.id, TODAY.replace(day=TODAY.day + 1)).unpriced == ("Maize",)


@pytest.mark.parametrize("amounts", Amounts)
def test_where_a_minimum_needs_an_unpriced_ingredient_the_answer_is_incomplete(amounts: Amounts) -> None:
    make = protein_mill()
    make.ingredient("Fish meal", values={"Protein": 65.0})
    feed = make.formula(amounts=amounts)
    make.limit(feed, "nutrient", "Protein", 50)
    if amounts is Amounts.RATION:
        make.limit(feed, "nutrient", "Protein", 1, basis="per day")
    result = refused(make.library, Status.INCOMPLETE)
    assert "Fish meal" in (result.cause or "")
    assert result.unpriced == ("Fish meal",)


def test_an_unpriced_ingredient_with_a_minimum_of_its_own_makes_the_answer_incomplete() -> None:
    make = protein_mill()
    make.ingredient("Premix")
    feed = make.formula()
    make.limit(feed, "ingredient", "Premix", 0.5, 0.5)
    refused(make.library, Status.INCOMPLETE)


@pytest.mark.parametrize("amounts", Amounts)
def test_a_formula_of_unpriced_ingredients_alone_is_incomplete(amounts: Amounts) -> None:
    make = Maker()
    make.ingredient("Maize")
    make.formula(amounts=amounts)
    refused(make.library, Status.INCOMPLETE)


def test_where_not_even_the_unpriced_ingredients_help_it_is_a_conflict() -> None:
    make = protein_mill()
    make.ingredient("Fish meal", values={"Protein": 65.0})
    feed = make.formula()
    make.limit(feed, "nutrient", "Protein", 70)
    result = refused(make.library, Status.CONFLICT)
    assert result.unpriced == ("Fish meal",)


def test_a_ration_whose_cost_can_fall_for_ever_names_the_ingredient_and_its_price() -> None:
    make = protein_mill()
    make.ingredient("Whey", -5, {"Protein": 0.8})
    cow = make.formula(amounts=Amounts.RATION)
    make.limit(cow, "nutrient", "Protein", 2, basis="per day")
    cause = refused(make.library, Status.UNBOUNDED).cause or ""
    assert "Whey" in cause
    assert "-5" in cause
    assert "maximum" in cause
    assert "Maize" not in cause


def test_a_blend_with_a_negative_price_has_a_bottom() -> None:
    make = protein_mill()
    make.ingredient("Whey", -5, {"Protein": 0.8})
    feed = make.formula()
    make.limit(feed, "nutrient", "Protein", 10)
    result = formulate(make.library, feed.id, TODAY)
    assert result.status is Status.OPTIMAL
    by_name = {i.name: i for i in result.ingredients}
    assert (by_name["Whey"].cost or 0) < 0
    assert result.cost == pytest.approx(sum(i.cost or 0 for i in result.ingredients), rel=1e-12)


def test_a_price_of_0_is_a_price() -> None:
    make = protein_mill()
    make.ingredient("Peelings", 0, {"Protein": 10.0})
    feed = make.formula()
    result = formulate(make.library, feed.id, TODAY)
    assert result.unpriced == ()
    assert (result.status, result.cost) == (Status.OPTIMAL, 0)
    assert [i.name for i in result.mix] == ["Peelings"]


@pytest.mark.parametrize(
    ("animal", "tag", "source"),
    [(Animal.HORSE, Tag.IONOPHORE, "monensin"), (Animal.SHEEP, Tag.RUMINANT_PROTEIN, "21 CFR 589.2000")],
)
def test_a_formula_that_admits_what_is_forbidden_is_a_conflict_that_names_it_and_its_rule(
    animal: Animal, tag: Tag, source: str
) -> None:
    make = protein_mill()
    make.ingredient("Thing", 9000, {"Protein": 10.0}, tags=(tag,))
    feed = make.formula(animal=animal)
    assert formulate(make.library, feed.id, TODAY).status is Status.OPTIMAL, "unlisted it is not admitted"
    make.limit(feed, "ingredient", "Thing", None, 1.0)
    result = refused(make.library, Status.CONFLICT)
    assert "Thing" in (result.cause or "")
    assert source in (result.cause or "")
    assert result.conflict is None


def test_an_unpriced_ingredient_that_is_forbidden_is_a_conflict_all_the_same() -> None:
    make = protein_mill()
    make.ingredient("Monensin premix", tags=(Tag.IONOPHORE,))
    feed = make.formula(animal=Animal.HORSE, admits=Admits.ALL)
    make.limit(feed, "ingredient", "Monensin premix")
    assert "Monensin premix" in (refused(make.library, Status.CONFLICT).cause or "")


def test_urea_above_the_figure_is_a_conflict_and_below_it_is_not() -> None:
    make = Maker()
    make.nutrient("Protein", key="crude protein")
    make.ingredient("Maize", 200, {"Protein": 8.0})
    make.ingredient("Urea", 250, {"Protein": 281.0}, tags=(Tag.NON_PROTEIN_NITROGEN,))
    for name, animal, need in (("A", Animal.PIG, 9.2), ("B", Animal.PIG, 9.3), ("C", Animal.CATTLE, 9.3)):
        feed = make.formula(name, animal=animal)
        make.limit(feed, "ingredient", "Urea")
        make.limit(feed, "nutrient", "Protein", need)
    assert formulate(make.library, 1, TODAY).status is Status.OPTIMAL
    assert "1.25 %" in (refused(make.library, Status.CONFLICT, 2).cause or "")
    assert formulate(make.library, 3, TODAY).status is Status.OPTIMAL


def test_an_answer_that_fails_its_check_is_an_error_and_is_not_shown(monkeypatch: pytest.MonkeyPatch) -> None:
    from dataclasses import replace

    from blendapp.optimise.solve import solve

    library, feed = three_ingredients()

    def a_hair_off(program: object, time_limit_s: float | None = None) -> object:
        solution = solve(program, time_limit_s)  # type: ignore[arg-type]
        assert solution.x is not None
        return replace(solution, x=solution.x * (1 + 1e-6))

    monkeypatch.setattr(formulating, "solve", a_hair_off)
    with pytest.raises(FailedCertificate, match="Feed failed its check"):
        formulate(library, feed.id, TODAY)


def test_a_solver_without_a_clear_answer_is_an_error_of_the_same_kind(monkeypatch: pytest.MonkeyPatch) -> None:
    library, feed = three_ingredients()

    def undecided(*_given: object) -> None:
        raise FailedSolve("numerical trouble")

    monkeypatch.setattr(formulating, "solve", undecided)
    with pytest.raises(FailedCertificate, match="numerical trouble"):
        formulate(library, feed.id, TODAY)


def test_formulas_are_found_by_name_and_every_unknown_name_is_told_with_what_there_is() -> None:
    make = protein_mill()
    make.formula("Layer")
    make.formula("Pig grower")
    assert [f.name for f in formulas_named(make.library, [])] == ["Layer", "Pig grower"]
    assert [f.name for f in formulas_named(make.library, ["pig  GROWER"])] == ["Pig grower"]
    with pytest.raises(Refused) as refusal:
        formulas_named(make.library, ["Layr", "Layer", "Pig"])
    assert [p.place.record for p in refusal.value.problems] == ["Layr", "Pig"]
    assert all("Layer, Pig grower" in p.text for p in refusal.value.problems)
    with pytest.raises(Refused, match="the mill has: none"):
        formulas_named(Library(), ["Layer"])


def test_several_formulas_come_back_in_their_order_with_the_answers_that_each_has_alone() -> None:
    make = protein_mill()
    for name, need in (("A", 20), ("B", 70), ("C", 10)):
        make.limit(make.formula(name), "nutrient", "Protein", need)
    found = formulate_whole(make.library, [3, 1, 2], TODAY)
    assert [r.formula for r in found] == ["C", "A", "B"]
    assert found == [ask_all(answer_to(make.library, key, TODAY)) for key in (3, 1, 2)]
