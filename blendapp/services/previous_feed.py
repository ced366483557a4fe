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
from blendapp.services.making import Makers
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


def clean_out_reason(makers: Makers, formula: Formula, held: Collection[int], before: Batch | None) -> str:
    """Why the mixer must be cleaned out before a feed, "" where nothing says so.

    held: identifiers of what the feed is weighed from. before: the batch that went through. What ingredients are by
    now counts, and so does what was printed on the sheet before of their drugs.
    """
    if before is None:
        return ""
    lines = {line.ingredient_id: line for line in before.lines if line.target_kg}
    went = {one.id: one for one in makers.records(lines)}
    for key, line in lines.items():
        known = went.setdefault(key, Ingredient(key, line.ingredient))
        went[key] = replace(known, name=line.ingredient, drug=known.drug or line.drug)
    tagged = [_with_copper(makers.library, one) for one in went.values()]
    found = carry_over.harmful(formula, tagged, makers.records(held))
    if not found:
        return ""
    text = _("{feed} went through before: {materials}. Clean out before this feed.")
    return text.format(feed=feed_text(before), materials="; ".join(found))


def _with_copper(library: Library, ingredient: Ingredient) -> Ingredient:
    """The ingredient, tagged as adding copper where its composition says that it does."""
    keyed = [n.id for n in library.nutrients if n.key == "added copper"]
    values = [library.value(ingredient.id, key) for key in keyed]
    if Tag.ADDED_COPPER in ingredient.tags or not any(v is not None and v.amount > 0 for v in values):
        return ingredient
    return replace(ingredient, tags=(*ingredient.tags, Tag.ADDED_COPPER))
