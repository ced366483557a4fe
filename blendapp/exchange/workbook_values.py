"""Composition and prices of the exchange workbook: nutrient columns and price of Ingredients, and the sheet Values."""

from __future__ import annotations

import datetime
import re
from dataclasses import dataclass, replace

from blendapp.domain import checks, units
from blendapp.domain.ingredients import Basis, Ingredient, Origin, Value
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.problems import Place, Problems
from blendapp.domain.quotes import Quote
from blendapp.domain.records import Change
from blendapp.domain.wording import _
from blendapp.exchange.price_units import AmbiguousPriceUnit, UnknownPriceUnit, read_price_unit
from blendapp.exchange.tables import RawTable
from blendapp.exchange.workbook_draft import Draft
from blendapp.exchange.workbook_library import known_unit, read_value_basis
from blendapp.exchange.workbook_sheet import Row, Sheet

_HEADING = re.compile(r"(.*\S)\s*\(([^()]*)\)", re.DOTALL)
_DRY_MATTER = re.compile(r"(.*?)\s*\b(?:dm|dry matter)", re.IGNORECASE | re.DOTALL)

# (ingredient, nutrient) identifiers
Pair = tuple[int, int]


@dataclass(frozen=True)
class NutrientColumn:
    """A column headed `Name (unit)`. basis: None is that of the row. least, greatest: amounts that need no look."""

    heading: str
    index: int
    nutrient: Nutrient
    unit: str
    basis: Basis | None
    least: float
    greatest: float


class NutrientColumns:
    """Finds the nutrient columns among the headings of the sheet Ingredients."""

    def __init__(self, draft: Draft, table: RawTable, problems: Problems) -> None:
        self.draft, self.table, self.problems = draft, table, problems
        self.found: list[NutrientColumn] = []

    def take(self, heading: str, index: int) -> bool:
        """Takes a column if its heading names a nutrient; a unit that does not fit is a fault."""
        nutrient, unit, basis = self._split(heading)
        if nutrient is None:
            return self._lacks_unit(heading) or self._names_refused(heading)
        unit = known_unit(unit)
        place = replace(_nowhere(self.draft, self.table), column=heading)
        try:
            family = units.concentration(unit).family
        except ValueError as error:
            self.problems.fault(str(error), place)
            return True
        if family is not units.concentration(nutrient.unit).family:
            text = _("{unit} does not measure {nutrient}, which is kept in {own}; use a unit of that kind.")
            self.problems.fault(text.format(unit=unit, nutrient=nutrient.name, own=nutrient.unit or "/kg"), place)
            return True
        if (unit or "/kg") == (nutrient.unit or "/kg"):
            unit = nutrient.unit
        least, greatest = checks.quiet_range(nutrient, unit)
        self.found.append(NutrientColumn(heading, index, nutrient, unit, basis, least, greatest))
        return True

    def _split(self, heading: str) -> tuple[Nutrient | None, str, Basis | None]:
        match = _HEADING.fullmatch(heading)
        if match:
            nutrient = self._named(match[1])
            if nutrient is not None:
                dry = _DRY_MATTER.fullmatch(match[2])
                return nutrient, dry[1] if dry else match[2].strip(), Basis.DRY_MATTER if dry else None
        if heading.endswith("()") and (nutrient := self._named(heading[:-2])):
            return nutrient, "", None
        nutrient = self._named(heading)
        # Only a nutrient that is a bare number may stand without its unit.
        return (nutrient, "", None) if nutrient and nutrient.unit in ("", "/kg") else (None, "", None)

    def _lacks_unit(self, heading: str) -> bool:
        """Says the fault of a heading that is a nutrient's name alone; its column would be lost."""
        nutrient = self._named(heading)
        if nutrient is None:
            return False
        text = _("The heading “{heading}” names a nutrient without its unit; write it as “{whole}”.")
        place = replace(_nowhere(self.draft, self.table), column=heading)
        self.problems.fault(text.format(heading=heading, whole=heading_of(nutrient)), place)
        return True

    def headings(self) -> list[str]:
        """The headings that nutrient columns in the units of their nutrients have, for those that are misspelt."""
        found: list[Nutrient] = self.draft.library.nutrients
        return [heading_of(nutrient) for nutrient in found]

    def _named(self, name: str) -> Nutrient | None:
        found: Nutrient | None = self.draft.library.named("nutrient", name)
        return found

    def _names_refused(self, heading: str) -> bool:
        """Whether a heading names a nutrient that was refused on its own sheet, so that it is not said twice."""
        match = _HEADING.fullmatch(heading)
        return match is not None and self.draft.was_refused("nutrient", match[1])


def _nowhere(draft: Draft, table: RawTable) -> Place:
    return Place(draft.file, table.sheet, 1)


