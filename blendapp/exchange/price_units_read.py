"""From a price and the words around it to money of the mill per tonne, or the question why not."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from blendapp.domain import units
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.mills import MillInfo
from blendapp.domain.wording import _
from blendapp.exchange.price_units import AmbiguousPriceUnit, PriceUnit, UnknownPriceUnit, read_price_unit
from blendapp.exchange.price_words import Money, Words


@dataclass(frozen=True)
class UnitReading:
    """unit: None where it is in doubt, and doubt says why. said: the words of the list."""

    unit: PriceUnit | None
    said: str = ""
    doubt: str = ""


def read_unit(sources: Sequence[Words], mill: MillInfo) -> UnitReading:
    """The unit that the sources of a row agree on; the first that names one comes first."""
    found: dict[PriceUnit, str] = {}
    said = next((words.unit for words in sources if words.unit), "")
    for words in sources:
        text = words.unit or (words.rest if words.rest.startswith("/") else "")
        if not text:
            continue
        try:
            found.setdefault(read_price_unit(text, mill, cwt_is_100_lb=False), text)
        except (UnknownPriceUnit, AmbiguousPriceUnit) as error:
            return UnitReading(None, said or text.strip("/"), str(error))
    if not found:
        return UnitReading(None, "", _("The list does not say what mass the price is for; say which."))
    if len(found) > 1:
        names = _(" and ").join(f"“{text}”" for text in found.values())
        return UnitReading(None, said, _("The list says {names} of one price; say which holds.").format(names=names))
    unit = next(iter(found))
    return UnitReading(unit, said)


def money_doubt(sources: Sequence[Money], currency: str) -> str:
    """The question about the currency of a price, or nothing."""
    for money in sources:
        if money.is_foreign(currency):
            text = _("The price is in {theirs} and the mill reckons in {own}; give the price in {own}.")
            names = sorted(money.currencies or ())
            return text.format(theirs=names[0] if len(names) == 1 else money.sign, own=currency)
    if any(money.cents for money in sources):
        return _("The price is in hundredths of {own}; give it in {own}.").format(own=currency)
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


def per_tonne(price: float, unit: PriceUnit, ingredient: Ingredient | None) -> TonnePrice:
    """A price in its unit as money per tonne; a bushel by the weight entered for the ingredient, else the legal one."""
    amount = price * unit.factor
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
    if not weight:
        text = _("The weight of a bushel of “{name}” is not known; enter it under Bushel lb.")
        return TonnePrice(amount, unit.per, None, None, text.format(name=ingredient.name))
    return TonnePrice(amount, unit.per, weight, units.price_per_t(amount, unit.per, weight), remark=remark)
