"""Where tables of analyses stand on a sheet: below which headings, in one row or two, and what each column holds."""

from __future__ import annotations

import re
from collections.abc import Iterator
from dataclasses import dataclass

from blendapp.domain.list_rows import ColumnRole
from blendapp.domain.mills import Asked
from blendapp.domain.wording import _
from blendapp.exchange.composition_columns import (
    COUNT_HEADINGS,
    VALUE_ROLES,
    AnalysisTable,
    ValueColumn,
    best_day,
    plain_heading,
    role_of,
)
from blendapp.exchange.composition_nutrients import NutrientFinder
from blendapp.exchange.composition_words import read_heading
from blendapp.exchange.list_headings import FURTHEST, best_name_column, joined, known_names, spread_over, texts_of
from blendapp.exchange.list_names import NameFinder
from blendapp.exchange.list_placing import NO_HEADINGS, Placing, column_name
from blendapp.exchange.list_walk import MOST_COLUMNS, MOST_TABLES, TooManyTables
from blendapp.exchange.source_sheets import shown_text
from blendapp.exchange.tables import CellKind, RawTable, column_letters, kind_of

_NUMBER_LIKE = re.compile(r"[<>~≤≥]?\s*[-+]?[0-9][0-9.,' ]*\s*%?")
_LONGEST_NUMBER = 60
_RUNNING_NUMBERS = frozenset({"no", "number"})


@dataclass(frozen=True)
class Finders:
    """What tells names, nutrients and the answers about tables apart."""

    names: NameFinder
    nutrients: NutrientFinder
    placing: Placing


def find_tables(raw: RawTable, finders: Finders) -> list[tuple[AnalysisTable, int, int]]:
    """Every table of a sheet, one below the other, with the rows from which and before which it counts, from 0.

    Raises TooManyTables.
    """
    found = list(_found(raw, finders))
    ends = [table.heading_rows.start for table in found[1:]] + [len(raw.rows)]
    starts = [0, *ends[:-1]]
    return list(zip(found, starts, ends, strict=True)) if found else []


def _found(raw: RawTable, finders: Finders) -> Iterator[AnalysisTable]:
    said = finders.placing.heading_row(raw)
    first = None
    if said is not None:
        first = _pointed_out(raw, said, finders)
        if not first.values and not finders.names.answers.given(Asked.TABLE):
            first = None
    if first is None:
        rows = range(min(len(raw.rows), FURTHEST))
        first = next((table for row in rows if (table := headed_table(raw, row, finders)) is not None), None)
        if first is None:
            return
        if said is not None:
            text = _("The headings were last in row {said}; those in row {row} were read.")
            finders.placing.note(text.format(said=said + 1, row=(first.heading_row or 0) + 1))
    yield first
    row, count = first.first_row, 1
    while row < len(raw.rows):
        table = headed_table(raw, row, finders) if _may_be_heading(raw, row, finders) else None
        if table is not None:
            count += 1
            if count > MOST_TABLES:
                raise TooManyTables
            yield table
        row = row + 1 if table is None else table.first_row


def is_transposed(raw: RawTable, finders: Finders) -> bool:
    """Whether nutrients stand down a column and nowhere in a row: samples then stand across."""
    names, nutrients = finders.names, finders.nutrients
    down: dict[int, int] = {}
    across = 0
    for cells in raw.rows[:FURTHEST]:
        known = [
            index for index, value in enumerate(cells[:MOST_COLUMNS])
            if isinstance(value, str) and value.strip() and nutrients.knows(value) and not names.is_known(value)
        ]
        across = max(across, len(known))
        for index in known:
            down[index] = down.get(index, 0) + 1
    return across < 2 <= max(down.values(), default=0)


def _may_be_heading(raw: RawTable, row: int, finders: Finders) -> bool:
    """A quick look: a row of texts only, at least two, one of which names something that is measured."""
    filled = [value for value in raw.rows[row] if kind_of(value) is not CellKind.BLANK]
    if len(filled) < 2 or any(not isinstance(value, str) or _is_number_like(value.strip()) for value in filled):
        return False
    return any(finders.nutrients.knows(str(value)) for value in filled)


