"""Mills made by hypothesis: names that try every rule of the workbook, all kinds of limits, all units."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from dataclasses import replace
from typing import Any

from hypothesis import strategies as st

from blendapp.domain import checks, limit_units, units
from blendapp.domain.formulas import (
    DRY_MATTER_SUBJECT,
    MOISTURE_SUBJECT,
    Admits,
    Amounts,
    Animal,
    Formula,
    Limit,
    LimitBasis,
    LimitKind,
    MixingStep,
    Subject,
)
from blendapp.domain.ingredients import Basis, Ingredient, Origin, Tag, Value
from blendapp.domain.library import Library
from blendapp.domain.mills import PAPERS, SHEET_MASSES, MillInfo
from blendapp.domain.names import fold
from blendapp.domain.nutrients import BUILT_IN, KEYS, Nutrient
from blendapp.domain.plant import Bin, Lot, LotValue, Mixer, Scale, Site, Supplier
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change

_TRICKY = (
    "=1+1", "+A", "-5", "@x", '"', '""', "A + B", 'say "A"', '"A" + B', "x +", "+ y", "_x0041_", "_x000D_", "#N/A",
    "TRUE", "1e5", "007", "12.50", "2024-01-02", "(DM)", "A (%)", "A (% DM)", "Käse", "Ölkuchen", "玉米", "🌽", "a\nb",
    "a\x01b", "tab\there", "yes", "Price", "Ingredient", "Cereals", "&amp;", "<b>", "'quoted", "Dry  matter", "%",
)
_characters = st.characters(codec="utf-8", exclude_categories=("Cs",))
texts = st.one_of(st.sampled_from(_TRICKY), st.text(_characters, max_size=12))
names = texts.map(str.strip).filter(bool)
numbers = st.floats(0, 1e6, allow_nan=False)
any_numbers = st.floats(-1e9, 1e9, allow_nan=False)
dates = st.dates(datetime.date(1990, 1, 1), datetime.date(2040, 1, 1))


def unique_names(least: int, most: int, taken: tuple[str, ...] = ()) -> st.SearchStrategy[list[str]]:
    shut = set(map(fold, taken))
    free = names.filter(lambda name: fold(name) not in shut and fold(name) != "")
    return st.lists(free, min_size=least, max_size=most, unique_by=fold)


def maybe(strategy: st.SearchStrategy[Any]) -> st.SearchStrategy[Any]:
    return st.none() | strategy


@st.composite
def mills(draw: st.DrawFn) -> Library:
    """A library without a fault, as checks sees it."""
    library = Library()

    def put(record: Any) -> None:
        if not checks.faults(record, library):
            library.apply([Change(None, record)])

    for number, name in enumerate(draw(unique_names(0, 2)), start=1):
        put(Site(number, name))
    for number, name in enumerate(draw(unique_names(0, 2)), start=1):
        put(Supplier(number, name, draw(texts)))
    sites = [None, *library.records["site"]]
    suppliers = [None, *library.records["supplier"]]
    put(MillInfo(1, draw(texts), draw(st.sampled_from(["USD", "EUR"])),
                 draw(st.sampled_from(["", *units.TON_MEANINGS])), draw(st.sampled_from(["", *units.CWT_MEANINGS])),
                 site_id=draw(st.sampled_from(sites)), sheet_mass=draw(st.sampled_from(SHEET_MASSES)),
                 paper=draw(st.sampled_from(PAPERS))))
    for number, name in enumerate(draw(unique_names(0, 3)), start=1):
        step, least, greatest = draw(st.floats(1e-6, 1e3)), draw(maybe(numbers)), draw(maybe(st.floats(1e-3, 1e6)))
        scale = Scale(number, name, step, least, greatest, draw(maybe(st.floats(0, 100))), draw(st.booleans()),
                      draw(st.sampled_from(sites)))
        put(draw(st.sampled_from([scale, replace(
            scale, step_kg=None, least_kg=None, greatest_kg=None, step_l=step, least_l=least, greatest_l=greatest)])))
    for number, name in enumerate(draw(unique_names(0, 2)), start=1):
        put(Mixer(number, name, draw(maybe(numbers)), draw(maybe(st.floats(1e-3, 1e6))), draw(st.sampled_from(sites))))
    for number, name in enumerate(draw(unique_names(0, 4, BUILT_IN)), start=1):
        put(Nutrient(number, name, draw(st.sampled_from(["", *units.CONCENTRATION])), draw(st.booleans()),
                     draw(st.sampled_from(["", *KEYS])), draw(texts)))
    for number, name in enumerate(draw(unique_names(0, 3)), start=1):
        put(Formula(number, name, draw(st.sampled_from(Amounts)), draw(maybe(st.sampled_from(Animal))), draw(texts),
                    draw(maybe(st.floats(1e-3, 1e6))), draw(st.sampled_from(Admits)), draw(texts),
                    draw(maybe(st.floats(0, 99))), draw(maybe(st.floats(1, 100)))))
    classes = ["", *draw(st.lists(names, max_size=2))]
    for number, name in enumerate(draw(unique_names(0, 5)), start=1):
        put(replace(_ingredient(draw, number, name, classes, library), supplier_id=draw(st.sampled_from(suppliers))))
    for ingredient in library.ingredients:
        for nutrient in library.nutrients:
            if draw(st.booleans()):
                put(_value(draw, len(library.records["value"]) + 1, ingredient, nutrient))
        if draw(st.booleans()):
            per = draw(st.sampled_from(units.PRICE_PER))
            weight = draw(maybe(st.floats(1, 100))) or ingredient.bushel_lb
            put(Quote(len(library.records["quote"]) + 1, ingredient.id, draw(any_numbers), per,
                      weight if per == units.BUSHEL else None))
    for formula in library.formulas:
        for _row in range(draw(st.integers(1, 5))):
            limit = _limit(draw, len(library.records["limit"]) + 1, formula, library, classes)
            if limit is not None:
                put(limit)
    _make_some(draw, library)
    _keep_some(draw, library, put)
    return library


def _keep_some(draw: st.DrawFn, library: Library, put: Callable[[Any], None]) -> None:
    """Lots with analyses, bins that hold them, and the steps of making."""
    sites, suppliers = [None, *library.records["site"]], [None, *library.records["supplier"]]
    for ingredient in library.ingredients:
        for name in draw(unique_names(0, 2)):
            lot = Lot(len(library.records["lot"]) + 1, ingredient.id, name, draw(maybe(dates)),
                      draw(maybe(st.floats(1e-3, 1e6))), draw(st.sampled_from(suppliers)), draw(texts),
                      dry_matter_percent=draw(maybe(st.floats(0, 100))))
            put(lot)
            for nutrient in library.nutrients:
                for _sample in range(draw(st.integers(0, 2))):
                    value = _value(draw, 0, ingredient, nutrient)
                    put(LotValue(len(library.records["lot_value"]) + 1, lot.id, nutrient.id, value.amount, value.unit,
                                 str(value.basis), draw(texts), draw(maybe(dates))))
    ingredients = [None, *library.records["ingredient"]]
    for name in draw(st.lists(names, max_size=3)):
        held = draw(st.sampled_from(ingredients))
        lots = [None, *(lot.id for lot in library.all("lot") if lot.ingredient_id == held)]
        put(Bin(len(library.records["bin"]) + 1, name, held, draw(st.sampled_from(lots)), draw(st.sampled_from(sites))))
    for formula_id in (None, *library.records["formula"]):
        for position in range(1, draw(st.integers(0, 3)) + 1):
            put(MixingStep(len(library.records["mixing_step"]) + 1, formula_id, position, draw(names),
                           draw(maybe(st.floats(0.1, 60))), draw(texts)))


def _ingredient(draw: st.DrawFn, number: int, name: str, classes: list[str], library: Library) -> Ingredient:
    scales = [None, *library.records["scale"]]
    return Ingredient(
        number, name, draw(st.sampled_from(classes)), draw(maybe(st.floats(0, 100))), draw(st.sampled_from(Basis)),
        draw(texts).strip(), draw(st.sampled_from(scales)), draw(maybe(numbers)), draw(maybe(st.floats(1e-3, 10))),
        draw(maybe(st.floats(1, 100))), tuple(draw(st.lists(st.sampled_from(Tag), unique=True, max_size=3))), None,
        draw(texts), draw(texts), draw(texts), draw(texts), draw(texts),
    )


def _value(draw: st.DrawFn, number: int, ingredient: Ingredient, nutrient: Nutrient) -> Value:
    family = units.concentration(nutrient.unit).family
    others = [unit.name for unit in units.CONCENTRATION.values() if unit.family is family]
    plain = draw(st.booleans())
    unit = nutrient.unit if plain else draw(st.sampled_from(others))
    basis = ingredient.basis if plain else draw(st.sampled_from(Basis))
    amount = draw(numbers) if nutrient.never_negative else draw(any_numbers)
    value = Value(number, ingredient.id, nutrient.id, amount, unit, basis)
    if plain:
        return value
    return Value(
        number, ingredient.id, nutrient.id, amount, unit, basis, draw(maybe(st.sampled_from(Origin))), draw(texts),
        draw(maybe(dates)), draw(maybe(st.integers(1, 1000))), draw(maybe(numbers)),
    )


def _limit(draw: st.DrawFn, number: int, formula: Formula, library: Library, classes: list[str]) -> Limit | None:
    kind = draw(st.sampled_from(LimitKind))
    low, high = sorted((draw(st.floats(0, 1)), draw(st.floats(0, 1))))
    minimum, maximum = draw(st.sampled_from([None, low])), draw(st.sampled_from([None, high]))
    if kind is LimitKind.PRACTICAL:
        minimum, maximum = low, None
    ingredients = [i.id for i in library.ingredients]
    nutrients = [DRY_MATTER_SUBJECT, MOISTURE_SUBJECT, *(Subject.nutrient(n.id) for n in library.nutrients)]
    filled = [name for name in classes if any(fold(i.class_name) == fold(name) for i in library.ingredients) and name]
    group = st.lists(st.sampled_from(ingredients), min_size=1, max_size=3, unique=True).map(
        lambda ids: Subject.ingredients(*ids)
    ) if ingredients else st.nothing()
    if filled:
        group = group | st.sampled_from(filled).map(Subject.of_class)
    if kind is LimitKind.NUTRIENT:
        basis = draw(st.sampled_from(LimitBasis))
        stated = draw(st.floats(1, 100)) if basis is LimitBasis.AT_DRY_MATTER else None
        subject = draw(st.sampled_from(nutrients))
        family = units.concentration(limit_units.concentration_unit(library, subject)).family
        known = units.PER_DAY if basis is LimitBasis.PER_DAY else units.CONCENTRATION
        fitting = [unit.name for unit in known.values() if unit.family is family]
        return Limit(number, formula.id, kind, subject, None, minimum, maximum,
                     draw(st.sampled_from(["", *fitting])), basis, stated, draw(texts))
    if kind is LimitKind.RATIO and draw(st.booleans()):
        unit = draw(st.sampled_from(["", "g/MJ", "mg/g", "%/MJ", "IU/kg"]))
        return Limit(number, formula.id, kind, draw(st.sampled_from(nutrients)), draw(st.sampled_from(nutrients)),
                     minimum, maximum, unit)
    if not ingredients:
        return None
    if kind in (LimitKind.INGREDIENT, LimitKind.PRACTICAL):
        subject = Subject.ingredients(draw(st.sampled_from(ingredients)))
    else:
        subject = draw(group)
    if kind is LimitKind.COUNT:
        return Limit(number, formula.id, kind, subject, None, None, float(draw(st.integers(0, 3))))
    if kind is LimitKind.RATIO:
        return Limit(number, formula.id, kind, subject, draw(group), minimum, maximum)
    known_units = ["", *units.BLEND_INCLUSION]
    if formula.amounts is Amounts.RATION:
        known_units = ["", *units.RATION_INCLUSION, units.SHARE_OF_DRY_MATTER]
    return Limit(number, formula.id, kind, subject, None, minimum, maximum, draw(st.sampled_from(known_units)))


def _make_some(draw: st.DrawFn, library: Library) -> None:
    for ingredient in library.ingredients:
        if library.formulas and draw(st.booleans()):
            formula = draw(st.sampled_from(library.formulas))
            made = replace(ingredient, made_by_formula_id=formula.id, opened=draw(st.booleans()))
            if not checks.faults(made, library):
                library.apply([Change(ingredient, made)])
