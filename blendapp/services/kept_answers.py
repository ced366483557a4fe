"""Answers kept with their bases while nothing but prices changes: most need no solve, the rest a few pivots."""

from __future__ import annotations

import datetime
import threading
from collections.abc import Iterable, Mapping
from dataclasses import dataclass

from blendapp.domain.formulas import Amounts, Formula
from blendapp.domain.library import Library
from blendapp.domain.records import Change
from blendapp.domain.results import Status
from blendapp.optimise.build.composition import Composition
from blendapp.optimise.build.formula import FormulaProgram
from blendapp.optimise.kept import Kept
from blendapp.optimise.linear import FailedSolve
from blendapp.services.formulate import Answer, answer_to

# Kinds of records on which no answer rests, prices apart, which kept answers follow.
_APART = frozenset({
    "quote", "price_list", "synonym", "person", "site", "supplier", "scale", "mixer", "mixing_step", "bin", "lot",
    "lot_value", "version", "acknowledgement", "batch",
})


Prices = Mapping[int, float | None]


@dataclass(frozen=True)
class Position:
    """Where a formula stands at some prices. cost: money per tonne of mix or per day, None without an answer; amounts:
    by ingredient identifier, fractions of a blend or kg per day, those of 0 included."""

    status: Status
    cost: float | None
    amounts: dict[int, float]


@dataclass(frozen=True, eq=False)
class _One:
    built: FormulaProgram
    ids: tuple[int, ...]
    kept: Kept


class KeptAnswers:
    """The kept answers of one mill. May be asked from any thread, one at a time."""

    def __init__(self) -> None:
        self._formulas: dict[int, _One] = {}
        self._turn = threading.Lock()
        self._edition = 0

    def view(self) -> AnswersNow:
        """The answers for the mill as it is now. Once it was edited the view keeps and uses no others' answers, so that
        a worker with older libraries neither gets newer answers nor leaves older ones behind."""
        return AnswersNow(self, self._edition)

    def refresh(self, changes: Iterable[Change]) -> None:
        """Forget what edits have made stale. A change of composition, of a limit or of a formula solves again."""
        with self._turn:
            for change in changes:
                self._edition += change.kind not in _APART
                record = change.after if change.after is not None else change.before
                if change.kind == "limit" and record is not None:
                    self._formulas.pop(record.formula_id, None)
                elif change.kind == "formula":
                    self._formulas.pop(change.id, None)
                elif change.kind not in _APART:
                    self._formulas.clear()

    def at(
        self, library: Library, formula: Formula, on: datetime.date, composition: Composition, prices: Prices,
        edition: int,
    ) -> Position:
        """See AnswersNow.at. edition: of the mill when the library was taken from it."""
        with self._turn:
            current = edition == self._edition
            ids = tuple(i.id for i in library.admitted(formula) if prices[i.id] is not None)
            one = self._formulas.get(formula.id) if current else None
            if one is not None and one.ids == ids:
                found = _repriced(one, [prices[key] or 0.0 for key in ids])
                if found is not None:
                    return found
            answer = answer_to(library, formula.id, on, composition, prices=False)
            if current:
                self._keep(formula.id, ids, answer)
            amounts = {i.ingredient_id: i.amount or 0.0 for i in answer.result.ingredients}
            return Position(answer.result.status, answer.result.cost, amounts)

    def _keep(self, formula_id: int, ids: tuple[int, ...], answer: Answer) -> None:
        """Keep an answer whose basis can be held against other prices: that of a linear program."""
        self._formulas.pop(formula_id, None)
        if answer.built is None or answer.solution is None or answer.result.status is not Status.OPTIMAL:
            return
        if not answer.result.given_ingredients:
            self._formulas[formula_id] = _One(answer.built, ids, Kept(answer.solution))


@dataclass(frozen=True)
class AnswersNow:
    """The kept answers as the mill was when this was taken."""

    kept: KeptAnswers
    edition: int

    def at(
        self, library: Library, formula: Formula, on: datetime.date, composition: Composition, prices: Prices
    ) -> Position:
        """Where a formula stands at the prices of a library, which must be the mill as it was, prices apart.

        prices: those of the library on the day (prices_of). Raises FailedCertificate where an answer does not hold.
        """
        return self.kept.at(library, formula, on, composition, prices, self.edition)


def prices_of(library: Library, on: datetime.date) -> Prices:
    """The price in force of every ingredient, in money per tonne, None where unknown."""
    return {i.id: library.price_per_t(i.id, on) for i in library.ingredients}


def _repriced(one: _One, prices_per_t: list[float]) -> Position | None:
    """The answer at other prices from the basis of the last; None where only solving anew can say."""
    cost = one.built.program.cost.copy()
    cost[:] = prices_per_t
    if one.built.formula.amounts is Amounts.RATION:
        cost *= 1e-3
    try:
        found = one.kept.reprice(cost)
    except (FailedSolve, ValueError):  # a singular basis is a ValueError too
        return None
    return Position(Status.OPTIMAL, found.objective, dict(zip(one.ids, found.x.tolist(), strict=True)))
