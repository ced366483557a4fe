"""What is remembered of a source in plain words, and a text typed over it as another answer. No Qt."""

from __future__ import annotations

import datetime
from collections.abc import Callable

from blendapp.desk.prices.asking import answer_words
from blendapp.domain.ingredients import Basis
from blendapp.domain.library import Library
from blendapp.domain.list_rows import ADD, DAY_FIRST, LEAVE_OUT, MONTH_FIRST, TAKE, Answer, ColumnRole
from blendapp.domain.mills import Asked, Synonym
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.nutrients import DRY_MATTER
from blendapp.domain.units import CONCENTRATION, CWT_MEANINGS, PRICE_PER
from blendapp.domain.wording import _

_JOIN = " | "


def source_words(one: Synonym) -> str:
    """Whose list it is remembered for."""
    return one.source or _("every list")


def question_words(one: Synonym) -> str:
    """What was asked, short, so that the answer completes it."""
    said: dict[Asked, Callable[[], str]] = {
        Asked.INGREDIENT: lambda: _("the name means"),
        Asked.UNIT: lambda: _("the unit means") if one.name else _("prices without a unit are per"),
        Asked.RATE: lambda: _("one of this money is"),
        Asked.CENTS: lambda: _("prices are in hundredths"),
        Asked.PRICE: lambda: _("the price is in") if _JOIN in one.name else _("what comes on top"),
        Asked.DECIMAL: lambda: _("the decimal sign of the column"),
        Asked.DATES: lambda: _("days of the column"),
        Asked.HIDDEN_COLUMN: lambda: _("the hidden column"),
        Asked.TABLE: lambda: _("the table of the sheet"),
        Asked.COLUMN: lambda: _("the column holds"),
        Asked.SUPPLIER: lambda: _("whose prices they are"),
        Asked.SITE: lambda: _("for which site they are"),
        Asked.NUTRIENT: lambda: _("the column is"),
        Asked.CONCENTRATION: lambda: _("the unit of the column") if one.name else _("the unit of columns without one"),
        Asked.BASIS: lambda: _("the basis of the column") if one.name else _("the basis of all columns"),
        Asked.USUAL_CHANGE: lambda: _("a price may change without a question by"),
    }
    return said.get(one.asked, lambda: str(one.asked))()


def about_words(one: Synonym) -> str:
    """The words of the list that it is about."""
    if one.asked is Asked.USUAL_CHANGE:
        return one.name or _("all other ingredients")
    return one.name


def told_answer(one: Synonym, library: Library, currency: str) -> str:
    """The answer as it stands in its cell, and as it may be typed again."""
    if one.ingredient_id is not None:
        found = library.records["ingredient"].get(one.ingredient_id)
        return "" if found is None else str(found.name)
    if one.asked is Asked.RATE:
        return _("{rate} {currency} on {day}").format(
            rate=notation().write_exact(one.rate), currency=currency,
            day="" if one.given is None else one.given.isoformat())
    if one.asked is Asked.USUAL_CHANGE:
        return _("{percent} %").format(percent=notation().write_short(float(one.answer)))
    if one.asked is Asked.INGREDIENT and one.answer == LEAVE_OUT:
        return left_out()
    return answer_words(one.asked, one.answer)


def left_out() -> str:
    """The answer that a name is nothing of the mill's."""
    return _("left out")


def offered(one: Synonym, library: Library) -> tuple[str, ...]:
    """What may be answered, in words; () where it is typed freely. A unit may be typed besides."""
    if one.asked is Asked.INGREDIENT:
        return (*(found.name for found in library.ingredients), left_out())
    if one.asked is Asked.NUTRIENT:
        names = [found.name for found in library.nutrients]
        return (*names, _(DRY_MATTER), answer_words(one.asked, LEAVE_OUT))
    if one.asked in (Asked.SUPPLIER, Asked.SITE):
        return tuple(found.name for found in library.all("supplier" if one.asked is Asked.SUPPLIER else "site"))
    if one.asked is Asked.UNIT:
        return (*PRICE_PER, *CWT_MEANINGS)
    if one.asked is Asked.CONCENTRATION:
        return tuple(name for name in CONCENTRATION if name != "/kg")
    return tuple(answer_words(one.asked, answer) for answer in _fixed(one))


def _fixed(one: Synonym) -> tuple[str, ...]:
    """The answers of which one holds, as they are kept."""
    if one.asked is Asked.PRICE:
        if _JOIN in one.name:
            return (*one.name.split(_JOIN), ADD)
        return (ADD, TAKE) if one.answer == ADD else (TAKE,)
    return {
        Asked.DECIMAL: (".", ","), Asked.DATES: (DAY_FIRST, MONTH_FIRST), Asked.BASIS: tuple(Basis),
        Asked.HIDDEN_COLUMN: (TAKE, LEAVE_OUT), Asked.COLUMN: tuple(ColumnRole), Asked.CENTS: (TAKE,),
    }.get(one.asked, ())


def is_changed_here(one: Synonym, library: Library) -> bool:
    """Whether another answer can be given without the list: where there is more than one."""
    return one.asked is not Asked.TABLE and len(_fixed(one)) != 1


def read_answer(one: Synonym, text: str, library: Library, on: datetime.date) -> Answer:
    """The answer that a typed text gives. Raises ValueError with the mend."""
    plain = " ".join(text.split())
    if not plain:
        raise ValueError(_("An answer is needed here; to be asked again, forget it with the button below."))
    if one.asked is Asked.RATE:
        return _rate(one, plain, on)
    if one.asked is Asked.USUAL_CHANGE:
        percent = notation().read(plain.removesuffix("%"))
        return Answer(one.asked, one.name, f"{percent:g}")
    if one.asked is Asked.UNIT:
        return Answer(one.asked, one.name, plain)
    choices = offered(one, library)
    chosen = next((at for at, words in enumerate(choices) if fold(words) == fold(plain)), None)
    if chosen is None:
        text = _("“{text}” is no answer here; choose one of those that are offered.")
        raise ValueError(text.format(text=plain))
    return _chosen(one, library, chosen, choices[chosen])


def _chosen(one: Synonym, library: Library, at: int, words: str) -> Answer:
    if one.asked is Asked.INGREDIENT:
        if at == len(library.ingredients):
            return Answer(one.asked, one.name, LEAVE_OUT)
        return Answer(one.asked, one.name, ingredient_id=library.ingredients[at].id)
    if one.asked is Asked.NUTRIENT:
        last = len(library.nutrients)
        return Answer(one.asked, one.name, DRY_MATTER if at == last else LEAVE_OUT if at > last else words)
    fixed = _fixed(one)
    return Answer(one.asked, one.name, fixed[at] if fixed else words)


def _rate(one: Synonym, text: str, on: datetime.date) -> Answer:
    """A rate as "1.085", "1.085 USD" or with "on 2026-03-02"; without a day it is of today."""
    head, _on, day = text.partition(_(" on "))
    number = head.split(" ")[0]
    try:
        given = datetime.date.fromisoformat(day.strip()) if day.strip() else on
    except ValueError:
        sentence = _("“{text}” is not a day; write it like {day}.")
        raise ValueError(sentence.format(text=day.strip(), day=on.isoformat())) from None
    rate = notation().read(number)
    if rate <= 0:
        raise ValueError(_("A rate is above 0: money of the mill for one of the other."))
    return Answer(one.asked, one.name, one.answer, rate=rate, given=given)
