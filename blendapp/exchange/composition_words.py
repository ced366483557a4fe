"""The words of a heading over analyses: what is measured, in which unit, and per kg of what."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

from blendapp.domain import units
from blendapp.domain.ingredients import Basis
from blendapp.domain.names import fold

# How laboratories write units, and what each is in a unit of the table; common practice, no source.
_SPELLINGS: dict[str, tuple[str, float]] = {
    **{fold(name): (name, 1.0) for name in units.CONCENTRATION if name != "/kg"},
    **dict.fromkeys(("percent", "per cent", "pct", "% w/w", "w/w %", "% m/m", "g/100 g", "g/100g"), ("%", 1.0)),
    **dict.fromkeys(("g per kg", "gm/kg", "kg/t", "mg/g"), ("g/kg", 1.0)),
    **dict.fromkeys(("mg per kg", "\u03bcg/g", "ug/g"), ("mg/kg", 1.0)),
    **dict.fromkeys(("mg/100 g", "mg/100g"), ("mg/kg", 10.0)),
    **dict.fromkeys(("\u03bcg/kg", "mcg/kg", "ng/g"), ("ug/kg", 1.0)),
    **dict.fromkeys(("g/tonne", "g/mt"), ("g/t", 1.0)),
    **dict.fromkeys(("i.u./kg", "iu per kg", "ie/kg"), ("IU/kg", 1.0)),
    "iu/g": ("IU/kg", 1000.0),
    **dict.fromkeys(("meq/100 g", "meq/100g"), ("mEq/kg", 10.0)),
    **dict.fromkeys(("kj/g",), ("MJ/kg", 1.0)),
    **dict.fromkeys(("cal/g",), ("kcal/kg", 1.0)),
    **dict.fromkeys(("u/kg", "units/kg", "ftu/kg"), ("/kg", 1.0)),
}
_UNITS = re.compile(
    r"(?<![\w/.])(?:" + "|".join(re.escape(word) for word in sorted(_SPELLINGS, key=len, reverse=True))
    + r")(?![\w/])|%"
)
# Neither as fed nor dry: "at 88 % dry matter", "air-dry".
_STATED = re.compile(r"[0-9]+(?:[.,][0-9]+)?\s*%\s*(?:dm\b|dry\s+matter)|\bair[ -]?dr(?:y|ied)\b")
_BASIS = r"(?:[ -]?bas(?:is|ed))?"
_AS_FED = re.compile(
    r"\b(?:(?:on|in|of)\s+(?:an?\s+|the\s+)?)?(?:as[ -]?(?:fed|is|received|sampled|delivered)|af|ar|"
    rf"fresh[ -](?:matter|weight)|wet[ -](?:basis|weight)|original[ -](?:matter|substance))\b{_BASIS}"
)
_DRY = re.compile(
    r"(?<![a-z0-9])(?:(?:on|in|of)\s+(?:an?\s+|the\s+)?)?(?:dry[ -]?(?:matter|basis|weight|substance)|dm|dmb|"
    rf"moisture[ -]free)\b{_BASIS}"
)
_DRY_MATTER_NAMES = frozenset({"dm", "dry matter", "dry matter content", "dry substance"})
_MOISTURE_NAMES = frozenset({"moisture", "water", "moisture content", "water content", "h2o"})
_LONGEST = 300
# What closes the name of a property without being part of it.
_CLOSING = re.compile(r"(?:[\s,;:\-–/]|\b(?:in|on|of|per|content|result|results|value)\b)+$")


@dataclass(frozen=True)
class HeadingWords:
    """name: the words that are neither unit nor basis; whole: those that are no unit. unit: of the table, "" if none.

    factor: what a number under the heading is multiplied by to be in `unit`. basis: None where none is said. stated:
    whether it speaks of a stated dry matter such as 88 %, or of air-dry goods. says_unit: whether it names any unit.
    """

    name: str
    whole: str
    unit: str = ""
    factor: float = 1.0
    basis: Basis | None = None
    stated: bool = False
    says_unit: bool = False

    @property
    def is_dry_matter(self) -> bool:
        return self.whole in _DRY_MATTER_NAMES

    @property
    def is_moisture(self) -> bool:
        return self.whole in _MOISTURE_NAMES or self.name in _MOISTURE_NAMES

    @property
    def says_only_how(self) -> bool:
        """Whether there is a unit or a basis and nothing else."""
        return not self.name and (self.says_unit or self.basis is not None)


@lru_cache(2048)
def read_heading(text: str) -> HeadingWords:
    """The words of a heading: "Crude protein (%)", "CP % DM", "Lysine g/kg as fed", "Ca". A very long text has none."""
    if len(text) > _LONGEST:
        return HeadingWords("", "")
    plain = _tidy(re.sub(r"[()\[\]{}|]", " ", fold(text)))
    stated = _STATED.search(plain) is not None
    named = {_SPELLINGS[found] for found in _UNITS.findall(plain)}
    rest = _tidy(_UNITS.sub(" ", plain))
    unit, factor = next(iter(named)) if len(named) == 1 else ("", 1.0)
    whole = _closed(rest)
    if _closed(_tidy(_AS_FED.sub(" ", rest))) in _DRY_MATTER_NAMES:
        return HeadingWords("", "dry matter", unit, factor, None, False, bool(named))
    fed, dry = _AS_FED.search(rest), _DRY.search(rest)
    basis = None if bool(fed) is bool(dry) else Basis.AS_FED if fed else Basis.DRY_MATTER
    name = _closed(_tidy(_DRY.sub(" ", _AS_FED.sub(" ", rest))))
    return HeadingWords(name, whole, unit, factor, None if stated else basis, stated, bool(named))


def read_unit(text: str) -> tuple[str, float] | None:
    """The unit that words name and the factor to it; None where they name none."""
    return _SPELLINGS.get(_tidy(fold(text)))


def read_basis(text: str) -> Basis | None:
    """The basis that words name; None where they name none, both, or that of a stated dry matter such as 88 %."""
    plain = _tidy(fold(text[:_LONGEST]))
    if _STATED.search(plain):
        return None
    fed, dry = _AS_FED.search(plain), _DRY.search(plain)
    return None if bool(fed) is bool(dry) else Basis.AS_FED if fed else Basis.DRY_MATTER


def _tidy(text: str) -> str:
    return " ".join(text.split())


def _closed(text: str) -> str:
    return _CLOSING.sub("", text).strip(" ,;:-–/.")
