"""Answers held against a second, plain calculation from the library and the amounts alone."""

from __future__ import annotations

from typing import Any

import pytest

from blendapp.domain.formulas import Admits, Amounts, Limit, LimitKind, Subject
from blendapp.domain.ingredients import Basis
from blendapp.domain.library import Library
from blendapp.domain.results import Result, Side, Status
from blendapp.services.formulate import FailedCertificate, formulate
from tests.mills import TODAY, Maker
from tests.outside import plain_feed


def feeds() -> Maker:
    """Eight feeds with values in several units, on both bases, at several masses of price, some of them unknown."""
    make = Maker()
    make.nutrient("Protein")
    make.nutrient("Energy", "MJ/kg")
    make.nutrient("Lysine", "g/kg")
    make.nutrient("Vitamin A", "IU/lb")
    make.nutrient("Balance", "mEq/kg", never_negative=False)
    make.nutrient("Zinc", "ppm")
    make.nutrient("Index", "")
    for name, price, per, dry, basis, values in (
        ("Maize", 5.1, "bu", 87.0, Basis.AS_FED, (8.2, 14.1, 2.4, 300.0, 40.0, 20.0, 3.0)),
        ("Wheat", 9.5, "cwt", 88.0, Basis.DRY_MATTER, (13.5, 15.3, 3.8, 50.0, 70.0, 40.0, 2.0)),
        ("Soybean meal", 390.0, "short ton", 89.0, Basis.AS_FED, (46.0, 12.2, 28.8, 10.0, 410.0, 55.0, 9.0)),
        ("Rapeseed meal", 0.13, "lb", 90.0, Basis.AS_FED, (34.0, 10.1, 19.0, 20.0, -120.0, 70.0, 8.0)),
        ("Silage", 38.0, "t", 32.0, Basis.DRY_MATTER, (8.5, 10.9, 2.6, 9000.0, 300.0, 35.0, 1.0)),
        ("Hay", 14.0, "100 kg", 86.0, Basis.DRY_MATTER, (15.0, 9.2, 5.0, 4000.0, 450.0, 25.0, 1.5)),
        ("Fat", 1.05, "kg", 99.5, Basis.AS_FED, (0.0, 36.0, 0.0, 0.0, 0.0, 0.0, 0.0)),
        ("Salt", 110.0, "long ton", 99.8, Basis.AS_FED, (0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0)),
    ):
        names = ("Protein", "Energy", "Lysine", "Vitamin A", "Balance", "Zinc", "Index")
        make.ingredient(name, price, dict(zip(names, values, strict=True)), per, basis, dry_matter_percent=dry,
                        class_name="Cereals" if name in ("Maize", "Wheat") else "",
                        bushel_lb=56.0 if name == "Maize" else None)
    return make


