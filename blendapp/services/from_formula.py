"""An ingredient that a formula of the mill makes takes its composition, dry matter and price from that formula.

They are those of the formula's approved version where it has a sound one, by today's analyses and prices, else of
today's answer. What is lost on the way makes a tonne dearer; the product's own dry matter concentrates or dilutes it.
"""

from __future__ import annotations

import datetime
import re
from dataclasses import dataclass, replace

from blendapp.domain import making
from blendapp.domain.formulas import Formula
from blendapp.domain.ingredients import Basis, Ingredient, Origin, Tag, Value
from blendapp.domain.library import Library
from blendapp.domain.making import mixture
from blendapp.domain.notation import notation
from blendapp.domain.problems import Place, Problem, Refused, Severity
from blendapp.domain.records import Change, added, removed
from blendapp.domain.results import Status
from blendapp.domain.versions import Snapshot, approved_version, sound_snapshot
from blendapp.domain.wording import _
from blendapp.domain.yields import part_left
from blendapp.services import edits
from blendapp.services.mill import Edit, Mill

# Two figures that differ by less, relatively, are the same: a price may be rounded to cents, an analysis to its digits.
_HAIR = 1e-4


@dataclass(frozen=True)
class Made:
    """What a formula makes, per kg as fed of the product.

    as_fed: by nutrient identifier in its own unit; missing: parts without a value, of nutrients that stay unknown.
    price_per_t: money of the mill per tonne. site_id: for which site the price holds, None for the whole mill.
    tags: those of its parts, for what cautions must know. version: number of the approved version, None where it is
    today's answer.
    """

    formula: Formula
    version: int | None
    dry_matter_percent: float | None
    as_fed: dict[int, float]
    missing: dict[int, tuple[str, ...]]
    price_per_t: float
    site_id: int | None
    tags: tuple[Tag, ...] = ()


def made_now(mill: Mill, ingredient_id: int, on: datetime.date) -> Made:
    """What the formula of a made ingredient makes on a day. Raises Refused where there is no answer to take."""
    library = mill.library
    ingredient = library.ingredient(ingredient_id)
    if ingredient.made_by_formula_id is None:
        text = _("No formula makes {ingredient}; name one under Made by formula.")
        raise Refused(text.format(ingredient=ingredient.name))
    formula = library.formula(ingredient.made_by_formula_id)
    version = approved_version(library, formula.id)
    if version is not None:
        snapshot = sound_snapshot(library, version)
        formula, amounts = snapshot.formula, snapshot.amounts
        seen = _as_today(library, snapshot, on)
    else:
        amounts, seen = _todays_answer(mill, formula, on), library
    mix = mixture(seen, amounts)
    left = part_left(formula.loss_percent, mix.dry_matter_percent, formula.product_dry_matter_percent)
    if left is None or (formula.product_dry_matter_percent and not mix.dry_matter_percent):
        text = _("{formula} states the dry matter of its product, and that of its mix is not known; enter the dry "
                 "matter of {ingredients}.")
        lacking = [i.name for i in map(seen.ingredient, amounts) if i.dry_matter_percent is None]
        raise Refused(text.format(formula=formula.name, ingredients=", ".join(lacking) or _("its parts")))
    price, site_id = _price(library, seen, formula, amounts, on)
    dry = formula.product_dry_matter_percent or mix.dry_matter_percent
    thicker = dry / mix.dry_matter_percent if dry is not None and mix.dry_matter_percent else 1.0
    return Made(
        formula, None if version is None else version.number, dry,
        {key: amount * thicker for key, amount in mix.as_fed.items()}, mix.missing, price / left, site_id,
        _tags(library, seen, amounts),
    )


