"""The sheets Sites, Suppliers, Scales, Mixers, Lots, Lot values and Bins of the exchange workbook."""

from __future__ import annotations

from dataclasses import replace

from blendapp.domain.ingredients import Basis, Ingredient
from blendapp.domain.names import fold
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.plant import Bin, Lot, LotValue, Mixer, Scale, Site, Supplier
from blendapp.domain.wording import _
from blendapp.exchange.suggestions import did_you_mean
from blendapp.exchange.workbook_draft import Draft
from blendapp.exchange.workbook_library import (
    known_unit,
    number_or,
    read_value_basis,
    unknown_site,
    unknown_supplier,
)
from blendapp.exchange.workbook_sheet import Row, Sheet


def read_sites(draft: Draft, sheet: Sheet) -> None:
    for row in sheet.rows():
        name = draft.claim("site", row, "Site")
        before: Site | None = draft.library.named("site", name) if name else None
        site = before or Site(draft.new_id("site") if name else 0, name or "")
        if name:
            draft.put(before, site)
        draft.check(site, row)


def read_suppliers(draft: Draft, sheet: Sheet) -> None:
    for row in sheet.rows():
        name = draft.claim("supplier", row, "Supplier")
        before: Supplier | None = draft.library.named("supplier", name) if name else None
        base = before or Supplier(draft.new_id("supplier") if name else 0, name or "")
        supplier = replace(base, note=row.text("Note") or base.note)
        if name:
            draft.put(before, supplier)
        draft.check(supplier, row)


def read_scales(draft: Draft, sheet: Sheet) -> None:
    """Scales in kg, and liquid meters in l; a scale of the mill that gets a step of the other kind becomes one."""
    for row in sheet.rows():
        name = draft.claim("scale", row, "Scale")
        before: Scale | None = draft.library.named("scale", name) if name else None
        base = before or Scale(draft.new_id("scale") if name else 0, name or "", None)
        step_kg, step_l = row.number_in("Step kg"), row.number_in("Step l")
        refused = step_kg is None and step_l is None and before is None
        if refused:
            if not row.has("Step kg") and not row.has("Step l"):
                row.fault("Step kg", _("A scale needs its step: in kg, or in l for a liquid meter."))
            # A stand-in, so that what else is wrong with the row is said with it.
            by_volume = any(row.has(heading) for heading in ("Step l", "Least l", "Greatest l"))
            step_kg, step_l = (None, 1.0) if by_volume and not row.has("Step kg") else (1.0, None)
        if step_l is not None and not row.has("Step kg"):
            base = replace(base, step_kg=None, least_kg=None, greatest_kg=None)
        elif step_kg is not None and not row.has("Step l"):
            base = replace(base, step_l=None, least_l=None, greatest_l=None)
        hand_add = row.yes("Hand add")
        site = draft.find("site", row, "Site", unknown_site())
        scale = replace(
            base,
            step_kg=base.step_kg if step_kg is None else step_kg,
            least_kg=number_or(row, "Least kg", base.least_kg),
            greatest_kg=number_or(row, "Greatest kg", base.greatest_kg),
            tolerance_percent=number_or(row, "Tolerance %", base.tolerance_percent),
            hand_add=base.hand_add if hand_add is None else hand_add,
            site_id=site.id if site else base.site_id,
            step_l=base.step_l if step_l is None else step_l,
            least_l=number_or(row, "Least l", base.least_l),
            greatest_l=number_or(row, "Greatest l", base.greatest_l),
        )
        if refused and name:
            draft.refuse("scale", name)
        elif name:
            draft.put(before, scale)
        draft.check(scale, row)


def read_mixers(draft: Draft, sheet: Sheet) -> None:
    for row in sheet.rows():
        name = draft.claim("mixer", row, "Mixer")
        before: Mixer | None = draft.library.named("mixer", name) if name else None
        base = before or Mixer(draft.new_id("mixer") if name else 0, name or "")
        site = draft.find("site", row, "Site", unknown_site())
        mixer = replace(
            base,
            least_kg=number_or(row, "Least kg", base.least_kg),
            greatest_kg=number_or(row, "Greatest kg", base.greatest_kg),
            site_id=site.id if site else base.site_id,
        )
        if name:
            draft.put(before, mixer)
        draft.check(mixer, row)


