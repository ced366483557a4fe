"""An open mill: its library in memory, its file behind it, and the one way in which either changes."""

from __future__ import annotations

import datetime
import getpass
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING, Literal

from blendapp.domain import checks, versions
from blendapp.domain.fields import field_of
from blendapp.domain.formulas import SubjectKind
from blendapp.domain.library import Library
from blendapp.domain.problems import Place, Problem, Refused, Severity
from blendapp.domain.records import KIND_OF, Change, Record
from blendapp.domain.wording import _
from blendapp.storage import MillFileError

if TYPE_CHECKING:
    from blendapp.optimise.build.composition import Composition
    from blendapp.services.kept_answers import KeptAnswers
    from blendapp.storage import Entry, Store


__all__ = [
    "Edit", "Mill", "MillFileError", "kind_of", "open_mill", "problems_in_place", "problems_of", "record_name", "today",
]


@dataclass(frozen=True)
class Edit:
    """What one edit, undo or redo did: the entry of the change log and the records that changed."""

    entry_id: int
    what: str
    changes: tuple[Change, ...]
    oddities: tuple[Problem, ...] = ()

    @property
    def changed(self) -> frozenset[tuple[str, int]]:
        """(kind, identifier) of every record that is not as it was."""
        return frozenset((change.kind, change.id) for change in self.changes)

    def touches(self, *kinds: str) -> bool:
        return any(change.kind in kinds for change in self.changes)


class Mill:
    """One open mill file. Every change of it goes through apply, undo, redo or record.

    library: always what the file holds. Not for use from two threads at once; a worker takes library.copy().
    """

    def __init__(self, store: Store, who: str = "") -> None:
        self.store = store
        self.who = who or _user()
        self.library = Library.of(store.read_all())
        self._next = store.next_ids()
        self._composition: Composition | None = None
        self._answers: KeptAnswers | None = None
        self._undoable: list[Entry] | None = None
        self._redoable: list[Entry] = []

    @property
    def path(self) -> Path:
        return self.store.path

    @property
    def writable(self) -> bool:
        return self.store.writable

    @property
    def why_read_only(self) -> str | None:
        return self.store.why_read_only

    @property
    def held_elsewhere(self) -> bool:
        """Whether it can only be read because another process has it open, which may let it go."""
        return self.store.held_elsewhere

    @property
    def composition(self) -> Composition:
        """The composition as arrays, kept up to date with the library."""
        if self._composition is None:
            from blendapp.optimise.build.composition import Composition

            self._composition = Composition(self.library)
        return self._composition

    @property
    def answers(self) -> KeptAnswers:
        """The answers that are kept over changes of prices."""
        if self._answers is None:
            from blendapp.services.kept_answers import KeptAnswers

            self._answers = KeptAnswers()
        return self._answers

    def close(self) -> None:
        self.store.close()

    def new_id(self, kind: str) -> int:
        """An identifier for a record to be added; one is never used twice, whatever becomes of the record."""
        taken = self._next.get(kind, 1)
        self._next[kind] = taken + 1
        return taken

    def next_ids(self) -> dict[str, int]:
        """The first free identifier of every kind, for a reader that numbers records itself."""
        return dict(self._next)

    def used_id(self, kind: str, record_id: int) -> None:
        """Say that a reader gave out an identifier, so that new_id does not give it again."""
        self._next[kind] = max(self._next.get(kind, 1), record_id + 1)

    # -- changing

    def apply(self, what: str, changes: Sequence[Change]) -> Edit:
        """Take an edit in, at once and whole: checked, stored with its log entry, and in the library.

        what: the sentence that undo shows. Raises Refused with every fault, each with its record and field, and
        storage.MillFileError if the file cannot take it; nothing has changed then.
        """
        real = [change for change in changes if change.before != change.after]
        if not real:
            return Edit(0, what, ())
        self._history()
        oddities = self._take_in(real)
        entry = self._stored(real, what, "edit", None)
        self._remember(entry)
        return Edit(entry.id, what, tuple(real), tuple(oddities))

    def record(self, what: str, changes: Sequence[Change]) -> Edit:
        """As apply, for what a person cannot take back: a printed sheet, an approval."""
        self._take_in(changes)
        entry = self._stored(changes, what, "record", None)
        return Edit(entry.id, what, tuple(changes))

    def _take_in(self, changes: Sequence[Change]) -> list[Problem]:
        self._refuse(changes)
        found = problems_in_place(changes, self.library)
        return [p for p in found if p.severity is Severity.ODDITY]

    def _refuse(self, changes: Sequence[Change]) -> None:
        """Raises Refused where the file can only be read, or an edit would change what was approved."""
        if not self.writable:
            raise Refused(self.why_read_only or _("This mill file is read-only here."))
        sentence = versions.forbidden(changes, self.library.records["version"].get)
        if sentence is not None:
            raise Refused(sentence)

    def _stored(self, changes: Sequence[Change], what: str, role: str, of: int | None) -> Entry:
        try:
            entry = self.store.write(what, changes, self.who, role, of)
        except BaseException:
            self.library.apply(change.reversed for change in reversed(changes))
            raise
        if self._composition is not None:
            self._composition.refresh(self.library, changes)
        if self._answers is not None:
            self._answers.refresh(changes)
        return entry

    # -- taking back

    @property
    def undo_text(self) -> str | None:
        """What undo would take back, or None."""
        undoable = self._history()
        return undoable[-1].what if undoable else None

    @property
    def redo_text(self) -> str | None:
        self._history()
        return self._redoable[-1].what if self._redoable else None

    def undo(self) -> Edit | None:
        """Restore what the last edit changed; an entry of its own. None if there is nothing to undo."""
        undoable = self._history()
        return self._reverse(undoable[-1], "undo") if undoable else None

    def redo(self) -> Edit | None:
        """Take the last undo back. None if there is none, or an edit came after it."""
        self._history()
        return self._reverse(self._redoable[-1], "redo") if self._redoable else None

    def _reverse(self, of: Entry, role: Literal["undo", "redo"]) -> Edit:
        changes = of.changes if role == "redo" else tuple(c.reversed for c in reversed(of.changes))
        self._refuse(changes)
        if any(self.library.records[c.kind].get(c.id) != c.before for c in changes):
            text = _("“{what}” cannot be taken back: a later change stands on it.")
            raise Refused(text.format(what=of.what))
        self.library.apply(changes)
        done = self._stored(changes, of.what, role, of.id)
        self._remember(done)
        return Edit(done.id, of.what, changes)

    def _history(self) -> list[Entry]:
        """The edits that can be undone, oldest first; read from the log once."""
        if self._undoable is None:
            self._undoable = []
            for entry in self.store.entries():
                self._remember(entry)
        return self._undoable

    def _remember(self, entry: Entry) -> None:
        undoable = self._history()
        if entry.role == "undo":
            self._redoable.append(undoable.pop())
        elif entry.role == "redo":
            undoable.append(self._redoable.pop())
        elif entry.role == "edit":
            undoable.append(entry)
            self._redoable.clear()


