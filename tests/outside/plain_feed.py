"""Feed arithmetic written a second time, from the definitions alone and in plain Python.

It reads records and shares nothing with the program but them: the factors of units are typed again, and a limit is
turned into a quotient of two sums without an array.
"""

from __future__ import annotations

from typing import Any, NamedTuple

LB = 0.45359237
KCAL = 0.004184

# Value in kg, IU, mEq, MJ or 1 of one unit, per kg or per day.
WORTH = {
    "%": 0.01, "g/kg": 1e-3, "mg/kg": 1e-6, "ug/kg": 1e-9, "ppm": 1e-6, "ppb": 1e-9, "g/t": 1e-6,
    "g/short ton": 1e-3 / (2000 * LB), "mg/lb": 1e-6 / LB, "IU/kg": 1.0, "IU/lb": 1 / LB, "mEq/kg": 1.0, "MJ/kg": 1.0,
    "kJ/kg": 1e-3, "kcal/kg": KCAL, "kcal/lb": KCAL / LB, "Mcal/kg": 1000 * KCAL, "": 1.0, "/kg": 1.0,
    "kg/day": 1.0, "g/day": 1e-3, "mg/day": 1e-6, "IU/day": 1.0, "mEq/day": 1.0, "MJ/day": 1.0, "kcal/day": KCAL,
    "Mcal/day": 1000 * KCAL, "/day": 1.0,
}
OF_THE_DAY = {
    "%": "kg/day", "g/kg": "g/day", "mg/kg": "mg/day", "ug/kg": "mg/day", "ppm": "mg/day", "ppb": "mg/day",
    "g/t": "g/day", "g/short ton": "g/day", "mg/lb": "mg/day", "IU/kg": "IU/day", "IU/lb": "IU/day",
    "mEq/kg": "mEq/day", "MJ/kg": "MJ/day", "kJ/kg": "MJ/day", "kcal/kg": "kcal/day", "kcal/lb": "kcal/day",
    "Mcal/kg": "Mcal/day", "": "/day", "/kg": "/day",
}
INCLUSION = {"%": 0.01, "kg/t": 1e-3, "g/t": 1e-6, "lb/short ton": 1 / 2000}
FEEDING = {"kg/day": 1.0, "g/day": 1e-3, "lb/day": LB, "% of dry matter": 0.01}
KG_OF = {"t": 1000.0, "kg": 1.0, "100 kg": 100.0, "lb": LB, "cwt": 100 * LB, "long cwt": 112 * LB,
         "short ton": 2000 * LB, "long ton": 2240 * LB}


class Quotient(NamedTuple):
    """value as displayed = sum(top x) / (sum(bottom x) or 1) / factor, over ingredient identifiers."""

    top: dict[int, float]
    bottom: dict[int, float] | None
    factor: float


def price_per_kg(library: Any, ingredient_id: int) -> float | None:
    """Of the last quote; plain libraries have one quote an ingredient."""
    quotes = [q for q in library.records["quote"].values() if q.ingredient_id == ingredient_id]
    if not quotes or quotes[-1].price is None:
        return None
    quote = quotes[-1]
    return float(quote.price / (quote.bushel_lb * LB if quote.per == "bu" else KG_OF[quote.per]))


def dry(ingredient: Any) -> float:
    return 0.0 if ingredient.dry_matter_percent is None else ingredient.dry_matter_percent / 100


def content(library: Any, ingredient: Any, subject: Any) -> float:
    """Per kg as fed in kg, IU, mEq, MJ or 1; unknown is 0."""
    if subject.kind == "dry matter":
        return dry(ingredient)
    if subject.kind == "moisture":
        return 0.0 if ingredient.dry_matter_percent is None else 1 - ingredient.dry_matter_percent / 100
    for value in library.records["value"].values():
        if value.ingredient_id == ingredient.id and value.nutrient_id == subject.ids[0]:
            per_kg = value.amount * WORTH[value.unit]
            return float(per_kg * dry(ingredient) if value.basis == "dry matter" else per_kg)
    return 0.0


