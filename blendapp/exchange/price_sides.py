"""Tables that stand side by side under one row of headings: which one is read, and that no price crosses over."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from dataclasses import dataclass, replace

from blendapp.domain.list_rows import ColumnRole, Fate, Question
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_cells import first_text, holds_number
from blendapp.exchange.list_headings import FURTHEST, is_known_text
from blendapp.exchange.list_placing import Placing, column_name
from blendapp.exchange.price_columns import PRICE_ROLES, PriceColumn, Table
from blendapp.exchange.price_words import NO_WORDS
from blendapp.exchange.tables import CellKind, RawTable, column_letters, kind_of

IsKnown = Callable[[str], bool]


@dataclass(frozen=True)
class Side:
    """The columns of one table, from 0. name: where its names stand; prices: the columns of its prices."""

    columns: range
    name: int
    prices: tuple[int, ...]

    @property
    def choice(self) -> str:
        """What an answer calls it."""
        return f"columns {column_letters(self.columns[0])} to {column_letters(self.columns[-1])}"

    def is_filled(self, raw: RawTable, row: int) -> bool:
        """Whether a row holds a name and a price of it, or one of them."""
        return any(kind_of(raw.cell(row, index)) is not CellKind.BLANK for index in (self.name, *self.prices))


def settle_sides(found: Table, raw: RawTable, is_known: IsKnown, answers: Answers, placing: Placing) -> None:
    """Keeps of tables side by side the one that was answered to be read; without an answer none is read."""
    sides = _sides(found, raw, is_known, placing)
    if len(sides) < 2:
        return
    found.sides_key = " | ".join(found.headings.get(side.name) or column_name(side.name) for side in sides)
    answer = answers.find(Asked.SIDE, found.sides_key)
    chosen = next((side for side in sides if answer is not None and side.choice == answer.answer), None)
    found.sides = tuple(sides)
    kept = chosen or sides[0]
    known = {column.index: column for column in found.prices}
    found.roles = {
        index: role if index in kept.columns else ColumnRole.OTHER for index, role in found.roles.items()
    }
    found.prices = [
        known.get(index) or PriceColumn(index, ColumnRole.PRICE, column_name(index), NO_WORDS) for index in kept.prices
    ]
    for index in kept.prices:
        found.roles.setdefault(index, ColumnRole.PRICE)
    found.roles = {
        index: ColumnRole.NOTE if role is ColumnRole.NAME and index != kept.name else role
        for index, role in found.roles.items()
    }
    found.roles[kept.name] = ColumnRole.NAME
    found.side = chosen
    if chosen is not None:
        text = _("Of the tables side by side the one in {read} was read, the one in {rest} not: apply the list, then "
                 "read it once more with the other answer.")
        rest = _(" and ").join(side.choice for side in sides if side is not chosen)
        placing.note(text.format(read=chosen.choice, rest=rest))


def unsettled_row(raw: RawTable, row: int, table: Table) -> PriceRow:
    """The fate of a row of tables side by side before anybody has said which one is read: it has no price yet."""
    name = first_text(raw, row)
    if not any(holds_number(raw.cell(row, index)) for side in table.sides for index in side.prices):
        return PriceRow(raw.sheet, row + 1, Fate.IGNORED, _("A heading or a note without a price."), name)
    choices = tuple(side.choice for side in table.sides)
    text = _("Tables stand side by side, in {columns}; say which one is to be read first.")
    text = text.format(columns=_(" and ").join(choices))
    return PriceRow(
        raw.sheet, row + 1, Fate.QUESTION, text, name, questions=(Question(Asked.SIDE, table.sides_key, text, choices),)
    )


def beside(raw: RawTable, read: PriceRow, table: Table) -> PriceRow:
    """A row of the table that is read, with what stands in the others and is not read."""
    row = read.row - 1
    others = [side for side in table.sides if side is not table.side and side.is_filled(raw, row)]
    if table.side is None or not others:
        return read
    columns = _(" and ").join(side.choice for side in others)
    if not table.side.is_filled(raw, row):
        text = _("Stands in the table in {columns}, which is not read now.")
        return PriceRow(raw.sheet, read.row, Fate.IGNORED, text.format(columns=columns), first_text(raw, row))
    text = _("What stands beside it in {columns} is not read now.").format(columns=columns)
    return replace(read, reason=f"{read.reason} {text}".strip())


def _sides(found: Table, raw: RawTable, is_known: IsKnown, placing: Placing) -> list[Side]:
    """The tables from the left, each with a column of names and one of prices; fewer than two are none."""
    prices = {column.index for column in found.prices if column.role is not ColumnRole.FREIGHT}
    width = max((len(cells) for cells in raw.rows[: found.first_row + FURTHEST]), default=0)
    names = {
        index for index in range(width)
        if index not in prices and _holds_names(found, raw, index, prices, is_known, placing)
    }
    for name in sorted(names):
        following = min((index for index in names if index > name), default=width)
        if not any(name < index < following for index in prices):
            prices.update(_unheaded_prices(found, raw, name, following, is_known))
    return list(_grouped(names, prices, width, {*found.headings, *found.roles}))


def _grouped(names: set[int], prices: set[int], width: int, headed: set[int]) -> Iterator[Side]:
    """One side begins with each name that follows a price, or ends with each name where prices stand first."""
    marks = sorted(names | prices)
    if not names or not prices:
        return
    price_first = marks[0] in prices and marks[-1] in names
    groups: list[list[int]] = [[]]
    for one, after in zip(marks, [*marks[1:], None], strict=True):
        groups[-1].append(one)
        ends = one in names and after in prices if price_first else one in prices and after in names
        if ends and after is not None and (price_first or any(index in prices for index in marks if index > after)):
            groups.append([])
    starts = [group[0] for group in groups]
    for group, end in zip(groups, [*starts[1:], width], strict=True):
        own = [index for index in group if index in names]
        if own:
            last = max(index for index in (*group, *headed) if index < max(end, group[-1] + 1))
            yield Side(range(group[0], last + 1), own[0], tuple(index for index in group if index in prices))


def _holds_names(
    found: Table, raw: RawTable, index: int, prices: set[int], is_known: IsKnown, placing: Placing
) -> bool:
    """Whether a column holds names, by its heading or by what stands in it."""
    said = placing.role(found.headings.get(index, ""), index) if placing.names_columns else None
    if said is not None:
        return said is ColumnRole.NAME
    role = found.roles.get(index)
    if role is ColumnRole.NAME:
        return True
    if role not in (None, ColumnRole.OTHER, ColumnRole.NOTE) or not any(price < index for price in prices):
        return False
    cells = [cells[index] for cells in raw.rows[found.first_row : found.first_row + FURTHEST] if index < len(cells)]
    texts = [value for value in cells if kind_of(value) is CellKind.TEXT]
    known = sum(is_known_text(value, is_known) for value in texts)
    if known * 2 >= len(texts) and known:
        return True
    gap = index - 1 not in found.headings and all(
        kind_of(cells[index - 1]) is CellKind.BLANK for cells in raw.rows[found.first_row :] if index <= len(cells)
    )
    return role is ColumnRole.OTHER and gap and bool(texts) and any(price > index for price in prices)


def _unheaded_prices(
    found: Table, raw: RawTable, name: int, end: int, is_known: IsKnown
) -> Iterator[int]:
    """The first column of numbers beside names that the mill knows, where none is headed as prices."""
    rows = raw.rows[found.first_row : found.first_row + FURTHEST]
    named = [cells for cells in rows if name < len(cells) and is_known_text(cells[name], is_known)]
    for index in range(name + 1, end):
        taken = found.roles.get(index, ColumnRole.OTHER)
        if taken not in PRICE_ROLES and taken is not ColumnRole.OTHER:
            continue
        filled = sum(index < len(cells) and kind_of(cells[index]) is CellKind.NUMBER for cells in named)
        if len(named) > 1 and filled * 2 >= len(named):
            yield index
            return
