"""The money of a price: of the mill, in hundredths of it, or of another country at a rate that a person gave."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from blendapp.domain.list_rows import TAKE
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.notation import PLAIN
from blendapp.domain.wording import _
from blendapp.exchange.list_row import RowReading
from blendapp.exchange.price_units_read import foreign_money
from blendapp.exchange.price_words import Money, split_money

GREATEST_RATE = 1e9


@dataclass(frozen=True)
class OwnMoney:
    """value: the price in money of the mill, None where there is none or it is in doubt.

    foreign: code, sign or word of another currency, in which the price still stands.
    """

    value: float | None
    foreign: str = ""


def own_money(
    row: RowReading, value: float | None, said: Sequence[Money], beside: str, notes: Sequence[Money], own: str
) -> OwnMoney:
    """A price in money of the mill. said: by cell, heading and unit; beside: the text of a column of currencies.

    notes: what notes say, which counts where nothing else does. own: code of the currency of the mill.
    """
    sources = list(said)
    unknown = ""
    if beside:
        money, _rest = split_money(beside.upper() if len(beside) == 3 else beside)
        sources.append(money)
        if money.currencies is None:
            unknown = beside
    if not unknown and all(money.currencies is None for money in sources):
        sources += notes
    named = [money for money in sources if money.cents]
    if named and all(money.are_hundredths_of(own) for money in named):
        row.remarks.append(_("Hundredths of {own} were turned into whole ones.").format(own=own))
        value = None if value is None else value / 100
    elif named:
        value = _hundredths(row, value, own)
    if unknown:
        return _unknown(row, value, unknown, own)
    theirs = foreign_money(sources, own)
    return _exchanged(row, value, theirs, own) if theirs else OwnMoney(value)


def _hundredths(row: RowReading, value: float | None, own: str) -> float | None:
    answer = row.answers.find(Asked.CENTS, "")
    if answer is None or answer.answer != TAKE:
        text = _("The price is in hundredths of {own}; say that it is to be divided by 100, or give it in {own}.")
        row.ask(Asked.CENTS, "", text.format(own=own), (TAKE,))
        return None
    row.remarks.append(_("Hundredths were turned into whole ones, as answered."))
    return None if value is None else value / 100


def _unknown(row: RowReading, value: float | None, words: str, own: str) -> OwnMoney:
    """Words in a column of currencies that name none: a person says that it is the mill's own, or gives a rate."""
    answer = row.answers.find(Asked.RATE, words)
    if answer is not None and fold(answer.answer) == fold(own):
        row.remarks.append(_("“{text}” is {own}, as answered.").format(text=words, own=own))
        return OwnMoney(value)
    text = _("“{text}” is not known as a currency; say that it is {own}, or give its rate and day.")
    return _at_rate(row, value, words, own, text.format(text=words, own=own), (own,))


def _exchanged(row: RowReading, value: float | None, theirs: str, own: str) -> OwnMoney:
    text = _("The price is in {theirs} and the mill reckons in {own}; give it in {own}, or a rate and its day.")
    return _at_rate(row, value, theirs, own, text.format(theirs=theirs, own=own), ())


def _at_rate(
    row: RowReading, value: float | None, theirs: str, own: str, text: str, choices: tuple[str, ...]
) -> OwnMoney:
    answer = row.answers.find(Asked.RATE, theirs)
    if answer is not None and answer.rate is not None and 0 < answer.rate < GREATEST_RATE and answer.given is not None:
        remark = _("Converted at {rate} {own} for one {theirs}, the rate of {day}.")
        row.remarks.append(remark.format(
            rate=PLAIN.write_exact(answer.rate), own=own, theirs=theirs, day=answer.given.isoformat()
        ))
        return OwnMoney(None if value is None else value * answer.rate)
    last = row.answers.last_rate(theirs)
    if last is not None and last.rate is not None and last.given is not None:
        text += " " + _("The rate of {day} was {rate}.").format(
            day=last.given.isoformat(), rate=PLAIN.write_exact(last.rate)
        )
    shown = "" if value is None else f"{PLAIN.write_exact(value)} {theirs}: "
    row.ask(Asked.RATE, theirs, text, choices, shown + text)
    return OwnMoney(None, theirs)
