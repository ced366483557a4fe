"""What new prices do to every formula: which keep their mix, which change, by how much and for which price."""

from __future__ import annotations

import datetime
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass

from blendapp.domain.formulas import Amounts, Formula
from blendapp.domain.library import Library
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.quotes import Quote
from blendapp.domain.records import added
from blendapp.domain.results import Status
from blendapp.optimise.build.composition import Composition
from blendapp.services.formulate import FailedCertificate
from blendapp.services.kept_answers import AnswersNow, KeptAnswers, Position, Prices, prices_of

# Amounts closer than this, in fractions of the mix or shares of a ration, are the same mix.
_SAME = 1e-6
# Costs closer than this, relatively, are equal: then the old mix is still one of the cheapest.
_EQUAL = 1e-9


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
class MixLine:
    """An ingredient in the two mixes of a formula: amounts as fractions of a blend or kg per day, None without an
    answer; prices in money per tonne, None where unknown."""

    ingredient_id: int
    ingredient: str
    before: float | None
    after: float | None
    price_before: float | None
    price_after: float | None

    @property
    def change(self) -> float | None:
        """What the amount rises by."""
        return None if self.before is None or self.after is None else self.after - self.before


@dataclass(frozen=True)
class Mover:
    """One formula of which an admitted price moved.

    before, after: the cost in money per tonne of mix or per head and day, None without an answer. as_before: the cost
    of the old mix at the new prices. kept: whether the old mix is still the cheapest, None where either side has none.
    most: the price that moved the cost most, None where none did. fault: why it could not be worked out, else "".
    lines: the ingredients that either mix holds or whose price differs.
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
    lines: tuple[MixLine, ...] = ()

    @property
    def changed_lines(self) -> list[MixLine]:
        """The ingredients of which the new mix holds more or less, those that change most first; [] if it is kept."""
        if self.kept is not False:
            return []
        size = max((max(one.before or 0.0, one.after or 0.0) for one in self.lines), default=1.0)
        found = [one for one in self.lines if abs(one.change or 0.0) > _SAME * size]
        return sorted(found, key=lambda one: -abs(one.change or 0.0))

    @property
    def change(self) -> float | None:
        """What the cost rises by."""
        return None if self.before is None or self.after is None else self.after - self.before


def movers(
    before: Library, after: Library, on: datetime.date, go_on: Callable[[], bool] | None = None,
    progress: Callable[[int, int], None] | None = None, answers: AnswersNow | None = None,
) -> list[Mover]:
    """A row for every formula of which an admitted price differs, in the order of the formulas.

    before, after: the same mill at two sets of prices; neither may be edited meanwhile. Each old answer is held against
    the new prices on its basis first, and solved again only where that does not prove it. go_on is asked before every
    formula: where it says no, the rows so far come back. progress: (formulas done, of how many). answers: those that
    the mill keeps, so that nothing is solved twice.
    """
    both = prices_of(before, on), prices_of(after, on)
    moved = [(one, prices) for one in before.formulas if (prices := _moved(before, one, *both))]
    composition = Composition(before)
    answers = answers or KeptAnswers().view()
    rows: list[Mover] = []
    for done, (formula, prices) in enumerate(moved):
        if progress is not None:
            progress(done, len(moved))
        if go_on is not None and not go_on():
            return rows
        rows.append(_mover(before, after, formula, on, composition, prices, answers, both))
    if progress is not None:
        progress(len(moved), len(moved))
    return rows


def biggest_first(rows: Iterable[Mover]) -> list[Mover]:
    """Rows without an answer on one side first, then by the share of the cost that changes, the greatest first."""
    def place(row: Mover) -> tuple[bool, float, str]:
        share = 0.0 if row.change is None or not row.before else abs(row.change / row.before)
        return row.change is not None, -share, row.formula

    return sorted(rows, key=place)


def with_prices(library: Library, reading: PriceListReading, on: datetime.date) -> Library:
    """A copy of a library in which the accepted rows of a price list are in force; nothing is stored."""
    copy = library.copy()
    first = max(library.records["quote"], default=0) + 1
    copy.apply([
        added(Quote(first + at, row.ingredient_id or 0, row.price, row.per or "t", row.bushel_lb,
                    reading.site_id if row.site_id is None else row.site_id,
                    reading.supplier_id if row.supplier_id is None else row.supplier_id,
                    valid_from=row.valid_from or on, valid_to=row.valid_to, recorded=on,
                    source=reading.file_name))
        for at, row in enumerate(reading.accepted)
    ])
    return copy


Moved = Mapping[int, tuple[float | None, float | None]]


def _moved(library: Library, formula: Formula, before: Prices, after: Prices) -> Moved:
    """The admitted ingredients whose price differs, with both prices."""
    pairs = {i.id: (before[i.id], after[i.id]) for i in library.admitted(formula)}
    return {key: pair for key, pair in pairs.items() if pair[0] != pair[1]}


def _mover(
    before: Library, after: Library, formula: Formula, on: datetime.date, composition: Composition, prices: Moved,
    answers: AnswersNow, both: tuple[Prices, Prices],
) -> Mover:
    try:
        old = answers.at(before, formula, on, composition, both[0])
        new = answers.at(after, formula, on, composition, both[1])
    except FailedCertificate as failure:
        return Mover(formula.id, formula.name, formula.amounts, None, None, None, None, None, None, None, str(failure))
    as_before = _cost_at(old, formula, both[1])
    kept = None if old.cost is None or new.cost is None else _same(old, new, as_before)
    most = _most(before, formula, prices, old.amounts, new.amounts)
    if old.cost is None or new.cost is None:
        most = most if most is not None and most.effect is None else None
    return Mover(
        formula.id, formula.name, formula.amounts, old.status, new.status, old.cost, new.cost, as_before, kept, most,
        lines=_lines(before, formula, prices, old, new, both),
    )


def _lines(
    library: Library, formula: Formula, prices: Moved, old: Position, new: Position, both: tuple[Prices, Prices]
) -> tuple[MixLine, ...]:
    found = []
    for one in library.admitted(formula):
        was = None if old.cost is None else old.amounts.get(one.id, 0.0)
        now = None if new.cost is None else new.amounts.get(one.id, 0.0)
        if was or now or one.id in prices:
            found.append(MixLine(one.id, one.name, was, now, both[0][one.id], both[1][one.id]))
    return tuple(found)


def _cost_at(old: Position, formula: Formula, prices: Prices) -> float | None:
    """What the old mix costs at the new prices; None where it has no price for all of it."""
    if old.cost is None:
        return None
    per = 1.0 if formula.amounts is Amounts.BLEND else 1e-3
    parts = [(amount, prices[key]) for key, amount in old.amounts.items() if amount]
    if any(price is None for _amount, price in parts):
        return None
    return sum(amount * (price or 0.0) * per for amount, price in parts)


def _same(old: Position, new: Position, as_before: float | None) -> bool:
    """Whether the old mix is still the cheapest: the same amounts, or others that cost no less."""
    assert new.cost is not None
    if as_before is not None and abs(as_before - new.cost) <= _EQUAL * max(1.0, abs(new.cost)):
        return True
    size = max(1.0, *old.amounts.values(), *new.amounts.values())
    keys = {*old.amounts, *new.amounts}
    return all(abs(old.amounts.get(k, 0.0) - new.amounts.get(k, 0.0)) <= _SAME * size for k in keys)


def _most(
    library: Library, formula: Formula, prices: Moved, was: Mapping[int, float], now: Mapping[int, float]
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
