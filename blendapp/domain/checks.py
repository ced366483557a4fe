"""What is refused and what is odd about a record, wherever it comes from: typed, pasted or imported."""

from __future__ import annotations

import math
import sys
from collections.abc import Callable
from typing import Any

from blendapp.domain import limit_oddities, limit_units, making, units
from blendapp.domain.fields import fields_of
from blendapp.domain.formulas import Amounts, Formula, Limit, LimitBasis, LimitKind, MixingStep, SubjectKind
from blendapp.domain.ingredients import Ingredient, Value
from blendapp.domain.library import NAMED_KINDS, Library
from blendapp.domain.mills import PAPERS, SHEET_MASSES
from blendapp.domain.names import fold
from blendapp.domain.nutrients import BUILT_IN, KEYS, Nutrient
from blendapp.domain.plant import Bin, Lot, LotValue, Mixer, Scale
from blendapp.domain.quotes import Quote
from blendapp.domain.records import KIND_OF, Change, Record
from blendapp.domain.wording import _

# (field, sentence): the field is the attribute that the sentence is about.
Finding = tuple[str, str]


def faults(record: Record, library: Library) -> list[Finding]:
    """Everything for which a record is refused. library: what it would stand among, itself included or not."""
    kind = KIND_OF[type(record)]
    found: list[Finding] = []
    for field in fields_of(kind):
        value = getattr(record, field.name)
        if isinstance(value, int | float) and not isinstance(value, bool):
            sentence = field.fault(value) if math.isfinite(value) else _not_finite(field.label)
            if sentence:
                found.append((field.name, sentence))
    if any(isinstance(value, float) and not math.isfinite(value) for value in vars(record).values()):
        return found
    if kind in NAMED_KINDS:
        found += _name_faults(kind, record, library)
    check = _FAULTS.get(kind)
    return found + (check(record, library) if check else [])


def _not_finite(label: str) -> str:
    return _("{label} must be a number that has an end; leave it blank where there is none.").format(label=label)


def oddities(record: Record, library: Library) -> list[Finding]:
    """What is let in but worth saying."""
    check = _ODDITIES.get(KIND_OF[type(record)])
    return check(record, library) if check else []


def _name_faults(kind: str, record: Record, library: Library) -> list[Finding]:
    if not record.name.strip():
        return [("name", _("A name is needed here."))]
    if kind == "nutrient" and fold(record.name) in map(fold, BUILT_IN):
        return [("name", _("“{name}” is built in; choose another name.").format(name=record.name))]
    if any(other.id != record.id for other in library.all_named(kind, record.name)):
        return [("name", _("The name “{name}” is taken; choose another one.").format(name=record.name))]
    return []


def quiet_range(nutrient: Nutrient, unit: str) -> tuple[float, float]:
    """The least and greatest amount of a nutrient, in a unit of its family, about which nothing is to be said.

    Within it faults() and oddities() of a Value find nothing in the amount; whole columns are read by it. Outside
    they may or may not.
    """
    found = units.concentration(unit)
    whole = 1 / found.factor if found.family is units.Family.MASS else math.inf
    return (0.0 if nutrient.never_negative else -math.inf), min(whole, sys.float_info.max) * (1 - 1e-12)


def _mill(record: Any, library: Library) -> list[Finding]:
    found: list[Finding] = []
    if not units.is_currency_code(record.currency):
        text = _("“{code}” is no currency code; write three capital letters of ISO 4217, for example USD.")
        found.append(("currency", text.format(code=record.currency)))
    for name, known in (("ton_means", units.TON_MEANINGS), ("cwt_means", units.CWT_MEANINGS)):
        value = getattr(record, name)
        if value and value not in known:
            text = _("“{value}” is not known here; use one of {known}, or leave it blank.")
            found.append((name, text.format(value=value, known=", ".join(known))))
    for name, choice in (("sheet_mass", SHEET_MASSES), ("paper", PAPERS)):
        value = getattr(record, name)
        if value not in choice:
            text = _("“{value}” is not known here; use one of {known}.")
            found.append((name, text.format(value=value, known=", ".join(choice))))
    return found


def _nutrient(record: Nutrient, library: Library) -> list[Finding]:
    found: list[Finding] = []
    try:
        units.concentration(record.unit)
    except ValueError as error:
        found.append(("unit", str(error)))
    if record.key and record.key not in KEYS:
        text = _("The key “{key}” is not known; leave it blank or use one of {known}.")
        found.append(("key", text.format(key=record.key, known=", ".join(KEYS))))
    return found


