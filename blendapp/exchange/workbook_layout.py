"""Sheets and headings of the exchange workbook, for reading and for writing; headings are never translated."""

from __future__ import annotations

from dataclasses import dataclass

from blendapp.domain.fields import field_of


def _headings(kind: str, *names: str) -> tuple[str, ...]:
    return tuple(field_of(kind, name).heading for name in names)


@dataclass(frozen=True)
class Layout:
    """One sheet. headings: in the order in which they are written. needed: those without which it says nothing."""

    name: str
    headings: tuple[str, ...]
    needed: tuple[str, ...]
    optional: bool = False


MILL = Layout("Mill", ("Item", "Value"), ("Item", "Value"), optional=True)
NUTRIENTS = Layout(
    "Nutrients", _headings("nutrient", "name", "unit", "never_negative", "key", "note"), ("Nutrient", "Unit")
)
INGREDIENTS = Layout(
    "Ingredients",
    (
        *_headings("ingredient", "name", "class_name", "dry_matter_percent"),
        *_headings("quote", "price", "per"),
        *_headings(
            "ingredient", "basis", "note", "code", "scale_id", "stock_kg", "density_kg_per_l", "bushel_lb", "tags",
            "made_by_formula_id", "drug", "drug_level", "drug_species", "withdrawal",
        ),
    ),
    ("Ingredient",),
)
VALUES = Layout(
    "Values",
    ("Ingredient", "Nutrient", *_headings("value", "amount", "unit", "basis", "origin", "source", "date", "n", "sd")),
    ("Ingredient", "Nutrient", "Value"),
    optional=True,
)
SCALES = Layout(
    "Scales",
    _headings("scale", "name", "step_kg", "least_kg", "greatest_kg", "tolerance_percent", "hand_add"),
    ("Scale", "Step kg"),
    optional=True,
)
MIXERS = Layout("Mixers", _headings("mixer", "name", "least_kg", "greatest_kg"), ("Mixer",), optional=True)
FORMULAS = Layout(
    "Formulas",
    _headings("formula", "name", "amounts", "animal", "stage", "batch_kg", "admits", "note"),
    ("Formula",),
)
LIMITS = Layout(
    "Limits",
    # Note is this program's own addition, written only where a limit has one.
    ("Formula", *_headings("limit", "kind", "subject", "per", "minimum", "maximum", "unit", "basis"), "Note"),
    ("Formula", "Kind", "Name", "Minimum", "Maximum"),
)

LAYOUTS: tuple[Layout, ...] = (MILL, NUTRIENTS, INGREDIENTS, VALUES, SCALES, MIXERS, FORMULAS, LIMITS)

MILL_ITEMS: dict[str, str] = {
    field_of("mill", name).heading: name for name in ("name", "currency", "ton_means", "cwt_means")
}
