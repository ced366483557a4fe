"""In which units a limit may be stated, and the factor from its displayed value to the numbers of a program.

A program works in fractions of the mix or kg per day for amounts, and in base units (units.Unit) for nutrients.
"""

from __future__ import annotations

from blendapp.domain import units
from blendapp.domain.formulas import Amounts, Limit, LimitBasis, LimitKind, Subject, SubjectKind
from blendapp.domain.library import Library
from blendapp.domain.wording import _


def own_unit(library: Library, limit: Limit, amounts: Amounts) -> str:
    """The unit of a limit that states none. A ratio and a count have none: ""."""
    if limit.kind is LimitKind.NUTRIENT:
        unit = concentration_unit(library, limit.subject)
        return units.own_per_day(unit) if limit.basis is LimitBasis.PER_DAY else unit
    if limit.kind in (LimitKind.INGREDIENT, LimitKind.GROUP, LimitKind.PRACTICAL):
        return "%" if amounts is Amounts.BLEND else "kg/day"
    return ""


def shown_unit(library: Library, limit: Limit, amounts: Amounts) -> str:
    """The unit in which a limit is displayed."""
    return limit.unit or own_unit(library, limit, amounts)


def concentration_unit(library: Library, subject: Subject) -> str:
    """The unit of concentration of a nutrient or of the dry matter."""
    return library.nutrient(subject.ids[0]).unit if subject.kind is SubjectKind.NUTRIENT else "%"


def factor(library: Library, limit: Limit, amounts: Amounts) -> float:
    """What a displayed bound is multiplied by to be in the numbers of a program. Raises ValueError with the mend."""
    unit = shown_unit(library, limit, amounts)
    if limit.kind is LimitKind.NUTRIENT:
        own = concentration_unit(library, limit.subject)
        chosen = units.per_day(unit) if limit.basis is LimitBasis.PER_DAY else units.concentration(unit)
        _same_family(unit, chosen.family, own, units.concentration(own).family)
        return chosen.factor
    if limit.kind is LimitKind.RATIO:
        return _ratio_factor(library, limit)
    if limit.kind is LimitKind.COUNT:
        return 1.0
    if amounts is Amounts.BLEND:
        return _known(unit, units.BLEND_INCLUSION)
    return 1e-2 if unit == units.SHARE_OF_DRY_MATTER else _known(unit, units.RATION_INCLUSION)


# Factor of a numerator to the base unit of its family, for ratios such as g/MJ.
_NUMERATORS: dict[units.Family, dict[str, float]] = {
    units.Family.MASS: {"kg": 1.0, "%": 1e-2, "g": 1e-3, "mg": 1e-6, "ug": 1e-9},
    units.Family.ACTIVITY: {"IU": 1.0},
    units.Family.CHARGE: {"mEq": 1.0},
    units.Family.ENERGY: {"MJ": 1.0, "kJ": 1e-3, "kcal": units.KCAL_MJ, "Mcal": units.KCAL_MJ * 1e3},
    units.Family.BARE: {"": 1.0, "1": 1.0},
}


def _ratio_factor(library: Library, limit: Limit) -> float:
    """Displayed quotient to the quotient of base units: own units of the two nutrients, or those it states."""
    if not limit.subject.is_nutrient:
        if limit.unit:
            raise ValueError(_("A ratio of two groups has no unit; leave “{unit}” out.").format(unit=limit.unit))
        return 1.0
    assert limit.per is not None
    own = [units.concentration(concentration_unit(library, part)) for part in (limit.subject, limit.per)]
    if not limit.unit:
        return own[0].factor / own[1].factor
    top, _slash, bottom = limit.unit.partition("/")
    found = [_NUMERATORS[unit.family].get(text.strip()) for unit, text in zip(own, (top, bottom), strict=True)]
    if found[0] is None or found[1] is None:
        sentence = _("The ratio unit “{unit}” does not fit {top} over {bottom}; write it like g/MJ, or leave it blank.")
        raise ValueError(sentence.format(unit=limit.unit, top=own[0].name, bottom=own[1].name))
    return found[0] / found[1]


def _same_family(unit: str, family: units.Family, own: str, own_family: units.Family) -> None:
    if family is not own_family:
        sentence = _("The unit {unit} does not measure what {own} measures; choose one of its kind.")
        raise ValueError(sentence.format(unit=unit, own=own))


def _known(unit: str, table: dict[str, float]) -> float:
    if unit not in table:
        names = ", ".join(table)
        raise ValueError(_("The unit “{name}” is not known here; use one of {names}.").format(name=unit, names=names))
    return table[unit]