# -- lots

# A lot is known by its ingredient and its folded name.
LotKey = tuple[int, str]


def lots_by_name(draft: Draft) -> dict[LotKey, Lot]:
    """The lots of the library; of several of one name the first."""
    found: dict[LotKey, Lot] = {}
    for lot in draft.library.all("lot"):
        found.setdefault((lot.ingredient_id, fold(lot.name)), lot)
    return found


def read_lots(draft: Draft, sheet: Sheet) -> None:
    known, rows = lots_by_name(draft), _Twice()
    for row in sheet.rows():
        ingredient = _ingredient(draft, row)
        name = _needed(row, "Lot")
        key = (ingredient.id, fold(name)) if ingredient and name else None
        if key is not None and not rows.is_first(key, row, "Lot", name):
            key = None
        before = known.get(key) if key else None
        base = before or Lot(draft.new_id("lot") if key else 0, ingredient.id if ingredient else 0, name)
        supplier = draft.find("supplier", row, "Supplier", unknown_supplier())
        lot = replace(
            base,
            received=row.date("Received") or base.received,
            mass_kg=number_or(row, "Mass kg", base.mass_kg),
            dry_matter_percent=number_or(row, "Dry matter %", base.dry_matter_percent),
            supplier_id=supplier.id if supplier else base.supplier_id,
            note=row.text("Note") or base.note,
        )
        if key:
            draft.put(before, lot)
        if name:
            draft.check(lot, row, {"name": "Lot", "mass_kg": "Mass kg", "dry_matter_percent": "Dry matter %"})


def read_lot_values(draft: Draft, sheet: Sheet) -> None:
    """The analyses of every lot that has rows; they replace those that it had."""
    lots = lots_by_name(draft)
    by_lot: dict[int, list[LotValue]] = {}
    unknown_nutrient = _("There is no nutrient “{name}”; add it to the sheet Nutrients.")
    for row in sheet.rows():
        ingredient = _ingredient(draft, row)
        lot = _lot(row, ingredient, lots) if _needed(row, "Lot") and ingredient else None
        _needed(row, "Nutrient")
        nutrient: Nutrient | None = draft.find("nutrient", row, "Nutrient", unknown_nutrient)
        amount = row.number_in("Value")
        if not row.has("Value"):
            row.oddity("Value", _("The row holds no value and was left out; the value stays unknown."))
        complete = lot is not None and nutrient is not None and amount is not None
        value = LotValue(
            0, lot.id if lot else 0, nutrient.id if nutrient else 0, 0.0 if amount is None else amount,
            known_unit(row.name("Unit")) if row.has("Unit") else nutrient.unit if nutrient else "",
            str(read_value_basis(row, "Basis") or (ingredient.basis if ingredient else Basis.AS_FED)),
            row.text("Source"), row.date("Date"),
        )
        headings = {"amount": "Value", "unit": "Unit"}
        if not complete:
            draft.is_faultless(value, row, headings)
        elif draft.check(value, row, headings):
            by_lot.setdefault(value.lot_id, []).append(value)
    standing: dict[int, list[LotValue]] = {}
    for old in draft.library.all("lot_value"):
        standing.setdefault(old.lot_id, []).append(old)
    for lot_id, values in by_lot.items():
        before = standing.get(lot_id, [])
        for index, value in enumerate(values):
            old = before[index] if index < len(before) else None
            draft.put(old, replace(value, id=old.id if old else draft.new_id("lot_value")))
        for old in before[len(values) :]:
            draft.put(old, None)


def _ingredient(draft: Draft, row: Row) -> Ingredient | None:
    _needed(row, "Ingredient")
    found: Ingredient | None = draft.find(
        "ingredient", row, "Ingredient", _("There is no ingredient “{name}”; add it to the sheet Ingredients.")
    )
    return found


