"""The sheets Mill, Nutrients and Ingredients of the exchange workbook."""

from __future__ import annotations

from dataclasses import replace
from typing import Any

from blendapp.domain import checks, units
from blendapp.domain.ingredients import Basis, Ingredient, Tag
from blendapp.domain.mills import PAPERS, SHEET_MASSES, MillInfo
from blendapp.domain.names import fold
from blendapp.domain.nutrients import KEYS, Nutrient
from blendapp.domain.wording import _
from blendapp.exchange.suggestions import did_you_mean
from blendapp.exchange.workbook_draft import Draft
from blendapp.exchange.workbook_layout import MILL_ITEMS
from blendapp.exchange.workbook_sheet import Row, Sheet, not_in_list


def read_mill(draft: Draft, sheet: Sheet) -> None:
    items = {fold(item): (item, field) for item, field in MILL_ITEMS.items()}
    before: MillInfo | None = draft.library.records["mill"].get(1)
    found = before or MillInfo()
    seen: dict[str, Row] = {}
    for row in sheet.rows():
        name = row.name("Item")
        item, field = items.get(fold(name), ("", ""))
        if not field:
            text = _("The item “{name}” is not known here and was left alone.").format(name=name)
            row.oddity("Item", text + did_you_mean(name, MILL_ITEMS))
        elif item in seen:
            text = _("“{name}” stands in row {first} and again in row {second}; rename or delete one of them.")
            row.fault("Item", text.format(name=item, first=seen[item].number, second=row.number))
            for field_name, sentence in checks.faults(_with_item(MillInfo(), field, row), draft.library):
                if field_name == field:
                    row.fault("Value", sentence)
        else:
            seen[item] = row
            found = _with_item(found, field, row) if field != "site_id" else _at_site(draft, found, row)
    for name, text in checks.faults(found, draft.library):
        item = next(heading for heading, field in MILL_ITEMS.items() if field == name)
        sheet.problems.fault(text, seen[item].place("Value") if item in seen else sheet.place())
    same = before is None or before.currency == found.currency or not units.is_currency_code(found.currency)
    if before is not None and not same and draft.library.records["quote"]:
        sentence = _("The prices of the workbook are in {theirs}, those of the mill in {own}; convert them first.")
        sheet.problems.fault(
            sentence.format(theirs=found.currency, own=before.currency), seen[_item_of("currency")].place("Value")
        )
    draft.put(before, found)


def _item_of(field: str) -> str:
    return next(heading for heading, name in MILL_ITEMS.items() if name == field)


def _with_item(mill: MillInfo, field: str, row: Row) -> MillInfo:
    value = row.name("Value")
    if not value:
        return mill
    if field == "currency":
        code = value.upper()
        return replace(mill, currency=code if units.is_currency_code(code) else value)
    if field == "name":
        return replace(mill, name=value)
    known = {fold(word): word for word in _ITEM_WORDS.get(field, ())}
    chosen: dict[str, Any] = {field: known.get(fold(value), value)} if known else {}
    return replace(mill, **chosen)


_ITEM_WORDS: dict[str, tuple[str, ...]] = {
    "ton_means": tuple(units.TON_MEANINGS), "cwt_means": tuple(units.CWT_MEANINGS), "sheet_mass": SHEET_MASSES,
    "paper": PAPERS,
}


def _at_site(draft: Draft, mill: MillInfo, row: Row) -> MillInfo:
    site = draft.find("site", row, "Value", unknown_site())
    return mill if site is None else replace(mill, site_id=site.id)


def unknown_site() -> str:
    """The sentence for a site that nothing names, with {name}."""
    return _("There is no site “{name}”; add it to the sheet Sites.")


def read_nutrients(draft: Draft, sheet: Sheet) -> None:
    keys = {fold(key): key for key in KEYS}
    for row in sheet.rows():
        name = draft.claim("nutrient", row, "Nutrient")
        before: Nutrient | None = draft.library.named("nutrient", name) if name else None
        base = before or Nutrient(draft.new_id("nutrient") if name else 0, name or "", "", False)
        unit = row.name("Unit")
        key = row.name("Key")
        never_negative = row.yes("Never negative")
        nutrient = replace(
            base,
            unit=known_unit(unit) if unit else base.unit,
            never_negative=base.never_negative if never_negative is None else never_negative,
            key=keys.get(fold(key), key) if key else base.key,
            note=row.text("Note") or base.note,
        )
        if unit and before is not None and not _same_family(before.unit, nutrient.unit):
            text = _("“{name}” is kept in {own} in the mill; {unit} measures something else, use a unit of its kind.")
            row.fault("Unit", text.format(name=name, own=before.unit or "/kg", unit=unit))
            draft.is_faultless(nutrient, row)
        elif not draft.check(nutrient, row):
            draft.refuse("nutrient", name or "")
        elif name:
            draft.put(before, nutrient)


