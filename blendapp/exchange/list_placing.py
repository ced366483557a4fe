"""Where a person said that a table stands and what its columns hold; it comes before what was found."""

from __future__ import annotations

import re
from collections.abc import Collection, Iterable

from blendapp.domain.list_rows import ColumnRole
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.tables import RawTable

_ROW = re.compile(r"row +([0-9]{1,7})")
# heading_row of a table that has no headings.
NO_HEADINGS = -1


def column_name(index: int) -> str:
    """What an answer calls a column without a heading: 0 is column 1."""
    return f"column {index + 1}"


class Placing:
    """notes: what is wrong with an answer, and its mend; such an answer is passed over."""

    def __init__(self, answers: Answers, roles: Collection[ColumnRole]) -> None:
        self._answers = answers
        self._allowed = {fold(role.value): role for role in roles}
        self.notes: list[str] = []
        self._used: set[str] = set()
        self._sheets: list[str] = []

    def note(self, text: str) -> None:
        if text not in self.notes:
            self.notes.append(text)

    def heading_row(self, raw: RawTable) -> int | None:
        """The row, from 0, in which the headings of a sheet stand as answered; NO_HEADINGS; None: not answered."""
        self._sheets.append(fold(raw.sheet))
        answer = self._answers.find(Asked.TABLE, raw.sheet)
        if answer is None:
            return None
        found = _ROW.fullmatch(fold(answer.answer))
        if found is None:
            text = _("“{answer}” names no row; say “row 5”, or “row 0” where there are no headings.")
            self.note(text.format(answer=answer.answer))
            return None
        row = int(found[1]) - 1
        if row >= len(raw.rows):
            text = _("The headings were said to stand in row {row}, and the sheet “{sheet}” ends with row {last}; "
                     "say in which row they stand.")
            self.note(text.format(row=row + 1, sheet=raw.sheet, last=len(raw.rows)))
            return None
        if row >= 0 and raw.is_blank(row):
            text = _("The headings were said to stand in row {row}, which is blank; say in which row they stand.")
            self.note(text.format(row=row + 1))
            return None
        return row

    def role(self, heading: str, index: int) -> ColumnRole | None:
        """What a column holds as answered, by its place or else by its heading; None where nothing was."""
        for about in (column_name(index), heading):
            answer = self._answers.find(Asked.COLUMN, about) if about else None
            if answer is None:
                continue
            self._used.add(fold(about))
            role = self._allowed.get(fold(answer.answer))
            if role is not None:
                return role
            text = _("“{answer}” is nothing that a column holds; say one of {roles}.")
            self.note(text.format(answer=answer.answer, roles=", ".join(one.value for one in self._allowed.values())))
        return None

    @property
    def names_columns(self) -> bool:
        """Whether anything was answered about columns."""
        return self._answers.has(Asked.COLUMN)

    def note_what_was_not_used(self, headings: Iterable[str]) -> None:
        """Notes the answers for this list that speak of a sheet or a column that is not there.

        headings: those of all tables that were found.
        """
        for answer in self._answers.given(Asked.TABLE):
            if fold(answer.about) not in self._sheets:
                text = _("No sheet “{sheet}” was read, whose headings were said to stand elsewhere; name one that was.")
                self.note(text.format(sheet=answer.about))
        for answer in self._answers.given(Asked.COLUMN):
            if fold(answer.about) not in self._used:
                text = _("No column is headed “{name}”; the list has {names}.")
                names = ", ".join(f"“{one}”" for one in dict.fromkeys(headings) if one) or _("no headings")
                self.note(text.format(name=answer.about, names=names))
