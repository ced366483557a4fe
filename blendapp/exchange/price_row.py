"""One row of a price list: what it says, and its fate."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from blendapp.domain.ingredients import Basis, Ingredient
from blendapp.domain.library import Library
from blendapp.domain.list_rows import ADD, LEAVE_OUT, TAKE, ColumnRole, Fate
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.notation import PLAIN
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.quotes import Terms
from blendapp.domain.wording import _
from blendapp.exchange.list_cells import shortened
from blendapp.exchange.list_names import NameFinder
from blendapp.exchange.list_numbers import DecimalSign
from blendapp.exchange.list_row import TOTALS, RowReading
from blendapp.exchange.price_cells import MOST_PAID, PriceCell, read_merged_price
from blendapp.exchange.price_choice import Priced, choose_price
from blendapp.exchange.price_columns import PriceColumn
from blendapp.exchange.price_days import read_days
from blendapp.exchange.price_dry import dry_fraction_of_row
from blendapp.exchange.price_extras import on_top, sum_of, with_added
from blendapp.exchange.price_money import own_money
from blendapp.exchange.price_remarks import mark_of, read_remark
from blendapp.exchange.price_sections import under
from blendapp.exchange.price_terms import read_terms
from blendapp.exchange.price_units import AmbiguousPriceUnit, UnknownPriceUnit, bag_with_weight, read_price_unit
from blendapp.exchange.price_units_read import TonnePrice, UnitReading, bushel_said, per_tonne, read_unit
from blendapp.exchange.price_words import NO_WORDS, Words, read_unit_words, split_dry
from blendapp.exchange.tables import CellKind, RawTable, kind_of

if TYPE_CHECKING:
    from blendapp.exchange.price_segments import Segment


# What stands in these columns changes what a price means.
_TELLING = frozenset({
    ColumnRole.UNIT, ColumnRole.CURRENCY, ColumnRole.VALID_FROM, ColumnRole.VALID_TO, ColumnRole.PACK, ColumnRole.TERMS,
    ColumnRole.ADJUSTMENT, ColumnRole.SITE, ColumnRole.SUPPLIER,
})


def read_row(
    raw: RawTable, row: int, segment: Segment, library: Library, names: NameFinder, today: datetime.date
) -> PriceRow:
    """The fate of one row below the headings."""
    return _Reading(raw, row, segment, library, names, today).result()


@dataclass(frozen=True)
class _Part:
    """found: None where the price cannot be reckoned. unit: of the list. dry: the price is for dry matter.

    foreign: the other currency in which the price still stands. cents: the price is in hundredths.
    """

    found: TonnePrice | None
    unit: UnitReading
    dry: bool
    foreign: str = ""
    cents: bool = False


class _Reading(RowReading):
    """What one row of a price list says."""

    def __init__(
        self, raw: RawTable, row: int, segment: Segment, library: Library, names: NameFinder, today: datetime.date
    ) -> None:
        self.segment, self.table = segment, segment.table
        self.library, self.today = library, today
        self.section = segment.sections.over(row)
        super().__init__(raw, row, names, self.table.name, self.table.headings)

    def _entry(self, fate: Fate, reason: str, **known: object) -> PriceRow:
        return PriceRow(self.raw.sheet, self.row + 1, fate, shortened(reason), self.name, **known)  # type: ignore[arg-type]

    def result(self) -> PriceRow:
        if error := self._error():
            return self._entry(Fate.REFUSED, error)
        cells = [
            (column, read_merged_price(
                self.raw, self.row, column, self.segment.signs.get(column.index), self.table.name
            ))
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
        self.ask_about_place(
            self._used(), _("The column “{name}”, on which prices hang, is hidden in the list; say whether it counts.")
        )
        parts = self._parts(prices)
        match = self.match(_("The price has no name; say which ingredient it is for."))
        ingredient = match.ingredient
        read = [self._part(column, cell, ingredient) for column, cell in parts]
        unit = read[0].unit
        found = read[0].found if len(read) == 1 else sum_of([part.found for part in read])
        days = read_days(self, self.segment, self.today, self._remark(parts, read[0]))
        if days.left_out:
            return self._entry(Fate.IGNORED, _("Left out, as answered."))
        value = found.price if found else parts[0][1].value
        if ingredient is not None and value is not None and value <= 0:
            text = _("The price {price} is 0 or below; type it for the ingredient if it is meant.")
            self.confirm(Asked.SIGN, text.format(price=PLAIN.write_exact(value)))
        terms = self._terms(parts, ingredient)
        added = self._what_is_added(parts)
        dry = None
        if found is not None and any(part.dry for part in read):
            found, dry = self._of_dry_matter(found, ingredient)
        if found is not None and added is not None:
            found, terms = with_added(found, added), Terms.DELIVERED
        if any(cell.as_text for _column, cell in parts):
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
            valid_from=days.first,
            old_price_per_t=old,
            entered=" + ".join(cell.entered for _column, cell in parts),
            valid_to=days.last,
            terms=terms,
            dry_matter_price_per_t=dry,
            questions=tuple(dict.fromkeys(self.open)),
            currency=read[0].foreign,
        )

    def _used(self) -> list[int]:
        """The columns that the row fills and its price hangs on."""
        said = [index for index, role in self.table.roles.items() if role in _TELLING]
        used = [self.table.name, *(column.index for column in self.table.prices), *said]
        filled = (index for index in dict.fromkeys(used) if index is not None)
        return [index for index in filled if kind_of(self.raw.cell(self.row, index)) is not CellKind.BLANK]

    def _parts(self, prices: list[Priced]) -> tuple[Priced, ...]:
        """The price that counts, or a base price and a freight to be added, with what is to be asked about them."""
        choice = choose_price(self.table, prices, self.answers)
        answer = self._typed(Asked.AMOUNT) or self._typed(Asked.REMARK)
        if answer:
            try:
                amount = PLAIN.read(answer)
                if not abs(amount) < MOST_PAID:
                    raise ValueError(_("“{text}” is not one price.").format(text=answer))
            except ValueError as error:
                self.ask(Asked.AMOUNT, "", str(error), (LEAVE_OUT,))
                return choice.parts[:1]
            self.remarks.append(_("The price is {price}, as answered.").format(price=PLAIN.write_exact(amount)))
            column, cell = choice.parts[0]
            return ((column, replace(cell, value=amount, as_text=False)),)
        for column, cell in prices if len(prices) > 1 and len(choice.parts) == 1 and choice.doubt else choice.parts:
            self._ask_about_cell(column, cell)
        if choice.doubt:
            self.questions.append(choice.doubt)
            self.open += choice.open
        if choice.remark:
            self.remarks.append(choice.remark)
        return choice.parts

    def _typed(self, asked: Asked) -> str:
        """The price that was typed for the row in answer to a question, "" if none was."""
        answer = self.answers.of_row(asked, self.raw.sheet, self.row + 1)
        return "" if answer in (TAKE, LEAVE_OUT) else answer

    def _remark(self, parts: tuple[Priced, ...], read: _Part) -> tuple[datetime.date | None, datetime.date | None]:
        """Asks about a remark, a footnote or a comment that may say that the price is another one.

        The days from and to which it says that the price holds.
        """
        segment, used = self.segment, [column.index for column, _cell in parts]
        texts = [self.text(index) for index in segment.remark_columns]
        if segment.footnotes:
            led = [self.name, *(cell.entered for _column, cell in parts)]
            led += [self.table.headings.get(index, "") for index in used]
            texts += [segment.footnotes[mark][1] for mark in map(mark_of, led) if mark in segment.footnotes]
        if self.raw.comments:
            place = [self.table.name, *used, self.table.first(ColumnRole.UNIT)]
            texts += [self.raw.comments.get((self.row, index), "") for index in place if index is not None]
        mill = self.library.mill
        found = [(text, read_remark(text, mill)) for text in dict.fromkeys(texts) if text]
        doubtful = [text for text, one in found if one.is_in_doubt(read.unit.unit, read.dry, read.cents, mill)]
        if doubtful and not self._typed(Asked.REMARK):
            said = _("{remark} stands beside the price; say whether it counts as it is, or give the price that holds.")
            self.confirm(Asked.REMARK, said.format(remark=", ".join(f"“{text}”" for text in doubtful)))
        first = next((one.first for _text, one in found if one.first), None)
        return first, next((one.last for _text, one in found if one.last), None)

    def _ask_about_cell(self, column: PriceColumn, cell: PriceCell) -> None:
        if cell.both_ways:
            self.ask(Asked.DECIMAL, column.heading, cell.doubt, tuple(sign.value for sign in DecimalSign))
        elif cell.doubt:
            self.ask(Asked.AMOUNT, "", cell.doubt, (*filter(None, [cell.proposed]), LEAVE_OUT))

    def _part(self, column: PriceColumn, cell: PriceCell, ingredient: Ingredient | None) -> _Part:
        """One price, or one freight, in money of the mill per tonne."""
        beside = self.text(self.table.first(ColumnRole.UNIT))
        pack = self.text(self.table.first(ColumnRole.PACK))
        words = read_unit_words(bag_with_weight(beside, pack)) if beside else NO_WORDS
        head = under(self.section.words, column.words)
        unit = self._unit(column, cell, words)
        notes = self.segment.notes.units
        money = own_money(
            self, cell.value, [cell.money, head.money, words.money],
            self.text(self.table.first(ColumnRole.CURRENCY)), [note.money for note in notes],
            self.library.mill.currency,
        )
        cents = any(one.cents for one in (cell.money, head.money, words.money, *(note.money for note in notes)))
        basis, _rest = split_dry(self.text(self.table.first(ColumnRole.TERMS)))
        noted = any(note.dry for note in notes) and not (head.as_fed and not head.dry)
        dry = cell.dry or words.dry or basis or ((head.dry or noted) and not words.as_fed)
        if not words.as_fed:
            dry = self._basis(dry, head, column.words, notes)
        if money.value is None or unit.unit is None:
            return _Part(None, unit, dry, money.foreign, cents)
        name = "" if ingredient is None else ingredient.name
        answer = self.answers.find(Asked.UNIT, name) if name else None
        found = per_tonne(money.value, unit.unit, ingredient, None if answer is None else bushel_said(answer.answer))
        if found.doubt:
            self.ask(Asked.UNIT, name, found.doubt)
        if found.remark:
            self.remarks.append(found.remark)
        return _Part(found, unit, dry, cents=cents)

    def _unit(self, column: PriceColumn, cell: PriceCell, words: Words) -> UnitReading:
        beside = Words(words.money, words.unit, "/" + words.rest if words.rest else "")
        of_row, notes = [Words(cell.money, cell.unit, ""), beside], self.segment.notes.units
        section = self.section
        if section.ended:
            heads = [column.words, section.words] if _names_unit(column.words) else []
        else:
            heads = [under(section.words, column.words)]
        sources = [*of_row, *heads]
        pack = self._pack()
        if pack and not any(map(_names_unit, [*sources, *notes, section.words])):
            self.remarks.append(_("The price was read as that of {pack}.").format(pack=pack))
            reading = read_unit([Words(words.money, pack, "")], self.library.mill)
        elif not any(map(_names_unit, sources)):
            reading = read_unit([] if section.ended and section.words.unit else notes, self.library.mill)
        else:
            by_heading = not section.words.unit and not any(map(_names_unit, of_row))
            reading = read_unit(sources, self.library.mill, notes if by_heading else ())
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

    def _pack(self) -> str:
        """The mass of a pack in a column of its own, which a price without any unit is for; "" if none is told."""
        text = self.text(self.table.first(ColumnRole.PACK))
        return read_unit_words(text).unit if any(letter.isdigit() for letter in text) else ""

    def is_taken(self, asked: Asked) -> bool:
        """As RowReading; a price that was typed settles too which of its figures are struck through."""
        return super().is_taken(asked) or (asked is Asked.STRUCK and bool(self._typed(Asked.AMOUNT)))

    def _basis(self, dry: bool, head: Words, column: Words, notes: Sequence[Words]) -> bool:
        """Whether a price is for dry matter; asked where the list says a share of it beside the price."""
        section, text = self.section, ""
        about = head.at_dry or next((note.at_dry for note in notes if note.at_dry), "")
        if about and not dry:
            text = _("The list says “{words}” of the price; say whether it is for feed as fed, or for dry matter.")
            text = text.format(words=about)
        elif section.ended and section.words.dry and not column.dry:
            about = section.ended
            text = _("“{name}” stands below “{section}”; say whether the prices below it are for dry matter too.")
            text = text.format(name=about, section=section.text)
        if not text:
            return dry
        answer = self.answers.find(Asked.BASIS, about)
        if answer is not None and answer.answer in tuple(Basis):
            self.remarks.append(_("The basis was taken as answered: {basis}.").format(basis=_(answer.answer)))
            return answer.answer == Basis.DRY_MATTER
        self.ask(Asked.BASIS, about, text, tuple(one.value for one in Basis))
        return False

    def _of_dry_matter(self, found: TonnePrice, ingredient: Ingredient | None) -> tuple[TonnePrice, float | None]:
        """A price for dry matter as one as fed, and the price for dry matter per tonne."""
        listed = dry_fraction_of_row(self.raw, self.row, self.table.headings)
        of_mill = None if ingredient is None else ingredient.dry_matter_fraction
        fraction = of_mill if listed is None else listed
        if listed is not None and of_mill is not None and abs(listed - of_mill) > 1e-9:
            text = _("The list gives {listed} % of dry matter, the mill {own} %; the list's own was taken.")
            self.remarks.append(text.format(listed=f"{listed * 100:g}", own=f"{of_mill * 100:g}"))
        if fraction is None or found.per_t is None:
            if ingredient is not None and found.per_t is not None:
                answer = self.answers.find(Asked.BASIS, ingredient.name)
                if answer is not None and answer.answer == Basis.AS_FED:
                    self.remarks.append(_("The price was taken as fed, as answered."))
                    return found, None
                text = _("The price is for dry matter, and the dry matter of “{name}” is not known; enter it in the "
                         "mill, or say that the price is as fed.")
                self.ask(Asked.BASIS, ingredient.name, text.format(name=ingredient.name), (Basis.AS_FED.value,))
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

    def _what_is_added(self, parts: tuple[Priced, ...]) -> float | None:
        """A price that is said to be without freight, or a discount or surcharge beside it, is not the whole price.

        The money per tonne that was answered to be added; None for nothing.
        """
        self._ask_about_adjustment()
        if len(parts) > 1 or self._typed(Asked.AMOUNT) or self._typed(Asked.REMARK):
            return None
        beside, noted = self.text(self.table.first(ColumnRole.TERMS)), self.segment.notes.without_freight
        texts = ((beside, False), (noted, False), (parts[0][0].heading, True))
        mill = self.library.mill
        found = next((one for text, is_heading in texts if text and (one := on_top(text, mill, is_heading))), None)
        if found is None:
            return None
        if found.per_t is None:
            said = _("“{text}”: freight comes on top; give the price with it, or say that this one is to be taken.")
            self._take_as_it_is(found.text, said.format(text=found.text))
            return None
        answer = self.answers.find(Asked.PRICE, found.text)
        if answer is not None and answer.answer == ADD:
            said = _("{amount} per t was added, as answered.")
            self.remarks.append(said.format(amount=f"{found.per_t:.2f}"))
            return found.per_t
        said = _("“{text}”: {amount} per t comes on top; say whether it is to be added, or the price taken as it is.")
        self._take_as_it_is(found.text, said.format(text=found.text, amount=f"{found.per_t:.2f}"), (ADD, TAKE))
        return None

    def _ask_about_adjustment(self) -> None:
        index = self.table.first(ColumnRole.ADJUSTMENT)
        value = None if index is None else self.raw.cell(self.row, index)
        if index is not None and kind_of(value) is not CellKind.BLANK and value != 0:
            heading = self.table.headings[index]
            said = _("“{name}” changes the price; give the price that holds, or say that this one is to be taken.")
            self._take_as_it_is(heading, said.format(name=heading))

    def _take_as_it_is(self, about: str, text: str, choices: tuple[str, ...] = (TAKE,)) -> None:
        answer = self.answers.find(Asked.PRICE, about)
        if answer is None or answer.answer != TAKE:
            self.ask(Asked.PRICE, about, text, choices)


def _names_unit(words: Words) -> bool:
    return bool(words.unit) or words.rest.startswith("/")