def headed_table(raw: RawTable, row: int, finders: Finders) -> AnalysisTable | None:
    """The table whose headings begin in a row, None where they head nothing that is measured."""
    texts = texts_of(raw, row)
    if not texts or len(texts) > MOST_COLUMNS or any(map(_is_number_like, texts.values())):
        return None
    below = _texts_below(raw, row, 1)
    found = _headed(row, texts, finders)
    how = 0 if found is None else next((n for n in (1, 2) if _says_how(_texts_below(raw, row, n))), 0)
    if how and found is not None and (how == 1 or _is_method(below)):
        found = _headed(row, joined(texts, _texts_below(raw, row, how)), finders) or found
        found.last_heading_row = row + how
    elif below and not any(finders.names.is_known(text) for text in below.values()):
        # The upper row says more of the columns below it, or heads those that the lower one leaves blank.
        twos = [joined(spread_over(raw, row, texts, below), below)]
        if len(texts) > 1 and set(texts) - set(below):
            twos.append({**texts, **below})
        for two in twos:
            both = _headed(row, two, finders)
            if both is not None and both.known > (0 if found is None else found.known):
                both.last_heading_row = row + 1
                found = both
    if found is None:
        return None
    found = _under_a_wider_heading(raw, row, found, finders)
    _settle(found, raw, finders)
    return found if found.values else None


def _texts_below(raw: RawTable, row: int, by: int) -> dict[int, str]:
    """The texts of a row some rows further down; none where a number stands in it, or the sheet ends."""
    found = texts_of(raw, row + by) if row + by < len(raw.rows) else None
    return {} if found is None or any(map(_is_number_like, found.values())) else found


def _is_method(texts: dict[int, str]) -> bool:
    """Whether a row between the headings and their units says how was measured."""
    return bool(texts) and plain_heading(texts[min(texts)]) in ("method", "methods", "analysis method")


def _is_number_like(text: str) -> bool:
    return len(text) <= _LONGEST_NUMBER and _NUMBER_LIKE.fullmatch(text) is not None


def _headed(row: int, texts: dict[int, str], finders: Finders) -> AnalysisTable | None:
    found = _table(row, texts, finders)
    names = ColumnRole.NAME in found.roles.values()
    if len(texts) < 2 or not (found.known or (names and found.values)):
        return None
    return found


def _table(row: int | None, texts: dict[int, str], finders: Finders) -> AnalysisTable:
    found = AnalysisTable(row)
    for index, heading in texts.items():
        about = f"{heading} ({column_letters(index)})" if heading in found.headings.values() else heading
        role, match = role_of(heading, index, finders.nutrients, finders.placing, about)
        found.roles[index], found.headings[index] = role, about
        if role in VALUE_ROLES:
            found.values.append(ValueColumn(index, about, read_heading(heading), match))
    return found


def _says_how(below: dict[int, str]) -> bool:
    """Whether a row of texts holds units and bases and nothing else."""
    said = 0
    for text in below.values():
        words = read_heading(text)
        if words.says_only_how or words.is_dry_matter:
            said += 1
        elif plain_heading(text) not in ("", "unit", "units", "basis"):
            return False
    return said > 0


def _under_a_wider_heading(raw: RawTable, row: int, found: AnalysisTable, finders: Finders) -> AnalysisTable:
    """The same table with the unit or the basis that stands over several of its columns."""
    above = texts_of(raw, row - 1) if row > 0 else None
    first_value = min((column.index for column in found.values), default=0)
    if not above or min(above) < min(first_value, 1):  # that is a title
        return found
    spread = spread_over(raw, row - 1, above, found.headings)
    more = {}
    for column in found.values:
        words = read_heading(spread.get(column.index, ""))
        if words.says_only_how or words.is_dry_matter:
            more[column.index] = spread[column.index]
    if not more:
        return found
    wider = _table(row, joined(found.headings, more), finders)
    wider.first_heading_row, wider.last_heading_row = row - 1, found.last_heading_row
    return wider


