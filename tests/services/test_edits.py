"""Every edit that a person can make: done, undone and redone, with the file as the witness."""

from __future__ import annotations

import inspect
from collections.abc import Callable
from dataclasses import replace
from typing import Any

import pytest

from blendapp.domain.formulas import Admits, Amounts, LimitKind, Subject
from blendapp.domain.ingredients import Basis, Tag
from blendapp.domain.library import Library
from blendapp.domain.mills import Synonym
from blendapp.domain.plant import Bin, Lot, LotValue, Scale
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import added
from blendapp.services import edits
from blendapp.services.mill import Edit, Mill, open_mill
from tests.mills import TODAY, Maker

Opened = Callable[[Library], Mill]
Reopened = Callable[[Mill], Mill]


def library() -> Library:
    """Two nutrients, four ingredients, two formulas; the second nutrient, ingredient and formula stand free."""
    make = Maker()
    make.nutrient("Protein", key="crude protein")
    make.nutrient("Fibre", "g/kg")
    make.put(Scale(1, "Big", 5.0))
    make.ingredient("Maize", 5.0, {"Protein": 8.5}, per="bu", bushel_lb=56.0, class_name="Cereals")
    make.ingredient("Oats", 180.0, {"Protein": 11.0, "Fibre": 100.0})
    make.ingredient("Soybean meal", 400.0, {"Protein": 46.0, "Fibre": 60.0})
    make.ingredient("Grit")
    mash, _spare = make.formula("Mash"), make.formula("Spare")
    make.limit(mash, "nutrient", "Protein", 16.0)
    make.limit(mash, "ingredient", "Oats", None, 20.0)
    make.limit(mash, "group", ["Maize", "Soybean meal"], 50.0, None)
    make.put(Synonym(1, "Bay Grain", "white oats", 2))
    return make.library


MAIZE, OATS, MEAL, GRIT = 1, 2, 3, 4

CASES: dict[str, list[Callable[[Mill], Edit]]] = {
    "change": [
        lambda m: edits.change(m, m.library.ingredient(OATS), name="White oats"),
        lambda m: edits.change(m, m.library.ingredient(GRIT), tags=(Tag.ONLY_WHEN_LISTED,), dry_matter_percent=98.5),
        lambda m: edits.change(m, m.library.formula(1), batch_kg=2000.0, stage="lay"),
        lambda m: edits.change(m, m.library.nutrient(1), unit="g/kg"),
        lambda m: edits.change(m, m.library.limit(1), unit="g/kg", minimum=160.0, maximum=180.0),
    ],
    "set_mill": [lambda m: edits.set_mill(m, name="Weir mill", currency="EUR")],
    "set_value": [
        lambda m: edits.set_value(m, MAIZE, 1, 9.0),
        lambda m: edits.set_value(m, MAIZE, 2, 22.0, basis=Basis.DRY_MATTER, source="lab 4"),
        lambda m: edits.set_value(m, OATS, 2, None),
    ],
    "set_price": [
        lambda m: edits.set_price(m, OATS, 175.5, TODAY),
        lambda m: edits.set_price(m, GRIT, 0.0, TODAY, per="kg"),
        lambda m: edits.set_price(m, MAIZE, None, TODAY),
    ],
    "set_price_per_t": [
        lambda m: edits.set_price_per_t(m, MAIZE, 210.0, TODAY),
        lambda m: edits.set_price_per_t(m, GRIT, 12.0, TODAY),
    ],
    "add_ingredient": [lambda m: edits.add_ingredient(m, " Barley ", class_name="Cereals")],
    "remove_ingredient": [lambda m: edits.remove_ingredient(m, OATS)],
    "add_nutrient": [lambda m: edits.add_nutrient(m, "Ash", "g/kg", key="ash")],
    "remove_nutrient": [lambda m: edits.remove_nutrient(m, 2)],
    "add_formula": [lambda m: edits.add_formula(m, "Grower", amounts=Amounts.RATION)],
    "duplicate_formula": [lambda m: edits.duplicate_formula(m, 1, "Mash 2")],
    "remove_formula": [lambda m: edits.remove_formula(m, 1)],
    "add_limit": [lambda m: edits.add_limit(m, 2, LimitKind.NUTRIENT, Subject.nutrient(2), maximum=60.0)],
    "remove_limit": [lambda m: edits.remove_limit(m, 2)],
    "set_bound": [lambda m: edits.set_bound(m, 1, "maximum", 19.0), lambda m: edits.set_bound(m, 2, "maximum", None)],
    "set_bounds": [
        lambda m: edits.set_bounds(m, "Repair", [(1, "minimum", 15.0), (1, "maximum", 30.0), (3, "minimum", None)]),
    ],
    "admit": [lambda m: edits.admit(m, 2, GRIT)],
    "set_admits": [lambda m: edits.set_admits(m, 1, Admits.LISTED)],
    "many": [
        lambda m: edits.many(m, "Paste", [
            lambda: edits.value_changes(m, MAIZE, 1, 9.25),
            lambda: edits.value_changes(m, GRIT, 1, 0.0),
            lambda: edits.price_changes(m, GRIT, 33.0, TODAY),
            lambda: edits.field_changes(m, m.library.ingredient(OATS), name="Black oats"),
        ]).edit,
    ],
}
# What only works out changes or looks something up, and is covered where it is used.
NOT_EDITS = {"field_changes", "value_changes", "price_changes", "free_name"}

