"""How a column of a list writes its numbers and days: decided over all of its rows, else as it was answered."""

from __future__ import annotations

from collections.abc import Iterable

from blendapp.domain.mills import Asked
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_numbers import DateOrder, DecimalSign, decide_date_order
from blendapp.exchange.tables import RawTable


def answered_sign(answers: Answers, heading: str) -> DecimalSign | None:
    found = answers.find(Asked.DECIMAL, heading)
    return next((sign for sign in DecimalSign if found and sign.value == found.answer), None)


def date_order(
    raw: RawTable, column: int, rows: Iterable[int], answers: Answers, heading: str
) -> DateOrder | None:
    """Whether the days of a column stand before the months; None where neither its texts nor an answer tell."""
    values = (raw.cell(row, column) for row in rows)
    found = decide_date_order(value for value in values if isinstance(value, str))
    return found or answered_order(answers, heading)


def answered_order(answers: Answers, heading: str) -> DateOrder | None:
    found = answers.find(Asked.DATES, heading)
    return next((order for order in DateOrder if found and order.value == found.answer), None)
