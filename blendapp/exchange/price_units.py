"""The words that say what mass a price is per. A word with two meanings is asked about, never guessed."""

from __future__ import annotations

import re
from dataclasses import dataclass

from blendapp.domain import units
from blendapp.domain.mills import MillInfo
from blendapp.domain.names import fold
from blendapp.domain.wording import _
from blendapp.exchange.suggestions import did_you_mean

TON, CWT = "ton", "cwt"
_CWT_100, _CWT_112 = "100 lb", "112 lb"

# Every word of one meaning; the key is the unit of domain.units, or a word that the mill must explain.
_WORDS: dict[str, tuple[str, ...]] = {
    "t": ("t", "tonne", "tonnes", "metric ton", "metric tons", "metric tonne", "metric tonnes", "mt", "1000 kg", "to"),
    "kg": ("kg", "kgs", "kilo", "kilos", "kilogram", "kilograms", "kilogramme", "kilogrammes"),
    "100 kg": ("100 kg", "100 kgs", "dt", "100 kilograms"),
    "lb": ("lb", "lbs", "pound", "pounds"),
    "short ton": ("short ton", "short tons", "us ton", "us tons", "net ton", "net tons", "2000 lb", "2000 lbs"),
    "long ton": ("long ton", "long tons", "gross ton", "gross tons", "uk ton", "uk tons", "imperial ton", "2240 lb",
                 "2240 lbs", "imperial tons"),
    units.BUSHEL: ("bu", "bus", "bushel", "bushels", "bsh"),
    _CWT_100: ("100 lb", "100 lbs", "short hundredweight", "short cwt", "us cwt"),
    _CWT_112: ("112 lb", "112 lbs", "long hundredweight", "long cwt", "imperial cwt"),
    TON: ("ton", "tons"),
    CWT: ("cwt", "cwts", "hundredweight", "hundredweights"),
}
_MEANING = {word: meaning for meaning, words in _WORDS.items() for word in words}


@dataclass(frozen=True)
class PriceUnit:
    """per: one of units.PRICE_PER. factor: what a price in the words read is multiplied by to be per that."""

    per: str
    factor: float = 1.0


class UnknownPriceUnit(ValueError):
    """The words name no mass that is known."""


class AmbiguousPriceUnit(ValueError):
    """The words have several meanings and the mill has not said which one holds."""


# A hundredweight of 112 lb is a twentieth of a long ton, so no digit of the price changes its meaning.
_LONG_CWT = PriceUnit("long ton", 20.0)


def plain_words(text: str) -> str:
    """The words of a unit without "per", slashes, full stops and doubled spaces: "$/Short Ton" leaves "short ton"."""
    words = fold(text).replace("\u00a0", " ")
    words = re.sub(r"(?<=[a-z])\.|[()\[\]]", " ", words)
    words = re.sub(r"^\s*(?:/|per\b|each\b|a\b)\s*", "", " ".join(words.split()))
    words = re.sub(r"^(\d+)(?=[a-z])", r"\1 ", words)
    return " ".join(words.split())


def is_price_unit(text: str) -> bool:
    """Whether words name a mass that a price may be per, if perhaps one with two meanings."""
    return plain_words(text) in _MEANING


def read_price_unit(text: str, mill: MillInfo, cwt_is_100_lb: bool) -> PriceUnit:
    """The unit behind words. cwt_is_100_lb: what a bare cwt is where the mill has not said; else it is asked.

    Raises UnknownPriceUnit or AmbiguousPriceUnit, both with the mend.
    """
    words = plain_words(text)
    meaning = _MEANING.get(words)
    if meaning is None:
        sentence = _("“{text}” is not known as the mass of a price; use one of {known}.")
        known = ", ".join(units.PRICE_PER)
        raise UnknownPriceUnit(sentence.format(text=text.strip(), known=known) + did_you_mean(words, _MEANING))
    if meaning == TON:
        if mill.ton_means in units.TON_MEANINGS:
            return PriceUnit(units.TON_MEANINGS[mill.ton_means])
        raise AmbiguousPriceUnit(
            _("“{text}” may be a short ton, a long ton or a tonne; say which, or set Ton means for the mill.").format(
                text=text.strip()
            )
        )
    if meaning == CWT:
        if mill.cwt_means == _CWT_112:
            return _LONG_CWT
        if mill.cwt_means == _CWT_100 or cwt_is_100_lb:
            return PriceUnit("cwt")
        raise AmbiguousPriceUnit(
            _("“{text}” may be 100 lb or 112 lb; say which, or set Cwt means for the mill.").format(text=text.strip())
        )
    if meaning == _CWT_100:
        return PriceUnit("cwt")
    return _LONG_CWT if meaning == _CWT_112 else PriceUnit(meaning)