BLEND_LIMITS: list[tuple[str, Any, float | None, float | None, dict[str, Any]]] = [
    ("nutrient", "Protein", 16.0, 18.0, {}),
    ("nutrient", "Protein", 160.0, None, {"unit": "g/kg"}),
    ("nutrient", "Protein", 5.0, 19.5, {"basis": "dry matter"}),
    ("nutrient", "Protein", None, 17.0, {"basis": "at 88 % dry matter"}),
    ("nutrient", "Energy", 3100.0, None, {"unit": "kcal/kg"}),
    ("nutrient", "Energy", 13.2, 13.3, {}),
    ("nutrient", "Lysine", 0.85, None, {"unit": "%"}),
    ("nutrient", "Vitamin A", 900.0, None, {"unit": "IU/kg"}),
    ("nutrient", "Balance", 60.0, 200.0, {}),
    ("nutrient", "Zinc", 30.0, 45.0, {"unit": "g/t"}),
    ("nutrient", "Index", None, 5.0, {}),
    ("nutrient", "Dry matter", 80.0, 88.0, {}),
    ("nutrient", "Moisture", None, 130.0, {"unit": "g/kg"}),
    ("ingredient", "Salt", 5.0, 5.0, {"unit": "lb/short ton"}),
    ("ingredient", "Hay", 2.0, None, {}),
    ("ingredient", "Wheat", None, 300.0, {"unit": "kg/t"}),
    ("group", ["Maize", "Fat"], 45.0, 60.0, {}),
    ("group", ["Soybean meal", "Rapeseed meal"], None, 250000.0, {"unit": "g/t"}),
    ("ratio", "Lysine", 0.55, None, {"per": "Energy", "unit": "g/MJ"}),
    ("ratio", "Lysine", 0.5, None, {"per": "Protein"}),
    ("ratio", "Protein", None, 1.9, {"per": "Energy"}),
    ("ratio", ["Maize"], 1.5, None, {"per": ["Silage", "Hay"]}),
]
RATION_LIMITS: list[tuple[str, Any, float | None, float | None, dict[str, Any]]] = [
    ("nutrient", "Dry matter", 20.0, 21.0, {"basis": "per day"}),
    ("nutrient", "Dry matter", 40000.0, None, {"basis": "per day", "unit": "g/day"}),
    ("nutrient", "Protein", 3.2, None, {"basis": "per day"}),
    ("nutrient", "Protein", 15.5, 17.0, {"basis": "dry matter"}),
    ("nutrient", "Protein", 7.0, None, {}),
    ("nutrient", "Protein", 13.6, None, {"basis": "at 88 % dry matter"}),
    ("nutrient", "Energy", 60.0, None, {"basis": "per day", "unit": "Mcal/day"}),
    ("nutrient", "Lysine", 120.0, None, {"basis": "per day"}),
    ("nutrient", "Vitamin A", 100000.0, None, {"basis": "per day"}),
    ("nutrient", "Moisture", None, 45.0, {"basis": "per day"}),
    ("ingredient", "Hay", 2.0, None, {}),
    ("ingredient", "Silage", 40.0, None, {"unit": "lb/day"}),
    ("ingredient", "Salt", 60.0, 60.0, {"unit": "g/day"}),
    ("ingredient", "Fat", None, 3.0, {"unit": "% of dry matter"}),
    ("group", ["Silage", "Hay"], 45.0, 70.0, {"unit": "% of dry matter"}),
    ("group", ["Soybean meal", "Rapeseed meal"], None, 3.0, {}),
    ("ratio", "Protein", 14.5, None, {"per": "Energy", "unit": "g/MJ"}),
    ("ratio", ["Silage"], None, 2.0, {"per": ["Hay", "Wheat"]}),
]

# Without this much need of something the cheapest mix is of salt, and a ration is of nothing.
NEED: dict[Amounts, tuple[str, Any, float | None, float | None, dict[str, Any]]] = {
    Amounts.BLEND: ("nutrient", "Protein", 10.0, None, {}),
    Amounts.RATION: ("nutrient", "Energy", 250.0, None, {"basis": "per day"}),
}


def made(amounts: Amounts, limits: list[tuple[str, Any, float | None, float | None, dict[str, Any]]]) -> Library:
    make = feeds()
    feed = make.formula(amounts=amounts)
    for kind, name, minimum, maximum, more in limits:
        make.limit(feed, kind, name, minimum, maximum, **more)
    cereals = Limit(900, feed.id, LimitKind.GROUP, Subject.of_class("cereals"))
    make.put(cereals)
    return make.library


def answered(library: Library) -> Result:
    result = formulate(library, 1, TODAY)
    assert result.status is Status.OPTIMAL, result.cause
    return result


