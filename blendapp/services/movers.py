"""What new prices do to every formula: which keep their mix, which change, by how much and for which price."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Mapping
from dataclasses import dataclass

from blendapp.domain.formulas import Amounts, Formula
from blendapp.domain.library import Library
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.quotes import Quote
from blendapp.domain.records import added
from blendapp.domain.results import Status
from blendapp.optimise.build.composition import Composition
from blendapp.optimise.kept import Kept
from blendapp.optimise.linear import FailedSolve
from blendapp.services.formulate import Answer, FailedCertificate, answer_to

# Amounts closer than this, in fractions of the mix or shares of a ration, are the same mix.
_SAME = 1e-6


@dataclass(frozen=True)
class PriceMove:
    """One price, in money per tonne, before and after; None where there is none. effect: what it does to the cost at
    the mean of the two mixes, in money per tonne of mix or per day, None where it has no price on one side."""

    ingredient_id: int
    ingredient: str
    before: float | None
    after: float | None
    effect: float | None


@dataclass(frozen=True)
class Mover:
    """One formula of which an admitted price moved.

    before, after: the cost in money per tonne of mix or per head and day, None without an answer. as_before: the cost
    of the old mix at the new prices. kept: whether the old mix is still the cheapest, None where either side has none.
    most: the price that moved the cost most, None where none did. fault: why it could not be worked out, else "".
    """

    formula_id: int
    formula: str
    amounts: Amounts
    status_before: Status | None
    status_after: Status | None
    before: float | None
    after: float | None
    as_before: float | None
    kept: bool | None
    most: PriceMove | None
    fault: str = ""

    @property
    def change(self) -> float | None:
        """What the cost rises by."""
        return None if self.before is None or self.after is None else self.after - self.before


def movers(
    before: Library, after: Library, on: datetime.date, go_on: Callable[[], bool] | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> list[Mover]:
    """A row for every formula of which an admitted price differs, in the order of the formulas.

    before, after: the same mill at two sets of prices; neither may be edited meanwhile. Each old answer is held against
    the new prices on its basis first, and solved again only where that does not prove it. go_on is asked before every
    formula: where it says no, the rows so far come back. progress: (formulas done, of how many).
    """
    moved = [(one, prices) for one in before.formulas if (prices := _moved(before, after, one, on))]
    composition = Composition(before)
    rows: list[Mover] = []
    for done, (formula, prices) in enumerate(moved):
        if progress is not None:
            progress(done, len(moved))
        if go_on is not None and not go_on():
            return rows
        rows.append(_mover(before, after, formula, on, composition, prices))
    if progress is not None:
        progress(len(moved), len(moved))
    return rows


def with_prices(library: Library, reading: PriceListReading, on: datetime.date) -> Library:
    """A copy of a library in which the accepted rows of a price list are in force; nothing is stored."""
    copy = library.copy()
    first = max(library.records["quote"], default=0) + 1
    copy.apply([
        added(Quote(first + at, row.ingredient_id or 0, row.price, row.per or "t", row.bushel_lb,
                    valid_from=row.valid_from or on, valid_to=row.valid_to, recorded=on, source=reading.file_name))
        for at, row in enumerate(reading.accepted)
    ])
    return copy


Prices = Mapping[int, tuple[float | None, float | None]]


def _moved(before: Library, after: Library, formula: Formula, on: datetime.date) -> Prices:
    """The admitted ingredients whose price differs, with both prices."""
    pairs = {i.id: (before.price_per_t(i.id, on), after.price_per_t(i.id, on)) for i in before.admitted(formula)}
    return {key: pair for key, pair in pairs.items() if pair[0] != pair[1]}


def _mover(
    before: Library, after: Library, formula: Formula, on: datetime.date, composition: Composition, prices: Prices
) -> Mover:
    try:
        old = answer_to(before, formula.id, on, composition, prices=False)
        held = _held(old, prices)
        new_cost: float | None
        kept: bool | None
        as_before: float | None
        if held is not None:
            kept, x, cost, as_before = held
            assert old.built is not None
            new_amounts = {i.id: v for i, v in zip(old.built.ingredients, x, strict=True)}
            status, new_cost = Status.OPTIMAL, cost
        else:
            new = answer_to(after, formula.id, on, composition, prices=False)
            status, new_cost, new_amounts = new.result.status, new.result.cost, _amounts(new)
            kept, as_before = _compared(old, new, after, on)
    except FailedCertificate as failure:
        return Mover(formula.id, formula.name, formula.amounts, None, None, None, None, None, None, None, str(failure))
    result = old.result
    most = _most(before, formula, prices, _amounts(old), new_amounts)
    if not result.has_answer or new_cost is None:
        most = most if most is not None and most.effect is None else None
    return Mover(
        formula.id, formula.name, formula.amounts, result.status, status, result.cost, new_cost, as_before, kept, most,
    )


def _held(old: Answer, prices: Prices) -> tuple[bool, list[float], float, float] | None:
    """Whether the old mix is still optimal, the amounts now, their cost, and that of the old ones; None where only
    solving anew can say: no answer, a choice of ingredients, or an ingredient that gains or loses its price."""
    solution, built = old.solution, old.built
    if built is None or solution is None or old.result.status is not Status.OPTIMAL or old.result.given_ingredients:
        return None
    if any(pair[0] is None or pair[1] is None for pair in prices.values()):
        return None
    per = 1.0 if built.formula.amounts is Amounts.BLEND else 1e-3
    cost = built.program.cost.copy()
    for column, ingredient in enumerate(built.ingredients):
        if ingredient.id in prices:
            cost[column] = (prices[ingredient.id][1] or 0.0) * per
    try:
        found = Kept(solution).reprice(cost)
    except (FailedSolve, ValueError):  # a singular basis is a ValueError too
        return None
    return found.stays, found.x.tolist(), found.objective, found.as_before


def _compared(old: Answer, new: Answer, after: Library, on: datetime.date) -> tuple[bool | None, float | None]:
    """Whether two answers are the same mix, and what the old mix costs at the new prices."""
    if not old.result.has_answer:
        return None, None
    was, now = _amounts(old), _amounts(new)
    per = 1.0 if old.result.amounts is Amounts.BLEND else 1e-3
    prices = {key: after.price_per_t(key, on) for key, amount in was.items() if amount}
    as_before = None
    if all(price is not None for price in prices.values()):
        as_before = sum((price or 0.0) * was[key] * per for key, price in prices.items())
    if not new.result.has_answer:
        return None, as_before
    size = max(1.0, *was.values(), *now.values())
    return all(abs(was.get(k, 0.0) - now.get(k, 0.0)) <= _SAME * size for k in {*was, *now}), as_before


def _amounts(answer: Answer) -> dict[int, float]:
    return {one.ingredient_id: one.amount or 0.0 for one in answer.result.ingredients}


def _most(
    library: Library, formula: Formula, prices: Prices, was: Mapping[int, float], now: Mapping[int, float]
) -> PriceMove | None:
    """The price that did most, by its change times the mean of its two amounts. One that came or went and is in either
    mix stands before all others."""
    per = 1.0 if formula.amounts is Amounts.BLEND else 1e-3
    best: tuple[float, PriceMove] | None = None
    for key, (old, new) in prices.items():
        mean = (was.get(key, 0.0) + now.get(key, 0.0)) / 2
        effect = None if old is None or new is None else (new - old) * mean * per
        weight = (float("inf") if mean else 0.0) if effect is None else abs(effect)
        if weight > 0 and (best is None or weight > best[0]):
            best = weight, PriceMove(key, library.ingredient(key).name, old, new, effect)
    return None if best is None else best[1]
