"""All records of a mill in memory, by identifier, with the look-ups that formulating needs."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace

from blendapp.domain.formulas import Admits, Formula, Limit, LimitKind, MixingStep, Subject, SubjectKind
from blendapp.domain.ingredients import Ingredient, Value
from blendapp.domain.mills import MillInfo
from blendapp.domain.names import fold
from blendapp.domain.nutrients import DRY_MATTER, MOISTURE, Nutrient
from blendapp.domain.plant import Bin, Mixer, Scale
from blendapp.domain.quotes import Quote, in_force
from blendapp.domain.records import KINDS, Change, Record

ByKind = dict[str, dict[int, Record]]

# Kinds that are looked up by name.
NAMED_KINDS = frozenset({"nutrient", "ingredient", "formula", "scale", "mixer", "site", "supplier", "person"})


@dataclass
class Library:
    """The records of one mill: records[kind][id]. Changed only by apply(); records themselves never change."""

    records: ByKind = field(default_factory=lambda: {kind: {} for kind in KINDS})
    _values: dict[int, dict[int, Value]] = field(default_factory=dict)
    _quotes: dict[int, dict[int, Quote]] = field(default_factory=dict)
    _limits: dict[int, dict[int, Limit]] = field(default_factory=dict)
    _names: dict[str, dict[str, dict[int, Record]]] = field(default_factory=lambda: {kind: {} for kind in NAMED_KINDS})

    @staticmethod
    def of(records: Mapping[str, Iterable[Record]]) -> Library:
        """A library of records by kind, in any order."""
        library = Library()
        for found in records.values():
            library.apply(Change(None, record) for record in found)
        return library

    def apply(self, changes: Iterable[Change]) -> None:
        """Take changes in; a change whose `before` is not what stands here is the caller's fault (KeyError)."""
        for change in changes:
            if change.before is not None:
                self._forget(change.kind, change.before)
            if change.after is not None:
                self._take(change.kind, change.after)

    def copy(self) -> Library:
        """A library that later changes of this one do not touch; cheap, since records are shared."""
        return Library(
            {kind: dict(found) for kind, found in self.records.items()},
            {key: dict(found) for key, found in self._values.items()},
            {key: dict(found) for key, found in self._quotes.items()},
            {key: dict(found) for key, found in self._limits.items()},
            {kind: {name: dict(same) for name, same in found.items()} for kind, found in self._names.items()},
        )

    def _take(self, kind: str, record: Record) -> None:
        self.records[kind][record.id] = record
        if kind == "value":
            self._values.setdefault(record.ingredient_id, {})[record.nutrient_id] = record
        elif kind == "quote":
            self._quotes.setdefault(record.ingredient_id, {})[record.id] = record
        elif kind == "limit":
            self._limits.setdefault(record.formula_id, {})[record.id] = record
        elif kind in NAMED_KINDS:
            self._names[kind].setdefault(fold(record.name), {})[record.id] = record

    def _forget(self, kind: str, record: Record) -> None:
        del self.records[kind][record.id]
        if kind == "value":
            del self._values[record.ingredient_id][record.nutrient_id]
        elif kind == "quote":
            del self._quotes[record.ingredient_id][record.id]
        elif kind == "limit":
            del self._limits[record.formula_id][record.id]
        elif kind in NAMED_KINDS:
            del self._names[kind][fold(record.name)][record.id]

    # -- what there is, in the order of identifiers

    @property
    def mill(self) -> MillInfo:
        found: MillInfo = self.records["mill"].get(1) or MillInfo()
        return found

    @property
    def nutrients(self) -> list[Nutrient]:
        return self.all("nutrient")

    @property
    def ingredients(self) -> list[Ingredient]:
        return self.all("ingredient")

    @property
    def formulas(self) -> list[Formula]:
        return self.all("formula")

    @property
    def scales(self) -> list[Scale]:
        """Those that count where the mill works (mills.MillInfo.site_id)."""
        return self._here("scale")

    @property
    def mixers(self) -> list[Mixer]:
        return self._here("mixer")

    @property
    def bins(self) -> list[Bin]:
        return self._here("bin")

    def _here(self, kind: str) -> list[Record]:
        """Records of the site that the mill works at and of no site; all of them where it works at none."""
        at = self.mill.site_id
        return [one for one in self.all(kind) if at is None or one.site_id in (None, at)]

    def at_site(self, site_id: int | None) -> Library:
        """A copy in which the mill works at another site."""
        other = self.copy()
        other.apply([Change(self.records["mill"].get(1), replace(self.mill, site_id=site_id))])
        return other

    def bins_of(self, ingredient_id: int) -> list[Bin]:
        """The bins in which an ingredient stands, in the order of identifiers."""
        return [one for one in self.bins if one.ingredient_id == ingredient_id]

    def steps_of(self, formula_id: int) -> list[MixingStep]:
        """The steps of making a formula, in order: its own, else those of every formula."""
        steps = sorted(self.all("mixing_step"), key=lambda step: (step.position, step.id))
        own = [step for step in steps if step.formula_id == formula_id]
        return own or [step for step in steps if step.formula_id is None]

    def all(self, kind: str) -> list[Record]:
        """Every record of a kind, in the order of identifiers."""
        found = self.records[kind]
        return [found[key] for key in sorted(found)]

    def nutrient(self, nutrient_id: int) -> Nutrient:
        found: Nutrient = self.records["nutrient"][nutrient_id]
        return found

    def ingredient(self, ingredient_id: int) -> Ingredient:
        found: Ingredient = self.records["ingredient"][ingredient_id]
        return found

    def formula(self, formula_id: int) -> Formula:
        found: Formula = self.records["formula"][formula_id]
        return found

    def limit(self, limit_id: int) -> Limit:
        found: Limit = self.records["limit"][limit_id]
        return found

    def limits(self, formula_id: int) -> list[Limit]:
        """The limits of a formula in the order in which they stand."""
        found = self._limits.get(formula_id, {})
        return [found[key] for key in sorted(found)]

    def named(self, kind: str, name: str) -> Record | None:
        """The record of that name, case and spacing apart, or None."""
        return next(iter(self.all_named(kind, name)), None)

    def all_named(self, kind: str, name: str) -> list[Record]:
        """Every record of a kind (one of NAMED_KINDS) that has that name; more than one is a fault elsewhere."""
        return list(self._names[kind].get(fold(name), {}).values())

    # -- composition and prices

    def value(self, ingredient_id: int, nutrient_id: int) -> Value | None:
        return self._values.get(ingredient_id, {}).get(nutrient_id)

    def values_of(self, ingredient_id: int) -> Mapping[int, Value]:
        """The composition of an ingredient by nutrient identifier."""
        return self._values.get(ingredient_id, {})

    def quotes_of(self, ingredient_id: int) -> list[Quote]:
        found = self._quotes.get(ingredient_id, {})
        return [found[key] for key in sorted(found)]

    def quote_in_force(self, ingredient_id: int, on: datetime.date, site_id: int | None = None) -> Quote | None:
        """The quote in force on a day by quotes.rule. site_id: None is the site that the mill works at."""
        ingredient = self.records["ingredient"].get(ingredient_id)
        supplier_id = None if ingredient is None else ingredient.supplier_id
        at = self.mill.site_id if site_id is None else site_id
        return in_force(self._quotes.get(ingredient_id, {}).values(), on, at, supplier_id)

    def price_per_t(self, ingredient_id: int, on: datetime.date, site_id: int | None = None) -> float | None:
        """Money of the mill per tonne as fed on a day, None where unknown."""
        quote = self.quote_in_force(ingredient_id, on, site_id)
        return None if quote is None else quote.price_per_t

    # -- formulas

    def admitted(self, formula: Formula) -> list[Ingredient]:
        """The ingredients that a formula may use, priced or not, in the order of identifiers."""
        listed = self.listed_ids(formula.id)
        if formula.admits is Admits.LISTED:
            return [self.ingredient(key) for key in sorted(listed)]
        return [i for i in self.ingredients if i.id in listed or not i.never_unlisted]

    def listed_ids(self, formula_id: int) -> set[int]:
        """Identifiers of the ingredients that have an ingredient limit of their own in a formula."""
        return {
            ingredient_id
            for limit in self._limits.get(formula_id, {}).values()
            if limit.kind is LimitKind.INGREDIENT
            for ingredient_id in limit.subject.ids
        }

    def members(self, subject: Subject) -> list[Ingredient]:
        """The ingredients that a group or a single-ingredient subject names, in its order; a class by its name."""
        if subject.kind is SubjectKind.CLASS:
            wanted = fold(subject.class_name)
            return [i for i in self.ingredients if fold(i.class_name) == wanted]
        return [self.ingredient(key) for key in subject.ids]

    def subject_name(self, subject: Subject) -> str:
        """What the workbook, JSON and screens call a subject; names that hold " + " stand in double quotes."""
        if subject.kind is SubjectKind.NUTRIENT:
            return self.nutrient(subject.ids[0]).name
        if subject.kind is SubjectKind.DRY_MATTER:
            return DRY_MATTER
        if subject.kind is SubjectKind.MOISTURE:
            return MOISTURE
        if subject.kind is SubjectKind.CLASS:
            return subject.class_name
        names = [self.ingredient(key).name for key in subject.ids]
        return names[0] if len(names) == 1 else join_names(names)


def join_names(names: Iterable[str]) -> str:
    """Ingredient names as one group name: joined by " + ", a name that holds " + " or a quote in double quotes."""
    return " + ".join(
        '"' + name.replace('"', '""') + '"' if " + " in f" {name} " or '"' in name else name for name in names
    )


def split_names(text: str) -> list[str]:
    """The names in a group name; the inverse of join_names. Raises ValueError for a quote left open."""
    names: list[str] = []
    rest = text.strip()
    while True:
        if rest.startswith('"'):
            name, rest = _quoted(rest)
        else:
            name, sign, after = rest.partition(" + ")
            rest = " + " + after if sign else ""
        names.append(name.strip())
        if not rest.strip():
            return names
        if not rest.lstrip().startswith("+"):
            raise ValueError(text)
        rest = rest.lstrip()[1:].lstrip()


def _quoted(text: str) -> tuple[str, str]:
    position, name = 1, []
    while position < len(text):
        if text[position] == '"':
            if text[position : position + 2] == '""':
                name.append('"')
                position += 2
                continue
            return "".join(name), text[position + 1 :]
        name.append(text[position])
        position += 1
    raise ValueError(text)
