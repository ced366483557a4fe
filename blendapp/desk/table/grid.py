"""The model under every table of the desk: rows of records, columns of fields, and the cells that were refused."""

from __future__ import annotations

from collections.abc import Collection, Sequence
from dataclasses import dataclass, replace
from typing import Any

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QPersistentModelIndex, Qt, Signal

from blendapp.desk.table.look import Look
from blendapp.desk.table.roles import (
    ACCESSIBLE_DESCRIPTION,
    ACCESSIBLE_TEXT,
    ALIGNMENT,
    DISPLAY,
    EDIT,
    HORIZONTAL,
    LEFT,
    NO_FLAGS,
    RIGHT,
    SHOWN,
    TOOL_TIP,
    TYPED,
)
from blendapp.domain.problems import Refused

AnyIndex = QModelIndex | QPersistentModelIndex


@dataclass(frozen=True)
class Heading:
    """A column: key names it for good, words are its heading, number says that it is aligned as figures are."""

    key: str
    words: str
    width: int = 80
    number: bool = False
    hint: str = ""


@dataclass(frozen=True)
class Refusal:
    """A text that was typed and not taken, and the sentence that says what to do."""

    text: str
    sentence: str


class Grid(QAbstractTableModel):
    """Rows are owners (identifiers of records), columns are headings.

    A subclass gives make_look(owner, key) and write(owner, key, text), which raises Refused or ValueError with a
    sentence. refused: after a text was not taken. Looks are kept until refresh().
    """

    refused = Signal(QModelIndex, str)

    def __init__(self, parent: Any = None) -> None:
        super().__init__(parent)
        self.owners: list[int] = []
        self.headings: list[Heading] = []
        self.refusals: dict[tuple[int, str], Refusal] = {}
        self._looks: dict[tuple[int, int], Look] = {}

    # -- for subclasses

    def make_look(self, owner: int, key: str) -> Look:
        """How a cell looks now."""
        raise NotImplementedError

    def write(self, owner: int, key: str, text: str) -> None:
        """Take a typed text in as one undo, or raise Refused or ValueError with the sentence."""
        raise NotImplementedError

    # -- the shape

    def set_rows(self, owners: Sequence[int]) -> None:
        """Show these owners; a model reset only if they are others than before."""
        if list(owners) == self.owners:
            self.refresh()
            return
        self.beginResetModel()
        self.owners = list(owners)
        self._looks.clear()
        self.endResetModel()

    def set_headings(self, headings: Sequence[Heading]) -> None:
        """Show these columns."""
        if list(headings) == self.headings:
            return
        self.beginResetModel()
        self.headings = list(headings)
        self._looks.clear()
        self.endResetModel()

    def refresh(self, owners: Sequence[int] | None = None) -> None:
        """Work the looks out again when next painted: of all rows, or of some."""
        if not self.owners or not self.headings:
            self._looks.clear()
            return
        last = len(self.headings) - 1
        if owners is None:
            self._looks.clear()
            self.dataChanged.emit(self.index(0, 0), self.index(len(self.owners) - 1, last))
            return
        wanted = set(owners)
        for row, owner in enumerate(self.owners):
            if owner in wanted:
                for column in range(last + 1):
                    self._looks.pop((row, column), None)
                self.dataChanged.emit(self.index(row, 0), self.index(row, last))

    def look(self, row: int, column: int) -> Look:
        """How a cell looks; worked out at most once between refreshes."""
        found = self._looks.get((row, column))
        if found is None:
            owner, key = self.owners[row], self.headings[column].key
            found = self.make_look(owner, key)
            refusal = self.refusals.get((owner, key))
            if refusal is not None:
                found = replace(found, text=refusal.text, typed=refusal.text, fault=refusal.sentence, lack=0)
            self._looks[row, column] = found
        return found

    def cell(self, owner: int, key: str) -> QModelIndex:
        """The index of a record's field, invalid where it is not shown."""
        column = self.column_of(key)
        if column is None or owner not in self.owners:
            return QModelIndex()
        return self.index(self.owners.index(owner), column)

    def column_of(self, key: str) -> int | None:
        """Where a heading stands now."""
        return next((at for at, heading in enumerate(self.headings) if heading.key == key), None)

    def owner(self, index: AnyIndex) -> int:
        """The record behind a cell."""
        return self.owners[index.row()]

    def key(self, index: AnyIndex) -> str:
        """The field behind a cell."""
        return self.headings[index.column()].key

    # -- Qt's questions

    def rowCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008 - Qt's own signature
        return 0 if parent.isValid() else len(self.owners)

    def columnCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else len(self.headings)

    def data(self, index: AnyIndex, role: int = DISPLAY) -> Any:
        if not index.isValid():
            return None
        look = self.look(index.row(), index.column())
        if role == DISPLAY:
            return look.text
        if role == EDIT:
            return look.typed
        if role == TOOL_TIP:
            return look.fault or look.hint or None
        if role == ALIGNMENT:
            return RIGHT if look.number else LEFT
        if role == ACCESSIBLE_TEXT:
            return look.words or f"{look.text} {look.unit}".strip()
        if role == ACCESSIBLE_DESCRIPTION:
            return look.fault or look.hint
        return None

    def flags(self, index: AnyIndex) -> Qt.ItemFlag:
        if not index.isValid():
            return NO_FLAGS
        return TYPED if self.look(index.row(), index.column()).editable else SHOWN

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = DISPLAY) -> Any:
        if orientation != HORIZONTAL or not 0 <= section < len(self.headings):
            return None
        heading = self.headings[section]
        if role == DISPLAY:
            return heading.words
        if role == ALIGNMENT:
            return RIGHT if heading.number else LEFT
        if role == TOOL_TIP:
            return heading.hint or None
        return None

    # -- typing

    def setData(self, index: AnyIndex, value: Any, role: int = EDIT) -> bool:
        if role != EDIT or not index.isValid():
            return False
        owner, key = self.owner(index), self.key(index)
        look = self.look(index.row(), index.column())
        text = str(value)
        # A refused text is tried again: what stood against it may be gone.
        if text.strip() == look.typed.strip() and (owner, key) not in self.refusals:
            return True
        try:
            self.write(owner, key, text)
        except (Refused, ValueError) as fault:
            self.refuse(owner, key, text, sentence_of(fault))
            return False
        self.forgive(owner, key)
        return True

    def refuse(self, owner: int, key: str, text: str, sentence: str) -> None:
        """Keep a text that was not taken in its cell, with the sentence beside it."""
        self.refusals[owner, key] = Refusal(text, sentence)
        self.refresh([owner])
        index = self.cell(owner, key)
        if index.isValid():
            self.refused.emit(index, sentence)

    def forgive(self, owner: int, key: str) -> bool:
        """Forget a refused text: the stored value shows again. Returns whether there was one."""
        if self.refusals.pop((owner, key), None) is None:
            return False
        self.refresh([owner])
        return True


    def forgive_all(self) -> None:
        """Forget every refused text."""
        if self.refusals:
            self.refusals.clear()
            self.refresh()

    def forgive_owners(self, owners: Collection[int]) -> None:
        """Forget the refused texts of records that are no longer as they were when the texts were typed."""
        for owner, key in [one for one in self.refusals if one[0] in owners]:
            self.forgive(owner, key)


def sentence_of(fault: Exception) -> str:
    """What is wrong, in sentences, without its places."""
    if isinstance(fault, Refused):
        return " ".join(problem.text for problem in fault.problems)
    return str(fault)
