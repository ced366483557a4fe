"""Making the whole batches of an order, and printing their sheet once, with a number."""

from __future__ import annotations

import datetime
import json
import math
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from blendapp.domain import cautions
from blendapp.domain.batches import Batch, BatchLine
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.mills import PrintedBatch
from blendapp.domain.plant import Mixer, Scale
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.records import Change, added
from blendapp.domain.results import Result, Status
from blendapp.domain.wording import _
from blendapp.optimise.build.composition import Composition
from blendapp.optimise.build.formula import build
from blendapp.optimise.build.weigh import FixedRefused, NotWeighable, WeighedLine, weigh
from blendapp.services import sheets
from blendapp.services.formulate import formulate
from blendapp.services.versions import standing

if TYPE_CHECKING:
    from blendapp.services.mill import Mill

# How long the search for the best whole batch may take: an answer is there within 2 s, and says whether it is proven.
SEARCH_S = 1.5


def make_batch(
    library: Library,
    formula_id: int,
    order_kg: float,
    on: datetime.date,
    composition: Composition | None = None,
    *,
    result: Result | None = None,
    fixed: Mapping[int, float] | None = None,
    time_limit_s: float = SEARCH_S,
) -> Batch:
    """The equal whole batches of an order: the best in whole steps of the scales (see optimise.steps.search).

    result: the answer to weigh, worked out here unless given. fixed: kg of one batch by ingredient identifier, set by
    a person; the rest is solved around them. Where there is no answer, no split, no scale or no batch in whole steps,
    the batch has no lines and `cause` says why. Raises Refused for an order that is no mass, and for fixed lines that
    no scale shows, that the mix does not hold, or that keep the batch from its total.
    """
    if not (math.isfinite(order_kg) and order_kg > 0):
        raise Refused(_("An order must be above 0 kg; {mass} is not.").format(mass=f"{order_kg:g}"))
    composition = composition or Composition(library)
    answer = result or formulate(library, formula_id, on, composition)
    formula = library.formula(formula_id)
    state = standing(library, formula_id, answer.on, result=answer if answer.has_answer else None)
    empty = Batch(
        formula_id=formula_id, formula=formula.name, version=state.text, draft=state.draft,
        approved_by=state.approved_by,
        mill=library.mill.name, currency=library.mill.currency, made=on, order_kg=order_kg, batches=1,
        batch_kg=order_kg, lines=(), limits=answer.limits, nutrients=(), broken=(), cautions=answer.cautions,
    )
    if not answer.has_answer:
        text = _("{formula} has no answer: {cause}")
        return replace(empty, cause=text.format(formula=formula.name, cause=answer.cause or answer.status))
    if answer.status is Status.STOPPED:
        text = _("The answer to {formula} was stopped before it was proven; it is not made as if it were the answer.")
        return replace(empty, cause=text.format(formula=formula.name))
    split = split_order(library.mixers, order_kg)
    if split is None:
        return replace(empty, cause=_no_split(library.mixers, order_kg))
    empty = replace(empty, batches=split, batch_kg=order_kg / split)
    used = answer.mix
    if not used:
        return replace(empty, cause=_("{formula} is a mix of nothing; there is nothing to weigh.").format(
            formula=formula.name
        ))
    unscaled = [library.ingredient(i.ingredient_id) for i in used if _scale(library, i.ingredient_id) is None]
    if library.scales and unscaled:
        return replace(empty, cause=_proposal(library, unscaled))
    least_kg, greatest_kg = _held(library.mixers, empty.batch_kg)
    try:
        weighing = weigh(
            library, build(library, formula, answer.on, composition),
            {i.ingredient_id: i.amount or 0.0 for i in used}, empty.batch_kg,
            fixed=fixed, least_kg=least_kg, greatest_kg=greatest_kg, time_limit_s=time_limit_s,
        )
    except FixedRefused as refused:
        raise Refused([Problem(text, Place(record=formula.name)) for text in refused.sentences]) from refused
    except NotWeighable as none:
        return replace(empty, cause=str(none))
    mix = [(line.ingredient.id, line.target_kg) for line in weighing.lines if line.target_kg > 0]
    forbidden = cautions.forbidden_in_mix(formula, library, mix)
    if forbidden is not None:
        return replace(empty, cause=forbidden)
    return replace(
        empty,
        lines=tuple(sorted(map(_line, weighing.lines), key=_order)),
        limits=weighing.limits,
        nutrients=weighing.nutrients,
        broken=weighing.broken,
        cautions=(*cautions.warnings(formula, library, mix, answer.unknown), *weighing.notes, *state.altered),
        unproven=weighing.unproven,
        gap=weighing.gap,
    )


def split_order(mixers: list[Mixer], order_kg: float) -> int | None:
    """How many equal batches an order becomes: the fewest that one mixer can hold and fill; None if none can."""
    if not mixers:
        return 1
    found = []
    for mixer in mixers:
        count = 1 if mixer.greatest_kg is None else max(1, math.ceil(order_kg / mixer.greatest_kg - 1e-9))
        if order_kg / count >= (mixer.least_kg or 0.0) - 1e-9:
            found.append(count)
    return min(found, default=None)