def held_against_plain_figures(library: Library, result: Result) -> None:
    """Every figure of an answer recomputed from the library and the amounts."""
    formula = library.formula(1)
    amounts = {i.ingredient_id: i.amount or 0.0 for i in result.ingredients}
    scale = 1000.0 if formula.amounts is Amounts.BLEND else 1.0
    assert all(x >= 0 for x in amounts.values())
    if formula.amounts is Amounts.BLEND:
        assert 100 * sum(amounts.values()) == pytest.approx(100, abs=1e-7)
    total = 0.0
    for one in result.ingredients:
        price = plain_feed.price_per_kg(library, one.ingredient_id)
        assert price is not None
        assert one.price_per_t == pytest.approx(1000 * price, rel=1e-12)
        assert one.cost == pytest.approx(price * scale * amounts[one.ingredient_id], rel=1e-9, abs=1e-12)
        total += price * scale * amounts[one.ingredient_id]
    assert result.cost == pytest.approx(total, rel=1e-9)
    assert result.cost == pytest.approx(sum(one.cost or 0 for one in result.ingredients), rel=1e-12)
    limits = library.limits(1)
    assert [one.limit_id for one in result.limits] == [limit.id for limit in limits]
    for limit, one in zip(limits, result.limits, strict=True):
        expected = plain_feed.value(library, formula, limit, amounts)
        assert one.value == pytest.approx(expected, rel=1e-6, abs=1e-9), one.name
        assert one.value is not None
        for bound, side in ((limit.minimum, Side.MINIMUM), (limit.maximum, Side.MAXIMUM)):
            if bound is None:
                continue
            sign = 1 if side is Side.MINIMUM else -1
            assert sign * (one.value - bound) >= 0, one.name
            if abs(one.value - bound) > 1e-7 * max(1, abs(bound)):
                assert one.binding is not side
        if one.binding is None:
            assert one.tighten_cost in (0, None)
        else:
            assert one.value == (limit.minimum if one.binding is Side.MINIMUM else limit.maximum)
    for nutrient in result.nutrients:
        limit = Limit(0, 1, LimitKind.NUTRIENT, Subject.nutrient(nutrient.nutrient_id))
        top = plain_feed.quotient(library, formula, limit, [library.ingredient(key) for key in amounts]).top
        brought = sum(top[key] * x for key, x in amounts.items())
        assert nutrient.value == pytest.approx(brought / plain_feed.WORTH[nutrient.unit], rel=1e-9, abs=1e-12)


def test_every_figure_of_a_blend_is_that_of_a_second_calculation() -> None:
    library = made(Amounts.BLEND, [])
    held_against_plain_figures(library, answered(library))


@pytest.mark.parametrize("index", range(len(BLEND_LIMITS)))
def test_a_blend_under_each_kind_of_limit_is_that_of_a_second_calculation(index: int) -> None:
    library = made(Amounts.BLEND, [NEED[Amounts.BLEND], BLEND_LIMITS[index]])
    result = answered(library)
    held_against_plain_figures(library, result)


@pytest.mark.parametrize("index", range(len(RATION_LIMITS)))
def test_a_ration_under_each_kind_of_limit_is_that_of_a_second_calculation(index: int) -> None:
    library = made(Amounts.RATION, [NEED[Amounts.RATION], RATION_LIMITS[index]])
    result = answered(library)
    held_against_plain_figures(library, result)


def test_a_blend_under_many_limits_at_once_is_that_of_a_second_calculation() -> None:
    chosen = [0, 4, 6, 8, 12, 13, 14, 15, 18, 21]
    library = made(Amounts.BLEND, [BLEND_LIMITS[i] for i in chosen])
    held_against_plain_figures(library, answered(library))


def test_a_ration_under_many_limits_at_once_is_that_of_a_second_calculation() -> None:
    library = made(Amounts.RATION, [RATION_LIMITS[i] for i in (0, 2, 3, 7, 8, 10, 11, 12, 13, 14, 16)])
    held_against_plain_figures(library, answered(library))


