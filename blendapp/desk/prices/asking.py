"""What a list leaves open, in the words and choices in which a person is asked, and the answers they make. No Qt."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass

from blendapp.domain.library import Library
from blendapp.domain.list_rows import (
    ADD,
    DAY_FIRST,
    LEAVE_OUT,
    MONTH_FIRST,
    TAKE,
    Answer,
    ColumnRole,
    ListReading,
    ListRow,
    Question,
)
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.wording import _, plural

# Not an answer: the mill is to have an ingredient of that name.
NEW = "new"
Key = tuple[Asked, str, str, int]
# Answers of a name or of a unit may also be typed.
NAMES, RATE, TEXT, FIGURE = "names", "rate", "text", "figure"
_TYPED = {Asked.INGREDIENT: NAMES, Asked.NAMELESS: NAMES, Asked.AMOUNT: FIGURE, Asked.REMARK: FIGURE,
          Asked.NUTRIENT: NAMES, Asked.SUPPLIER: NAMES, Asked.SITE: NAMES, Asked.UNIT: TEXT, Asked.CONCENTRATION: TEXT,
          Asked.RATE: RATE}


@dataclass(frozen=True)
class Open:
    """A question with the row where it stands first and how many further rows wait for its answer."""

    question: Question
    row: ListRow
    more: int

    @property
    def key(self) -> Key:
        one = self.question
        if one.asked.is_of_row:
            return one.asked, "", self.row.sheet, self.row.row
        return one.asked, fold(one.about), "", 0

    @property
    def typed(self) -> str:
        """How it may be answered besides its choices: NAMES, RATE, TEXT, FIGURE, or "" for not at all."""
        return _TYPED.get(self.question.asked, "")


@dataclass(frozen=True)
class Choice:
    """One answer that may be given: what is kept, its words, and quiet words beside it. is_aside: not asked now."""

    answer: str
    words: str
    remark: str = ""
    ingredient_id: int | None = None
    is_aside: bool = False


def open_questions(reading: ListReading) -> list[Open]:
    """Every open question once. What is about the list or a whole column comes before names, and names before rows."""
    first: dict[Key, Open] = {}
    for row in reading.rows:
        for question in row.questions:
            found = Open(question, row, 0)
            known = first.get(found.key)
            first[found.key] = found if known is None else Open(known.question, known.row, known.more + 1)
    return sorted(first.values(), key=_turn)


def _turn(one: Open) -> int:
    asked = one.question.asked
    return (3 if asked.is_of_row else 0 if asked in (Asked.TABLE, Asked.COLUMN, Asked.SIDE)
            else 2 if asked is Asked.INGREDIENT else 1)


def choices_of(one: Open, library: Library) -> list[Choice]:
    """What may be answered without typing, in the order in which it is numbered."""
    question = one.question
    asked = question.asked
    if asked is Asked.INGREDIENT:
        found = [_ingredient(library, name) for name in question.choices]
        new = Choice(NEW, _("A new ingredient of the mill: add “{name}”").format(name=question.about))
        return [*found, Choice(LEAVE_OUT, _("Nothing of ours: leave it out")), new]
    if asked is Asked.NUTRIENT:
        names = [name for name in question.choices if name != LEAVE_OUT]
        return [*(Choice(name, name) for name in names), Choice(LEAVE_OUT, _("Leave the column out"))]
    found = [Choice(name, answer_words(asked, name)) for name in question.choices]
    if asked in (Asked.SUPPLIER, Asked.SITE) and not found:
        records = library.all("supplier" if asked is Asked.SUPPLIER else "site")
        found = [Choice(record.name, record.name) for record in records]
    return found


def _ingredient(library: Library, name: str) -> Choice:
    record = library.named("ingredient", name)
    return Choice("", name, ingredient_id=None if record is None else record.id)


def names_of(one: Open, library: Library) -> list[Choice]:
    """Everything that may be typed where a name is asked for."""
    asked = one.question.asked
    if asked in (Asked.INGREDIENT, Asked.NAMELESS):
        return [Choice("", ingredient.name, ingredient_id=ingredient.id) for ingredient in library.ingredients]
    if asked is Asked.NUTRIENT:
        return [Choice(nutrient.name, nutrient.name, nutrient.unit) for nutrient in library.nutrients] + [
            Choice("Dry matter", _("Dry matter"), "%")]
    return choices_of(one, library)


def answer_words(asked: Asked, answer: str) -> str:
    """An answer with a fixed word, as a person says it; any other as it is."""
    said: Mapping[str, str] = {
        TAKE: _take_words(asked),
        LEAVE_OUT: _("Leave them all out") if asked is Asked.EXPIRED_LIST else _("Leave it out"),
        ADD: _("Add the freight to the price"),
        DAY_FIRST: _("The day stands first"), MONTH_FIRST: _("The month stands first"),
    }
    if asked is Asked.DECIMAL:
        said = {".": _("The point: 1.234 is a little over 1"), ",": _("The comma: 1.234 is over a thousand")}
    elif asked is Asked.COLUMN:
        said = {role.value: role.label for role in ColumnRole}
    elif asked is Asked.TABLE:
        said = {"row 0": _("It has no heading row")}
        number = answer.removeprefix("row ")
        if number.isdigit() and number != "0":
            return _("Its headings are in row {row}").format(row=number)
    elif asked is Asked.PRICE and answer not in said:
        return _("The price under “{name}” holds").format(name=answer)
    elif asked is Asked.SIDE:
        return _("Read the one in {columns} now").format(columns=answer)
    elif asked is Asked.BASIS:
        said = {"as fed": _("as fed"), "dry matter": _("of dry matter")}
    elif asked is Asked.RATE:
        return _("It is {currency}, the money of the mill").format(currency=answer)
    return said.get(answer, answer)


def _take_words(asked: Asked) -> str:
    said: dict[Asked, Callable[[], str]] = {
        Asked.HIDDEN: lambda: _("It counts: take it"), Asked.STRUCK: lambda: _("It counts: take it"),
        Asked.HIDDEN_COLUMN: lambda: _("The column counts"),
        Asked.CENTS: lambda: _("They are hundredths: divide by 100"),
        Asked.TWIN: lambda: _("This one holds"), Asked.CHANGE: lambda: _("It is right: take it"),
        Asked.EXPIRED: lambda: _("Take it all the same"), Asked.DATES: lambda: _("It counts as no day"),
        Asked.EXPIRED_LIST: lambda: _("They count: take them all the same"),
        Asked.TERMS: lambda: _("Take it with its new terms"),
        Asked.PRICE: lambda: _("Take the price as it is"), Asked.REMARK: lambda: _("Take the price as it is"),
    }
    return said.get(asked, lambda: _("Take it"))()


def make_answer(one: Open, choice: Choice) -> Answer:
    """The answer that a choice gives to a question."""
    question = one.question
    return Answer(
        question.asked, question.about, choice.answer, choice.ingredient_id, sheet=one.row.sheet, row=one.row.row
    )


def figure_choice(text: str) -> Choice:
    """A price that was typed, as an answer. Raises ValueError with a sentence."""
    figure = notation().read(text)
    return Choice(f"{figure!r}".removesuffix(".0"), text.strip())


def rate_answer(one: Open, rate_text: str, day_text: str) -> Answer:
    """The answer to a question about money of another country. Raises ValueError with a sentence."""
    rate = notation().read(rate_text)
    if rate <= 0:
        raise ValueError(_("A rate is above 0: money of the mill for one of the other."))
    return Answer(one.question.asked, one.question.about, rate=rate, given=read_day(day_text))


def read_day(text: str) -> datetime.date:
    """A day as it is typed, year first. Raises ValueError with a sentence."""
    try:
        return datetime.date.fromisoformat(text.strip())
    except ValueError:
        raise ValueError(_("“{text}” is not a day; write it like 2026-03-02.").format(text=text.strip())) from None


def row_words(row: ListRow, several_sheets: bool) -> str:
    """A row as the file counts it, with its sheet where there are several."""
    if several_sheets and row.sheet:
        return _("row {row} of “{sheet}”").format(row=row.row, sheet=row.sheet)
    return _("row {row}").format(row=row.row)


def listed_price(row: ListRow) -> str:
    """A price as the list has it: "203.50 / t"; "" for a row that is no price."""
    entered, unit = getattr(row, "entered", ""), (getattr(row, "unit", None) or "").lstrip("/ ")
    return f"{entered} / {unit}" if entered and unit else entered


def unit_words(row: ListRow) -> str:
    """The unit of the price of a row, "per t"; as the list has it where it was not understood."""
    unit = getattr(row, "per", None) or (getattr(row, "unit", None) or "").lstrip("/ ")
    return _("per {unit}").format(unit=unit) if unit else _("in the unit of the row")


def place_words(one: Open, several_sheets: bool) -> str:
    """Where a question stands: "row 7, “Wheat fd 210 / t”, and 11 more rows"."""
    row = one.row
    parts = [row_words(row, several_sheets)]
    said = " ".join(part for part in (row.source_name, listed_price(row)) if part)
    if said:
        parts.append(f"“{said}”")
    text = ", ".join(parts)
    if one.more:
        more = plural("and {count} more row", "and {count} more rows", one.more).format(count=one.more)
        text = f"{text}, {more}"
    return text


def choose_words(one: Open, count: int) -> str:
    """What is said where Enter is pressed and nothing was chosen. count: of the choices in view."""
    if one.typed == FIGURE:
        return _("Type the whole price, or choose with the arrows; Enter alone answers nothing.")
    if not count:
        return _("Type the answer first; Enter alone answers nothing.")
    if count == 1:
        return _("Press 1 to answer so; Enter alone answers nothing.")
    if count == 2:
        return _("Choose 1 or 2; Enter alone answers nothing.")
    return _("Choose 1 to {count}, or with the arrows; Enter alone answers nothing.").format(count=min(count, 9))


def kept_words(asked: Asked, source: str, unit: str = "") -> str:
    """Whether an answer will be remembered, and for whom. unit: of the price of its row, "per t"."""
    if asked is Asked.RATE:
        return _("Holds for the lists of {source} on that day; another day it is proposed and asked again."
                 ).format(source=source)
    if asked in (Asked.AMOUNT, Asked.REMARK):
        return _("The price that you type replaces all that the row says: a freight or other sum beside it is not "
                 "added. Give the price {unit} with all that comes on top. Holds for this row of this list alone."
                 ).format(unit=unit)
    if asked.is_remembered:
        return _("Remembered for {source}: its next list is not asked.").format(source=source)
    if not asked.is_of_row:
        return _("Holds for this list alone.")
    return _("Holds for this row of this list alone.")


def said_words(answer: Answer, library: Library) -> str:
    """What was answered, in a line: "“Wheat fd”: Feed wheat"."""
    said = answer_words(answer.asked, answer.answer)
    if answer.ingredient_id is not None and answer.ingredient_id in library.records["ingredient"]:
        said = library.ingredient(answer.ingredient_id).name
    elif answer.asked is Asked.INGREDIENT and answer.answer == LEAVE_OUT:
        said = _("left out")
    elif answer.rate is not None:
        said = _("{rate} on {day}").format(
            rate=notation().write_exact(answer.rate), day="" if answer.given is None else answer.given.isoformat())
    about = f"“{answer.about}”" if answer.about else (
        _("row {row}").format(row=answer.row) if answer.asked.is_of_row else "")
    if answer.asked in (Asked.SUPPLIER, Asked.SITE):
        about = _("supplier") if answer.asked is Asked.SUPPLIER else _("site")
        said = said or _("none said")
    return f"{about}: {said}" if about else said


def best_names(names: Sequence[Choice], typed: str, most: int = 60) -> list[Choice]:
    """The names that fit what is typed, the best first."""
    from blendapp.desk.finder.search import rank

    ranked = [(rank(one.words, typed), at, one) for at, one in enumerate(names)]
    return [one for _fit, _at, one in sorted((fit, at, one) for fit, at, one in ranked if fit is not None)][:most]