def read_values(draft: Draft, sheet: Sheet) -> set[Pair]:
    """The sheet Values; gives the pairs that it decides, since it wins over the columns."""
    decided: dict[Pair, int] = {}
    quiet: dict[tuple[int, str], tuple[float, float]] = {}
    unknown_ingredient = _("There is no ingredient “{name}”; add it to the sheet Ingredients.")
    unknown_nutrient = _("There is no nutrient “{name}”; add it to the sheet Nutrients.")
    for row in sheet.rows():
        for heading in ("Ingredient", "Nutrient"):
            if not row.has(heading):
                row.fault(heading, _("A name is needed here."))
        ingredient: Ingredient | None = draft.find("ingredient", row, "Ingredient", unknown_ingredient)
        nutrient: Nutrient | None = draft.find("nutrient", row, "Nutrient", unknown_nutrient)
        amount, entered = row.number_at("Value", row.raw("Value"))
        if not row.has("Value"):
            row.oddity("Value", _("The row holds no value and was left out; the value stays unknown."))
        pair = (ingredient.id if ingredient else 0, nutrient.id if nutrient else 0)
        complete = ingredient is not None and nutrient is not None and amount is not None
        if complete and decided.setdefault(pair, row.number) != row.number:
            assert ingredient is not None
            assert nutrient is not None
            text = _("{nutrient} of {ingredient} stands in row {first} and again in row {second}; delete one of them.")
            row.fault("Nutrient", text.format(
                nutrient=nutrient.name, ingredient=ingredient.name, first=decided[pair], second=row.number
            ))
            complete = False
        before = draft.library.value(*pair) if complete else None
        value = Value(
            before.id if before else draft.new_id("value") if complete else 0,
            *pair,
            0.0 if amount is None else amount,
            known_unit(row.name("Unit")) if row.has("Unit") else nutrient.unit if nutrient else "",
            read_value_basis(row, "Basis") or (ingredient.basis if ingredient else Basis.AS_FED),
            row.choice("Origin", Origin),
            row.text("Source"),
            row.date("Date"),
            row.whole_number("n"),
            row.number_in("SD"),
            entered,
        )
        if not complete:
            draft.is_faultless(value, row)  # so that what else is wrong with the row is said with it
            continue
        assert nutrient is not None
        if before is not None and replace(value, entered=before.entered) == before:
            continue
        key = (nutrient.id, value.unit)
        if key not in quiet:
            known = value.unit in ("", *units.CONCENTRATION)
            quiet[key] = checks.quiet_range(nutrient, value.unit) if known and not checks.faults(
                replace(value, amount=0.0, n=None, sd=None), draft.library) else (1.0, 0.0)
        least, greatest = quiet[key]
        in_range = least <= value.amount <= greatest and value.n is None and value.sd is None
        if in_range or draft.check(value, row):
            draft.put(before, value)
    return set(decided)


def read_columns(
    draft: Draft, sheet: Sheet, rows: list[tuple[Row, Ingredient]], columns: list[NutrientColumn], decided: set[Pair]
) -> None:
    """The nutrient columns. A workbook holds tens of thousands of such cells, so a plain number takes a short way."""
    changes: list[Change] = []
    new_id = draft.new_id
    twice = len({column.nutrient.id for column in columns}) < len(columns)
    has_basis = "Basis" in sheet.columns
    for row, ingredient in rows:
        ingredient_id, cells = ingredient.id, row.cells
        width = len(cells)
        known = draft.library.values_of(ingredient_id)
        seen: dict[int, str] = {}
        outvoted: list[tuple[NutrientColumn, float]] = []
        if known and ingredient.basis is Basis.DRY_MATTER and not (has_basis and row.has("Basis")):
            row.oddity("Basis", _("The basis is blank; the row was read on dry matter, as the mill has it."))
        for column in columns:
            index = column.index
            cell = cells[index] if index < width else None
            if cell is None or cell == "":
                continue
            amount: float | None
            if isinstance(cell, float) and column.least <= cell <= column.greatest:
                amount, entered, quiet = cell, "", True
            else:
                (amount, entered), quiet = row.number_at(column.heading, cell), False
                if amount is None:
                    continue
            nutrient_id = column.nutrient.id
            if twice and nutrient_id in seen:
                text = _("{nutrient} stands in the columns “{first}” and “{second}” of this row; blank one of them.")
                row.fault(column.heading, text.format(
                    nutrient=column.nutrient.name, first=seen[nutrient_id], second=column.heading
                ))
                continue
            seen[nutrient_id] = column.heading
            if decided and (ingredient_id, nutrient_id) in decided:
                outvoted.append((column, amount))
                continue
            basis = column.basis or ingredient.basis
            before = known.get(nutrient_id)
            if before is None:
                value = Value(new_id("value"), ingredient_id, nutrient_id, amount, column.unit, basis, entered=entered)
            elif (before.amount, before.unit, before.basis) == (amount, column.unit, basis):
                continue
            else:
                value = Value(before.id, ingredient_id, nutrient_id, amount, column.unit, basis, entered=entered)
            if (quiet or draft.check(value, row, {"amount": column.heading, "unit": column.heading})) and ingredient_id:
                changes.append(Change(before, value))
        if outvoted:
            _say_outvoted(draft, row, ingredient, outvoted)
    draft.put_all("value", changes)


