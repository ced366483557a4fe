"""The day of a whole list: in its title, as the month or week that it is for, or in the heading of its prices."""

from __future__ import annotations

import datetime
import re
from collections.abc import Iterator
from dataclasses import dataclass, replace

from blendapp.domain.list_rows import LEAVE_OUT, TAKE, Fate, Question
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_numbers import DateOrder, date_in_column, date_readings
from blendapp.exchange.price_columns import Table
from blendapp.exchange.tables import CellKind, RawTable, kind_of

# A first day so far from today has more likely a wrong year.
FURTHEST_DAYS = 548
_DATE = (
    r"([0-9]{4}-[0-9]{1,2}-[0-9]{1,2}|[0-9]{1,2}[./-][0-9]{1,2}[./-](?:[0-9]{4}|[0-9]{2})\b|"
    r"[0-9]{1,2}(?:st|nd|rd|th)?\s+[a-z]{3,9}\.?,?\s+[0-9]{4}|[a-z]{3,9}\.?\s+[0-9]{1,2}(?:st|nd|rd|th)?,?\s+[0-9]{4})"
)
_WEEKDAY = (
    r"(?:on\s+)?(?:(?:mon|tues|wednes|thurs|fri|satur|sun)day,?\s+|(?:mon|tue|wed|thu|fri|sat|sun)\.?,?\s+)?(?:the\s+)?"
)
_BEGINS = re.compile(
    r"\b(?:from|effective|as\s+of|starting|beginning|commencing|w\.?e\.?f\.?)[ :]+" + _WEEKDAY + _DATE, re.IGNORECASE
)
_DATED = re.compile(
    r"^(?:(?:price|list|quote|quotation|issue|offer)\s+)?dated?\b[ :]+" + _WEEKDAY + _DATE, re.IGNORECASE
)
_MONTH = re.compile(
    r"\b(?:for|in|during|list|prices?|offers?)\b[ :,–-]+(?:(?:the\s+month\s+of|delivery|shipment|collection|loading)\s+"
    r"(?:in\s+)?)?([a-z]{3,9})\.?\s+(20[0-9]{2})\b", re.IGNORECASE,
)
_WEEK = re.compile(r"\bweek\s*(?:no\.?\s*)?([0-9]{1,2})\b(?:\s*[,/-]?\s*(20[0-9]{2})\b)?", re.IGNORECASE)
_MONTH_OF_HEADING = re.compile(r"\b([a-z]{3,9})\.?\s+(20[0-9]{2})\b", re.IGNORECASE)
_OF_PRICES = re.compile(r"\b(?:prices?|quot(?:es?|ed|ations?)|offers?|rates?|valid|effective|week)\b", re.IGNORECASE)
_OF_SOMETHING_ELSE = re.compile(
    r"\b(?:freight|haulage|carriage|surcharges?|levy|discounts?|commission|storage|fees?|stock|until|till|expir\w+)\b",
    re.IGNORECASE,
)
_LABEL = re.compile(
    r"(?:(?:price|list|quote|issue|offer)\s+)?date|dated|(?:prices?\s+)?(?:valid|effective)(?:\s+from)?|from|"
    r"week\s+(?:commencing|beginning)", re.IGNORECASE,
)
_MOST_TEXTS_IN_A_TITLE = 3


@dataclass(frozen=True)
class ListDay:
    """The first day of the prices of a list. text: as it is written, "" for a month or a week.

    day: None where the text has two readings. last: of a month that the prices are for.
    """

    text: str = ""
    day: datetime.date | None = None
    last: datetime.date | None = None


def day_of_titles(raw: RawTable, first: int, headings: int, last: int, today: datetime.date) -> ListDay | None:
    """The day that the rows of a table say of all of its prices. headings: the row in which the headings begin."""
    for row in range(first, last):
        filled = [value for value in raw.rows[row] if kind_of(value) is not CellKind.BLANK]
        if not filled or len(filled) > (_MOST_TEXTS_IN_A_TITLE if row < headings else 1):
            continue
        for value, after in zip(filled, [*filled[1:], None], strict=True):
            text = " ".join(value.split()) if isinstance(value, str) else ""
            if row < headings and isinstance(after, datetime.date) and _LABEL.fullmatch(text.rstrip(" :")):
                return ListDay("", after.date() if isinstance(after, datetime.datetime) else after)
            if row < headings and isinstance(after, str) and _LABEL.fullmatch(text.rstrip(" :")):
                text = f"Date: {after.strip()}"
            found = _day_in(text, today, row < headings) if text else None
            if found is not None:
                return found
    return None


def day_of_heading(heading: str) -> ListDay | None:
    """The day or the month that stands in the heading of a column of prices."""
    found = re.search(_DATE, heading, re.IGNORECASE)
    if found and date_readings(found[1]):
        return _of_text(found[1])
    month = _MONTH_OF_HEADING.search(heading)
    return _of_month(month[1], month[2], ends=False) if month else None


