"""Results as a person reads them in a terminal."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from blendapp.domain.figures import write_measure, write_shadow_price
from blendapp.domain.formulas import Amounts
from blendapp.domain.making import given_by_formula
from blendapp.domain.notation import notation
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.results import Conflict, LimitResult, Result, Side
from blendapp.domain.wording import _


def table(heads: Sequence[str], rows: Iterable[Sequence[str]], right: Sequence[bool]) -> list[str]:
    """Lines of a table with columns as wide as their widest cell; right: which columns end in line."""
    listed = [list(heads), *map(list, rows)]
    widths = [max(len(row[column]) for row in listed) for column in range(len(heads))]
    return [
        "  " + "  ".join(
            cell.rjust(width) if end else cell.ljust(width)
            for cell, width, end in zip(row, widths, right, strict=True)
        ).rstrip()
        for row in listed
    ]


def formula(result: Result) -> str:
    """One formula: cost, mix, limits with their shadow prices, cautions; or why there is no answer."""
    lines = [result.formula]
    if result.cost is None:
        lines.append(f"  {_('No answer')} ({_(result.status)}): {result.cause or ''}")
        lines += [] if result.conflict is None else _conflict(result, result.conflict)
    else:
        lines += _mix(result)
    if result.limits:
        lines += ["", *_limits(result)]
    if result.tie:
        lines += ["", f"  {result.tie}"]
    if result.unpriced:
        lines += ["", "  " + _("Left out for want of a price: {names}.").format(names=", ".join(result.unpriced))]
    if result.by_formula:
        lines += ["", f"  {given_by_formula(result.by_formula)}"]
    lines += ["", *(f"  ! {caution}" for caution in result.cautions)]
    return "\n".join(lines)


def _conflict(result: Result, conflict: Conflict) -> list[str]:
    """What each limit could reach, which limits clash, and the least change of each that helps."""
    measure, sides = write_measure, {Side.MINIMUM: _("minimum"), Side.MAXIMUM: _("maximum")}
    lines = []
    for reach in conflict.reach:
        one = result.limits[reach.limit]
        text = _("{name} can reach {reachable} {unit}, asked {asked}.")
        lines.append(text.format(
            name=limit_name(one), reachable=measure(reach.reachable) or _("nothing"), unit=one.unit,
            asked=measure(reach.asked),
        ))
    if len(conflict.members) > 1:
        names = ", ".join(limit_name(result.limits[index]) for index in conflict.members)
        text = _("These cannot hold together, and without any one of them they can: {names}.")
        lines.append(text.format(names=names))
    for repair in conflict.repairs:
        one = result.limits[repair.limit]
        if repair.to is None:
            text = _("No change of {name} alone is enough.")
        else:
            text = _("Enough alone: the {side} of {name} from {frm} to {to} {unit}.")
        lines.append(text.format(
            side=sides[repair.bound], name=limit_name(one), frm=measure(repair.frm), to=measure(repair.to),
            unit=one.unit,
        ))
    return [f"  {line}" for line in lines]


def _mix(result: Result) -> list[str]:
    write, blend = notation().write, result.amounts is Amounts.BLEND
    assert result.cost is not None
    per = _("t") if blend else _("head and day")
    lines = [f"  {write(result.cost, 2)} {result.currency}/{per}", ""]
    heads = (
        _("Ingredient"),
        "%" if blend else _("kg/day"),
        _("price {currency}/t").format(currency=result.currency),
        _("cost {currency}/{per}").format(currency=result.currency, per=per),
        _("share of cost %"),
    )
    rows = [
        (
            one.name,
            write((one.amount or 0) * (100 if blend else 1), 3),
            write(one.price_per_t, 2),
            write(one.cost, 2),
            write(100 * (one.cost or 0) / result.cost if result.cost else None, 1),
        )
        for one in result.mix
    ]
    lines += table(heads, rows, (False, True, True, True, True))
    assert result.check.largest_violation is not None
    assert result.check.duality_gap is not None
    checked = _("checked: largest violation {violation:.0e}, gap {gap:.0e}")
    lines.append("  " + checked.format(
        violation=result.check.largest_violation, gap=result.check.duality_gap
    ))
    if result.proof:
        lines.append(f"  {result.proof}")
    return lines


def _limits(result: Result) -> list[str]:
    short = notation().write_short
    rows = [
        (
            limit_name(one),
            short(one.minimum),
            short(one.maximum),
            "" if one.value is None else notation().write(one.value, 3),
            one.unit,
            price_words(one, result),
        )
        for one in result.limits
    ]
    heads = (_("Limit"), _("at least"), _("at most"), _("now"), _("unit"), _("shadow price"))
    return table(heads, rows, (False, True, True, True, False, False))


def limit_name(one: LimitResult) -> str:
    """A limit in words: its name, what it is over, and its basis where that is not as fed."""
    name = one.name if one.per is None else f"{one.name} : {one.per}"
    return name if one.basis in (None, "as fed") else f"{name}, {one.basis}"


def price_words(one: LimitResult, result: Result) -> str:
    """What a working limit costs, in words; empty where it costs nothing."""
    if one.binding is None:
        return ""
    if one.raise_cost is not None or one.lower_cost is not None:
        sides = ((_("more"), one.raise_cost, True), (_("less"), one.lower_cost, True))
    elif one.tighten_cost is not None or one.relax_saving is not None:
        stricter, looser = (_("more"), _("less")) if one.binding is Side.MINIMUM else (_("less"), _("more"))
        sides = ((stricter, one.tighten_cost, True), (looser, one.relax_saving, False))
    else:
        return _("more than one price fits") if one.shadow_price_unique is False else ""
    said = [_side(one, side, value, costs) for side, value, costs in sides if value]
    return f"{', '.join(said)} {result.currency}/{result.cost_per}" if said else ""


def _side(one: LimitResult, side: str, value: float, costs: bool) -> str:
    """One side of a shadow price; a cost below 0 is a saving."""
    text = _("1 {unit} {side} costs {money}") if costs and value > 0 else _("1 {unit} {side} saves {money}")
    return text.format(unit=one.unit or _("unit"), side=side, money=write_shadow_price(abs(value)))


def price_rows(listed: Iterable[PriceRow], currency: str) -> list[str]:
    """A table of the rows of a price list."""
    write = notation().write
    rows = [
        (
            row.sheet, str(row.row), _(row.fate), row.source_name, row.ingredient or "",
            write(row.price_per_t, 2), write(row.old_price_per_t, 2), row.reason,
        )
        for row in listed
    ]
    money = f"{currency}/t"
    heads = (_("sheet"), _("row"), _("fate"), _("name in the list"), _("ingredient"), money, _("was"), _("reason"))
    return table(heads, rows, (False, True, False, False, False, True, True, False))
