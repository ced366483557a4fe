"""The model of the limits: one row a limit, its two ends typed, its rail moved, its value now."""

from __future__ import annotations

import itertools
import math
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from blendapp.desk.meet import words
from blendapp.desk.meet.telling import price_sentence
from blendapp.desk.rail.geometry import Axis, End, RailState, axis_for
from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, number_look
from blendapp.domain.formulas import Amounts, Limit, LimitKind
from blendapp.domain.notation import notation
from blendapp.domain.problems import Problem, Severity
from blendapp.domain.results import LimitResult, Side
from blendapp.domain.wording import _
from blendapp.services import edits
from blendapp.services.mill import Edit

if TYPE_CHECKING:
    from blendapp.desk.work import Work

_SIDES = {"minimum": End.MINIMUM, "maximum": End.MAXIMUM}
_ENDS = {Side.MINIMUM: End.MINIMUM, Side.MAXIMUM: End.MAXIMUM}


class MeetModel(Grid):
    """Limits as rows. by_cost: in the order of what they cost, else as entered."""

    def __init__(self, work: Work, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work
        self.by_cost = True
        self._axes: dict[int, Axis] = {}
        self._found: dict[int, LimitResult] = {}
        self._conflicting: dict[int, set[End]] = {}
        self._widest = 2
        self._trial: tuple[int, End, float] | None = None

    def rebuild(self, *, keep_order: bool = False) -> None:
        """Show the limits of the chosen formula. keep_order: rows stay where they are, new ones come last."""
        self.take_result()
        self.set_headings([
            Heading("name", _("limit"), 178),
            Heading("minimum", _("at least"), 66, True),
            Heading("maximum", _("at most"), 66, True),
            Heading("rail", "", 128),
            Heading("now", _("now"), 66, True),
        ])
        formula_id = self.work.formula_id
        limits = [] if formula_id is None else self.work.library.limits(formula_id)
        order = [limit.id for limit in limits]
        if keep_order and self.by_cost:
            at = {owner: place for place, owner in enumerate(self.owners)}
            order.sort(key=lambda owner: at.get(owner, len(at)))
        elif self.by_cost:
            order.sort(key=self._rank, reverse=True)
        self._axes = {owner: axis for owner, axis in self._axes.items() if owner in set(order)}
        self.set_rows(order)

    def _rank(self, owner: int) -> float:
        if owner in self._conflicting:
            # Limits that clash stand first, as there is nothing that any of them costs.
            return math.inf
        found, limit = self._found.get(owner), self.limit(owner)
        return 0.0 if found is None or limit is None else words.cost_rank(found, self.decimals(limit))

    @property
    def is_sorted(self) -> bool:
        """Whether the rows stand in the order of what they cost now."""
        ranks = [self._rank(owner) for owner in self.owners]
        return all(above >= below * (1 - 1e-9) for above, below in itertools.pairwise(ranks))

    def take_result(self) -> None:
        """Take over what the answer says of each limit."""
        result = self.work.result
        self._found = {} if result is None else {found.limit_id: found for found in result.limits}
        self._conflicting = {}
        if result is not None and result.conflict is not None:
            members = set(result.conflict.members)
            by_index = {found.index: found.limit_id for found in result.limits}
            for repair in result.conflict.repairs:
                if repair.limit in by_index:
                    self._conflicting.setdefault(by_index[repair.limit], set()).add(_ENDS[repair.bound])
            for index in members:
                if index in by_index and by_index[index] not in self._conflicting:
                    self._conflicting[by_index[index]] = {End.MINIMUM, End.MAXIMUM}
        bounds = [v for f in self._found.values() for v in (f.minimum, f.maximum) if v is not None]
        self._widest = min(max((words.limit_decimals(value) for value in bounds), default=2), 3)

    def found(self, owner: int) -> LimitResult | None:
        """What the answer says of a limit, None where there is no answer."""
        return self._found.get(owner)

    def limit(self, owner: int) -> Limit | None:
        """The limit of a row."""
        return self.work.library.records["limit"].get(owner)

    def decimals(self, limit: Limit) -> int:
        """The decimals with which a limit is shown."""
        found = self._found.get(limit.id)
        bounds = [value for value in (limit.minimum, limit.maximum) if value is not None]
        if bounds:
            return words.limit_decimals(*bounds)
        return words.limit_decimals(None if found is None or found.value is None else round(found.value, 1))

    def try_bound(self, owner: int, end: End, value: float | None) -> None:
        """Show an end where a hand holds it; None shows the stored one."""
        self._trial = None if value is None else (owner, end, value)

    # -- cells

    def make_look(self, owner: int, key: str) -> Look:
        limit, formula = self.limit(owner), self.work.formula
        if limit is None or formula is None:
            return EMPTY
        found = self._found.get(owner)
        decimals = self.decimals(limit)
        if key == "name":
            return self._name_look(limit, found, decimals)
        if key in _SIDES:
            return self._bound_look(limit, found, key, decimals)
        if key == "rail":
            return self._rail_look(limit, found, decimals)
        value = None if found is None else found.value
        shown = decimals if value is None else max(decimals, 1 if abs(value) < 100 else 0)
        binds = found is not None and found.binding is not None
        return number_look(
            value, min(shown, 3), widest=max(self._widest, shown), strong=binds,
            stale=self.work.stale, unknown="", words=self._now_words(limit, value, decimals),
            hint=self._sentence(limit, found, decimals),
        )

    def _sentence(self, limit: Limit, found: LimitResult | None, decimals: int) -> str:
        """What the price of a limit means, said wherever in its row one points."""
        formula, result = self.work.formula, self.work.result
        if found is None or formula is None or result is None:
            return ""
        name = words.limit_name(self.work.library, limit)
        return price_sentence(
            found, name, decimals, result.currency, words.per_of(formula), given=result.given_ingredients)

    def sentence(self, owner: int) -> str:
        """What is said of a limit that one points at."""
        limit = self.limit(owner)
        return "" if limit is None else self._sentence(limit, self._found.get(owner), self.decimals(limit))

    def _name_look(self, limit: Limit, found: LimitResult | None, decimals: int) -> Look:
        formula = self.work.formula
        assert formula is not None
        name = words.limit_name(self.work.library, limit)
        unit = words.limit_unit(self.work.library, limit, formula.amounts)
        hint = f"{name}, {unit} ({words.kind_word(limit.kind)})"
        said = self._sentence(limit, found, decimals)
        hint = f"{hint}\n{said}" if said else hint
        return Look(text=name, typed=name, unit=unit, hint=hint, words=f"{name}, {unit}, {words.kind_word(limit.kind)}")

    def _bound_look(self, limit: Limit, found: LimitResult | None, key: str, decimals: int) -> Look:
        value: float | None = getattr(limit, key)
        trial = self._trial
        if trial is not None and trial[0] == limit.id and trial[1] is _SIDES[key]:
            value = trial[2]
        editable = not (limit.kind is LimitKind.COUNT and key == "minimum") and not (
            limit.kind is LimitKind.PRACTICAL and key == "maximum")
        working = found is not None and found.binding is not None and _ENDS[found.binding] is _SIDES[key]
        side = _("at least") if key == "minimum" else _("at most")
        name = words.limit_name(self.work.library, limit)
        if value is None:
            return Look(number=True, editable=editable, words=_("{name}, {side}: open").format(name=name, side=side))
        hint = self._sentence(limit, found, decimals)
        plain = number_look(value, decimals, widest=self._widest, editable=editable, accent=working, hint=hint)
        return replace(plain, words=_("{name}, {side} {value}").format(name=name, side=side, value=plain.text))

    def _now_words(self, limit: Limit, value: float | None, decimals: int) -> str:
        name = words.limit_name(self.work.library, limit)
        if value is None:
            return _("{name}: no value").format(name=name)
        return _("{name} now {value}").format(name=name, value=notation().write(value, decimals))

    def rail(self, owner: int) -> RailState | None:
        """The rail of a limit as it stands, or as a hand holds it."""
        limit, formula = self.limit(owner), self.work.formula
        if limit is None or formula is None:
            return None
        found = self._found.get(owner)
        working = frozenset() if found is None or found.binding is None else frozenset({_ENDS[found.binding]})
        decimals = self.decimals(limit)
        tag = ""
        if found is not None and self.work.result is not None:
            tag = words.tag_words(found, decimals, self.work.result.currency, words.per_of(formula))
        share = limit.kind in (LimitKind.INGREDIENT, LimitKind.GROUP)
        percent = share and formula.amounts is Amounts.BLEND and not limit.unit.strip("% ")
        state = RailState(
            minimum=limit.minimum, maximum=limit.maximum, mark=None if found is None else found.value,
            room=None if found is None else found.room, working=working,
            conflict=frozenset(self._conflicting.get(owner, ())), tag=tag, decimals=decimals,
            floor=0.0 if share else None, ceiling=100.0 if percent else None, stale=self.work.stale,
        )
        trial = self._trial
        if trial is not None and trial[0] == owner:
            state = state.with_end(trial[1], trial[2])
        return state

    def _rail_look(self, limit: Limit, found: LimitResult | None, decimals: int) -> Look:
        state = self.rail(limit.id)
        assert state is not None
        held = self._trial is not None and self._trial[0] == limit.id
        axis = self._axes.get(limit.id)
        if axis is None or not held:
            axis = self._axes[limit.id] = axis_for(state, axis)
        name = words.limit_name(self.work.library, limit)
        hint = self._sentence(limit, found, decimals)
        return Look(rail=state, axis=axis, hint=hint, words=_("Rail of {name}. {tag}").format(name=name, tag=state.tag))

    def set_axis(self, owner: int, axis: Axis) -> None:
        """Show a rail on another axis: while keys push an end out of view."""
        self._axes[owner] = axis

    # -- typing

    def write(self, owner: int, key: str, text: str) -> None:
        bound = notation().read(text) if text.strip() else None
        limit = self.limit(owner)
        odd = [] if limit is None else far_off(words.limit_name(self.work.library, limit), getattr(limit, key), bound)
        self.work.do(lambda mill: _with_oddities(edits.set_bound(mill, owner, key, bound), odd))


def far_off(name: str, old: float | None, new: float | None) -> list[Problem]:
    """What is odd about a typed bound: that it is more than ten times the one before, or less than a tenth of it."""
    if not old or not new or 0.1 - 1e-9 <= abs(new / old) <= 10 + 1e-9:
        return []
    text = _("{name} was {old} and is now {new}; Ctrl+Z takes it back if a digit slipped.")
    write = notation().write_short
    return [Problem(text.format(name=name, old=write(old), new=write(new)), severity=Severity.ODDITY)]


def _with_oddities(edit: Edit, odd: list[Problem]) -> Edit:
    return replace(edit, oddities=(*edit.oddities, *odd)) if odd and edit.changes else edit