def _pointed_out(raw: RawTable, row: int, finders: Finders) -> AnalysisTable:
    """The table below a row that a person pointed out, or one without headings."""
    if row == NO_HEADINGS:
        found = AnalysisTable(None)
    else:
        read = headed_table(raw, row, finders)
        if read is not None:
            return read
        shown = {index: " ".join(shown_text(value).split()) for index, value in enumerate(raw.rows[row])}
        found = _table(row, {index: text for index, text in shown.items() if text}, finders)
    _settle(found, raw, finders)
    return found


def _settle(found: AnalysisTable, raw: RawTable, finders: Finders) -> None:
    """What is told by what the columns hold: those without headings, the names, the sample and its day."""
    if finders.placing.names_columns or found.heading_row is None:
        _add_columns_without_heading(found, raw, finders)
    _numbers_without_meaning(found, raw, finders)
    _settle_name(found, raw, finders)
    best_day(found)
    found.count = next((i for i, heading in found.headings.items() if plain_heading(heading) in COUNT_HEADINGS), None)
    samples = [index for index, role in found.roles.items() if role is ColumnRole.SAMPLE]
    if len(samples) > 1:
        for index in samples:
            if plain_heading(found.headings.get(index, "")) in _RUNNING_NUMBERS:
                found.roles[index] = ColumnRole.NOTE


def _add_columns_without_heading(found: AnalysisTable, raw: RawTable, finders: Finders) -> None:
    for index in range(max(map(len, raw.rows), default=0)):
        if index in found.headings:
            continue
        role, match = role_of("", index, finders.nutrients, finders.placing)
        if role is ColumnRole.OTHER and found.heading_row is None and _is_numeric(found, raw, index):
            role = ColumnRole.NUTRIENT
        found.roles[index] = role
        if role in VALUE_ROLES:
            found.values.append(ValueColumn(index, column_name(index), read_heading(""), match))


def _numbers_without_meaning(found: AnalysisTable, raw: RawTable, finders: Finders) -> None:
    """A column of numbers whose heading says nothing to the mill is asked about, not passed over."""
    for index, heading in found.headings.items():
        match = finders.nutrients.find(heading)
        said = finders.placing.role(heading, index) if finders.placing.names_columns else None
        unsaid = found.roles[index] is ColumnRole.OTHER and said is None and not match.left_out
        if unsaid and _is_numeric(found, raw, index):
            found.roles[index] = ColumnRole.NUTRIENT
            found.values.append(ValueColumn(index, heading, read_heading(heading), match))
    found.values.sort(key=lambda column: column.index)


def _is_numeric(found: AnalysisTable, raw: RawTable, index: int) -> bool:
    rows = raw.rows[found.first_row : found.first_row + FURTHEST]
    cells = [cells[index] for cells in rows if index < len(cells)]
    filled = [cell for cell in cells if kind_of(cell) is not CellKind.BLANK]
    numbers = [
        cell for cell in filled
        if kind_of(cell) in (CellKind.NUMBER, CellKind.PERCENT)
        or (isinstance(cell, str) and _is_number_like(cell.strip()))
    ]
    return len(numbers) * 2 > len(filled)


def _settle_name(found: AnalysisTable, raw: RawTable, finders: Finders) -> None:
    """Of several columns of names the one that holds most known ones; of none headed so, any other that holds some."""
    is_known = finders.names.is_known
    said = [
        index for index, role in found.roles.items()
        if finders.placing.names_columns and role is ColumnRole.NAME
        and finders.placing.role(found.headings.get(index, ""), index) is ColumnRole.NAME
    ]
    headed = said or [index for index, role in found.roles.items() if role is ColumnRole.NAME]
    best = best_name_column(raw, headed, found.first_row, is_known)
    if not said and (best is None or not known_names(raw, best, found.first_row, is_known)):
        others = [index for index, role in found.roles.items() if role not in VALUE_ROLES]
        other = best_name_column(raw, others, found.first_row, is_known)
        if other is not None and known_names(raw, other, found.first_row, is_known):
            best = other
    for index, role in found.roles.items():
        if role is ColumnRole.NAME and index != best:
            found.roles[index] = ColumnRole.NOTE
    found.name = best
    if best is not None:
        found.roles[best] = ColumnRole.NAME
