"""How a rail is drawn: into any rectangle, from a state and an axis, in the tokens of a scheme."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QFontMetricsF, QLinearGradient, QPainter, QPen

from blendapp.desk.rail.geometry import Axis, End, RailState
from blendapp.desk.theme import Tokens, text_font

BAND_PX = 8.0
TICK_PX = 16.0
ROOM_PX = 3.0
MARK_PX = 5.0
FADE_PX = 26.0
TAG_PX = 22.0
INSET_PX = 8.0


def track_of(rect: QRectF) -> QRectF:
    """The part of a cell in which the axis lies: a little inside, so that a mark at its end is whole."""
    return rect.adjusted(INSET_PX, 0, -INSET_PX, 0)


def draw_rail(
    painter: QPainter, rect: QRectF, state: RailState, axis: Axis, look: Tokens, *, held: End | None = None
) -> None:
    """Draw all but the tag. rect: the cell; the axis lies in track_of(rect), centred in height.

    held: the end that a hand or the keyboard holds, drawn with a ring.
    """
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    if state.stale:
        painter.setOpacity(0.45)
    track = track_of(rect)
    middle = round(track.center().y()) + 0.5
    painter.fillRect(QRectF(track.left(), middle - 0.5, track.width(), 1), look.colour("hairline"))
    _draw_band(painter, track, middle, state, axis, look)
    if state.room is not None:
        _draw_room(painter, track, middle, state.room, axis, look)
    for end in (End.MINIMUM, End.MAXIMUM):
        _draw_end(painter, track, middle, state, axis, look, end, held is end)
    if state.mark is not None:
        _draw_mark(painter, track, middle, state, axis, look, held is End.MARK)
    painter.restore()


def _x(track: QRectF, axis: Axis, value: float) -> float:
    return track.left() + min(max(axis.place(value, track.width()), 0.0), track.width())


def _draw_band(
    painter: QPainter, track: QRectF, middle: float, state: RailState, axis: Axis, look: Tokens
) -> None:
    if state.minimum is None and state.maximum is None:
        return
    left = track.left() if state.minimum is None else _x(track, axis, state.minimum)
    right = track.right() if state.maximum is None else _x(track, axis, state.maximum)
    band = QRectF(left, middle - BAND_PX / 2, max(right - left, 1.0), BAND_PX)
    painter.fillRect(band, _fading(band, look.colour("band"), state.minimum is None, state.maximum is None))


def _draw_room(
    painter: QPainter, track: QRectF, middle: float, room: tuple[float | None, float | None], axis: Axis, look: Tokens
) -> None:
    low, high = room
    left = track.left() if low is None else _x(track, axis, low)
    right = track.right() if high is None else _x(track, axis, high)
    stretch = QRectF(left, middle + BAND_PX / 2 + 1.5, max(right - left, 2.0), ROOM_PX)
    painter.fillRect(stretch, _fading(stretch, look.colour("room"), low is None, high is None))


def _fading(rect: QRectF, colour: QColor, left_open: bool, right_open: bool) -> QBrush:
    if not left_open and not right_open:
        return QBrush(colour)
    gone = QColor(colour)
    gone.setAlpha(0)
    share = min(FADE_PX / max(rect.width(), 1.0), 0.5)
    gradient = QLinearGradient(rect.topLeft(), rect.topRight())
    gradient.setColorAt(0.0, gone if left_open else colour)
    if left_open:
        gradient.setColorAt(share, colour)
    if right_open:
        gradient.setColorAt(1.0 - share, colour)
    gradient.setColorAt(1.0, gone if right_open else colour)
    return QBrush(gradient)


def _draw_end(
    painter: QPainter, track: QRectF, middle: float, state: RailState, axis: Axis, look: Tokens, end: End, held: bool
) -> None:
    value = state.value(end)
    if value is None:
        return
    x = _x(track, axis, value)
    working = end in state.working
    if end in state.conflict:
        # Hatching runs inwards from the wall, so that two walls that exclude each other overlap visibly.
        side = 1.0 if end is End.MINIMUM else -1.0
        hatch = QRectF(min(x, x + side * 18), middle - TICK_PX / 2, 18, TICK_PX)
        brush = QBrush(look.colour("text"), Qt.BrushStyle.BDiagPattern)
        painter.fillRect(hatch, brush)
        painter.fillRect(QRectF(x - 1.25, middle - TICK_PX / 2, 2.5, TICK_PX), look.colour("text"))
    elif working:
        painter.fillRect(QRectF(x - 1.5, middle - TICK_PX / 2 - 1, 3, TICK_PX + 2), look.colour("accent"))
    else:
        painter.fillRect(QRectF(x - 0.6, middle - TICK_PX / 2, 1.2, TICK_PX), look.colour("quiet"))
    if held:
        painter.setPen(QPen(look.colour("text"), 1.4))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawRoundedRect(QRectF(x - 5, middle - TICK_PX / 2 - 3, 10, TICK_PX + 6), 4, 4)


def _draw_mark(
    painter: QPainter, track: QRectF, middle: float, state: RailState, axis: Axis, look: Tokens, held: bool
) -> None:
    assert state.mark is not None
    beyond = not axis.holds(state.mark)
    x = _x(track, axis, state.mark)
    name = "accent" if state.working else "text"
    painter.setPen(QPen(look.colour("ground"), 1.6))
    painter.setBrush(Qt.BrushStyle.NoBrush if beyond else look.colour(name))
    if beyond:
        painter.setPen(QPen(look.colour(name), 1.6))
    painter.drawEllipse(QPointF(x, middle), MARK_PX, MARK_PX)
    if held:
        painter.setPen(QPen(look.colour("text"), 1.4))
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.drawEllipse(QPointF(x, middle), MARK_PX + 3.5, MARK_PX + 3.5)


def wall_x(rect: QRectF, state: RailState, axis: Axis) -> float:
    """Where the working wall stands in a cell: the place from which its tag hangs."""
    for end in (End.MINIMUM, End.MAXIMUM):
        value = state.value(end)
        if end in state.working and value is not None:
            return _x(track_of(rect), axis, value)
    return rect.center().x()


def tag_width(text: str) -> float:
    """Pixels that a tag takes."""
    return QFontMetricsF(text_font()).horizontalAdvance(text) + 20.0


def draw_tag(
    painter: QPainter, bounds: QRectF, x: float, text: str, look: Tokens, *, stale: bool = False, plain: bool = False
) -> QRectF:
    """Draw a tag as a pill that hangs from x, kept inside bounds; returns where it stands.

    plain: in quiet ink, for a tag that says something else than what a working wall costs.
    """
    width = min(tag_width(text), bounds.width())
    left = min(max(x - 22.0, bounds.left()), bounds.right() - width)
    pill = QRectF(left, bounds.top(), width, TAG_PX).adjusted(0.5, 0.5, -0.5, -0.5)
    ink = look.colour("quiet" if plain else "accent")
    painter.save()
    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
    if stale:
        painter.setOpacity(0.45)
    painter.setPen(QPen(ink, 1.0))
    painter.setBrush(look.colour("ground"))
    painter.drawRoundedRect(pill, TAG_PX / 2 - 1, TAG_PX / 2 - 1)
    painter.setFont(text_font())
    inner = pill.adjusted(9, 0, -9, 0)
    fitted = painter.fontMetrics().elidedText(text, Qt.TextElideMode.ElideRight, int(inner.width()) + 1)
    painter.drawText(inner, Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft, fitted)
    painter.restore()
    return pill
