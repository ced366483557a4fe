"""Nutrients, and the closed list of keys by which cautions know them."""

from __future__ import annotations

from dataclasses import dataclass

# Keys that a nutrient may carry, so that cautions match whatever a mill calls it. Total and added are two things.
KEYS: tuple[str, ...] = (
    "crude protein",
    "npn crude protein",
    "ruminally degradable protein",
    "energy",
    "crude fat",
    "crude fibre",
    "neutral detergent fibre",
    "acid detergent fibre",
    "ash",
    "starch",
    "sugars",
    "calcium",
    "total phosphorus",
    "available phosphorus",
    "magnesium",
    "potassium",
    "sodium",
    "chloride",
    "sulphur",
    "electrolyte balance",
    "lysine",
    "methionine",
    "methionine and cystine",
    "threonine",
    "tryptophan",
    "linoleic acid",
    "added copper",
    "total copper",
    "added selenium",
    "total selenium",
    "added zinc",
    "total zinc",
    "iron",
    "manganese",
    "iodine",
    "cobalt",
    "vitamin A",
    "vitamin D",
    "vitamin E",
)

DRY_MATTER = "Dry matter"
MOISTURE = "Moisture"
BUILT_IN: tuple[str, ...] = (DRY_MATTER, MOISTURE)


@dataclass(frozen=True)
class Nutrient:
    """A nutrient or other property that mixes linearly.

    unit: a unit of concentration of domain.units, "" for a bare number per kg. never_negative: no value of it can be
    below zero, so that taking 0 for an unknown one is harmless under a minimum. key: one of KEYS, or "".
    """

    id: int
    name: str
    unit: str = "%"
    never_negative: bool = True
    key: str = ""
    note: str = ""
