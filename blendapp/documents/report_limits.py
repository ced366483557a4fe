"""The limits of a report: what each asks, where the mix stands, what it costs; and why no mix exists."""

from __future__ import annotations

from blendapp.documents import phrases, sections
from blendapp.documents.flow import Block, heading, paragraph
from blendapp.documents.phrases import limit_name, typed, with_unit
from blendapp.documents.sections import BODY
from blendapp.documents.table import Column, table
from blendapp.domain.figures import write_measure, write_shadow_price
from blendapp.domain.results import LimitResult, Result, Side
from blendapp.domain.wording import _


def limits_section(result: Result, width: float) -> list[Block]:
    """All limits in their order; those that only admit an ingredient in one sentence below."""
    bounded = [limit for limit in result.limits if limit.minimum is not None or limit.maximum is not None]
    free = [limit for limit in result.limits if limit.minimum is None and limit.maximum is None]
    columns = [Column(_("Limit"), share=1.0), Column(_("Asked"), share=0.62)]
    if result.has_answer:
        columns += [Column(_("Comes to"), strong=True), Column(_("What it costs"), share=2.0)]
    rows = []
    for limit in bounded:
        row = [limit_name(limit), phrases.bounds_words(limit)]
        if result.has_answer:
            row += [_value(limit), cost_words(limit, result)]
        rows.append(row)
    blocks = heading(_("Limits"), width) + table(columns, rows, width) if rows else []
    if free:
        words = _("Admitted without bounds: {names}.").format(names=", ".join(limit.name for limit in free))
        blocks += paragraph(words, BODY, width, gap=8)
    return blocks


def _value(limit: LimitResult) -> str:
    return _("no value") if limit.value is None else with_unit(write_measure(limit.value), limit.unit)


def cost_words(limit: LimitResult, result: Result) -> str:
    """What moving the bound that the mix stands at costs and saves; nothing for a limit that does not bind."""
    if limit.binding is None:
        return ""
    if limit.minimum is not None and limit.minimum == limit.maximum:
        if limit.raise_cost is None and limit.lower_cost is None:
            return _("Binds; it has no single price here.")
        parts = [_moved(limit, result, limit.raise_cost, None, up=True),
                 _moved(limit, result, limit.lower_cost, None, up=False)]
        return "\n".join(part for part in parts if part)
    if limit.shadow_price_unique is False and limit.tighten_cost is None and limit.relax_saving is None:
        return _("Binds; it has no single price here.")
    up = limit.binding is Side.MINIMUM
    if limit.tighten_cost is None and limit.relax_saving is None:
        return _("Binds.")
    saving = None if limit.relax_saving is None else -limit.relax_saving
    parts = [
        _moved(limit, result, limit.tighten_cost, limit.tighten_holds_to, up=up)
        or (_("No more can be had.") if up else _("No less can be had.")),
        _moved(limit, result, saving, limit.relax_holds_to, up=not up),
    ]
    return "\n".join(part for part in parts if part)


def _moved(limit: LimitResult, result: Result, cost: float | None, holds_to: float | None, *, up: bool) -> str:
    """"1 % more costs 6.111 EUR per t, up to 19.4 %.", or "" where it is not known."""
    if cost is None:
        return ""
    one = with_unit("1", limit.unit)
    money = f"{result.currency}/{_('day') if result.cost_per == 'day' else _('t')}"
    if cost == 0:
        sentence = _("{one} more costs nothing{reach}.") if up else _("{one} less saves nothing{reach}.")
    elif up:
        sentence = _("{one} more costs {price}{reach}.") if cost > 0 else _("{one} more saves {price}{reach}.")
    else:
        sentence = _("{one} less costs {price}{reach}.") if cost > 0 else _("{one} less saves {price}{reach}.")
    reach = ""
    if holds_to is not None:
        words = _(", up to {value}") if up else _(", down to {value}")
        reach = words.format(value=with_unit(write_measure(holds_to), limit.unit))
    return sentence.format(one=one, price=f"{write_shadow_price(abs(cost))}\u00a0{money}", reach=reach)


def conflict_section(result: Result, width: float) -> list[Block]:
    """What each limit could reach, which cannot hold together, and the least change that helps."""
    conflict = result.conflict
    if conflict is None:
        return []
    blocks: list[Block] = []
    reach = [_reach_words(result.limits[r.limit], r.bound, r.asked, r.reachable) for r in conflict.reach]
    if reach:
        blocks += heading(_("Out of reach within the ingredient limits"), width) + sections.numbered(reach, width)
    if conflict.members:
        members = [f"{limit_name(m)}: {phrases.bounds_words(m)}" for m in (result.limits[i] for i in conflict.members)]
        blocks += heading(_("Cannot hold together; without any one of them the others can"), width)
        blocks += sections.numbered(members, width)
    repairs = [_repair_words(result.limits[r.limit], r.bound, r.frm, r.to) for r in conflict.repairs]
    if repairs:
        blocks += heading(_("The least change that alone makes a mix possible"), width)
        blocks += sections.numbered(repairs, width)
    return blocks


def _reach_words(limit: LimitResult, bound: Side, asked: float, reachable: float | None) -> str:
    least = bound is Side.MINIMUM
    if reachable is None:
        sentence = _("{name} has no value that could be reached; asked {asked}.")
    elif least:
        sentence = _("{name} can reach {value}, asked at least {asked}.")
    else:
        sentence = _("{name} can come down to {value}, asked at most {asked}.")
    value = with_unit(write_measure(reachable), limit.unit)
    return sentence.format(name=limit_name(limit), value=value, asked=with_unit(typed(asked), limit.unit))


def _repair_words(limit: LimitResult, bound: Side, frm: float, to: float | None) -> str:
    side = phrases.side_word(bound)
    if to is None:
        return _("{name}: no change of its {side} alone is enough.").format(name=limit_name(limit), side=side)
    return _("{name}: {side} {frm} to {to}.").format(
        name=limit_name(limit), side=side, frm=typed(frm), to=with_unit(write_measure(to), limit.unit)
    )
