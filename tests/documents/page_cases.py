"""Invented batches and results for the pages."""

from __future__ import annotations

import dataclasses
import datetime

from blendapp.domain.batches import Batch, BatchLine
from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.formulas import Amounts, LimitKind
from blendapp.domain.results import (
    Check,
    Conflict,
    IngredientResult,
    LimitResult,
    NutrientResult,
    Reach,
    Repair,
    Result,
    Side,
    Status,
    UnknownValue,
)


def line(name: str, kg: float, scale: str = "Hopper scale", step: float = 5.0, **more: object) -> BatchLine:
    return BatchLine(1, name, scale, step, kg * 1.001, kg, **more)  # type: ignore[arg-type]


def limit(name: str, minimum: float | None, maximum: float | None, value: float | None, unit: str = "%") -> LimitResult:
    return LimitResult(0, 1, LimitKind.NUTRIENT, name, None, "as fed", unit, minimum, maximum, value)


NUTRIENTS = (
    NutrientResult(1, "Crude protein", "%", 18.032, (), True),
    NutrientResult(2, "Metabolisable energy, pigs", "MJ/kg", 13.1178, (), True),
    NutrientResult(3, "Lysine", "%", 1.0497, (), True),
    NutrientResult(4, "Calcium", "%", 0.7211, ("Grass meal",), True),
    NutrientResult(5, "Available phosphorus", "%", None, ("Grass meal", "Barley"), False),
    NutrientResult(6, "Vitamin A", "IU/kg", 8000.0, (), False),
    NutrientResult(7, "Added selenium", "mg/kg", 0.29999, (), False),
)

MEDICATED = line(
    "Worm premix 2 %", 2.5, "Bench scale", 0.005, hand_add=True, drug="fenbendazole 20 g/kg",
    drug_level="5 g per tonne of feed", drug_species="pigs", withdrawal="4 days before slaughter",
)

LINES = (
    line("Salt", 4.25, "Bench scale", 0.005, hand_add=True),
    line("Barley", 820),
    line("Wheat", 610),
    line("Soybean meal 46 %", 405),
    line("Limestone", 21.5, "Minor scale", 0.5),
    line("Lysine hydrochloride", 6.5, "Minor scale", 0.5),
    MEDICATED,
)

PLAIN = Batch(
    formula_id=1, formula="Grower pig 30 to 60 kg", version="version 3", mill="Old Weir Mill", currency="EUR",
    draft=False, approved_by="Marta Okonjo, nutritionist, 2026-01-30",
    made=datetime.date(2026, 2, 3), order_kg=7480, batches=4, place=2, batch_kg=1870, lines=LINES,
    limits=(limit("Lysine", 1.05, None, 1.0497), limit("Calcium", 0.7, 0.9, 0.7211)),
    nutrients=NUTRIENTS, broken=(), cautions=(GENERAL_CAUTION, "Feed nothing else with copper."), number=1041,
)

LONG_WORD = "Extruded-dehulled-and-toasted-rapeseed-expeller-of-a-single-origin-with-a-name-that-does-not-end"
LONG_NAME = "Soybean meal, solvent extracted, dehulled and toasted, from the second silo behind the weigh bridge"

MANY = dataclasses.replace(
    PLAIN,
    formula="Breeder layer and pullet developer mash for the northern farms, with whole wheat and without fish, spring",
    version="draft 12", draft=True, approved_by="",
    number=None,
    lines=tuple(
        line(f"Ingredient {n} {LONG_NAME if n % 7 == 0 else LONG_WORD if n % 11 == 0 else ''}".strip(),
             25.0 * n, "Hopper scale" if n % 3 else "Second scale for the middle of things", 5.0 if n % 3 else 0.25)
        for n in range(1, 36)
    ) + tuple(line(f"Micro {n}", 0.125 * n, "Bench scale", 0.001, hand_add=True) for n in range(1, 5)) + (MEDICATED,),
    broken=(0, 1),
    limits=(limit("Lysine", 1.05, None, 1.0497), limit("Calcium", 0.7, 0.9, 0.9211)),
    nutrients=NUTRIENTS * 5,
    cautions=(GENERAL_CAUTION, *(f"Caution {n}: " + "the words of a rule that goes on " * 12 for n in range(1, 5))),
    order_kg=63000, batches=4, place=1, batch_kg=15750,
)

NO_SCALES = dataclasses.replace(
    PLAIN, lines=(line("Barley", 1000.01, "", 0.01), line("Wheat", 869.99, "", 0.01)), copy=2,
)

UNICODE = dataclasses.replace(
    PLAIN,
    formula="Färsenaufzucht Ωmega · тёлки №2",
    mill="Mühle Łódź & Søn",
    lines=(line("Ačiū grūdai — žirniai", 900), line("Корм", 500), line("大麦", 300), line("大豆", 170)),
    batches=1, place=0, order_kg=1870,
)

NOT_FIT = dataclasses.replace(PLAIN, broken=(0,), copy=1)
ACCEPTED = dataclasses.replace(
    NOT_FIT, copy=0, accepted_reason="Within the error of the analysis.", accepted_by="Marta Okonjo"
)
NO_SHEET = dataclasses.replace(
    PLAIN, lines=(), nutrients=(), limits=(), number=None,
    cause="Salt has no scale; choose Bench scale for it, which weighs 0.05 to 12 kg.",
)

CASES = {
    "plain": PLAIN, "many": MANY, "no-scales": NO_SCALES, "unicode": UNICODE, "not-fit": NOT_FIT,
    "accepted": ACCEPTED, "no-sheet": NO_SHEET,
}


