"""The shape of every JSON object, as files-and-commands states it: each key, and what may stand there."""

from __future__ import annotations

from typing import Any

NUMBER, TEXT, YES_NO, NULL = "number", "text", "yes or no", "null"


def kind(value: Any) -> str:
    if value is None:
        return NULL
    if isinstance(value, bool):
        return YES_NO
    if isinstance(value, int | float):
        return NUMBER
    return TEXT if isinstance(value, str) else type(value).__name__


def check(value: Any, shape: Any, where: str = "$") -> None:
    """shape: a dict of keys (all of them, no others), a list with the shape of every entry, or a set of what may
    stand there: kinds, exact texts, or one dict or tuple inside a tuple of alternatives."""
    if isinstance(shape, dict):
        assert isinstance(value, dict), where
        assert set(value) == set(shape), f"{where}: {set(value) ^ set(shape)}"
        for key, inner in shape.items():
            check(value[key], inner, f"{where}.{key}")
    elif isinstance(shape, list):
        assert isinstance(value, list), where
        for n, one in enumerate(value):
            check(one, shape[0], f"{where}[{n}]")
    elif isinstance(shape, tuple):
        if value is not None:
            check(value, shape[0], where)
    else:
        assert kind(value) in shape or (isinstance(value, str) and value in shape), f"{where}: {value!r}"


def or_null(shape: Any) -> tuple[Any]:
    return (shape,)


FIGURE = {NUMBER, NULL}
LIMIT = {
    "kind": {"nutrient", "ingredient", "group", "ratio", "practical", "count"}, "name": {TEXT}, "per": {TEXT, NULL},
    "basis": {TEXT, NULL}, "unit": {TEXT}, "minimum": FIGURE, "maximum": FIGURE, "value": FIGURE,
    "binding": {NULL, "minimum", "maximum"}, "shadow_price_unique": {YES_NO, NULL}, "tighten_cost": FIGURE,
    "tighten_holds_to": FIGURE, "relax_saving": FIGURE, "relax_holds_to": FIGURE, "raise_cost": FIGURE,
    "lower_cost": FIGURE,
}


def _ingredient(amount: str) -> dict[str, Any]:
    return {
        "name": {TEXT}, amount: FIGURE, "price_per_t": {NUMBER}, "cost": FIGURE, "price_range": or_null([FIGURE]),
        "break_even_price": FIGURE, "near_optimal": or_null([{NUMBER}]),
    }


def formula(amounts: str) -> dict[str, Any]:
    blend = amounts == "blend"
    return {
        "formula": {TEXT}, "amounts": {"blend", "ration"},
        "status": {"optimal", "conflict", "unbounded", "incomplete", "stopped"}, "cause": {TEXT, NULL},
        "currency": {TEXT}, "cost": FIGURE, "cost_per": {"t"} if blend else {"day"}, "gap": FIGURE,
        "given_ingredients": {YES_NO},
        "ingredients": [_ingredient("inclusion_percent" if blend else "kg_per_day")], "unpriced": [{TEXT}],
        "limits": [LIMIT], "unknown": [{"ingredient": {TEXT}, "nutrient": {TEXT}, "unsafe": {YES_NO}}],
        "check": {"largest_violation": FIGURE, "duality_gap": FIGURE},
        "conflict": or_null({
            "reach": [{"limit": {NUMBER}, "bound": {"minimum", "maximum"}, "asked": {NUMBER}, "reachable": FIGURE}],
            "members": [{NUMBER}],
            "repairs": [{"limit": {NUMBER}, "bound": {"minimum", "maximum"}, "from": {NUMBER}, "to": FIGURE}],
        }),
        "cautions": [{TEXT}],
    }


PRICES = {
    "currency": {TEXT},
    "rows": [{
        "sheet": {TEXT, NULL}, "row": {NUMBER}, "fate": {"accepted", "question", "refused", "ignored"},
        "reason": {TEXT, NULL},
        "source_name": {TEXT, NULL}, "ingredient": {TEXT, NULL}, "price_per_t": FIGURE, "unit": {TEXT, NULL},
        "valid_from": {TEXT, NULL}, "old_price_per_t": FIGURE,
    }],
    "questions": [{"question": {TEXT}, "text": {TEXT}, "choices": [{TEXT}]}],
    "applied": {YES_NO},
}

COMPOSITION = {
    "rows": [{
        "sheet": {TEXT, NULL}, "row": {NUMBER}, "fate": {"accepted", "question", "refused", "ignored"},
        "reason": {TEXT, NULL}, "source_name": {TEXT, NULL}, "ingredient": {TEXT, NULL}, "sample": {TEXT, NULL},
        "sampled": {TEXT, NULL},
        "values": [{"nutrient": {TEXT}, "amount": {NUMBER}, "unit": {TEXT}, "basis": {"as fed", "dry matter"},
                    "old": FIGURE}],
    }],
    "questions": [{"question": {TEXT}, "text": {TEXT}, "choices": [{TEXT}]}],
    "applied": {YES_NO},
}

LIST = {
    "number": {NUMBER}, "about": {"prices", "composition"}, "file": {TEXT}, "digest": {TEXT}, "source": {TEXT, NULL},
    "applied": {TEXT}, "rows": {NUMBER}, "accepted": {NUMBER}, "withdrawn": {TEXT, NULL},
}
LISTS = {"lists": [LIST], "left": [{TEXT}]}

SHEET = {
    "formula": {TEXT}, "version": {TEXT}, "order_kg": {NUMBER}, "batches": {NUMBER}, "batch_kg": {NUMBER},
    "lines": [{"ingredient": {TEXT}, "scale": {TEXT, NULL}, "step_kg": {NUMBER}, "share_kg": {NUMBER},
               "target_kg": {NUMBER}, "hand_add": {YES_NO}, "bins": [{TEXT}], "target_l": FIGURE,
               "tolerance_kg": FIGURE, "fixed": {YES_NO}, "rework": {YES_NO}}],
    "total_kg": FIGURE, "limits": [LIMIT], "broken": [{NUMBER}], "cause": {TEXT, NULL}, "cautions": [{TEXT}],
    "pdf": {TEXT, NULL}, "site": {TEXT, NULL}, "mixer": {TEXT, NULL}, "yield_kg": FIGURE,
    "to_make": [{"ingredient": {TEXT}, "formula": {TEXT}, "mass_kg": {NUMBER}}], "previous_feed": {TEXT, NULL},
    "clean_out": {NULL, "physical", "flush", "sequence", "none needed"},
}

NEW = {"mill": {TEXT}, "warnings": [{TEXT}]}
EXPORT = {"workbook": {TEXT}, "warnings": [{TEXT}]}