def share(ingredient: Any, subject: Any) -> float:
    """1 for a member of a group, else 0."""
    if subject.kind == "class":
        same = " ".join(ingredient.class_name.split()).lower() == " ".join(subject.class_name.split()).lower()
        return 1.0 if same else 0.0
    return 1.0 if ingredient.id in subject.ids else 0.0


def quotient(library: Any, formula: Any, limit: Any, ingredients: list[Any]) -> Quotient:
    """A limit of kind nutrient, ingredient, group or ratio as a quotient of two sums over these ingredients."""
    blend = formula.amounts == "blend"

    def sums(subject: Any) -> dict[int, float]:
        of_value = subject.kind in ("nutrient", "dry matter", "moisture")
        return {i.id: content(library, i, subject) if of_value else share(i, subject) for i in ingredients}

    top = sums(limit.subject)
    if limit.kind == "ratio":
        return Quotient(top, sums(limit.per), _ratio_factor(library, limit))
    if limit.kind in ("ingredient", "group", "practical"):
        unit = limit.unit or ("%" if blend else "kg/day")
        if unit == "% of dry matter":
            return Quotient({i.id: top[i.id] * dry(i) for i in ingredients}, {i.id: dry(i) for i in ingredients}, 0.01)
        return Quotient(top, None, (INCLUSION if blend else FEEDING)[unit])
    own = library.records["nutrient"][limit.subject.ids[0]].unit if limit.subject.kind == "nutrient" else "%"
    if limit.basis == "per day":
        return Quotient(top, None, WORTH[limit.unit or OF_THE_DAY[own]])
    factor = WORTH[limit.unit or own]
    if limit.basis == "as fed":
        return Quotient(top, {i.id: 1.0 for i in ingredients}, factor)
    if limit.basis == "dry matter":
        return Quotient(top, {i.id: dry(i) for i in ingredients}, factor)
    stated = limit.at_dry_matter_percent / 100
    return Quotient(top, {i.id: dry(i) / stated for i in ingredients}, factor)


def _ratio_factor(library: Any, limit: Any) -> float:
    if limit.subject.kind in ("ingredients", "class"):
        return 1.0
    if limit.unit:
        top, bottom = limit.unit.split("/")
        worth = {"kg": 1.0, "g": 1e-3, "mg": 1e-6, "MJ": 1.0, "kcal": KCAL, "Mcal": 1000 * KCAL, "IU": 1.0}
        return worth[top.strip()] / worth[bottom.strip()]
    own = [
        library.records["nutrient"][part.ids[0]].unit if part.kind == "nutrient" else "%"
        for part in (limit.subject, limit.per)
    ]
    return WORTH[own[0]] / WORTH[own[1]]


def value(library: Any, formula: Any, limit: Any, amounts: dict[int, float]) -> float | None:
    """A limit's value as displayed at amounts (fractions of a blend, kg per day of a ration); None over nothing."""
    ingredients = [library.records["ingredient"][key] for key in amounts]
    if limit.kind == "count":
        return float(sum(1 for i in ingredients if amounts[i.id] > 0 and share(i, limit.subject)))
    top, bottom, factor = quotient(library, formula, limit, ingredients)
    above = sum(top[key] * x for key, x in amounts.items())
    below = 1.0 if bottom is None else sum(bottom[key] * x for key, x in amounts.items())
    return None if below == 0 else above / below / factor


def admitted(library: Any, formula: Any) -> list[Any]:
    """By the rule: those listed, or all whose tags do not keep them out unless listed."""
    kept_out = {"medicated", "non-protein nitrogen", "ruminant protein", "animal protein", "ionophore",
                "only when listed"}
    listed = {
        limit.subject.ids[0]
        for limit in library.records["limit"].values()
        if limit.formula_id == formula.id and limit.kind == "ingredient"
    }
    everything = sorted(library.records["ingredient"].values(), key=lambda i: i.id)
    if formula.admits == "listed":
        return [i for i in everything if i.id in listed]
    return [i for i in everything if i.id in listed or not kept_out & {str(tag) for tag in i.tags}]
