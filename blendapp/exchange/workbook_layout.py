"""Sheets and headings of the exchange workbook, for reading and for writing; headings are never translated."""

from __future__ import annotations

from dataclasses import dataclass

from blendapp.domain.fields import field_of


def _headings(kind: str, *names: str) -> tuple[str, ...]:
    return tuple(field_of(kind, name).heading for name in names)


@dataclass(frozen=True)
class Layout:
    """One sheet. headings: in the order in which they are written. needed: those without which it says nothing.

    further: headings that are written only where something stands under them. optional: a workbook may do without the
    sheet. only_filled: the sheet is written only where it has rows.
    """

    name: str
    headings: tuple[str, ...]
    needed: tuple[str, ...]
    optional: bool = False
    further: tuple[str, ...] = ()
    only_filled: bool = False


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
            "made_by_formula_id", "drug", "drug_level", "drug_species", "withdrawal", "opened", "supplier_id",
        ),
    ),
    ("Ingredient",),
    further=("Opened", "Supplier"),
)
VALUES = Layout(
    "Values",
    ("Ingredient", "Nutrient", *_headings("value", "amount", "unit", "basis", "origin", "source", "date", "n", "sd")),
    ("Ingredient", "Nutrient", "Value"),
    optional=True,
)
SCALES = Layout(
    "Scales",
    _headings(
        "scale", "name", "step_kg", "least_kg", "greatest_kg", "tolerance_percent", "hand_add", "step_l", "least_l",
        "greatest_l", "site_id",
    ),
    ("Scale", "Step kg"),
    optional=True,
    further=("Step l", "Least l", "Greatest l", "Site"),
)
MIXERS = Layout(
    "Mixers", _headings("mixer", "name", "least_kg", "greatest_kg", "site_id"), ("Mixer",), optional=True,
    further=("Site",),
)
FORMULAS = Layout(
    "Formulas",
    _headings(
        "formula", "name", "amounts", "animal", "stage", "batch_kg", "admits", "note", "loss_percent",
        "product_dry_matter_percent",
    ),
    ("Formula",),
    further=("Loss %", "Product dry matter %"),
)
LIMITS = Layout(
    "Limits",
    ("Formula", *_headings("limit", "kind", "subject", "per", "minimum", "maximum", "unit", "basis"), "Note"),
    ("Formula", "Kind", "Name", "Minimum", "Maximum"),
    further=("Note",),
)
SITES = Layout("Sites", _headings("site", "name"), ("Site",), optional=True, only_filled=True)
SUPPLIERS = Layout(
    "Suppliers", _headings("supplier", "name", "note"), ("Supplier",), optional=True, only_filled=True
)
LOTS = Layout(
    "Lots", ("Ingredient", "Lot", "Received", "Mass kg", "Dry matter %", "Supplier", "Note"), ("Ingredient", "Lot"),
    optional=True, only_filled=True,
)
LOT_VALUES = Layout(
    "Lot values", ("Ingredient", "Lot", "Nutrient", "Value", "Unit", "Basis", "Source", "Date"),
    ("Ingredient", "Lot", "Nutrient", "Value"), optional=True, only_filled=True,
)
BINS = Layout(
    "Bins", _headings("bin", "name", "ingredient_id", "lot_id", "site_id"), ("Bin",), optional=True, only_filled=True
)
STEPS = Layout(
    "Steps", _headings("mixing_step", "formula_id", "position", "text", "minutes", "setting"), ("What to do",),
    optional=True, only_filled=True,
)

LAYOUTS: tuple[Layout, ...] = (
    MILL, NUTRIENTS, INGREDIENTS, VALUES, SCALES, MIXERS, FORMULAS, LIMITS, SITES, SUPPLIERS, LOTS, LOT_VALUES, BINS,
    STEPS,
)

MILL_ITEMS: dict[str, str] = {
    field_of("mill", name).heading: name
    for name in ("name", "currency", "ton_means", "cwt_means", "site_id", "sheet_mass", "paper")
}