def _ingredient(record: Ingredient, library: Library) -> list[Finding]:
    if record.made_by_formula_id is None:
        if record.opened:
            text = _("Only an ingredient that a formula makes can be opened; name the formula that makes it.")
            return [("opened", text)]
        return []
    if library.records["ingredient"].get(record.id) != record:
        library = library.copy()
        library.apply([Change(library.records["ingredient"].get(record.id), record)])
    sentence = making.cycle_fault(library, record.id)
    return [("made_by_formula_id", sentence)] if sentence else []


def _odd_ingredient(record: Ingredient, library: Library) -> list[Finding]:
    """A made ingredient is used as what its own tags say; what it may hold of tagged parts is worth saying."""
    if record.made_by_formula_id is None:
        return []
    lacking = [tag for tag in making.held(library, record).tags if tag not in record.tags]
    if not lacking:
        return []
    names = [part.name for part in making.parts(library, record.id) if not set(lacking).isdisjoint(part.tags)]
    text = _("{name} may hold {parts} and lacks their tags: {tags}. Add them, so that formulas and cautions know.")
    said = text.format(name=record.name, parts=", ".join(names), tags=", ".join(_(str(tag)) for tag in lacking))
    return [("tags", said)]


def _value(record: Value | LotValue, library: Library) -> list[Finding]:
    nutrient = library.records["nutrient"].get(record.nutrient_id)
    try:
        unit = units.concentration(record.unit)
    except ValueError as error:
        return [("unit", str(error))]
    if nutrient is not None and units.concentration(nutrient.unit).family is not unit.family:
        text = _("{unit} does not measure {nutrient}, which is kept in {own}; use a unit of that kind.")
        return [("unit", text.format(unit=record.unit, nutrient=nutrient.name, own=nutrient.unit or "/kg"))]
    if nutrient is not None and nutrient.never_negative and record.amount < 0:
        text = _("{nutrient} can never be negative; {value} is.")
        return [("amount", text.format(nutrient=nutrient.name, value=f"{record.amount:g}"))]
    return []


def _odd_value(record: Value | LotValue, library: Library) -> list[Finding]:
    nutrient = library.nutrient(record.nutrient_id)
    unit = units.concentration(record.unit)
    if unit.family is units.Family.MASS and record.amount * unit.factor > 1 and "protein" not in nutrient.key:
        text = _("{nutrient} of {value} {unit} is more than the whole; check the unit.")
        return [("amount", text.format(nutrient=nutrient.name, value=f"{record.amount:g}", unit=record.unit))]
    return []


def _quote(record: Quote, library: Library) -> list[Finding]:
    found: list[Finding] = []
    if record.per not in units.PRICE_PER:
        text = _("“{per}” is not known as the mass of a price; use one of {known}.")
        found.append(("per", text.format(per=record.per, known=", ".join(units.PRICE_PER))))
    elif record.per == units.BUSHEL and not record.bushel_lb:
        found.append(("per", _("A price per bushel needs the weight of a bushel; enter it under Bushel lb.")))
    if record.valid_from and record.valid_to and record.valid_from > record.valid_to:
        found.append(("valid_to", _("The last day of a price lies before its first.")))
    replaced = None if record.replaces_id is None else library.records["quote"].get(record.replaces_id)
    if record.replaces_id == record.id or (replaced is not None and replaced.ingredient_id != record.ingredient_id):
        found.append(("price", _("A price takes the place of another one of the same ingredient only.")))
    return found


def _spread(record: Scale | Mixer, library: Library) -> list[Finding]:
    if record.least_kg is not None and record.greatest_kg is not None and record.least_kg > record.greatest_kg:
        text = _("The least load {least} kg is above the greatest {greatest} kg; correct one of them.")
        return [("least_kg", text.format(least=f"{record.least_kg:g}", greatest=f"{record.greatest_kg:g}"))]
    return []


