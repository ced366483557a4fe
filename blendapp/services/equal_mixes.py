"""Between equally cheap mixes: which one is the answer, and a sentence that others cost the same."""

from __future__ import annotations

from blendapp.domain.figures import write_percent
from blendapp.domain.formulas import Amounts
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.versions import approved_amounts
from blendapp.domain.wording import _
from blendapp.optimise import ties
from blendapp.optimise.build.formula import FormulaProgram
from blendapp.optimise.solution import Solution

_MOST_SAID = 3


def settle(library: Library, built: FormulaProgram, solution: Solution) -> tuple[Solution, str | None]:
    """The solution that the tie rule chooses, and what can be exchanged in it at the same cost, or None.

    The rule: least change from the approved version, then the most of each ingredient in the order of identifiers.
    """
    if solution.status != "optimal" or not ties.tied(solution):
        return solution, None
    approved = approved_amounts(library, built.formula.id)
    reference = None if approved is None else [approved.get(i.id, 0.0) for i in built.ingredients]
    settled = ties.settle(solution, reference)
    said = [_exchange_words(built, found) for found in ties.exchanges(settled)[:_MOST_SAID]]
    return settled, " ".join(said) or None


def _exchange_words(built: FormulaProgram, found: ties.Exchange) -> str:
    """One exchange in words: "1.20 % Wheat can be Barley at the same cost"."""
    change = found.change.tolist()
    order = sorted(range(len(change)), key=lambda j: -abs(change[j]))
    more, less = [j for j in order if change[j] > 0], [j for j in order if change[j] < 0]
    if len(more) == 1 and len(less) == 1:
        text = _("{amount} of {taken} can be {given} at the same cost.")
        amount = _amount(built, -float(found.change[less[0]]))
        return text.format(
            amount=amount, taken=built.ingredients[less[0]].name, given=built.ingredients[more[0]].name
        )
    text = _("Another mix costs the same: {more} more, {less} less.")
    return text.format(more=_listed(built, found, more), less=_listed(built, found, less) or _("nothing"))


def _listed(built: FormulaProgram, found: ties.Exchange, columns: list[int]) -> str:
    return ", ".join(f"{built.ingredients[j].name} {_amount(built, abs(float(found.change[j])))}" for j in columns)


def _amount(built: FormulaProgram, amount: float) -> str:
    if built.formula.amounts is Amounts.BLEND:
        return f"{write_percent(amount)} %"
    return _("{mass} kg per day").format(mass=notation().write(amount, 3))
