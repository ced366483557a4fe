"""The three pages of a batch, from one description: what the operator weighs from, what stands for years, and a blank.

21 CFR 225.102 asks of a master record: identity, name and weight of every component for a stated weight, mixing steps,
times and settings, theoretical yield; of a production record: a copy of it, the date, the amounts used, who weighed and
who checked, actual yield (from memory).
"""

from __future__ import annotations

import dataclasses

from blendapp.documents import closing, making, phrases, sections
from blendapp.documents.batch_head import code, facts, number_words, places_to_name, to_be_copied
from blendapp.documents.flow import Block, Style, paragraph
from blendapp.documents.frame import Frame, Mark, draw_all
from blendapp.documents.letters import BOLD
from blendapp.documents.paper import Paper
from blendapp.documents.sections import BODY, STRONG
from blendapp.documents.weighing import weighing_table
from blendapp.documents.weighing_words import is_medicated, tagged, use
from blendapp.domain.batches import Batch, BatchPage, proof_words
from blendapp.domain.wording import _, plural

_WITHDRAWAL = Style(12, BOLD, leading=15)
# Cautions higher than this would push the weighing off the first page: they follow it, and the sheet says so above it.
_MOST_CAUTIONS = 120.0
MOST_SHEETS = 60


def draw(batch: Batch, page: BatchPage, paper: Paper) -> bytes:
    """The page as a PDF; of a sheet one for each of the equal batches, unless batch.place names one.

    An order of more than MOST_SHEETS batches has one sheet with room to write which of them it is.
    """
    if page is not BatchPage.SHEET:
        # A record of a version has no number of its own and is no copy of a sheet.
        batch = dataclasses.replace(batch, number=None, copy=0)
    each_has_one = page is BatchPage.SHEET and batch.lines and not batch.place and batch.batches <= MOST_SHEETS
    places = range(1, batch.batches + 1) if each_has_one else ()
    each = [dataclasses.replace(batch, place=place) for place in places] or [batch]
    return draw_all([_document(one, page, paper) for one in each])


def _document(batch: Batch, page: BatchPage, paper: Paper) -> tuple[Frame, list[Block]]:
    kinds = {
        BatchPage.SHEET: _("Batch sheet"),
        BatchPage.MASTER: _("Master formula record"),
        BatchPage.BLANK: _("Blank batch record"),
    }
    of = number_words(batch, page)
    if to_be_copied(batch, page):
        # Pages of two copies are told apart by what is written here.
        of = _("{batch}, {place} of {count}").format(batch=of, place="_" * 7, count=batch.batches)
    frame = Frame(
        paper,
        title=" · ".join([batch.formula, batch.version, of]),
        kind=kinds[page],
        owner=batch.mill,
        name=batch.formula,
        rest=f"{batch.version} · {of}",
        marks=_marks(batch),
    )
    return frame, _blocks(batch, page, frame.width)


def _marks(batch: Batch) -> list[Mark]:
    marks = []
    if not batch.fit_to_mix or batch.cause is not None:
        marks.append(Mark(_("NOT TO BE MIXED"), warning=True))
    if batch.draft:
        marks.append(Mark(_("DRAFT")))
    if batch.copy > 0:
        marks.append(Mark(_("COPY {number}").format(number=batch.copy)))
    return marks


def _blocks(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    blocks = code(batch, page, width) + facts(batch, page, width) + places_to_name(batch, page, width)
    blocks += _no_sheet(batch, width) + _broken(batch, width) + _medicated_feed(batch, width)
    cautions = sections.cautions(phrases.special(batch.cautions), width)
    before = sum(block.height + block.gap for block in cautions) <= _MOST_CAUTIONS
    blocks += cautions if before or not batch.lines else _pointer(batch, width)
    if batch.lines:
        blocks += making.to_make(batch, page, width)
        if page is not BatchPage.MASTER:
            blocks += making.clean_out(batch, page, width)
        blocks += weighing_table(batch, page, width) + _proof(batch, width) + ([] if before else cautions)
        blocks += making.mixing(batch, page, width) + closing.yields(batch, page, width)
        blocks += closing.signatures(batch, width) if page is BatchPage.MASTER else closing.sample_and_release(width)
    return blocks if page is BatchPage.BLANK else blocks + _nutrients(batch, width)


def _nutrients(batch: Batch, width: float) -> list[Block]:
    """What the mix holds, first of what the formula limits."""
    limited = [found for found in batch.nutrients if found.limited]
    if not limited:
        return sections.nutrients(batch.nutrients, _("Nutrients that result"), width)
    others = [found for found in batch.nutrients if not found.limited]
    blocks = sections.nutrients(limited, _("Nutrients that the formula limits"), width)
    return blocks + sections.nutrients(others, _("Other nutrients that result"), width)


def _pointer(batch: Batch, width: float) -> list[Block]:
    count = len(phrases.special(batch.cautions))
    words = plural(
        "One caution stands after the lines of this sheet: read it before weighing.",
        "{count} cautions stand after the lines of this sheet: read them before weighing.",
        count,
    ).format(count=count)
    return paragraph(words, STRONG, width, gap=10)


def _proof(batch: Batch, width: float) -> list[Block]:
    """How much better another weighing could be, where time was up before it was known."""
    words = proof_words(batch)
    return paragraph(words, BODY, width, gap=4) if words else []


def _medicated_feed(batch: Batch, width: float) -> list[Block]:
    """That this feed carries a drug, and how long before slaughter or milking it is withdrawn, before all else."""
    medicated = [line for line in batch.lines if is_medicated(line)]
    if not medicated:
        return []
    inner = width - 10
    blocks = tagged(_("MEDICATED FEED"), "", inner, 0)
    blocks[0] = dataclasses.replace(blocks[0], gap=14)
    for line in medicated:
        said = [line.ingredient, *use(line)]
        if not line.withdrawal:
            said.append(_("no withdrawal is entered"))
        blocks += paragraph(" · ".join(said), _WITHDRAWAL, inner, gap=2)
    return sections.barred(blocks, 4.0)


def _no_sheet(batch: Batch, width: float) -> list[Block]:
    if batch.cause is None:
        return []
    words = paragraph(_("No sheet can be made"), STRONG, width - 10, gap=14, keep_next=True)
    return sections.barred(words + paragraph(batch.cause, BODY, width - 10))


def _broken(batch: Batch, width: float) -> list[Block]:
    """The limits that the weighing breaks, by how much, and who accepted it."""
    if not batch.broken:
        return []
    inner = width - 10
    title = plural(
        "This weighing breaks one limit", "This weighing breaks {count} limits", len(batch.broken)
    ).format(count=len(batch.broken))
    blocks = paragraph(title, STRONG, inner, gap=14, keep_next=True)
    blocks += sections.numbered([phrases.broken_words(batch.limits[i]) for i in batch.broken], inner)
    return sections.barred(blocks + _acceptance(batch, inner))


def _acceptance(batch: Batch, width: float) -> list[Block]:
    if batch.fit_to_mix:
        words = _("Accepted by {name}: {reason}").format(name=batch.accepted_by, reason=batch.accepted_reason)
    else:
        words = _("Not accepted by anyone: this batch is not to be mixed.")
    return paragraph(words, STRONG, width, gap=4)