EVERY = [(name, index) for name, cases in CASES.items() for index in range(len(cases))]


def test_every_edit_has_a_case_here() -> None:
    public = {
        name for name, function in inspect.getmembers(edits, inspect.isfunction)
        if function.__module__ == edits.__name__ and not name.startswith("_")
    }
    assert public - NOT_EDITS == set(CASES)


def dump_of_file(mill: Mill) -> dict[str, list[dict[str, Any]]]:
    """What the file holds; the library in memory must hold the same."""
    found = mill.store.dump()
    for kind, records in mill.store.read_all().items():
        assert mill.library.all(kind) == records, kind
    return found


@pytest.mark.parametrize(("name", "index"), EVERY)
def test_an_edit_undone_leaves_the_file_as_it_was_and_redone_as_it_made_it(
    name: str, index: int, opened: Opened
) -> None:
    mill = opened(library())
    before = dump_of_file(mill)
    edit = CASES[name][index](mill)
    after = dump_of_file(mill)
    assert after != before
    assert edit.what
    assert mill.undo_text == edit.what
    assert edit.changed == {(c.kind, c.id) for c in edit.changes}
    undone = mill.undo()
    assert undone is not None
    assert undone.changed == edit.changed
    assert dump_of_file(mill) == before
    assert (mill.undo_text, mill.redo_text) == (None, edit.what)
    redone = mill.redo()
    assert redone is not None
    assert dump_of_file(mill) == after
    assert (mill.undo_text, mill.redo_text) == (edit.what, None)


@pytest.mark.parametrize(("name", "index"), EVERY)
def test_undo_and_redo_outlive_the_window(name: str, index: int, opened: Opened, reopened: Reopened) -> None:
    mill = opened(library())
    before = mill.store.dump()
    edit = CASES[name][index](mill)
    after = mill.store.dump()
    mill = reopened(mill)
    assert mill.undo_text == edit.what
    mill.undo()
    assert dump_of_file(mill) == before
    mill = reopened(mill)
    assert mill.redo_text == edit.what
    mill.redo()
    assert dump_of_file(mill) == after


def test_all_edits_one_after_the_other_are_undone_to_the_beginning_and_redone_to_the_end(opened: Opened) -> None:
    mill = opened(library())
    kept = [mill.store.dump()]
    order = [name for name, _i in EVERY if name not in ("remove_formula", "remove_ingredient", "remove_nutrient")]
    for name in dict.fromkeys(order):
        CASES[name][0](mill)
        kept.append(mill.store.dump())
    for expected in reversed(kept[:-1]):
        mill.undo()
        assert dump_of_file(mill) == expected
    assert mill.undo() is None
    for expected in kept[1:]:
        mill.redo()
        assert dump_of_file(mill) == expected
    assert mill.redo() is None


