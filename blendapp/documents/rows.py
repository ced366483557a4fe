"""A table to work in: rows of words and figures with places to write and boxes to tick; rows are never split."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property

from blendapp.documents import letters
from blendapp.documents.flow import Block, Draw, Style
from blendapp.documents.paper import MM
from blendapp.documents.pen import INK, Pen
from blendapp.documents.sections import LABEL

GUTTER = 8.0
BOX = 5 * MM
_PAD = 3.0
LEAST_ROW = 10 * MM
# What is taller than this goes on in blocks of its own below the row, so that a row always fits on a page.
_MOST_HEIGHT = 190.0

Text = tuple[str, Style]


@dataclass(frozen=True)
class Column:
    """width: in points, 0 for the one column that takes what the others leave and whose texts wrap.

    right: figures, at the right edge. write: a place to write in. tick: a box to tick.
    """

    title: str = ""
    width: float = 0.0
    right: bool = False
    write: bool = False
    tick: bool = False


@dataclass(frozen=True)
class Rows:
    """The columns of a table `width` points wide, each row at least `least_height` high."""

    columns: tuple[Column, ...]
    width: float
    least_height: float = LEAST_ROW

    @cached_property
    def spans(self) -> list[tuple[float, float]]:
        """Left and right edge of each column."""
        left = self.width - sum(c.width for c in self.columns) - GUTTER * (len(self.columns) - 1)
        found, at = [], 0.0
        for column in self.columns:
            right = at + (column.width or left)
            found.append((at, right))
            at = right + GUTTER
        return found

    def head(self, gap: float = 14.0) -> Block:
        """The titles, on a line; long ones wrap."""
        cells = [LABEL.wrap(c.title, right - left) for c, (left, right) in zip(self.columns, self.spans, strict=True)]
        most = max(len(cell) for cell in cells)

        def draw(pen: Pen, left: float, top: float) -> None:
            for column, span, cell in zip(self.columns, self.spans, cells, strict=True):
                for place, line in enumerate(cell):
                    _write(pen, left, span, top + (most - len(cell) + place) * LABEL.line, (line, LABEL), column.right)
            pen.rule(left, left + self.width, top + most * LABEL.line + 2, 1, INK)

        return Block(most * LABEL.line + 3, draw, gap, keep_next=True)

    def row(
        self, cells: Sequence[Sequence[Text]], *, heads: Sequence[Block] = (), below: Sequence[Block] = (),
        keep_next: bool = False,
    ) -> list[Block]:
        """One row; `below` is kept with it. cells: the texts of each column, each beginning a new line."""
        wrapped = [
            [] if column.write or column.tick else self._wrap(column, span, cell)
            for column, span, cell in zip(self.columns, self.spans, cells, strict=True)
        ]
        firsts = [_fitting(cell) for cell in wrapped]
        first_line = max(cell[0][1].line for cell in wrapped if cell)
        content = max(first_line + sum(style.line for _text, style in cell[1:]) for cell in firsts)
        height = max(self.least_height, content + 2 * _PAD)

        def draw(pen: Pen, left: float, top: float) -> None:
            begin = top + (height - content) / 2
            for column, span, cell in zip(self.columns, self.spans, firsts, strict=True):
                # First lines stand on one level, whatever their size.
                at = begin + (first_line - cell[0][1].line) / 2 if cell else begin
                for text in cell:
                    _write(pen, left, span, at, text, column.right)
                    at += text[1].line
                if column.tick:
                    pen.outline(left + span[0], top + (height - BOX) / 2, BOX, BOX)
            self._rule_writing(pen, left, top + height)

        rest = [
            Block(text[1].line, _writing(text, span[0]), heads=heads)
            for cell, first, span in zip(wrapped, firsts, self.spans, strict=True)
            for text in cell[len(first):]
        ]
        blocks = [Block(height, draw, keep_next=bool(rest or below) or keep_next, heads=heads), *rest]
        for place, block in enumerate(below):
            last = place == len(below) - 1
            blocks.append(Block(block.height, block.draw, block.gap, keep_next if last else True, heads))
        return [*blocks[:-1], self._ruled(blocks[-1], whole=len(blocks) > 1)]

    def _wrap(self, column: Column, span: tuple[float, float], cell: Sequence[Text]) -> list[Text]:
        if column.width:
            return [(letters.plain(text), style) for text, style in cell]
        return [(line, style) for text, style in cell for line in style.wrap(text, span[1] - span[0])]

    def _rule_writing(self, pen: Pen, left: float, y: float) -> None:
        for column, span in zip(self.columns, self.spans, strict=True):
            if column.write:
                pen.rule(left + span[0], left + span[1], y, 0.9, INK)

    def _ruled(self, block: Block, *, whole: bool) -> Block:
        """The block with a hairline under it, under all columns or those that are not written in."""
        spans = [span for column, span in zip(self.columns, self.spans, strict=True) if not column.write]
        right = self.width if whole else spans[-1][1]

        def draw(pen: Pen, left: float, top: float) -> None:
            block.draw(pen, left, top)
            pen.rule(left, left + right, top + block.height, 0.4)

        return Block(block.height, draw, block.gap, block.keep_next, block.heads)


def _fitting(cell: Sequence[Text]) -> list[Text]:
    """The first lines of a cell, as many as a row may be high."""
    found: list[Text] = []
    height = 0.0
    for text in cell:
        height += text[1].line
        if found and height > _MOST_HEIGHT:
            break
        found.append(text)
    return found


def _write(pen: Pen, left: float, span: tuple[float, float], top: float, text: Text, right: bool) -> None:
    if right:
        pen.text_right(left + span[1], top, *text)
    else:
        pen.text(left + span[0], top, *text)


def _writing(text: Text, indent: float) -> Draw:
    def draw(pen: Pen, left: float, top: float) -> None:
        pen.text(left + indent, top, *text)

    return draw
