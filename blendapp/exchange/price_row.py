"""One row of a price list: what it says, and its fate."""

from __future__ import annotations

import datetime
from dataclasses import replace
from typing import TYPE_CHECKING

from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.list_rows import TAKE, ColumnRole, Fate
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.notation import PLAIN
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.quotes import Terms
from blendapp.domain.wording import _
from blendapp.exchange.list_names import NameFinder
from blendapp.exchange.list_numbers import DecimalSign, decide_date_order
from blendapp.exchange.list_row import TOTALS, RowReading
from blendapp.exchange.price_cells import PriceCell, read_price_cell
from blendapp.exchange.price_choice import Priced, choose_price
from blendapp.exchange.price_columns import PriceColumn
from blendapp.exchange.price_terms import WITHOUT_FREIGHT, read_terms
from blendapp.exchange.price_units import AmbiguousPriceUnit, UnknownPriceUnit, bag_with_weight, read_price_unit
from blendapp.exchange.price_units_read import TonnePrice, UnitReading, foreign_money, per_tonne, read_unit
from blendapp.exchange.price_words import NO_WORDS, Money, Words, read_unit_words, split_dry, split_money
from blendapp.exchange.tables import CellKind, RawTable, kind_of

if TYPE_CHECKING:
    from blendapp.exchange.price_segments import Segment


def read_row(
    raw: RawTable, row: int, segment: Segment, library: Library, names: NameFinder, today: datetime.date
) -> PriceRow:
    """The fate of one row below the headings."""
    return _Reading(raw, row, segment, library, names, today).result()


