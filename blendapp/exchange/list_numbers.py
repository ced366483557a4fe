"""Numbers and dates as other people type them; how a column writes them is decided over the whole column."""

from __future__ import annotations

import datetime
import re
from collections.abc import Iterable
from dataclasses import dataclass
from enum import Enum

# Before the decimal sign; no figure of a mill has more.
MOST_DIGITS = 15
_GROUPED = re.compile(r"[1-9][0-9]{0,2}(?:([ '.,])[0-9]{3})(?:\1[0-9]{3})*")
_NUMBER = re.compile(r"[0-9]{1,3}(?:[ '][0-9]{3})+(?:[.,][0-9]+)?|[0-9]+(?:[.,'][0-9]+)*|[.,][0-9]+")
_SPACES = dict.fromkeys(map(ord, "\u00a0\u202f\u2009\u2007"), " ")
_MINUS = str.maketrans({"\u2212": "-", "\u2013": "-", "\u2014": "-", "’": "'"})


class DecimalSign(Enum):
    POINT = "."
    COMMA = ","


@dataclass(frozen=True)
class NumberText:
    """A text that holds one number. digits: the number as written, without sign; negative: a minus or brackets."""

    digits: str
    negative: bool

    def value(self, sign: DecimalSign) -> float | None:
        """The number with a decimal sign; None if it cannot be one so written."""
        number = read_digits(self.digits, sign)
        return None if number is None else -number if self.negative else number

    @property
    def readings(self) -> dict[DecimalSign, float]:
        found = {sign: self.value(sign) for sign in DecimalSign}
        return {sign: value for sign, value in found.items() if value is not None}


def plain_text(text: str) -> str:
    """A text with plain spaces, one between words, and the plain minus sign."""
    return " ".join(text.translate(_SPACES).translate(_MINUS).split())


def split_number(text: str) -> tuple[NumberText, str, str] | None:
    """The first number in a text, with its minus or brackets, and the words before and after it; None without one."""
    plain = plain_text(text)
    found = _NUMBER.search(plain)
    if found is None:
        return None
    before, after = plain[: found.start()], plain[found.end() :]
    brackets = before.rstrip().endswith("(") and after.lstrip().startswith(")")
    if brackets:
        before, after = before.rstrip()[:-1], after.lstrip()[1:]
    minus = before.rstrip().endswith("-") or (after.startswith("-") and not after[1:].strip())
    before, after = before.rstrip().removesuffix("-").removesuffix("+"), after.removeprefix("-") if minus else after
    if before.lstrip().startswith("-"):
        minus, before = True, before.lstrip()[1:]
    return NumberText(found[0], minus or brackets), before, after


def read_digits(digits: str, sign: DecimalSign) -> float | None:
    """A number without sign, grouping in threes; None if it cannot be one with that decimal sign."""
    whole, decimal, fraction = digits.partition(sign.value)
    if decimal and not (fraction.isdigit() and fraction.isascii()):
        return None
    if whole == "" and decimal:
        whole = "0"
    if not whole.isdigit():
        if not _GROUPED.fullmatch(whole):
            return None
        whole = re.sub(r"[ '.,]", "", whole)
    if not whole.isascii() or len(whole) > MOST_DIGITS:
        return None
    return float(f"{whole}.{fraction}" if fraction else whole)


def decide_decimal_sign(texts: Iterable[NumberText]) -> DecimalSign | None:
    """The decimal sign of a column: the one that some of its texts need and none forbids, or None."""
    needed = {next(iter(text.readings)) for text in texts if len(text.readings) == 1}
    return needed.pop() if len(needed) == 1 else None


def value_in_column(text: NumberText, sign: DecimalSign | None) -> float | None:
    """The number in a column whose decimal sign is decided or not; None where it could be two different numbers."""
    readings = text.readings
    if sign is not None:
        return readings.get(sign)
    values = set(readings.values())
    return values.pop() if len(values) == 1 and ("," not in text.digits and "." not in text.digits) else None


_MONTHS = {
    name: number
    for number, names in enumerate(
        ("jan january", "feb february", "mar march", "apr april", "may", "jun june", "jul july", "aug august",
         "sep sept september", "oct october", "nov november", "dec december"), start=1
    )
    for name in names.split()
}
_ISO = re.compile(r"([0-9]{4})[-/.]([0-9]{1,2})[-/.]([0-9]{1,2})(?:[T ].*)?")
_NUMERIC = re.compile(r"([0-9]{1,2})[-/.]\s?([0-9]{1,2})[-/.]\s?([0-9]{2}|[0-9]{4})")
_DAY_NAME = re.compile(r"([0-9]{1,2})(?:st|nd|rd|th)?[ ./-]*([A-Za-z]{3,9})[ .,/-]*([0-9]{2}|[0-9]{4})")
_NAME_DAY = re.compile(r"([A-Za-z]{3,9})[ .]*([0-9]{1,2})(?:st|nd|rd|th)?[ ,]+([0-9]{4})")


class DateOrder(Enum):
    DAY_FIRST = "day first"
    MONTH_FIRST = "month first"


def date_readings(text: str) -> dict[DateOrder, datetime.date]:
    """What a text may be as a date, day first and month first; empty if it is none."""
    plain = " ".join(text.split())
    if found := _ISO.fullmatch(plain):
        return _both(_date(found[1], found[2], found[3]))
    if found := _DAY_NAME.fullmatch(plain):
        return _both(_date(found[3], _MONTHS.get(found[2].casefold()), found[1]))
    if found := _NAME_DAY.fullmatch(plain):
        return _both(_date(found[3], _MONTHS.get(found[1].casefold()), found[2]))
    if found := _NUMERIC.fullmatch(plain):
        readings = {
            DateOrder.DAY_FIRST: _date(found[3], found[2], found[1]),
            DateOrder.MONTH_FIRST: _date(found[3], found[1], found[2]),
        }
        return {order: date for order, date in readings.items() if date is not None}
    return {}


def decide_date_order(texts: Iterable[str]) -> DateOrder | None:
    """The order of a column: the one that some of its texts need and none forbids; None if that decides nothing."""
    needed = {next(iter(found)) for found in map(date_readings, texts) if len(found) == 1}
    return needed.pop() if len(needed) == 1 else None


def date_in_column(text: str, order: DateOrder | None) -> datetime.date | None:
    """The date in a column whose order is decided or not; None where it is no date or could be two."""
    readings = date_readings(text)
    values = set(readings.values())
    if len(values) == 1 and len(readings) == 2:
        return values.pop()
    return readings.get(order) if order is not None else None


def _both(date: datetime.date | None) -> dict[DateOrder, datetime.date]:
    return {} if date is None else dict.fromkeys(DateOrder, date)


def _date(year: str, month: str | int | None, day: str) -> datetime.date | None:
    try:
        number = int(year)
        return datetime.date(number + 2000 if number < 100 else number, int(month or 0), int(day))
    except ValueError:
        return None
