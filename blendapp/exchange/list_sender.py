"""Whose list it is and for which site, as a person answered it."""

from __future__ import annotations

from dataclasses import dataclass

from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT
from blendapp.domain.mills import Asked
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_names import match_key
from blendapp.exchange.suggestions import did_you_mean


@dataclass(frozen=True)
class Sender:
    """supplier_id, site_id: None where nothing was said. notes: names that the mill does not know, with the mend."""

    supplier_id: int | None = None
    site_id: int | None = None
    notes: tuple[str, ...] = ()


def read_sender(answers: Answers, library: Library, titled_site: str = "") -> Sender:
    """Supplier and site of a list; no question is asked for them.

    titled_site: the site that a title of the list names, which counts where nobody has said anything else.
    """
    notes: list[str] = []
    supplier = _named(answers, library, Asked.SUPPLIER, notes, _("The mill has no supplier “{name}”; add it there."))
    site = _named(answers, library, Asked.SITE, notes, _("The mill has no site “{name}”; add it there."))
    if titled_site and answers.find(Asked.SITE, "") is None:
        site = int(next(one.id for one in library.all("site") if one.name == titled_site))
        text = _("After its title, the prices are for the site “{name}”; answer “site=leave out” if they are for the "
                 "whole mill.")
        notes.append(text.format(name=titled_site))
    return Sender(supplier, site, tuple(notes))


def _named(answers: Answers, library: Library, asked: Asked, notes: list[str], text: str) -> int | None:
    answer = answers.find(asked, "")
    if answer is None or answer.answer.strip() in ("", LEAVE_OUT):
        return None
    known = {match_key(one.name): one for one in library.all(asked.value)}
    found = known.get(match_key(answer.answer))
    if found is None:
        names = [one.name for one in known.values()]
        notes.append(text.format(name=answer.answer) + did_you_mean(answer.answer, names))
        return None
    return int(found.id)
