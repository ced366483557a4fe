"""Sites, suppliers, plant, lots and mixing steps as tables of the exchange workbook."""

from __future__ import annotations

import datetime
from collections.abc import Iterable

from blendapp.domain.formulas import MixingStep
from blendapp.domain.library import Library
from blendapp.domain.names import fold
from blendapp.domain.plant import Lot
from blendapp.domain.problems import Place, Problems
from blendapp.domain.wording import _
from blendapp.exchange.workbook_layout import BINS, LOT_VALUES, LOTS, MIXERS, SCALES, SITES, STEPS, SUPPLIERS, Layout

WrittenCell = str | float | datetime.date | None
Table = list[list[WrittenCell]]


def plant_tables(library: Library, problems: Problems) -> dict[str, Table]:
    """Each of these sheets by name, its headings first. All plant is written, wherever the mill works."""
    lots = _writable_lots(library, problems)
    return {
        SCALES.name: _scales(library),
        MIXERS.name: _table(MIXERS, (
            [m.name.strip(), m.least_kg, m.greatest_kg, name_of(library, "site", m.site_id)]
            for m in library.all("mixer")
        )),
        SITES.name: _table(SITES, ([s.name.strip()] for s in library.all("site"))),
        SUPPLIERS.name: _table(SUPPLIERS, ([s.name.strip(), free(s.note)] for s in library.all("supplier"))),
        LOTS.name: _table(LOTS, (
            [
                name_of(library, "ingredient", lot.ingredient_id), lot.name.strip(), lot.received, lot.mass_kg,
                lot.dry_matter_percent,
                name_of(library, "supplier", lot.supplier_id), free(lot.note),
            ]
            for lot in lots.values()
        )),
        LOT_VALUES.name: _lot_values(library, lots),
        BINS.name: _table(BINS, (
            [
                one.name.strip(), name_of(library, "ingredient", one.ingredient_id),
                lots[one.lot_id].name.strip() if one.lot_id in lots else None, name_of(library, "site", one.site_id),
            ]
            for one in library.all("bin")
        )),
        STEPS.name: _steps(library),
    }


def name_of(library: Library, kind: str, record_id: int | None) -> str | None:
    """The name of a record that another one refers to; None where it refers to none."""
    record = None if record_id is None else library.records[kind].get(record_id)
    return None if record is None else str(record.name).strip()


def free(text: str) -> str:
    """A text that nothing but blanks fills is blank."""
    return text if text.strip() else ""


def _table(layout: Layout, rows: Iterable[list[WrittenCell]]) -> Table:
    return [list(layout.headings), *rows]


def _scales(library: Library) -> Table:
    return _table(SCALES, (
        [
            s.name.strip(), s.step_kg, s.least_kg, s.greatest_kg, s.tolerance_percent, "yes" if s.hand_add else None,
            s.step_l, s.least_l, s.greatest_l, name_of(library, "site", s.site_id),
        ]
        for s in library.all("scale")
    ))


def _writable_lots(library: Library, problems: Problems) -> dict[int, Lot]:
    """The lots that a workbook can tell apart, by identifier."""
    found: dict[int, Lot] = {}
    seen: set[tuple[int, str]] = set()
    for lot in library.all("lot"):
        key = (lot.ingredient_id, fold(lot.name))
        if lot.name.strip() and key not in seen:
            seen.add(key)
            found[lot.id] = lot
            continue
        text = _("A lot “{lot}” of {ingredient} has the name of another one, or none, and was left out; rename it.")
        said = text.format(lot=lot.name, ingredient=name_of(library, "ingredient", lot.ingredient_id))
        problems.oddity(said, Place("", LOTS.name))
    return found


def _lot_values(library: Library, lots: dict[int, Lot]) -> Table:
    return _table(LOT_VALUES, (
        [
            name_of(library, "ingredient", lots[v.lot_id].ingredient_id), lots[v.lot_id].name.strip(),
            name_of(library, "nutrient", v.nutrient_id), v.amount, v.unit or "/kg", str(v.basis), free(v.source),
            v.date,
        ]
        for v in sorted((v for v in library.all("lot_value") if v.lot_id in lots), key=lambda v: (v.lot_id, v.id))
    ))


def _steps(library: Library) -> Table:
    """The steps of every formula first, then those of each; numbered from 1."""
    rows: Table = []
    for formula_id in (None, *(formula.id for formula in library.formulas)):
        own: list[MixingStep] = [one for one in library.all("mixing_step") if one.formula_id == formula_id]
        for number, step in enumerate(sorted(own, key=lambda step: (step.position, step.id)), start=1):
            name = name_of(library, "formula", formula_id)
            rows.append([name, number, step.text.strip(), step.minutes, free(step.setting)])
    return _table(STEPS, rows)