def _ingredient(name: str, price: float, amount: float | None, **more: object) -> IngredientResult:
    cost = None if amount is None else price * amount
    return IngredientResult(1, name, price, amount, cost, **more)  # type: ignore[arg-type]


# The mix of three ingredients that the notes on numbers give: 75, 25 and 0 %, cost 255 per tonne.
OPTIMAL = Result(
    formula_id=1, formula="Grower pig 30 to 60 kg", amounts=Amounts.BLEND, status=Status.OPTIMAL, currency="EUR",
    on=datetime.date(2026, 2, 3),
    ingredients=(
        _ingredient("Maize", 200.0, 0.75, price_range=(None, 236.42), near_optimal=(0.7416, 0.7613)),
        _ingredient("Soybean meal", 420.0, 0.25, price_range=(381.25, 512.5), near_optimal=(0.2387, 0.2534)),
        _ingredient("Lysine hydrochloride", 1500.0, 0.0, break_even_price=1381.2),
    ),
    limits=(
        LimitResult(
            0, 1, LimitKind.NUTRIENT, "Crude protein", None, "as fed", "%", 19.0, None, 19.0, Side.MINIMUM, False,
            6.1111, 20.8, 5.3322, 18.2,
        ),
        LimitResult(
            1, 2, LimitKind.NUTRIENT, "Lysine", None, "dry matter", "%", 0.95, 1.4, 0.95, Side.MINIMUM, False, 10.787,
            None, 0.0, 0.91,
        ),
        LimitResult(2, 3, LimitKind.RATIO, "Calcium", "Phosphorus", None, "", 1.1, 1.6, 1.312),
        LimitResult(3, 4, LimitKind.INGREDIENT, "Maize", None, None, "%", None, None, 75.0),
        LimitResult(
            4, 5, LimitKind.INGREDIENT, "Soybean meal", None, None, "%", 25.0, 25.0, 25.0, Side.MINIMUM, True,
            raise_cost=2.2, lower_cost=-1.75,
        ),
        LimitResult(5, 6, LimitKind.GROUP, "Oil seeds", None, None, "%", None, 25.0, 25.0, Side.MAXIMUM, False),
    ),
    nutrients=NUTRIENTS, unpriced=("Fish meal",),
    unknown=(UnknownValue("Maize", "Sodium", False), UnknownValue("Soybean meal", "Copper", True)),
    cautions=(GENERAL_CAUTION, "Copper: no more than the law allows."),
    cost=255.0, gap=1e-9, check=Check(1.3e-12, 0.0),
)


def _without_answer(status: Status, cause: str, conflict: Conflict | None = None) -> Result:
    return dataclasses.replace(
        OPTIMAL, status=status, cause=cause, cost=None, gap=None, check=Check(), conflict=conflict,
        ingredients=tuple(IngredientResult(1, i.name, i.price_per_t) for i in OPTIMAL.ingredients),
        limits=tuple(
            LimitResult(m.index, m.limit_id, m.kind, m.name, m.per, m.basis, m.unit, m.minimum, m.maximum)
            for m in OPTIMAL.limits
        ),
        nutrients=tuple(dataclasses.replace(n, value=None) for n in NUTRIENTS),
    )


CONFLICT = _without_answer(
    Status.CONFLICT, "Crude protein and lysine cannot both be met.",
    Conflict(
        reach=(Reach(1, Side.MINIMUM, 0.95, 0.9137), Reach(2, Side.MAXIMUM, 1.6, None)),
        members=(0, 1),
        repairs=(Repair(0, Side.MINIMUM, 19.0, 17.443), Repair(1, Side.MINIMUM, 0.95, None)),
    ),
)
UNBOUNDED = _without_answer(Status.UNBOUNDED, "Whey has a negative price and no maximum.")
INCOMPLETE = _without_answer(Status.INCOMPLETE, "Lysine needs Fish meal, which has no price.")
STOPPED_EMPTY = _without_answer(Status.STOPPED, "")
STOPPED = dataclasses.replace(OPTIMAL, status=Status.STOPPED, gap=0.0123, given_ingredients=True)
RATION = dataclasses.replace(
    OPTIMAL, amounts=Amounts.RATION, formula="Dry cow", cost=1.33755, unknown=(), unpriced=(),
    cautions=(GENERAL_CAUTION,), check=Check(),
    ingredients=(
        IngredientResult(1, "Maize silage", 45.0, 22.5, 1.0125), IngredientResult(2, "Straw", 100.02, 3.25, 0.32505),
    ),
)
LONG_REPORT = dataclasses.replace(
    OPTIMAL, formula=MANY.formula,
    ingredients=tuple(
        _ingredient(f"Ingredient {n} {LONG_NAME if n % 5 == 0 else LONG_WORD if n % 7 == 0 else ''}".strip(), 200.0 + n,
                    0.025, price_range=(150.0 + n, 1250.0 + n), near_optimal=(0.02, 0.03))
        for n in range(1, 41)
    ),
    limits=OPTIMAL.limits * 6, nutrients=NUTRIENTS * 6, cautions=MANY.cautions,
)

REPORTS = {
    "optimal": OPTIMAL, "conflict": CONFLICT, "unbounded": UNBOUNDED, "incomplete": INCOMPLETE, "stopped": STOPPED,
    "stopped-empty": STOPPED_EMPTY, "ration": RATION, "long-report": LONG_REPORT,
}
