"""Names typed into the form of a limit, as what a limit is about. No Qt."""

from __future__ import annotations

from typing import Any

from blendapp.domain import units
from blendapp.domain.formulas import (
    DRY_MATTER_SUBJECT,
    MOISTURE_SUBJECT,
    Amounts,
    LimitKind,
    Subject,
    read_basis,
)
from blendapp.domain.library import Library, join_names, split_names
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.nutrients import BUILT_IN, DRY_MATTER, MOISTURE
from blendapp.domain.wording import _


def names_for(library: Library, kind: LimitKind) -> list[str]:
    """What can be limited: the names that the form offers for a kind."""
    nutrients = [*(one.name for one in library.nutrients), *BUILT_IN]
    ingredients = [one.name for one in library.ingredients]
    classes = sorted({one.class_name for one in library.ingredients if one.class_name})
    if kind is LimitKind.NUTRIENT:
        return nutrients
    if kind in (LimitKind.INGREDIENT, LimitKind.PRACTICAL):
        return ingredients
    if kind is LimitKind.RATIO:
        return nutrients + classes + ingredients
    return classes + ingredients


def nutrient_subject(library: Library, name: str) -> Subject | None:
    """The nutrient, dry matter or moisture of that name, or None."""
    wanted = fold(name)
    if wanted == fold(DRY_MATTER):
        return DRY_MATTER_SUBJECT
    if wanted == fold(MOISTURE):
        return MOISTURE_SUBJECT
    found = library.named("nutrient", name)
    return None if found is None else Subject.nutrient(found.id)


def group_subject(library: Library, name: str) -> Subject:
    """An ingredient, a class, or ingredients joined by " + ". Raises ValueError with the mend."""
    one = library.named("ingredient", name)
    if one is not None:
        return Subject.ingredients(one.id)
    for ingredient in library.ingredients:
        if ingredient.class_name and fold(ingredient.class_name) == fold(name):
            return Subject.of_class(ingredient.class_name)
    try:
        parts = split_names(name)
    except ValueError:
        raise ValueError(_("A double quote is left open in “{name}”; close it.").format(name=name)) from None
    found = [library.named("ingredient", part) for part in parts]
    missing = [part for part, record in zip(parts, found, strict=True) if record is None]
    if missing:
        text = _("There is no ingredient or class “{name}”; choose one of the names offered.")
        raise ValueError(text.format(name=join_names(missing)))
    return Subject.ingredients(*(record.id for record in found if record is not None))


def _bound(text: str) -> float | None:
    return notation().read(text) if text.strip() else None


def limit_from(
    library: Library, kind: LimitKind, name: str, per: str, basis: str, unit: str, minimum: str, maximum: str
) -> tuple[Subject, dict[str, Any]]:
    """The subject and the fields of a limit from what was typed. Raises ValueError with one sentence."""
    if not name.strip():
        raise ValueError(_("Name what the limit is about."))
    fields: dict[str, Any] = {"minimum": _bound(minimum), "maximum": _bound(maximum), "unit": unit}
    if kind is LimitKind.NUTRIENT:
        subject = nutrient_subject(library, name)
        if subject is None:
            text = _("There is no nutrient “{name}”; choose one of the names offered.")
            raise ValueError(text.format(name=name.strip()))
        fields["basis"], fields["at_dry_matter_percent"] = read_basis(basis)
        return subject, fields
    if kind is LimitKind.RATIO:
        if not per.strip():
            raise ValueError(_("Name what the ratio is over."))
        top, bottom = nutrient_subject(library, name), nutrient_subject(library, per)
        if top is None or bottom is None:
            top, bottom = group_subject(library, name), group_subject(library, per)
        fields["per"] = bottom
        return top, fields
    subject = group_subject(library, name)
    if kind in (LimitKind.INGREDIENT, LimitKind.PRACTICAL) and len(subject.ids) != 1:
        raise ValueError(_("Name one ingredient; for several, choose the kind group."))
    return subject, fields


def units_for(library: Library, kind: LimitKind, name: str, basis: str, amounts: Amounts) -> list[str]:
    """The units in which a limit can be stated, its own first; "" stands for that of a ratio."""
    if kind is LimitKind.NUTRIENT:
        subject = nutrient_subject(library, name)
        if subject is None:
            return [""]
        own = library.nutrient(subject.ids[0]).unit if subject.ids else "%"
        if basis == "per day":
            first = units.own_per_day(own)
            family = units.per_day(first).family
            return [first, *(one.name for one in units.PER_DAY.values() if one.family is family and one.name != first)]
        family = units.concentration(own).family
        same = [one.name for one in units.CONCENTRATION.values() if one.family is family and one.name != own]
        return [own, *same]
    if kind in (LimitKind.RATIO, LimitKind.COUNT):
        return [""]
    if amounts is Amounts.BLEND:
        return list(units.BLEND_INCLUSION)
    return [*units.RATION_INCLUSION, units.SHARE_OF_DRY_MATTER]
