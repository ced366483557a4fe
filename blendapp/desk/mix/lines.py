"""The answer as lines, top to bottom: what stands in the third zone. No Qt."""

from __future__ import annotations

import math
from dataclasses import dataclass
from enum import Enum

from blendapp.desk.mix import why
from blendapp.domain.cautions import general_caution
from blendapp.domain.figures import decimals_of, write_measure
from blendapp.domain.formulas import Amounts
from blendapp.domain.making import given_by_formula
from blendapp.domain.notation import notation
from blendapp.domain.results import Conflict, IngredientResult, NutrientResult, Repair, Result, Status
from blendapp.domain.wording import _, plural
from blendapp.services.asking import NEAR_PERCENT


class Part(Enum):
    """What a line is."""

    INGREDIENT = "ingredient"
    RAIL = "rail"
    TOTAL = "total"
    HEADING = "heading"
    PAIR = "pair"
    FOLD = "fold"
    SENTENCE = "sentence"
    CAUTION = "caution"
    ACTION = "action"


@dataclass(frozen=True)
class Line:
    """One line. text: on its left; amount, cost: the two columns at its right; bar: share of the longest bar.

    ingredient_id: of an ingredient or its rail. fold: what a fold opens. repairs: what an action applies, as one undo.
    lack: decimals that the amount has less than the longest one. bar_range: near-optimal, as bar. price, share: further
    columns where there is room.
    """

    part: Part
    text: str = ""
    amount: str = ""
    cost: str = ""
    bar: float | None = None
    hint: str = ""
    ingredient_id: int | None = None
    fold: str = ""
    repairs: tuple[Repair, ...] = ()
    lack: int = 0
    bar_range: tuple[float, float] | None = None
    price: str = ""
    share: str = ""


NUTRIENTS, LEFT_OUT = "nutrients", "left out"


def lines_of(result: Result, opened: frozenset[str], opened_ids: frozenset[int]) -> list[Line]:
    """Every line of a result. opened: folds that are open; opened_ids: ingredients whose rail is shown.

    Without an answer there is no figure that could be read as one.
    """
    lines: list[Line] = []
    if result.has_answer:
        lines += _mix(result, opened_ids)
        lines += _left_out(result, opened)
    else:
        lines += _no_answer(result)
    lines += _unpriced(result)
    lines += _unknown(result)
    if result.by_formula:
        lines.append(Line(Part.SENTENCE, given_by_formula(result.by_formula)))
    # The general caution stands in the footer at all times, so it is not said twice.
    lines += [Line(Part.CAUTION, text) for text in result.cautions if text != general_caution()]
    if result.has_answer:
        lines += _nutrients(result, opened)
    return lines


def amount_words(result: Result, amount: float) -> str:
    """An amount as shown: % of a blend, kg per day of a ration; small ones with the decimals they need."""
    shown = amount * 100 if result.amounts is Amounts.BLEND else amount
    return notation().write(shown, max(2, min(decimals_of(shown, significant=2), 4)) if shown else 2)


def _mix(result: Result, opened_ids: frozenset[int]) -> list[Line]:
    lines: list[Line] = []
    written = {one.ingredient_id: amount_words(result, one.amount or 0.0) for one in result.mix}
    most = max((_decimals(text) for text in written.values()), default=2)
    ends = [end for one in result.mix for end in (one.amount or 0.0, *(one.near_optimal or ()))]
    longest = max((end for end in ends if math.isfinite(end)), default=1.0) or 1.0
    for one in result.mix:
        amount = one.amount or 0.0
        lines.append(Line(
            Part.INGREDIENT, one.name, written[one.ingredient_id], _cost(result, one.cost), amount / longest,
            _share_words(result, one), one.ingredient_id, lack=most - _decimals(written[one.ingredient_id]),
            bar_range=None if one.near_optimal is None else (
                one.near_optimal[0] / longest, one.near_optimal[1] / longest),
            price=notation().write(one.price_per_t, 2), share=_share(result, one),
        ))
        if one.ingredient_id in opened_ids:
            lines.append(Line(Part.RAIL, one.name, ingredient_id=one.ingredient_id))
    total = math.fsum(one.amount or 0.0 for one in result.mix)
    if result.amounts is Amounts.BLEND:
        text = _("{percent} % costs").format(percent=notation().write(total * 100, 2))
    else:
        text = _("{kg} kg per day costs").format(kg=notation().write(total, 2))
    lines.append(Line(Part.TOTAL, text, cost=_cost(result, result.cost), share=notation().write(100, 1)))
    if result.status is Status.STOPPED:
        gap = "" if result.gap is None else notation().write(100 * result.gap, 2)
        known = _("Time was up: this is the best mix found, and the cheapest may cost up to {gap} % less.")
        text = known if gap else _("Time was up: this is the best mix found; a cheaper one may exist.")
        lines.append(Line(Part.CAUTION, text.format(gap=gap)))
    if result.given_ingredients:
        lines.append(Line(Part.SENTENCE, _("What limits cost is worked out for these ingredients only.")))
    if result.tie:
        lines.append(Line(Part.SENTENCE, result.tie))
    return lines


