"""Formulas and their limits."""

from __future__ import annotations

import re
from dataclasses import dataclass
from enum import StrEnum

from blendapp.domain.notation import PLAIN
from blendapp.domain.wording import _


class Amounts(StrEnum):
    """What the amounts of a formula are: fractions of a mix, or kg as fed per head per day."""

    BLEND = "blend"
    RATION = "ration"


class Admits(StrEnum):
    """Which ingredients a formula may use: those with an ingredient limit, or all that may be used unlisted."""

    LISTED = "listed"
    ALL = "all"


class Animal(StrEnum):
    POULTRY = "poultry"
    PIG = "pig"
    CATTLE = "cattle"
    SHEEP = "sheep"
    GOAT = "goat"
    HORSE = "horse"
    OTHER = "other"

    @property
    def ruminant(self) -> bool | None:
        """None where the animal does not say."""
        return None if self is Animal.OTHER else self in (Animal.CATTLE, Animal.SHEEP, Animal.GOAT)


@dataclass(frozen=True)
class Formula:
    """What a feed must meet.

    batch_kg: the usual size of a batch. loss_percent: of the mass that is weighed, lost on the way to the bag.
    product_dry_matter_percent: dry matter of the finished feed, None where it is that of the mix.
    """

    id: int
    name: str
    amounts: Amounts = Amounts.BLEND
    animal: Animal | None = None
    stage: str = ""
    batch_kg: float | None = None
    admits: Admits = Admits.ALL
    note: str = ""
    loss_percent: float | None = None
    product_dry_matter_percent: float | None = None


@dataclass(frozen=True)
class MixingStep:
    """One step of making a feed, in the order of `position`.

    formula_id: None is every formula without steps of its own. minutes: how long, None where it is not timed. setting:
    of the machine, as the operator reads it.
    """

    id: int
    formula_id: int | None
    position: int
    text: str
    minutes: float | None = None
    setting: str = ""


class LimitKind(StrEnum):
    NUTRIENT = "nutrient"
    INGREDIENT = "ingredient"
    GROUP = "group"
    RATIO = "ratio"
    PRACTICAL = "practical"
    COUNT = "count"


class LimitBasis(StrEnum):
    """What a nutrient limit is per. AT_DRY_MATTER: per kg of the mix brought to a stated dry matter."""

    AS_FED = "as fed"
    DRY_MATTER = "dry matter"
    AT_DRY_MATTER = "at dry matter"
    PER_DAY = "per day"


_AT = re.compile(r"at\s+([0-9]+(?:[.,][0-9]+)?)\s*%\s*(?:dry matter|dm)", re.IGNORECASE)


def read_basis(text: str) -> tuple[LimitBasis, float | None]:
    """The basis in a cell, with the stated dry matter in %, for example "at 88 % dry matter".

    Raises ValueError with the mend for any other text, or a dry matter outside 0 to 100 %.
    """
    plain = " ".join(text.split()).casefold()
    if not plain:
        return LimitBasis.AS_FED, None
    if plain in (LimitBasis.AS_FED, LimitBasis.DRY_MATTER, LimitBasis.PER_DAY):
        return LimitBasis(plain), None
    found = _AT.fullmatch(plain)
    if not found:
        sentence = _("The basis “{text}” is not known; write as fed, dry matter, at 88 % dry matter, or per day.")
        raise ValueError(sentence.format(text=text))
    stated = float(found.group(1).replace(",", "."))
    if not 0 < stated <= 100:
        sentence = _("A stated dry matter must lie above 0 and at most 100 %; “{text}” does not.")
        raise ValueError(sentence.format(text=text))
    return LimitBasis.AT_DRY_MATTER, stated


def write_basis(basis: LimitBasis, at_dry_matter_percent: float | None) -> str:
    """The basis as the workbook and JSON write it."""
    if basis is LimitBasis.AT_DRY_MATTER:
        return f"at {PLAIN.write_exact(at_dry_matter_percent)} % dry matter"
    return str(basis)


class SubjectKind(StrEnum):
    NUTRIENT = "nutrient"
    DRY_MATTER = "dry matter"
    MOISTURE = "moisture"
    INGREDIENTS = "ingredients"
    CLASS = "class"


@dataclass(frozen=True)
class Subject:
    """What a limit is about: a nutrient, the dry matter or moisture, some ingredients by identifier, or a class.

    A class is followed by name, so an ingredient that joins the class later is counted.
    """

    kind: SubjectKind
    ids: tuple[int, ...] = ()
    class_name: str = ""

    @staticmethod
    def nutrient(nutrient_id: int) -> Subject:
        return Subject(SubjectKind.NUTRIENT, (nutrient_id,))

    @staticmethod
    def ingredients(*ingredient_ids: int) -> Subject:
        return Subject(SubjectKind.INGREDIENTS, ingredient_ids)

    @staticmethod
    def of_class(name: str) -> Subject:
        return Subject(SubjectKind.CLASS, (), name)

    @property
    def is_nutrient(self) -> bool:
        """Whether the value comes from composition rather than from amounts."""
        return self.kind in (SubjectKind.NUTRIENT, SubjectKind.DRY_MATTER, SubjectKind.MOISTURE)

    def encode(self) -> str:
        """One text for the mill file: "nutrient 4", "ingredients 2 5", "class Cereals"."""
        if self.kind is SubjectKind.CLASS:
            return f"class {self.class_name}"
        return " ".join([str(self.kind), *map(str, self.ids)])

    @staticmethod
    def decode(text: str) -> Subject:
        for kind in (SubjectKind.DRY_MATTER, SubjectKind.MOISTURE):
            if text == kind:
                return Subject(kind)
        word, _space, rest = text.partition(" ")
        if word == SubjectKind.CLASS:
            return Subject(SubjectKind.CLASS, (), rest)
        return Subject(SubjectKind(word), tuple(int(part) for part in rest.split()))


DRY_MATTER_SUBJECT = Subject(SubjectKind.DRY_MATTER)
MOISTURE_SUBJECT = Subject(SubjectKind.MOISTURE)


@dataclass(frozen=True)
class Limit:
    """One limit of one formula; limits stand in the order of their identifiers.

    subject, per: see Subject; per only for a ratio. minimum, maximum: in `unit` as displayed, None where open.
    unit: "" is the subject's own. basis: of a nutrient; at_dry_matter_percent only with AT_DRY_MATTER.
    """

    id: int
    formula_id: int
    kind: LimitKind
    subject: Subject
    per: Subject | None = None
    minimum: float | None = None
    maximum: float | None = None
    unit: str = ""
    basis: LimitBasis = LimitBasis.AS_FED
    at_dry_matter_percent: float | None = None
    note: str = ""