def open_mill(path: Path | str, who: str = "") -> Mill:
    """Open a mill file; read-only where another program holds it. Raises MillFileError with one sentence."""
    from blendapp.storage import open_store

    return Mill(open_store(path), who)


def problems_in_place(changes: Sequence[Change], library: Library) -> list[Problem]:
    """Take changes into a library and tell what is odd; where anything is wrong with them they are taken out again.

    Raises Refused with every fault.
    """
    library.apply(changes)
    try:
        found = problems_of(changes, library)
        faults = [p for p in found if p.severity is Severity.FAULT]
        if faults:
            raise Refused(faults)
    except BaseException:
        library.apply(change.reversed for change in reversed(changes))
        raise
    return found


def problems_of(changes: Iterable[Change], library: Library) -> list[Problem]:
    """The faults and oddities of what edits have put into a library, and of the records that rest on them."""
    found: list[Problem] = []
    seen: set[tuple[str, int]] = set()
    changes = list(changes)
    touched = [record for change in changes for record in (change.after, *_resting_on(change, library))]
    if any(map(_may_admit_more, changes)):
        touched += [i for i in library.records["ingredient"].values() if i.made_by_formula_id is not None]
    for record in touched:
        if record is not None and (kind_of(record), record.id) not in seen:
            seen.add((kind_of(record), record.id))
            for severity, findings in (
                (Severity.FAULT, checks.faults(record, library)),
                (Severity.ODDITY, checks.oddities(record, library)),
            ):
                found += [Problem(text, place_of(record, field, library), severity) for field, text in findings]
    return found


def kind_of(record: Record) -> str:
    return KIND_OF[type(record)]


def place_of(record: Record, field: str, library: Library) -> Place:
    """Where a fault in a field of a record stands, in words."""
    kind = kind_of(record)
    try:
        column = field_of(kind, field).label
    except KeyError:
        column = field
    return Place(column=column, record=record_name(record, library))


def record_name(record: Record, library: Library) -> str:
    """What a person calls a record."""
    kind = kind_of(record)
    if kind == "value":
        return f"{_name(library, 'ingredient', record.ingredient_id)}, {_name(library, 'nutrient', record.nutrient_id)}"
    if kind == "quote":
        return _name(library, "ingredient", record.ingredient_id)
    if kind == "limit":
        try:
            return f"{_name(library, 'formula', record.formula_id)}, {library.subject_name(record.subject)}"
        except KeyError:
            return _name(library, "formula", record.formula_id)
    if kind == "mixing_step":
        formula = _name(library, "formula", record.formula_id or 0) or _("every formula")
        return _("{formula}, step {number}").format(formula=formula, number=record.position)
    if kind == "lot_value":
        return f"{_name(library, 'lot', record.lot_id)}, {_name(library, 'nutrient', record.nutrient_id)}"
    return str(getattr(record, "name", ""))


def _name(library: Library, kind: str, record_id: int) -> str:
    record = library.records[kind].get(record_id)
    return "" if record is None else str(record.name)


def _resting_on(change: Change, library: Library) -> list[Record]:
    """Records that a change of another one may have made faulty."""
    if change.before is None or change.after is None:
        return []
    if change.kind == "formula" and change.before.amounts is not change.after.amounts:
        return list(library.limits(change.id))
    if change.kind == "nutrient" and (
        change.before.unit != change.after.unit or change.before.never_negative != change.after.never_negative
    ):
        values = [v for v in library.records["value"].values() if v.nutrient_id == change.id]
        limits = [
            limit
            for limit in library.records["limit"].values()
            if any(s is not None and s.kind is SubjectKind.NUTRIENT and s.ids == (change.id,)
                   for s in (limit.subject, limit.per))
        ]
        return values + limits
    return []


def _may_admit_more(change: Change) -> bool:
    """Whether a formula may use an ingredient after a change that it did not use before."""
    before, after = change.before, change.after
    if change.kind == "ingredient":
        return after is not None and (before is None or before.tags != after.tags)
    if change.kind == "formula":
        return before is not None and after is not None and before.admits is not after.admits
    return change.kind == "limit"


def _user() -> str:
    try:
        return getpass.getuser()
    except (OSError, KeyError):
        return ""


def today() -> datetime.date:
    """The day on which prices are taken to be in force."""
    return datetime.date.today()