def take_from_formula(mill: Mill, ingredient_id: int, on: datetime.date) -> Edit:
    """Write into a made ingredient the composition, dry matter, tags and price that its formula makes: one undo.

    Values are estimated, with the formula and the day as their source. What the formula does not know stays as it is,
    and what was once taken from a formula and is not known now is forgotten; the oddities of the edit name it. Raises
    Refused with a sentence where there is no answer to take.
    """
    library = mill.library
    ingredient = library.ingredient(ingredient_id)
    made = made_now(mill, ingredient_id, on)
    source = _source(made.formula, on)
    tags = tuple(dict.fromkeys([*ingredient.tags, *made.tags]))
    dry = ingredient.dry_matter_percent if made.dry_matter_percent is None else _rounded(made.dry_matter_percent)
    changes = edits.field_changes(mill, ingredient, tags=tags, dry_matter_percent=dry)
    for nutrient_id, amount in made.as_fed.items():
        if not _stands(library.value(ingredient_id, nutrient_id), library.nutrient(nutrient_id).unit, amount):
            changes += _value(mill, ingredient_id, nutrient_id, amount, source, on)
    changes += [
        removed(value) for nutrient_id, value in library.values_of(ingredient_id).items()
        if nutrient_id not in made.as_fed and _was_taken(value)
    ]
    quotes = edits.price_changes(mill, ingredient_id, _rounded(made.price_per_t), on, per="t", source=source)
    for quote in (one.after for one in quotes if one.after is not None):
        changes.append(added(quote if made.site_id is None else replace(quote, site_id=made.site_id)))
    what = _("Take {ingredient} from {formula}").format(ingredient=ingredient.name, formula=made.formula.name)
    edit = mill.apply(what, changes)
    unknown = _still_unknown(library, ingredient, made)
    return edit if unknown is None else replace(edit, oddities=(*edit.oddities, unknown))


def stale(mill: Mill, on: datetime.date) -> list[Problem]:
    """The made ingredients that differ from what their formula makes on a day, one oddity each with what differs.

    It solves each of their formulas that has no approved version, so that it is asked for and not part of an edit. An
    ingredient whose formula has no answer is not among them.
    """
    found = []
    for ingredient in mill.library.ingredients:
        if ingredient.made_by_formula_id is None:
            continue
        try:
            made = made_now(mill, ingredient.id, on)
        except Refused:
            continue
        differing = _differing(mill.library, ingredient, made, on)
        if differing:
            text = _("{ingredient} is no longer what {formula} makes: {what}. Take it from its formula again.")
            said = text.format(ingredient=ingredient.name, formula=made.formula.name, what="; ".join(differing))
            found.append(Problem(said, Place(record=ingredient.name), Severity.ODDITY))
    return found


def _differing(library: Library, ingredient: Ingredient, made: Made, on: datetime.date) -> list[str]:
    text = _("{name} {now} instead of {then}")
    write = notation().write_short
    found = []
    pairs: list[tuple[str, float | None, float | None]] = [
        (_("dry matter"), ingredient.dry_matter_percent, made.dry_matter_percent),
        (_("price"), library.price_per_t(ingredient.id, on, made.site_id), made.price_per_t),
    ]
    lacking = [_(str(tag)) for tag in made.tags if tag not in ingredient.tags]
    if lacking:
        found.append(_("also {tags}").format(tags=", ".join(lacking)))
    for nutrient_id, amount in made.as_fed.items():
        value = library.value(ingredient.id, nutrient_id)
        nutrient = library.nutrient(nutrient_id)
        stands = None if value is None else value.as_fed(nutrient.unit, ingredient.dry_matter_percent)
        pairs.append((nutrient.name, stands, amount))
    for name, stands, makes in pairs:
        if makes is not None and (stands is None or abs(stands - makes) > _HAIR * max(abs(makes), abs(stands))):
            found.append(text.format(name=name, now=write(makes, 3), then=write(stands, 3) or _("unknown")))
    return found


def _as_today(library: Library, snapshot: Snapshot, on: datetime.date) -> Library:
    from blendapp.services.approved import as_today

    return as_today(library, snapshot, on)


