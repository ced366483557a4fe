"""What is said of a batch beside its page. No Qt."""

from __future__ import annotations

from blendapp.domain.batches import Batch, proof_words
from blendapp.domain.notation import notation
from blendapp.domain.wording import _, plural


def batch_words(batch: Batch) -> str:
    """How many batches of what mass, what rounding does to them, and whether that is proven."""
    write = notation().write_short
    lines = [plural("{count} batch of {kg} kg", "{count} equal batches of {kg} kg", batch.batches).format(
        count=batch.batches, kg=write(batch.batch_kg, 3))]
    if batch.residue_kg:
        text = _("The lines come to {kg} kg less than the batch.") if batch.residue_kg < 0 else _(
            "The lines come to {kg} kg more than the batch.")
        lines.append(text.format(kg=write(abs(batch.residue_kg), 3)))
    if batch.broken:
        names = ", ".join(batch.limits[at].name for at in batch.broken)
        lines.append(_("Rounding to the scales breaks: {names}. It may be mixed only if somebody accepts that.").format(
            names=names))
    if not batch.proven:
        lines.append(proof_words(batch))
    return "\n".join(lines)
