"""One row of a list, of prices or of analyses: the words in it, and every question that it raises."""

from __future__ import annotations

import datetime
from collections.abc import Iterable, Mapping

from blendapp.domain.list_rows import LEAVE_OUT, TAKE, Question
from blendapp.domain.mills import Asked
from blendapp.domain.wording import _
from blendapp.exchange.list_cells import cell_text, error_in, shortened
from blendapp.exchange.list_names import Match, NameFinder
from blendapp.exchange.list_numbers import DateOrder, date_in_column, date_readings
from blendapp.exchange.tables import CellKind, CellValue, RawTable, column_letters, kind_of

# What stands in place of a name where a row is about several others.
TOTALS = frozenset({
    "total", "totals", "subtotal", "sub total", "sub-total", "grand total", "sum", "average", "avg", "mean",
    "weighted average", "overall average", "overall",
})


class RowReading:
    """Gathers what one row says and every question that it raises.

    questions: sentences that keep the row from being taken; open: those of them that an answer settles. remarks: what
    is worth saying of a row that is taken. headings: by column, for what is asked about a whole column.
    """

    def __init__(
        self, raw: RawTable, row: int, names: NameFinder, name_column: int | None, headings: Mapping[int, str]
    ) -> None:
        self.raw, self.row, self.names, self.headings = raw, row, names, headings
        self.answers = names.answers
        self.questions: list[str] = []
        self.open: list[Question] = []
        self.remarks: list[str] = []
        self.name_column = name_column
        self.name = self.text(name_column)

    @property
    def reason(self) -> str:
        return " ".join(dict.fromkeys(self.questions if self.questions else self.remarks))

    def value(self, column: int) -> CellValue:
        """What stands in a column; of cells that are merged downwards, what stands in the first of them."""
        value = self.raw.cell(self.row, column)
        if kind_of(value) is CellKind.BLANK:
            return self.raw.cell(self.raw.top_of_merged(self.row, column), column)
        return value

    def text(self, column: int | None) -> str:
        """What stands in a column, as the person sees it."""
        return "" if column is None else cell_text(self.value(column))

    def ask(self, asked: Asked, about: str, text: str, choices: tuple[str, ...] = (), reason: str = "") -> None:
        """Asks. reason: what is said of this row, where that is more than the question."""
        text = shortened(text)
        self.questions.append(shortened(reason) or text)
        self.open.append(Question(asked, about, text, choices))

    def confirm(self, asked: Asked, text: str) -> None:
        """Asks about this row, unless a person has said that it counts."""
        if self.is_taken(asked):
            self.remarks.append(_("Taken, as answered."))
        else:
            self.ask(asked, "", text, (TAKE, LEAVE_OUT))

    def is_taken(self, asked: Asked) -> bool:
        """Whether a person has said that this row counts in spite of what was asked."""
        return self.answers.of_row(asked, self.raw.sheet, self.row + 1) == TAKE

    def is_left_out(self) -> bool:
        """Whether a person has answered that the row, or whatever bears its name, is nothing for the mill."""
        if self.names.is_left_out(self.name):
            return True
        return self.answers.is_left_out(self.raw.sheet, self.row + 1)

    def error(self, columns: Iterable[int]) -> str:
        """The sentence for the first cell among columns that holds an error, or no stored value; "" if none does."""
        found = (error_in(self.raw.cell(self.row, index), self.row, index) for index in sorted(set(columns)))
        return next((sentence for sentence in found if sentence), "")

    def ask_about_place(self, used: Iterable[int], hidden_column: str) -> None:
        """Asks where the row, or a column that counts, is hidden or struck through. hidden_column: with {name}."""
        columns = list(used)
        if self.raw.hidden_rows and self.row in self.raw.hidden_rows:
            self.confirm(Asked.HIDDEN, _("The row is hidden in the list; say whether it counts."))
        for index in columns:
            if self.raw.hidden_columns and index in self.raw.hidden_columns:
                heading = self.headings.get(index, column_letters(index))
                answer = self.answers.find(Asked.HIDDEN_COLUMN, heading)
                if answer is None or answer.answer != TAKE:
                    self.ask(Asked.HIDDEN_COLUMN, heading, hidden_column.format(name=heading), (TAKE,))
        if self.raw.struck and any((self.row, index) in self.raw.struck for index in columns):
            self.confirm(Asked.STRUCK, _("The row is struck through in the list; say whether it counts."))

    def match(self, without_name: str) -> Match:
        """Which ingredient the row is about. without_name: the question where it has no name."""
        if not self.name:
            answer = self.answers.about_row(Asked.NAMELESS, self.raw.sheet, self.row + 1)
            ingredient = None if answer is None else self.names.by_id(answer.ingredient_id)
            if ingredient is None:
                self.ask(Asked.NAMELESS, "", without_name, (LEAVE_OUT,))
                return Match(None)
            self.remarks.append(_("“{name}”, as answered.").format(name=ingredient.name))
            return Match(ingredient)
        match = self.names.find(self.name)
        if match.ingredient is None:
            self.ask(Asked.INGREDIENT, self.name, match.reason, match.candidates)
        elif match.reason:
            self.remarks.append(match.reason)
        return match

    def date(self, column: int, order: DateOrder | None) -> datetime.date | None:
        """The day in a column whose order of day and month is decided or not; None where it holds none."""
        value = self.value(column)
        if kind_of(value) is CellKind.BLANK:
            return None
        if isinstance(value, datetime.datetime):
            return value.date()
        if isinstance(value, datetime.date):
            return value
        text = self.text(column)
        if not isinstance(value, str):
            self._ask_about_no_date(text)
            return None
        return self.read_date(text, self.headings.get(column, column_letters(column)), order)

    def read_date(self, text: str, heading: str, order: DateOrder | None) -> datetime.date | None:
        if order is None:
            answer = self.answers.find(Asked.DATES, heading)
            order = next((one for one in DateOrder if answer and one.value == answer.answer), None)
        found = date_in_column(text, order)
        if found is None:
            if len(date_readings(text)) == 2:
                said = _("“{text}” could be two days; say whether the day stands first or the month.")
                self.ask(Asked.DATES, heading, said.format(text=text), tuple(one.value for one in DateOrder))
            else:
                self._ask_about_no_date(text)
        return found

    def _ask_about_no_date(self, text: str) -> None:
        """Words where a day should stand; once answered, they count as none wherever the source uses them."""
        answer = self.answers.find(Asked.DATES, text)
        if answer is not None and answer.answer == TAKE:
            self.remarks.append(_("“{text}” was taken for no day, as answered.").format(text=text))
            return
        said = _("“{text}” is no date; say that it counts as no day, or write the day in the list.").format(text=text)
        self.ask(Asked.DATES, text, said, (TAKE,))
