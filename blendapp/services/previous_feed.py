"""What went through a mixer before, by the sheets that were printed, and whether it must be cleaned out of it."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import replace

from blendapp.domain import carry_over
from blendapp.domain.batches import Batch
from blendapp.domain.formulas import Formula
from blendapp.domain.ingredients import Ingredient, Tag
from blendapp.domain.library import Library
from blendapp.domain.mills import PrintedBatch
from blendapp.domain.wording import _
from blendapp.services.makers import Makers
from blendapp.services.sheets import printed_batch


def previous_sheet(library: Library, mixer_id: int | None) -> Batch | None:
    """The batch of the last sheet of a mixer; None is the mixer of a mill that has entered none."""
    found: list[PrintedBatch] = [one for one in library.records["batch"].values() if one.mixer_id == mixer_id]
    last = max(found, key=lambda one: one.number, default=None)
    return None if last is None else printed_batch(last)


def feed_text(batch: Batch) -> str:
    """ "Layer peak (sheet 12, 2026-11-30)"."""
    text = _("{formula} (sheet {number}, {day})")
    return text.format(formula=batch.formula, number=batch.number, day=batch.made.isoformat())


def tags_of(makers: Makers, ingredient_id: int) -> tuple[str, ...]:
    """What a sheet keeps of an ingredient and of all that it is made of, of their tags."""
    held = [_with_tags(makers.library, one) for one in makers.records([ingredient_id])]
    return tuple(sorted({str(tag) for one in held for tag in one.tags} - {Tag.ONLY_WHEN_LISTED}))


def clean_out_reason(makers: Makers, formula: Formula, held: Collection[int], before: Batch | None) -> str:
    """Why the mixer must be cleaned out before a feed, "" where nothing says so.

    held: identifiers of what the feed is weighed from. before: the batch that went through. What its sheet says of its
    lines counts, and what is known of them by now.
    """
    if before is None:
        return ""
    lines = [line for line in before.lines if line.target_kg]
    went: dict[int, Ingredient] = {}
    for line in lines:
        now = {one.id: _with_tags(makers.library, one) for one in makers.records([line.ingredient_id])}
        known = now.get(line.ingredient_id, Ingredient(line.ingredient_id, line.ingredient))
        # Only what nothing of today says is taken from the sheet, so that a drug in a premix is named by its own name.
        gone = {Tag(tag) for tag in line.tags} - {tag for one in now.values() for tag in one.tags}
        now[known.id] = _with_tags(makers.library, replace(
            known, name=line.ingredient, drug=known.drug or line.drug, tags=(*known.tags, *sorted(gone)),
        ))
        went.update(now)
    found = carry_over.harmful(formula, went.values(), makers.records(held))
    if not found:
        return ""
    text = _("{feed} went through before: {materials}. Clean out before this feed.")
    return text.format(feed=feed_text(before), materials="; ".join(found))


def _with_tags(library: Library, ingredient: Ingredient) -> Ingredient:
    """The ingredient, tagged as adding copper where its composition says so, and as medicated where a drug is named."""
    keyed = [n.id for n in library.nutrients if n.key == "added copper"]
    values = [library.value(ingredient.id, key) for key in keyed]
    tags = set(ingredient.tags)
    if any(value is not None and value.amount > 0 for value in values):
        tags.add(Tag.ADDED_COPPER)
    if ingredient.medicated:
        tags.add(Tag.MEDICATED)
    return replace(ingredient, tags=tuple(sorted(tags)))
