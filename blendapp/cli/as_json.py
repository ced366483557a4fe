"""Results as the JSON of the commands: plain numbers, and null for what does not exist or is unlimited."""

from __future__ import annotations

import json
import math
from collections.abc import Sequence
from typing import Any

from blendapp.domain.batches import Batch
from blendapp.domain.formulas import Amounts
from blendapp.domain.list_rows import ListRow
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.results import Conflict, IngredientResult, LimitResult, Result


def text_of(plain: dict[str, Any]) -> str:
    """One JSON object; infinity and NaN become null."""
    return json.dumps(_finite(plain), ensure_ascii=False, allow_nan=False, indent=2)


def _finite(value: Any) -> Any:
    if isinstance(value, float):
        # Adding 0 turns a minus zero, which is no amount of anything, into 0.
        return value + 0.0 if math.isfinite(value) else None
    if isinstance(value, dict):
        return {key: _finite(inner) for key, inner in value.items()}
    if isinstance(value, list | tuple):
        return [_finite(inner) for inner in value]
    return value


def formulas(results: Sequence[Result]) -> dict[str, Any]:
    return {"formulas": [formula(result) for result in results]}


def formula(result: Result) -> dict[str, Any]:
    return {
        "formula": result.formula,
        "amounts": str(result.amounts),
        "status": str(result.status),
        "cause": result.cause,
        "currency": result.currency,
        "cost": result.cost,
        "cost_per": result.cost_per,
        "gap": result.gap,
        "given_ingredients": result.given_ingredients,
        "ingredients": [_ingredient(one, result.amounts) for one in result.ingredients],
        "unpriced": list(result.unpriced),
        "limits": [limit(one) for one in result.limits],
        "unknown": [
            {"ingredient": u.ingredient, "nutrient": u.nutrient, "unsafe": u.unsafe} for u in result.unknown
        ],
        "check": {
            "largest_violation": result.check.largest_violation,
            "duality_gap": result.check.duality_gap,
        },
        "conflict": None if result.conflict is None else _conflict(result.conflict),
        "cautions": list(result.cautions),
    }


def _ingredient(one: IngredientResult, amounts: Amounts) -> dict[str, Any]:
    blend = amounts is Amounts.BLEND
    scale = 100.0 if blend else 1.0
    return {
        "name": one.name,
        "inclusion_percent" if blend else "kg_per_day": None if one.amount is None else one.amount * scale,
        "price_per_t": one.price_per_t,
        "cost": one.cost,
        "price_range": None if one.price_range is None else list(one.price_range),
        "break_even_price": one.break_even_price,
        "near_optimal": None if one.near_optimal is None else [amount * scale for amount in one.near_optimal],
    }


def limit(one: LimitResult) -> dict[str, Any]:
    return {
        "kind": str(one.kind),
        "name": one.name,
        "per": one.per,
        "basis": one.basis,
        "unit": one.unit,
        "minimum": one.minimum,
        "maximum": one.maximum,
        "value": one.value,
        "binding": None if one.binding is None else str(one.binding),
        "shadow_price_unique": one.shadow_price_unique,
        "tighten_cost": one.tighten_cost,
        "tighten_holds_to": one.tighten_holds_to,
        "relax_saving": one.relax_saving,
        "relax_holds_to": one.relax_holds_to,
        "raise_cost": one.raise_cost,
        "lower_cost": one.lower_cost,
    }


def _conflict(conflict: Conflict) -> dict[str, Any]:
    return {
        "reach": [
            {"limit": r.limit, "bound": str(r.bound), "asked": r.asked, "reachable": r.reachable}
            for r in conflict.reach
        ],
        "members": list(conflict.members),
        "repairs": [{"limit": r.limit, "bound": str(r.bound), "from": r.frm, "to": r.to} for r in conflict.repairs],
    }


def list_row(row: ListRow) -> dict[str, Any]:
    """What the rows of every list have."""
    return {
        "sheet": row.sheet or None,
        "row": row.row,
        "fate": str(row.fate),
        "reason": row.reason or None,
        "source_name": row.source_name or None,
        "ingredient": row.ingredient,
    }


def price_row(row: PriceRow) -> dict[str, Any]:
    return {
        **list_row(row),
        "price_per_t": row.price_per_t,
        "unit": row.unit or None,
        "valid_from": None if row.valid_from is None else row.valid_from.isoformat(),
        "old_price_per_t": row.old_price_per_t,
    }


def sheet(batch: Batch, pdf: str | None) -> dict[str, Any]:
    return {
        "formula": batch.formula,
        "version": batch.version,
        "order_kg": batch.order_kg,
        "batches": batch.batches,
        "batch_kg": batch.batch_kg,
        "lines": [
            {
                "ingredient": line.ingredient,
                "scale": line.scale or None,
                "step_kg": line.step_kg,
                "share_kg": line.share_kg,
                "target_kg": line.target_kg,
                "hand_add": line.hand_add,
                "bins": list(line.bins),
                "target_l": line.target_l,
                "tolerance_kg": line.tolerance_kg,
                "fixed": line.fixed,
                "rework": line.rework,
            }
            for line in batch.lines
        ],
        "total_kg": batch.total_kg if batch.lines else None,
        "limits": [limit(one) for one in batch.limits],
        "broken": list(batch.broken),
        "cause": batch.cause,
        "cautions": list(batch.cautions),
        "pdf": pdf,
        "site": batch.site or None,
        "mixer": batch.mixer or None,
        "yield_kg": batch.yield_kg,
        "to_make": [
            {"ingredient": one.ingredient, "formula": one.formula, "mass_kg": one.mass_kg} for one in batch.to_make
        ],
        "previous_feed": batch.previous_feed or None,
        "clean_out": None if batch.clean_out is None else str(batch.clean_out),
    }