def test_every_kind_unit_and_basis_of_limit_has_a_case_that_works() -> None:
    worked = set()
    for amounts, limits in ((Amounts.BLEND, BLEND_LIMITS), (Amounts.RATION, RATION_LIMITS)):
        for case in limits:
            result = answered(made(amounts, [NEED[amounts], case]))
            if result.limits[-2].binding is not None:
                worked.add((amounts, case[0], case[4].get("basis", "as fed")))
    for amounts, bases in ((Amounts.BLEND, ("as fed", "dry matter", "at 88 % dry matter")),
                           (Amounts.RATION, ("as fed", "dry matter", "at 88 % dry matter", "per day"))):
        assert {(amounts, "nutrient", basis) for basis in bases} <= worked
        assert {(amounts, kind, "as fed") for kind in ("ingredient", "group", "ratio")} <= worked


def test_a_limit_on_a_group_named_by_its_class_holds_the_sum_of_its_members() -> None:
    make = feeds()
    feed = make.formula()
    make.put(Limit(1, feed.id, LimitKind.GROUP, Subject.of_class("CEREALS"), maximum=35.0))
    result = answered(make.library)
    by_name = {i.name: i.amount or 0 for i in result.ingredients}
    assert by_name["Maize"] + by_name["Wheat"] <= 0.35 + 1e-12
    held_against_plain_figures(make.library, result)


def test_the_price_of_a_kg_of_dry_matter_is_not_the_price_as_fed() -> None:
    make = Maker()
    make.nutrient("Protein")
    make.ingredient("Silage", 30, {"Protein": 20}, basis=Basis.DRY_MATTER, dry_matter_percent=30)
    make.ingredient("Hay", 75, {"Protein": 20}, basis=Basis.DRY_MATTER, dry_matter_percent=90)
    cow = make.formula(amounts=Amounts.RATION)
    make.limit(cow, "nutrient", "Protein", 0.6, basis="per day")
    # Silage costs 0.100 a kg of dry matter, hay 0.0833; as fed silage looks the cheaper.
    result = answered(make.library)
    assert {i.name: i.amount for i in result.mix} == pytest.approx({"Hay": 0.6 / 0.18})
    assert result.cost == pytest.approx(0.25)


def test_a_ratio_over_nothing_is_not_a_number_and_is_said_to_be_none() -> None:
    make = Maker()
    make.nutrient("Calcium")
    make.nutrient("Phosphorus")
    make.ingredient("Maize", 200, {"Calcium": 0.0, "Phosphorus": 0.0})
    feed = make.formula()
    make.limit(feed, "ratio", "Calcium", 1.0, 2.0, per="Phosphorus")
    result = answered(make.library)
    (one,) = result.limits
    assert one.value is None
    assert one.binding is None
    assert one.tighten_cost == 0


def test_a_ration_of_nothing_has_no_concentration() -> None:
    make = feeds()
    cow = make.formula(amounts=Amounts.RATION)
    make.limit(cow, "nutrient", "Protein", 16.0, basis="dry matter")
    make.limit(cow, "nutrient", "Protein", basis="per day")
    result = answered(make.library)
    assert result.cost == 0
    assert [one.value for one in result.limits] == [None, 0.0]
    assert all(n.value is None for n in result.nutrients)


def test_a_limit_without_bounds_shows_its_value_and_holds_nothing() -> None:
    make = feeds()
    feed = make.formula(admits=Admits.LISTED)
    make.limit(feed, "ingredient", "Maize")
    make.limit(feed, "ingredient", "Wheat", maximum=20)
    result = answered(make.library)
    assert [(one.value, one.binding) for one in result.limits] == [
        (pytest.approx(80), None), (20, Side.MAXIMUM)
    ] or result.limits[0].value == 100
    held_against_plain_figures(make.library, result)


def test_two_rows_about_one_thing_stay_two_entries_in_their_order() -> None:
    make = feeds()
    feed = make.formula()
    make.limit(feed, "nutrient", "Protein", 12.0)
    make.limit(feed, "ingredient", "Maize", None, 60.0)
    make.limit(feed, "nutrient", "Protein", 15.0)
    make.limit(feed, "ingredient", "Maize", None, 40.0)
    result = answered(make.library)
    assert [(one.index, one.minimum, one.maximum) for one in result.limits] == [
        (0, 12.0, None), (1, None, 60.0), (2, 15.0, None), (3, None, 40.0)
    ]
    held_against_plain_figures(make.library, result)


