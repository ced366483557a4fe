"""Which of several prices of a row counts: the only one, a sum that adds up, or what a person answered."""

from __future__ import annotations

from dataclasses import dataclass, field

from blendapp.domain.list_rows import ADD, LEAVE_OUT, TAKE, ColumnRole, Question
from blendapp.domain.mills import Asked
from blendapp.domain.notation import PLAIN
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.price_cells import PriceCell
from blendapp.exchange.price_columns import PriceColumn, Table

# Base and freight add up to the sum within what rounding each to the cent leaves.
_ROUNDING = 0.015

Priced = tuple[PriceColumn, PriceCell]


@dataclass(frozen=True)
class Choice:
    """parts: the price that counts, or a base price and a freight to be added. question or doubt: where it is open."""

    parts: tuple[Priced, ...]
    remark: str = ""
    doubt: str = ""
    open: tuple[Question, ...] = field(default=())


def choose_price(table: Table, prices: list[Priced], answers: Answers) -> Choice:
    """prices: those of the columns of prices that the row fills, at least one."""
    if len(table.prices) == 1:
        return Choice((prices[0],))
    by_role = {column.role: (column, cell) for column, cell in prices}
    if len(prices) == 3 and set(by_role) == {ColumnRole.PRICE, ColumnRole.FREIGHT, ColumnRole.SUM}:
        return _sum_given(by_role)
    answer = answers.find(Asked.PRICE, table.prices_key)
    if answer is not None:
        if answer.answer == ADD and len(prices) == 2 and set(by_role) == {ColumnRole.PRICE, ColumnRole.FREIGHT}:
            both = by_role[ColumnRole.PRICE], by_role[ColumnRole.FREIGHT]
            return Choice(both, _("The freight was added, as answered."))
        held = [(column, cell) for column, cell in prices if column.heading == answer.answer]
        if len(held) == 1:
            return Choice((held[0],), _("The price under “{name}” holds, as answered.").format(name=answer.answer))
    if answer is not None and len(prices) == 1:
        return _only_one(prices[0], answers)
    order = (ColumnRole.SUM, ColumnRole.PRICE, ColumnRole.FREIGHT)
    likeliest = min(prices, key=lambda found: order.index(found[0].role))
    named = ", ".join(f"“{column.heading}”" for column, _cell in prices)
    choices = [column.heading for column in table.prices if column.role is not ColumnRole.FREIGHT]
    if len(prices) == 1:
        text = _("The list has several prices and the row one of them, under {names}; say whether it holds.")
    elif set(by_role) == {ColumnRole.PRICE, ColumnRole.FREIGHT} and len(prices) == 2:
        text = _("The row has a price and a freight, under {names}; say whether the freight is to be added.")
        choices.insert(0, ADD)
    else:
        text = _("The row has several prices, under {names}; say which holds.")
    text = text.format(names=named)
    return Choice((likeliest,), doubt=text, open=(Question(Asked.PRICE, table.prices_key, text, tuple(choices)),))


def _only_one(price: Priced, answers: Answers) -> Choice:
    """A row with one price, which is not the one that was answered for the list: asked about for itself, so that its
    answer does not take the place of the other."""
    heading = price[0].heading
    taken = answers.find(Asked.PRICE, heading)
    if taken is not None and taken.answer == TAKE:
        return Choice((price,), _("The price under “{name}” was taken, as answered.").format(name=heading))
    text = _("The row has no price but the one under “{name}”; say whether it is to be taken.").format(name=heading)
    return Choice((price,), doubt=text, open=(Question(Asked.PRICE, heading, text, (TAKE,)),))


def _sum_given(by_role: dict[ColumnRole, Priced]) -> Choice:
    total = by_role[ColumnRole.SUM]
    values = [by_role[role][1].value for role in (ColumnRole.PRICE, ColumnRole.FREIGHT, ColumnRole.SUM)]
    if any(value is None for value in values):
        return Choice((total,))  # the cell in doubt asks for itself
    base, freight, whole = (value for value in values if value is not None)
    if abs(base + freight - whole) <= _ROUNDING:
        return Choice((total,), _("The price is the sum of base price and freight."))
    shown = [PLAIN.write_exact(round(value, 6)) for value in (base, freight, whole, base + freight)]
    text = _("{base} and {freight} do not add up to {total}; say which price holds.")
    text = text.format(base=shown[0], freight=shown[1], total=shown[2])
    return Choice((total,), doubt=text, open=(Question(Asked.AMOUNT, "", text, (shown[2], shown[3], LEAVE_OUT)),))