def _decimals(text: str) -> int:
    return len(text.replace(",", ".").partition(".")[2])


def _cost(result: Result, cost: float | None) -> str:
    return "" if cost is None else notation().write(cost, cost_decimals(result))


def cost_decimals(result: Result) -> int:
    """Decimals of money: two per tonne, four per head and day."""
    return 2 if result.amounts is Amounts.BLEND else 4


def _share(result: Result, one: IngredientResult) -> str:
    return "" if not result.cost or one.cost is None else notation().write(100 * one.cost / result.cost, 1)


def _share_words(result: Result, one: IngredientResult) -> str:
    price = notation().write(one.price_per_t, 2)
    text = _("{name} at {price} {currency}/t").format(name=one.name, price=price, currency=result.currency)
    if _share(result, one):
        text += _(", {share} % of the cost").format(share=_share(result, one))
    if one.near_optimal is not None:
        low, high = one.near_optimal
        unit = "%" if result.amounts is Amounts.BLEND else _("kg/day")
        known = _("; other mixes at most {near} % dearer hold {low} to {high} {unit}")
        open_end = _("; other mixes at most {near} % dearer hold {low} {unit} or any more")
        text += (known if math.isfinite(high) else open_end).format(
            low=amount_words(result, low), high=amount_words(result, high) if math.isfinite(high) else "", unit=unit,
            near=notation().write_short(NEAR_PERCENT))
    return text


def _left_out(result: Result, opened: frozenset[str]) -> list[Line]:
    out = [one for one in result.ingredients if not one.amount]
    if not out:
        return []
    priced = sorted((one for one in out if one.break_even_price is not None),
                    key=lambda one: (one.price_per_t - (one.break_even_price or 0.0)) / max(abs(one.price_per_t), 1e-9))
    lines = []
    if priced:
        lines.append(Line(Part.HEADING, _("Would come in below")))
        shown = priced if LEFT_OUT in opened else priced[:6]
        for one in shown:
            assert one.break_even_price is not None
            known = _("{break_even}, now {price}") if one.break_even_price > 0 else _(
                "not at any price above 0, now {price}")
            lines.append(Line(Part.PAIR, one.name, cost=known.format(
                break_even=notation().write(one.break_even_price, 2), price=notation().write(one.price_per_t, 2)),
                hint=break_even_words(one, result.currency)))
        if len(priced) > 6:
            text = _("Show fewer") if LEFT_OUT in opened else plural(
                "{count} more", "{count} more", len(priced) - 6).format(count=len(priced) - 6)
            lines.append(Line(Part.FOLD, text, fold=LEFT_OUT))
        return lines
    count = plural("{count} ingredient left out", "{count} ingredients left out", len(out)).format(count=len(out))
    lines.append(Line(Part.FOLD, count, fold=LEFT_OUT))
    if LEFT_OUT in opened:
        for one in sorted(out, key=lambda one: one.name):
            price = notation().write(one.price_per_t, 2)
            lines.append(Line(Part.PAIR, one.name, cost=_("now {price}").format(price=price)))
    return lines


