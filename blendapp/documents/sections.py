"""Parts that several pages share: facts, framed notes, the two columns of nutrients, lists of sentences."""

from __future__ import annotations

from collections.abc import Sequence

from blendapp.documents import letters, phrases
from blendapp.documents.flow import Block, Style, heading, paragraph
from blendapp.documents.letters import BOLD
from blendapp.documents.pen import INK, SOFT, Pen
from blendapp.domain.figures import write_measure
from blendapp.domain.results import NutrientResult
from blendapp.domain.wording import _

BODY = Style(10.5, leading=14)
STRONG = Style(10.5, BOLD, leading=14)
SMALL = Style(9, leading=12, ink=SOFT)
LABEL = Style(9, leading=12, ink=SOFT)
_FACT = Style(12, BOLD, leading=15)


def facts(pairs: Sequence[tuple[str, str]], width: float, *, gap: float = 10.0) -> Block:
    """A strip of labelled facts; wide ones get more room, long ones wrap."""
    wanted = [max(LABEL.width(label), min(_FACT.width(value), width / 4)) + 14 for label, value in pairs]
    widths = [each * width / sum(wanted) for each in wanted]
    lefts = [sum(widths[:place]) for place in range(len(widths))]
    cells = [
        (LABEL.wrap(label, each - 10), _FACT.wrap(value, each - 10))
        for (label, value), each in zip(pairs, widths, strict=True)
    ]
    label_lines = max(len(label) for label, _value in cells)
    lines = max(len(value) for _label, value in cells)

    def draw(pen: Pen, left: float, top: float) -> None:
        for place, (label, value) in enumerate(cells):
            x = left + lefts[place]
            for number, line in enumerate(label):
                pen.text(x, top + number * LABEL.line, line, LABEL)
            for number, line in enumerate(value):
                pen.text(x, top + label_lines * LABEL.line + number * _FACT.line, line, _FACT)

    return Block(label_lines * LABEL.line + lines * _FACT.line, draw, gap)


def barred(blocks: Sequence[Block], weight: float = 2.5) -> list[Block]:
    """Blocks with a black bar down their left side, for what must not be overlooked; they leave 10 points for it."""

    def with_bar(block: Block, first: bool) -> Block:
        above = 0.0 if first else block.gap

        def draw(pen: Pen, left: float, top: float) -> None:
            pen.upright(left + weight / 2, top - above, top + block.height, weight, INK)
            block.draw(pen, left + 10, top)

        return Block(block.height, draw, block.gap, block.keep_next)

    return [with_bar(block, number == 0) for number, block in enumerate(blocks)]


def numbered(sentences: Sequence[str], width: float, style: Style = BODY) -> list[Block]:
    """Sentences, numbered where there are several."""
    if len(sentences) == 1:
        return paragraph(sentences[0], style, width)
    indent = style.width(f"{len(sentences)}.") + 6
    blocks: list[Block] = []
    for number, sentence in enumerate(sentences, start=1):
        blocks += paragraph(
            sentence, style, width, gap=3 if number > 1 else 0, indent=indent, mark=f"{number}."
        )
    return blocks


def nutrients(found: Sequence[NutrientResult], title: str, width: float) -> list[Block]:
    """Nutrients with value and unit in two columns, read down; a star where a value is incomplete."""
    if not found:
        return []
    gutter = 24.0
    column = (width - gutter) / 2
    unit_width = max(BODY.width(n.unit) for n in found)
    figures = [write_measure(n.value) if n.value is not None else _("unknown") for n in found]
    figure_width = max(STRONG.width(f) for f in figures)
    name_width = column - unit_width - figure_width - 22
    cells = [
        (BODY.wrap(n.name, name_width), figure, letters.plain(n.unit), bool(n.missing) and n.value is not None)
        for n, figure in zip(found, figures, strict=True)
    ]
    half = (len(cells) + 1) // 2
    blocks = heading(title, width)
    heads = heading(_("{heading}, continued").format(heading=title), width)
    for row in range(half):
        pair = [cells[row]] + ([cells[row + half]] if row + half < len(cells) else [])
        height = max(len(cell[0]) for cell in pair) * BODY.line + 4

        def draw(
            pen: Pen, left: float, top: float, pair: Sequence[tuple[list[str], str, str, bool]] = pair,
            height: float = height,
        ) -> None:
            for place, (lines, figure, unit, starred) in enumerate(pair):
                x = left + place * (column + gutter)
                for number, line in enumerate(lines):
                    pen.text(x, top + 2 + number * BODY.line, line, BODY)
                pen.text_right(x + column - unit_width - 12, top + 2, letters.plain(figure), STRONG)
                if starred:
                    pen.text(x + column - unit_width - 11, top + 2, "*", STRONG)
                pen.text(x + column - unit_width - 4, top + 2, unit, BODY)
                pen.rule(x, x + column, top + height, 0.4)

        blocks.append(Block(height, draw, keep_next=row == 0 and half > 1, heads=heads))
    for number, sentence in enumerate(phrases.missing_words(found)):
        blocks += paragraph("* " + sentence, SMALL, width, gap=6 if number == 0 else 1)
    return blocks


def cautions(found: Sequence[str], width: float) -> list[Block]:
    """The cautions of this mix, behind a bar."""
    if not found:
        return []
    return heading(_("Cautions"), width) + barred(numbered(found, width - 10))
