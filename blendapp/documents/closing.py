"""What ends a page: the yield, the retained sample, the release, or the signatures under a master record."""

from __future__ import annotations

from blendapp.documents import forms
from blendapp.documents.flow import Block, heading, paragraph
from blendapp.documents.forms import Field
from blendapp.documents.phrases import with_unit
from blendapp.documents.sections import BODY, STRONG
from blendapp.domain import figures
from blendapp.domain.batches import Batch, BatchPage
from blendapp.domain.notation import notation
from blendapp.domain.wording import _


def yields(batch: Batch, page: BatchPage, width: float) -> list[Block]:
    """The theoretical yield of one batch in figures and words; places for the actual one and the difference.

    21 CFR 225.102 asks for the theoretical against the actual yield (from memory).
    """
    blocks = heading(_("Yield of one batch"), width)
    unit = batch.mass_unit
    expected = "" if batch.yield_kg is None else with_unit(_write_yield(batch.yield_kg, unit), unit)
    said = _yield_words(batch)
    blocks += paragraph(said, BODY if batch.yield_kg is not None else STRONG, width, keep_next=True)
    if page is BatchPage.MASTER:
        return [*blocks, forms.fields([Field(_("Theoretical yield"), value=expected or "–")], width)]
    row = [
        Field(_("Theoretical yield"), value=expected),
        Field(_("Actual yield, {unit}").format(unit=unit)),
        Field(_("Difference, {unit}").format(unit=unit)),
        Field(_("Difference, %"), 0.8),
        Field(_("Initials"), 0.6),
    ]
    return [*blocks, forms.fields(row, width)]


def _yield_words(batch: Batch) -> str:
    """What lies between the mass that is weighed in and the yield."""
    if batch.yield_kg is None:
        return batch.yield_unknown or _("The theoretical yield is not known.")
    unit, short = batch.mass_unit, notation().write_short
    weighed = with_unit(figures.write_typed_mass(batch.total_kg, unit), unit)
    said = [_("{mass} are weighed in.").format(mass=weighed)]
    if batch.loss_percent:
        said.append(_("{percent} % is lost on the way.").format(percent=short(batch.loss_percent)))
    else:
        said.append(_("No loss is counted."))
    if batch.product_dry_matter_percent is not None:
        text = _("The product holds {percent} % dry matter, {moisture} % moisture.")
        moisture = short(round(100 - batch.product_dry_matter_percent, 6))
        said.append(text.format(percent=short(batch.product_dry_matter_percent), moisture=moisture))
    else:
        said.append(_("No change of moisture is counted."))
    return " ".join(said)


def _write_yield(kg: float, unit: str) -> str:
    """A worked-out mass with five significant digits, or all of whole units."""
    value = figures.mass_in(kg, unit)
    return notation().write_short(round(value, figures.decimals_of(value, 5)))


def sample_and_release(width: float) -> list[Block]:
    """The retained sample and the release for use."""
    sample = [Field(_("Sample number")), Field(_("Kept at"), 1.6), Field(_("Date")), Field(_("Initials"), 0.7)]
    release = [Field(_("Name"), 1.4), Field(_("Signature"), 1.6), Field(_("Date"))]
    return [
        *heading(_("Retained sample"), width), forms.fields(sample, width, gap=0),
        *heading(_("Released for use"), width), forms.fields(release, width, gap=0),
    ]


def signatures(batch: Batch, width: float) -> list[Block]:
    """Who prepared, checked and approved the record.

    21 CFR 225.102 asks that a master record is prepared, checked, dated and signed by a qualified person (from memory).
    """
    rows = []
    for label, known in ((_("Prepared by"), ""), (_("Checked by"), ""), (_("Approved by"), batch.approved_by)):
        rows.append([Field(label, 1.6, known), Field(_("Signature"), 1.4), Field(_("Date"), 0.8)])
    blocks = heading(_("Signatures"), width)
    last = len(rows) - 1
    return blocks + [forms.fields(row, width, gap=4, keep_next=place < last) for place, row in enumerate(rows)]
