"""What a person can say of a column or a row of a list, as things to find. No Qt."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from blendapp.desk.finder.search import Found
from blendapp.desk.prices.source_model import column_letters
from blendapp.domain.list_rows import Answer, ColumnRole, SourceSheet, SourceTable
from blendapp.domain.mills import Asked, ListAbout
from blendapp.domain.names import fold
from blendapp.domain.wording import _

_OF_ANALYSES = (ColumnRole.SAMPLE, ColumnRole.SAMPLED, ColumnRole.BASIS, ColumnRole.DRY_MATTER, ColumnRole.NUTRIENT)
_BOTH = (ColumnRole.NAME, ColumnRole.UNIT, ColumnRole.NOTE, ColumnRole.OTHER)
Give = Callable[[Answer], object]


def roles_of(about: ListAbout) -> list[ColumnRole]:
    """What a column may hold."""
    if about is ListAbout.PRICES:
        return [role for role in ColumnRole if role not in _OF_ANALYSES]
    return [role for role in ColumnRole if role in _OF_ANALYSES or role in _BOTH]


def column_answer(table: SourceTable | None, column: int, role: ColumnRole) -> Answer:
    """That a column holds something: by its heading where that is the only one of its name, else by its place."""
    headings = [] if table is None else [one.heading for one in table.columns]
    heading = next((one.heading for one in table.columns if one.index == column), "") if table is not None else ""
    alone = bool(heading) and sum(fold(one) == fold(heading) for one in headings) == 1
    return Answer(Asked.COLUMN, heading if alone else f"column {column + 1}", role.value)


def heading_answer(sheet: SourceSheet, row: int) -> Answer:
    """That the headings of a sheet are in a row, from 1; 0 where there are none."""
    return Answer(Asked.TABLE, sheet.name, f"row {row}")


def role_words(role: ColumnRole) -> str:
    """What is said of a column, after "this column is": "a price"."""
    return _("not read") if role is ColumnRole.OTHER else role.label


def sayings(
    sheet: SourceSheet, table: SourceTable | None, row: int, column: int, about: ListAbout, give: Give
) -> list[Found]:
    """Everything that can be said of a place. column: from 0, -1 for the row alone."""
    found = []
    if column >= 0:
        found = [
            Found(_("This column is: {role}").format(role=role_words(role)),
                  _("column {letters}").format(letters=column_letters(column)),
                  partial(give, column_answer(table, column, role)))
            for role in roles_of(about)
        ]
    if row > 0:
        found.append(Found(_("The headings are in this row"), _("row {row}").format(row=row),
                           partial(give, heading_answer(sheet, row))))
    found.append(Found(_("There is no heading row"), sheet.name or _("the list"),
                       partial(give, heading_answer(sheet, 0))))
    return found