def break_even_words(one: IngredientResult, currency: str) -> str:
    """At which price an ingredient that is left out would come into the mix, in a sentence."""
    if one.break_even_price is None:
        return ""
    text = _("{name} is left out at {price} {currency}/t; below {break_even} {currency}/t, {less} less, some comes in.")
    if one.break_even_price <= 0:
        text = _("{name} is left out at {price} {currency}/t; it does not come in at any price above 0.")
    if one.price_per_t - one.break_even_price < 0.005:
        text = _("{name} is left out at {price} {currency}/t; the least bit cheaper, and some comes in.")
    write = notation().write
    return text.format(name=one.name, price=write(one.price_per_t, 2), currency=currency,
                       break_even=write(one.break_even_price, 2), less=write(one.price_per_t - one.break_even_price, 2))


def _unpriced(result: Result) -> list[Line]:
    if not result.unpriced:
        return []
    names = ", ".join(result.unpriced)
    text = plural("{names} has no price in force and is left out.", "{names} have no price in force and are left out.",
                  len(result.unpriced))
    return [Line(Part.SENTENCE, text.format(names=names))]


def _unknown(result: Result) -> list[Line]:
    lines = []
    for unsafe in (True, False):
        by_nutrient: dict[str, list[str]] = {}
        for one in result.unknown:
            if one.unsafe is unsafe:
                by_nutrient.setdefault(one.nutrient, []).append(one.ingredient)
        for nutrient, ingredients in by_nutrient.items():
            text = (
                _("{nutrient} of {ingredients} is unknown and counts as 0, which is not safe here.")
                if unsafe else _("{nutrient} of {ingredients} is unknown and counts as 0.")
            )
            names = ingredients if len(ingredients) <= 4 else [*ingredients[:3], _("{count} others").format(
                count=len(ingredients) - 3)]
            lines.append(Line(Part.CAUTION if unsafe else Part.SENTENCE, text.format(
                nutrient=nutrient, ingredients=", ".join(names)), hint=", ".join(ingredients)))
    return lines


def _nutrients(result: Result, opened: frozenset[str]) -> list[Line]:
    free = [one for one in result.nutrients if not one.limited]
    if not free:
        return []
    text = plural("{count} nutrient of the mix that no limit names", "{count} nutrients of the mix that no limit names",
                  len(free))
    lines = [Line(Part.FOLD, text.format(count=len(free)), fold=NUTRIENTS)]
    if NUTRIENTS in opened:
        lines += [_nutrient(one) for one in free]
    return lines


def _nutrient(one: NutrientResult) -> Line:
    hint = ""
    if one.missing:
        hint = _("Without {ingredients}, whose value is unknown.").format(ingredients=", ".join(one.missing))
    value = "·" if one.value is None else f"{write_measure(one.value)} {one.unit}".strip()
    return Line(Part.PAIR, one.name, cost=value, hint=hint)


def _no_answer(result: Result) -> list[Line]:
    title = {
        Status.CONFLICT: _("No mix can meet all of this."),
        Status.UNBOUNDED: _("There is no cheapest mix."),
        Status.INCOMPLETE: _("A price is missing."),
        Status.STOPPED: _("No mix was found in the time given."),
    }.get(result.status, _("There is no answer."))
    lines = [Line(Part.HEADING, title)]
    if result.cause:
        lines.append(Line(Part.SENTENCE, result.cause))
    if result.conflict is not None:
        lines += _conflict(result, result.conflict)
    return lines


def _conflict(result: Result, conflict: Conflict) -> list[Line]:
    lines = [Line(Part.SENTENCE, text) for text in why.sentences(result, conflict)]
    alone = [one for one in conflict.repairs if one.to is not None]
    if alone:
        head = _("This change alone makes it possible") if len(alone) == 1 else _(
            "Any one of these makes it possible")
        lines.append(Line(Part.HEADING, head))
        lines += [Line(Part.ACTION, why.repair_words(result, one), repairs=(one,)) for one in alone]
    together = tuple(one for one in conflict.total if one.to is not None)
    if together and not (len(together) == 1 and together[0] in alone):
        head = _("Or all of these together, the least change in all") if alone else _(
            "Only several changes together make it possible; the least in all")
        lines.append(Line(Part.HEADING, head))
        words = "\n".join(why.repair_words(result, one) for one in together)
        lines.append(Line(Part.ACTION, words, repairs=together))
    return lines
