"""A library as the tables of the exchange workbook: plain rows of text, numbers and dates under their headings."""

from __future__ import annotations

import datetime

from blendapp.domain import units
from blendapp.domain.formulas import Limit, Subject, SubjectKind, write_basis
from blendapp.domain.ingredients import Ingredient, Value
from blendapp.domain.library import Library, join_names
from blendapp.domain.names import fold
from blendapp.domain.nutrients import BUILT_IN
from blendapp.domain.problems import Place, Problems
from blendapp.domain.quotes import Quote
from blendapp.domain.wording import _
from blendapp.exchange.workbook_layout import (
    FORMULAS,
    INGREDIENTS,
    LAYOUTS,
    LIMITS,
    MILL,
    MILL_ITEMS,
    NUTRIENTS,
    VALUES,
    Layout,
)
from blendapp.exchange.workbook_plant_tables import Table, free, name_of, plant_tables
from blendapp.exchange.workbook_values import heading_of


def tables_of(library: Library, today: datetime.date, problems: Problems) -> dict[str, Table]:
    """Each sheet by name, its headings first, records in the order of identifiers. problems takes what is odd.

    Sheets and columns that came later stand there only where the mill has something for them.
    """
    in_columns = {(v.ingredient_id, v.nutrient_id) for i in library.ingredients for v in _column_values(library, i)}
    tables = {
        MILL.name: _mill(library),
        NUTRIENTS.name: _nutrients(library),
        INGREDIENTS.name: _ingredients(library, today, in_columns),
        VALUES.name: _values(library, in_columns),
        FORMULAS.name: _formulas(library),
        LIMITS.name: _limits(library, problems),
        **plant_tables(library, problems),
    }
    written = [one for one in LAYOUTS if len(tables[one.name]) > 1 or not one.only_filled]
    return {layout.name: _without_empty(layout, tables[layout.name]) for layout in written}


def _without_empty(layout: Layout, rows: Table) -> Table:
    """The table without those of its further columns that hold nothing."""
    empty = {
        at for at, heading in enumerate(rows[0])
        if heading in layout.further and not any(row[at] not in (None, "") for row in rows[1:])
    }
    return [[cell for at, cell in enumerate(row) if at not in empty] for row in rows] if empty else rows


def _mill(library: Library) -> Table:
    rows: Table = [list(MILL.headings)]
    mill = library.mill
    site = name_of(library, "site", mill.site_id)
    return rows + [
        [item, site if name == "site_id" else getattr(mill, name).strip()] for item, name in MILL_ITEMS.items()
    ]


def _yes(value: bool) -> str:
    return "yes" if value else "no"


def _nutrients(library: Library) -> Table:
    rows: Table = [list(NUTRIENTS.headings)]
    for n in library.nutrients:
        rows.append([n.name.strip(), n.unit, _yes(n.never_negative), n.key, free(n.note)])
    return rows


def _column_values(library: Library, ingredient: Ingredient) -> list[Value]:
    """The values that a plain column can say: own unit, own basis, and nothing known of where they come from."""
    return [
        value
        for nutrient_id, value in library.values_of(ingredient.id).items()
        if value.unit == library.nutrient(nutrient_id).unit
        and value.basis == ingredient.basis
        and value.origin is None
        and value.date is None
        and value.n is None
        and value.sd is None
        and not free(value.source)
    ]


def _ingredients(library: Library, today: datetime.date, in_columns: set[tuple[int, int]]) -> Table:
    nutrients = library.nutrients
    rows: Table = [[*INGREDIENTS.headings, *(heading_of(n) for n in nutrients)]]
    any_opened = any(i.opened for i in library.ingredients)
    scales, formulas = library.records["scale"], library.records["formula"]
    for i in library.ingredients:
        price, per = _price(library, i, library.quote_in_force(i.id, today))
        scale = scales.get(i.scale_id or 0)
        formula = formulas.get(i.made_by_formula_id or 0)
        values = library.values_of(i.id)
        rows.append([
            i.name.strip(), i.class_name.strip(), i.dry_matter_percent, price, per, str(i.basis), free(i.note),
            i.code.strip(), scale.name.strip() if scale else None, i.stock_kg, i.density_kg_per_l, i.bushel_lb,
            ", ".join(i.tags), formula.name.strip() if formula else None, free(i.drug), free(i.drug_level),
            free(i.drug_species), free(i.withdrawal), _yes(i.opened) if formula and any_opened else None,
            name_of(library, "supplier", i.supplier_id),
            *(values[n.id].amount if (i.id, n.id) in in_columns else None for n in nutrients),
        ])
    return rows


