"""A batch as a person reads it in a terminal."""

from __future__ import annotations

from blendapp.cli.as_text import limit_name, table
from blendapp.domain.batches import Batch, BatchLine, proof_words
from blendapp.domain.notation import notation
from blendapp.domain.wording import _


def sheet(batch: Batch, pdf: str | None) -> str:
    """The lines of one batch, what is to be known of it, what the weighing breaks, and where the page is."""
    head = _("{formula}, {version}: order of {order} kg, {count} × {mass} kg")
    short, write = notation().write_short, notation().write
    lines = [head.format(
        formula=batch.formula, version=batch.version, order=short(batch.order_kg), count=batch.batches,
        mass=short(batch.batch_kg, 3),
    )]
    if batch.cause:
        return "\n".join([*lines, f"  {batch.cause}"])
    heads = (_("Ingredient"), _("scale"), _("step kg"), _("kg"), _("l"), _("tolerance kg"), _("where"), "")
    rows = [
        (
            line.ingredient, line.scale, short(line.step_kg, 6), write(line.target_kg, 3), short(line.target_l, 6),
            short(line.tolerance_kg, 3), "; ".join(line.bins), _marks(line),
        )
        for line in batch.lines
    ]
    lines += table(heads, rows, (False, False, True, True, True, True, False, False))
    lines.append("  " + _("Total {total} kg, residue {residue} kg").format(
        total=write(batch.total_kg, 3), residue=write(batch.residue_kg, 3)
    ))
    lines += [f"  {line}" for line in (*_facts(batch), *broken_words(batch), proof_words(batch)) if line]
    lines += [f"  ! {caution}" for caution in batch.cautions]
    if batch.broken and not batch.fit_to_mix:
        lines.append("  " + _("NOT TO BE MIXED: the limits above are broken and not accepted."))
    if pdf is not None and batch.number is None:
        lines.append("  " + _("Written to {pdf}, without a number.").format(pdf=pdf))
    elif pdf is not None:
        lines.append("  " + _("Batch sheet {number} written to {pdf}.").format(number=batch.number, pdf=pdf))
    return "\n".join(lines)


def _marks(line: BatchLine) -> str:
    said = [_("hand-add")] if line.hand_add else []
    said += [_("fixed")] if line.fixed else []
    said += [_("rework")] if line.rework else []
    said += [_("in place of {opened}").format(opened=", ".join(line.of_opened))] if line.of_opened else []
    return ", ".join(said)


def _facts(batch: Batch) -> list[str]:
    """Where and after what it is mixed, what is made first, and what it gives."""
    write = notation().write
    place = ", ".join(part for part in (batch.site, batch.mixer) if part)
    said = [_("Mixed at: {place}").format(place=place)] if place else []
    said += [
        _("To be made first: {mass} kg of {ingredient}, by {formula}").format(
            mass=write(one.mass_kg, 3), ingredient=one.ingredient, formula=one.formula
        )
        for one in batch.to_make
    ]
    if batch.previous_feed:
        said.append(_("Feed before: {feed}").format(feed=batch.previous_feed))
    if batch.clean_out_reason:
        said.append(batch.clean_out_reason)
    if batch.clean_out is not None:
        said.append(_("Clean-out: {what}").format(what=_(batch.clean_out)))
    if batch.yield_kg is not None:
        said.append(_("Expected yield {mass} kg").format(mass=write(batch.yield_kg, 3)))
    return [*said, batch.yield_unknown]


def broken_words(batch: Batch) -> list[str]:
    """One sentence for each limit that does not hold as weighed."""
    text = _("As weighed, {name} is {value} {unit}, outside {minimum} to {maximum}.")
    short = notation().write_short
    return [
        text.format(
            name=limit_name(one), value=notation().write(one.value, 4), unit=one.unit,
            minimum=short(one.minimum) or _("any"), maximum=short(one.maximum) or _("any"),
        )
        for one in (batch.limits[index] for index in batch.broken)
    ]