def test_an_edit_after_an_undo_ends_what_could_be_redone(opened: Opened) -> None:
    mill = opened(library())
    edits.set_bound(mill, 1, "minimum", 17.0)
    mill.undo()
    edits.set_bound(mill, 2, "maximum", 25.0)
    assert mill.redo() is None
    assert mill.redo_text is None


def test_an_edit_that_changes_nothing_is_no_edit(opened: Opened) -> None:
    mill = opened(library())
    edits.set_bound(mill, 1, "minimum", 16.0)
    edits.set_price(mill, OATS, 180.0, TODAY)
    edits.set_value(mill, MAIZE, 1, 8.5)
    edits.set_value(mill, GRIT, 1, None)
    edits.set_price(mill, GRIT, None, TODAY)
    assert mill.undo_text is None


REFUSED: list[tuple[str, Callable[[Mill], Any]]] = [
    ("is taken", lambda m: edits.add_ingredient(m, "OATS")),
    ("name is needed", lambda m: edits.add_formula(m, "  ")),
    ("built in", lambda m: edits.add_nutrient(m, "Moisture")),
    ("not known", lambda m: edits.add_nutrient(m, "Ash", "percent")),
    ("is taken", lambda m: edits.change(m, m.library.ingredient(OATS), name="maize")),
    ("between 0 and 100", lambda m: edits.change(m, m.library.ingredient(OATS), dry_matter_percent=101.0)),
    ("never be negative", lambda m: edits.set_value(m, MAIZE, 1, -1.0)),
    ("does not measure", lambda m: edits.set_value(m, MAIZE, 1, 8.0, unit="MJ/kg")),
    ("has an end", lambda m: edits.set_value(m, MAIZE, 1, float("nan"))),
    ("has an end", lambda m: edits.set_price(m, MAIZE, float("inf"), TODAY)),
    ("Bushel lb", lambda m: edits.set_price(m, OATS, 5.0, TODAY, per="bu")),
    ("16 is above the maximum 12", lambda m: edits.set_bound(m, 1, "maximum", 12.0)),
    ("above the whole", lambda m: edits.set_bound(m, 2, "maximum", 120.0)),
    ("is taken", lambda m: edits.duplicate_formula(m, 1, "spare")),
    ("still limited in Mash, Protein", lambda m: edits.remove_nutrient(m, 1)),
    ("still named by Mash, Maize .* Soybean meal", lambda m: edits.remove_ingredient(m, MAIZE)),
    ("does not measure", lambda m: edits.change(m, m.library.nutrient(1), unit="MJ/kg")),
    ("is not known here", lambda m: edits.change(m, m.library.limit(2), unit="kg/day")),
    ("ISO 4217", lambda m: edits.set_mill(m, currency="euro")),
    ("go into itself", lambda m: edits.change(m, m.library.ingredient(MEAL), made_by_formula_id=1)),
]


@pytest.mark.parametrize(("words", "act"), REFUSED)
def test_a_refused_edit_changes_neither_the_library_nor_the_file(
    words: str, act: Callable[[Mill], Any], opened: Opened
) -> None:
    mill = opened(library())
    before = dump_of_file(mill)
    entries = len(mill.store.entries())
    with pytest.raises(Refused, match=words):
        act(mill)
    assert dump_of_file(mill) == before
    assert len(mill.store.entries()) == entries
    assert mill.undo_text is None


def test_a_refused_edit_tells_every_fault_with_record_and_column(opened: Opened) -> None:
    mill = opened(library())
    with pytest.raises(Refused) as refusal:
        edits.change(mill, mill.library.ingredient(OATS), dry_matter_percent=-5.0, bushel_lb=0.0, name="Maize")
    places = {(p.place.record, p.place.column) for p in refusal.value.problems}
    assert places == {("Maize", "Dry matter %"), ("Maize", "Bushel lb"), ("Maize", "Ingredient")}


def test_an_edit_of_what_is_not_there_leaves_the_library_as_it_was(opened: Opened) -> None:
    mill = opened(library())
    before = dump_of_file(mill)
    for act in (
        lambda: edits.add_limit(mill, 99, LimitKind.NUTRIENT, Subject.nutrient(1), minimum=1.0),
        lambda: edits.change(mill, mill.library.limit(1), subject=Subject.nutrient(99)),
    ):
        with pytest.raises(KeyError):
            act()
        assert dump_of_file(mill) == before


