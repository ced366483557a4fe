"""One row of a list of analyses: one sample, what was measured in it, and its fate."""

from __future__ import annotations

from blendapp.domain import checks, units
from blendapp.domain.composition_rows import CompositionRow, ReadValue
from blendapp.domain.ingredients import Basis, Ingredient, Value
from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT, ColumnRole, Fate
from blendapp.domain.mills import Asked
from blendapp.domain.notation import PLAIN
from blendapp.domain.nutrients import DRY_MATTER, MOISTURE, Nutrient
from blendapp.domain.wording import _
from blendapp.exchange.composition_cells import ResultCell, read_result
from blendapp.exchange.composition_columns import ValueColumn, plain_heading
from blendapp.exchange.composition_segments import Segment
from blendapp.exchange.composition_words import read_basis, read_unit
from blendapp.exchange.list_answers import LARGEST_USUAL_CHANGE
from blendapp.exchange.list_cells import first_text, shortened
from blendapp.exchange.list_checks import leaps, near_power
from blendapp.exchange.list_names import Match, NameFinder
from blendapp.exchange.list_numbers import DecimalSign, split_number
from blendapp.exchange.list_row import TOTALS, RowReading
from blendapp.exchange.tables import RawTable

# Rows about several samples, besides totals.
_ABOUT_SEVERAL = TOTALS | {
    "min", "max", "minimum", "maximum", "median", "range", "sd", "st dev", "stdev", "std", "std dev",
    "standard deviation", "cv", "cv %", "n", "count", "number of samples", "specification", "spec", "target", "limit",
    "limits", "guarantee", "tolerance", "method", "detection limit", "lod", "loq", "uncertainty",
}
_PERCENT_OF_WHOLE = ("%", "g/kg")
# Dry matter and moisture of one sample add up to 100 within what rounding and two methods leave.
_APART = 0.5


def read_row(raw: RawTable, row: int, segment: Segment, library: Library, names: NameFinder) -> CompositionRow:
    """The fate of one row below the headings."""
    return _Reading(raw, row, segment, library, names).result()


