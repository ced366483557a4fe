"""Who answers by name for a batch that breaks a limit or follows without a clean-out."""

from __future__ import annotations

from difflib import get_close_matches

from blendapp.domain.library import Library
from blendapp.domain.mills import Person
from blendapp.domain.names import fold
from blendapp.domain.problems import Problem, Refused
from blendapp.domain.wording import _

# How alike a name must be to be taken for a slip: of "Ben Mash" and "Ben Marsh", not of "Ann" and "Ben".
_ALIKE = 0.6


def who_may_accept(library: Library) -> list[str]:
    """The names of the active persons of the mill, by name; empty where it knows none, and anybody may be named."""
    persons: list[Person] = [person for person in library.all("person") if person.active]
    return sorted((person.name for person in persons), key=fold)


def accepted_by(library: Library, name: str) -> str:
    """A name as the mill writes it. Raises Refused for one that no active person has, where the mill has any."""
    known = {fold(one): one for one in who_may_accept(library)}
    if not known or not name.strip():
        return name.strip()
    if fold(name) in known:
        return known[fold(name)]
    close = get_close_matches(fold(name), known, n=3, cutoff=_ALIKE)
    text = _("Nobody active in this mill is called “{name}”, so nothing is accepted in that name. "
             "Name one of: {names}.")
    if close:
        text = _("Nobody active in this mill is called “{name}”; did you mean {names}?")
    joined = _(" or ").join(known[one] for one in close) if close else ", ".join(known.values())
    raise Refused(Problem(text.format(name=name.strip(), names=joined)))
