"""The table of a list as it stands in its file: every cell as its text, with what each column and row was taken for."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from PySide6.QtCore import QAbstractTableModel, QModelIndex, QObject, QPersistentModelIndex, Qt

from blendapp.desk.table.roles import ACCESSIBLE_TEXT, DISPLAY, HORIZONTAL, NO_FLAGS, SHOWN, TOOL_TIP
from blendapp.domain.list_rows import ColumnRole, Fate, SourceColumn, SourceSheet, SourceTable
from blendapp.domain.wording import _

AnyIndex = QModelIndex | QPersistentModelIndex
_EMPTY = SourceSheet("", ())
_KEPT_ROWS = 600


def column_letters(index: int) -> str:
    """The letters of a column as a spreadsheet shows them; index from 0."""
    letters, index = "", index + 1
    while index:
        index, rest = divmod(index - 1, 26)
        letters = chr(65 + rest) + letters
    return letters


class SourceRows(QAbstractTableModel):
    """Rows and columns of a sheet, without its blank tail. Rows of the model from 0, of the file from 1."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.sheet = _EMPTY
        self.fates: Mapping[int, Fate] = {}
        self._digest = ""
        self._height = 0
        self._width = 0
        self._texts: dict[int, tuple[str, ...]] = {}
        self._headings: frozenset[int] = frozenset()

    def show(self, sheet: SourceSheet | None, digest: str, fates: Mapping[int, Fate]) -> None:
        """Show a sheet. digest: of its file; fates: of every row that is not blank, from 1. A sheet of the same file
        keeps its place and changes its marks only."""
        sheet = sheet or _EMPTY
        same = digest == self._digest and sheet.name == self.sheet.name and bool(self._width)
        if not same:
            self.beginResetModel()
        self.sheet, self._digest, self.fates = sheet, digest, fates
        self._headings = frozenset(row for table in sheet.tables for row in table.heading_rows)
        if not same:
            # Rows may be made when they are asked for: what lies below the last one with a fate is never asked for.
            self._texts = {}
            self._height = min(max(fates, default=0), len(sheet.rows))
            self._width = len(sheet.rows[0]) if self._height else 0
            self.endResetModel()
        elif self._width and self._height:
            self.headerDataChanged.emit(HORIZONTAL, 0, self._width - 1)
            self.dataChanged.emit(self.index(0, 0), self.index(self._height - 1, self._width - 1))

    def cells(self, row: int) -> tuple[str, ...]:
        """The texts of a row of the model."""
        found = self._texts.get(row)
        if found is None:
            if len(self._texts) > _KEPT_ROWS:
                self._texts.clear()
            found = self._texts[row] = self.sheet.rows[row]
        return found

    # -- what was understood

    def is_heading(self, row: int) -> bool:
        """Whether headings stand in a row of the file."""
        return row in self._headings

    def is_hidden(self, row: int) -> bool:
        return row in self.sheet.hidden_rows

    def is_in_table(self, row: int) -> bool:
        """Whether a row of the file holds headings or lines of a table."""
        return row in self._headings or any(one.first_row <= row <= one.last_row for one in self.sheet.tables)

    def table_at(self, row: int) -> SourceTable | None:
        """The table that a row of the file is in, else the next one below, else the last one."""
        tables = self.sheet.tables
        for table in tables:
            if row <= table.last_row:
                return table
        return tables[-1] if tables else None

    def column_at(self, row: int, column: int) -> SourceColumn | None:
        """What a column holds at a row of the file; column from 0."""
        table = self.table_at(row)
        if table is None:
            return None
        return next((one for one in table.columns if one.index == column), None)

    def role_words(self, row: int, column: int) -> str:
        """What a column holds, in a word."""
        found = self.column_at(row, column)
        if found is None or found.role is ColumnRole.OTHER:
            return _("not read")
        return found.role.label

    def is_read(self, row: int, column: int) -> bool:
        """Whether a column counts at a row of the file."""
        found = self.column_at(row, column)
        return found is not None and found.role not in (ColumnRole.OTHER, ColumnRole.NOTE)

    # -- Qt's questions

    def rowCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008 - Qt's own signature
        return 0 if parent.isValid() else self._height

    def columnCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008
        return 0 if parent.isValid() else self._width

    def text(self, row: int, column: int) -> str:
        """The text of a cell, in one line."""
        cells = self.cells(row)
        text = cells[column] if column < len(cells) else ""
        return " ".join(text.split()) if "\n" in text or "\r" in text else text

    def data(self, index: AnyIndex, role: int = DISPLAY) -> Any:
        if not index.isValid():
            return None
        text = self.text(index.row(), index.column())
        if role == DISPLAY:
            return text
        if role == TOOL_TIP:
            return text if len(text) > 24 else None
        if role == ACCESSIBLE_TEXT:
            row = index.row() + 1
            word = _("heading") if self.is_heading(row) else self.role_words(row, index.column())
            return _("{word}, row {row}: {text}").format(word=word, row=row, text=text or _("blank"))
        return None

    def flags(self, index: AnyIndex) -> Qt.ItemFlag:
        return SHOWN if index.isValid() else NO_FLAGS

    def headerData(self, section: int, orientation: Qt.Orientation, role: int = DISPLAY) -> Any:
        if role != DISPLAY:
            return None
        if orientation == HORIZONTAL:
            return column_letters(section) if 0 <= section < self._width else None
        return str(section + 1)
