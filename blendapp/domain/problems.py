"""Faults and oddities, each with its place and its mend, collected so that all are reported together."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from enum import Enum


class Severity(Enum):
    """A fault refuses the input; an oddity lets it in and is said."""

    FAULT = "fault"
    ODDITY = "oddity"


@dataclass(frozen=True)
class Place:
    """Where something stands. Any part may be empty.

    file: file name as the person gave it; sheet: sheet or kind of record; row: counted from 1 as the spreadsheet
    shows it; column: heading or field; record: name of the ingredient, nutrient or formula.
    """

    file: str = ""
    sheet: str = ""
    row: int | None = None
    column: str = ""
    record: str = ""

    def __str__(self) -> str:
        parts = [self.file, self.sheet, "" if self.row is None else str(self.row), self.column, self.record]
        return ":".join(part for part in parts if part)


@dataclass(frozen=True)
class Problem:
    """One sentence that says what is wrong and what to do, with the place it is about."""

    text: str
    place: Place = Place()
    severity: Severity = Severity.FAULT

    def __str__(self) -> str:
        place = str(self.place)
        return f"{place}: {self.text}" if place else self.text


@dataclass
class Problems:
    """A collector: everything wrong with one input, in the order it was met."""

    found: list[Problem] = field(default_factory=list)

    def fault(self, text: str, place: Place = Place()) -> None:
        self.found.append(Problem(text, place))

    def oddity(self, text: str, place: Place = Place()) -> None:
        self.found.append(Problem(text, place, Severity.ODDITY))

    @property
    def faults(self) -> list[Problem]:
        return [p for p in self.found if p.severity is Severity.FAULT]

    @property
    def oddities(self) -> list[Problem]:
        return [p for p in self.found if p.severity is Severity.ODDITY]

    def __iter__(self) -> Iterator[Problem]:
        return iter(self.found)

    def raise_if_faults(self) -> None:
        """Raises Refused with every fault found so far."""
        if self.faults:
            raise Refused(self.faults)


class Refused(Exception):
    """An input that cannot be taken: the user's fault, never a bug. Carries every problem found."""

    def __init__(self, problems: list[Problem] | Problem | str) -> None:
        if isinstance(problems, str):
            problems = Problem(problems)
        self.problems: list[Problem] = [problems] if isinstance(problems, Problem) else list(problems)
        super().__init__("\n".join(str(p) for p in self.problems))
