"""What is filled in by hand: labelled places to write in, and boxes to tick, high enough for a pen."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from blendapp.documents import letters
from blendapp.documents.flow import Block, Style
from blendapp.documents.letters import BOLD
from blendapp.documents.paper import MM
from blendapp.documents.pen import INK, Pen
from blendapp.documents.rows import BOX
from blendapp.documents.sections import LABEL

VALUE = Style(12, BOLD, leading=15)
_CHOICE = Style(11, leading=14)
_CROSS = Style(15, BOLD, leading=BOX)
_GAP = 10.0
_LEAST_LINE = 10 * MM
# Room for handwriting above the line, below the label.
_ROOM = 6 * MM


@dataclass(frozen=True)
class Field:
    """A label over a place to write in, or over a value that is known. share: its part of the width."""

    label: str
    share: float = 1.0
    value: str = ""


def fields(row: Sequence[Field], width: float, *, gap: float = 4.0, keep_next: bool = False) -> Block:
    """Fields side by side, the line of each to write on at one level."""
    shares = sum(field.share for field in row)
    widths = [(width - _GAP * (len(row) - 1)) * field.share / shares for field in row]
    labels = [LABEL.wrap(field.label, each) for field, each in zip(row, widths, strict=True)]
    values = [VALUE.wrap(field.value, each) if field.value else [] for field, each in zip(row, widths, strict=True)]
    label_height = max(len(label) for label in labels) * LABEL.line
    room = max(_ROOM, max(len(value) for value in values) * VALUE.line + 3)
    height = max(_LEAST_LINE, label_height + room)

    def draw(pen: Pen, left: float, top: float) -> None:
        x = left
        for label, value, each in zip(labels, values, widths, strict=True):
            for place, line in enumerate(label):
                pen.text(x, top + place * LABEL.line, line, LABEL)
            for place, line in enumerate(value):
                pen.text(x, top + height - 3 - (len(value) - place) * VALUE.line, line, VALUE)
            if not value:
                pen.rule(x, x + each, top + height, 0.9, INK)
            x += each + _GAP

    return Block(height, draw, gap, keep_next)


def boxes(choices: Sequence[tuple[str, bool]], width: float, *, gap: float = 6.0) -> Block:
    """Boxes with their words in a row, over several lines where they are long; a chosen one is crossed."""
    most = width - BOX - 6
    lines: list[list[tuple[float, str, bool]]] = [[]]
    x = 0.0
    for words, ticked in choices:
        text = letters.shortened(words, _CHOICE.font, _CHOICE.size, most)
        taken = BOX + 6 + _CHOICE.width(text)
        if lines[-1] and x + taken > width:
            lines.append([])
            x = 0.0
        lines[-1].append((x, text, ticked))
        x += taken + 22

    pitch = 9 * MM

    def draw(pen: Pen, left: float, top: float) -> None:
        for row, line in enumerate(lines):
            y = top + row * pitch + (pitch - BOX) / 2
            for x, text, ticked in line:
                pen.outline(left + x, y, BOX, BOX)
                if ticked:
                    pen.text_middle(left + x + BOX / 2, y, "×", _CROSS)
                pen.text(left + x + BOX + 6, y + (BOX - _CHOICE.line) / 2, text, _CHOICE)

    return Block(pitch * len(lines), draw, gap, keep_next=True)
