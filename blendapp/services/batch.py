"""Making the whole batches of an order, and printing their sheet once, with a number."""

from __future__ import annotations

import datetime
import json
import math
import time
from collections.abc import Mapping
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from blendapp.domain import yields
from blendapp.domain.batches import Batch, BatchLine, CleanOut, Step
from blendapp.domain.formulas import Formula
from blendapp.domain.library import Library
from blendapp.domain.mills import PrintedBatch
from blendapp.domain.notation import notation
from blendapp.domain.plant import Bin
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.records import Change, added
from blendapp.domain.results import Result, Status
from blendapp.domain.wording import _
from blendapp.optimise.build.composition import Composition
from blendapp.optimise.build.formula import FormulaProgram, build
from blendapp.optimise.build.weigh import (
    FixedRefused,
    NotWeighable,
    WeighedLine,
    Weighing,
    weigh,
)
from blendapp.services import batch_cautions, sheets
from blendapp.services.accepting import accepted_by
from blendapp.services.batch_mix import BatchMix, batch_mix
from blendapp.services.formulate import formulate
from blendapp.services.makers import CannotBeMade, Makers
from blendapp.services.order_split import mixer_taking, mixers_elsewhere, mixers_for, no_split, split_order, totals_held
from blendapp.services.previous_feed import clean_out_reason, feed_text, previous_sheet, tags_of
from blendapp.services.scaleless import without_scale
from blendapp.services.versions import standing

if TYPE_CHECKING:
    from blendapp.services.mill import Mill

# How long the search for the best whole batch may take: an answer is there within 2 s, and says whether it is proven.
SEARCH_S = 1.5
# Of that, what is left to the search however long it took to find out what is to be weighed.
_LEAST_SEARCH_S = 0.5


def make_batch(
    library: Library,
    formula_id: int,
    order_kg: float,
    on: datetime.date,
    composition: Composition | None = None,
    *,
    result: Result | None = None,
    fixed: Mapping[int, float] | None = None,
    rework: Mapping[int, float] | None = None,
    mixer_id: int | None = None,
    previous_feed: str | None = None,
    clean_out: CleanOut | None = None,
    time_limit_s: float = SEARCH_S,
    makers: Makers | None = None,
) -> Batch:
    """The equal whole batches of an order: the best in whole steps of the scales (see optimise.steps.search).

    result: the answer to weigh, worked out here unless given. fixed: kg of one batch by ingredient identifier, set by
    a person; the rest is solved around them. rework: percent of the batch by ingredient identifier, see batch_mix.
    mixer_id: the mixer to use, else the smallest that takes the batch. previous_feed: what went through it before, as a
    person says it, else by its last sheet. clean_out: what is done to the mixer before. makers: of the whole mill,
    where the library is a part of it.

    Where there is no answer, no split, no scale, nothing in place of an opened ingredient, no batch in whole steps, or
    the whole of it may not be fed, the batch has no lines and `cause` says why. Raises Refused for an order that is no
    mass, rework that is no share, a mixer of another site, and for fixed lines that no scale shows, that the mix does
    not hold, or that keep the batch from its total.
    """
    began = time.perf_counter()
    if not (math.isfinite(order_kg) and order_kg > 0):
        raise Refused(_("An order must be above 0 kg; {mass} is not.").format(mass=notation().write_short(order_kg)))
    mixers = mixers_for(library, mixer_id)
    composition = composition or Composition(library)
    answer = result or formulate(library, formula_id, on, composition)
    makers = makers or Makers(library, answer.on, composition)
    formula = library.formula(formula_id)
    empty = _empty(library, formula, answer, on, order_kg, clean_out)
    if answer.has_answer and answer.status is not Status.STOPPED and answer.mix:
        try:
            mix = batch_mix(makers, {i.ingredient_id: i.amount or 0.0 for i in answer.mix}, rework)
        except CannotBeMade as unknown:
            return replace(empty, cause=str(unknown))
    else:
        return replace(empty, cause=_no_mix(formula, answer))
    split = split_order(mixers, order_kg)
    if split is None:
        other = mixers_elsewhere(library, mixers, order_kg)
        return replace(empty, cause=" ".join(filter(None, (no_split(mixers, order_kg), other))))
    empty = replace(empty, batches=split, batch_kg=order_kg / split)
    unscaled = without_scale(library, mix.contents.amounts, empty.batch_kg)
    if unscaled is not None:
        return replace(empty, cause=unscaled)
    built = build(
        library, formula, answer.on, composition, contents=None if mix.is_plain else mix.contents
    )
    least_kg, greatest_kg = totals_held(mixers, empty.batch_kg)
    left_s = max(time_limit_s - (time.perf_counter() - began), min(time_limit_s, _LEAST_SEARCH_S))
    try:
        weighing = weigh(
            library, built, mix.contents.amounts, empty.batch_kg,
            fixed=fixed, least_kg=least_kg, greatest_kg=greatest_kg, time_limit_s=left_s,
        )
    except FixedRefused as refused:
        raise Refused([Problem(text, Place(record=formula.name)) for text in refused.sentences]) from refused
    except NotWeighable as none:
        return replace(empty, cause=str(none))
    mixer = mixer_taking(mixers, empty.batch_kg, sum(line.target_kg for line in weighing.lines))
    if mixer is not None:
        empty = replace(empty, mixer=mixer.name, mixer_id=mixer.id, site=empty.site or _site(library, mixer.site_id))
    empty = _before(empty, formula, makers, mix, previous_feed)
    try:
        return _whole(empty, library, built, makers, mix, weighing, answer)
    except CannotBeMade as cycle:
        return replace(empty, cause=str(cycle))


