"""One row of a price list: what it says, and its fate."""

from __future__ import annotations

import datetime
from typing import TYPE_CHECKING

from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.names import fold
from blendapp.domain.notation import PLAIN
from blendapp.domain.price_rows import Fate, PriceRow
from blendapp.domain.wording import _
from blendapp.exchange.price_cells import PriceCell, error_in, read_price_cell
from blendapp.exchange.price_columns import PriceColumn, Role, Table
from blendapp.exchange.price_names import Match, NameFinder
from blendapp.exchange.price_numbers import date_in_column
from blendapp.exchange.price_units_read import TonnePrice, UnitReading, money_doubt, per_tonne, read_unit
from blendapp.exchange.price_words import Money, Words, read_unit_words, split_money
from blendapp.exchange.tables import CellKind, RawTable, kind_of

if TYPE_CHECKING:
    from blendapp.exchange.price_list import Segment

_TOTALS = frozenset({
    "total", "totals", "subtotal", "sub total", "sub-total", "grand total", "sum", "average", "avg", "mean",
    "weighted average", "overall average", "overall",
})
# Base and freight add up to the sum within what rounding each to the cent leaves.
_ROUNDING = 0.015


def read_row(
    raw: RawTable, row: int, segment: Segment, library: Library, names: NameFinder, today: datetime.date
) -> PriceRow:
    """The fate of one row below the headings."""
    return _Reading(raw, row, segment, library, names, today).result()


