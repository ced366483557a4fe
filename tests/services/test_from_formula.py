"""An ingredient that a formula makes takes what that formula makes: worked out by hand here."""

from __future__ import annotations

import datetime
from collections.abc import Callable

import pytest

from blendapp.domain.formulas import Admits, Animal
from blendapp.domain.ingredients import Basis, Ingredient, Origin, Tag, Value
from blendapp.domain.library import Library
from blendapp.domain.plant import Site
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import added
from blendapp.domain.results import Status
from blendapp.services import edits, from_formula
from blendapp.services.formulate import formulate
from blendapp.services.mill import Mill
from tests.mills import TODAY, Maker
from tests.services.approving import approve, staffed

Opened = Callable[[Library], Mill]
PREMIX = 3


def premix_library() -> Library:
    """A premix of 3 parts of chalk (100 per t) and 1 of urea (500 per t), with dry matter 98 % and 90 %."""
    make = Maker()
    make.nutrient("Protein")
    make.nutrient("Calcium")
    make.nutrient("Ash")
    make.nutrient("Vitamin", "IU/kg")
    make.ingredient("Chalk", 100.0, {"Protein": 0.0, "Calcium": 38.0, "Ash": 95.0}, dry_matter_percent=98.0)
    # 300 g/kg of dry matter at 90 % dry matter are 27 % as fed.
    urea = make.ingredient("Feed grade N", 500.0, {"Protein": 281.0, "Calcium": 0.0}, dry_matter_percent=90.0)
    make.put(Value(90, urea.id, 3, 300.0, "g/kg", Basis.DRY_MATTER))
    core = make.formula("Core", admits=Admits.LISTED)
    make.limit(core, "ingredient", "Chalk", 75, 75)
    make.limit(core, "ingredient", "Feed grade N", 25, 25)
    make.put(Ingredient(PREMIX, "Core premix", made_by_formula_id=core.id))
    return make.library


@pytest.fixture
def mill(opened: Opened) -> Mill:
    return opened(premix_library())


def held(mill: Mill) -> dict[str, float]:
    return {mill.library.nutrient(key).name: value.amount for key, value in mill.library.values_of(PREMIX).items()}


def test_composition_dry_matter_and_price_are_those_of_the_mix_in_one_undo(mill: Mill) -> None:
    edit = from_formula.take_from_formula(mill, PREMIX, TODAY)
    # 0.75 x 38; 0.25 x 281; 0.75 x 95 + 0.25 x 27; 0.75 x 98 + 0.25 x 90; 0.75 x 100 + 0.25 x 500
    assert held(mill) == pytest.approx({"Calcium": 28.5, "Protein": 70.25, "Ash": 78.0})
    assert mill.library.ingredient(PREMIX).dry_matter_percent == pytest.approx(96.0)
    assert mill.library.price_per_t(PREMIX, TODAY) == pytest.approx(200.0)
    value = mill.library.value(PREMIX, 1)
    assert value is not None
    assert (value.origin, value.source, value.date) == (Origin.ESTIMATED, "Formula Core, 2026-03-02", TODAY)
    quote = mill.library.quote_in_force(PREMIX, TODAY)
    assert quote is not None
    assert quote.source == "Formula Core, 2026-03-02"
    assert edit.what == "Take Core premix from Core"
    mill.undo()
    assert held(mill) == {}
    assert mill.library.price_per_t(PREMIX, TODAY) is None


def test_what_stands_already_is_not_taken_again_and_keeps_its_day(mill: Mill) -> None:
    from_formula.take_from_formula(mill, PREMIX, TODAY)
    later = TODAY + datetime.timedelta(days=30)
    assert from_formula.take_from_formula(mill, PREMIX, later).changes == ()
    edits.set_value(mill, 1, 2, 40.0)
    from_formula.take_from_formula(mill, PREMIX, later)
    days = {mill.library.nutrient(key).name: value.date for key, value in mill.library.values_of(PREMIX).items()}
    assert days == {"Calcium": later, "Protein": TODAY, "Ash": TODAY}


def test_a_nutrient_that_one_part_has_no_value_of_stays_unknown_and_is_said(mill: Mill) -> None:
    edits.set_value(mill, 2, 2, None)
    edit = from_formula.take_from_formula(mill, PREMIX, TODAY)
    assert "Calcium" not in held(mill)
    assert [one.text for one in edit.oddities] == [
        "Not taken from Core, since a part has no value: Calcium (Feed grade N)."
    ]


