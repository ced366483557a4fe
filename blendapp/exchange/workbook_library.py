"""The sheets Mill, Scales, Mixers, Nutrients and Ingredients of the exchange workbook."""

from __future__ import annotations

from dataclasses import replace

from blendapp.domain import checks, units
from blendapp.domain.ingredients import Basis, Ingredient, Tag
from blendapp.domain.mills import MillInfo
from blendapp.domain.names import fold
from blendapp.domain.nutrients import KEYS, Nutrient
from blendapp.domain.plant import Mixer, Scale
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
            found = _with_item(found, field, row)
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
    known = {fold(word): word for word in (units.TON_MEANINGS if field == "ton_means" else units.CWT_MEANINGS)}
    value = known.get(fold(value), value)
    return replace(mill, ton_means=value) if field == "ton_means" else replace(mill, cwt_means=value)


def read_scales(draft: Draft, sheet: Sheet) -> None:
    for row in sheet.rows():
        name = draft.claim("scale", row, "Scale")
        before: Scale | None = draft.library.named("scale", name) if name else None
        step = row.number_in("Step kg")
        refused = step is None and before is None
        if refused and not row.has("Step kg"):
            row.fault("Step kg", _("A scale needs its step in kg."))
        base = before or Scale(draft.new_id("scale") if name else 0, name or "", 1.0)
        hand_add = row.yes("Hand add")
        scale = replace(
            base,
            step_kg=base.step_kg if step is None else step,
            least_kg=_number(row, "Least kg", base.least_kg),
            greatest_kg=_number(row, "Greatest kg", base.greatest_kg),
            tolerance_percent=_number(row, "Tolerance %", base.tolerance_percent),
            hand_add=base.hand_add if hand_add is None else hand_add,
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
        mixer = replace(
            base,
            least_kg=_number(row, "Least kg", base.least_kg),
            greatest_kg=_number(row, "Greatest kg", base.greatest_kg),
        )
        if name:
            draft.put(before, mixer)
        draft.check(mixer, row)


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
    """Every ingredient of the sheet without what it is made by; their rows are read again for values and prices.

    An ingredient without a name of its own comes with identifier 0 and is no part of the draft.
    """
    found: list[tuple[Row, Ingredient]] = []
    tags = {fold(tag): tag for tag in Tag}
    for row in sheet.rows():
        name = draft.claim("ingredient", row, "Ingredient")
        before: Ingredient | None = draft.library.named("ingredient", name) if name else None
        base = before or Ingredient(draft.new_id("ingredient") if name else 0, name or "")
        scale = draft.find("scale", row, "Scale", _("There is no scale “{name}”; add it to the sheet Scales."))
        ingredient = replace(
            base,
            class_name=row.name("Class") or base.class_name,
            dry_matter_percent=_number(row, "Dry matter %", base.dry_matter_percent),
            basis=read_value_basis(row, "Basis") or base.basis,
            code=row.name("Code") or base.code,
            scale_id=scale.id if scale else base.scale_id,
            stock_kg=_number(row, "Stock kg", base.stock_kg),
            density_kg_per_l=_number(row, "Density kg/l", base.density_kg_per_l),
            bushel_lb=_number(row, "Bushel lb", base.bushel_lb),
            tags=_tags(row, tags) if row.has("Tags") else base.tags,
            drug=row.text("Drug") or base.drug,
            drug_level=row.text("Drug level") or base.drug_level,
            drug_species=row.text("Drug species") or base.drug_species,
            withdrawal=row.text("Withdrawal") or base.withdrawal,
            note=row.text("Note") or base.note,
        )
        if name:
            draft.put(before, ingredient)
        draft.check(replace(ingredient, made_by_formula_id=None), row)
        found.append((row, ingredient))
    return found


def read_made_by(draft: Draft, rows: list[tuple[Row, Ingredient]]) -> None:
    """Which formula makes which ingredient, when all formulas and limits are known."""
    making: list[tuple[Row, Ingredient]] = []
    for row, found in rows:
        formula = draft.find(
            "formula", row, "Made by formula", _("There is no formula “{name}”; add it to the sheet Formulas.")
        )
        if formula is None or not found.id:
            continue
        ingredient = draft.library.ingredient(found.id)
        made = replace(ingredient, made_by_formula_id=formula.id)
        draft.put(ingredient, made)
        making.append((row, made))
    for row, made in making:
        for name, text in checks.faults(made, draft.library):
            if name == "made_by_formula_id":
                row.fault("Made by formula", text)


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


def _number(row: Row, heading: str, otherwise: float | None) -> float | None:
    found = row.number_in(heading)
    return otherwise if found is None else found
