"""How an end of a rail is moved: by the pointer, by keys or by a typed number, proposed on the way, given once."""

from __future__ import annotations

from typing import Generic, TypeVar

from PySide6.QtCore import QObject, QTimer, Signal

from blendapp.desk.rail.geometry import Axis, End, RailState, axis_for, end_at, nudge_step

Owner = TypeVar("Owner")

SETTLE_MS = 700


class RailGrip(QObject, Generic[Owner]):
    """What holds an end of one rail, of whichever rail it was taken from.

    proposed(owner, end, value): while it moves. given(owner, end, value): once, at the end; this is one undo.
    taken_back(owner): Escape; whoever followed the proposals shows the stored values again.
    """

    proposed = Signal(object, object, float)
    given = Signal(object, object, float)
    taken_back = Signal(object)

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.owner: Owner | None = None
        self.end: End | None = None
        self.state = RailState()
        self.axis = Axis(0.0, 1.0)
        self._start: float | None = None
        self._offset = 0.0
        self._settle = QTimer(self, singleShot=True, interval=SETTLE_MS)
        self._settle.timeout.connect(self.let_go)

    @property
    def moving(self) -> bool:
        """Whether an end is held and not yet given."""
        return self._start is not None

    def take(self, owner: Owner, end: End, state: RailState, axis: Axis) -> None:
        """Hold an end; what another rail still holds is given first."""
        if self.moving and (owner != self.owner or end is not self.end):
            self.let_go()
        if not self.moving:
            self.owner, self.end, self.state, self.axis = owner, end, state, axis
            self._start = state.value(end)

    def press(self, owner: Owner, state: RailState, axis: Axis, x: float, width: float) -> End | None:
        """Take the end under the pointer, if there is one."""
        end = end_at(state, axis, x, width)
        if end is None:
            return None
        self.take(owner, end, state, axis)
        value = state.value(end)
        assert value is not None
        self._offset = self.axis.place(value, width) - x
        return end

    def drag(self, x: float, width: float) -> None:
        """Move the held end to the pointer. The axis stays as it was taken, so the hand never slips."""
        if self.moving:
            self._propose(self.axis.value(min(max(x + self._offset, 0.0), width), width))

    def nudge(self, owner: Owner, end: End, state: RailState, axis: Axis, steps: int, *, big: bool = False) -> None:
        """Move an end by keys: each press proposes, a short rest gives."""
        self.take(owner, end, state, axis)
        value = self.state.value(end)
        if value is None:
            return
        moved = value + steps * nudge_step(self.state, self.axis, big=big)
        if not self.axis.holds(moved):
            self.axis = axis_for(self.state.moved(end, moved))
        self._propose(moved)
        self._settle.start()

    def _propose(self, value: float) -> None:
        assert self.end is not None
        kept = self.state.kept(self.end, value)
        if kept != self.state.value(self.end):
            self.state = self.state.moved(self.end, kept)
            self.proposed.emit(self.owner, self.end, kept)

    def let_go(self) -> None:
        """Give the value, if it moved."""
        self._settle.stop()
        if not self.moving:
            return
        owner, end, start = self.owner, self.end, self._start
        assert end is not None
        value = self.state.value(end)
        self._forget()
        if value is not None and value != start:
            self.given.emit(owner, end, value)
        else:
            self.taken_back.emit(owner)

    def take_back(self) -> bool:
        """Let go without giving; returns whether anything was held."""
        self._settle.stop()
        if not self.moving:
            return False
        owner = self.owner
        self._forget()
        self.taken_back.emit(owner)
        return True

    def _forget(self) -> None:
        self._start = None
        self.owner = None
        self.end = None