def _say_outvoted(
    draft: Draft, row: Row, ingredient: Ingredient, outvoted: list[tuple[NutrientColumn, float]]
) -> None:
    """One warning a row for the cells that say another amount than Values does, in the unit and basis of the cell."""
    told: list[str] = []
    first = ""
    text = _("{nutrient} ({here} here, {there} in Values)")
    for column, amount in outvoted:
        value = draft.library.value(ingredient.id, column.nutrient.id)
        there = None if value is None else _as_in(column, column.basis or ingredient.basis, value, ingredient)
        if there is not None and abs(there - amount) > _ROUNDING * max(abs(there), abs(amount)):
            first = first or column.heading
            told.append(text.format(nutrient=column.nutrient.name, here=f"{amount:g}", there=f"{there:g}"))
    if told:
        sentence = _("The sheet Values says otherwise and was taken: {which}; blank one of the two.")
        row.oddity(first, sentence.format(which=", ".join(told)))


# Two amounts in different units or bases that differ by less were rounded apart by whoever typed them.
_ROUNDING = 2e-3


def _as_in(column: NutrientColumn, basis: Basis, value: Value, ingredient: Ingredient) -> float | None:
    """A value in the unit of a column and on a basis; None if the dry matter that this takes is unknown."""
    amount = value.amount
    if value.unit != column.unit:
        amount = units.convert(amount, value.unit, column.unit)
    if value.basis is basis:
        return amount
    if not ingredient.dry_matter_percent:
        return None
    share = ingredient.dry_matter_percent / 100
    return amount * share if basis is Basis.AS_FED else amount / share


def read_prices(
    draft: Draft, rows: list[tuple[Row, Ingredient]], today: datetime.date, valid_from: datetime.date | None
) -> None:
    """The price of each ingredient; a price equal to the quote in force adds no quote."""
    for row, ingredient in rows:
        price = row.number_in("Price")
        if not row.has("Price"):
            continue
        quote = _quote(draft, row, ingredient, 1.0 if price is None else price, today, valid_from)
        if quote is None:
            continue
        if price is None or not ingredient.id:
            draft.is_faultless(quote, row)
            continue
        if price <= 0:
            text = _("The price {price} is 0 or below; it counts as typed. If it is unknown, leave the cell blank.")
            row.oddity("Price", text.format(price=f"{price:g}"))
        standing = draft.library.quote_in_force(ingredient.id, today)
        if standing is not None and _same_price(standing, quote):
            continue
        if draft.check(quote, row):
            # For the site that the quote in force is for, or the price of the workbook would not be in force.
            site_id = None if standing is None else standing.site_id
            draft.put(None, replace(quote, id=draft.new_id("quote"), site_id=site_id))


def _quote(
    draft: Draft, row: Row, ingredient: Ingredient, price: float, today: datetime.date,
    valid_from: datetime.date | None,
) -> Quote | None:
    words = row.name("Price per")
    if not words:
        row.oddity("Price per", _("The price names no mass; it was taken per t."))
    try:
        unit = read_price_unit(words or "t", draft.library.mill, cwt_is_100_lb=True)
    except (UnknownPriceUnit, AmbiguousPriceUnit) as error:
        row.fault("Price per", str(error))
        return None
    bushel_lb = None
    if unit.per == units.BUSHEL:
        bushel_lb = ingredient.bushel_lb
        if bushel_lb is None:
            bushel_lb = units.legal_bushel_lb(ingredient.name)
            if bushel_lb is not None:
                text = _("The row names no bushel weight; the legal bushel of {weight} lb was taken.")
                row.oddity("Price per", text.format(weight=f"{bushel_lb:g}"))
    entered = "" if unit.factor == 1 else f"{price:g} / {words}"
    return Quote(
        0, ingredient.id, price * unit.factor, unit.per, bushel_lb, valid_from=valid_from, recorded=today,
        source=draft.file, entered=entered,
    )


def _same_price(standing: Quote, quote: Quote) -> bool:
    if (standing.price, standing.per, standing.bushel_lb) == (quote.price, quote.per, quote.bushel_lb):
        return True
    if standing.price_per_t is None or (quote.per == units.BUSHEL and not quote.bushel_lb):
        return False
    return quote.price_per_t is not None and abs(standing.price_per_t - quote.price_per_t) <= 1e-12 * abs(
        quote.price_per_t
    )


def heading_of(nutrient: Nutrient) -> str:
    """The heading of a nutrient's column in the unit of the nutrient."""
    return f"{nutrient.name.strip()} ({nutrient.unit or '/kg'})"


