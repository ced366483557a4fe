"""Heading rows of a list: their texts, one row or two, and which column holds the names."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping

from blendapp.exchange.tables import CellKind, CellValue, RawTable, kind_of

# A heading row stands near the top; looking further would only find odd rows of a long list.
FURTHEST = 200


def texts_of(table: RawTable, row: int) -> dict[int, str] | None:
    """The texts of a row by column; None where anything but text stands in it."""
    found = {}
    for index, value in enumerate(table.rows[row]):
        kind = kind_of(value)
        if kind is CellKind.BLANK:
            continue
        if kind is not CellKind.TEXT:
            return None
        found[index] = " ".join(str(value).split())
    return found


def joined(above: Mapping[int, str], below: Mapping[int, str]) -> dict[int, str]:
    """The texts of two heading rows as one, by column."""
    return {
        index: f"{above.get(index, '')} {below.get(index, '')}".strip() for index in sorted({*above, *below})
    }


def spread_over(table: RawTable, row: int, texts: dict[int, str], below: dict[int, str]) -> dict[int, str]:
    """The headings of a row over every column that they stand over: a merged range, or blanks up to the next one."""
    found = dict(texts)
    for index in sorted(below):
        if index in texts:
            continue
        merged = next((m for m in table.merged if m.first_row <= row <= m.last_row
                       and m.first_column <= index <= m.last_column), None)
        if merged is not None:
            over: int | None = merged.first_column
        else:  # a file that tells of merged cells has none here
            over = None if table.merged else max((i for i in texts if i < index), default=None)
        if over is not None and over in texts:
            found[index] = texts[over]
    return found


def best_name_column(
    raw: RawTable, candidates: Iterable[int], first_row: int, is_known: Callable[[str], bool]
) -> int | None:
    """Of several columns the one that holds most known names, of equals the first; None where none is named."""
    return max(candidates, key=lambda index: (known_names(raw, index, first_row, is_known), -index), default=None)


def known_names(raw: RawTable, column: int, first_row: int, is_known: Callable[[str], bool]) -> int:
    """How many cells of a column, from a row on and not far below it, are names that are known."""
    rows = raw.rows[first_row : first_row + FURTHEST]
    return sum(is_known_text(cells[column], is_known) for cells in rows if column < len(cells))


def is_known_text(value: CellValue, is_known: Callable[[str], bool]) -> bool:
    return isinstance(value, str) and is_known(value)