def _scale(record: Scale, library: Library) -> list[Finding]:
    found = _spread(record, library)
    if record.step_kg is None and record.step_l is None:
        found.append(("step_kg", _("A scale needs its step: Step kg, or Step l for a liquid meter.")))
    elif record.step_kg is not None and record.step_l is not None:
        found.append(("step_l", _("A scale has a step in kg or in l, not both; clear one of them.")))
    elif record.step_kg is None and (record.least_kg is not None or record.greatest_kg is not None):
        found.append(("least_kg", _("A liquid meter is bounded in l; enter Least l and Greatest l, and clear the kg.")))
    elif record.step_l is None and (record.least_l is not None or record.greatest_l is not None):
        found.append(("least_l", _("A scale in kg is bounded in kg; clear Least l and Greatest l.")))
    if record.least_l is not None and record.greatest_l is not None and record.least_l > record.greatest_l:
        text = _("The least dose {least} l is above the greatest {greatest} l; correct one of them.")
        found.append(("least_l", text.format(least=f"{record.least_l:g}", greatest=f"{record.greatest_l:g}")))
    return found


def _bin(record: Bin, library: Library) -> list[Finding]:
    if not record.name.strip():
        return [("name", _("A name is needed here."))]
    same = [b for b in library.all("bin") if b.id != record.id and b.site_id == record.site_id]
    if any(fold(other.name) == fold(record.name) for other in same):
        return [("name", _("The name “{name}” is taken; choose another one.").format(name=record.name))]
    lot = None if record.lot_id is None else library.records["lot"].get(record.lot_id)
    if lot is not None and lot.ingredient_id != record.ingredient_id:
        text = _("Lot {lot} is of another ingredient than the one in the bin; choose a lot of that, or none.")
        return [("lot_id", text.format(lot=lot.name))]
    return []


def _lot(record: Lot, library: Library) -> list[Finding]:
    return [] if record.name.strip() else [("name", _("A name is needed here."))]


def _odd_lot(record: Lot, library: Library) -> list[Finding]:
    if any(
        lot.ingredient_id == record.ingredient_id and lot.id != record.id and fold(lot.name) == fold(record.name)
        for lot in library.records["lot"].values()
    ):
        text = _("Another lot of the same ingredient is called “{name}” too; give one of them another name.")
        return [("name", text.format(name=record.name))]
    return []


def _formula(record: Formula, library: Library) -> list[Finding]:
    found: list[Finding] = []
    if record.loss_percent == 100:  # what lies above is out of the range of the field
        found.append(("loss_percent", _("A loss of 100 % leaves nothing; enter less.")))
    dry = record.product_dry_matter_percent
    if dry is not None and dry > 100:
        found.append(("product_dry_matter_percent", _("The dry matter of the product lies above 0 and at most 100 %.")))
    return found


def _mixing_step(record: MixingStep, library: Library) -> list[Finding]:
    if not record.text.strip():
        return [("text", _("A step says what to do."))]
    return []


def _limit(record: Limit, library: Library) -> list[Finding]:
    return limit_faults(record, library, library.formula(record.formula_id).amounts)


def limit_faults(record: Limit, library: Library, amounts: Amounts) -> list[Finding]:
    """The faults of a limit in a formula of such amounts, whether or not there is a formula of its identifier."""
    found = _subject_faults(record)
    if found:
        return found
    if record.minimum is not None and record.maximum is not None and record.minimum > record.maximum:
        text = _("The minimum {minimum} is above the maximum {maximum}; correct one of them.")
        found.append(("minimum", text.format(minimum=f"{record.minimum:g}", maximum=f"{record.maximum:g}")))
    try:
        limit_units.factor(library, record, amounts)
    except ValueError as error:
        found.append(("unit", str(error)))
        return found
    if record.kind is LimitKind.NUTRIENT:
        found += _nutrient_limit(record, library, amounts)
    elif record.kind in (LimitKind.INGREDIENT, LimitKind.GROUP, LimitKind.PRACTICAL):
        found += _inclusion_limit(record, library, amounts)
    elif record.kind is LimitKind.RATIO:
        found += _ratio_limit(record)
    else:
        found += _count_limit(record)
    return found


def _subject_faults(record: Limit) -> list[Finding]:
    """A limit that is not about what its kind is about; nothing more can be said of it."""
    one = len(record.subject.ids) == 1
    if record.kind is LimitKind.NUTRIENT and not record.subject.is_nutrient:
        return [("subject", _("A nutrient limit names a nutrient, Dry matter or Moisture."))]
    if record.kind in (LimitKind.INGREDIENT, LimitKind.PRACTICAL) and (
        record.subject.kind is not SubjectKind.INGREDIENTS or not one
    ):
        return [("subject", _("A limit of this kind names one ingredient; use the kind group for several."))]
    if record.kind in (LimitKind.GROUP, LimitKind.COUNT) and record.subject.is_nutrient:
        return [("subject", _("A group names ingredients, or one class."))]
    if record.kind is LimitKind.RATIO:
        if record.per is None:
            return [("per", _("A ratio needs what it is over; name it under Per."))]
        if record.subject.is_nutrient != record.per.is_nutrient:
            return [("per", _("A ratio is of two nutrients or of two groups, not of one of each."))]
    elif record.per is not None:
        return [("per", _("Only a ratio is over something; leave Per blank."))]
    return []