def test_a_value_once_taken_is_forgotten_when_the_formula_no_longer_knows_it(mill: Mill) -> None:
    from_formula.take_from_formula(mill, PREMIX, TODAY)
    edits.set_value(mill, PREMIX, 4, 5000.0, origin=Origin.MEASURED, source="own laboratory")
    edits.change(mill, mill.library.formulas[0], name="Core 2")
    edits.set_value(mill, 2, 2, None)
    from_formula.take_from_formula(mill, PREMIX, TODAY)
    assert held(mill) == pytest.approx({"Protein": 70.25, "Ash": 78.0, "Vitamin": 5000.0})


def test_a_loss_makes_a_tonne_dearer_and_leaves_what_it_holds(mill: Mill) -> None:
    edits.change(mill, mill.library.formulas[0], loss_percent=20.0)
    from_formula.take_from_formula(mill, PREMIX, TODAY)
    assert mill.library.price_per_t(PREMIX, TODAY) == pytest.approx(200 / 0.8)
    assert held(mill)["Calcium"] == pytest.approx(28.5)


def test_a_product_that_takes_up_water_holds_less_of_everything_per_kg(mill: Mill) -> None:
    edits.change(mill, mill.library.formulas[0], product_dry_matter_percent=48.0)  # the mix has 96 %
    from_formula.take_from_formula(mill, PREMIX, TODAY)
    assert mill.library.ingredient(PREMIX).dry_matter_percent == pytest.approx(48.0)
    assert held(mill) == pytest.approx({"Calcium": 14.25, "Protein": 35.125, "Ash": 39.0})
    assert mill.library.price_per_t(PREMIX, TODAY) == pytest.approx(100.0)


def test_a_stated_product_dry_matter_needs_that_of_every_part(mill: Mill) -> None:
    edits.change(mill, mill.library.formulas[0], product_dry_matter_percent=90.0)
    edits.change(mill, mill.library.ingredient(1), dry_matter_percent=None)
    with pytest.raises(Refused, match="enter the dry matter of Chalk"):
        from_formula.take_from_formula(mill, PREMIX, TODAY)


def test_an_unknown_dry_matter_of_a_part_leaves_that_of_the_premix_alone(mill: Mill) -> None:
    edits.change(mill, mill.library.ingredient(PREMIX), dry_matter_percent=95.0)
    edits.change(mill, mill.library.ingredient(1), dry_matter_percent=None)
    edit = from_formula.take_from_formula(mill, PREMIX, TODAY)
    assert mill.library.ingredient(PREMIX).dry_matter_percent == 95.0
    assert "dry matter" in edit.oddities[0].text


def test_without_an_answer_nothing_is_taken_and_the_reason_is_said(mill: Mill) -> None:
    limit = mill.library.limits(1)[0]
    edits.set_bounds(mill, "more", [(limit.id, "minimum", 80.0), (limit.id, "maximum", 80.0)])
    with pytest.raises(Refused, match="Core has no answer to take: No mix"):
        from_formula.take_from_formula(mill, PREMIX, TODAY)
    with pytest.raises(Refused, match="No formula makes Chalk"):
        from_formula.take_from_formula(mill, 1, TODAY)
    assert held(mill) == {}


def test_an_approved_version_is_taken_before_todays_answer(mill: Mill, quick_hashing: None) -> None:
    staffed(mill)
    approve(mill, 1)
    for limit, share in zip(mill.library.limits(1), (50.0, 50.0), strict=True):
        edits.set_bounds(mill, "half", [(limit.id, "minimum", share), (limit.id, "maximum", share)])
    edits.set_value(mill, 1, 2, 40.0)  # a new analysis of chalk counts: 0.75 x 40
    edits.set_price(mill, 2, 900.0, TODAY)  # and so does a new price: 0.75 x 100 + 0.25 x 900
    from_formula.take_from_formula(mill, PREMIX, TODAY)
    assert held(mill)["Calcium"] == pytest.approx(30.0)
    assert mill.library.price_per_t(PREMIX, TODAY) == pytest.approx(300.0)


def test_an_approved_mix_of_which_a_price_is_unknown_today_is_not_taken(mill: Mill, quick_hashing: None) -> None:
    staffed(mill)
    approve(mill, 1)
    edits.set_price(mill, 2, None, TODAY)
    with pytest.raises(Refused, match="takes Feed grade N, whose price is not known today"):
        from_formula.take_from_formula(mill, PREMIX, TODAY)


