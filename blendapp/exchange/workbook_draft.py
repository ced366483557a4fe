"""What an import comes to so far: a copy of the library with the changes, and where each record stands in the file."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from functools import cached_property

from blendapp.domain import checks
from blendapp.domain.fields import field_of
from blendapp.domain.library import Library
from blendapp.domain.names import fold
from blendapp.domain.problems import Problems
from blendapp.domain.records import KIND_OF, KINDS, Change, Record
from blendapp.domain.wording import _
from blendapp.exchange.suggestions import Suggester, did_you_mean
from blendapp.exchange.workbook_sheet import Row

# Looking for likely names in a large library takes a while; a file full of unknown names gets them for the first few.
MOST_LOOKED_FOR = 40


class Draft:
    """The library as it will be, and the changes that make it so."""

    def __init__(self, library: Library, next_ids: Mapping[str, int], file: str, problems: Problems) -> None:
        self.library = library.copy()
        self.file = file
        self.problems = problems
        self._next = {kind: next_ids.get(kind, 1) for kind in KINDS}
        self._changes: dict[tuple[str, int], Change] = {}
        self._rows: dict[tuple[str, str], int] = {}
        self._refused: set[tuple[str, str]] = set()
        self._asked: dict[tuple[str, str], str] = {}
        self._suggesters: dict[str, Suggester] = {}

    def new_id(self, kind: str) -> int:
        found = self._next[kind]
        self._next[kind] = found + 1
        return found

    def put(self, before: Record | None, after: Record | None) -> None:
        """Take one change in; a record that stays as it is makes none."""
        if before == after:
            return
        change = Change(before, after)
        self.library.apply([change])
        key = (change.kind, change.id)
        earlier = self._changes.get(key)
        self._changes[key] = Change(earlier.before, after) if earlier else change

    def put_all(self, kind: str, changes: Iterable[Change]) -> None:
        """Take in many changes of records of one kind that this draft has not changed before."""
        changes = list(changes)
        self.library.apply(changes)
        for change in changes:
            self._changes[kind, change.id] = change

    def changes(self) -> list[Change]:
        """In an order in which they can be written."""
        order = {kind: index for index, kind in enumerate(KINDS)}
        kept = [c for c in self._changes.values() if c.before != c.after]
        return sorted(kept, key=lambda change: (order[change.kind], change.id))

    @cached_property
    def classes(self) -> dict[str, str]:
        """Each class of ingredients by its folded name; asked when all ingredients are read."""
        named = (i.class_name for i in self.library.records["ingredient"].values() if i.class_name)
        return {fold(name): name for name in named}

    # -- names

    def claim(self, kind: str, row: Row, heading: str) -> str | None:
        """The name in a row that defines a record; None, with the fault said, if it has none or it was taken above.

        A row without a name of its own is read to its end all the same, so that its other faults are said with it:
        as a record with identifier 0 that is checked and never put.
        """
        name = row.name(heading)
        if not name:
            if not row.has(heading):
                row.fault(heading, _("A name is needed here."))
            return None
        first = self._rows.setdefault((kind, fold(name)), row.number)
        if first == row.number:
            return name
        text = _("“{name}” stands in row {first} and again in row {second}; rename or delete one of them.")
        row.fault(heading, text.format(name=name, first=first, second=row.number))
        return None

    def refuse(self, kind: str, name: str) -> None:
        """Remember a name whose record could not be made, so that rows that use it are not refused a second time."""
        self._refused.add((kind, fold(name)))

    def was_refused(self, kind: str, name: str) -> bool:
        return (kind, fold(name)) in self._refused

    def find(self, kind: str, row: Row, heading: str, unknown: str) -> Record | None:
        """The record that a cell names; None if the cell is blank, or with the fault said if nothing has the name."""
        name = row.name(heading)
        if not name:
            return None
        found = self.library.named(kind, name)
        if found is None and not self.was_refused(kind, name):
            row.fault(heading, unknown.format(name=name) + self.suggestion(kind, name))
        return found

    def suggestion(self, kind: str, name: str) -> str:
        key = (kind, fold(name))
        if key not in self._asked:
            if len(self._asked) >= MOST_LOOKED_FOR:
                return ""
            if kind not in self._suggesters:
                known = self.library.records[kind].values()
                self._suggesters[kind] = Suggester(record.name for record in known)
            self._asked[key] = did_you_mean(name, self._suggesters[kind])
        return self._asked[key]

    # -- checks

    def is_faultless(self, record: Record, row: Row, headings: Mapping[str, str] | None = None) -> bool:
        """Says every fault of a record at its cell; whether there is none.

        Of a cell that was faulted in the reading nothing more is said, since it was not read as it stands.
        headings: where a field stands under another heading than that of the table of fields.
        """
        found = checks.faults(record, self.library)
        told = row.told
        for name, text in found:
            heading = _heading(KIND_OF[type(record)], name, headings)
            if heading not in told:
                row.fault(heading, text)
        return not found

    def say_oddities(self, record: Record, row: Row, headings: Mapping[str, str] | None = None) -> None:
        for name, text in checks.oddities(record, self.library):
            row.oddity(_heading(KIND_OF[type(record)], name, headings), text)

    def check(self, record: Record, row: Row, headings: Mapping[str, str] | None = None) -> bool:
        """Both: faults, and oddities of a record without faults."""
        faultless = self.is_faultless(record, row, headings)
        if faultless:
            self.say_oddities(record, row, headings)
        return faultless


def _heading(kind: str, name: str, headings: Mapping[str, str] | None) -> str:
    return headings[name] if headings and name in headings else field_of(kind, name).heading
