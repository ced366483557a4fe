"""The persons of a mill: who they are, in which capacity, and the password with which they answer for something.

A password is kept as a salted Argon2id hash and nowhere else. What sets one is on record and cannot be undone, so that
no undo brings an old password back.
"""

from __future__ import annotations

import unicodedata
from dataclasses import replace

from argon2 import PasswordHasher
from argon2.exceptions import InvalidHashError, VerificationError

from blendapp.domain.library import Library
from blendapp.domain.mills import Person
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.records import Change, added
from blendapp.domain.wording import _
from blendapp.services.mill import Edit, Mill

LEAST_CHARACTERS = 8  # NIST SP 800-63B, from memory
# Longer ones are refused, since hashing takes the longer the longer the password is.
MOST_CHARACTERS = 1000

_hasher = PasswordHasher()


def add_person(mill: Mill, name: str, capacity: str = "") -> Person:
    """Add a person, who may not yet approve: that takes a password. Raises Refused for a name that is taken."""
    person = Person(mill.new_id("person"), name.strip(), capacity.strip())
    mill.apply(_("Add {name}").format(name=person.name), [added(person)])
    return person


def change_person(
    mill: Mill, person_id: int, *, name: str | None = None, capacity: str | None = None, active: bool | None = None
) -> Edit:
    """Change what is given of a person. One who is not active can neither prepare nor approve, and stays on record."""
    before = known(mill.library, person_id)
    after = replace(
        before,
        name=before.name if name is None else name.strip(),
        capacity=before.capacity if capacity is None else capacity.strip(),
        active=before.active if active is None else active,
    )
    return mill.apply(_("Change {name}").format(name=before.name), [Change(before, after)])


def set_password(mill: Mill, person_id: int, password: str, *, current: str = "") -> Edit:
    """Give a person a password, or another one: then `current` must be the one that stands. Raises Refused."""
    person = known(mill.library, person_id)
    if person.password_hash and not password_fits(person, current):
        raise _refused(_("The present password of {name} is another one; nothing was changed.").format(
            name=person.name), "current", person)
    return _store(mill, person, password)


def renew_password(mill: Mill, person_id: int, password: str, *, by_id: int, by_password: str) -> Edit:
    """Give a person who forgot it another password; another active person answers for it. Raises Refused."""
    if by_id == person_id:
        raise Refused(_("A forgotten password is renewed by another person."))
    identified(mill.library, by_id, by_password)
    return _store(mill, known(mill.library, person_id), password)


def _store(mill: Mill, person: Person, password: str) -> Edit:
    length = len(_plain(password))
    if length < LEAST_CHARACTERS:
        text = _("A password needs at least {least} characters; this one has {count}.")
        raise _refused(text.format(least=LEAST_CHARACTERS, count=length), "password", person)
    if length > MOST_CHARACTERS:
        text = _("A password has at most {most} characters; this one has {count}.")
        raise _refused(text.format(most=MOST_CHARACTERS, count=length), "password", person)
    hashed = replace(person, password_hash=_hasher.hash(_plain(password)))
    return mill.record(_("Password of {name}").format(name=person.name), [Change(person, hashed)])


def password_fits(person: Person, password: str) -> bool:
    """Whether it is the person's password; of a person without one none is."""
    if not person.password_hash or len(password) > 4 * MOST_CHARACTERS:
        return False
    try:
        return _hasher.verify(person.password_hash, _plain(password))
    except (VerificationError, InvalidHashError):
        return False


def identified(library: Library, person_id: int, password: str) -> Person:
    """The person, if active and if the password is theirs; raises Refused with what is wrong and the mend."""
    person = known(library, person_id)
    if not person.active:
        raise _refused(_("{name} is no longer active here; choose another person.").format(name=person.name),
                       "person", person)
    if not person.password_hash:
        raise _refused(_("{name} has no password yet; set one first.").format(name=person.name), "password", person)
    if not password_fits(person, password):
        raise _refused(_("This is not the password of {name}; type it again.").format(name=person.name),
                       "password", person)
    return person


def known(library: Library, person_id: int) -> Person:
    """The person of an identifier. Raises Refused where there is none."""
    person: Person | None = library.records["person"].get(person_id)
    if person is None:
        raise Refused(_("This mill knows no such person; add the person first."))
    return person


def _plain(password: str) -> str:
    """One form for what looks alike, however a keyboard composes it."""
    return unicodedata.normalize("NFKC", password)


def _refused(text: str, field: str, person: Person) -> Refused:
    return Refused(Problem(text, Place(column=field, record=person.name)))
