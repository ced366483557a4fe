"""The table of what goes into a batch: one line a weighing, by scale, with the total of the lines as they are shown."""

from __future__ import annotations

from collections.abc import Sequence

from blendapp.documents import letters
from blendapp.documents.flow import Block, Draw, Style, paragraph
from blendapp.documents.letters import BOLD
from blendapp.documents.paper import MM
from blendapp.documents.pen import INK, Pen
from blendapp.documents.phrases import with_unit
from blendapp.documents.rows import Rows
from blendapp.documents.sections import LABEL
from blendapp.documents.weighing_groups import BESIDE, TARGET, Group, Layout, groups_of, running, write_share
from blendapp.documents.weighing_words import medicated
from blendapp.domain import figures
from blendapp.domain.batches import Batch, BatchPage
from blendapp.domain.notation import notation
from blendapp.domain.wording import _

_GROUP = Style(12, BOLD, leading=15.5)
_SAID = Style(12, leading=15)
_SAID_LOUD = Style(12, BOLD, leading=15)
_TOTAL_LINE = 10 * MM


def weighing_table(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    """Heads, lines by scale, total and residue."""
    groups = groups_of(batch)
    total = notation().write(*_sum_shown(groups))
    layout = Layout(batch, page, groups, total, width)
    blocks: list[Block] = []
    if page is not BatchPage.MASTER and any(group.band(line) for group in groups for line in group.lines):
        blocks += paragraph(_("In small figures: what may be weighed."), LABEL, width, gap=14, keep_next=True)
    number, titles = 0, None
    for group in groups:
        rows = layout.rows(group)
        head = rows.head(gap=4.0) if number == 0 and blocks else rows.head()
        if titles != (titles := [(column.title, span) for column, span in zip(rows.columns, rows.spans, strict=True)]):
            blocks.append(head)
        blocks += _group_heading(group.title, width, [head])
        heads = [head, *_group_heading(_("{group}, continued").format(group=group.title), width, ())]
        so_far = running(group)
        for place, line in enumerate(group.lines):
            number += 1
            blocks += rows.row(
                layout.cells(group, number, line, so_far[place]), heads=heads,
                below=medicated(line, width, rows.spans[1][0]), keep_next=number == len(batch.lines),
            )
    return blocks + _total(batch, page, groups, layout.rows(groups[-1]))


def _group_heading(title: str, width: float, heads: Sequence[Block]) -> list[Block]:
    blocks = paragraph(title, _GROUP, width)
    last = len(blocks) - 1
    return [
        Block(
            _GROUP.line + (8 if place == 0 else 0) + (2 if place == last else 0),
            _lowered(block, 8 if place == 0 else 0),
            keep_next=True,
            heads=heads if place == 0 else (),
        )
        for place, block in enumerate(blocks)
    ]


def _lowered(block: Block, by: float) -> Draw:
    def draw(pen: Pen, left: float, top: float) -> None:
        block.draw(pen, left, top + by)

    return draw


def _sum_shown(groups: Sequence[Group]) -> tuple[float, int]:
    """The sum of the masses as they stand on the page, and its decimals."""
    decimals = max(group.decimals for group in groups)
    return round(sum(group.mass_shown(line) for group in groups for line in group.lines), decimals), decimals


def _total(batch: Batch, page: BatchPage, groups: Sequence[Group], rows: Rows) -> list[Block]:
    """The sum of the lines in the unit of the page, beside it the sum in that of the scales where all show another."""
    words = letters.plain(_("Total {unit}").format(unit=batch.mass_unit))
    total = letters.plain(notation().write(*_sum_shown(groups)))
    whole = letters.plain(write_share(1.0)) if page is BatchPage.MASTER else ""
    name, target = rows.spans[1], rows.spans[2]
    own, written_unit = _units(groups)
    beside = ""
    if own and own != batch.mass_unit and not any(group.by_volume for group in groups):
        beside = letters.plain(notation().write_short(figures.mass_in(batch.total_kg, own)))
    # The places to write in are the lot, then the mass.
    written = [span for column, span in zip(rows.columns, rows.spans, strict=True) if column.write]
    indent = name[0]
    # Very wide figures leave no room for the word beside them.
    above = 0.0 if indent + _GROUP.width(words) + TARGET.width(total) + 6 <= target[1] else _GROUP.line

    def draw(pen: Pen, left: float, top: float) -> None:
        pen.rule(left, left + rows.width, top, 1.2, INK)
        middle = top + above + _TOTAL_LINE / 2
        pen.text(left + indent, middle - above - _GROUP.line / 2, words, _GROUP)
        pen.text_right(left + target[1], middle - TARGET.line / 2, total, TARGET)
        pen.text_right(left + rows.width, middle - BESIDE.line / 2, whole, BESIDE)
        if beside:
            pen.text_right(left + rows.spans[3][1], middle - BESIDE.line / 2, beside, BESIDE)
        for start, end in written[1:2]:
            bottom = top + above + _TOTAL_LINE
            pen.text_right(left + end, bottom - LABEL.line - 2, letters.plain(written_unit), LABEL)
            pen.rule(left + start, left + end, bottom, 0.9, INK)

    block = Block(above + _TOTAL_LINE + 5, draw, keep_next=True, heads=[rows.head()])
    return [block, *_rounding(batch, groups, rows, indent), *_residue(batch, groups, rows, indent)]


def _units(groups: Sequence[Group]) -> tuple[str, str]:
    """The unit that all scales show, "" where they differ; what stands at the place for the total that was weighed."""
    unit = groups[0].unit
    shown = {group.own_unit for group in groups if not group.by_volume} or {unit}
    if len(shown) == 1:
        own = shown.pop()
        return own, own
    return "", _("all in {unit}").format(unit=unit)


def _rounding(batch: Batch, groups: Sequence[Group], rows: Rows, indent: float) -> list[Block]:
    """That the lines were rounded to be shown, where their sum is not the total."""
    unit, (shown, decimals) = batch.mass_unit, _sum_shown(groups)
    exact = figures.mass_in(batch.total_kg, unit)
    said = []
    unrounded = round(exact, max(decimals, 3))
    if unrounded != shown:
        text = _("The total is the sum of the lines as they are shown, rounded; unrounded it is {mass}.")
        said.append(text.format(mass=with_unit(notation().write_short(unrounded, max(decimals, 3)), unit)))
    if unit != "kg":
        text = _("All lines are {kg} kg together.")
        said.append(text.format(kg=notation().write_short(batch.total_kg)))
    if not said:
        return []
    return [_next(block) for block in paragraph(" ".join(said), _SAID, rows.width, indent=indent)]


def _residue(batch: Batch, groups: Sequence[Group], rows: Rows, indent: float) -> list[Block]:
    unit = batch.mass_unit
    asked = with_unit(figures.write_typed_mass(batch.batch_kg, unit), unit)
    residue = batch.residue_kg
    if abs(residue) < 1e-9:
        words = _("Residue 0 {unit}: the lines add up to the batch of {mass}.")
        return paragraph(words.format(unit=unit, mass=asked), _SAID, rows.width, indent=indent)
    sentence = (
        _("Residue {by}: the lines come to {by} more than the batch of {mass}.")
        if residue > 0
        else _("Residue −{by}: the lines come to {by} less than the batch of {mass}.")
    )
    by = with_unit(_residue_text(batch, groups, abs(residue)), unit)
    return paragraph(sentence.format(by=by, mass=asked), _SAID_LOUD, rows.width, indent=indent)


def _residue_text(batch: Batch, groups: Sequence[Group], residue_kg: float) -> str:
    value = figures.mass_in(residue_kg, batch.mass_unit)
    # As many decimals as the lines have, and as a batch size typed by hand needs, at most 6.
    typed = len(f"{value:.6f}".rstrip("0").partition(".")[2]) if batch.mass_unit == "kg" else figures.decimals_of(value)
    return notation().write(value, max(_sum_shown(groups)[1], typed))


def _next(block: Block) -> Block:
    return Block(block.height, block.draw, block.gap, True, block.heads)
