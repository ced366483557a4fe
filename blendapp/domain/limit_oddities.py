"""What is odd about a limit, and about whom a formula admits: let in, and worth saying."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from blendapp.domain import limit_units, units
from blendapp.domain.formulas import Admits, Amounts, Formula, Limit, LimitKind, Subject, SubjectKind
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.wording import _

# (field, sentence), as in domain.checks.
Finding = tuple[str, str]

# How near to the whole the greatest amounts of some ingredients must come to be able to fill a blend.
_WHOLE = 1 - 1e-9


def odd_formula(record: Formula, library: Library) -> list[Finding]:
    """A formula that admits nothing."""
    if record.admits is Admits.ALL or library.listed_ids(record.id):
        return []
    text = _("“{name}” admits the listed ingredients and lists none; give it ingredient limits, or let it admit all.")
    return [("admits", text.format(name=record.name))]


def odd_limit(record: Limit, library: Library) -> list[Finding]:
    if record.kind in (LimitKind.INGREDIENT, LimitKind.NUTRIENT):
        return []
    admitted = library.admitted(library.formula(record.formula_id))
    ids = {ingredient.id for ingredient in admitted}
    found = [] if record.kind is not LimitKind.COUNT else _odd_count(record, library)
    for name, subject in (("subject", record.subject), ("per", record.per)):
        if subject is not None and not subject.is_nutrient:
            found += [(name, sentence) for sentence in _not_admitted(subject, library, ids)]
    if record.kind is LimitKind.PRACTICAL:
        found += _odd_practical(record, library)
    elif record.kind is LimitKind.RATIO:
        found += _odd_divisor(record, library, admitted)
    return found


def _odd_count(record: Limit, library: Library) -> list[Finding]:
    members = len(library.members(record.subject))
    if record.maximum is None or record.maximum < members:
        return []
    text = _("The group has {members} ingredients, so that at most {count} of them says nothing.")
    return [("maximum", text.format(count=f"{record.maximum:g}", members=members))]


def _not_admitted(subject: Subject, library: Library, admitted: set[int]) -> list[str]:
    text = _("{name} is not admitted by the formula and counts as 0 here.")
    if subject.kind is SubjectKind.CLASS:
        members = library.members(subject)
        if any(member.id in admitted for member in members):
            return []
        return [_("No admitted ingredient has the class {name}; it counts as 0.").format(name=subject.class_name)]
    return [text.format(name=member.name) for member in library.members(subject) if member.id not in admitted]


def _odd_practical(record: Limit, library: Library) -> list[Finding]:
    """A practical minimum above a maximum of the same ingredient, which shuts the ingredient out."""
    amounts = library.formula(record.formula_id).amounts
    if record.minimum is None:
        return []
    least = record.minimum * limit_units.factor(library, record, amounts)
    for other in _ingredient_limits(library, record.formula_id, record.subject.ids):
        if other.maximum is None or least <= other.maximum * limit_units.factor(library, other, amounts):
            continue
        text = _(
            "The practical minimum of {name}, {least}, is above its maximum, {most}, so that it can never be used; "
            "lower one or raise the other."
        )
        shown = [
            f"{bound:g} {limit_units.shown_unit(library, limit, amounts)}"
            for limit, bound in ((record, record.minimum), (other, other.maximum))
        ]
        return [("minimum", text.format(name=library.subject_name(record.subject), least=shown[0], most=shown[1]))]
    return []


def _ingredient_limits(library: Library, formula_id: int, ingredient_ids: Iterable[int]) -> list[Limit]:
    """The limits on single ingredients by their mass; a share of the dry matter is another measure."""
    wanted = set(ingredient_ids)
    return [
        limit
        for limit in library.limits(formula_id)
        if limit.kind is LimitKind.INGREDIENT
        and limit.unit != units.SHARE_OF_DRY_MATTER
        and wanted.issuperset(limit.subject.ids)
    ]


def _odd_divisor(record: Limit, library: Library, admitted: Sequence[Ingredient]) -> list[Finding]:
    """A ratio over a nutrient that is below 0 in an admitted ingredient, or of which a mix may hold none at all."""
    per = record.per
    if per is None or per.kind is not SubjectKind.NUTRIENT:
        return []
    beside = library.limits(record.formula_id)
    if any(x.kind is LimitKind.NUTRIENT and x.subject == per and (x.minimum or 0) > 0 for x in beside):
        return []
    values = {i.id: library.value(i.id, per.ids[0]) for i in admitted}
    amounts = {key: None if value is None else value.amount for key, value in values.items()}
    below = [i.name for i in admitted if (amounts[i.id] or 0) < 0]
    name = library.subject_name(per)
    if below:
        text = _(
            "{name} of {ingredients} is below 0, and a ratio over it means nothing in a mix where it is below 0; set a "
            "minimum of {name} that is above 0."
        )
        return [("per", text.format(name=name, ingredients=", ".join(below)))]
    without = [i for i in admitted if amounts[i.id] == 0]
    others = [i.id for i in admitted if amounts[i.id] != 0]
    if not without or not _may_fill_a_mix(library, record.formula_id, [i.id for i in without], others):
        return []
    text = _(
        "A mix of {ingredients} would have no {name}, and the ratio over it would say nothing; set a minimum of {name} "
        "that is above 0."
    )
    return [("per", text.format(name=name, ingredients=", ".join(i.name for i in without)))]


def _may_fill_a_mix(library: Library, formula_id: int, these: Sequence[int], others: Sequence[int]) -> bool:
    """Whether the limits on single ingredients let these alone be a mix."""
    amounts = library.formula(formula_id).amounts
    if any((limit.minimum or 0) > 0 for limit in library.limits(formula_id)
           if limit.kind is LimitKind.INGREDIENT and set(limit.subject.ids) <= set(others)):
        return False
    if amounts is Amounts.RATION:
        return True
    most = dict.fromkeys(these, 1.0)
    for limit in _ingredient_limits(library, formula_id, these):
        if limit.maximum is not None:
            (key,) = limit.subject.ids
            most[key] = min(most[key], limit.maximum * limit_units.factor(library, limit, amounts))
    return sum(most.values()) >= _WHOLE