def _needed(row: Row, heading: str) -> str:
    if not row.has(heading):
        row.fault(heading, _("A name is needed here."))
        return ""
    return row.name(heading)


def _lot(row: Row, ingredient: Ingredient, lots: dict[LotKey, Lot]) -> Lot | None:
    name = row.name("Lot")
    lot = lots.get((ingredient.id, fold(name)))
    if lot is None and name:
        text = _("There is no lot “{name}” of {ingredient}; add it to the sheet Lots.")
        near = did_you_mean(name, [one.name for (key, _name), one in lots.items() if key == ingredient.id])
        row.fault("Lot", text.format(name=name, ingredient=ingredient.name) + near)
    return lot


class _Twice:
    """In which row each key of a sheet stood first."""

    def __init__(self) -> None:
        self.first: dict[tuple[int | None, str], int] = {}

    def is_first(self, key: tuple[int | None, str], row: Row, heading: str, name: str) -> bool:
        """Whether no row above has the key; the fault is said at the heading otherwise."""
        first = self.first.setdefault(key, row.number)
        if first != row.number:
            text = _("“{name}” stands in row {first} and again in row {second}; rename or delete one of them.")
            row.fault(heading, text.format(name=name, first=first, second=row.number))
        return first == row.number


# -- bins


def read_bins(draft: Draft, sheet: Sheet) -> None:
    """Bins, known by name and site; see _standing for a row that names no site, or one that the bin had not yet."""
    read = []
    for row in sheet.rows():
        name = _needed(row, "Bin")
        site = draft.find("site", row, "Site", unknown_site())
        read.append((row, name, None if site is None else int(site.id)))
    exact = {(site_id, fold(name)) for _row, name, site_id in read}
    bins: dict[str, list[Bin]] = {}
    for one in draft.library.all("bin"):
        bins.setdefault(fold(one.name), []).append(one)
    lots, rows = lots_by_name(draft), _Twice()
    for row, name, site_id in read:
        first = bool(name) and rows.is_first((site_id, fold(name)), row, "Bin", name)
        before = _standing(bins.get(fold(name), []), site_id, exact, row, name) if first else None
        base = before or Bin(draft.new_id("bin") if first else 0, name)
        found = _held(draft, row, base, lots)
        filled = replace(found, site_id=base.site_id if site_id is None else site_id)
        if first:
            draft.put(before, filled)
        if name:
            draft.check(filled, row)


def _standing(
    named: list[Bin], site_id: int | None, exact: set[tuple[int | None, str]], row: Row, name: str
) -> Bin | None:
    """The bin of the mill that a row is about: that of its name and site; else the one of its name that no row is about
    and that either side has no site of."""
    same = next((one for one in named if one.site_id == site_id), None)
    if same is not None:
        return same
    free = [one for one in named if (one.site_id, fold(name)) not in exact]
    if site_id is not None:
        free = [one for one in free if one.site_id is None]
    if len(free) > 1:
        row.fault("Site", _("Several bins are called “{name}”; name the site of this one.").format(name=name))
        return None
    return free[0] if free else None


def _held(draft: Draft, row: Row, base: Bin, lots: dict[LotKey, Lot]) -> Bin:
    """The bin with what the row puts into it; another ingredient takes the lot out that was there."""
    no_ingredient = _("There is no ingredient “{name}”; add it to the sheet Ingredients.")
    ingredient: Ingredient | None = draft.find("ingredient", row, "Ingredient", no_ingredient)
    if ingredient is None and row.has("Ingredient"):
        return base
    if ingredient is not None and ingredient.id != base.ingredient_id:
        base = replace(base, ingredient_id=ingredient.id, lot_id=None)
    if not row.has("Lot"):
        return base
    if base.ingredient_id is None:
        row.fault("Lot", _("The row names a lot and no ingredient; name the ingredient that it is of."))
        return base
    lot = _lot(row, draft.library.ingredient(base.ingredient_id), lots)
    return base if lot is None else replace(base, lot_id=lot.id)
