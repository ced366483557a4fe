"""The sheets Formulas and Limits of the exchange workbook."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from blendapp.domain import checks
from blendapp.domain.formulas import (
    DRY_MATTER_SUBJECT,
    MOISTURE_SUBJECT,
    Admits,
    Amounts,
    Animal,
    Formula,
    Limit,
    LimitBasis,
    LimitKind,
    Subject,
    read_basis,
)
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library, split_names
from blendapp.domain.names import fold
from blendapp.domain.nutrients import DRY_MATTER, MOISTURE
from blendapp.domain.units import BLEND_INCLUSION, CONCENTRATION, PER_DAY, RATION_INCLUSION, SHARE_OF_DRY_MATTER
from blendapp.domain.wording import _
from blendapp.exchange.suggestions import did_you_mean
from blendapp.exchange.workbook_draft import Draft
from blendapp.exchange.workbook_library import known_unit, number_or
from blendapp.exchange.workbook_sheet import Row, Sheet

_BUILT_IN = {fold(DRY_MATTER): DRY_MATTER_SUBJECT, fold(MOISTURE): MOISTURE_SUBJECT}
_LIMIT_UNITS = {fold(u): u for u in (*PER_DAY, *BLEND_INCLUSION, *RATION_INCLUSION, SHARE_OF_DRY_MATTER)}


def read_formulas(draft: Draft, sheet: Sheet) -> list[tuple[Row, Formula]]:
    """Every formula of the sheet; whom a blank Admits admits is settled when the limits are known."""
    found: list[tuple[Row, Formula]] = []
    for row in sheet.rows():
        name = draft.claim("formula", row, "Formula")
        before: Formula | None = draft.library.named("formula", name) if name else None
        base = before or Formula(draft.new_id("formula") if name else 0, name or "")
        formula = replace(
            base,
            amounts=row.choice("Amounts", Amounts) or base.amounts,
            animal=row.choice("Animal", Animal) or base.animal,
            stage=row.text("Stage") or base.stage,
            batch_kg=number_or(row, "Batch kg", base.batch_kg),
            admits=row.choice("Admits", Admits) or base.admits,
            note=row.text("Note") or base.note,
            loss_percent=number_or(row, "Loss %", base.loss_percent),
            product_dry_matter_percent=number_or(row, "Product dry matter %", base.product_dry_matter_percent),
        )
        draft.is_faultless(formula, row)
        if name is None:
            continue
        draft.put(before, formula)
        if formula.animal is None and not row.has("Animal"):
            text = _("The formula “{name}” names no animal; cautions for one kind of animal will not be checked.")
            row.oddity("Animal", text.format(name=name))
        found.append((row, formula))
    return found


def settle_admits(draft: Draft, formulas: list[tuple[Row, Formula]]) -> None:
    """A blank Admits is `listed` where the formula has an ingredient row, else `all`; says which applied."""
    for row, read in formulas:
        formula = draft.library.formula(read.id)
        if row.has("Admits"):
            draft.say_oddities(formula, row)
            continue
        admits = Admits.LISTED if draft.library.listed_ids(formula.id) else Admits.ALL
        if admits is Admits.LISTED:
            text = _("Admits is blank; “{name}” has ingredient rows, so listed applied.")
        else:
            text = _("Admits is blank; “{name}” has no ingredient row, so all applied.")
        row.oddity("Admits", text.format(name=formula.name))
        draft.put(formula, replace(formula, admits=admits))


def read_limits(draft: Draft, sheet: Sheet) -> list[tuple[Row, Limit]]:
    """The limits of every formula that has rows; they replace those that it had."""
    by_formula: dict[int, list[tuple[Row, Limit]]] = {}
    unknown = _("There is no formula “{name}”; add it to the sheet Formulas.")
    for row in sheet.rows():
        if not row.has("Formula"):
            row.fault("Formula", _("The row names no formula; write the name of the formula that it limits."))
        formula: Formula | None = draft.find("formula", row, "Formula", unknown)
        limit = _limit(draft, row, formula)
        if formula is not None and limit is not None and draft.is_faultless(limit, row):
            by_formula.setdefault(formula.id, []).append((row, limit))
    read: list[tuple[Row, Limit]] = []
    for formula_id, limits in by_formula.items():
        read += _replace_limits(draft, formula_id, limits, "Note" in sheet.columns)
    return read


def say_odd_limits(draft: Draft, limits: list[tuple[Row, Limit]]) -> None:
    """What is odd about limits, when it is known whom each formula admits."""
    for row, limit in limits:
        draft.say_oddities(limit, row)


def _replace_limits(
    draft: Draft, formula_id: int, limits: list[tuple[Row, Limit]], with_notes: bool
) -> list[tuple[Row, Limit]]:
    """The n-th row takes the place and identifier of the n-th limit; what is over is added or removed."""
    standing = draft.library.limits(formula_id)
    placed: list[tuple[Row, Limit]] = []
    for index, (row, limit) in enumerate(limits):
        before = standing[index] if index < len(standing) else None
        note = limit.note if with_notes or before is None else before.note
        after = replace(limit, id=before.id if before else draft.new_id("limit"), note=note)
        draft.put(before, after)
        placed.append((row, after))
    for before in standing[len(limits) :]:
        draft.put(before, None)
    return placed


def _limit(draft: Draft, row: Row, formula: Formula | None) -> Limit | None:
    """The limit in a row, with identifier 0; None where it could not be read, with every fault said."""
    if not row.has("Kind"):
        row.fault("Kind", _("The row names no kind; use one of {known}.").format(known=", ".join(LimitKind)))
    if not row.has("Name"):
        row.fault("Name", _("A name is needed here."))
    kind = row.choice("Kind", LimitKind)
    basis = _basis(row)
    minimum, maximum = row.number_in("Minimum"), row.number_in("Maximum")
    unreadable = any(
        row.has(heading) and bound is None for heading, bound in (("Minimum", minimum), ("Maximum", maximum))
    )
    note = row.text("Note")
    if kind is None:
        some_kind = [known for known in LimitKind if known is not LimitKind.COUNT]
        _say_rest(row, formula, some_kind, (minimum, maximum), basis)
        return None
    subject, per = _subjects(draft, row, kind) if row.has("Name") else (None, None)
    belongs = _belongs(row, kind, basis)
    if kind is LimitKind.RATIO and per is None and row.has("Per"):
        subject = None
    if formula is None or subject is None or not belongs or basis is None or unreadable:
        sides = None if subject is None else (subject, per)
        _say_rest(row, formula, [kind], (minimum, maximum), basis, sides, draft.library)
        return None
    return Limit(0, formula.id, kind, subject, per, minimum, maximum, _unit(row), basis[0], basis[1], note)


def _say_rest(
    row: Row,
    formula: Formula | None,
    kinds: Sequence[LimitKind],
    bounds: tuple[float | None, float | None],
    basis: tuple[LimitBasis, float | None] | None,
    sides: tuple[Subject, Subject | None] | None = None,
    library: Library | None = None,
) -> None:
    """Says what else is wrong with a row of which a part could not be read: what is wrong whatever that part is."""
    unit = _unit(row)
    bases = [basis] if basis else [(LimitBasis.AS_FED, None), (LimitBasis.PER_DAY, None)]
    readings = [
        Limit(0, 0, kind, subject, per, *bounds, unit, *one)
        for kind in kinds for subject, per in ([sides] if sides else _STAND_INS[kind]) for one in bases
    ]
    amounts = [formula.amounts] if formula else list(Amounts)
    found = [dict(reversed(checks.limit_faults(limit, library or Library(), a))) for limit in readings for a in amounts]
    told = set(row.told)
    for name, heading in _REST:
        if heading in told or not all(name in findings for findings in found):
            continue
        # What a unit must measure is not known before the name is.
        if name != "unit" or sides or not {LimitKind.NUTRIENT, LimitKind.RATIO} & set(kinds) or not _is_a_unit(unit):
            row.fault(heading, found[0][name])


_REST = (("minimum", "Minimum"), ("maximum", "Maximum"), ("unit", "Unit"), ("basis", "Basis"))
_SOMETHING = Subject.ingredients(0)
_STAND_INS: dict[LimitKind, list[tuple[Subject, Subject | None]]] = {
    **{kind: [(_SOMETHING, None)] for kind in LimitKind},
    LimitKind.NUTRIENT: [(DRY_MATTER_SUBJECT, None)],
    LimitKind.RATIO: [(DRY_MATTER_SUBJECT, DRY_MATTER_SUBJECT), (_SOMETHING, _SOMETHING)],
}


def _is_a_unit(text: str) -> bool:
    return text in CONCENTRATION or text in _LIMIT_UNITS.values() or "/" in text


def _basis(row: Row) -> tuple[LimitBasis, float | None] | None:
    try:
        return read_basis(row.name("Basis"))
    except ValueError as error:
        row.fault("Basis", str(error))
        return None


def _unit(row: Row) -> str:
    text = row.name("Unit")
    return _LIMIT_UNITS.get(fold(text)) or known_unit(text)


def _belongs(row: Row, kind: LimitKind, basis: tuple[LimitBasis, float | None] | None) -> bool:
    """Whether every filled cell of the row means something for its kind; a cell that would be lost is a fault."""
    faults = 0
    if kind is not LimitKind.RATIO and row.has("Per"):
        row.fault("Per", _("Per belongs to rows of the kind ratio; leave it blank here."))
        faults += 1
    if kind is LimitKind.PRACTICAL and row.has("Maximum"):
        row.fault("Maximum", _("A practical minimum has no maximum; put it into a row of the kind ingredient."))
        faults += 1
    if kind is LimitKind.COUNT and row.has("Minimum"):
        row.fault("Minimum", _("A count has a maximum only; leave the minimum blank."))
        faults += 1
    if kind is LimitKind.NUTRIENT or basis is None:
        return not faults
    allowed = (LimitBasis.AS_FED, LimitBasis.DRY_MATTER) if kind is LimitKind.RATIO else (LimitBasis.AS_FED,)
    if basis[0] not in allowed:
        text = _("A basis belongs to rows of the kind nutrient; leave it blank here.")
        if kind in (LimitKind.INGREDIENT, LimitKind.GROUP):
            text += " " + _("A share of the dry matter of a ration has the unit “% of dry matter”.")
        row.fault("Basis", text)
        faults += 1
    return not faults


def _subjects(draft: Draft, row: Row, kind: LimitKind) -> tuple[Subject | None, Subject | None]:
    if kind is LimitKind.NUTRIENT:
        return _nutrient(draft, row, "Name"), None
    if kind in (LimitKind.INGREDIENT, LimitKind.PRACTICAL):
        return _ingredient(draft, row), None
    if kind in (LimitKind.GROUP, LimitKind.COUNT):
        return _group(draft, row, "Name"), None
    return _ratio(draft, row)


def _ratio(draft: Draft, row: Row) -> tuple[Subject | None, Subject | None]:
    """Both sides of a ratio: two nutrients if both names are nutrients, else two groups."""
    name, per = row.name("Name"), row.name("Per")
    top, bottom = _known_nutrient(draft, name), _known_nutrient(draft, per)
    if top and (bottom or not per):
        return top, bottom
    if not top and not bottom:
        return _group(draft, row, "Name", ratio=True), _group(draft, row, "Per", ratio=True)
    groups = _members(draft, name), _members(draft, per)
    if isinstance(groups[0], Subject) and isinstance(groups[1], Subject):
        return groups[0], groups[1]
    other, heading = (groups[1], "Per") if top else (groups[0], "Name")
    if isinstance(other, Subject):
        row.fault(heading, _("A ratio is of two nutrients or of two groups, not of one of each."))
        return None, None
    return top or _nutrient(draft, row, "Name"), bottom or _nutrient(draft, row, "Per")


def _known_nutrient(draft: Draft, name: str) -> Subject | None:
    built_in = _BUILT_IN.get(fold(name))
    if built_in is not None:
        return built_in
    found = draft.library.named("nutrient", name) if name else None
    return None if found is None else Subject.nutrient(found.id)


def _nutrient(draft: Draft, row: Row, heading: str) -> Subject | None:
    name = row.name(heading)
    found = _known_nutrient(draft, name)
    if found is None and name and not draft.was_refused("nutrient", name):
        text = _("There is no nutrient “{name}”; add it to the sheet Nutrients.").format(name=name)
        row.fault(heading, text + draft.suggestion("nutrient", name))
    return found


def _ingredient(draft: Draft, row: Row) -> Subject | None:
    name = row.name("Name")
    found = draft.library.named("ingredient", name) or _quoted_alone(draft, name)
    if found is not None:
        return Subject.ingredients(found.id)
    if name and not draft.was_refused("ingredient", name):
        text = _("There is no ingredient “{name}”; add it to the sheet Ingredients.").format(name=name)
        row.fault("Name", text + draft.suggestion("ingredient", name))
    return None


def _quoted_alone(draft: Draft, name: str) -> Ingredient | None:
    """An ingredient whose name stands in double quotes, as it would in a group."""
    try:
        names = split_names(name)
    except ValueError:
        return None
    found: Ingredient | None = draft.library.named("ingredient", names[0]) if len(names) == 1 else None
    return found


def _members(draft: Draft, text: str) -> Subject | list[str]:
    """The group that a text names, or the names in it that nothing has."""
    library = draft.library
    whole = _class_named(draft, text)
    try:
        names = split_names(text)
    except ValueError:
        return whole or [text]
    if len(names) == 1:
        ingredient = library.named("ingredient", names[0])
        if ingredient is not None:
            return Subject.ingredients(ingredient.id)
        return _class_named(draft, names[0]) or whole or names
    missing = [name for name in names if library.named("ingredient", name) is None]
    if missing:
        return whole or missing
    found: list[Any] = [library.named("ingredient", name) for name in names]
    return Subject.ingredients(*dict.fromkeys(ingredient.id for ingredient in found))


def _class_named(draft: Draft, name: str) -> Subject | None:
    class_name = draft.classes.get(fold(name))
    return None if class_name is None else Subject.of_class(class_name)


def _group(draft: Draft, row: Row, heading: str, ratio: bool = False) -> Subject | None:
    text = row.name(heading)
    if not text:
        return None
    found = _members(draft, text)
    if isinstance(found, Subject):
        _say_group(draft, row, heading, text, found)
        return found
    for name in found:
        if draft.was_refused("ingredient", name):
            continue
        if ratio:
            sentence = _("“{name}” is neither a nutrient nor an ingredient nor a class; correct the name.")
            known = [r.name for kind in ("nutrient", "ingredient") for r in draft.library.records[kind].values()]
            row.fault(heading, sentence.format(name=name) + did_you_mean(name, known))
        elif len(found) == 1 and fold(found[0]) == fold(text):
            sentence = _("“{name}” is neither an ingredient nor a class; correct the name, or add the ingredient.")
            row.fault(heading, sentence.format(name=name) + draft.suggestion("ingredient", name))
        else:
            sentence = _("There is no ingredient “{name}” for this group; correct the name, or add the ingredient.")
            row.fault(heading, sentence.format(name=name) + draft.suggestion("ingredient", name))
    return None


def _say_group(draft: Draft, row: Row, heading: str, text: str, found: Subject) -> None:
    try:
        names = split_names(text)
    except ValueError:
        return
    if len(names) == 1 and found.ids and _class_named(draft, names[0]) is not None:
        sentence = _("“{name}” is an ingredient and a class; the ingredient was taken. Rename one to mean the class.")
        row.oddity(heading, sentence.format(name=names[0]))
    if found.ids and len(found.ids) < len(names):
        row.oddity(heading, _("An ingredient stands twice in this group and counts once."))