def test_a_price_worked_out_from_prices_of_a_site_holds_at_that_site(opened: Opened) -> None:
    mill = opened(premix_library())
    mill.apply("site", [added(Site(1, "North")), added(Quote(mill.new_id("quote"), 2, 900.0, site_id=1))])
    edits.set_mill(mill, site_id=1)
    from_formula.take_from_formula(mill, PREMIX, TODAY)
    assert mill.library.price_per_t(PREMIX, TODAY) == pytest.approx(300.0)
    edits.set_mill(mill, site_id=None)
    assert mill.library.price_per_t(PREMIX, TODAY) is None


def test_what_an_edit_elsewhere_makes_stale_is_said_until_it_is_taken_again(mill: Mill) -> None:
    assert len(from_formula.stale(mill, TODAY)) == 1  # nothing was taken yet
    from_formula.take_from_formula(mill, PREMIX, TODAY)
    assert from_formula.stale(mill, TODAY) == []
    edits.set_value(mill, 1, 2, 40.0)
    edits.set_price(mill, 1, 120.0, TODAY)
    (one,) = from_formula.stale(mill, TODAY)
    assert one.text == (
        "Core premix is no longer what Core makes: price 215 instead of 200; Calcium 30 instead of 28.5. Take it from "
        "its formula again."
    )
    from_formula.take_from_formula(mill, PREMIX, TODAY)
    assert from_formula.stale(mill, TODAY) == []


def medicated_library() -> Library:
    """A base for broilers that may hold an ionophore, a premix of that base, and a feed for horses that admits it."""
    make = Maker()
    make.ingredient("Maize", 200.0)
    make.ingredient("Ionophore premix", 9000.0, tags=(Tag.MEDICATED, Tag.IONOPHORE, Tag.ONLY_WHEN_LISTED))
    base = make.formula("Base", admits=Admits.LISTED)
    make.limit(base, "ingredient", "Maize", 99, 99)
    make.limit(base, "ingredient", "Ionophore premix", 1, 1)
    make.put(Ingredient(3, "Base", made_by_formula_id=base.id))
    make.put(Quote(3, 3, 250.0))
    twice = make.formula("Base twice", admits=Admits.LISTED)
    make.limit(twice, "ingredient", ["Base"])
    make.put(Ingredient(4, "Base twice", made_by_formula_id=twice.id))
    make.put(Quote(4, 4, 250.0))
    for animal in (Animal.HORSE, Animal.POULTRY):
        feed = make.formula(f"Feed for {animal}", animal=animal, admits=Admits.LISTED)
        make.limit(feed, "ingredient", "Maize")
        make.limit(feed, "ingredient", ["Base twice"], 10)
    return make.library


def test_a_feed_for_horses_admits_nothing_that_is_made_with_an_ionophore_however_deep(opened: Opened) -> None:
    mill = opened(medicated_library())
    found = {f.name: formulate(mill.library, f.id, TODAY) for f in mill.library.formulas if f.animal is not None}
    assert found["Feed for horse"].status is Status.CONFLICT
    assert "Base twice holds an ionophore" in str(found["Feed for horse"].cause)
    assert found["Feed for poultry"].status is Status.OPTIMAL


def test_the_tags_of_the_parts_come_along_with_what_they_hold(opened: Opened) -> None:
    mill = opened(medicated_library())
    assert "also medicated, ionophore" in from_formula.stale(mill, TODAY)[0].text
    from_formula.take_from_formula(mill, 3, TODAY)
    assert mill.library.ingredient(3).tags == (Tag.MEDICATED, Tag.IONOPHORE)
    from_formula.take_from_formula(mill, 4, TODAY)
    assert mill.library.ingredient(4).tags == (Tag.MEDICATED, Tag.IONOPHORE)
    mill.undo()
    assert mill.library.ingredient(4).tags == ()


def test_a_made_ingredient_that_lacks_the_tags_of_its_parts_is_said_to(opened: Opened) -> None:
    mill = opened(medicated_library())
    (odd,) = edits.change(mill, mill.library.ingredient(3), code="B").oddities
    assert odd.text == (
        "Base may hold Ionophore premix and lacks their tags: medicated, ionophore. Add them, so that formulas and "
        "cautions know."
    )
    (above,) = edits.change(mill, mill.library.ingredient(3), tags=(Tag.IONOPHORE, Tag.MEDICATED)).oddities
    assert above.place.record == "Base twice"
    assert edits.change(mill, mill.library.ingredient(4), tags=(Tag.IONOPHORE, Tag.MEDICATED)).oddities == ()
