"""The days on which a price holds: from columns, else from a note; an expired price is never taken silently."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from blendapp.domain.list_rows import LEAVE_OUT, TAKE, ColumnRole, Fate, Question
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.wording import _
from blendapp.exchange.list_numbers import decide_date_order
from blendapp.exchange.list_row import RowReading
from blendapp.exchange.tables import CellKind, kind_of

if TYPE_CHECKING:
    from blendapp.exchange.price_segments import Segment


@dataclass(frozen=True)
class Days:
    """From and to, None where open. left_out: the price expired and was answered not to count."""

    first: datetime.date | None
    last: datetime.date | None
    left_out: bool = False


def read_days(
    row: RowReading, segment: Segment, today: datetime.date, said: Sequence[datetime.date | None] = (None, None)
) -> Days:
    """The days of a price; one that expired and is taken all the same holds from the day on which it is applied.

    said: from and to, as a remark beside the price says, which counts where no column does.
    """
    first = _date(row, segment, ColumnRole.VALID_FROM, segment.notes.valid_from, said[0])
    last = _date(row, segment, ColumnRole.VALID_TO, segment.notes.valid_to, said[1])
    if first is not None and last is not None and last < first:
        text = _("The price ends on {last}, before it begins on {first}; say whether it counts all the same.")
        row.confirm(Asked.EXPIRED, text.format(last=last.isoformat(), first=first.isoformat()))
        return Days(None, None) if row.is_taken(Asked.EXPIRED) else Days(first, last)
    if last is None or last >= today:
        return Days(first, last)
    answer = row.answers.find(Asked.EXPIRED_LIST, last.isoformat())
    if answer is not None and answer.answer == LEAVE_OUT:
        return Days(first, last, left_out=True)
    if answer is not None and answer.answer == TAKE:
        row.remarks.append(_("The price expired on {day}; taken, as answered.").format(day=last.isoformat()))
        return Days(None, None)
    row.confirm(Asked.EXPIRED, _expired(last))
    return Days(None, None) if row.is_taken(Asked.EXPIRED) else Days(first, last)


def _expired(day: datetime.date) -> str:
    return _("The price expired on {day}; ask for a new one.").format(day=day.isoformat())


def _date(
    row: RowReading, segment: Segment, role: ColumnRole, noted: str, said: datetime.date | None
) -> datetime.date | None:
    """The day in a column, or else in a remark, or in a note over the whole table."""
    index = segment.table.first(role)
    if index is None or kind_of(row.value(index)) is CellKind.BLANK:
        if said is not None:
            return said
        return row.read_date(noted, noted, decide_date_order([noted])) if noted else None
    return row.date(index, segment.dates.get(index))


def ask_once_about_expired(rows: Sequence[PriceRow]) -> list[PriceRow]:
    """Where all prices of a list ended on one day, one question about the list in place of one a row."""
    priced = [row for row in rows if row.fate in (Fate.ACCEPTED, Fate.QUESTION)]
    days = {row.valid_to for row in priced}
    day = next(iter(days), None)
    if len(priced) < 2 or len(days) > 1 or day is None:
        return list(rows)
    if not all(any(one.asked is Asked.EXPIRED for one in row.questions) for row in priced):
        return list(rows)
    text = _("All prices of the list expired on {day}; say whether they count, or ask for a new list.")
    text = text.format(day=day.isoformat())
    whole = Question(Asked.EXPIRED_LIST, day.isoformat(), text, (TAKE, LEAVE_OUT))

    def about_the_list(row: PriceRow) -> PriceRow:
        questions = tuple(whole if one.asked is Asked.EXPIRED else one for one in row.questions)
        return replace(row, questions=questions, reason=row.reason.replace(_expired(day), text))

    return [about_the_list(row) if row.fate is Fate.QUESTION else row for row in rows]
