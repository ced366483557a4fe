"""The head of a batch's pages: name, code to scan, the facts of the batch, and places for those that are not known."""

from __future__ import annotations

from typing import Any

from blendapp.documents import forms, letters, sections
from blendapp.documents.flow import Block, Style, paragraph
from blendapp.documents.forms import Field
from blendapp.documents.letters import BOLD
from blendapp.documents.paper import MM
from blendapp.documents.pen import Pen
from blendapp.documents.phrases import with_unit
from blendapp.documents.sections import BODY, STRONG
from blendapp.domain import figures
from blendapp.domain.batches import Batch, BatchPage
from blendapp.domain.wording import _, plural

_TITLE = Style(22, BOLD, leading=27)
_CODE_SIZE = 24 * MM
_CODE_NAME_BYTES = 80


def number_words(batch: Batch, page: BatchPage) -> str:
    """"Batch 1041", that it has no number yet, room for one by hand, or the mass that a master record is for."""
    if page is BatchPage.BLANK:
        return _("Batch {number}").format(number="_" * 12)
    if page is BatchPage.MASTER:
        return _("for {mass}").format(mass=_one_batch(batch))
    words = _("not numbered") if batch.number is None else _("Batch {number}").format(number=batch.number)
    if batch.batches < 2 or not batch.place:
        return words
    return _("{batch}, {place} of {count}").format(batch=words, place=batch.place, count=batch.batches)


def to_be_copied(batch: Batch, page: BatchPage) -> bool:
    """Whether one sheet stands for all the equal batches of an order."""
    return page is BatchPage.SHEET and bool(batch.lines) and not batch.place and batch.batches > 1


def _one_batch(batch: Batch) -> str:
    unit = batch.mass_unit
    return with_unit(figures.write_typed_mass(batch.batch_kg, unit), unit)


def code(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    """The formula's name, large, and the first facts, beside a code that a reader can scan."""
    inner = width - _CODE_SIZE - 12
    lines = _TITLE.wrap(batch.formula, inner)
    strip = sections.facts(_facts(batch, page), inner)
    strip_top = len(lines) * _TITLE.line + 8

    def draw(pen: Pen, left: float, top: float) -> None:
        for number, line in enumerate(lines):
            pen.text(left, top + number * _TITLE.line, line, _TITLE)
        strip.draw(pen, left, top + strip_top)
        _draw_code(pen, left + width - _CODE_SIZE, top, code_text(batch, page))

    return [Block(max(_CODE_SIZE, strip_top + strip.height), draw)]


def code_text(batch: Batch, page: BatchPage) -> str:
    """What the code on the page says: formula, version and batch, a line each; a very long name is cut."""
    name = letters.plain(batch.formula).encode()[:_CODE_NAME_BYTES].decode(errors="ignore")
    version = letters.plain(batch.version).encode()[:_CODE_NAME_BYTES].decode(errors="ignore")
    of = _("not numbered") if page is BatchPage.BLANK else number_words(batch, page)
    return "\n".join([name, version, letters.plain(of.replace("\u00a0", " "))])


def _draw_code(pen: Pen, left: float, top: float, text: str) -> None:
    from reportlab.graphics import renderPDF
    from reportlab.graphics.barcode.qr import QrCodeWidget
    from reportlab.graphics.shapes import Drawing

    widget: Any = QrCodeWidget(text, barLevel="M", barWidth=_CODE_SIZE, barHeight=_CODE_SIZE, barBorder=0)
    drawing: Any = Drawing(_CODE_SIZE, _CODE_SIZE)
    drawing.add(widget)
    renderPDF.draw(drawing, pen.canvas, left, pen.height - top - _CODE_SIZE)


def facts(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    """Where and for whom it is made, and who approved the version."""
    where = [(_("Site"), batch.site), (_("Mixer"), batch.mixer), (_("Animal"), batch.animal), (_("Stage"), batch.stage)]
    if page is BatchPage.SHEET and batch.batches > 1 and batch.place:
        of = _("{place} of {count}").format(place=batch.place, count=batch.batches)
        where.insert(0, (_("This batch"), of))
    known = [(label, value) for label, value in where if value]
    blocks = [sections.facts(known, width)] if known else []
    if batch.approved_by:
        words = _("This is {version}, approved by {name}.").format(version=batch.version, name=batch.approved_by)
        blocks += paragraph(words, BODY, width, gap=8)
    if page is BatchPage.MASTER and batch.lines:
        words = _("All weights on this record are for one batch of {mass}.").format(mass=_one_batch(batch))
        blocks += paragraph(words, BODY, width, gap=8)
    return blocks


def places_to_name(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    """Places for what a blank record leaves open, and for when and by whom each of several equal batches is made."""
    row = []
    if page is BatchPage.BLANK:
        row = [
            Field(_("Batch number")), Field(_("Date")), Field(_("Order")), Field(_("Which batch of the order"), 1.2),
            Field(_("Made by"), 1.4),
        ]
    elif page is BatchPage.SHEET and batch.batches > 1:
        row = [
            Field(_("Made on")), Field(_("Made by"), 1.8),
        ]
        if to_be_copied(batch, page):
            row.insert(0, Field(_("Which of the {count} equal batches").format(count=batch.batches), 1.2))
    if not row or not batch.lines:
        return []
    return [*_for_each(batch, page, width), forms.fields(row, width, gap=10)]


def _for_each(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    """That a sheet which names none of its equal batches is to be copied for each of them."""
    if not to_be_copied(batch, page):
        return []
    words = _("This one sheet is for each of the {count} equal batches: copy it before use, one copy for each batch.")
    return paragraph(words.format(count=batch.batches), STRONG, width, gap=10, keep_next=True)


def _facts(batch: Batch, page: BatchPage) -> list[tuple[str, str]]:
    unit = batch.mass_unit
    found = [(_("Version"), batch.version)]
    if page is BatchPage.SHEET:
        found.append((_("Batch number"), _("not numbered") if batch.number is None else str(batch.number)))
    if page is not BatchPage.BLANK:
        found.append((_("Date"), batch.made.isoformat()))
    found.append((_("One batch"), _one_batch(batch)))
    if page is BatchPage.SHEET:
        batches = plural("{count} batch", "{count} equal batches", batch.batches).format(count=batch.batches)
        order = with_unit(figures.write_typed_mass(batch.order_kg, unit), unit)
        found.append((_("Order"), _("{mass} in {batches}").format(mass=order, batches=batches)))
    return found
