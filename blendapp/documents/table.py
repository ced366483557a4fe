"""A table of words and figures for reading: rows never split over pages, heads repeat."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from blendapp.documents.flow import Block, Style
from blendapp.documents.letters import BOLD
from blendapp.documents.pen import INK, SOFT, Pen

_WORDS = Style(10, leading=13)
_STRONG = Style(10, BOLD, leading=13)
_HEAD = Style(9, leading=11.5, ink=SOFT)
_GUTTER = 14.0
_PAD = 4.0
# A row with more lines than this goes on in a second block, so that it can always be placed on a page.
_MOST_LINES = 20


@dataclass(frozen=True)
class Column:
    """share: its part of the width that figures leave; 0 for a column of figures, right-aligned, as wide as needed."""

    title: str
    share: float = 0.0
    strong: bool = False
    figure_most: float = 110.0

    @property
    def style(self) -> Style:
        return _STRONG if self.strong else _WORDS


def table(columns: Sequence[Column], rows: Sequence[Sequence[str]], width: float, *, gap: float = 6.0) -> list[Block]:
    """The table; nothing where there are no rows. A line break in a cell begins a new line."""
    if not rows:
        return []
    widths = _widths(columns, rows, width)
    head = _row(columns, [column.title for column in columns], widths, head=True)[0]
    blocks = [Block(head.height, head.draw, gap, keep_next=True)]
    for row in rows:
        blocks += [
            Block(b.height, b.draw, b.gap, b.keep_next, heads=[head]) for b in _row(columns, row, widths, head=False)
        ]
    return blocks


def _widths(columns: Sequence[Column], rows: Sequence[Sequence[str]], width: float) -> list[float]:
    figures = []
    for place, column in enumerate(columns):
        longest_word = max(_HEAD.width(word) for word in column.title.split(" "))
        # A head of several words takes two lines rather than one a word.
        title = max(longest_word, _HEAD.width(column.title) * 0.62)
        natural = max([title, *(column.style.width(row[place]) for row in rows)])
        figures.append(min(natural + 1, column.figure_most) if not column.share else 0.0)
    left = width - sum(figures) - _GUTTER * (len(columns) - 1)
    shares = sum(column.share for column in columns) or 1.0
    return [left * column.share / shares if column.share else own for column, own in zip(columns, figures, strict=True)]


def _row(columns: Sequence[Column], cells: Sequence[str], widths: Sequence[float], *, head: bool) -> list[Block]:
    styles = [_HEAD if head else column.style for column in columns]
    wrapped = [
        [line for part in cell.split("\n") for line in style.wrap(part, each)]
        for style, cell, each in zip(styles, cells, widths, strict=True)
    ]
    most = max(len(lines) for lines in wrapped)
    blocks = []
    for start in range(0, most, _MOST_LINES):
        part = [lines[start : start + _MOST_LINES] for lines in wrapped]
        last = start + _MOST_LINES >= most
        blocks.append(_block(columns, part, styles, widths, ruled=last, head=head))
    return blocks


def _block(
    columns: Sequence[Column], cells: Sequence[Sequence[str]], styles: Sequence[Style], widths: Sequence[float], *,
    ruled: bool, head: bool,
) -> Block:
    lines = max(len(cell) for cell in cells)
    height = lines * styles[0].line + 2 * (2.0 if head else _PAD)

    def draw(pen: Pen, left: float, top: float) -> None:
        x = left
        for column, cell, style, each in zip(columns, cells, styles, widths, strict=True):
            # Heads stand on the line, rows hang from it.
            first = top + (2.0 if head else _PAD) + ((lines - len(cell)) * style.line if head else 0.0)
            for number, line in enumerate(cell):
                if column.share:
                    pen.text(x, first + number * style.line, line, style)
                else:
                    pen.text_right(x + each, first + number * style.line, line, style)
            x += each + _GUTTER
        if ruled:
            right = left + sum(widths) + _GUTTER * (len(widths) - 1)
            if head:
                pen.rule(left, right, top + height, 1, INK)
            else:
                pen.rule(left, right, top + height, 0.4)

    return Block(height, draw)