class _Reading(RowReading):
    """What one row of a price list says."""

    def __init__(
        self, raw: RawTable, row: int, segment: Segment, library: Library, names: NameFinder, today: datetime.date
    ) -> None:
        self.segment, self.table = segment, segment.table
        self.library, self.today = library, today
        super().__init__(raw, row, names, self.table.name, self.table.headings)

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
        if prices and self.is_left_out():
            return self._entry(Fate.IGNORED, _("Left out, as answered."))
        if not prices:
            return self._entry(Fate.IGNORED, self._why_empty([cell for _column, cell in cells], known))
        if not known and fold(self.name).rstrip(" :") in TOTALS:
            return self._entry(Fate.IGNORED, _("A total or an average, no price of an ingredient."))
        if not known and all(cell.wordy for _column, cell in prices):
            return self._entry(Fate.IGNORED, _("A heading or a note without a price."))
        return self._priced(prices)

    def _error(self) -> str:
        unread = (ColumnRole.NOTE, ColumnRole.TERMS, ColumnRole.OTHER)
        columns = [index for index, role in self.table.roles.items() if role not in unread]
        columns += [column.index for column in self.table.prices]
        return self.error(columns)

    def _why_empty(self, cells: list[PriceCell], known: bool) -> str:
        said = next((cell.entered for cell in cells if cell.entered), "")
        if said:
            return _("“{text}” is no price.").format(text=said)
        return _("The price is empty.") if known else _("A heading or a note without a price.")

    def _priced(self, prices: list[Priced]) -> PriceRow:
        used = [self.table.name, *(column.index for column in self.table.prices)]
        self.ask_about_place(
            [index for index in used if index is not None],
            _("The column “{name}” with names or prices is hidden in the list; say whether it counts."),
        )
        if self.table.side_by_side:
            self.questions.append(_("Two tables seem to stand side by side; put one below the other."))
        choice = choose_price(self.table, prices, self.answers)
        for column, cell in prices if len(prices) > 1 and len(choice.parts) == 1 and choice.doubt else choice.parts:
            self._ask_about_cell(column, cell)
        if choice.doubt:
            self.questions.append(choice.doubt)
            self.open += choice.open
        if choice.remark:
            self.remarks.append(choice.remark)
        match = self.match(_("The price has no name; say which ingredient it is for."))
        ingredient = match.ingredient
        parts = [self._part(column, cell, ingredient) for column, cell in choice.parts]
        found, unit = (parts[0][0], parts[0][1]) if len(parts) == 1 else (_added(parts), parts[0][1])
        first, last = self._days()
        value = found.price if found else choice.parts[0][1].value
        if ingredient is not None and value is not None and value <= 0:
            text = _("The price {price} is 0 or below; type it for the ingredient if it is meant.")
            self.confirm(Asked.SIGN, text.format(price=PLAIN.write_exact(value)))
        terms = self._terms(choice.parts, ingredient)
        self._ask_about_what_is_added(choice.parts)
        dry = None
        if found is not None and any(part[2] for part in parts):
            found, dry = self._of_dry_matter(found, ingredient)
        if any(cell.as_text for _column, cell in choice.parts):
            self.remarks.append(_("The number is stored as text."))
        old = None if ingredient is None else self.library.price_per_t(ingredient.id, self.today)
        fate = Fate.QUESTION if self.questions else Fate.ACCEPTED
        return self._entry(
            fate,
            self.reason,
            ingredient_id=None if ingredient is None else ingredient.id,
            ingredient=None if ingredient is None else ingredient.name,
            price=found.price if found else value,
            per=found.per if found else None,
            bushel_lb=found.bushel_lb if found else None,
            price_per_t=found.per_t if found else None,
            unit=unit.said or None,
            valid_from=first,
            old_price_per_t=old,
            entered=" + ".join(cell.entered for _column, cell in choice.parts),
            valid_to=last,
            terms=terms,
            dry_matter_price_per_t=dry,
            questions=tuple(dict.fromkeys(self.open)),
        )

    def _ask_about_cell(self, column: PriceColumn, cell: PriceCell) -> None:
        if cell.both_ways:
            self.ask(Asked.DECIMAL, column.heading, cell.doubt, tuple(sign.value for sign in DecimalSign))
        elif cell.doubt:
            self.questions.append(cell.doubt)

    def _part(
        self, column: PriceColumn, cell: PriceCell, ingredient: Ingredient | None
    ) -> tuple[TonnePrice | None, UnitReading, bool]:
        """A price in money of the mill per tonne, the unit of the list, and whether it is for dry matter."""
        beside = self.text(self.table.first(ColumnRole.UNIT))
        pack = self.text(self.table.first(ColumnRole.PACK))
        words = read_unit_words(bag_with_weight(beside, pack)) if beside else NO_WORDS
        unit = self._unit(column, cell, words)
        value = self._own_money(column, cell, words)
        basis, _rest = split_dry(self.text(self.table.first(ColumnRole.TERMS)))
        dry = cell.dry or column.words.dry or words.dry or basis
        dry = dry or any(note.dry for note in self.segment.notes.units)
        if value is None or unit.unit is None:
            return None, unit, dry
        found = per_tonne(value, unit.unit, ingredient)
        if found.doubt:
            self.questions.append(found.doubt)
        if found.remark:
            self.remarks.append(found.remark)
        return found, unit, dry

    def _unit(self, column: PriceColumn, cell: PriceCell, words: Words) -> UnitReading:
        beside = Words(words.money, words.unit, "/" + words.rest if words.rest else "")
        sources = [Words(cell.money, cell.unit, ""), beside, column.words]
        if not any(one.unit or one.rest.startswith("/") for one in sources):
            sources = list(self.segment.notes.units)
        reading = read_unit(sources, self.library.mill)
        if not reading.doubt:
            return reading
        answered = self.answers.unit(self.name, reading.about)
        if answered:
            try:
                unit = read_price_unit(answered, self.library.mill, cwt_is_100_lb=False)
            except (UnknownPriceUnit, AmbiguousPriceUnit):
                unit = None
            if unit is not None:
                self.remarks.append(_("The price is per {unit}, as answered.").format(unit=answered))
                return UnitReading(unit, reading.said)
        self.ask(Asked.UNIT, reading.about, reading.doubt, reading.choices)
        return reading

    def _own_money(self, column: PriceColumn, cell: PriceCell, words: Words) -> float | None:
        """The price in money of the mill, None where there is none or its currency is in doubt."""
        sources: list[Money] = [cell.money, column.words.money, words.money]
        currency = self.text(self.table.first(ColumnRole.CURRENCY))
        if currency:
            money, _rest = split_money(currency.upper() if len(currency) == 3 else currency)
            sources.append(money)
            if money.currencies is None:
                self.questions.append(_("“{text}” is not known as a currency.").format(text=currency))
        if all(money.currencies is None for money in sources):
            sources += [note.money for note in self.segment.notes.units]
        value, own = cell.value, self.library.mill.currency
        if any(money.cents for money in sources):
            answer = self.answers.find(Asked.CENTS, "")
            if answer is None or answer.answer != TAKE:
                text = _("The price is in hundredths of {own}; give it in {own}.").format(own=own)
                self.ask(Asked.CENTS, "", text, (TAKE,))
                value = None
            elif value is not None:
                value = value / 100
                self.remarks.append(_("Hundredths were turned into whole ones, as answered."))
        theirs = foreign_money(sources, own)
        return self._exchanged(value, theirs) if theirs else value

    def _exchanged(self, value: float | None, theirs: str) -> float | None:
        own = self.library.mill.currency
        answer = self.answers.find(Asked.RATE, theirs)
        if answer is not None and answer.rate is not None and answer.rate > 0 and answer.given is not None:
            text = _("Converted at {rate} {own} for one {theirs}, the rate of {day}.")
            self.remarks.append(text.format(
                rate=PLAIN.write_exact(answer.rate), own=own, theirs=theirs, day=answer.given.isoformat()
            ))
            return None if value is None else value * answer.rate
        text = _("The price is in {theirs} and the mill reckons in {own}; give it in {own}, or a rate and its day.")
        text = text.format(theirs=theirs, own=own)
        last = self.answers.last_rate(theirs)
        if last is not None and last.rate is not None and last.given is not None:
            text += " " + _("The rate of {day} was {rate}.").format(
                day=last.given.isoformat(), rate=PLAIN.write_exact(last.rate)
            )
        self.ask(Asked.RATE, theirs, text)
        return None

    def _of_dry_matter(self, found: TonnePrice, ingredient: Ingredient | None) -> tuple[TonnePrice, float | None]:
        """A price for dry matter as one as fed, and the price for dry matter per tonne."""
        fraction = None if ingredient is None else ingredient.dry_matter_fraction
        if fraction is None or found.per_t is None:
            if ingredient is not None and found.per_t is not None:
                text = _("The price is for dry matter, and the dry matter of “{name}” is not known; enter it.")
                self.questions.append(text.format(name=ingredient.name))
            return replace(found, per_t=None), found.per_t
        as_fed = found.per_t * fraction
        text = _("{dry} per t of dry matter is {as_fed} per t as fed at {percent} % of dry matter.")
        self.remarks.append(text.format(
            dry=f"{found.per_t:.2f}", as_fed=f"{as_fed:.2f}", percent=f"{fraction * 100:g}"
        ))
        return replace(found, price=found.price * fraction, per_t=as_fed), found.per_t

    def _terms(self, parts: tuple[Priced, ...], ingredient: Ingredient | None) -> Terms | None:
        """Ex works or delivered; where the price in force is the other one, that is asked about."""
        beside = self.text(self.table.first(ColumnRole.TERMS))
        found = read_terms(beside) or (Terms.DELIVERED if len(parts) > 1 else read_terms(parts[0][0].heading))
        if ingredient is None or found is None:
            return found
        quote = self.library.quote_in_force(ingredient.id, self.today)
        if quote is not None and quote.terms is not None and quote.terms is not found:
            text = _("The price is {new} and the one in force {old}; say whether it counts.")
            self.confirm(Asked.TERMS, text.format(new=_(str(found)), old=_(str(quote.terms))))
        return found

    def _ask_about_what_is_added(self, parts: tuple[Priced, ...]) -> None:
        """A price that is said to be without freight, or a discount or surcharge beside it, is not the whole price."""
        texts = [self.text(self.table.first(ColumnRole.TERMS)), self.segment.notes.without_freight]
        if len(parts) == 1:
            texts.append(parts[0][0].heading)
        found = next((text for text in texts if WITHOUT_FREIGHT.search(text)), "") if len(parts) == 1 else ""
        if found:
            said = _("“{text}”: freight comes on top; give the price with it, or say that this one is to be taken.")
            self._take_as_it_is(found, said.format(text=found))
        index = self.table.first(ColumnRole.ADJUSTMENT)
        value = None if index is None else self.raw.cell(self.row, index)
        if index is not None and kind_of(value) is not CellKind.BLANK and value != 0:
            heading = self.table.headings[index]
            said = _("“{name}” changes the price; give the price that holds, or say that this one is to be taken.")
            self._take_as_it_is(heading, said.format(name=heading))

    def _take_as_it_is(self, about: str, text: str) -> None:
        answer = self.answers.find(Asked.PRICE, about)
        if answer is None or answer.answer != TAKE:
            self.ask(Asked.PRICE, about, text, (TAKE,))

    def _days(self) -> tuple[datetime.date | None, datetime.date | None]:
        first = self._date(ColumnRole.VALID_FROM, self.segment.notes.valid_from)
        last = self._date(ColumnRole.VALID_TO, self.segment.notes.valid_to)
        if first is not None and last is not None and last < first:
            text = _("The price ends on {last}, before it begins on {first}; say which days are meant.")
            self.questions.append(text.format(last=last.isoformat(), first=first.isoformat()))
        elif last is not None and last < self.today:
            text = _("The price expired on {day}; ask for a new one.")
            self.confirm(Asked.EXPIRED, text.format(day=last.isoformat()))
        return first, last

    def _date(self, role: ColumnRole, noted: str) -> datetime.date | None:
        """The day in a column, or else in a note over the whole table."""
        index = self.table.first(role)
        if index is None or kind_of(self.raw.cell(self.row, index)) is CellKind.BLANK:
            return self.read_date(noted, noted, decide_date_order([noted])) if noted else None
        return self.date(index, self.segment.dates.get(index))


def _added(parts: list[tuple[TonnePrice | None, UnitReading, bool]]) -> TonnePrice | None:
    """A base price and its freight as one; per tonne where their units differ."""
    prices = [part[0] for part in parts]
    first = prices[0]
    if first is None or any(one is None or one.per_t is None for one in prices):
        return None
    known = [one for one in prices if one is not None and one.per_t is not None]
    if len({(one.per, one.bushel_lb) for one in known}) == 1:
        whole = sum(one.price for one in known)
        return replace(first, price=whole, per_t=sum(one.per_t for one in known if one.per_t is not None))
    per_t = sum(one.per_t for one in known if one.per_t is not None)
    return TonnePrice(per_t, "t", None, per_t)
