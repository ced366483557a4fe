"""Reading the exchange workbook: a whole library as changes to the one that there is, or every reason why not."""

from __future__ import annotations

import datetime
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path

from blendapp.domain.library import Library
from blendapp.domain.names import fold
from blendapp.domain.problems import Place, Problem, Problems
from blendapp.domain.records import Change
from blendapp.domain.wording import _
from blendapp.exchange import workbook_formulas, workbook_library, workbook_plant, workbook_steps, workbook_values
from blendapp.exchange.files import Format, open_source, refusal
from blendapp.exchange.spreadsheets import read_spreadsheet
from blendapp.exchange.suggestions import did_you_mean
from blendapp.exchange.tables import RawTable
from blendapp.exchange.workbook_draft import Draft
from blendapp.exchange.workbook_layout import (
    BINS,
    FORMULAS,
    INGREDIENTS,
    LAYOUTS,
    LIMITS,
    LOT_VALUES,
    LOTS,
    MILL,
    MIXERS,
    NUTRIENTS,
    SCALES,
    SITES,
    STEPS,
    SUPPLIERS,
    VALUES,
    Layout,
)
from blendapp.exchange.workbook_sheet import Sheet, TakeColumn


@dataclass(frozen=True)
class WorkbookReading:
    """changes: in an order in which they can be written. warnings: what was read but is worth saying, and where."""

    changes: list[Change]
    warnings: list[Problem]


def read_workbook(
    path: str | Path, library: Library, next_ids: Mapping[str, int], today: datetime.date
) -> WorkbookReading:
    """Reads an exchange workbook against a library, which is not changed.

    Into an empty library everything is an addition. Otherwise records are matched by name and updated, where a blank
    cell changes nothing; the rows of a formula in Limits replace its limits. next_ids: for each kind of record the
    first identifier that is free, 1 where it is missing. New quotes hold from today, in an empty library from ever.
    Raises Refused with every fault, each with its place and the mend.
    """
    source = open_source(path)
    if source.format is Format.TEXT:
        raise refusal(source.name, _("This is a text and no workbook; an exchange workbook is an .xlsx file."))
    problems = Problems()
    sheets = _Sheets(read_spreadsheet(source), source.name, problems)
    sheets.check_missing(_is_empty(library))
    draft = Draft(library, next_ids, source.name, problems)
    _read(draft, sheets, today, None if _is_empty(library) else today)
    sheets.finish()
    problems.raise_if_faults()
    return WorkbookReading(draft.changes(), problems.oddities)


def _is_empty(library: Library) -> bool:
    return not any(library.records[kind] for kind in ("nutrient", "ingredient", "formula", "quote"))


def _read(draft: Draft, sheets: _Sheets, today: datetime.date, valid_from: datetime.date | None) -> None:
    """Reads sheet after sheet, in an order in which names are known before they are used."""
    for layout, read in (
        (SITES, workbook_plant.read_sites), (SUPPLIERS, workbook_plant.read_suppliers),
        (MILL, workbook_library.read_mill), (SCALES, workbook_plant.read_scales), (MIXERS, workbook_plant.read_mixers),
        (NUTRIENTS, workbook_library.read_nutrients),
    ):
        if sheet := sheets.open(layout):
            read(draft, sheet)
    formulas_sheet = sheets.open(FORMULAS)
    formulas = workbook_formulas.read_formulas(draft, formulas_sheet) if formulas_sheet else []
    columns = workbook_values.NutrientColumns(draft, sheets.table(INGREDIENTS), sheets.problems)
    ingredients_sheet = sheets.open(INGREDIENTS, columns.take, columns.headings())
    rows = workbook_library.read_ingredients(draft, ingredients_sheet) if ingredients_sheet else []
    values_sheet = sheets.open(VALUES)
    decided = workbook_values.read_values(draft, values_sheet) if values_sheet else set()
    if ingredients_sheet:
        workbook_values.read_columns(draft, ingredients_sheet, rows, columns.found, decided)
        workbook_values.read_prices(draft, rows, today, valid_from)
    limits_sheet = sheets.open(LIMITS)
    limits = workbook_formulas.read_limits(draft, limits_sheet) if limits_sheet else []
    workbook_formulas.settle_admits(draft, formulas)
    workbook_formulas.say_odd_limits(draft, limits)
    workbook_library.read_made_by(draft, rows)
    for layout, read in (
        (LOTS, workbook_plant.read_lots), (LOT_VALUES, workbook_plant.read_lot_values),
        (BINS, workbook_plant.read_bins), (STEPS, workbook_steps.read_steps),
    ):
        if sheet := sheets.open(layout):
            read(draft, sheet)


class _Sheets:
    """The sheets of the workbook by the layout that they have."""

    def __init__(self, tables: list[RawTable], file: str, problems: Problems) -> None:
        self.file = file
        self.problems = problems
        self._opened: list[Sheet] = []
        self._tables: dict[str, RawTable] = {}
        known = {fold(layout.name): layout.name for layout in LAYOUTS}
        for table in tables:
            name = known.get(fold(table.sheet))
            if name is None:
                text = _("The sheet “{sheet}” is not known here and was left alone.").format(sheet=table.sheet)
                free = [layout.name for layout in LAYOUTS if layout.name not in self._tables]
                problems.oddity(text + did_you_mean(table.sheet, free), Place(file, table.sheet))
            else:
                self._tables[name] = table

    def check_missing(self, library_is_empty: bool) -> None:
        """Refuses a workbook that is none of this kind; an empty library needs every sheet that is not optional."""
        missing = [layout.name for layout in LAYOUTS if not layout.optional and layout.name not in self._tables]
        if len(missing) == sum(not layout.optional for layout in LAYOUTS) and not self._tables:
            sentence = _("This is no exchange workbook: it has none of the sheets {names}.")
            raise refusal(self.file, sentence.format(names=", ".join(missing)))
        for name in missing:
            if library_is_empty:
                text = _("The workbook has no sheet “{name}”; add it, with its headings in the first row.")
                self.problems.fault(text.format(name=name), Place(self.file, name))
            else:
                text = _("The workbook has no sheet “{name}”; what the mill has of it stays as it is.")
                self.problems.oddity(text.format(name=name), Place(self.file, name))

    def table(self, layout: Layout) -> RawTable:
        return self._tables.get(layout.name) or RawTable(layout.name, [])

    def open(self, layout: Layout, take: TakeColumn | None = None, also: Sequence[str] = ()) -> Sheet | None:
        """The sheet of a layout, None if it is missing or lacks a heading that it needs. also: further headings."""
        table = self._tables.get(layout.name)
        if table is None:
            return None
        sheet = Sheet(table, layout, self.file, self.problems, take, also)
        self._opened.append(sheet)
        return sheet if sheet.usable else None

    def finish(self) -> None:
        for sheet in self._opened:
            sheet.say_numbers_as_text()
