"""One table of factors for every unit the program knows, and the conversions that follow from it.

Sources: the pound is 0.45359237 kg exactly (international yard and pound agreement, 1959); the short ton is
2000 lb and the long ton 2240 lb (NIST Handbook 44, appendix C); the calorie is the thermochemical one, 4.184 J.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

from blendapp.domain.wording import _

LB_KG = 0.45359237
SHORT_TON_KG = 2000 * LB_KG
LONG_TON_KG = 2240 * LB_KG
KCAL_MJ = 4.184e-3


class Family(Enum):
    """What a unit measures. Concentrations are per kg of material; the value names the numerator."""

    MASS = "mass"
    ACTIVITY = "activity"
    CHARGE = "charge"
    ENERGY = "energy"
    BARE = "bare"


@dataclass(frozen=True)
class Unit:
    """A unit of concentration (per kg) or of intake (per day): its value times factor is in the base unit.

    Base units of concentration: kg/kg, IU/kg, mEq/kg, MJ/kg, 1/kg; of intake: kg, IU, mEq, MJ, 1 per day.
    """

    name: str
    family: Family
    factor: float


def _table(rows: list[tuple[str, Family, float]]) -> dict[str, Unit]:
    return {name: Unit(name, family, factor) for name, family, factor in rows}


CONCENTRATION: dict[str, Unit] = _table([
    ("%", Family.MASS, 1e-2),
    ("g/kg", Family.MASS, 1e-3),
    ("mg/kg", Family.MASS, 1e-6),
    ("ug/kg", Family.MASS, 1e-9),
    ("ppm", Family.MASS, 1e-6),
    ("ppb", Family.MASS, 1e-9),
    ("g/t", Family.MASS, 1e-6),
    ("g/short ton", Family.MASS, 1e-3 / SHORT_TON_KG),
    ("mg/lb", Family.MASS, 1e-6 / LB_KG),
    ("IU/kg", Family.ACTIVITY, 1.0),
    ("IU/lb", Family.ACTIVITY, 1 / LB_KG),
    ("mEq/kg", Family.CHARGE, 1.0),
    ("MJ/kg", Family.ENERGY, 1.0),
    ("kJ/kg", Family.ENERGY, 1e-3),
    ("kcal/kg", Family.ENERGY, KCAL_MJ),
    ("kcal/lb", Family.ENERGY, KCAL_MJ / LB_KG),
    ("Mcal/kg", Family.ENERGY, KCAL_MJ * 1e3),
    ("/kg", Family.BARE, 1.0),
])

PER_DAY: dict[str, Unit] = _table([
    ("kg/day", Family.MASS, 1.0),
    ("g/day", Family.MASS, 1e-3),
    ("mg/day", Family.MASS, 1e-6),
    ("IU/day", Family.ACTIVITY, 1.0),
    ("mEq/day", Family.CHARGE, 1.0),
    ("MJ/day", Family.ENERGY, 1.0),
    ("kcal/day", Family.ENERGY, KCAL_MJ),
    ("Mcal/day", Family.ENERGY, KCAL_MJ * 1e3),
    ("/day", Family.BARE, 1.0),
])

# Own per-day unit of a concentration: its numerator per day ("% gives kg/day, g/kg g/day").
_DAY_NUMERATOR = {
    "%": "kg/day", "g/kg": "g/day", "mg/kg": "mg/day", "ug/kg": "mg/day", "ppm": "mg/day", "ppb": "mg/day",
    "g/t": "g/day", "g/short ton": "g/day", "mg/lb": "mg/day", "IU/kg": "IU/day", "IU/lb": "IU/day",
    "mEq/kg": "mEq/day", "MJ/kg": "MJ/day", "kJ/kg": "MJ/day", "kcal/kg": "kcal/day", "kcal/lb": "kcal/day",
    "Mcal/kg": "Mcal/day", "/kg": "/day",
}

# Inclusion of an ingredient or a group: value times factor is a fraction of the mix, or kg per day.
BLEND_INCLUSION: dict[str, float] = {"%": 1e-2, "kg/t": 1e-3, "g/t": 1e-6, "lb/short ton": 1 / 2000}
RATION_INCLUSION: dict[str, float] = {"kg/day": 1.0, "g/day": 1e-3, "lb/day": LB_KG}
SHARE_OF_DRY_MATTER = "% of dry matter"

# Mass that a price may be per, in kg; "bu" needs the ingredient's bushel weight.
PRICE_PER_KG: dict[str, float] = {
    "t": 1000.0, "kg": 1.0, "100 kg": 100.0, "lb": LB_KG, "cwt": 100 * LB_KG,
    "long cwt": 112 * LB_KG, "short ton": SHORT_TON_KG, "long ton": LONG_TON_KG,
}
BUSHEL = "bu"
PRICE_PER: tuple[str, ...] = (*PRICE_PER_KG, BUSHEL)

# Mass of the legal bushel in lb, common practice in United States grain trade (7 CFR 810 test weights differ).
LEGAL_BUSHEL_LB: dict[str, float] = {"maize": 56.0, "corn": 56.0, "wheat": 60.0, "soya": 60.0, "soybean": 60.0,
                                     "soybeans": 60.0, "barley": 48.0, "oats": 32.0}

# Masses and volumes that the step of a scale or a meter may be typed in. The US gallon is 231 cubic inches of 2.54 cm
# (NIST Handbook 44, appendix C), the imperial one 4.54609 l (Units of Measurement Regulations 1995, United Kingdom).
MASS_KG: dict[str, float] = {
    "kg": 1.0, "g": 1e-3, "mg": 1e-6, "t": 1000.0, "lb": LB_KG, "oz": LB_KG / 16, "short ton": SHORT_TON_KG,
    "long ton": LONG_TON_KG,
}
VOLUME_L: dict[str, float] = {"l": 1.0, "ml": 1e-3, "US gal": 231 * 2.54**3 / 1000, "imperial gal": 4.54609}

# Words that may stand beside the name of a grain without making it another good.
_GRAIN_WORDS = frozenset({"grain", "grains", "whole"})


def legal_bushel_lb(name: str) -> float | None:
    """Mass of the legal bushel in lb of an ingredient that is one of those grains by name, else None."""
    words = [word for word in name.casefold().replace(",", " ").split() if word not in _GRAIN_WORDS]
    return LEGAL_BUSHEL_LB.get(words[0]) if len(words) == 1 else None


TON_MEANINGS: dict[str, str] = {"short ton": "short ton", "long ton": "long ton", "t": "t"}
CWT_MEANINGS: dict[str, float] = {"100 lb": 100 * LB_KG, "112 lb": 112 * LB_KG}
# As which mass a quote keeps what a mill calls a cwt, so that the quote stays what it was if the mill changes its mind.
CWT_KEPT_AS: dict[str, str] = {"100 lb": "cwt", "112 lb": "long cwt"}


def is_currency_code(text: str) -> bool:
    """Whether a text has the form of a currency code of ISO 4217: three capital letters."""
    return len(text) == 3 and text.isascii() and text.isalpha() and text.isupper()


def concentration(name: str) -> Unit:
    """The unit of that name; a blank name is the bare number per kg. Raises ValueError with the mend."""
    try:
        return CONCENTRATION[name.strip() or "/kg"]
    except KeyError:
        raise ValueError(_unknown_unit(name, CONCENTRATION)) from None


def per_day(name: str) -> Unit:
    """The intake unit of that name. Raises ValueError with the mend."""
    try:
        return PER_DAY[name.strip()]
    except KeyError:
        raise ValueError(_unknown_unit(name, PER_DAY)) from None


def own_per_day(concentration_name: str) -> str:
    """The per-day unit whose numerator is that of a concentration: % gives kg/day, MJ/kg gives MJ/day."""
    return _DAY_NUMERATOR[concentration(concentration_name).name]


def convert(value: float, unit: str, to: str) -> float:
    """A concentration in another unit of its family. Raises ValueError if the families differ."""
    source, target = concentration(unit), concentration(to)
    if source.family is not target.family:
        text = _("{unit} cannot be turned into {to}; choose a unit of the same kind.")
        raise ValueError(text.format(unit=unit, to=to))
    return value * (source.factor / target.factor)


def price_per_t(price: float, per: str, bushel_lb: float | None = None) -> float:
    """Money per tonne from money per a stated mass. Raises ValueError for an unknown mass or an unknown bushel."""
    if per == BUSHEL:
        if not bushel_lb:
            raise ValueError(_("A price per bushel needs the weight of a bushel; enter it under Bushel lb."))
        return price * 1000.0 / (bushel_lb * LB_KG)
    try:
        return price * (1000.0 / PRICE_PER_KG[per])
    except KeyError:
        raise ValueError(_unknown_unit(per, PRICE_PER)) from None


def _unknown_unit(name: str, known: object) -> str:
    names = ", ".join(name for name in known if name != "/kg")  # type: ignore[attr-defined]
    return _("The unit “{name}” is not known; use one of {names}.").format(name=name, names=names)
