"""What lists left open and a person answered: remembered for the source, seen, edited and forgotten."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import replace

from blendapp.domain.list_rows import LEAVE_OUT, TAKE, Answer, Fate, ListReading, source_of
from blendapp.domain.mills import Asked, Synonym
from blendapp.domain.names import fold
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change, added, removed
from blendapp.domain.wording import _
from blendapp.services.mill import Edit, Mill


def memory_changes(mill: Mill, reading: ListReading) -> list[Change]:
    """The changes that remember the answers of a reading for its source; an earlier answer gives way."""
    answers = [one for one in reading.answers if one.asked.is_remembered]
    if isinstance(reading, PriceListReading):
        answers += _twins_left_out(reading)
    known = {
        (one.asked, fold(one.name)): one
        for one in mill.library.all("synonym") if source_of(one.source) == source_of(reading.source)
    }
    found: dict[tuple[Asked, str], Change] = {}
    for answer in answers:
        key = (answer.asked, fold(answer.about))
        old = known.get(key)
        new = Synonym(
            mill.new_id("synonym") if old is None else old.id, reading.source if old is None else old.source,
            answer.about, answer.ingredient_id, "", answer.asked, answer.answer, answer.rate, answer.given,
        )
        found[key] = Change(old, new)
    return list(found.values())


def _twins_left_out(reading: PriceListReading) -> list[Answer]:
    """Where one of several names of an ingredient was said to hold: the other names are left out next time too."""
    rows = {(row.sheet, row.row): row for row in reading.rows}
    found = []
    for answer in reading.answers:
        held = rows.get((answer.sheet, answer.row))
        if answer.asked is not Asked.TWIN or answer.answer != TAKE or held is None:
            continue
        for row in reading.rows:
            others = row.ingredient_id == held.ingredient_id and row.fate is Fate.IGNORED
            if others and row.source_name and fold(row.source_name) != fold(held.source_name):
                found.append(Answer(Asked.INGREDIENT, row.source_name, LEAVE_OUT))
    return found


def remembered(mill: Mill, source: str = "") -> list[Synonym]:
    """What is remembered, of one source or of all, by source and then by what was asked."""
    found: list[Synonym] = mill.library.all("synonym")
    wanted = source_of(source) if source else ""
    return sorted(
        (one for one in found if not wanted or source_of(one.source) == wanted),
        key=lambda one: (fold(one.source), list(Asked).index(one.asked), fold(one.name)),
    )


def answer_again(mill: Mill, synonym_id: int, answer: Answer) -> Edit:
    """Change what is remembered; the source and what was asked about stay. Raises Refused where it is forgotten."""
    old = _known(mill, synonym_id)
    new = replace(
        old, ingredient_id=answer.ingredient_id, answer=answer.answer, rate=answer.rate, given=answer.given
    )
    return mill.apply(_("Answer for {source} changed").format(source=old.source), [Change(old, new)])


def forget(mill: Mill, synonym_ids: Iterable[int]) -> Edit:
    """Forget answers, so that the next list is asked again. Raises Refused where one is forgotten already."""
    found: Sequence[Synonym] = [_known(mill, one) for one in dict.fromkeys(synonym_ids)]
    return mill.apply(_("Answers forgotten"), [removed(one) for one in found])


def remember(mill: Mill, source: str, answer: Answer) -> Edit:
    """Remember one answer for a source without a list. Raises Refused for an answer that holds for one row only."""
    if not answer.asked.is_remembered:
        raise Refused(_("This answer holds for one row of one list; it is not remembered."))
    new = Synonym(
        mill.new_id("synonym"), source_of(source), answer.about, answer.ingredient_id, "", answer.asked, answer.answer,
        answer.rate, answer.given,
    )
    twins = [
        one for one in remembered(mill, source) if one.asked is new.asked and fold(one.name) == fold(new.name)
    ]
    changes = [*map(removed, twins), added(new)]
    return mill.apply(_("Answer for {source} remembered").format(source=new.source), changes)


def set_usual_change(mill: Mill, class_name: str, percent: float) -> Edit:
    """By how many percent a price of a class may change without a question; class_name "" is every other class.

    Raises Refused for a figure that is not above 0.
    """
    if not 0 < percent < float("inf"):
        raise Refused(_("The usual change must be above 0 %."))
    old = next((
        one for one in mill.library.all("synonym")
        if one.asked is Asked.USUAL_CHANGE and fold(one.name) == fold(class_name)
    ), None)
    new = Synonym(
        mill.new_id("synonym") if old is None else old.id, "", class_name, asked=Asked.USUAL_CHANGE,
        answer=f"{percent:g}",
    )
    what = _("Usual change of the price of {name}").format(name=class_name or _("all other ingredients"))
    return mill.apply(what, [Change(old, new)])


def _known(mill: Mill, synonym_id: int) -> Synonym:
    found: Synonym | None = mill.library.records["synonym"].get(synonym_id)
    if found is None:
        raise Refused(_("This answer is no longer remembered."))
    return found
