"""What is said of a batch beside its lines and pages. No Qt."""

from __future__ import annotations

from blendapp.domain.batches import Batch, CleanOut, proof_words
from blendapp.domain.notation import notation
from blendapp.domain.wording import _, plural
from blendapp.services import sheets


def batch_words(batch: Batch) -> str:
    """How many batches of what mass and where, what rounding does to them, and whether that is proven."""
    write = notation().write_short
    head = plural("{count} batch of {kg} kg", "{count} equal batches of {kg} kg", batch.batches).format(
        count=batch.batches, kg=write(batch.batch_kg, 3))
    lines = [_("{batches}, in {mixer}").format(batches=head, mixer=batch.mixer) if batch.mixer else head]
    if batch.residue_kg:
        text = _("The lines come to {kg} kg less than the batch.") if batch.residue_kg < 0 else _(
            "The lines come to {kg} kg more than the batch.")
        lines.append(text.format(kg=write(abs(batch.residue_kg), 3)))
    if batch.broken:
        text = plural("This weighing breaks {count} limit; it may be mixed only if somebody accepts that.",
                      "This weighing breaks {count} limits; it may be mixed only if somebody accepts that.",
                      len(batch.broken))
        lines += [text.format(count=len(batch.broken)), *sheets.broken_sentences(batch)]
    lines.append(proof_words(batch) or _("Proven: no batch in whole steps of these scales comes nearer."))
    return "\n".join(lines)


def opened_words(batch: Batch) -> str:
    """Which made ingredients were opened, "" for none."""
    names = dict.fromkeys(name for line in batch.lines for name in line.of_opened)
    if not names:
        return ""
    return _("Opened: {names}. What it is made of stands among the lines.").format(names=", ".join(names))


def yield_words(batch: Batch) -> str:
    """What leaves as feed of what is weighed, "" where nothing is lost and no water goes or comes."""
    if batch.yield_unknown:
        return _("Expected yield: not known. {why}").format(why=batch.yield_unknown)
    if batch.yield_kg is None or (batch.loss_percent is None and batch.product_dry_matter_percent is None):
        return ""
    write = notation().write_short
    parts = [_("Expected yield: {kg} kg of one batch").format(kg=write(batch.yield_kg, 1))]
    if batch.loss_percent:
        parts.append(_("after a loss of {percent} %").format(percent=write(batch.loss_percent, 2)))
    if batch.product_dry_matter_percent:
        parts.append(_("at {percent} % dry matter").format(percent=write(batch.product_dry_matter_percent, 1)))
    return ", ".join(parts) + "."


def clean_out_words() -> dict[CleanOut | None, str]:
    """What may be done to the mixer before a batch, and what each is called."""
    return {
        None: _("written on the sheet by hand"), CleanOut.PHYSICAL: _("physical: emptied and cleaned"),
        CleanOut.FLUSH: _("flush: with a material that is kept apart"),
        CleanOut.SEQUENCE: _("sequence: the feeds may follow each other"), CleanOut.NONE: _("none needed"),
    }
