"""Blocks that flow down pages: nothing is cut in two, what belongs together stays together, table heads repeat."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from dataclasses import dataclass, field

from blendapp.documents import letters
from blendapp.documents.letters import REGULAR
from blendapp.documents.pen import INK, Pen

Draw = Callable[[Pen, float, float], None]


@dataclass(frozen=True)
class Block:
    """Something of a fixed height (points) that `draw(pen, left, top)` draws; points, top counted down the page.

    gap: space above it, unless it is the first on its page. keep_next: never the last on a page, where a page can
    hold both. heads: drawn first where the block begins a page that is not the document's first.
    """

    height: float
    draw: Draw
    gap: float = 0.0
    keep_next: bool = False
    heads: Sequence[Block] = field(default=())


@dataclass(frozen=True)
class Placed:
    block: Block
    top: float


def paginate(blocks: Sequence[Block], height: float) -> list[list[Placed]]:
    """The blocks on pages with `height` points each for them; tops count from the top of that space."""
    pages: list[list[Placed]] = [[]]
    used = 0.0
    for run in _runs(blocks):
        if pages[-1] and used + _height(run) > height:
            pages.append([])
            used = 0.0
        for block in run:
            if pages[-1] and used + block.gap + block.height > height:
                pages.append([])
                used = 0.0
            gap = block.gap if pages[-1] else 0.0
            if not pages[-1] and len(pages) > 1:
                for head in block.heads:
                    pages[-1].append(Placed(head, used))
                    used += head.height
            top = used + gap
            pages[-1].append(Placed(block, top))
            used = top + block.height
    return pages


def _runs(blocks: Sequence[Block]) -> list[list[Block]]:
    """The blocks in runs that should stand on one page."""
    runs: list[list[Block]] = []
    joined = False
    for block in blocks:
        if joined:
            runs[-1].append(block)
        else:
            runs.append([block])
        joined = block.keep_next
    return runs


def _height(run: Sequence[Block]) -> float:
    return sum(block.gap + block.height for block in run)


@dataclass(frozen=True)
class Style:
    """How a text stands: size and leading in points."""

    size: float
    font: str = REGULAR
    leading: float = 0.0
    ink: str = INK

    @property
    def line(self) -> float:
        return self.leading or self.size * 1.3

    def wrap(self, text: str, width: float) -> list[str]:
        return letters.wrapped(text, self.font, self.size, width)

    def width(self, text: str) -> float:
        return letters.width_of(letters.plain(text), self.font, self.size)


def paragraph(
    text: str, style: Style, width: float, *, gap: float = 0.0, indent: float = 0.0, mark: str = "",
    keep_next: bool = False,
) -> list[Block]:
    """A text as one block a line, so that even a very long one goes on on the next page.

    mark: stands before the first line, in the indent.
    """
    lines = style.wrap(text, width - indent)
    blocks = []
    for number, line in enumerate(lines):
        first, last = number == 0, number == len(lines) - 1

        def draw(pen: Pen, left: float, top: float, line: str = line, first: bool = first) -> None:
            if first and mark:
                pen.text(left, top, mark, style)
            pen.text(left + indent, top, line, style)

        # The first two and the last two lines stay together.
        together = first or number == len(lines) - 2
        blocks.append(Block(style.line, draw, gap if first else 0.0, keep_next if last else together))
    return blocks


def heading(text: str, width: float, *, size: float = 12.0, gap: float = 16.0) -> list[Block]:
    """A section's heading; it never stands alone at the foot of a page."""
    blocks = paragraph(text, Style(size, letters.BOLD), width, gap=gap, keep_next=True)
    return [Block(b.height, b.draw, b.gap, True) for b in blocks[:-1]] + [
        Block(blocks[-1].height + 3, blocks[-1].draw, blocks[-1].gap, True)
    ]