def _nutrient_limit(record: Limit, library: Library, amounts: Amounts) -> list[Finding]:
    stated = record.at_dry_matter_percent
    if record.basis is LimitBasis.AT_DRY_MATTER and (stated is None or not 0 < stated <= 100):
        return [("basis", _("A stated dry matter must lie above 0 and at most 100 %; write it like 88 %."))]
    if record.basis is LimitBasis.PER_DAY and amounts is Amounts.BLEND:
        text = _("A blend has no amount per day; choose as fed or dry matter, or make the formula a ration.")
        return [("basis", text)]
    if record.subject.kind in (SubjectKind.DRY_MATTER, SubjectKind.MOISTURE) and record.basis in (
        LimitBasis.DRY_MATTER,
        LimitBasis.AT_DRY_MATTER,
    ):
        text = _("{name} is limited as fed or per day; per dry matter it says nothing.")
        return [("basis", text.format(name=library.subject_name(record.subject)))]
    return []


def _inclusion_limit(record: Limit, library: Library, amounts: Amounts) -> list[Finding]:
    found: list[Finding] = []
    share = record.unit == units.SHARE_OF_DRY_MATTER
    whole = amounts is Amounts.BLEND or share
    factor = limit_units.factor(library, record, amounts)
    for name in ("minimum", "maximum"):
        bound = getattr(record, name)
        if bound is None:
            continue
        if bound < 0:
            found.append((name, _("An inclusion cannot be below 0; {value} is.").format(value=f"{bound:g}")))
        elif whole and bound * factor > 1 + 1e-12:
            unit = limit_units.shown_unit(library, record, amounts)
            text = _("An inclusion cannot be above the whole; {value} {unit} is.")
            found.append((name, text.format(value=f"{bound:g}", unit=unit)))
    if record.basis in (LimitBasis.DRY_MATTER, LimitBasis.AT_DRY_MATTER):
        text = _("The amount of an ingredient has no basis; leave it blank and use the unit {unit}.")
        found.append(("basis", text.format(unit=units.SHARE_OF_DRY_MATTER)))
    if record.kind is LimitKind.PRACTICAL:
        found += _practical_limit(record, share)
    return found


def _practical_limit(record: Limit, share: bool) -> list[Finding]:
    found: list[Finding] = []
    if record.minimum is None:
        found.append(("minimum", _("A practical minimum needs the least amount worth weighing under Minimum.")))
    if record.maximum is not None:
        found.append(("maximum", _("A practical minimum has no maximum; enter that as a limit of kind ingredient.")))
    if share:
        found.append(("unit", _("A practical minimum is an amount to be weighed; state it as fed, in kg/day.")))
    return found


def _ratio_limit(record: Limit) -> list[Finding]:
    if record.minimum is not None and record.minimum < 0:
        return [("minimum", _("A ratio cannot be below 0; {value} is.").format(value=f"{record.minimum:g}"))]
    return []


def _count_limit(record: Limit) -> list[Finding]:
    found: list[Finding] = []
    if record.maximum is None or record.maximum < 0 or record.maximum != int(record.maximum):
        found.append(("maximum", _("A count needs a whole number, 0 or more, under Maximum.")))
    if record.minimum is not None:
        found.append(("minimum", _("A count has a maximum only; leave Minimum blank.")))
    return found


_FAULTS: dict[str, Callable[[Any, Library], list[Finding]]] = {
    "mill": _mill,
    "nutrient": _nutrient,
    "ingredient": _ingredient,
    "value": _value,
    "quote": _quote,
    "scale": _scale,
    "bin": _bin,
    "lot": _lot,
    "lot_value": _value,
    "formula": _formula,
    "mixing_step": _mixing_step,
    "mixer": _spread,
    "limit": _limit,
}
_ODDITIES: dict[str, Callable[[Any, Library], list[Finding]]] = {
    "ingredient": _odd_ingredient,
    "value": _odd_value,
    "lot": _odd_lot,
    "lot_value": _odd_value,
    "formula": limit_oddities.odd_formula,
    "limit": limit_oddities.odd_limit,
}