def _empty(
    library: Library, formula: Formula, answer: Result, on: datetime.date, order_kg: float,
    clean_out: CleanOut | None,
) -> Batch:
    """A batch of a formula in which nothing is weighed yet."""
    state = standing(library, formula.id, answer.on, result=answer if answer.has_answer else None)
    mill = library.mill
    return Batch(
        formula_id=formula.id, formula=formula.name, version=state.text, draft=state.draft,
        approved_by=state.approved_by, mill=mill.name, currency=mill.currency, made=on, order_kg=order_kg, batches=1,
        batch_kg=order_kg, lines=(), limits=answer.limits, nutrients=(), broken=(),
        cautions=(*answer.cautions, *state.altered), animal="" if formula.animal is None else str(formula.animal),
        stage=formula.stage, site=_site(library, mill.site_id), clean_out=clean_out,
        steps=tuple(Step(step.text, step.minutes, step.setting) for step in library.steps_of(formula.id)),
        loss_percent=formula.loss_percent, product_dry_matter_percent=formula.product_dry_matter_percent,
        mass_unit=mill.sheet_mass, paper=mill.paper,
    )


def _site(library: Library, site_id: int | None) -> str:
    site = None if site_id is None else library.records["site"].get(site_id)
    return "" if site is None else str(site.name)


def _no_mix(formula: Formula, answer: Result) -> str:
    """Why an answer cannot be weighed."""
    if not answer.has_answer:
        text = _("{formula} has no answer: {cause}")
        return text.format(formula=formula.name, cause=answer.cause or answer.status)
    if answer.status is Status.STOPPED:
        text = _("The answer to {formula} was stopped before it was proven; it is not made as if it were the answer.")
        return text.format(formula=formula.name)
    return _("{formula} is a mix of nothing; there is nothing to weigh.").format(formula=formula.name)


def _before(batch: Batch, formula: Formula, makers: Makers, mix: BatchMix, said: str | None) -> Batch:
    """The batch with what went through its mixer before. said: by a person, who does not thereby clean it."""
    before = previous_sheet(makers.library, batch.mixer_id)
    known = "" if before is None else feed_text(before)
    return replace(
        batch,
        previous_feed=known if said is None else said.strip(),
        previous_number=before.number if said is None and before is not None else None,
        clean_out_reason=clean_out_reason(makers, formula, mix.contents.amounts.keys(), before),
    )


def _whole(
    batch: Batch, library: Library, built: FormulaProgram, makers: Makers, mix: BatchMix, weighing: Weighing,
    answer: Result,
) -> Batch:
    """The batch as weighed, or why it may not be fed."""
    formula = built.formula
    weighed = {line.ingredient.id: line.target_kg for line in weighing.lines if line.target_kg > 0}
    against = batch_cautions.forbidden(formula, library, makers, weighed)
    if against is not None:
        return replace(batch, cause=against)
    made = {
        key: kg * (1.0 - mix.rework.get(key, 0.0)) * batch.batches
        for key, kg in weighed.items() if makers.formula_of(key) is not None
    }
    to_make, open_questions = makers.to_make({key: kg for key, kg in made.items() if kg > 1e-9})
    said = batch_cautions.warnings(library, built, makers, mix, weighed, answer.unknown)
    altered = batch.cautions[len(answer.cautions):]
    done = replace(
        batch,
        lines=tuple(sorted((_line(library, makers, mix, line) for line in weighing.lines), key=_order)),
        limits=weighing.limits,
        nutrients=weighing.nutrients,
        broken=weighing.broken,
        cautions=(*said, *weighing.notes, *open_questions, *altered),
        unproven=weighing.unproven,
        gap=weighing.gap,
        to_make=tuple(to_make),
    )
    return _with_yield(done, weighing)


def _with_yield(batch: Batch, weighing: Weighing) -> Batch:
    weighed = [(line.ingredient, line.target_kg) for line in weighing.lines if line.target_kg]
    left = yields.part_left(
        batch.loss_percent, yields.dry_matter_percent(weighed), batch.product_dry_matter_percent
    )
    if left is not None:
        return replace(batch, yield_kg=round(batch.total_kg * left, 9))
    text = _("The dry matter of {ingredients} is not known; enter it, and the yield is worked out.")
    return replace(batch, yield_unknown=text.format(ingredients=", ".join(yields.without_dry_matter(weighed))))


