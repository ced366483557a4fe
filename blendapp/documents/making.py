"""What is done before and after the weighing: what is made first, the clean-out of the mixer, the mixing order."""

from __future__ import annotations

from collections.abc import Sequence

from blendapp.documents import forms, sections
from blendapp.documents.flow import Block, Style, heading, paragraph
from blendapp.documents.forms import Field
from blendapp.documents.letters import BOLD
from blendapp.documents.phrases import with_unit
from blendapp.documents.rows import BOX, Column, Rows, Text
from blendapp.documents.sections import BODY, LABEL, STRONG
from blendapp.domain import figures
from blendapp.domain.batches import Batch, BatchPage, CleanOut, Step
from blendapp.domain.notation import notation
from blendapp.domain.wording import _

_WORDS = Style(12, leading=15)
_SETTING = Style(10.5, leading=13)
_FIGURE = Style(12, BOLD, leading=15)
_BLANK_STEPS = 4


def to_make(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    """What must be made before this batch, and by which formula."""
    if not batch.to_make:
        return []
    unit = batch.mass_unit
    for_order = page is BatchPage.SHEET and batch.batches > 1
    masses = [
        with_unit(figures.write_typed_mass(one.mass_kg if for_order else one.mass_kg / batch.batches, unit), unit)
        for one in batch.to_make
    ]
    title = _("For the whole order") if for_order else _("For one batch")
    columns = [Column("", BOX), Column(_("Ingredient")), _figure_column(title, masses)]
    if page is not BatchPage.MASTER:
        columns += [Column(_("Made as batch"), 74.0, write=True), Column(_("Initials"), 44.0, write=True)]
    if page is not BatchPage.MASTER:
        columns[0] = Column("", BOX, tick=True)
    blocks, rows, heads = _table(_("To be made first"), columns, width)
    for one, mass in zip(batch.to_make, masses, strict=True):
        name = [(one.ingredient, _WORDS)]
        if one.formula != one.ingredient:
            name.append((_("by the formula {name}").format(name=one.formula), _SETTING))
        cells: list[list[Text]] = [[], name, [(mass, _FIGURE)], *([[], []] if page is not BatchPage.MASTER else [])]
        blocks += rows.row(cells, heads=heads)
    return blocks


def clean_out(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    """What went through the mixer before, and what was done about it.

    Physical cleaning, flushing and sequencing are the ways that 21 CFR 225.65 and 225.165 name (from memory).
    """
    chosen = batch.clean_out if page is BatchPage.SHEET else None
    words = {
        CleanOut.PHYSICAL: _("Physical"),
        CleanOut.FLUSH: _("Flush"),
        CleanOut.SEQUENCE: _("Sequence"),
        CleanOut.NONE: _("None needed"),
    }
    before = batch.previous_feed if page is BatchPage.SHEET else ""
    blocks = heading(_("Clean-out of the mixer"), width)
    blocks.append(forms.fields([Field(_("Feed before, and its batch"), value=before)], width, gap=0, keep_next=True))
    if batch.clean_out_reason and page is BatchPage.SHEET:
        reason = paragraph(batch.clean_out_reason, STRONG, width - 10, gap=6, keep_next=True)
        reason += paragraph(_answer_to_reason(batch), STRONG, width - 10, gap=2, keep_next=True)
        blocks += [_with_next(block) for block in sections.barred(reason)]
    blocks.append(forms.boxes([(words[one], one is chosen) for one in CleanOut], width, gap=4))
    row = [Field(_("How: flushed with, or batches between"), 2.4), Field(_("Time"), 0.8), Field(_("Initials"), 0.8)]
    return [*blocks, forms.fields(row, width, gap=0)]


def _answer_to_reason(batch: Batch) -> str:
    """What was chosen where a clean-out is needed, or who answers for none."""
    if not batch.lacks_clean_out:
        return _("Do what is crossed below before anything is weighed into the mixer.")
    if batch.accepted_reason and batch.accepted_by:
        words = _("Mixed without a clean-out; accepted by {name}: {reason}")
        return words.format(name=batch.accepted_by, reason=batch.accepted_reason)
    return _("No clean-out is chosen: choose one before anything is weighed into the mixer.")


def mixing(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    """The mixing order with times and settings; on sheet and blank record each step is ticked, timed and initialled.

    21 CFR 225.102 asks for mixing steps, times and settings (from memory).
    """
    master = page is BatchPage.MASTER
    minutes = [_minutes(step) for step in batch.steps]
    number_width = LABEL.width(str(len(batch.steps))) + 4
    columns = [Column("", number_width), Column(_("Step")), _figure_column(_("Minutes"), minutes)]
    tail: list[list[Text]] = []
    if not master:
        columns.insert(0, Column("", BOX, tick=True))
        columns += [Column(_("Time"), 54.0, write=True), Column(_("Initials"), 44.0, write=True)]
        tail = [[], []]
    if not batch.steps and master:
        words = _("No steps are entered for this formula.")
        return heading(_("Mixing order"), width) + paragraph(words, BODY, width)
    blocks, rows, heads = _table(_("Mixing order"), columns, width)
    if not batch.steps:
        words = _("No steps are entered for this formula; write down what is done.")
        blocks[-1:] = [*(_with_next(block) for block in paragraph(words, BODY, width)), rows.head(gap=4)]
    front: list[list[Text]] = [] if master else [[]]
    for number, step in enumerate(batch.steps, start=1):
        words_of: list[Text] = [(step.text, _WORDS)]
        if step.setting:
            words_of.append((_("Setting: {text}").format(text=step.setting), _SETTING))
        cells = [*front, [(str(number), LABEL)], words_of, [(minutes[number - 1], _FIGURE)], *tail]
        blocks += rows.row(cells, heads=heads)
    for _number in range(0 if batch.steps else _BLANK_STEPS):
        blocks += rows.row([*front, [("", LABEL)], [("", _WORDS)], [], *tail], heads=heads)
    if not master:
        row = [Field(_("Mixing began")), Field(_("Mixing ended")), Field(_("Minutes mixed")), Field(_("Initials"), 0.7)]
        blocks.append(forms.fields(row, width, gap=8))
    return blocks


def _minutes(step: Step) -> str:
    return notation().write_short(step.minutes, 2) or "–"


def _figure_column(title: str, figures_shown: Sequence[str]) -> Column:
    longest_word = max(LABEL.width(word) for word in title.split(" "))
    widest = max([longest_word, LABEL.width(title) * 0.62, *map(_FIGURE.width, figures_shown)])
    return Column(title, widest + 2, right=True)


def _table(title: str, columns: Sequence[Column], width: float) -> tuple[list[Block], Rows, list[Block]]:
    """Heading and head of a table; its columns; what stands again where it goes on on another page."""
    rows = Rows(tuple(columns), width)
    head = rows.head(gap=0)
    again = heading(_("{heading}, continued").format(heading=title), width)
    return [*heading(title, width), head], rows, [*again, head]


def _with_next(block: Block) -> Block:
    return Block(block.height, block.draw, block.gap, True, block.heads)