def _todays_answer(mill: Mill, formula: Formula, on: datetime.date) -> dict[int, float]:
    from blendapp.services.formulate import FailedCertificate, formulate

    try:
        answer = formulate(mill.library, formula.id, on, mill.composition, prices=False)
    except FailedCertificate as failure:
        raise Refused(str(failure)) from failure
    if not answer.has_answer or answer.status is Status.STOPPED:
        text = _("{formula} has no answer to take: {cause}")
        cause = answer.cause or _("it was stopped before it was proven.")
        raise Refused(text.format(formula=formula.name, cause=cause))
    amounts = {i.ingredient_id: i.amount or 0.0 for i in answer.mix}
    if not amounts:
        raise Refused(_("{formula} is a mix of nothing; there is nothing to take.").format(formula=formula.name))
    return amounts


def _tags(library: Library, seen: Library, amounts: dict[int, float]) -> tuple[Tag, ...]:
    """The tags of everything in the mix, those of what its made parts are made of included."""
    held = [tag for key in sorted(amounts) for tag in making.held(library, seen.ingredient(key)).tags]
    return tuple(dict.fromkeys(tag for tag in held if tag is not Tag.ONLY_WHEN_LISTED))


def _price(
    library: Library, seen: Library, formula: Formula, amounts: dict[int, float], on: datetime.date
) -> tuple[float, int | None]:
    """Money per tonne that is weighed, at today's prices, and the site that it holds for."""
    total, site_id = 0.0, None
    unpriced = []
    for key, amount in amounts.items():
        quote = library.quote_in_force(key, on)
        if quote is None or quote.price_per_t is None:
            unpriced.append(seen.ingredient(key).name)
            continue
        total += amount * quote.price_per_t
        site_id = quote.site_id if site_id is None else site_id
    if unpriced:
        text = _("{formula} takes {ingredients}, whose price is not known today; enter it first.")
        raise Refused(text.format(formula=formula.name, ingredients=", ".join(unpriced)))
    return total / sum(amounts.values()), site_id


def _value(
    mill: Mill, ingredient_id: int, nutrient_id: int, amount: float, source: str, on: datetime.date
) -> list[Change]:
    return edits.value_changes(
        mill, ingredient_id, nutrient_id, _rounded(amount), unit=mill.library.nutrient(nutrient_id).unit,
        basis=Basis.AS_FED, origin=Origin.ESTIMATED, source=source, date=on, n=None, sd=None, entered="",
    )


def _rounded(amount: float) -> float:
    """To twelve figures: what a sum of shares leaves behind them is no knowledge."""
    return float(f"{amount:.12g}")


def _source(formula: Formula, on: datetime.date) -> str:
    return _source_template().format(name=formula.name, day=on.isoformat())


def _was_taken(value: Value) -> bool:
    """Whether a value once came from a formula, whatever it was called then."""
    pattern = re.escape(_source_template()).replace(r"\{name\}", ".*").replace(r"\{day\}", r"\d{4}-\d\d-\d\d")
    return value.origin is Origin.ESTIMATED and re.fullmatch(pattern, value.source, re.DOTALL) is not None


def _stands(value: Value | None, unit: str, amount: float) -> bool:
    """Whether a value was taken from a formula before, as it would be now: then it keeps its day, and what was
    approved with it stands."""
    return value is not None and _was_taken(value) and (value.amount, value.unit, value.basis) == (
        _rounded(amount), unit, Basis.AS_FED)


def _source_template() -> str:
    return _("Formula {name}, {day}")


def _still_unknown(library: Library, ingredient: Ingredient, made: Made) -> Problem | None:
    """What a part has no value of, so that the made ingredient has none from it either."""
    said = [] if made.dry_matter_percent is not None else [_("dry matter")]
    said += [
        _("{nutrient} ({ingredients})").format(nutrient=library.nutrient(key).name, ingredients=", ".join(names))
        for key, names in made.missing.items()
    ]
    if not said:
        return None
    text = _("Not taken from {formula}, since a part has no value: {what}.")
    sentence = text.format(formula=made.formula.name, what="; ".join(said))
    return Problem(sentence, Place(record=ingredient.name), Severity.ODDITY)
