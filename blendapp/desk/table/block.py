"""Blocks of cells as spreadsheets put them on the clipboard: tabs between columns, lines between rows. No Qt."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable, Sequence


def read_block(text: str) -> list[list[str]]:
    """The cells of a block. Cells with a tab or a line break stand in double quotes."""
    plain = text.replace("\r\n", "\n").replace("\r", "\n")
    if plain.endswith("\n"):
        plain = plain[:-1]
    if not plain:
        return []
    if '"' not in plain:
        return [line.split("\t") for line in plain.split("\n")]
    return [row or [""] for row in csv.reader(io.StringIO(plain), delimiter="\t")]


def write_block(rows: Iterable[Sequence[str]]) -> str:
    """A block as text, the inverse of read_block."""
    return "\n".join("\t".join(_quoted(cell) for cell in row) for row in rows)


def _quoted(cell: str) -> str:
    if any(sign in cell for sign in ('"', "\t", "\n", "\r")):
        return '"' + cell.replace('"', '""') + '"'
    return cell
