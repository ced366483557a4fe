"""The formula report: what the formula costs, the mix, and what each limit asks and costs."""

from __future__ import annotations

from blendapp.documents import phrases, sections
from blendapp.documents.flow import Block, Style, heading, paragraph
from blendapp.documents.frame import Frame
from blendapp.documents.letters import BOLD
from blendapp.documents.paper import Paper
from blendapp.documents.pen import Pen
from blendapp.documents.report_limits import conflict_section, limits_section
from blendapp.documents.sections import BODY, SMALL, STRONG
from blendapp.documents.table import Column, table
from blendapp.domain.figures import write_day_cost, write_percent, write_price, write_tiny
from blendapp.domain.formulas import Amounts
from blendapp.domain.notation import notation
from blendapp.domain.results import IngredientResult, Result, Status
from blendapp.domain.wording import _

_TITLE = Style(22, BOLD, leading=27)
_COST = Style(26, BOLD, leading=32)


def draw(result: Result, mill: str, version: str, paper: Paper) -> bytes:
    """The report as a PDF."""
    on = result.on.isoformat()
    frame = Frame(
        paper,
        title=" · ".join(part for part in (result.formula, version, on) if part),
        kind=_("Formula report"),
        owner=mill,
        name=result.formula,
        rest=" · ".join(part for part in (version, on) if part),
    )
    return frame.draw(_blocks(result, version, frame.width))


def _blocks(result: Result, version: str, width: float) -> list[Block]:
    blocks = paragraph(result.formula, _TITLE, width)
    blocks.append(sections.facts(_facts(result, version), width, gap=6))
    blocks += _answer(result, width)
    blocks += sections.cautions(phrases.special(result.cautions), width)
    if result.has_answer:
        blocks += _mix(result, width)
    else:
        blocks += conflict_section(result, width)
    blocks += _unpriced(result, width)
    blocks += _unknown(result, width)
    blocks += limits_section(result, width)
    if result.has_answer:
        blocks += _left_out(result, width)
        blocks += sections.nutrients(result.nutrients, _nutrients_title(result), width)
        blocks += _check(result, width)
    return blocks


def _facts(result: Result, version: str) -> list[tuple[str, str]]:
    amounts = _("parts of a mix") if result.amounts is Amounts.BLEND else _("kg as fed per head per day")
    found = [(_("Version"), version)] if version else []
    return [*found, (_("Prices of"), result.on.isoformat()), (_("Amounts"), amounts)]


def _cost_unit(result: Result) -> str:
    return _("{currency} per tonne") if result.amounts is Amounts.BLEND else _("{currency} per head per day")


def _write_cost(result: Result, value: float | None) -> str:
    return write_price(value) if result.amounts is Amounts.BLEND else write_day_cost(value)


def _write_amount(result: Result, value: float | None) -> str:
    if result.amounts is Amounts.BLEND:
        return write_percent(value)
    return notation().write(value, 4)


def _answer(result: Result, width: float) -> list[Block]:
    """The cost, large, or a sentence that says why there is none."""
    if not result.has_answer:
        blocks = paragraph(_no_answer(result.status), Style(15, BOLD, leading=19), width - 10, gap=18)
        if result.cause:
            blocks += paragraph(result.cause, BODY, width - 10, gap=4)
        return sections.barred(blocks)
    words = _("Best mix found so far") if result.status is Status.STOPPED else _("Least ingredient cost")
    cost = _write_cost(result, result.cost)
    unit = _cost_unit(result).format(currency=result.currency)
    cost_width = _COST.width(cost)

    def draw_cost(pen: Pen, left: float, top: float) -> None:
        pen.text(left, top, cost, _COST)
        pen.text(left + cost_width + 8, top + _COST.line - BODY.line - 5, unit, BODY)

    blocks = paragraph(words, STRONG, width, gap=18, keep_next=True)
    blocks.append(Block(_COST.line, draw_cost))
    if result.status is Status.STOPPED:
        blocks += paragraph(_stopped_words(result), BODY, width)
    for sentence in (result.cause, result.tie):
        if sentence:
            blocks += paragraph(sentence, BODY, width, gap=2)
    if result.given_ingredients:
        blocks += paragraph(_("The costs of limits hold for the chosen ingredients only."), BODY, width, gap=2)
    return blocks


def _no_answer(status: Status) -> str:
    return {
        Status.OPTIMAL: _("There is no answer."),
        Status.CONFLICT: _("No mix can meet all limits."),
        Status.UNBOUNDED: _("The cost can fall without end, so there is no cheapest mix."),
        Status.INCOMPLETE: _("No mix can be made without the ingredients that have no price."),
        Status.STOPPED: _("Time was up before any mix was found."),
    }[status]


def _stopped_words(result: Result) -> str:
    if result.gap is None:
        return _("Time was up; how far it is from the least cost is not known.")
    return _("Time was up; the least cost may be up to {percent} % lower.").format(
        percent=notation().write(result.gap * 100, 2)
    )


