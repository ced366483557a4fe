"""Ingredients and their composition."""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from enum import StrEnum

from blendapp.domain import units


class Basis(StrEnum):
    """What a composition value is per kg of."""

    AS_FED = "as fed"
    DRY_MATTER = "dry matter"


class Origin(StrEnum):
    """Where a composition value comes from."""

    MEASURED = "measured"
    TABLE = "table"
    ESTIMATED = "estimated"
    SUPPLIER = "supplier"


class Tag(StrEnum):
    """What cautions and admission must know of an ingredient."""

    MEDICATED = "medicated"
    NON_PROTEIN_NITROGEN = "non-protein nitrogen"
    RUMINANT_PROTEIN = "ruminant protein"
    ANIMAL_PROTEIN = "animal protein"
    IONOPHORE = "ionophore"
    ADDED_COPPER = "added copper"
    ADDED_SELENIUM = "added selenium"
    ONLY_WHEN_LISTED = "only when listed"


# Ingredients with one of these are never admitted by a formula that does not list them.
NEVER_UNLISTED: frozenset[Tag] = frozenset({
    Tag.MEDICATED, Tag.NON_PROTEIN_NITROGEN, Tag.RUMINANT_PROTEIN, Tag.ANIMAL_PROTEIN, Tag.IONOPHORE,
    Tag.ONLY_WHEN_LISTED,
})


@dataclass(frozen=True)
class Ingredient:
    """A feed material as the mill buys it.

    dry_matter_percent: of the material as fed, None if unknown. basis: of composition values typed without one.
    bushel_lb: mass of a bushel. made_by_formula_id: the formula that makes it, if the mill makes it itself; opened:
    whether a batch then takes what it is made of in its place. supplier_id: from whom the mill buys it (quotes.rule).
    """

    id: int
    name: str
    class_name: str = ""
    dry_matter_percent: float | None = None
    basis: Basis = Basis.AS_FED
    code: str = ""
    scale_id: int | None = None
    stock_kg: float | None = None
    density_kg_per_l: float | None = None
    bushel_lb: float | None = None
    tags: tuple[Tag, ...] = ()
    made_by_formula_id: int | None = None
    drug: str = ""
    drug_level: str = ""
    drug_species: str = ""
    withdrawal: str = ""
    note: str = ""
    opened: bool = False
    supplier_id: int | None = None

    @property
    def never_unlisted(self) -> bool:
        return not NEVER_UNLISTED.isdisjoint(self.tags)

    @property
    def medicated(self) -> bool:
        """Whether it is so tagged, or a drug of it is named."""
        return Tag.MEDICATED in self.tags or bool(self.drug.strip())

    @property
    def dry_matter_fraction(self) -> float | None:
        return None if self.dry_matter_percent is None else self.dry_matter_percent / 100


@dataclass(frozen=True)
class Value:
    """One composition value of one ingredient, kept as entered.

    amount: in `unit`, per kg of `basis`. entered: the text as typed, "" if it came as a number. canonical: the same in
    the base unit of the family (units.Unit), on the basis as entered. n: count of samples; sd: standard deviation, in
    `unit`.
    """

    id: int
    ingredient_id: int
    nutrient_id: int
    amount: float
    unit: str
    basis: Basis = Basis.AS_FED
    origin: Origin | None = None
    source: str = ""
    date: datetime.date | None = None
    n: int | None = None
    sd: float | None = None
    entered: str = ""

    @property
    def canonical(self) -> float:
        return self.amount * units.concentration(self.unit).factor

    def as_fed(self, unit: str, dry_matter_percent: float | None) -> float | None:
        """The value in another unit of its family, per kg as fed; None if it is per dry matter and that is unknown."""
        amount = units.convert(self.amount, self.unit, unit)
        if self.basis is Basis.AS_FED:
            return amount
        return None if dry_matter_percent is None else amount * dry_matter_percent / 100
