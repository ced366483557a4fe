"""The rail: where things stand, what an axis shows, and how an end is moved."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st
from PySide6.QtCore import QRectF
from PySide6.QtGui import QImage, QPainter
from pytestqt.qtbot import QtBot

from blendapp.desk.rail.geometry import Axis, End, RailState, axis_for, end_at, nudge_step
from blendapp.desk.rail.grip import RailGrip
from blendapp.desk.rail.paint import draw_rail
from blendapp.desk.theme import DARK, LIGHT, load_fonts

figures = st.floats(-1e6, 1e6).map(lambda value: round(value, 3))
maybe = st.none() | figures


@given(minimum=maybe, maximum=maybe, mark=maybe, low=maybe, high=maybe)
def test_an_axis_shows_every_end_and_the_mark(
    minimum: float | None, maximum: float | None, mark: float | None, low: float | None, high: float | None
) -> None:
    state = RailState(minimum, maximum, mark, room=(low, high))
    axis = axis_for(state)
    assert axis.low < axis.high
    assert all(axis.holds(value) for value in (minimum, maximum, mark) if value is not None)


@given(state=st.builds(RailState, minimum=maybe, maximum=maybe, mark=maybe))
def test_an_axis_that_still_shows_all_stays(state: RailState) -> None:
    axis = axis_for(state)
    assert axis_for(state, axis) == axis


def test_an_open_side_leaves_more_axis_than_a_closed_one() -> None:
    axis = axis_for(RailState(minimum=10.0, mark=12.0))
    assert axis.high - 12.0 > 10.0 - axis.low


def test_an_end_keeps_to_its_side_of_the_other_and_to_floor_and_ceiling() -> None:
    state = RailState(minimum=5.0, maximum=10.0, floor=0.0, ceiling=100.0)
    assert state.moved(End.MINIMUM, 12.0).minimum == 10.0
    assert state.moved(End.MINIMUM, -3.0).minimum == 0.0
    assert state.moved(End.MAXIMUM, 120.0).maximum == 100.0
    assert state.moved(End.MAXIMUM, 7.126).maximum == 7.13


def test_the_nearer_end_is_taken_and_of_two_in_one_place_the_one_on_the_pointers_side() -> None:
    axis = Axis(0.0, 10.0)
    state = RailState(minimum=2.0, maximum=3.0)
    assert end_at(state, axis, 21.0, 100.0) is End.MINIMUM
    assert end_at(state, axis, 29.0, 100.0) is End.MAXIMUM
    assert end_at(state, axis, 60.0, 100.0) is None
    one_place = RailState(minimum=5.0, maximum=5.0)
    assert end_at(one_place, axis, 47.0, 100.0) is End.MINIMUM
    assert end_at(one_place, axis, 53.0, 100.0) is End.MAXIMUM


def test_a_nudge_is_a_round_figure_and_never_finer_than_what_is_shown() -> None:
    state = RailState(minimum=18.0, decimals=1)
    assert nudge_step(state, Axis(10.0, 30.0), big=False) == pytest.approx(0.1)
    assert nudge_step(state, Axis(10.0, 30.0), big=True) == pytest.approx(1.0)
    assert nudge_step(RailState(minimum=0.4, decimals=2), Axis(0.39, 0.41), big=False) == pytest.approx(0.01)


def test_a_drag_proposes_on_the_way_and_gives_once(qtbot: QtBot) -> None:
    grip: RailGrip = RailGrip()
    proposed: list[float] = []
    given_values: list[float] = []
    grip.proposed.connect(lambda _owner, _end, value: proposed.append(value))
    grip.given.connect(lambda _owner, _end, value: given_values.append(value))
    state, axis = RailState(minimum=2.0, maximum=8.0), Axis(0.0, 10.0)
    assert grip.press("here", state, axis, 20.0, 100.0) is End.MINIMUM
    for x in (25.0, 30.0, 35.0):
        grip.drag(x, 100.0)
    assert given_values == []
    grip.let_go()
    assert proposed == [2.5, 3.0, 3.5]
    assert given_values == [3.5]


def test_an_end_put_back_where_it_was_gives_nothing(qtbot: QtBot) -> None:
    grip: RailGrip = RailGrip()
    given_values: list[float] = []
    back: list[object] = []
    grip.given.connect(lambda _owner, _end, value: given_values.append(value))
    grip.taken_back.connect(back.append)
    grip.press("here", RailState(minimum=2.0), Axis(0.0, 10.0), 20.0, 100.0)
    grip.drag(30.0, 100.0)
    grip.drag(20.0, 100.0)
    grip.let_go()
    assert given_values == []
    assert back == ["here"]


def pixels(state: RailState, dark: bool = False) -> bytes:
    image = QImage(200, 32, QImage.Format.Format_RGB32)
    look = DARK if dark else LIGHT
    image.fill(look.colour("ground"))
    painter = QPainter(image)
    draw_rail(painter, QRectF(0, 0, 200, 32), state, Axis(0.0, 10.0), look)
    painter.end()
    return bytes(image.convertToFormat(QImage.Format.Format_Grayscale8).constBits())


def test_working_slack_and_conflicting_walls_differ_without_colour(qtbot: QtBot) -> None:
    load_fonts()
    slack = RailState(minimum=4.0, maximum=8.0, mark=6.0)
    working = RailState(minimum=4.0, maximum=8.0, mark=6.0, working=frozenset({End.MAXIMUM}))
    conflict = RailState(minimum=4.0, maximum=8.0, mark=6.0, conflict=frozenset({End.MAXIMUM}))
    shapes = [sum(1 for byte in pixels(state) if byte < 245) for state in (slack, working, conflict)]
    assert len(set(shapes)) == 3
    assert pixels(slack) != pixels(slack, dark=True)
