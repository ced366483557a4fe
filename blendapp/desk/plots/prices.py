"""The prices of an ingredient over time: what was in force as a line of steps, every quote as a mark."""

from __future__ import annotations

import datetime
import math
from collections.abc import Sequence

import pyqtgraph as pg
from PySide6.QtCore import QPointF, Qt, Signal
from PySide6.QtGui import QFocusEvent, QFontMetricsF, QKeyEvent, QPen
from PySide6.QtWidgets import QWidget

from blendapp.desk.history.marks import HOLLOW, SIGNS, marks_of, supplier_words
from blendapp.desk.theme import Tokens, text_font, tokens
from blendapp.domain.notation import notation
from blendapp.domain.price_history import PriceHistory, QuoteLine, Standing, day_words
from blendapp.domain.wording import _

MARK_PX, LINE_PX, THIN_PX = 9.0, 2.0, 1.0
# Days that stand to the right of today, so that what is in force now is seen as a line; at least so many in all.
AHEAD_DAYS, LEAST_DAYS = 10, 28
_KEYS: dict[int, int] = {Qt.Key.Key_Left: -1, Qt.Key.Key_Right: 1}
Point = tuple[float, float]


class _Days(pg.AxisItem):
    """Days by their ordinal, named as days, months or years, whichever fits."""

    def tickValues(self, least: float, greatest: float, size: float) -> list[tuple[float, list[float]]]:
        places = max(int(size // 96), 1)
        days = _ticks(least, greatest, places)
        return [(float(days[1] - days[0]) if len(days) > 1 else 1.0, [float(day) for day in days])]

    def tickStrings(self, values: Sequence[float], scale: float, spacing: float) -> list[str]:
        return [_tick_words(datetime.date.fromordinal(int(value)), spacing) for value in values]


class _Money(pg.AxisItem):
    def tickValues(self, least: float, greatest: float, size: float) -> list[tuple[float, list[float]]]:
        """Multiples of 1, 2 or 5 times a power of ten, about 44 pixels apart or more."""
        rough = max((greatest - least) / max(size / 44, 1), 1e-9)
        power = 10.0 ** math.floor(math.log10(rough))
        step = next(factor * power for factor in (1, 2, 5, 10) if factor * power >= rough * (1 - 1e-9))
        first, last = math.ceil(least / step - 1e-9), math.floor(greatest / step + 1e-9)
        return [(step, [number * step for number in range(first, last + 1)])]

    def tickStrings(self, values: Sequence[float], scale: float, spacing: float) -> list[str]:
        decimals = 0 if spacing >= 1 else 1 if spacing >= 0.1 else 2
        return [notation().write(value, decimals) for value in values]


def _ticks(least: float, greatest: float, places: int) -> list[int]:
    """The days that have a name on the axis: Mondays, first days of months, or of years, at most `places` or so."""
    first, last = math.ceil(max(least, 1)), math.floor(min(greatest, datetime.date.max.toordinal()))
    span = max(last - first, 1)
    if span / 7 <= places:
        return [day for day in range(first, last + 1) if datetime.date.fromordinal(day).weekday() == 0]
    months = next((step for step in (1, 2, 3, 6, 12, 24, 60, 120) if span / 30.4 / step <= places), 240)
    begin = datetime.date.fromordinal(first)
    number = begin.year * 12 + begin.month - 1
    number += -number % months
    found: list[int] = []
    while number // 12 <= datetime.MAXYEAR:
        day = datetime.date(number // 12, number % 12 + 1, 1).toordinal()
        if day > last:
            break
        if day >= first:
            found.append(day)
        number += months
    return found


def _tick_words(day: datetime.date, spacing: float) -> str:
    if spacing >= 360:
        return f"{day.year}"
    if spacing >= 27:
        return f"{day:%Y-%m}"
    return day_words(day)


class PricePlot(pg.GraphicsView):
    """A plot without menus. chosen: the identifier of the quote whose mark was clicked or reached by keys."""

    chosen = Signal(int)

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent, background=None)
        self.setFocusPolicy(Qt.FocusPolicy.StrongFocus)
        self.setAccessibleName(_("Prices over time"))
        self.setMinimumHeight(170)
        # The scene would offer an export of its own.
        for action in self.scene().contextMenu:
            action.setParent(None)
        self.scene().contextMenu.clear()
        inside = pg.GraphicsLayout()
        inside.setContentsMargins(0, 6, 8, 0)
        self.setCentralItem(inside)
        self.box = pg.ViewBox(enableMenu=False)
        self.box.setMouseEnabled(False, False)
        self.box.setDefaultPadding(0)
        self.money, self.days = _Money("left"), _Days("bottom")
        inside.addItem(self.money, 0, 0)
        inside.addItem(self.box, 0, 1)
        inside.addItem(self.days, 1, 1)
        for axis in (self.money, self.days):
            axis.linkToView(self.box)
            axis.setTickFont(text_font())
            axis.setStyle(tickLength=-4, tickTextOffset=6)
        self.history: PriceHistory | None = None
        self.span_days: int | None = None
        self.quote_id: int | None = None
        self._points: dict[int, Point] = {}
        self._ring: pg.ScatterPlotItem | None = None

    # -- what is shown

    def show_history(self, history: PriceHistory, span_days: int | None = None) -> None:
        """Show a history. span_days: how far back, None for all of it."""
        self.history, self.span_days = history, span_days
        if self.quote_id is not None and all(line.quote.id != self.quote_id for line in history.lines):
            self.quote_id = None
        self.setAccessibleDescription(history.why)
        self.draw()

    def point_at(self, quote_id: int | None) -> None:
        """Put the ring round the mark of a quote."""
        if quote_id != self.quote_id:
            self.quote_id = quote_id
            self._draw_ring()
            line = None if self.history is None else next(
                (one for one in self.history.lines if one.quote.id == quote_id), None)
            if line is not None:
                self.setAccessibleDescription(line_words(line))

    def span(self) -> tuple[float, float]:
        """The first and the last day that are shown, as ordinals."""
        assert self.history is not None
        on = self.history.on.toordinal()
        days = [line.quote.valid_from.toordinal() for line in self._lines() if line.quote.valid_from is not None]
        first = min([*days, on - LEAST_DAYS + AHEAD_DAYS])
        last = max([*days, on]) + max(AHEAD_DAYS, 0.04 * (on - first))
        if self.span_days is not None:
            first = max(first, on - self.span_days)
        return first - 0.02 * (last - first), last

    def _lines(self) -> list[QuoteLine]:
        """The quotes that are drawn: all but replaced ones, the earliest first."""
        assert self.history is not None
        return [line for line in reversed(self.history.lines) if line.standing is not Standing.REPLACED]

    def draw(self) -> None:
        """Draw everything anew, in the scheme of now."""
        if self.history is None:
            return
        look = tokens()
        self.setBackground(look.colour("ground"))
        self.box.clear()
        for axis in (self.money, self.days):
            axis.setPen(pg.mkPen(look.colour("hairline")))
            axis.setTextPen(pg.mkPen(look.colour("quiet")))
        prices = [price for line in self._lines() if (price := line.quote.price_per_t) is not None]
        low, high = (min(prices), max(prices)) if prices else (0.0, 1.0)
        spare = max((high - low) * 0.16, abs(high) * 0.02, 0.5)
        first, last = self.span()
        self.box.setRange(xRange=(first, last), yRange=(low - spare, high + spare * 1.6), padding=0)
        width = max(QFontMetricsF(text_font()).horizontalAdvance(notation().write(v, 2)) for v in (low, high + spare))
        self.money.setWidth(width + 16)
        self._draw_today(look, first, last)
        self._draw_validities(look, first, last)
        self._draw_steps(look, first, last)
        self._draw_marks(look, first, last)

    def _draw_today(self, look: Tokens, first: float, last: float) -> None:
        assert self.history is not None
        on = float(self.history.on.toordinal())
        self.box.addItem(pg.InfiniteLine(on, pen=_pen(look, "quiet", THIN_PX, Qt.PenStyle.DotLine)))
        self._write(_("today"), on, self.box.viewRange()[1][1], look, (1, 0) if on > (first + last) / 2 else (0, 0))

    def _write(self, text: str, x: float, y: float, look: Tokens, anchor: tuple[float, float]) -> None:
        item = pg.TextItem(text, look.colour("quiet"), anchor=anchor)
        item.setFont(text_font())
        item.setPos(x, y)
        self.box.addItem(item, ignoreBounds=True)

    def _line(self, pen: QPen, points: Sequence[Point], connect: str = "all") -> None:
        x, y = ([point[part] for point in points] for part in (0, 1))
        self.box.addItem(pg.PlotCurveItem(x, y, pen=pen, antialias=True, connect=connect))

    def _draw_validities(self, look: Tokens, first: float, last: float) -> None:
        """A thin line for as long as each quote holds, until the next one of the same supplier and site."""
        pairs: list[Point] = []
        next_first: dict[tuple[int | None, int | None], float] = {}
        for line in reversed(self._lines()):
            price, quote = line.quote.price_per_t, line.quote
            begin = first if quote.valid_from is None else float(quote.valid_from.toordinal())
            end = last if quote.valid_to is None else quote.valid_to.toordinal() + 1.0
            whose = (quote.supplier_id, quote.site_id)
            begin, end = max(begin, first), min(end, last, next_first.get(whose, last))
            if price is not None and begin < end:
                pairs += [(begin, price), (end, price)]
            next_first[whose] = begin
        if pairs:
            self._line(_pen(look, "hairline", THIN_PX), pairs, "pairs")

    def _draw_steps(self, look: Tokens, first: float, last: float) -> None:
        """What was in force, solid up to the end of today and dashed from then on; broken where no price was known."""
        assert self.history is not None
        turn = self.history.on.toordinal() + 1.0
        path: list[list[Point]] = []
        joined = False
        for step in self.history.steps:
            begin = first if step.first is None else float(step.first.toordinal())
            end = last if step.last is None else step.last.toordinal() + 1.0
            begin, end = max(begin, first), min(end, last)
            price = step.price_per_t
            if price is None or begin >= end:
                if price is None and step.quote is not None and begin < end and path:
                    self._write(_("withdrawn"), begin, path[-1][-1][1], look, (0, 0.5))
                joined = False
                continue
            if not joined:
                path.append([])
            path[-1] += [(begin, price), (end, price)]
            joined = True
        for points in path:
            done, to_come = _cut(points, turn)
            for part, style in ((done, Qt.PenStyle.SolidLine), (to_come, Qt.PenStyle.DashLine)):
                if len(part) > 1:
                    self._line(_pen(look, "text", LINE_PX, style), part)

    def _draw_marks(self, look: Tokens, first: float, last: float) -> None:
        assert self.history is not None
        marks = marks_of(self.history)
        self._points = {}
        spots = []
        for line in self._lines():
            price, quote = line.quote.price_per_t, line.quote
            x = first if quote.valid_from is None else float(quote.valid_from.toordinal())
            if price is None or not first <= x <= last:
                continue
            self._points[quote.id] = (x, price)
            filled = line.standing not in HOLLOW
            spots.append({
                "pos": (x, price), "symbol": SIGNS[marks[line.supplier]][1], "data": quote.id, "size": MARK_PX,
                "pen": _pen(look, "text", 1.2), "brush": look.colour("text" if filled else "ground"),
            })
            if line.site:
                self._write(line.site, x, price, look, (-0.05, 1.1))
        items = pg.ScatterPlotItem(spots, antialias=True)
        items.sigClicked.connect(self._clicked)
        self.box.addItem(items)
        self._ring = pg.ScatterPlotItem(antialias=True)
        self.box.addItem(self._ring)
        self._draw_ring()

    def _draw_ring(self) -> None:
        """Draw the ring round the mark that is pointed at, and nothing else."""
        if self._ring is None:
            return
        place = self._points.get(self.quote_id) if self.quote_id is not None else None
        pen = _pen(tokens(), "text" if self.hasFocus() else "quiet", 1.4)
        self._ring.setData([] if place is None else [
            {"pos": place, "symbol": "o", "size": MARK_PX * 2.1, "pen": pen, "brush": None}])

    # -- hands

    def _clicked(self, _item: object, points: Sequence[object], _event: object = None) -> None:
        self._choose(int(points[0].data()))  # type: ignore[attr-defined]

    def _choose(self, quote_id: int) -> None:
        self.point_at(quote_id)
        self.chosen.emit(quote_id)

    def where(self, quote_id: int) -> QPointF:
        """Where a mark stands in the widget."""
        x, y = self._points[quote_id]
        return QPointF(self.mapFromScene(self.box.mapViewToScene(QPointF(x, y))))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        step = _KEYS.get(event.key())
        shown = list(self._points)
        if step is not None and shown:
            at = shown.index(self.quote_id) if self.quote_id in self._points else (-1 if step > 0 else len(shown))
            self._choose(shown[min(max(at + step, 0), len(shown) - 1)])
        elif event.key() in (Qt.Key.Key_Home, Qt.Key.Key_End) and shown:
            self._choose(shown[0 if event.key() == Qt.Key.Key_Home else -1])
        else:
            event.ignore()

    def focusInEvent(self, event: QFocusEvent) -> None:
        super().focusInEvent(event)
        self._draw_ring()

    def focusOutEvent(self, event: QFocusEvent) -> None:
        super().focusOutEvent(event)
        self._draw_ring()


def line_words(line: QuoteLine) -> str:
    """A quote in a line, for who cannot see its mark."""
    quote = line.quote
    price = _("withdrawn") if quote.price is None else _("{price} per {mass}").format(
        price=notation().write_short(quote.price), mass=quote.per)
    parts = (day_words(quote.valid_from), price, supplier_words(line.supplier), line.site, line.standing.label)
    return ", ".join(part for part in parts if part)


def _pen(look: Tokens, name: str, width: float, style: Qt.PenStyle = Qt.PenStyle.SolidLine) -> QPen:
    return pg.mkPen(look.colour(name), width=width, style=style)


def _cut(points: Sequence[Point], turn: float) -> tuple[list[Point], list[Point]]:
    """A path of steps before and after a day; both hold the place where it is cut."""
    before = [point for point in points if point[0] <= turn]
    after = [point for point in points if point[0] > turn]
    if before and after:
        level = before[-1][1]
        after.insert(0, (turn, level))
        before.append((turn, level))
    return before, after