def _day_in(text: str, today: datetime.date, is_title: bool) -> ListDay | None:
    dated = _DATED.search(text) if is_title else None
    if dated and date_readings(dated[1]):
        return _of_text(dated[1])
    if not _OF_PRICES.search(text) or _OF_SOMETHING_ELSE.search(text):
        return None
    begins = _BEGINS.search(text)
    if begins and date_readings(begins[1]):
        return _of_text(begins[1])
    month = _MONTH.search(text)
    if month and (found := _of_month(month[1], month[2], ends=True)):
        return found
    week = _WEEK.search(text) if is_title else None
    return _of_week(int(week[1]), int(week[2] or 0), today) if week else None


def _of_text(text: str) -> ListDay:
    return ListDay(text, date_in_column(text, _only_order(text)))


def _only_order(text: str) -> DateOrder | None:
    readings = date_readings(text)
    return next(iter(readings)) if len(readings) == 1 else None


def _of_month(name: str, year: str, ends: bool) -> ListDay | None:
    found = date_readings(f"1 {name} {year}")
    if not found:
        return None
    first = next(iter(found.values()))
    following = (first + datetime.timedelta(days=31)).replace(day=1)
    return ListDay("", first, following - datetime.timedelta(days=1) if ends else None)


def _of_week(week: int, year: int, today: datetime.date) -> ListDay | None:
    """The Monday of a week as ISO 8601 counts them; without a year the one that is nearest to today."""
    found = []
    for one in [year] if year else [today.year - 1, today.year, today.year + 1]:
        try:
            found.append(datetime.date.fromisocalendar(one, week, 1))
        except ValueError:
            continue
    return ListDay("", min(found, key=lambda day: abs((day - today).days))) if found else None


def days_of_prices(table: Table, titles: ListDay | None, answers: Answers) -> Iterator[ListDay]:
    """What holds where a row says no day: the heading of its price before the title."""
    answer = answers.find(Asked.PRICE, table.prices_key) if len(table.prices) > 1 else None
    headings = [column.heading for column in table.prices]
    chosen = [one for one in headings if answer is not None and one == answer.answer] or headings
    found = day_of_heading(chosen[0]) if len(chosen) == 1 else None
    yield from filter(None, (found, titles))


def dated(row: PriceRow, table: Table, titles: ListDay | None, answers: Answers) -> PriceRow:
    """A row with the day of its list, where it has none of its own; a day far from today is asked about."""
    if row.fate not in (Fate.ACCEPTED, Fate.QUESTION):
        return row
    said = next(days_of_prices(table, titles, answers), None) if row.valid_from is None else None
    if said is not None:
        row = _with_day(row, said, answers)
    return _asked_about_far_days(row, answers)


def _with_day(row: PriceRow, said: ListDay, answers: Answers) -> PriceRow:
    if said.day is None:
        return _of_two_readings(row, said.text, answers)
    last = said.last if row.valid_to is None else row.valid_to
    if said.last is None or said.last >= answers.today or last != said.last:
        return replace(row, valid_from=said.day, valid_to=last)
    whole = answers.find(Asked.EXPIRED_LIST, said.last.isoformat())
    answer = whole.answer if whole is not None else answers.of_row(Asked.EXPIRED, row.sheet, row.row)
    if answer == TAKE:
        return replace(row, reason=f"{row.reason} {_('Taken, as answered.')}".strip())
    if answer == LEAVE_OUT:
        return replace(row, fate=Fate.IGNORED, reason=_("Left out, as answered."), questions=())
    text = _("The price expired on {day}; ask for a new one.").format(day=said.last.isoformat())
    row = replace(row, valid_from=said.day, valid_to=last)
    return _asking(row, Question(Asked.EXPIRED, "", text, (TAKE, LEAVE_OUT)))


def _of_two_readings(row: PriceRow, text: str, answers: Answers) -> PriceRow:
    """A day that may be two: asked where one of them is to come; before today both say that the price counts now."""
    readings = date_readings(text)
    answer = answers.find(Asked.DATES, text)
    order = next((one for one in DateOrder if answer is not None and one.value == answer.answer), None)
    if order in readings:
        return replace(row, valid_from=readings[order])
    if all(day <= answers.today for day in readings.values()) or any(one.about == text for one in row.questions):
        return row
    said = _("“{text}” could be two days; say whether the day stands first or the month.").format(text=text)
    return _asking(row, Question(Asked.DATES, text, said, tuple(one.value for one in DateOrder)))


def _asked_about_far_days(row: PriceRow, answers: Answers) -> PriceRow:
    day = row.valid_from
    if day is None or abs((day - answers.today).days) <= FURTHEST_DAYS:
        return row
    if any(one.asked is Asked.EXPIRED for one in row.questions):
        return row
    if answers.of_row(Asked.EXPIRED, row.sheet, row.row) == TAKE:
        return row
    text = _("The price counts from {day}, more than 18 months from today; say whether that day is right.")
    return _asking(row, Question(Asked.EXPIRED, "", text.format(day=day.isoformat()), (TAKE, LEAVE_OUT)))


def _asking(row: PriceRow, question: Question) -> PriceRow:
    earlier = row.reason if row.fate is Fate.QUESTION else ""
    return replace(
        row, fate=Fate.QUESTION, reason=f"{earlier} {question.text}".strip(), questions=(*row.questions, question)
    )
