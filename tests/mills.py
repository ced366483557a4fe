"""Small libraries made in a few words, for tests of every room."""

from __future__ import annotations

import datetime
from collections.abc import Mapping, Sequence
from typing import Any

from blendapp.domain.formulas import Admits, Amounts, Formula, Limit, LimitKind, Subject, read_basis
from blendapp.domain.ingredients import Basis, Ingredient, Value
from blendapp.domain.library import Library
from blendapp.domain.mills import MillInfo
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change

TODAY = datetime.date(2026, 3, 2)


class Maker:
    """Adds records to a library by name."""

    def __init__(self, **mill: Any) -> None:
        self.library = Library()
        self.put(MillInfo(**{"name": "Test mill", **mill}))
        self._last: dict[str, int] = {}

    def put(self, record: Any) -> Any:
        self.library.apply([Change(None, record)])
        return record

    def _id(self, kind: str) -> int:
        self._last[kind] = self._last.get(kind, 0) + 1
        return self._last[kind]

    def nutrient(self, name: str, unit: str = "%", **fields: Any) -> Nutrient:
        return self.put(Nutrient(self._id("nutrient"), name, unit, **fields))

    def ingredient(
        self, name: str, price: float | None = None, values: Mapping[str, float] | None = None, per: str = "t",
        basis: Basis = Basis.AS_FED, **fields: Any,
    ) -> Ingredient:
        made = self.put(Ingredient(self._id("ingredient"), name, basis=basis, **fields))
        if price is not None:
            self.put(Quote(self._id("quote"), made.id, price, per, made.bushel_lb))
        for nutrient_name, amount in (values or {}).items():
            nutrient = self.library.named("nutrient", nutrient_name)
            self.put(Value(self._id("value"), made.id, nutrient.id, amount, nutrient.unit, basis))
        return made

    def formula(self, name: str = "Feed", **fields: Any) -> Formula:
        return self.put(Formula(self._id("formula"), name, **fields))

    def limit(
        self, formula: Formula, kind: str, name: str | Sequence[str], minimum: float | None = None,
        maximum: float | None = None, *, per: str | Sequence[str] | None = None, unit: str = "", basis: str = "",
    ) -> Limit:
        read, stated = read_basis(basis)
        return self.put(Limit(
            self._id("limit"), formula.id, LimitKind(kind), self._subject(kind, name),
            None if per is None else self._subject(kind, per), minimum, maximum, unit, read, stated,
        ))

    def _subject(self, kind: str, name: str | Sequence[str]) -> Subject:
        if isinstance(name, str):
            if name in ("Dry matter", "Moisture"):
                return Subject.decode(name.lower())
            found = self.library.named("nutrient", name)
            if kind in ("nutrient", "ratio") and found is not None:
                return Subject.nutrient(found.id)
            name = [name]
        return Subject.ingredients(*(self.library.named("ingredient", one).id for one in name))


def three_ingredients() -> tuple[Library, Formula]:
    """Maize, soybean meal and lysine under minima of protein and lysine that meet in one corner: it is degenerate."""
    make = Maker()
    make.nutrient("Crude protein")
    make.nutrient("Lysine")
    for name, price, protein, lysine in (("Maize", 200, 10, 0.30), ("Soybean meal", 420, 46, 2.90),
                                         ("Lysine HCl", 1500, 95, 78.8)):
        make.ingredient(name, price, {"Crude protein": protein, "Lysine": lysine})
    feed = make.formula()
    make.limit(feed, "nutrient", "Crude protein", 19)
    make.limit(feed, "nutrient", "Lysine", 0.95)
    return make.library, feed


__all__ = ["TODAY", "Admits", "Amounts", "Maker", "three_ingredients"]