def test_a_change_of_a_formula_to_a_ration_is_refused_where_its_limits_do_not_fit(opened: Opened) -> None:
    mill = opened(library())
    edits.change(mill, mill.library.limit(2), unit="kg/t")
    with pytest.raises(Refused) as refusal:
        edits.change(mill, mill.library.formula(1), amounts=Amounts.RATION)
    assert "Mash, Oats" in str(refusal.value)
    assert mill.library.formula(1).amounts is Amounts.BLEND


def test_a_formula_that_would_use_what_it_makes_is_refused_from_whichever_side(opened: Opened) -> None:
    mill = opened(library())
    edits.set_admits(mill, 2, Admits.LISTED)
    edits.admit(mill, 2, MAIZE)
    edits.change(mill, mill.library.ingredient(GRIT), made_by_formula_id=2)
    before = dump_of_file(mill)
    with pytest.raises(Refused, match="Grit” would go into itself"):
        edits.admit(mill, 2, GRIT)
    with pytest.raises(Refused, match="Grit” would go into itself"):
        edits.set_admits(mill, 2, Admits.ALL)
    assert dump_of_file(mill) == before


def test_an_ingredient_in_a_lot_or_a_bin_stays(opened: Opened) -> None:
    mill = opened(library())
    mill.apply("Delivery", [added(Lot(1, GRIT, "L-7")), added(Bin(1, "Bin 4", OATS))])
    with pytest.raises(Refused, match="named by L-7"):
        edits.remove_ingredient(mill, GRIT)
    with pytest.raises(Refused, match="named by Bin 4"):
        edits.remove_ingredient(mill, OATS)


def test_a_nutrient_goes_with_its_values_and_its_analyses(opened: Opened) -> None:
    mill = opened(library())
    mill.apply("Delivery", [added(Lot(1, GRIT, "L-7")), added(LotValue(1, 1, 2, 5.0, "g/kg"))])
    edits.remove_nutrient(mill, 2)
    assert mill.library.all("lot_value") == []
    assert {v.nutrient_id for v in mill.library.all("value")} == {1}


def test_a_formula_that_makes_an_ingredient_stays(opened: Opened) -> None:
    mill = opened(library())
    edits.set_admits(mill, 2, Admits.LISTED)
    edits.change(mill, mill.library.ingredient(GRIT), made_by_formula_id=2)
    with pytest.raises(Refused, match="Spare makes Grit"):
        edits.remove_formula(mill, 2)


def test_a_new_amount_loses_the_source_of_the_old_one_unless_it_is_given_again(opened: Opened) -> None:
    mill = opened(library())
    edits.set_value(mill, MAIZE, 1, 9.0, source="lab 4", n=12, sd=0.3, unit="%")
    edits.set_value(mill, MAIZE, 1, 9.1)
    value = mill.library.value(MAIZE, 1)
    assert value is not None
    assert (value.amount, value.source, value.n, value.sd) == (9.1, "", None, None)
    edits.set_value(mill, MAIZE, 1, 9.1, source="lab 5")
    value = mill.library.value(MAIZE, 1)
    assert value is not None
    assert value.source == "lab 5"


def test_a_value_keeps_the_unit_in_which_it_was_entered(opened: Opened) -> None:
    mill = opened(library())
    edits.set_value(mill, MAIZE, 1, 90.0, unit="g/kg")
    edits.set_value(mill, MAIZE, 1, 91.0)
    value = mill.library.value(MAIZE, 1)
    assert value is not None
    assert (value.amount, value.unit) == (91.0, "g/kg")


def test_a_new_price_is_a_new_quote_and_the_old_one_stays_on_record(opened: Opened) -> None:
    mill = opened(library())
    edits.set_price(mill, OATS, 175.0, TODAY)
    edits.set_price(mill, OATS, None, TODAY)
    assert [q.price for q in mill.library.quotes_of(OATS)] == [180.0, 175.0, None]
    assert mill.library.price_per_t(OATS, TODAY) is None