def _mix(result: Result, width: float) -> list[Block]:
    """The ingredients used, largest first."""
    blend = result.amounts is Amounts.BLEND
    mix = result.mix
    ranges = any(i.price_range is not None for i in mix)
    near = any(i.near_optimal is not None for i in mix)
    columns = [
        Column(_("Ingredient"), share=1.0),
        Column(_("%") if blend else _("kg per day"), strong=True),
        Column(_("Price per\u00a0t")),
        Column(_("Cost per\u00a0t") if blend else _("Cost per day")),
        Column(_("Share of cost, %")),
    ]
    columns += [Column(_("Mix holds at prices"), figure_most=96)] if ranges else []
    near_title = _("Range at almost this cost, %") if blend else _("Range at almost this cost, kg")
    columns += [Column(near_title)] if near else []
    rows = []
    for found in mix:
        share = None if found.cost is None or not result.cost else found.cost / result.cost * 100
        row = [
            found.name, _write_amount(result, found.amount), write_price(found.price_per_t),
            _write_cost(result, found.cost), notation().write(share, 1),
        ]
        row += [_price_range(found)] if ranges else []
        row += [_near(result, found)] if near else []
        rows.append(row)
    title = _("The mix") if blend else _("The ration")
    total = [_("Total"), _write_amount(result, sum(i.amount or 0.0 for i in mix)), "", _write_cost(result, result.cost)]
    rows.append([*total, *[""] * (len(columns) - len(total))])
    return heading(title, width) + table(columns, rows, width)


def _price_range(found: IngredientResult) -> str:
    if found.price_range is None:
        return ""
    low, high = found.price_range
    if low is None and high is None:
        return _("any")
    if low is None:
        return _("up to {price}").format(price=write_price(high))
    if high is None:
        return _("from {price}").format(price=write_price(low))
    return _("{least} to {greatest}").format(least=write_price(low), greatest=write_price(high))


def _near(result: Result, found: IngredientResult) -> str:
    if found.near_optimal is None:
        return ""
    low, high = found.near_optimal
    return _("{least} to {greatest}").format(least=_write_amount(result, low), greatest=_write_amount(result, high))


def _left_out(result: Result, width: float) -> list[Block]:
    """Priced ingredients that the mix does not use, with the price below which each would come in."""
    left_out = sorted((i for i in result.ingredients if not i.amount), key=lambda i: i.name)
    if not left_out:
        return []
    columns = [
        Column(_("Ingredient"), share=1.0), Column(_("Price per\u00a0t")), Column(_("Comes in below"), strong=True),
    ]
    rows = [[i.name, write_price(i.price_per_t), write_price(i.break_even_price) or "–"] for i in left_out]
    return heading(_("Left out"), width) + table(columns, rows, width)


def _unpriced(result: Result, width: float) -> list[Block]:
    if not result.unpriced:
        return []
    words = _("Without a price in force, so not considered: {names}.").format(names=", ".join(result.unpriced))
    return heading(_("Ingredients without a price"), width) + paragraph(words, BODY, width)


def _unknown(result: Result, width: float) -> list[Block]:
    """Values that the arithmetic took as 0, the unsafe ones first and named as such."""
    if not result.unknown:
        return []
    sentences = []
    for unsafe in (True, False):
        by_nutrient: dict[str, list[str]] = {}
        for found in result.unknown:
            if found.unsafe is unsafe:
                by_nutrient.setdefault(found.nutrient, []).append(found.ingredient)
        words = (
            _("UNSAFE: {nutrient} is not known for {ingredients}; it was taken as 0, and may in truth break a limit.")
            if unsafe
            else _("{nutrient} is not known for {ingredients}; it was taken as 0, which does no harm to these limits.")
        )
        sentences += [
            words.format(nutrient=nutrient, ingredients=", ".join(names)) for nutrient, names in by_nutrient.items()
        ]
    blocks = sections.numbered(sentences, width - 10)
    unsafe_one = any(found.unsafe for found in result.unknown)
    return heading(_("Unknown values"), width) + (sections.barred(blocks) if unsafe_one else blocks)


def _nutrients_title(result: Result) -> str:
    if result.amounts is Amounts.BLEND:
        return _("Nutrients of the mix, as fed")
    return _("Nutrients of the ration, per day")


def _check(result: Result, width: float) -> list[Block]:
    """What the check without the solver found."""
    if result.check.largest_violation is None:
        return []
    words = _("Checked without the solver: largest violation {violation}").format(
        violation=write_tiny(result.check.largest_violation)
    )
    if result.check.duality_gap is not None:
        words += _(", gap to the dual cost {gap}").format(gap=write_tiny(result.check.duality_gap))
    return paragraph(words + ".", SMALL, width, gap=14)


