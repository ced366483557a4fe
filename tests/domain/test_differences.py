"""What a table of differences shows, for every kind of edit between two snapshots."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest

from blendapp.domain.differences import ENTERED, Area, Difference, differences
from blendapp.domain.formulas import Admits, Amounts, Animal, Formula, LimitKind, Subject
from blendapp.domain.ingredients import Basis, Origin, Tag
from blendapp.domain.library import Library
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change
from blendapp.domain.results import Check, IngredientResult, Result, Status
from blendapp.domain.versions import Snapshot
from tests.mills import TODAY, Maker

MAIZE, MEAL, SALT, OATS = 1, 2, 3, 4


def library() -> Library:
    make = Maker()
    make.nutrient("Crude protein")
    make.nutrient("Energy", "MJ/kg")
    make.ingredient("Maize", 200.0, {"Crude protein": 8.5, "Energy": 14.0}, dry_matter_percent=88.0)
    make.ingredient("Soybean meal", 400.0, {"Crude protein": 46.0, "Energy": 13.0})
    make.ingredient("Salt", 90.0)
    make.ingredient("Oats", None, {"Crude protein": 11.0, "Energy": 12.0})
    feed = make.formula("Mash", admits=Admits.LISTED, animal=Animal.POULTRY)
    make.limit(feed, "nutrient", "Crude protein", 18.0)
    make.limit(feed, "ingredient", "Maize")
    make.limit(feed, "ingredient", "Soybean meal", None, 40.0)
    make.limit(feed, "ingredient", "Salt", 0.3, 0.3)
    return make.library


def after(*edits: Callable[[Library], Change]) -> tuple[Difference, ...]:
    old = library()
    new = old.copy()
    for edit in edits:
        new.apply([edit(new)])
    return differences(Snapshot.of(old, 1, TODAY), Snapshot.of(new, 1, TODAY))


def edit(kind: str, record_id: int, **fields: Any) -> Callable[[Library], Change]:
    def of(library: Library) -> Change:
        record = library.records[kind][record_id]
        return Change(record, replace(record, **fields))

    return of


def remove(kind: str, record_id: int) -> Callable[[Library], Change]:
    return lambda library: Change(library.records[kind][record_id], None)


def test_equal_snapshots_of_two_days_have_no_differences() -> None:
    held = library()
    later = TODAY.replace(year=TODAY.year + 1)
    assert differences(Snapshot.of(held, 1, TODAY), Snapshot.of(held, 1, later)) == ()


CASES: list[tuple[Callable[[Library], Change], list[Difference]]] = [
    (edit("limit", 1, minimum=19.0), [Difference(Area.LIMITS, "Crude protein", "Minimum", 18.0, 19.0, "%")]),
    (edit("limit", 1, minimum=None), [Difference(Area.LIMITS, "Crude protein", "Minimum", 18.0, None, "%")]),
    (edit("limit", 1, maximum=22.0), [Difference(Area.LIMITS, "Crude protein", "Maximum", None, 22.0, "%")]),
    (edit("limit", 1, unit="g/kg", minimum=180.0), [
        Difference(Area.LIMITS, "Crude protein", "Unit", "%", "g/kg"),
        Difference(Area.LIMITS, "Crude protein", "Minimum", 18.0, 180.0, "g/kg"),
    ]),
    (edit("limit", 1, note="by the vet"), [Difference(Area.LIMITS, "Crude protein", "Note", "", "by the vet")]),
    (remove("limit", 1), [Difference(Area.LIMITS, "Crude protein", "Minimum", 18.0, None, "%")]),
    (remove("limit", 2), [Difference(Area.LIMITS, "Maize", "", "without bounds", ""),
                          Difference(Area.ADMITTED, "Maize", "", "admitted", "")]),
    (edit("formula", 1, animal=Animal.PIG), [Difference(Area.FORMULA, "Mash", "Animal", "poultry", "pig")]),
    (edit("formula", 1, name="Layer mash"), [Difference(Area.FORMULA, "Layer mash", "Formula", "Mash", "Layer mash")]),
    (edit("formula", 1, batch_kg=2000.0), [Difference(Area.FORMULA, "Mash", "Batch kg", None, 2000.0)]),
    (edit("ingredient", MAIZE, tags=(Tag.MEDICATED,)),
     [Difference(Area.ADMITTED, "Maize", "Tags", "", "medicated")]),
    (edit("ingredient", MAIZE, dry_matter_percent=None),
     [Difference(Area.COMPOSITION, "Maize", "Dry matter %", 88.0, None, "%")]),
    (edit("ingredient", OATS, tags=(Tag.MEDICATED,)), []),  # not admitted
    (edit("ingredient", MAIZE, stock_kg=4.0, note="seen", code="M"), []),  # no answer rests on it
    (edit("quote", 1, price=210.0), [Difference(Area.PRICES, "Maize", "", 200.0, 210.0, "USD/t")]),
    (edit("quote", 1, price=0.2, per="kg"), []),  # the same money
    (edit("quote", 1, source="phone"), []),
    (remove("quote", 1), [Difference(Area.PRICES, "Maize", "", 200.0, None, "USD/t")]),
    (lambda x: Change(None, Quote(9, OATS, 150.0)), []),
    (edit("value", 1, amount=8.0), [Difference(Area.COMPOSITION, "Maize", "Crude protein", 8.5, 8.0, "%")]),
    (edit("value", 1, amount=85.0, unit="g/kg"),
     [Difference(Area.COMPOSITION, "Maize", "Crude protein", "8.5 %", "85 g/kg")]),
    (edit("value", 1, basis=Basis.DRY_MATTER),
     [Difference(Area.COMPOSITION, "Maize", "Crude protein", "8.5 %", "8.5 % dry matter")]),
    (edit("value", 1, source="lab 7", origin=Origin.MEASURED), [
        Difference(Area.COMPOSITION, "Maize", "Crude protein, Origin", "", "measured"),
        Difference(Area.COMPOSITION, "Maize", "Crude protein, Source", "", "lab 7"),
    ]),
    (remove("value", 1), [Difference(Area.COMPOSITION, "Maize", "Crude protein", 8.5, None, "%")]),
    (edit("value", 2, amount=13.0), []),  # no limit is about energy, and no mix is given
    (edit("nutrient", 2, note="AME"), []),
    (edit("mill", 1, currency="EUR"), [Difference(Area.FORMULA, "Mash", "Currency", "USD", "EUR")]),
]


@pytest.mark.parametrize(("change", "rows"), CASES)
def test_an_edit_shows_as_what_it_changes(change: Callable[[Library], Change], rows: list[Difference]) -> None:
    assert list(after(change)) == rows
    assert all(row.area in ENTERED for row in rows)


def test_whom_an_ingredient_is_bought_from_is_no_difference_but_what_a_batch_takes_of_it_is() -> None:
    assert after(edit("ingredient", MAIZE, supplier_id=3)) == ()
    (opened,) = after(edit("ingredient", MAIZE, opened=True))
    assert (opened.area, opened.name, opened.detail, opened.before, opened.after) == (
        Area.ADMITTED, "Maize", "Opened", "no", "yes")


def test_a_limit_removed_and_entered_again_alike_is_no_difference() -> None:
    def again(held: Library) -> Change:
        return Change(None, replace(library().limit(1), id=99))

    assert after(remove("limit", 1), again) == ()
    assert after(again) == (Difference(Area.LIMITS, "Crude protein", "Minimum", None, 18.0, "%"),)


def test_a_nutrient_kept_in_another_unit_changes_what_a_limit_without_unit_says() -> None:
    rows = after(edit("nutrient", 1, unit="g/kg"))
    assert rows == (Difference(Area.LIMITS, "Crude protein", "Unit", "%", "g/kg"),)


def test_an_ingredient_that_comes_in_is_told_once_and_not_by_its_price_and_values() -> None:
    def admits(held: Library) -> Change:
        old = library().limit(2)
        return Change(None, replace(old, id=50, subject=Subject.ingredients(OATS), kind=LimitKind.INGREDIENT))

    assert [(row.area, row.name) for row in after(admits)] == [(Area.LIMITS, "Oats"), (Area.ADMITTED, "Oats")]


def answered(amounts: dict[int, float], cost: float, cautions: tuple[str, ...] = ()) -> Result:
    held = library()
    formula: Formula = held.formula(1)
    return Result(
        1, formula.name, Amounts.BLEND, Status.OPTIMAL, "USD", TODAY,
        tuple(IngredientResult(k, held.ingredient(k).name, 100.0, x) for k, x in amounts.items()), (), (), (), (),
        cautions, cost=cost, check=Check(0.0, 0.0),
    )


def test_mix_cost_and_cautions_are_told_in_the_units_of_screens() -> None:
    held = library()
    old = Snapshot.of(held, 1, TODAY, result=answered({MAIZE: 0.75, MEAL: 0.247, SALT: 0.003}, 250.0, ("a", "b")))
    new = Snapshot.of(held, 1, TODAY, result=answered({MAIZE: 0.80, MEAL: 0.2}, 240.0, ("b", "c")))
    assert [r for r in differences(old, new) if r.area is not Area.MIX] == [
        Difference(Area.COST, "Cost", "", 250.0, 240.0, "USD/t"),
        Difference(Area.CAUTIONS, "a", "", "stands", ""),
        Difference(Area.CAUTIONS, "c", "", "", "stands"),
    ]
    mix = [r for r in differences(old, new) if r.area is Area.MIX]
    assert [(r.name, r.unit) for r in mix] == [("Maize", "%"), ("Soybean meal", "%"), ("Salt", "%")]
    assert [r.change for r in mix[:2]] == pytest.approx([5.0, -4.7])
    assert (mix[2].before, mix[2].after, mix[2].change) == (pytest.approx(0.3), None, None)


def test_the_last_digits_of_a_solve_are_no_difference_but_a_gram_in_a_tonne_is() -> None:
    held = library()
    old = Snapshot.of(held, 1, TODAY, result=answered({MAIZE: 0.75, MEAL: 0.25}, 250.0))
    dust = Snapshot.of(held, 1, TODAY, result=answered({MAIZE: 0.75 + 1e-13, MEAL: 0.25 - 1e-13}, 250.0 + 1e-10))
    gram = Snapshot.of(held, 1, TODAY, result=answered({MAIZE: 0.750001, MEAL: 0.249999}, 250.0))
    assert differences(old, dust) == ()
    assert {row.area for row in differences(old, gram)} == {Area.MIX}


def test_values_of_what_is_in_the_mix_are_compared_though_no_limit_is_about_them() -> None:
    old_library, new_library = library(), library()
    new_library.apply([edit("value", 2, amount=13.5)(new_library)])
    result = answered({MAIZE: 1.0}, 200.0)
    old, new = (Snapshot.of(x, 1, TODAY, result=result) for x in (old_library, new_library))
    assert differences(old, new) == (Difference(Area.COMPOSITION, "Maize", "Energy", 14.0, 13.5, "MJ/kg"),)


def test_rows_stand_in_the_order_of_areas() -> None:
    rows = after(edit("value", 1, amount=8.0), edit("quote", 1, price=1.0), edit("limit", 1, minimum=1.0),
                 edit("formula", 1, stage="lay"))
    assert [row.area for row in rows] == [Area.FORMULA, Area.LIMITS, Area.PRICES, Area.COMPOSITION]
