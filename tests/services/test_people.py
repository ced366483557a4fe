"""Persons and their passwords."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace

import pytest

from blendapp.domain.library import Library
from blendapp.domain.mills import Person
from blendapp.domain.problems import Refused
from blendapp.services import people
from blendapp.services.mill import Mill

Opened = Callable[[Library], Mill]
Reopened = Callable[[Mill], Mill]


@pytest.fixture
def mill(opened: Opened, quick_hashing: None) -> Mill:
    return opened(Library())


def test_a_password_as_it_is_really_hashed_fits_after_reopening_and_stands_nowhere_in_the_file(
    opened: Opened, reopened: Reopened
) -> None:
    mill = opened(Library())
    ann = people.add_person(mill, " Ann Miller ", " nutritionist ")
    assert (ann.name, ann.capacity) == ("Ann Miller", "nutritionist")
    people.set_password(mill, ann.id, "a long pass phrase")
    again = reopened(mill)
    kept = again.library.records["person"][ann.id]
    assert kept.password_hash.startswith("$argon2id$")
    assert people.password_fits(kept, "a long pass phrase")
    assert not people.password_fits(kept, "a long pass phrase ")
    assert people.identified(again.library, ann.id, "a long pass phrase") == kept
    again.close()
    for path in again.path.parent.iterdir():
        assert b"a long pass phrase" not in path.read_bytes()


def test_two_persons_with_one_password_have_different_hashes(mill: Mill) -> None:
    for name in ("Ann", "Ben"):
        people.set_password(mill, people.add_person(mill, name).id, "the same words")
    hashes = {person.password_hash for person in mill.library.all("person")}
    assert len(hashes) == 2


def test_a_person_without_a_password_answers_to_none(mill: Mill) -> None:
    ann = people.add_person(mill, "Ann")
    assert not people.password_fits(ann, "")
    with pytest.raises(Refused, match="Ann has no password yet"):
        people.identified(mill.library, ann.id, "")


@pytest.mark.parametrize(("password", "sentence"), [
    ("", "at least 8 characters; this one has 0"), ("seven77", "at least 8 characters; this one has 7"),
    ("x" * 1001, "at most 1000 characters; this one has 1001"),
])
def test_a_password_too_short_or_too_long_is_refused_and_nothing_is_stored(
    mill: Mill, password: str, sentence: str
) -> None:
    ann = people.add_person(mill, "Ann")
    with pytest.raises(Refused, match=sentence):
        people.set_password(mill, ann.id, password)
    assert mill.library.records["person"][ann.id] == ann


def test_what_looks_alike_is_one_password_however_it_was_composed(mill: Mill) -> None:
    ann = people.add_person(mill, "Ann")
    people.set_password(mill, ann.id, "Futtermu\u0308hle")
    assert people.identified(mill.library, ann.id, "Futterm\u00fchle").name == "Ann"


def test_a_new_password_needs_the_present_one(mill: Mill) -> None:
    ann = people.add_person(mill, "Ann")
    people.set_password(mill, ann.id, "first words")
    for current in ("", "second words"):
        with pytest.raises(Refused, match="The present password of Ann is another one"):
            people.set_password(mill, ann.id, "second words", current=current)
    people.set_password(mill, ann.id, "second words", current="first words")
    assert people.identified(mill.library, ann.id, "second words")
    with pytest.raises(Refused, match="not the password of Ann"):
        people.identified(mill.library, ann.id, "first words")


def test_a_forgotten_password_is_renewed_by_another_person_only(mill: Mill) -> None:
    ann, ben = people.add_person(mill, "Ann"), people.add_person(mill, "Ben")
    people.set_password(mill, ann.id, "forgotten words")
    people.set_password(mill, ben.id, "words of Ben")
    with pytest.raises(Refused, match="by another person"):
        people.renew_password(mill, ann.id, "newer words", by_id=ann.id, by_password="forgotten words")
    with pytest.raises(Refused, match="not the password of Ben"):
        people.renew_password(mill, ann.id, "newer words", by_id=ben.id, by_password="words of Ann")
    people.renew_password(mill, ann.id, "newer words", by_id=ben.id, by_password="words of Ben")
    assert people.identified(mill.library, ann.id, "newer words")


def test_no_undo_brings_an_old_password_back(mill: Mill) -> None:
    ann = people.add_person(mill, "Ann")
    people.set_password(mill, ann.id, "first words")
    people.set_password(mill, ann.id, "second words", current="first words")
    with pytest.raises(Refused, match="cannot be taken back"):
        mill.undo()
    assert people.identified(mill.library, ann.id, "second words")


def test_a_person_who_left_is_kept_and_can_answer_for_nothing(mill: Mill) -> None:
    ann = people.add_person(mill, "Ann", "nutritionist")
    people.set_password(mill, ann.id, "words of Ann")
    people.change_person(mill, ann.id, active=False)
    with pytest.raises(Refused, match="Ann is no longer active"):
        people.identified(mill.library, ann.id, "words of Ann")
    people.change_person(mill, ann.id, active=True, capacity="owner", name="Ann Weir")
    now = people.identified(mill.library, ann.id, "words of Ann")
    assert (now.name, now.capacity) == ("Ann Weir", "owner")


def test_a_name_that_is_taken_or_blank_and_a_stranger_are_refused(mill: Mill) -> None:
    people.add_person(mill, "Ann")
    for name, sentence in (("ann ", "taken"), ("  ", "A name is needed")):
        with pytest.raises(Refused, match=sentence):
            people.add_person(mill, name)
    with pytest.raises(Refused, match="no such person"):
        people.identified(mill.library, 77, "words of Ann")


def test_a_hash_that_other_hands_damaged_fits_nothing() -> None:
    for damaged in ("nonsense", "$argon2id$v=19$m=8,t=1,p=1$AAAA", "$1$x$y"):
        assert not people.password_fits(replace(Person(1, "Ann"), password_hash=damaged), "words of Ann")
