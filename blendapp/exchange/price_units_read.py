"""From a price and the words around it to money of the mill per tonne, or the question why not."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass

from blendapp.domain import units
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.mills import MillInfo
from blendapp.domain.wording import _
from blendapp.exchange.price_units import (
    AmbiguousPriceUnit,
    PriceUnit,
    UnknownPriceUnit,
    plain_words,
    read_price_unit,
    unit_choices,
)
from blendapp.exchange.price_words import Money, Words


@dataclass(frozen=True)
class UnitReading:
    """unit: None where it is in doubt, and doubt says why. said: the words of the list; about: those in doubt."""

    unit: PriceUnit | None
    said: str = ""
    doubt: str = ""
    about: str = ""
    choices: tuple[str, ...] = ()


def read_unit(sources: Sequence[Words], mill: MillInfo, notes: Sequence[Words] = ()) -> UnitReading:
    """The unit that the sources of a row agree on; the first that names one comes first.

    notes: what titles say of all prices, which may explain the sources and may not gainsay them.
    """
    reading = _of_sources(sources, mill)
    if reading.unit is None and not reading.choices:
        return reading
    meant = [reading.unit] if reading.unit else [read_price_unit(one, mill, True) for one in reading.choices]
    for note in notes:
        if not note.unit:
            continue
        try:
            said = read_price_unit(note.unit, mill, cwt_is_100_lb=False)
        except AmbiguousPriceUnit:
            words = unit_choices(plain_words(note.unit))
            if not any(read_price_unit(one, mill, True) in meant for one in words):
                return _two_units(reading.said, note.unit)
            continue
        except UnknownPriceUnit:
            continue
        if said not in meant:
            return _two_units(reading.said, note.unit)
        if reading.unit is None and len(meant) < len(units.PRICE_PER):
            reading = UnitReading(said, reading.said)
            meant = [said]
    return reading


def _two_units(said: str, noted: str) -> UnitReading:
    doubt = _("The list says {names} of one price; say which holds.")
    names = _(" and ").join((f"“{said.strip('/')}”", f"“{noted}”"))
    return UnitReading(
        None, said, doubt.format(names=names), f"{plain_words(said)} / {plain_words(noted)}",
        (said.strip("/"), noted),
    )


def _of_sources(sources: Sequence[Words], mill: MillInfo) -> UnitReading:
    found: dict[PriceUnit, str] = {}
    said = next((words.unit for words in sources if words.unit), "")
    for words in sources:
        text = words.unit or (words.rest if words.rest.startswith("/") else "")
        if not text:
            continue
        try:
            found.setdefault(read_price_unit(text, mill, cwt_is_100_lb=False), text)
        except (UnknownPriceUnit, AmbiguousPriceUnit) as error:
            about = plain_words(text)
            return UnitReading(None, said or text.strip("/"), str(error), about, unit_choices(about))
    if not found:
        doubt = _("The list does not say what mass the price is for; say which.")
        return UnitReading(None, "", doubt, "", units.PRICE_PER)
    if len(found) > 1:
        names = _(" and ").join(f"“{text}”" for text in found.values())
        doubt = _("The list says {names} of one price; say which holds.").format(names=names)
        return UnitReading(None, said, doubt, " / ".join(map(plain_words, found.values())), tuple(found.values()))
    unit = next(iter(found))
    return UnitReading(unit, said)


def foreign_money(sources: Sequence[Money], currency: str) -> str:
    """The code, or else the sign, of a currency that is not the mill's own; nothing where there is none."""
    for money in sources:
        if money.is_foreign(currency):
            names = sorted(money.currencies or ())
            return names[0] if len(names) == 1 else money.sign
    return ""


@dataclass(frozen=True)
class TonnePrice:
    """price, per: as a quote keeps them. per_t: None where a bushel has no weight, and doubt says so."""

    price: float
    per: str
    bushel_lb: float | None
    per_t: float | None
    doubt: str = ""
    remark: str = ""


def bushel_said(answer: str) -> float | None:
    """A bushel in lb, as it was answered: 56, 56 lb or 25.4 kg; None where it is no mass above 0."""
    found = re.fullmatch(r"([0-9]+(?:[.,][0-9]+)?) *(lbs?|kg)?", answer.strip().casefold())
    mass = float(found[1].replace(",", ".")) if found else 0.0
    if not 1e-3 < mass < 1e5:
        return None
    return mass / units.LB_KG if found and found[2] == "kg" else mass


def per_tonne(
    price: float, unit: PriceUnit, ingredient: Ingredient | None, bushel_lb: float | None = None
) -> TonnePrice:
    """A price in its unit as money per tonne; a bushel by the weight entered for the ingredient, else the legal one.

    bushel_lb: what a person said for this source, where neither is known.
    """
    amount = price if unit.factor == 1 else price * unit.factor
    if unit.per != units.BUSHEL:
        return TonnePrice(amount, unit.per, None, units.price_per_t(amount, unit.per))
    if ingredient is None:
        return TonnePrice(amount, unit.per, None, None)
    remark = ""
    weight = ingredient.bushel_lb
    if not weight:
        weight = units.legal_bushel_lb(ingredient.name)
        if weight:
            remark = _("The legal bushel of {weight} lb was taken.").format(weight=f"{weight:g}")
    if not weight and bushel_lb:
        weight = bushel_lb
        remark = _("The bushel was taken at {weight} lb, as answered.").format(weight=f"{weight:g}")
    if not weight:
        text = _("The weight of a bushel of “{name}” is not known; say it, as 56 lb, or enter it under Bushel lb.")
        return TonnePrice(amount, unit.per, None, None, text.format(name=ingredient.name))
    return TonnePrice(amount, unit.per, weight, units.price_per_t(amount, unit.per, weight), remark=remark)
