"""What new prices do, as tables for other programs: a row a formula, and a row an ingredient of each."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from pathlib import Path

from blendapp.domain.fields import field_of
from blendapp.domain.figures import DAY_COST_DECIMALS, PERCENT_DECIMALS
from blendapp.domain.formulas import Amounts
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.results import Status
from blendapp.domain.wording import _, plural
from blendapp.domain.written_tables import Figure, WrittenCell, WrittenTable
from blendapp.services.kept_answers import AnswersNow
from blendapp.services.movers import MixLine, Mover, biggest_first, movers, with_prices
from blendapp.services.targets import refuse_over_a_mill

_KG_DECIMALS = 3


def status_words(row: Mover) -> str:
    """What becomes of a mix, in a word or two."""
    if row.fault:
        return _("not worked out")
    if row.status_after is not Status.OPTIMAL:
        return _("no answer at the new prices") if row.before is not None else _("no answer, as before")
    if row.before is None:
        return _("an answer at the new prices")
    return _("kept") if row.kept else _("changed")


def summary(found: Sequence[Mover]) -> str:
    """How many keep their mix and how many change."""
    if not found:
        return _("No formula admits an ingredient whose price changed.")
    kept = sum(one.kept is True for one in found)
    changed = sum(one.kept is False for one in found)
    parts = [plural("{count} mix kept", "{count} mixes kept", kept).format(count=kept),
             plural("{count} changed", "{count} changed", changed).format(count=changed)]
    rest = len(found) - kept - changed
    if rest:
        parts.append(plural("{count} without an answer on one side", "{count} without an answer on one side",
                            rest).format(count=rest))
    return ", ".join(parts)


def amount_figure(amount: float | None, amounts: Amounts) -> Figure | None:
    """An amount as it is shown: % of a blend, kg of a ration."""
    if amount is None:
        return None
    return Figure(100 * amount, PERCENT_DECIMALS) if amounts is Amounts.BLEND else Figure(amount, _KG_DECIMALS)


def changed_words(row: Mover, decimals: int | None = None, most: int | None = None) -> str:
    """The ingredients of a changed mix: "Wheat 12.000 to 18.500 %, Maize 60.000 to 53.500 %"; "" if it is kept.

    decimals: of the amounts, None for those of tables. most: how many ingredients are named, None for all.
    """
    words = [_line_words(one, row.amounts, decimals) for one in row.changed_lines]
    return ", ".join([one for one in words if one][:most])


def _line_words(line: MixLine, amounts: Amounts, decimals: int | None) -> str:
    """ "" where both amounts are written alike."""
    before, after = amount_figure(line.before, amounts), amount_figure(line.after, amounts)
    assert before is not None
    assert after is not None
    was, now = (notation().write(f.value, f.decimals if decimals is None else decimals) for f in (before, after))
    if was == now:
        return ""
    return _("{ingredient} {before} to {after} {unit}").format(
        ingredient=line.ingredient, before=was, after=now, unit="%" if amounts is Amounts.BLEND else "kg")


def effect_tables(rows: Sequence[Mover], currency: str) -> tuple[WrittenTable, WrittenTable]:
    """The formulas with cost before and after, and the ingredients of each with amounts and prices, in the order of
    the rows. Costs are money per tonne of a blend or per head and day."""
    return _formulas(rows, currency), _ingredients(rows, currency)


def _formulas(rows: Sequence[Mover], currency: str) -> WrittenTable:
    headings = (
        _("Formula"), _("Currency"), _("Per"), _("Cost before"), _("Cost after"), _("Change"), _("Change %"),
        _("Status"), _("Old mix at the new prices"), _("The price that did most"), _("Its price before per t"),
        _("Its price after per t"), _("What it does to the cost"), _("Changed ingredients"),
    )
    found = []
    for row in rows:
        decimals = _cost_decimals(row.amounts)
        share = None if row.change is None or not row.before else 100 * row.change / abs(row.before)
        most = row.most
        found.append((
            row.formula, currency, "t" if row.amounts is Amounts.BLEND else _("day"), _figure(row.before, decimals),
            _figure(row.after, decimals), _figure(row.change, decimals), _figure(share, 2), status_words(row),
            _figure(row.as_before, decimals), "" if most is None else most.ingredient,
            None if most is None else _price(most.before), None if most is None else _price(most.after),
            None if most is None else _figure(most.effect, decimals), row.fault or changed_words(row),
        ))
    return WrittenTable(_("Formulas"), headings, tuple(found))


def _ingredients(rows: Sequence[Mover], currency: str) -> WrittenTable:
    headings = (
        _("Formula"), _("Ingredient"), _("Unit"), _("Amount before"), _("Amount after"), _("Change"),
        _("Price before, {currency}/t").format(currency=currency),
        _("Price after, {currency}/t").format(currency=currency),
    )
    found = [
        (row.formula, one.ingredient, "%" if row.amounts is Amounts.BLEND else _("kg/day"),
         amount_figure(one.before, row.amounts), amount_figure(one.after, row.amounts),
         amount_figure(one.change, row.amounts), _price(one.price_before), _price(one.price_after))
        for row in rows for one in row.lines
    ]
    return WrittenTable(_("Ingredients"), headings, tuple(found))


def _cost_decimals(amounts: Amounts) -> int:
    return _price_decimals() if amounts is Amounts.BLEND else DAY_COST_DECIMALS


def _price_decimals() -> int:
    decimals = field_of("quote", "price").decimals
    assert decimals is not None
    return decimals


def _price(value: float | None) -> WrittenCell:
    return _figure(value, _price_decimals())


def _figure(value: float | None, decimals: int) -> Figure | None:
    return None if value is None else Figure(value, decimals)


def write_effect(path: Path | str, rows: Sequence[Mover], currency: str) -> None:
    """Write what prices do as .xlsx (both tables) or .csv (the formulas).

    Raises Refused for another ending, where a mill file stands there, or where the file cannot be written.
    """
    from blendapp.exchange.table_write import write_tables

    refuse_over_a_mill(Path(path))
    write_tables(path, effect_tables(rows, currency))


def effect_of(
    library: Library, reading: PriceListReading, on: datetime.date, answers: AnswersNow | None = None
) -> list[Mover]:
    """What the accepted rows of a price list would do, the biggest movers first; nothing is stored."""
    before = library.copy()
    return biggest_first(movers(before, with_prices(before, reading, on), on, answers=answers))


def refuse_name(path: Path | str) -> None:
    """Raises Refused where write_effect would refuse the name of a file, before anything is worked out."""
    from blendapp.exchange.table_write import refuse_ending

    refuse_ending(Path(path))
    refuse_over_a_mill(Path(path))