def test_a_price_per_tonne_is_that_price_whatever_mass_it_is_quoted_per(opened: Opened) -> None:
    mill = opened(library())
    edits.set_price_per_t(mill, MAIZE, 210.0, TODAY)
    quote = mill.library.quote_in_force(MAIZE, TODAY)
    assert quote is not None
    assert quote.per == "bu"
    assert quote.price_per_t == pytest.approx(210.0, rel=1e-12)


@pytest.mark.parametrize("bushel", [60.0, None])
def test_a_price_per_tonne_holds_after_the_bushel_was_changed(bushel: float | None, opened: Opened) -> None:
    mill = opened(library())
    edits.change(mill, mill.library.ingredient(MAIZE), bushel_lb=bushel)
    edits.set_price_per_t(mill, MAIZE, 210.0, TODAY)
    assert mill.library.price_per_t(MAIZE, TODAY) == pytest.approx(210.0, rel=1e-12)


def test_an_identifier_is_never_used_again_not_even_after_undo_and_reopening(
    opened: Opened, reopened: Reopened
) -> None:
    mill = opened(library())
    first = edits.add_ingredient(mill, "Barley").changes[0].id
    mill.undo()
    second = edits.add_ingredient(mill, "Barley").changes[0].id
    edits.remove_ingredient(mill, second)
    mill = reopened(mill)
    third = edits.add_ingredient(mill, "Barley").changes[0].id
    assert first < second < third
    assert mill.library.ingredient(third).name == "Barley"


def test_a_read_only_mill_refuses_every_edit_with_the_reason(opened: Opened) -> None:
    mill = opened(library())
    path = mill.path
    mill.close()
    path.chmod(0o444)
    mill = open_mill(path)
    try:
        if mill.writable:
            pytest.skip("this user may write to any file")
        with pytest.raises(Refused):
            edits.set_bound(mill, 1, "minimum", 17.0)
        assert mill.library.limit(1).minimum == 16.0
    finally:
        mill.close()
        path.chmod(0o644)


def test_the_composition_in_arrays_follows_edits_undo_and_redo(opened: Opened) -> None:
    from blendapp.services.formulate import formulate

    mill = opened(library())
    for act in (
        lambda: edits.set_value(mill, MAIZE, 1, 9.9), mill.undo, mill.redo,
        lambda: edits.add_nutrient(mill, "Ash"), lambda: edits.set_value(mill, OATS, 3, 5.0),
        lambda: edits.remove_nutrient(mill, 2), mill.undo, lambda: edits.remove_ingredient(mill, OATS), mill.undo,
    ):
        act()
        kept = formulate(mill.library, 1, TODAY, mill.composition)
        assert kept == formulate(mill.library, 1, TODAY)


def test_a_free_name_is_the_wanted_one_or_the_first_with_a_number() -> None:
    found = library()
    assert edits.free_name(found, "formula", "Grower") == "Grower"
    assert edits.free_name(found, "formula", "MASH") == "MASH 2"


def test_a_quote_of_the_file_is_what_was_typed(opened: Opened) -> None:
    mill = opened(library())
    edits.set_price(mill, MAIZE, 5.15, TODAY, entered="5,15")
    quote = mill.library.quote_in_force(MAIZE, TODAY)
    assert quote == replace(
        Quote(quote.id, MAIZE, 5.15, "bu", 56.0), valid_from=TODAY, recorded=TODAY, source="typed", entered="5,15"
    )


@pytest.mark.parametrize(("means", "per"), [("112 lb", "long cwt"), ("100 lb", "cwt"), ("", "cwt")])
def test_a_price_typed_per_cwt_keeps_the_mass_that_the_mill_calls_one(
    opened: Opened, means: str, per: str
) -> None:
    mill = opened(library())
    edits.set_mill(mill, cwt_means=means)
    edits.set_price(mill, MAIZE, 8.4, TODAY, per="cwt")
    quote = mill.library.quote_in_force(MAIZE, TODAY)
    assert (quote.price, quote.per) == (8.4, per)
