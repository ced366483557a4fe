"""What was understood of a list, as a table: common to prices and analyses."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from blendapp.desk.table.grid import AnyIndex, Grid, Heading
from blendapp.desk.table.look import EMPTY, Look
from blendapp.domain.list_rows import Fate, ListReading, ListRow
from blendapp.domain.wording import _

ORDER = {Fate.QUESTION: 0, Fate.REFUSED: 1, Fate.ACCEPTED: 2, Fate.IGNORED: 3}


def fate_word(fate: Fate) -> str:
    """What becomes of a row, in a word."""
    return {Fate.ACCEPTED: _("accepted"), Fate.QUESTION: _("question"), Fate.REFUSED: _("refused"),
            Fate.IGNORED: _("left alone")}[fate]


class UnderstoodRows(Grid):
    """A line, or several, for each source row. only: the fate that is shown, None for all but rows left alone.

    stretch: the column that takes the width that is left. A subclass gives make_headings(reading), lines_of(row), what
    a line shows, and the sentence below it.
    """

    stretch = "ingredient"

    def __init__(self, parent: Any = None) -> None:
        super().__init__(parent)
        self.reading: ListReading | None = None
        self.only: Fate | None = None
        self._lines: list[tuple[ListRow, int]] = []

    # -- for subclasses

    def make_headings(self, reading: ListReading) -> list[Heading]:
        raise NotImplementedError

    def lines_of(self, row: ListRow) -> int:
        """How many lines a row has."""
        return 1

    def line_look(self, row: ListRow, line: int, key: str) -> Look:
        raise NotImplementedError

    def detail(self, row: ListRow, line: int) -> str:
        """What stands below a line, "" for nothing."""
        return row.reason

    # -- the shape

    def show(self, reading: ListReading | None, only: Fate | None = None) -> None:
        """Show a list: what needs a look first, then what is taken, then what is left alone."""
        self.reading, self.only = reading, only
        self.beginResetModel()
        self._looks.clear()
        self._lines = []
        self.owners = []
        if reading is not None:
            self.headings = self.make_headings(reading)
            shown = [row for row in reading.rows if (row.fate is only if only else row.fate is not Fate.IGNORED)]
            for row in sorted(shown, key=lambda row: ORDER[row.fate]):
                self._lines += [(row, line) for line in range(self.lines_of(row))]
            self.owners = list(range(len(self._lines)))
        self.endResetModel()

    def row(self, index: AnyIndex) -> ListRow | None:
        """The source row behind a cell."""
        return self._lines[self.owner(index)][0] if index.isValid() else None

    def line_of(self, sheet: str, row: int) -> int | None:
        """The first line of a source row, None where it is not shown."""
        return next((at for at, (one, _line) in enumerate(self._lines) if (one.sheet, one.row) == (sheet, row)), None)

    def detail_of(self, owner: int) -> str:
        """What stands below a line of the table."""
        return self.detail(*self._lines[owner])

    def begins_row(self, owner: int) -> bool:
        """Whether a line is the first of its source row; so is what lies below the last line."""
        return owner >= len(self._lines) or self._lines[owner][1] == 0

    def make_look(self, owner: int, key: str) -> Look:
        if owner >= len(self._lines):
            return EMPTY
        row, line = self._lines[owner]
        if key == "fate":
            waits = row.fate is Fate.QUESTION and bool(row.questions)
            return Look(text=fate_word(row.fate) if line == 0 else "", quiet=row.fate is Fate.IGNORED,
                        strong=row.fate in (Fate.QUESTION, Fate.REFUSED),
                        hint=_("Enter goes to the question") if waits else self.detail_of(owner))
        if key == "place":
            return Look(text=str(row.row) if line == 0 else "", quiet=True, number=True)
        return self.line_look(row, line, key)

    def write(self, owner: int, key: str, text: str) -> None:
        raise ValueError(_("What was read is not typed here; answer the question, or mend the file and read it again."))


def counts(reading: ListReading) -> Sequence[tuple[Fate, int]]:
    """How many rows have each fate; they add up to the rows read."""
    return [(fate, reading.count(fate)) for fate in (Fate.ACCEPTED, Fate.QUESTION, Fate.REFUSED, Fate.IGNORED)]
