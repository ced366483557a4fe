"""A mill file in a folder of its own, made from a small library."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from blendapp.domain.library import Library
from blendapp.domain.records import KINDS, added
from blendapp.services.mill import Mill, open_mill


@pytest.fixture
def opened(tmp_path: Path) -> Iterator[Callable[[Library], Mill]]:
    """opened(library): an open mill that holds it. Closed after the test."""
    from blendapp.storage import create

    mills: list[Mill] = []

    def make(library: Library, name: str = "test.mill") -> Mill:
        changes = [added(record) for kind in KINDS for record in library.all(kind)]
        mills.append(Mill(create(tmp_path / name, changes), "Ann"))
        return mills[-1]

    yield make
    for mill in mills:
        mill.close()


@pytest.fixture
def quick_hashing(monkeypatch: pytest.MonkeyPatch) -> None:
    """Passwords hashed as weakly as the library allows, for tests that are about something else."""
    from argon2 import PasswordHasher

    from blendapp.services import people

    monkeypatch.setattr(people, "_hasher", PasswordHasher(time_cost=1, memory_cost=8, parallelism=1))


@pytest.fixture
def reopened() -> Iterator[Callable[[Mill], Mill]]:
    """reopened(mill): the same file opened again after the mill was closed. Closed after the test."""
    mills: list[Mill] = []

    def again(mill: Mill) -> Mill:
        path = mill.path
        mill.close()
        mills.append(open_mill(path, "Ben"))
        return mills[-1]

    yield again
    for mill in mills:
        mill.close()