def _price(library: Library, ingredient: Ingredient, quote: Quote | None) -> tuple[float | None, str | None]:
    """The price as entered, unless the workbook would read its words otherwise; then the same price in other words."""
    if quote is None or quote.price is None:
        return None, None
    if quote.per == units.BUSHEL:
        weight = ingredient.bushel_lb or units.legal_bushel_lb(ingredient.name)
        if weight != quote.bushel_lb:
            return quote.price_per_t, "t"
    kept_as = units.CWT_KEPT_AS.get(library.mill.cwt_means, "cwt")
    if quote.per == kept_as:
        return quote.price, "cwt"
    if quote.per == "cwt":
        return quote.price, "100 lb"
    return quote.price, quote.per


def _values(library: Library, in_columns: set[tuple[int, int]]) -> Table:
    rows: Table = [list(VALUES.headings)]
    for i in library.ingredients:
        for n in library.nutrients:
            v = library.value(i.id, n.id)
            if v is not None and (i.id, n.id) not in in_columns:
                rows.append([
                    i.name.strip(), n.name.strip(), v.amount, v.unit or "/kg", str(v.basis),
                    str(v.origin) if v.origin else None, free(v.source), v.date, v.n, v.sd,
                ])
    return rows


def _formulas(library: Library) -> Table:
    rows: Table = [list(FORMULAS.headings)]
    for f in library.formulas:
        animal = str(f.animal) if f.animal else None
        rows.append([
            f.name.strip(), str(f.amounts), animal, free(f.stage), f.batch_kg, str(f.admits), free(f.note),
            f.loss_percent, f.product_dry_matter_percent,
        ])
    return rows


def _limits(library: Library, problems: Problems) -> Table:
    limits = [(f, limit) for f in library.formulas for limit in library.limits(f.id)]
    rows: Table = [list(LIMITS.headings)]
    for formula, limit in limits:
        name = subject_text(library, limit.subject)
        per: str | None = ""
        if limit.per is not None:
            name = _told_apart(library, limit.subject, name)
            per = _told_apart(library, limit.per, subject_text(library, limit.per))
        if name is None or per is None:
            text = _("A limit of “{formula}” on a class without ingredients has the name of one and was left out.")
            problems.oddity(text.format(formula=formula.name), Place("", LIMITS.name))
            continue
        rows.append([
            formula.name.strip(), str(limit.kind), name, per, limit.minimum, limit.maximum, limit.unit, _basis(limit),
            free(limit.note),
        ])
    return rows


def _told_apart(library: Library, subject: Subject, text: str | None) -> str | None:
    """A side of a ratio; a group with the name of a nutrient stands in double quotes, or it would be read as that."""
    if subject.is_nutrient or text is None:
        return text
    same = library.named("nutrient", text) is not None or fold(text) in map(fold, BUILT_IN)
    return '"' + text.replace('"', '""') + '"' if same else text


def _basis(limit: Limit) -> str | None:
    return write_basis(limit.basis, limit.at_dry_matter_percent) if limit.subject.is_nutrient else None


def subject_text(library: Library, subject: Subject) -> str | None:
    """A subject as Limits names it; None if no name would be read back as the same.

    A class that shares its name with an ingredient is written as its members, since the ingredient would win.
    """
    if subject.kind is SubjectKind.CLASS:
        name = subject.class_name.strip()
        if library.named("ingredient", name) is None:
            return join_names([name])
        members = [i.name.strip() for i in library.members(subject)]
        return join_names(members) if members else None
    if subject.kind is SubjectKind.INGREDIENTS:
        return join_names(library.ingredient(key).name.strip() for key in subject.ids)
    return library.subject_name(subject).strip()