def test_the_same_library_gives_the_same_amounts_to_the_last_digit() -> None:
    library = made(Amounts.BLEND, [BLEND_LIMITS[i] for i in (0, 4, 6, 8, 12, 13, 14, 15, 18, 21)])
    assert answered(library) == answered(library.copy())


def test_a_composition_kept_between_solves_gives_the_answer_of_a_fresh_one() -> None:
    from dataclasses import replace

    from blendapp.domain.records import Change
    from blendapp.optimise.build.composition import Composition

    library = made(Amounts.BLEND, [BLEND_LIMITS[i] for i in (0, 4, 6)])
    kept = Composition(library)
    formulate(library, 1, TODAY, kept)
    protein, maize = library.value(1, 1), library.ingredient(1)
    assert protein is not None
    nutrient = library.nutrient(2)
    for change in (
        Change(protein, replace(protein, amount=9.9)),
        Change(maize, replace(maize, dry_matter_percent=50.0, basis=Basis.DRY_MATTER)),
        Change(library.value(2, 2), None),
        Change(nutrient, replace(nutrient, unit="kcal/kg")),
    ):
        library.apply([change])
        kept.refresh(library, [change])
        assert formulate(library, 1, TODAY, kept) == formulate(library, 1, TODAY)


def test_a_limit_that_divides_by_0_has_no_value_and_that_is_said() -> None:
    make = Maker()
    make.nutrient("Calcium")
    make.nutrient("Phosphorus")
    make.ingredient("Oil", 900, {"Calcium": 0.0, "Phosphorus": 0.0})
    make.ingredient("Chalk", 950, {"Calcium": 38.0, "Phosphorus": 0.1})
    feed = make.formula()
    make.limit(feed, "ratio", "Calcium", 1.0, None, per="Phosphorus")
    result = formulate(make.library, feed.id, TODAY)
    assert [limit.value for limit in result.limits] == [None]
    assert [text for text in result.cautions if text.startswith("Calcium : Phosphorus has no value in this mix")]
    make.limit(feed, "ingredient", "Chalk", 1.0)
    result = formulate(make.library, feed.id, TODAY)
    assert result.limits[0].value == pytest.approx(380.0)
    assert not [text for text in result.cautions if "has no value" in text]


def test_a_formula_that_admits_nothing_is_not_told_to_find_prices() -> None:
    make = Maker()
    make.ingredient("Maize", 200)
    feed = make.formula(admits=Admits.LISTED)
    result = formulate(make.library, feed.id, TODAY)
    assert result.status is Status.CONFLICT
    assert result.cause == "The formula admits no ingredient; list some for it, or let it admit all."


def test_a_ratio_over_less_than_0_asks_for_a_minimum_of_what_it_divides_by() -> None:
    make = Maker()
    make.nutrient("Protein")
    make.nutrient("Balance {net}", "mEq/kg", never_negative=False)
    make.ingredient("Wheat", 200, {"Protein": 11.0, "Balance {net}": 40.0})
    make.ingredient("Oats", 150, {"Protein": 10.0, "Balance {net}": -30.0})
    feed = make.formula("Mash")
    make.limit(feed, "ratio", "Protein", 0.1, None, per="Balance {net}")
    with pytest.raises(FailedCertificate) as failure:
        formulate(make.library, feed.id, TODAY)
    assert str(failure.value) == (
        "Mash: Balance {net} of Oats is below 0, and the ratio over it means nothing in a mix where it is below 0; set "
        "a minimum of Balance {net} that is above 0."
    )
    make.limit(feed, "nutrient", "Balance {net}", 5.0)
    result = formulate(make.library, feed.id, TODAY)
    assert result.status is Status.OPTIMAL
    assert result.limits[0].value == pytest.approx((11 * 0.5 + 10 * 0.5) / 5)