def _line(library: Library, makers: Makers, mix: BatchMix, line: WeighedLine) -> BatchLine:
    ingredient, scale = line.ingredient, line.scale
    return BatchLine(
        ingredient_id=ingredient.id, ingredient=ingredient.name, scale="" if scale is None else scale.name,
        step_kg=line.step_kg, share_kg=line.share_kg, target_kg=line.target_kg,
        hand_add=scale is not None and scale.hand_add, drug=ingredient.drug, drug_level=ingredient.drug_level,
        drug_species=ingredient.drug_species, withdrawal=ingredient.withdrawal, tolerance_kg=line.tolerance_kg,
        fixed=line.fixed, bins=tuple(_place(library, one) for one in library.bins_of(ingredient.id)),
        step_l=None if scale is None else scale.step_l, target_l=line.target_l, rework=ingredient.id in mix.rework,
        of_opened=mix.of_opened.get(ingredient.id, ()), tags=tags_of(makers, ingredient.id),
    )


def _place(library: Library, place: Bin) -> str:
    """A bin, with the lot in it where one is known."""
    lot = None if place.lot_id is None else library.records["lot"].get(place.lot_id)
    return place.name if lot is None else _("{bin}, lot {lot}").format(bin=place.name, lot=lot.name)


def _order(line: BatchLine) -> tuple[bool, float, str, float, str]:
    """Coarse scales first, hand-adds last; on a scale the heaviest first."""
    return (line.hand_add, -line.step_kg, line.scale, -line.target_kg, line.ingredient)


# -- printing


def print_sheet(mill: Mill, batch: Batch, path: Path, *, reason: str = "", by: str = "", paper: str = "") -> Batch:
    """Give a batch the next number and write its sheet; the number and the record are stored with it or not at all.

    reason, by: why and by whom broken limits, and a mixer that is not cleaned out, are accepted; both or neither. In a
    mill with active persons it is one of them, see accepting.
    paper: "" is the batch's own. The file is written before the number is stored and takes its place only after, so
    that no sheet carries a number that the mill does not know. Raises Refused for a batch without lines, half an
    acceptance, a name that is nobody's, a mixer that must be cleaned out where nobody says how, or why not, and for
    one through which something harmful went since the batch was made.
    """
    if batch.cause is not None:
        raise Refused(batch.cause)
    if bool(reason.strip()) != bool(by.strip()):
        raise Refused(_("Accepting broken limits needs both a reason and a name."))
    by = accepted_by(mill.library, by)
    batch = _as_it_stands(mill, batch)
    if lacks_clean_out(batch, reason):
        raise Refused(clean_out_question(batch))
    number = mill.store.next_batch_number()
    printed = replace(
        batch, number=number, accepted_reason=reason.strip(), accepted_by=by, paper=paper or batch.paper
    )
    with sheets.unfinished(path, sheets.batch_pdf(printed)) as finish:
        record = PrintedBatch(
            mill.new_id("batch"), number, batch.formula_id, batch.version, batch.order_kg,
            datetime.datetime.now(datetime.UTC), mill.who, printed.accepted_reason, printed.accepted_by,
            json.dumps(sheets.batch_to_plain(printed), ensure_ascii=False, allow_nan=False),
            mixer_id=batch.mixer_id if batch.mixer_id in mill.library.records["mixer"] else None,
        )
        mill.record(_("Print batch sheet {number}").format(number=number), [added(record)])
        finish()
    return printed


def lacks_clean_out(batch: Batch, reason: str) -> bool:
    """Whether a batch is not printed for want of a clean-out, with this reason given by name.

    A reason that may have been meant for a broken limit waives no clean-out: then "none needed" must be chosen as well.
    """
    waived = bool(reason.strip()) and (batch.clean_out is CleanOut.NONE or not batch.broken)
    return batch.lacks_clean_out and not waived


def clean_out_question(batch: Batch) -> str:
    """What a batch that lacks a clean-out asks for."""
    text = _("{reason} Choose physical, flush or sequence; or choose none needed, and say why and who says so.")
    return text.format(reason=batch.clean_out_reason)


def _as_it_stands(mill: Mill, batch: Batch) -> Batch:
    """The batch with what went through its mixer by now. Raises Refused where that asks for another clean-out."""
    formula = mill.library.records["formula"].get(batch.formula_id)
    if formula is None:
        return batch
    before = previous_sheet(mill.library, batch.mixer_id)
    makers = Makers(mill.library, batch.made, mill.composition)
    reason = clean_out_reason(makers, formula, [line.ingredient_id for line in batch.lines], before)
    if reason and reason != batch.clean_out_reason:
        text = _("Since this batch was made, another went through its mixer. {reason} Make the batch again.")
        raise Refused(text.format(reason=reason))
    batch = replace(batch, clean_out_reason=reason)
    if before is not None and (batch.previous_number is not None or not batch.previous_feed):
        batch = replace(batch, previous_feed=feed_text(before), previous_number=before.number)
    return batch


def print_copy(mill: Mill, batch_record_id: int, path: Path, *, paper: str = "") -> Batch:
    """Write the sheet of a printed batch again, digit for digit, marked COPY with its count. paper: "" is its own."""
    record: PrintedBatch = mill.library.records["batch"][batch_record_id]
    copies = record.copies + 1
    batch = sheets.printed_batch(record, copies)
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
