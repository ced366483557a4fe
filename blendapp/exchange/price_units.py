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
    "t": ("t", "tonne", "tonnes", "metric ton", "metric tons", "metric tonne", "metric tonnes", "mt", "mts", "1000 kg",
          "to"),
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
# "ton (2000 lb)" and "60 lb bushel" say what they are; a stone is 14 lb, and "st" may be one.
_NAMED = re.compile(
    r"(?:(?:tons?|cwts?|hundredweights?|bushels?|bu|bsh|stones?|units?)(?: of| @|,| =)? "
    r"([0-9]+(?:[.,][0-9]+)?) ?(kgs?|lbs?)|([0-9]+(?:[.,][0-9]+)?) ?(kgs?|lbs?)[ -]?"
    r"(?:tons?|cwts?|hundredweights?|bushels?|bu|bsh))"
)
_STONE, _STONE_LB = frozenset({"stone", "stones"}), 14.0
ST = "st"


@dataclass(frozen=True)
class PriceUnit:
    """per: one of units.PRICE_PER. factor: what a price in the words read is multiplied by to be per that."""

    per: str
    factor: float = 1.0


class UnknownPriceUnit(ValueError):
    """The words name no mass that is known."""


class AmbiguousPriceUnit(ValueError):
    """The words have several meanings and the mill has not said which one holds."""


_LONG_CWT = PriceUnit(units.CWT_KEPT_AS[_CWT_112])


def unit_choices(words: str) -> tuple[str, ...]:
    """What plain words in doubt may mean, as units to choose from."""
    if _MEANING.get(words) == TON:
        return ("short ton", "long ton", "t")
    if words == ST:
        return ("short ton", "14 lb")
    return (_CWT_100, _CWT_112) if _MEANING.get(words) == CWT else units.PRICE_PER


def _means_long_ton(text: str) -> bool:
    """LT in capitals; small letters may be a litre."""
    return re.sub(r"^\s*(?:/|per\b)|[\s.()]", "", text) in ("LT", "LTS")


def plain_words(text: str) -> str:
    """The words of a unit without "per", slashes, full stops and doubled spaces: "$/Short Ton" leaves "short ton"."""
    words = fold(text).replace("\u00a0", " ")
    words = re.sub(r"(?<=[a-z])\.|[()\[\]]", " ", words)
    words = re.sub(r"^\s*(?:/|per\b|each\b|a\b)\s*", "", " ".join(words.split()))
    words = re.sub(r"^(\d+)(?=[a-z])", r"\1 ", words)
    return " ".join(words.split())


def is_price_unit(text: str) -> bool:
    """Whether words name a mass that a price may be per, if perhaps one with two meanings."""
    words = plain_words(text)
    return words in _MEANING or words == ST or _means_long_ton(text) or _bag(words) is not None


_BAG_NAMES = r"(?:bags?|sacks?|big bags?|totes?|super ?sacks?|drums?)"
_MASS = r"([0-9]+(?:[.,][0-9]+)?)[ -]?(kgs?|lbs?)"
_BAGS = re.compile(rf"{_BAG_NAMES}(?: of| a| @|,)? {_MASS}|{_MASS}[ -]?{_BAG_NAMES}")
# Of any unit; what is no bag is no number to reckon with either.
_LEAST_BAG, _GREATEST_BAG = 1e-3, 1e5
_BARE_BAG = re.compile(_BAG_NAMES)
_BAG_OF_MASS = re.compile(_MASS)


def _bag(words: str) -> PriceUnit | None:
    """The price unit behind a mass that is said, of a bag or of anything else; None where none is."""
    if words in _MEANING:
        return None
    if words in _STONE:
        return PriceUnit("cwt", 100 / _STONE_LB)
    found = _BAGS.fullmatch(words) or _NAMED.fullmatch(words)
    said = (found[1] or found[3], found[2] or found[4]) if found else None
    if found is None and (alone := _BAG_OF_MASS.fullmatch(words)):
        said = alone[1], alone[2]
    if said is None:
        return None
    mass = float(said[0].replace(",", "."))
    if not _LEAST_BAG < mass < _GREATEST_BAG:
        return None
    known = _MEANING.get(f"{said[0]} {said[1]}")
    if known is not None and not _BAGS.fullmatch(words):
        return _unit_of(known)
    return PriceUnit("t", 1000 / mass) if said[1].startswith("kg") else PriceUnit("cwt", 100 / mass)


def _unit_of(meaning: str) -> PriceUnit:
    """The unit of a meaning that is no doubt."""
    if meaning == _CWT_100:
        return PriceUnit("cwt")
    return _LONG_CWT if meaning == _CWT_112 else PriceUnit(meaning)


def bag_with_weight(words: str, pack: str) -> str:
    """The words of a bag and of its weight, from a column of their own, as one unit; the words alone otherwise."""
    if _BARE_BAG.fullmatch(plain_words(words)) and _BAG_OF_MASS.fullmatch(plain_words(pack)):
        return f"{plain_words(pack)} {plain_words(words)}"
    return words


def read_price_unit(text: str, mill: MillInfo, cwt_is_100_lb: bool) -> PriceUnit:
    """The unit behind words. cwt_is_100_lb: what a bare cwt is where the mill has not said; else it is asked.

    Raises UnknownPriceUnit or AmbiguousPriceUnit, both with the mend.
    """
    words = plain_words(text)
    bag = _bag(words)
    if bag is not None:
        return bag
    if _means_long_ton(text):
        return PriceUnit("long ton")
    if words == ST:
        sentence = _("“{text}” may be a short ton or a stone of 14 lb; say which.")
        raise AmbiguousPriceUnit(sentence.format(text=text.strip("/ ")))
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
    return _unit_of(meaning)
