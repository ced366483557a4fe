"""The table of a batch sheet: one line a weighing, by scale, with room to write lot, weight and initials."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from blendapp.documents import letters
from blendapp.documents.flow import Block, Draw, Style, paragraph
from blendapp.documents.letters import BOLD
from blendapp.documents.paper import MM
from blendapp.documents.pen import INK, LINE, Pen
from blendapp.documents.sections import BODY, LABEL
from blendapp.domain.batches import Batch, BatchLine
from blendapp.domain.figures import decimals_of_step, write_kg
from blendapp.domain.notation import notation
from blendapp.domain.wording import _

_NAME = Style(12, leading=15)
_TARGET = Style(16, BOLD, leading=19)
_RUNNING = Style(12, leading=19)
_DETAIL = Style(10, leading=13)
_DETAIL_STRONG = Style(10, BOLD, leading=13)
_GROUP = Style(11.5, BOLD, leading=15)
_LEAST_LINE = 10 * MM
_PAD = 5.0
# A name over more lines than this goes on in a second block, so that a line can always be placed on a page.
_MOST_NAME_LINES = 12


@dataclass(frozen=True)
class _Columns:
    """Left edges and widths in points; target and running are right-aligned at target_right and running_right."""

    width: float
    name_left: float
    name_width: float
    target_right: float
    running_right: float
    lot_left: float
    weighed_left: float
    initials_left: float

    @property
    def fills(self) -> Sequence[tuple[float, float]]:
        """From and to of the places to write in."""
        return (
            (self.lot_left, self.weighed_left - 6),
            (self.weighed_left, self.initials_left - 6),
            (self.initials_left, self.width),
        )


def in_order(lines: Sequence[BatchLine]) -> list[list[BatchLine]]:
    """The lines by scale, the coarsest scale first and hand-adds last; lines of one scale keep their order."""
    groups: dict[tuple[bool, str, float], list[BatchLine]] = {}
    for line in lines:
        groups.setdefault((line.hand_add, line.scale, line.step_kg), []).append(line)
    keys = sorted(groups, key=lambda key: (key[0], -key[2], key[1]))
    return [groups[key] for key in keys]


def weighing_table(batch: Batch, width: float) -> list[Block]:
    """Head, lines by scale, total and residue."""
    groups = in_order(batch.lines)
    running: list[str] = []
    total, decimals = 0.0, 0
    for line in (line for group in groups for line in group):
        total = round(total + line.target_kg, 9)
        decimals = max(decimals, decimals_of_step(line.step_kg))
        running.append(notation().write(total, decimals))
    columns = _columns(batch, width, running, decimals)
    head = _head(columns)
    blocks = [Block(head.height, head.draw, 16, keep_next=True)]
    number = 0
    for group in groups:
        title = _group_words(group[0])
        blocks += _group_heading(title, columns, [head])
        heads = [head, *_group_heading(_("{group}, continued").format(group=title), columns, ())]
        for line in group:
            last = number == len(running) - 1
            blocks += _line(number + 1, line, running[number], columns, heads, keep_next=last)
            number += 1
    return blocks + _total(batch, columns, decimals, head)


def _columns(batch: Batch, width: float, running: Sequence[str], decimals: int) -> _Columns:
    targets = [write_kg(line.target_kg, line.step_kg) for line in batch.lines]
    target = max([_TARGET.width(t) for t in [*targets, notation().write(batch.total_kg, decimals)]] + [58]) + 10
    run = max([_RUNNING.width(r) for r in running] + [52]) + 10
    number = LABEL.width(str(len(batch.lines))) + 8
    fills = (66.0, 66.0, 46.0)
    initials = width - fills[2]
    weighed = initials - 6 - fills[1]
    lot = weighed - 6 - fills[0]
    running_right = lot - 12
    target_right = running_right - run
    return _Columns(
        width, number, target_right - target - number, target_right, running_right, lot, weighed, initials
    )


def _head(columns: _Columns) -> Block:
    """The heads of the columns; long ones wrap and stand on the line."""
    name_right = columns.name_left + columns.name_width
    run = columns.running_right - columns.target_right
    figures = (
        (_("Target kg"), columns.target_right, columns.target_right - name_right),
        (_("Running kg"), columns.running_right, run - 6),
    )
    words = (
        (_("Ingredient"), columns.name_left, columns.name_width - 6),
        *((text, start, end - start) for text, (start, end) in zip(
            (_("Lot"), _("Weighed kg"), _("Initials")), columns.fills, strict=True
        )),
    )
    rights = [(LABEL.wrap(text, width), right) for text, right, width in figures]
    lefts = [(LABEL.wrap(text, width), start) for text, start, width in words]
    most = max(len(lines) for lines, _edge in (*rights, *lefts))

    def draw(pen: Pen, left: float, top: float) -> None:
        for cells, write in ((rights, pen.text_right), (lefts, pen.text)):
            for lines, edge in cells:
                for place, line in enumerate(lines):
                    write(left + edge, top + (most - len(lines) + place) * LABEL.line, line, LABEL)
        pen.rule(left, left + columns.width, top + most * LABEL.line + 3, 1, INK)

    return Block(most * LABEL.line + 4, draw)


def _group_words(line: BatchLine) -> str:
    step = write_kg(line.step_kg, line.step_kg)
    if line.hand_add:
        named, bare = _("Hand-adds on {scale}, in steps of {step} kg"), _("Hand-adds, in steps of {step} kg")
    else:
        named, bare = _("{scale}, in steps of {step} kg"), _("In steps of {step} kg")
    return (named if line.scale else bare).format(scale=line.scale, step=step)


def _group_heading(title: str, columns: _Columns, heads: Sequence[Block]) -> list[Block]:
    blocks = paragraph(title, _GROUP, columns.width)
    last = len(blocks) - 1
    return [
        Block(
            _GROUP.line + (9 if place == 0 else 0) + (3 if place == last else 0),
            _lowered(block, 9 if place == 0 else 0),
            keep_next=True,
            heads=heads if place == 0 else (),
        )
        for place, block in enumerate(blocks)
    ]


def _lowered(block: Block, by: float) -> Draw:
    def draw(pen: Pen, left: float, top: float) -> None:
        block.draw(pen, left, top + by)

    return draw


def _line(
    number: int, line: BatchLine, running: str, columns: _Columns, heads: Sequence[Block], *, keep_next: bool
) -> list[Block]:
    """One weighing; a medicated one says what it carries on lines of its own below, kept with it."""
    names = _NAME.wrap(line.ingredient, columns.name_width)
    first, rest = names[:_MOST_NAME_LINES], names[_MOST_NAME_LINES:]
    details = _details(line, columns)
    height = max(_LEAST_LINE, len(first) * _NAME.line + 2 * _PAD)
    target = letters.plain(write_kg(line.target_kg, line.step_kg))

    def draw(pen: Pen, left: float, top: float) -> None:
        middle = top + height / 2
        pen.text(left, middle - LABEL.line / 2, str(number), LABEL)
        text_top = middle - len(first) * _NAME.line / 2
        for place, text in enumerate(first):
            pen.text(left + columns.name_left, text_top + place * _NAME.line, text, _NAME)
        pen.text_right(left + columns.target_right, middle - _TARGET.line / 2, target, _TARGET)
        pen.text_right(left + columns.running_right, middle - _RUNNING.line / 2, running, _RUNNING)
        _draw_fills(pen, left, top + height, columns)

    blocks = [Block(height, draw, keep_next=bool(rest or details) or keep_next, heads=heads)]
    blocks += [
        Block(_NAME.line, _writing(text, _NAME, columns.name_left), keep_next=False, heads=heads) for text in rest
    ]
    for place, block in enumerate(details):
        blocks.append(Block(block.height, block.draw, keep_next=place < len(details) - 1 or keep_next, heads=heads))
    # The places to write in are their own line where nothing follows below them.
    return [*blocks[:-1], _ruled(blocks[-1], columns.running_right if len(blocks) == 1 else columns.width)]


def _draw_fills(pen: Pen, left: float, y: float, columns: _Columns) -> None:
    for start, end in columns.fills:
        pen.rule(left + start, left + end, y, 0.9, INK)


def _writing(text: str, style: Style, indent: float) -> Draw:
    def draw(pen: Pen, left: float, top: float) -> None:
        pen.text(left + indent, top, text, style)

    return draw


def _ruled(block: Block, width: float, weight: float = 0.5, ink: str = LINE) -> Block:
    """The block with a hairline under it."""

    def draw(pen: Pen, left: float, top: float) -> None:
        block.draw(pen, left, top)
        pen.rule(left, left + width, top + block.height, weight, ink)

    return Block(block.height, draw, block.gap, block.keep_next, block.heads)


def _details(line: BatchLine, columns: _Columns) -> list[Block]:
    """Drug, level, species and withdrawal as entered; nothing for a line without any of them."""
    entered = (
        (_("Drug: {text}"), line.drug),
        (_("Level: {text}"), line.drug_level),
        (_("Species: {text}"), line.drug_species),
        (_("Withdrawal: {text}"), line.withdrawal),
    )
    said = [words.format(text=text) for words, text in entered if text]
    if not said:
        return []
    blocks = paragraph(
        _("MEDICATED"), _DETAIL_STRONG, columns.width, indent=columns.name_left, keep_next=True
    ) + paragraph(" · ".join(said), _DETAIL, columns.width, indent=columns.name_left)
    last = blocks[-1]
    return [*blocks[:-1], Block(last.height + _PAD, last.draw, last.gap, last.keep_next)]


def _total(batch: Batch, columns: _Columns, decimals: int, head: Block) -> list[Block]:
    total = letters.plain(notation().write(batch.total_kg, decimals))
    words = letters.plain(_("Total"))

    def draw(pen: Pen, left: float, top: float) -> None:
        pen.rule(left, left + columns.width, top, 1.2, INK)
        middle = top + _LEAST_LINE / 2
        pen.text(left + columns.name_left, middle - _GROUP.line / 2, words, _GROUP)
        pen.text_right(left + columns.target_right, middle - _TARGET.line / 2, total, _TARGET)
        pen.rule(left + columns.weighed_left, left + columns.initials_left - 6, top + _LEAST_LINE, 0.9, INK)

    blocks = [Block(_LEAST_LINE + 4, draw, keep_next=True, heads=[head])]
    return blocks + _residue(batch, columns, decimals)


def _residue(batch: Batch, columns: _Columns, decimals: int) -> list[Block]:
    asked = notation().write_short(batch.batch_kg)
    residue = batch.residue_kg
    if abs(residue) < 1e-9:
        words = _("Residue 0 kg: the lines add up to the batch of {kg} kg.").format(kg=asked)
        return paragraph(words, BODY, columns.width, indent=columns.name_left)
    by = notation().write(abs(residue), max(decimals, _decimals_typed(residue)))
    sentence = (
        _("Residue {by} kg: the lines come to {by} kg more than the batch of {kg} kg.")
        if residue > 0
        else _("Residue −{by} kg: the lines come to {by} kg less than the batch of {kg} kg.")
    )
    style = Style(BODY.size, BOLD, BODY.line)
    return paragraph(sentence.format(by=by, kg=asked), style, columns.width, indent=columns.name_left)


def _decimals_typed(value: float) -> int:
    """The decimals that a residue of a batch size typed by hand needs, at most 6."""
    short = f"{value:.6f}".rstrip("0")
    return len(short.partition(".")[2])
