"""The small mill altered cell by cell, read from a workbook, with what came of it."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from blendapp.domain.library import Library
from blendapp.exchange import read_workbook
from tests.exchange.made_files import small_mill, write_sheets
from tests.mills import TODAY


class Reader:
    """Reads an altered small mill and keeps what came of it."""

    def __init__(self, folder: Path) -> None:
        self.folder = folder
        self.sheets = small_mill()
        self.library = Library()
        self.warnings: list[str] = []

    def read(self) -> Library:
        path = write_sheets(self.folder / "book.xlsx", self.sheets)
        ids = {kind: max(found, default=0) + 1 for kind, found in self.library.records.items()}
        reading = read_workbook(path, self.library, ids, TODAY)
        self.changes = reading.changes
        self.library.apply(reading.changes)
        self.warnings = [str(problem) for problem in reading.warnings]
        return self.library

    def column(self, sheet: str, heading: str, values: list[Any]) -> None:
        """Adds a column, or fills the one there is."""
        rows = self.sheets[sheet]
        if heading not in rows[0]:
            rows[0].append(heading)
            for row in rows[1:]:
                row.append(None)
        for row, value in zip(rows[1:], values, strict=False):
            row[rows[0].index(heading)] = value

    def limits(self, *rows: list[Any], formula: str = "Layer") -> None:
        """Further limit rows: kind, name, per, minimum, maximum, unit, basis."""
        for row in rows:
            self.sheets["Limits"].append([formula, *row, *[None] * (7 - len(row))])


def said(mill: Reader, text: str) -> bool:
    return any(text in warning for warning in mill.warnings)