class _Reading(RowReading):
    """What one row of a list of analyses says. refused: sentences for which it cannot be taken at all."""

    def __init__(self, raw: RawTable, row: int, segment: Segment, library: Library, names: NameFinder) -> None:
        self.segment, self.table, self.library = segment, segment.table, library
        super().__init__(raw, row, names, self.table.name, self.table.headings)
        if self.table.name is None:
            self.name = segment.notes.name
        elif not self.name:
            self.name = self._name_of_the_rows_above()
        self.refused: list[str] = []
        self.values: list[ReadValue] = []
        samples = [index for index, role in sorted(self.table.roles.items()) if role is ColumnRole.SAMPLE]
        self.sample_columns = samples
        self.sample = " / ".join(dict.fromkeys(text for index in samples if (text := self.text(index))))

    def _name_of_the_rows_above(self) -> str:
        """The name in a cell that is merged over this row and some above it; "" where there is none."""
        for merged in self.raw.merged:
            over = merged.first_column <= (self.table.name or 0) <= merged.last_column
            if over and merged.first_row < self.row <= merged.last_row:
                value = self.raw.cell(merged.first_row, merged.first_column)
                return " ".join(value.split()) if isinstance(value, str) else ""
        return ""

    def _entry(self, fate: Fate, reason: str, match: Match | None = None) -> CompositionRow:
        found = None if match is None else match.ingredient
        name = self.name or (first_text(self.raw, self.row) if fate is Fate.IGNORED else "")
        return CompositionRow(
            self.raw.sheet, self.row + 1, fate, shortened(reason), name, None if found is None else found.id,
            None if found is None else found.name, tuple(dict.fromkeys(self.open)), self.sample,
            None, tuple(self.values),
        )

    def result(self) -> CompositionRow:
        columns = [column for column in self.table.values if not column.match.left_out]
        day, basis = self.table.first(ColumnRole.SAMPLED), self.table.first(ColumnRole.BASIS)
        used = [self.table.name, day, basis, *self.sample_columns, *(column.index for column in columns)]
        places = [index for index in used if index is not None]
        if error := self.error(places):
            return self._entry(Fate.REFUSED, error)
        read = [(one, read_result(self.raw, self.row, one.index, self.segment.signs.get(one.index))) for one in columns]
        filled = [(column, cell) for column, cell in read if not cell.is_empty]
        open_ = [f"“{column.heading}” ({cell.left_open})" for column, cell in read if cell.left_open]
        known = bool(self.name) and self.names.is_known(self.name)
        if (filled or open_) and self.is_left_out():
            return self._entry(Fate.IGNORED, _("Left out, as answered."))
        if open_:
            text = _("Left unknown, which is not 0: {names}.")
            self.remarks.append(text.format(names=", ".join(open_)))
        if not filled:
            return self._entry(Fate.IGNORED, self._why_empty(known, bool(open_)))
        if self._is_about_several(known):
            return self._entry(Fate.IGNORED, _("A mean, a limit or a method, no sample."))
        if not known and all(cell.wordy for _column, cell in filled):
            return self._entry(Fate.IGNORED, _("A heading or a note without a value."))
        return self._sampled(filled, places)

    def _why_empty(self, known: bool, says: bool) -> str:
        if says:
            return self.reason
        return _("The row holds no value.") if known else _("A heading or a note without a value.")

    def _is_about_several(self, known: bool) -> bool:
        texts = [self.text(index) for index in self.sample_columns]
        if not known:
            texts += [self.name, first_text(self.raw, self.row)]
        return any(plain_heading(text) in _ABOUT_SEVERAL for text in texts)

    def _ask_about_count(self) -> None:
        """A row that stands for several samples is a mean, and none."""
        found = split_number(self.text(self.table.count))
        count = None if found is None else found[0].value(DecimalSign.POINT)
        if count is not None and count > 1:
            text = _("The row stands for {count} samples; say whether it counts as one.")
            self.confirm(Asked.CHANGE, text.format(count=f"{count:g}"))

    def _sampled(self, filled: list[tuple[ValueColumn, ResultCell]], places: list[int]) -> CompositionRow:
        self.ask_about_place(
            places, _("The column “{name}” with names or values is hidden in the list; say whether it counts.")
        )
        self._ask_about_count()
        match = self.match(_("The sample has no name; say which ingredient it is of."))
        day = self.table.first(ColumnRole.SAMPLED)
        sampled = None if day is None else self.date(day, self.segment.day_order)
        for column, cell in filled:
            if column.is_built_in:
                self._dry_matter(column, cell, match.ingredient)
        self._one_dry_matter()
        for column, cell in filled:
            if not column.is_built_in and not self._plain_result(column, cell, match.ingredient):
                self._result(column, cell, match.ingredient)
        self._needs_dry_matter(match.ingredient)
        if any(cell.as_text for _column, cell in filled):
            self.remarks.append(_("Numbers are stored as text."))
        fate = Fate.REFUSED if self.refused else Fate.QUESTION if self.questions else Fate.ACCEPTED
        if self.refused:
            self.open = []
        reason = " ".join(dict.fromkeys(self.refused)) if self.refused else self.reason
        if not self.values and fate is Fate.ACCEPTED:
            return self._entry(Fate.IGNORED, _("The row holds no value that is read."), match)
        found = self._entry(fate, reason, match)
        return CompositionRow(**{**vars(found), "sampled": sampled})

    # -- dry matter

    def _dry_matter(self, column: ValueColumn, cell: ResultCell, ingredient: Ingredient | None) -> None:
        """Dry matter in %, of the sample as fed; from moisture where that is what was measured."""
        found = self._amount(column, cell, DRY_MATTER)
        if found is None:
            return
        percent = float(f"{units.convert(*found, '%'):.12g}")
        if not 0 <= percent <= 100:
            text = _("{name} of {value} % cannot be; correct the list.")
            self.refused.append(text.format(name=column.match.built_in, value=PLAIN.write_short(percent)))
            return
        if column.match.built_in == MOISTURE:
            percent = float(f"{100 - percent:.12g}")
        old = None if ingredient is None else ingredient.dry_matter_percent
        self._leap(DRY_MATTER, percent, old, "%")
        self.values.append(ReadValue(None, DRY_MATTER, percent, "%", Basis.AS_FED, cell.entered, old))

    def _one_dry_matter(self) -> None:
        if len(self.values) > 1:
            amounts = [one.amount for one in self.values]
            if max(amounts) - min(amounts) > _APART:
                text = _("The row gives the dry matter as {first} % and as {second} %; correct the list.")
                self.questions.append(text.format(
                    first=PLAIN.write_short(amounts[0]), second=PLAIN.write_short(amounts[1])
                ))
            self.values = self.values[:1]

    def _needs_dry_matter(self, ingredient: Ingredient | None) -> None:
        """A value on dry matter means nothing as fed while the dry matter is unknown."""
        dry = any(one.basis is Basis.DRY_MATTER for one in self.values)
        own = any(one.nutrient_id is None for one in self.values)
        if dry and not own and ingredient is not None and ingredient.dry_matter_percent is None:
            text = _("The values are on dry matter, and the dry matter of “{name}” is not known; enter it.")
            self.questions.append(text.format(name=ingredient.name))

    # -- nutrients

    def _result(self, column: ValueColumn, cell: ResultCell, ingredient: Ingredient | None) -> None:
        nutrient = column.match.nutrient
        if nutrient is None:
            self.ask(Asked.NUTRIENT, column.heading, column.match.reason, column.match.choices)
            return
        basis = self._basis(column, cell)
        if not self._counts(column, basis):
            return
        found = self._amount(column, cell, nutrient)
        if found is None or basis is None:
            return
        amount, unit = found
        value = Value(0, 0 if ingredient is None else ingredient.id, nutrient.id, amount, unit, basis)
        faults = checks.faults(value, self.library)
        if faults:
            self.refused += [text for _field, text in faults]
            return
        if self._is_above_the_whole(amount, unit, nutrient, basis, ingredient):
            text = _("{nutrient} of {value} {unit} is more than the whole; check the unit.")
            said = text.format(nutrient=nutrient.name, value=PLAIN.write_short(amount), unit=unit)
            self.confirm(Asked.CHANGE, said)
        self._take(nutrient, amount, unit, basis, cell, ingredient)

    def _is_above_the_whole(
        self, amount: float, unit: str, nutrient: Nutrient, basis: Basis, ingredient: Ingredient | None
    ) -> bool:
        """Whether an amount is more than 100 %, and the mill's own is not (urea has 281 % of protein, as reckoned)."""
        if units.concentration(unit).family is not units.Family.MASS or units.convert(amount, unit, "%") <= 100:
            return False
        old = None if ingredient is None else self.segment.old(self.library, ingredient, nutrient, unit, basis)
        return old is None or units.convert(old, unit, "%") <= 100

    def _take(
        self, nutrient: Nutrient, amount: float, unit: str, basis: Basis, cell: ResultCell,
        ingredient: Ingredient | None,
    ) -> None:
        old = None if ingredient is None else self.segment.old(self.library, ingredient, nutrient, unit, basis)
        self._leap(nutrient.name, amount, old, unit)
        self.values.append(ReadValue(nutrient.id, nutrient.name, amount, unit, basis, cell.entered, old))

    def _plain_result(self, column: ValueColumn, cell: ResultCell, ingredient: Ingredient | None) -> bool:
        """Takes an amount of a column that says all of them; whether it could."""
        plain = self.segment.plain(column)
        if plain is None or cell.amount is None or cell.unit or cell.basis is not None:
            return False
        amount = cell.amount if plain.factor == 1 else float(f"{cell.amount * plain.factor:.12g}")
        if not plain.least <= amount <= plain.greatest:
            return False
        self._take(plain.nutrient, amount, plain.unit, plain.basis, cell, ingredient)
        return True

    def _counts(self, column: ValueColumn, basis: Basis | None) -> bool:
        """Whether a column is the one to read among those of its nutrient; asks where that is open."""
        twins = self.table.twins_of(column)
        if len(twins) < 2:
            return True
        bases = [one.words.basis for one in twins]
        if None not in bases and len(set(bases)) == len(bases):
            answer = self.answers.find(Asked.BASIS, "")
            if answer is not None and answer.answer in [str(one) for one in bases]:
                return str(basis) == answer.answer
            text = _("The list gives values as fed and on dry matter; say which are to be taken.")
            self.ask(Asked.BASIS, "", text, tuple(map(str, Basis)))
            return False
        names = _(" and ").join(f"“{one.heading}”" for one in twins)
        text = _("{names} are all {nutrient}; leave out those that do not hold.")
        said = text.format(names=names, nutrient=column.match.name)
        self.ask(Asked.NUTRIENT, column.heading, said, (LEAVE_OUT, column.match.name))
        return False

    def _amount(self, column: ValueColumn, cell: ResultCell, of: Nutrient | str) -> tuple[float, str] | None:
        """The amount in a unit of the table; None where it or its unit is in doubt."""
        unit = self._unit(column, cell, of)
        if cell.both_ways:
            self.ask(Asked.DECIMAL, column.heading, cell.doubt, tuple(sign.value for sign in DecimalSign))
        elif cell.doubt:
            self.questions.append(cell.doubt)
        if cell.amount is None or unit is None:
            return None
        name, factor = unit
        return (cell.amount if factor == 1 else float(f"{cell.amount * factor:.12g}")), name

    def _unit(self, column: ValueColumn, cell: ResultCell, of: Nutrient | str) -> tuple[str, float] | None:
        name, own = (of, "%") if isinstance(of, str) else (of.name, of.unit)
        family = units.concentration(own).family
        said = (column.words.unit, column.words.factor) if column.words.unit else None
        beside = (cell.unit, cell.factor) if cell.unit else None
        if said and beside and said != beside:
            text = _("“{entered}” stands under “{heading}”; say in which unit it is.")
            self.questions.append(text.format(entered=cell.entered, heading=column.heading))
            return None
        found = said or beside
        if found is None and not column.words.says_unit:
            noted = self.segment.notes.units
            # "All values in %" is not said of zinc, which the mill keeps in mg/kg.
            fits = len(noted) == 1 and (noted[0][0] in _PERCENT_OF_WHOLE) == (own in _PERCENT_OF_WHOLE)
            found = noted[0] if fits and units.concentration(noted[0][0]).family is family else None
        if found is not None and units.concentration(found[0]).family is family:
            return found
        answered = self._answered_unit(column.heading)
        silent = found is None and not column.words.says_unit and own in _PERCENT_OF_WHOLE
        of_many = silent and len(self._without_unit()) > 1
        if answered is None and of_many:
            answered = self._answered_unit("")
        if answered is not None and units.concentration(answered[0]).family is family:
            return answered
        if found is not None:
            text = _("“{heading}” is in {unit}, which does not measure {nutrient}; say in which unit it is.")
            said_text = text.format(heading=column.heading, unit=found[0], nutrient=name)
        elif of_many:
            names = ", ".join(f"“{one.heading}”" for one in self._without_unit())
            text = _("{names} do not say their unit; say which holds for all of them.").format(names=names)
            self.ask(Asked.CONCENTRATION, "", text, _PERCENT_OF_WHOLE)
            return None
        elif column.words.says_unit:
            said_text = _("“{heading}” names two units; say which holds.").format(heading=column.heading)
        else:
            said_text = _("“{heading}” does not say its unit; say which.").format(heading=column.heading)
        known = _PERCENT_OF_WHOLE if isinstance(of, str) else _names_of(family)
        self.ask(Asked.CONCENTRATION, column.heading, said_text, known)
        return None

    def _answered_unit(self, about: str) -> tuple[str, float] | None:
        answer = self.answers.find(Asked.CONCENTRATION, about)
        return None if answer is None else read_unit(answer.answer)

    def _without_unit(self) -> list[ValueColumn]:
        """The columns without a unit that are kept in parts of the whole: one answer may hold for all."""
        return [
            one for one in self.table.values
            if not one.words.says_unit and one.match.name
            and (one.is_built_in or (one.match.nutrient is not None and one.match.nutrient.unit in _PERCENT_OF_WHOLE))
        ]

    def _basis(self, column: ValueColumn, cell: ResultCell) -> Basis | None:
        """Per kg of what: as the cell, the heading, the row or a note says, else as answered; never guessed."""
        if column.words.stated:
            text = _("“{heading}” is for a stated dry matter; give the values as fed or on dry matter.")
            self.questions.append(text.format(heading=column.heading))
            return None
        index = self.table.first(ColumnRole.BASIS)
        beside = "" if index is None else self.text(index)
        of_row = read_basis(beside) or (read_basis(f"{beside} basis") if beside else None)
        if beside and of_row is None:
            self.questions.append(_("“{text}” is no basis; say as fed or dry matter.").format(text=beside))
            return None
        said = {one for one in (column.words.basis, cell.basis, of_row) if one is not None}
        if len(said) > 1:
            text = _("“{heading}” and the row name two bases; say which holds.")
            self.questions.append(text.format(heading=column.heading))
            return None
        if said:
            return said.pop()
        if self.segment.notes.basis is not None:
            return self.segment.notes.basis
        for about in (column.heading, ""):
            answer = self.answers.find(Asked.BASIS, about)
            if answer is not None and answer.answer in [str(one) for one in Basis]:
                return Basis(answer.answer)
        text = _("The list does not say whether its values are as fed or on dry matter; say which.")
        self.ask(Asked.BASIS, "", text, tuple(map(str, Basis)))
        return None

    def _leap(self, name: str, new: float, old: float | None, unit: str) -> None:
        """Asks where a value differs from the one in use by more than is usual."""
        if not leaps(old, new, LARGEST_USUAL_CHANGE):
            return
        assert old is not None
        figures = {
            "name": name, "unit": unit, "new": PLAIN.write_short(new, 4), "old": PLAIN.write_short(old, 4)
        }
        power = near_power(old, new)
        if power:
            text = _("{name} of {new} {unit} is about {times} times the {old} in use; check the unit.") if power > 0 \
                else _("{name} of {new} {unit} is about a {times}th of the {old} in use; check the unit.")
            text = text.format(times=f"{10 ** abs(power):g}", **figures)
        else:
            text = _("{name} moves from {old} to {new} {unit}; confirm it.").format(**figures)
        self.confirm(Asked.CHANGE, text)


def _names_of(family: units.Family) -> tuple[str, ...]:
    return tuple(name for name, unit in units.CONCENTRATION.items() if unit.family is family)