def _held(mixers: list[Mixer], batch_kg: float) -> tuple[float | None, float | None]:
    """Between which totals a batch of this mass stays in the mixers that take it; None where nothing bounds it."""
    taking = [
        m for m in mixers
        if (m.least_kg or 0.0) <= batch_kg + 1e-9 and (m.greatest_kg is None or batch_kg <= m.greatest_kg + 1e-9)
    ]
    least = min((m.least_kg or 0.0 for m in taking), default=0.0)
    open_end = not taking or any(m.greatest_kg is None for m in taking)
    return least or None, None if open_end else max(m.greatest_kg or 0.0 for m in taking)


def _no_split(mixers: list[Mixer], order_kg: float) -> str:
    text = _("No equal batches of {order} kg fit a mixer: {mixers}. Order more, or less.")
    span = _("{name} holds {least} to {greatest} kg")
    said = [
        span.format(
            name=m.name, least=f"{m.least_kg or 0:g}",
            greatest=_("any") if m.greatest_kg is None else f"{m.greatest_kg:g}",
        )
        for m in mixers
    ]
    return text.format(order=f"{order_kg:g}", mixers="; ".join(said))


def _scale(library: Library, ingredient_id: int) -> Scale | None:
    scale_id = library.ingredient(ingredient_id).scale_id
    return None if scale_id is None else library.records["scale"].get(scale_id)


def _proposal(library: Library, unscaled: list[Ingredient]) -> str:
    finest = min(library.scales, key=lambda scale: scale.step_kg or 0.0)
    text = _("No scale weighs {ingredients}. Enter one under Scale, for example {scale} in steps of {step} kg.")
    names = ", ".join(i.name for i in unscaled)
    return text.format(ingredients=names, scale=finest.name, step=f"{finest.step_kg:g}")


def _line(line: WeighedLine) -> BatchLine:
    ingredient, scale = line.ingredient, line.scale
    return BatchLine(
        ingredient.id, ingredient.name, "" if scale is None else scale.name, line.step_kg, line.share_kg,
        line.target_kg, scale is not None and scale.hand_add, ingredient.drug, ingredient.drug_level,
        ingredient.drug_species, ingredient.withdrawal, line.tolerance_kg, line.fixed,
    )


def _order(line: BatchLine) -> tuple[bool, float, str, float, str]:
    """Coarse scales first, hand-adds last; on a scale the heaviest first."""
    return (line.hand_add, -line.step_kg, line.scale, -line.target_kg, line.ingredient)


# -- printing


def print_sheet(mill: Mill, batch: Batch, path: Path, *, reason: str = "", by: str = "", paper: str = "A4") -> Batch:
    """Give a batch the next number and write its sheet; the number and the record are stored with it or not at all.

    reason, by: why and by whom broken limits are accepted; both or neither. The file is written before the number is
    stored and takes its place only after, so that no sheet carries a number that the mill does not know.
    Raises Refused for a batch without lines, or half an acceptance.
    """
    if batch.cause is not None:
        raise Refused(batch.cause)
    if bool(reason.strip()) != bool(by.strip()):
        raise Refused(_("Accepting broken limits needs both a reason and a name."))
    number = mill.store.next_batch_number()
    printed = replace(batch, number=number, accepted_reason=reason.strip(), accepted_by=by.strip())
    with sheets.unfinished(path, sheets.batch_pdf(printed, paper)) as finish:
        record = PrintedBatch(
            mill.new_id("batch"), number, batch.formula_id, batch.version, batch.order_kg,
            datetime.datetime.now(datetime.UTC), mill.who, printed.accepted_reason, printed.accepted_by,
            json.dumps(sheets.batch_to_plain(printed), ensure_ascii=False, allow_nan=False),
        )
        mill.record(_("Print batch sheet {number}").format(number=number), [added(record)])
        finish()
    return printed


def print_copy(mill: Mill, batch_record_id: int, path: Path, *, paper: str = "A4") -> Batch:
    """Write the sheet of a printed batch again, digit for digit, marked COPY with its count."""
    record: PrintedBatch = mill.library.records["batch"][batch_record_id]
    copies = record.copies + 1
    batch = replace(sheets.batch_from_plain(json.loads(record.sheet)), copy=copies)
    with sheets.unfinished(path, sheets.batch_pdf(batch, paper)) as finish:
        what = _("Copy {count} of batch sheet {number}").format(count=copies, number=record.number)
        mill.record(what, [Change(record, replace(record, copies=copies))])
        finish()
    return batch


def usual_batch_kg(library: Library, formula_id: int) -> float:
    """The batch that a formula usually makes: its own, else the greatest mixer's fill, else a tonne."""
    formula = library.formula(formula_id)
    fills = [mixer.greatest_kg for mixer in library.mixers if mixer.greatest_kg]
    return formula.batch_kg or max(fills, default=1000.0)
