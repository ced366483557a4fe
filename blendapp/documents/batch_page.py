"""The batch sheet: what the operator weighs from."""

from __future__ import annotations

from typing import Any

from blendapp.documents import letters, phrases, sections
from blendapp.documents.flow import Block, Style, paragraph
from blendapp.documents.frame import Frame, Mark
from blendapp.documents.letters import BOLD
from blendapp.documents.paper import MM, Paper
from blendapp.documents.pen import Pen
from blendapp.documents.sections import BODY, STRONG
from blendapp.documents.weighing import weighing_table
from blendapp.domain.batches import Batch, BatchPage
from blendapp.domain.notation import notation
from blendapp.domain.wording import _, plural

_TITLE = Style(22, BOLD, leading=27)
_CODE_SIZE = 24 * MM
_CODE_NAME_BYTES = 80


def draw(batch: Batch, page: BatchPage, paper: Paper) -> bytes:
    """The page as a PDF."""
    kinds = {
        BatchPage.SHEET: _("Batch sheet"),
        BatchPage.MASTER: _("Master formula record"),
        BatchPage.BLANK: _("Blank batch record"),
    }
    frame = Frame(
        paper,
        title=" · ".join([batch.formula, batch.version, number_words(batch)]),
        kind=kinds[page],
        owner=batch.mill,
        name=batch.formula,
        rest=f"{batch.version} · {number_words(batch)}",
        marks=_marks(batch),
    )
    return frame.draw(_blocks(batch, frame.width))


def number_words(batch: Batch) -> str:
    """"Batch 1041", or that it has no number yet."""
    return _("not numbered") if batch.number is None else _("Batch {number}").format(number=batch.number)


def _marks(batch: Batch) -> list[Mark]:
    marks = []
    if not batch.fit_to_mix or batch.cause is not None:
        marks.append(Mark(_("NOT TO BE MIXED"), warning=True))
    if batch.draft:
        marks.append(Mark(_("DRAFT")))
    if batch.copy > 0:
        marks.append(Mark(_("COPY {number}").format(number=batch.copy)))
    return marks


def _blocks(batch: Batch, width: float) -> list[Block]:
    cautions = phrases.special(batch.cautions)
    blocks = _title(batch, width) + _no_sheet(batch, width) + _broken(batch, width)
    if cautions and batch.lines:
        words = plural(
            "One caution stands after the lines of this sheet: read it before weighing.",
            "{count} cautions stand after the lines of this sheet: read them before weighing.",
            len(cautions),
        ).format(count=len(cautions))
        blocks += paragraph(words, STRONG, width, gap=10)
    if batch.lines:
        blocks += weighing_table(batch, width)
    blocks += sections.cautions(cautions, width)
    blocks += sections.nutrients(batch.nutrients, _("Nutrients that result"), width)
    return blocks


def _title(batch: Batch, width: float) -> list[Block]:
    """The formula's name, large, and the facts, beside a code that a reader can scan."""
    inner = width - _CODE_SIZE - 12
    lines = _TITLE.wrap(batch.formula, inner)
    strip = sections.facts(_facts(batch), inner)
    strip_top = len(lines) * _TITLE.line + 8

    def draw(pen: Pen, left: float, top: float) -> None:
        for number, line in enumerate(lines):
            pen.text(left, top + number * _TITLE.line, line, _TITLE)
        strip.draw(pen, left, top + strip_top)
        _draw_code(pen, left + width - _CODE_SIZE, top, code_text(batch))

    blocks = [Block(max(_CODE_SIZE, strip_top + strip.height), draw)]
    if batch.approved_by:
        words = _("This is {version}, approved by {name}.").format(version=batch.version, name=batch.approved_by)
        blocks += paragraph(words, BODY, width, gap=8)
    return blocks


def code_text(batch: Batch) -> str:
    """What the code on the sheet says: formula, version and batch, a line each; a very long name is cut."""
    name = letters.plain(batch.formula).encode()[:_CODE_NAME_BYTES].decode(errors="ignore")
    version = letters.plain(batch.version).encode()[:_CODE_NAME_BYTES].decode(errors="ignore")
    return "\n".join([name, version, number_words(batch)])


def _draw_code(pen: Pen, left: float, top: float, text: str) -> None:
    from reportlab.graphics import renderPDF
    from reportlab.graphics.barcode.qr import QrCodeWidget
    from reportlab.graphics.shapes import Drawing

    code: Any = QrCodeWidget(text, barLevel="M", barWidth=_CODE_SIZE, barHeight=_CODE_SIZE, barBorder=0)
    drawing: Any = Drawing(_CODE_SIZE, _CODE_SIZE)
    drawing.add(code)
    renderPDF.draw(drawing, pen.canvas, left, pen.height - top - _CODE_SIZE)


def _facts(batch: Batch) -> list[tuple[str, str]]:
    short = notation().write_short
    batches = plural("{count} batch", "{count} equal batches", batch.batches).format(count=batch.batches)
    return [
        (_("Version"), batch.version),
        (_("Batch number"), _("not numbered") if batch.number is None else str(batch.number)),
        (_("Date"), batch.made.isoformat()),
        (_("One batch"), phrases.with_unit(short(batch.batch_kg), "kg")),
        (_("Order"), _("{kg} kg in {batches}").format(kg=short(batch.order_kg), batches=batches)),
    ]


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