def _same_family(unit: str, other: str) -> bool:
    try:
        return units.concentration(unit).family is units.concentration(other).family
    except ValueError:
        return True  # an unknown unit is said by the check of the record


# Spellings of a unit that differ in case, spacing or the Greek letter only.
_UNIT_WORDS = {fold(name).replace(" ", ""): name for name in units.CONCENTRATION}


def known_unit(text: str) -> str:
    """A unit of concentration as domain.units writes it, if the text is one; else the text as it is."""
    plain = text.strip()
    if plain in units.CONCENTRATION or plain in units.PER_DAY:
        return plain
    return _UNIT_WORDS.get(fold(plain).replace(" ", "").replace("μ", "u"), plain)


def read_ingredients(draft: Draft, sheet: Sheet) -> list[tuple[Row, Ingredient]]:
    """Every ingredient of the sheet without what it is made by and whether it is opened.

    Their rows are read again for values and prices.

    An ingredient without a name of its own comes with identifier 0 and is no part of the draft.
    """
    found: list[tuple[Row, Ingredient]] = []
    tags = {fold(tag): tag for tag in Tag}
    no_scale, no_supplier = _("There is no scale “{name}”; add it to the sheet Scales."), unknown_supplier()
    for row in sheet.rows():
        name = draft.claim("ingredient", row, "Ingredient")
        before: Ingredient | None = draft.library.named("ingredient", name) if name else None
        base = before or Ingredient(draft.new_id("ingredient") if name else 0, name or "")
        scale = draft.find("scale", row, "Scale", no_scale)
        supplier = draft.find("supplier", row, "Supplier", no_supplier)
        ingredient = replace(
            base,
            class_name=row.name("Class") or base.class_name,
            dry_matter_percent=number_or(row, "Dry matter %", base.dry_matter_percent),
            basis=read_value_basis(row, "Basis") or base.basis,
            code=row.name("Code") or base.code,
            scale_id=scale.id if scale else base.scale_id,
            stock_kg=number_or(row, "Stock kg", base.stock_kg),
            density_kg_per_l=number_or(row, "Density kg/l", base.density_kg_per_l),
            bushel_lb=number_or(row, "Bushel lb", base.bushel_lb),
            tags=_tags(row, tags) if row.has("Tags") else base.tags,
            drug=row.text("Drug") or base.drug,
            drug_level=row.text("Drug level") or base.drug_level,
            drug_species=row.text("Drug species") or base.drug_species,
            withdrawal=row.text("Withdrawal") or base.withdrawal,
            note=row.text("Note") or base.note,
            supplier_id=supplier.id if supplier else base.supplier_id,
        )
        if name:
            draft.put(before, ingredient)
        draft.check(replace(ingredient, made_by_formula_id=None, opened=False), row)
        found.append((row, ingredient))
    return found


def read_made_by(draft: Draft, rows: list[tuple[Row, Ingredient]]) -> None:
    """Which formula makes which ingredient and which of them are opened, when all formulas and limits are known."""
    making: list[tuple[Row, Ingredient]] = []
    for row, found in rows:
        formula = draft.find(
            "formula", row, "Made by formula", _("There is no formula “{name}”; add it to the sheet Formulas.")
        )
        opened = row.yes("Opened")
        if (formula is None and opened is None) or not found.id:
            continue
        ingredient = draft.library.ingredient(found.id)
        made = replace(
            ingredient,
            made_by_formula_id=formula.id if formula else ingredient.made_by_formula_id,
            opened=ingredient.opened if opened is None else opened,
        )
        draft.put(ingredient, made)
        if formula is not None or not row.has("Made by formula"):
            making.append((row, made))
    for row, made in making:
        draft.say_oddities(made, row)
        for name, text in checks.faults(made, draft.library):
            if name in ("made_by_formula_id", "opened"):
                row.fault("Made by formula" if name == "made_by_formula_id" else "Opened", text)


def _tags(row: Row, known: dict[str, Tag]) -> tuple[Tag, ...]:
    found: list[Tag] = []
    for part in row.text("Tags").split(","):
        if not part.strip():
            continue
        tag = known.get(fold(part))
        if tag is None:
            row.fault("Tags", not_in_list(part.strip(), [str(tag) for tag in Tag]))
        elif tag not in found:
            found.append(tag)
    return tuple(found)


def read_value_basis(row: Row, heading: str) -> Basis | None:
    """The basis of composition values; "dm" is dry matter too."""
    return Basis.DRY_MATTER if fold(row.name(heading)) == "dm" else row.choice(heading, Basis)


def unknown_supplier() -> str:
    """The sentence for a supplier that nothing names, with {name}."""
    return _("There is no supplier “{name}”; add it to the sheet Suppliers.")


def number_or(row: Row, heading: str, otherwise: float | None) -> float | None:
    found = row.number_in(heading)
    return otherwise if found is None else found
