"""One table of fields: heading, unit, decimals, range and help of every column, declared once.

The table editor, the import, the export and the pages read it; checks.py refuses what lies outside its ranges.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cache

from blendapp.domain.wording import _


def N_(text: str) -> str:
    """Marks a text for the catalogue; it is translated when shown."""
    return text


@dataclass(frozen=True)
class Field:
    """One column of one kind of record.

    heading: the exact heading in the exchange workbook (never translated); label is its translation on screens.
    decimals: as shown in tables; None where it is no number. least, greatest: inclusive; above: exclusive lower end.
    """

    kind: str
    name: str
    heading: str
    unit: str = ""
    decimals: int | None = None
    least: float | None = None
    greatest: float | None = None
    above: float | None = None
    help: str = ""

    @property
    def label(self) -> str:
        return _(self.heading)

    @property
    def help_text(self) -> str:
        return _(self.help) if self.help else ""

    def fault(self, value: float | None) -> str | None:
        """The sentence for a number outside the range, or None."""
        if value is None or self._holds(value):
            return None
        unit = f" {self.unit}" if self.unit else ""
        if self.least is not None and self.greatest is not None:
            text = _("{label} must lie between {least} and {greatest}{unit}; {value} does not.")
        elif self.above is not None:
            text = _("{label} must be above {above}{unit}; {value} is not.")
        else:
            text = _("{label} must be at least {least}{unit}; {value} is not.")
        return text.format(
            label=self.label, least=_g(self.least), greatest=_g(self.greatest), above=_g(self.above), unit=unit,
            value=_g(value),
        )

    def _holds(self, value: float) -> bool:
        return (
            (self.least is None or value >= self.least)
            and (self.greatest is None or value <= self.greatest)
            and (self.above is None or value > self.above)
        )


def _g(value: float | None) -> str:
    return "" if value is None else f"{value:g}"


FIELDS: tuple[Field, ...] = (
    Field("mill", "name", N_("Name"), help=N_("The mill as it stands on sheets.")),
    Field("mill", "currency", N_("Currency"), help=N_("Three letters of ISO 4217; all prices are in it.")),
    Field("mill", "ton_means", N_("Ton means"), help=N_("What a bare “ton” in a price list is; blank asks.")),
    Field("mill", "cwt_means", N_("Cwt means"), help=N_("What a bare “cwt” in a price list is; blank asks.")),
    Field("mill", "one_person_approves", N_("One person approves"),
          help=N_("Whether who prepared a version may also approve it. Set here only, by no workbook.")),
    Field("mill", "site_id", N_("Site"),
          help=N_("Whose prices, scales, mixers and bins count; blank is the whole mill.")),
    Field("mill", "sheet_mass", N_("Sheets in"), help=N_("What batch sheets are weighed in: kg or lb.")),
    Field("mill", "paper", N_("Paper"), help=N_("A4 or letter.")),
    Field("site", "name", N_("Site")),
    Field("supplier", "name", N_("Supplier")),
    Field("supplier", "note", N_("Note")),
    Field("nutrient", "name", N_("Nutrient")),
    Field("nutrient", "unit", N_("Unit"), help=N_("Unit of concentration in which the nutrient is kept and shown.")),
    Field("nutrient", "never_negative", N_("Never negative"), help=N_("No value can be below zero.")),
    Field("nutrient", "key", N_("Key"), help=N_("Which standard nutrient this is, so that cautions know it.")),
    Field("nutrient", "note", N_("Note")),
    Field("ingredient", "name", N_("Ingredient")),
    Field("ingredient", "class_name", N_("Class"), help=N_("A group limit may name a class.")),
    Field("ingredient", "dry_matter_percent", N_("Dry matter %"), "%", 1, least=0, greatest=100,
          help=N_("Dry matter of the ingredient as fed.")),
    Field("ingredient", "basis", N_("Basis"), help=N_("Basis of values typed without one.")),
    Field("ingredient", "code", N_("Code")),
    Field("ingredient", "scale_id", N_("Scale"), help=N_("The scale that weighs it.")),
    Field("ingredient", "stock_kg", N_("Stock kg"), "kg", 0, least=0, help=N_("Mass in stock.")),
    Field("ingredient", "density_kg_per_l", N_("Density kg/l"), "kg/l", 3, above=0),
    Field("ingredient", "bushel_lb", N_("Bushel lb"), "lb", 1, above=0, help=N_("Mass of one bushel.")),
    Field("ingredient", "tags", N_("Tags"), help=N_("What cautions must know of it.")),
    Field("ingredient", "made_by_formula_id", N_("Made by formula")),
    Field("ingredient", "opened", N_("Opened"),
          help=N_("A batch takes what the formula is made of, not the made ingredient itself.")),
    Field("ingredient", "supplier_id", N_("Supplier"),
          help=N_("Whom it is bought from: this supplier's prices count first.")),
    Field("ingredient", "drug", N_("Drug")),
    Field("ingredient", "drug_level", N_("Drug level")),
    Field("ingredient", "drug_species", N_("Drug species")),
    Field("ingredient", "withdrawal", N_("Withdrawal")),
    Field("ingredient", "note", N_("Note")),
    Field("quote", "price", N_("Price"), "", 2),
    Field("quote", "per", N_("Price per")),
    Field("quote", "supplier_id", N_("Supplier"), help=N_("Whose price it is; blank is nobody's in particular.")),
    Field("quote", "site_id", N_("Site"), help=N_("Where it counts; blank is the whole mill.")),
    Field("quote", "kind", N_("Kind")),
    Field("quote", "terms", N_("Terms")),
    Field("quote", "valid_from", N_("Valid from"), help=N_("The first day on which it counts.")),
    Field("quote", "valid_to", N_("Valid to"), help=N_("The last day on which it counts; blank is open.")),
    Field("quote", "recorded", N_("Recorded"), help=N_("When the mill took it.")),
    Field("quote", "source", N_("Source")),
    Field("value", "amount", N_("Value"), "", 3),
    Field("value", "unit", N_("Unit")),
    Field("value", "basis", N_("Basis")),
    Field("value", "origin", N_("Origin")),
    Field("value", "source", N_("Source")),
    Field("value", "date", N_("Date")),
    Field("value", "n", N_("n"), "", 0, least=1),
    Field("value", "sd", N_("SD"), "", 3, least=0),
    Field("scale", "name", N_("Scale")),
    Field("scale", "step_kg", N_("Step kg"), "kg", 3, above=0),
    Field("scale", "least_kg", N_("Least kg"), "kg", 3, least=0),
    Field("scale", "greatest_kg", N_("Greatest kg"), "kg", 3, above=0),
    Field("scale", "tolerance_percent", N_("Tolerance %"), "%", 2, least=0, greatest=100),
    Field("scale", "hand_add", N_("Hand add")),
    Field("scale", "site_id", N_("Site"), help=N_("Where it stands; blank is every site.")),
    Field("scale", "step_l", N_("Step l"), "l", 3, above=0, help=N_("Of a liquid meter, in place of Step kg.")),
    Field("scale", "least_l", N_("Least l"), "l", 3, least=0),
    Field("scale", "greatest_l", N_("Greatest l"), "l", 3, above=0),
    Field("mixer", "name", N_("Mixer")),
    Field("mixer", "least_kg", N_("Least kg"), "kg", 0, least=0),
    Field("mixer", "greatest_kg", N_("Greatest kg"), "kg", 0, above=0),
    Field("mixer", "site_id", N_("Site"), help=N_("Where it stands; blank is every site.")),
    Field("bin", "name", N_("Bin")),
    Field("bin", "ingredient_id", N_("Ingredient"), help=N_("What stands in it.")),
    Field("bin", "lot_id", N_("Lot"), help=N_("Which lot of it.")),
    Field("bin", "site_id", N_("Site"), help=N_("Where it stands; blank is every site.")),
    Field("lot", "name", N_("Lot"), help=N_("The number or name of one delivery.")),
    Field("lot", "ingredient_id", N_("Ingredient")),
    Field("lot", "received", N_("Received"), help=N_("The day it came, year first.")),
    Field("lot", "mass_kg", N_("Mass kg"), "kg", 0, above=0),
    Field("lot", "supplier_id", N_("Supplier")),
    Field("lot", "dry_matter_percent", N_("Dry matter %"), "%", 1, least=0, greatest=100,
          help=N_("Dry matter of the lot as fed.")),
    Field("lot", "note", N_("Note")),
    Field("formula", "name", N_("Formula")),
    Field("formula", "amounts", N_("Amounts")),
    Field("formula", "animal", N_("Animal")),
    Field("formula", "stage", N_("Stage")),
    Field("formula", "batch_kg", N_("Batch kg"), "kg", 0, above=0),
    Field("formula", "admits", N_("Admits")),
    Field("formula", "note", N_("Note")),
    Field("formula", "loss_percent", N_("Loss %"), "%", 2, least=0, greatest=100,
          help=N_("Mass lost between the scale and the bag.")),
    Field("formula", "product_dry_matter_percent", N_("Product dry matter %"), "%", 1, above=0,
          help=N_("Dry matter of the finished feed; blank is that of the mix.")),
    Field("mixing_step", "formula_id", N_("Formula"), help=N_("Blank is every formula without steps of its own.")),
    Field("mixing_step", "position", N_("Step"), "", 0, least=1),
    Field("mixing_step", "text", N_("What to do")),
    Field("mixing_step", "minutes", N_("Minutes"), "min", 1, above=0),
    Field("mixing_step", "setting", N_("Setting")),
    Field("limit", "kind", N_("Kind")),
    Field("limit", "subject", N_("Name")),
    Field("limit", "per", N_("Per")),
    Field("limit", "minimum", N_("Minimum"), "", 3),
    Field("limit", "maximum", N_("Maximum"), "", 3),
    Field("limit", "unit", N_("Unit")),
    Field("limit", "basis", N_("Basis")),
)

_BY_NAME = {(f.kind, f.name): f for f in FIELDS}


def field_of(kind: str, name: str) -> Field:
    """The field of a record kind. Raises KeyError for a field that no table shows."""
    return _BY_NAME[kind, name]


@cache
def fields_of(kind: str) -> tuple[Field, ...]:
    """The fields of a record kind in their order."""
    return tuple(f for f in FIELDS if f.kind == kind)