class _Reading:
    """Gathers what one row says and every question that it raises."""

    def __init__(
        self, raw: RawTable, row: int, segment: Segment, library: Library, names: NameFinder, today: datetime.date
    ) -> None:
        self.raw, self.row, self.segment = raw, row, segment
        self.library, self.names, self.today = library, names, today
        self.table: Table = segment.table
        self.questions: list[str] = []
        self.remarks: list[str] = []
        self.name = self._text(self.table.name)

    def _text(self, column: int | None) -> str:
        value = None if column is None else self.raw.cell(self.row, column)
        kind = kind_of(value)
        if kind is CellKind.TEXT:
            return " ".join(str(value).split())
        if kind is CellKind.NUMBER:
            assert isinstance(value, float | int)
            return PLAIN.write_exact(float(value))
        return ""

    def _entry(self, fate: Fate, reason: str, **known: object) -> PriceRow:
        return PriceRow(self.raw.sheet, self.row + 1, fate, reason, self.name, **known)  # type: ignore[arg-type]

    def result(self) -> PriceRow:
        if error := self._error():
            return self._entry(Fate.REFUSED, error)
        cells = [
            (column, read_price_cell(self.raw, self.row, column, self.segment.signs.get(column.index)))
            for column in self.table.prices
        ]
        prices = [(column, cell) for column, cell in cells if not cell.empty]
        known = bool(self.name) and self.names.is_known(self.name)
        if not prices:
            return self._entry(Fate.IGNORED, self._why_empty([cell for _column, cell in cells], known))
        if not known and fold(self.name).rstrip(" :") in _TOTALS:
            return self._entry(Fate.IGNORED, _("A total or an average, no price of an ingredient."))
        if not known and all(cell.wordy for _column, cell in prices):
            return self._entry(Fate.IGNORED, _("A heading or a note without a price."))
        return self._priced(prices, len(cells))

    def _error(self) -> str:
        columns = [index for index, role in self.table.roles.items() if role not in (Role.NOTE, Role.OTHER)]
        columns += [column.index for column in self.table.prices]
        found = (error_in(self.raw.cell(self.row, index), self.row, index) for index in sorted(set(columns)))
        return next((sentence for sentence in found if sentence), "")

    def _why_empty(self, cells: list[PriceCell], known: bool) -> str:
        said = next((cell.entered for cell in cells if cell.entered), "")
        if said:
            return _("“{text}” is no price.").format(text=said)
        return _("The price is empty.") if known else _("A heading or a note without a price.")

    def _priced(self, prices: list[tuple[PriceColumn, PriceCell]], columns: int) -> PriceRow:
        self._ask_about_place()
        column, cell = self._one_price(prices, columns)
        match = self._match()
        ingredient = match.ingredient
        unit = self._unit(column, cell)
        self._ask_about_money(column, cell)
        valid_from = self._dates()
        found = self._per_tonne(cell, unit, ingredient)
        if ingredient is not None and cell.value is not None and cell.value <= 0:
            text = _("The price {price} is 0 or below; type it for the ingredient if it is meant.")
            self.questions.append(text.format(price=PLAIN.write_exact(cell.value)))
        if cell.as_text:
            self.remarks.append(_("The number is stored as text."))
        old = None if ingredient is None else self.library.price_per_t(ingredient.id, self.today)
        fate = Fate.QUESTION if self.questions else Fate.ACCEPTED
        return self._entry(
            fate,
            " ".join(dict.fromkeys(self.questions if self.questions else self.remarks)),
            ingredient_id=None if ingredient is None else ingredient.id,
            ingredient=None if ingredient is None else ingredient.name,
            price=found.price if found else cell.value,
            per=found.per if found else None,
            bushel_lb=found.bushel_lb if found else None,
            price_per_t=found.per_t if found else None,
            unit=unit.said or None,
            valid_from=valid_from,
            old_price_per_t=old,
            entered=cell.entered,
        )

    def _ask_about_place(self) -> None:
        if self.raw.hidden_rows and self.row in self.raw.hidden_rows:
            self.questions.append(_("The row is hidden in the list; say whether it counts."))
        used = [self.table.name, *(column.index for column in self.table.prices)]
        if self.raw.hidden_columns and any(index in self.raw.hidden_columns for index in used):
            self.questions.append(_("A column with names or prices is hidden in the list; say whether it counts."))
        if self.table.side_by_side:
            self.questions.append(_("Two tables seem to stand side by side; put one below the other."))

    def _one_price(
        self, prices: list[tuple[PriceColumn, PriceCell]], columns: int
    ) -> tuple[PriceColumn, PriceCell]:
        """The price that counts: the only one, or the sum where base, freight and sum are given and add up."""
        if columns == 1:
            self._ask_about_cell(prices[0][1])
            return prices[0]
        by_role = {column.role: (column, cell) for column, cell in prices}
        for _column, cell in prices:
            self._ask_about_cell(cell)
        if len(prices) == 3 and set(by_role) == {Role.PRICE, Role.FREIGHT, Role.SUM}:
            base, freight, total = (by_role[role][1].value for role in (Role.PRICE, Role.FREIGHT, Role.SUM))
            if base is not None and freight is not None and total is not None:
                if abs(base + freight - total) <= _ROUNDING:
                    self.remarks.append(_("The price is the sum of base price and freight."))
                else:
                    text = _("{base} and {freight} do not add up to {total}; say which price holds.")
                    shown = (PLAIN.write_exact(value) for value in (base, freight, total))
                    self.questions.append(text.format(**dict(zip(("base", "freight", "total"), shown, strict=True))))
            return by_role[Role.SUM]
        named = ", ".join(f"“{column.heading}”" for column, _cell in prices)
        if len(prices) > 1:
            self.questions.append(_("The row has several prices, under {names}; say which holds.").format(names=named))
        else:
            text = _("The list has several prices and the row one of them, under {names}; say whether it holds.")
            self.questions.append(text.format(names=named))
        order = (Role.SUM, Role.PRICE, Role.FREIGHT)
        return min(prices, key=lambda found: order.index(found[0].role))

    def _ask_about_cell(self, cell: PriceCell) -> None:
        if cell.doubt:
            self.questions.append(cell.doubt)

    def _match(self) -> Match:
        if not self.name:
            self.questions.append(_("The price has no name; say which ingredient it is for."))
            return Match(None)
        match = self.names.find(self.name)
        if match.reason:
            (self.remarks if match.ingredient else self.questions).append(match.reason)
        return match

    def _unit(self, column: PriceColumn, cell: PriceCell) -> UnitReading:
        sources = [Words(cell.money, cell.unit, "")]
        beside = self._text(self.table.first(Role.UNIT))
        if beside:
            words = read_unit_words(beside)
            sources.append(Words(words.money, words.unit, "/" + words.rest if words.rest else ""))
        sources.append(column.words)
        reading = read_unit(sources, self.library.mill)
        if reading.doubt:
            self.questions.append(reading.doubt)
        return reading

    def _ask_about_money(self, column: PriceColumn, cell: PriceCell) -> None:
        sources: list[Money] = [cell.money, column.words.money]
        beside = self._text(self.table.first(Role.UNIT))
        if beside:
            sources.append(read_unit_words(beside).money)
        currency = self._text(self.table.first(Role.CURRENCY))
        if currency:
            money, _rest = split_money(currency.upper() if len(currency) == 3 else currency)
            sources.append(money)
            if money.currencies is None:
                self.questions.append(_("“{text}” is not known as a currency.").format(text=currency))
        doubt = money_doubt(sources, self.library.mill.currency)
        if doubt:
            self.questions.append(doubt)

    def _dates(self) -> datetime.date | None:
        first = self._date(Role.VALID_FROM)
        last = self._date(Role.VALID_TO)
        if last is not None and last < self.today:
            text = _("The price expired on {day}; ask for a new one.")
            self.questions.append(text.format(day=last.isoformat()))
        return first

    def _date(self, role: Role) -> datetime.date | None:
        index = self.table.first(role)
        value = None if index is None else self.raw.cell(self.row, index)
        if index is None or kind_of(value) is CellKind.BLANK:
            return None
        if isinstance(value, datetime.datetime):
            return value.date()
        if isinstance(value, datetime.date):
            return value
        text = self._text(index)
        found = date_in_column(text, self.segment.dates.get(index)) if isinstance(value, str) else None
        if found is None:
            self.questions.append(_("“{text}” is no date, or could be two; say which day is meant.").format(text=text))
        return found

    def _per_tonne(self, cell: PriceCell, unit: UnitReading, ingredient: Ingredient | None) -> TonnePrice | None:
        if cell.value is None or unit.unit is None:
            return None
        found = per_tonne(cell.value, unit.unit, ingredient)
        if found.doubt:
            self.questions.append(found.doubt)
        if found.remark:
            self.remarks.append(found.remark)
        return found
