"""The model of the third zone: lines as rows, so that keys and screen readers reach each of them."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from blendapp.desk.mix.lines import Line, Part, lines_of
from blendapp.desk.rail.geometry import Axis, End, RailState, axis_for
from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look
from blendapp.domain.formulas import Amounts, Limit, LimitKind
from blendapp.domain.results import Side
from blendapp.domain.wording import _

if TYPE_CHECKING:
    from blendapp.desk.work import Work

_ENDS = {Side.MINIMUM: End.MINIMUM, Side.MAXIMUM: End.MAXIMUM}


class MixModel(Grid):
    """Owners: an ingredient's line and rail keep theirs while the answer changes; other lines are told by place."""

    def __init__(self, work: Work, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work
        self.lines: list[Line] = []
        self._line_of: dict[int, Line] = {}
        self.wide = False
        self.opened: frozenset[str] = frozenset()
        self.opened_ids: frozenset[int] = frozenset()
        self._axes: dict[int, Axis] = {}
        self._trial: tuple[int, End, float] | None = None

    def rebuild(self) -> bool:
        """Show the answer as it is now; returns whether the kinds of lines are others than before."""
        result = self.work.result
        before = [(line.part, line.text) for line in self.lines]
        self.lines = [] if result is None else lines_of(result, self.opened, self.opened_ids)
        ration = result is not None and result.amounts is Amounts.RATION
        currency = "" if result is None else result.currency
        amount = _("kg/day") if ration else "%"
        cost = (_("{currency}/day") if ration else _("{currency}/t")).format(currency=currency)
        answer = result is not None and result.has_answer
        price = _("price {currency}/t").format(currency=currency)
        further = [Heading("price", price if answer else "", 110, True),
                   Heading("share", _("% of cost") if answer else "", 86, True)]
        self.set_headings([
            Heading("name", "", 150), Heading("bar", "", 90), Heading("amount", amount if answer else "", 64, True),
            Heading("cost", cost if answer else "", 76, True),
            *(further if self.wide else []),
        ])
        self._line_of = {_owner(place, line): line for place, line in enumerate(self.lines)}
        self.set_rows(list(self._line_of))
        return before != [(line.part, line.text) for line in self.lines]

    def line(self, row: int) -> Line:
        """The line of a row."""
        return self.lines[row]

    def line_of(self, owner: int) -> Line | None:
        """The line of an owner, None where it is no longer shown."""
        return self._line_of.get(owner)

    def toggle(self, line: Line) -> bool:
        """Open or close what a line opens; returns whether it opens anything."""
        if line.part is Part.FOLD:
            self.opened = self.opened ^ {line.fold}
        elif line.part is Part.INGREDIENT and line.ingredient_id is not None:
            self.opened_ids = self.opened_ids ^ {line.ingredient_id}
        else:
            return False
        return True

    # -- cells

    def make_look(self, owner: int, key: str) -> Look:
        line = self._line_of.get(owner)
        if line is None:
            return EMPTY
        stale = self.work.stale
        if line.part is Part.INGREDIENT:
            return self._ingredient_look(line, key, stale)
        if line.part is Part.RAIL:
            return self._rail_look(line, key)
        if line.part is Part.TOTAL:
            if key == "name":
                return Look(text=line.text, strong=True, stale=stale)
            text = {"cost": line.cost, "share": line.share}.get(key, "")
            return Look(text=text, strong=True, number=True, stale=stale)
        if line.part is Part.PAIR:
            if key == "name":
                return Look(text=line.text, hint=line.hint, words=f"{line.text}: {line.cost}", stale=stale)
            return Look(text=line.cost, number=True, quiet=True, hint=line.hint, stale=stale) if key == "bar" else EMPTY
        if key == "name":
            # Painted by the delegate, over the whole width.
            return Look(text=line.text, words=line.text, hint=line.hint)
        return EMPTY

    @staticmethod
    def _ingredient_look(line: Line, key: str, stale: bool) -> Look:
        if key == "name":
            words = _("{name}: {amount}, costs {cost}").format(name=line.text, amount=line.amount, cost=line.cost)
            return Look(text=line.text, words=words, hint=line.hint, stale=stale)
        if key == "bar":
            return Look(bar=line.bar, bar_range=line.bar_range, words=line.amount, hint=line.hint, stale=stale)
        if key == "amount":
            return Look(text=line.amount, number=True, strong=True, stale=stale, lack=line.lack)
        text = {"cost": line.cost, "price": line.price, "share": line.share}[key]
        return Look(text=text, number=True, quiet=True, stale=stale)

    def limit_of(self, line: Line | None) -> Limit | None:
        """The inclusion limit of an ingredient in the chosen formula, or None."""
        if self.work.formula_id is None or line is None or line.ingredient_id is None:
            return None
        for limit in self.work.library.limits(self.work.formula_id):
            if limit.kind is LimitKind.INGREDIENT and limit.subject.ids == (line.ingredient_id,):
                return limit
        return None

    def _rail_look(self, line: Line, key: str) -> Look:
        limit = self.limit_of(line)
        if key == "name":
            return Look(text=_("inclusion") if limit is not None else _("no limit of its own"), quiet=True)
        if key != "bar" or limit is None:
            return EMPTY
        result = self.work.result
        found = None if result is None else next((one for one in result.limits if one.limit_id == limit.id), None)
        working = frozenset() if found is None or found.binding is None else frozenset({_ENDS[found.binding]})
        blend = result is not None and result.amounts is Amounts.BLEND
        state = RailState(
            minimum=limit.minimum, maximum=limit.maximum, mark=None if found is None else found.value,
            room=None if found is None else found.room, working=working, decimals=2, floor=0.0,
            ceiling=100.0 if blend and limit.unit in ("", "%") else None, stale=self.work.stale,
        )
        trial = self._trial
        held = trial is not None and trial[0] == limit.id
        if held and trial is not None:
            state = state.with_end(trial[1], trial[2])
        axis = self._axes.get(limit.id)
        if axis is None or not held:
            axis = self._axes[limit.id] = axis_for(state, axis)
        return Look(rail=state, axis=axis, words=_("Inclusion of {name}").format(name=line.text))

    def try_bound(self, limit_id: int, end: End, value: float | None) -> None:
        """Show an end where a hand holds it; None shows the stored one."""
        self._trial = None if value is None else (limit_id, end, value)

    def write(self, owner: int, key: str, text: str) -> None:
        raise ValueError(_("The answer is not typed in; change a limit or a price."))


def _owner(place: int, line: Line) -> int:
    if line.ingredient_id is None:
        return -1 - place
    return 2 * line.ingredient_id + (line.part is Part.RAIL)
