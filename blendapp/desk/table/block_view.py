"""A table whose blocks of cells go to and come from the clipboard, as spreadsheets have them."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QTableView, QWidget

from blendapp.desk.table.block import read_block, write_block
from blendapp.desk.table.grid import Grid


class BlockTable(QTableView):
    """pasted: cells of a block as (owner, key, text), with the texts that fell outside the table. cleared: cells whose
    content was deleted."""

    pasted = Signal(list, list)
    cleared = Signal(list)

    def __init__(self, model: Grid, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.grid = model

    def selected_cells(self) -> list[tuple[int, str]]:
        """The selected cells, row by row."""
        found = sorted(self.selectedIndexes(), key=lambda index: (index.row(), index.column()))
        return [(self.grid.owner(index), self.grid.key(index)) for index in found]

    def copy(self) -> None:
        """Put the selected block on the clipboard, each cell as it would be typed."""
        rows: dict[int, list[str]] = {}
        for index in sorted(self.selectedIndexes(), key=lambda one: (one.row(), one.column())):
            look = self.grid.look(index.row(), index.column())
            rows.setdefault(index.row(), []).append(look.typed or ("" if look.quiet else look.text))
        if rows:
            QGuiApplication.clipboard().setText(write_block(rows.values()))

    def paste(self) -> None:
        """Hand on the block of the clipboard, laid from the first selected cell; one cell fills the selection."""
        block = read_block(QGuiApplication.clipboard().text())
        chosen = self.selectedIndexes() or [self.currentIndex()]
        if not block or not chosen[0].isValid():
            return
        if len(block) == 1 and len(block[0]) == 1 and len(chosen) > 1:
            self.pasted.emit([(owner, key, block[0][0]) for owner, key in self.selected_cells()], [])
            return
        top, left = min(i.row() for i in chosen), min(i.column() for i in chosen)
        inside: list[tuple[int, str, str]] = []
        outside: list[str] = []
        for down, line in enumerate(block):
            for across, text in enumerate(line):
                row, column = top + down, left + across
                if row < self.grid.rowCount() and column < self.grid.columnCount():
                    inside.append((self.grid.owners[row], self.grid.headings[column].key, text))
                elif text.strip():
                    outside.append(text.strip())
        self.pasted.emit(inside, outside)
