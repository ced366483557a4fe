"""The frame of the window: header, three zones, and the caution that is in view at all times."""

from __future__ import annotations

from PySide6.QtCore import QPoint, QRect, QSize, Qt, QTimer, Signal
from PySide6.QtGui import QCloseEvent, QPainter, QPaintEvent, QResizeEvent
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QSplitter,
    QSplitterHandle,
    QStackedWidget,
    QVBoxLayout,
    QWidget,
)

from blendapp.desk.shell.header import Header
from blendapp.desk.shell.zone import Elided, Zone
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font, tokens
from blendapp.domain.cautions import general_caution
from blendapp.domain.wording import _

WIDTH_PX, HEIGHT_PX, LEAST_PX = 1440, 900, 1024


class Rule(QFrame):
    """A hairline across the window."""

    def __init__(self) -> None:
        super().__init__()
        self.setFixedHeight(1)

    def paintEvent(self, event: QPaintEvent) -> None:
        QPainter(self).fillRect(self.rect(), tokens().colour("hairline"))


class Footer(QWidget):
    """The caution on the left, the check of the answer on the right."""

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("footer")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.setFixedHeight(40)
        self.caution = QLabel(general_caution())
        self.caution.setFont(text_font(strong=True))
        self.caution.setAccessibleName(general_caution())
        self.check = Elided()
        self.check.setObjectName("quiet")
        self.check.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX, 0, MARGIN_PX, 0)
        row.setSpacing(GAP_PX * 3)
        row.addWidget(self.caution)
        row.addWidget(self.check, 1)


class _Handle(QSplitterHandle):
    def paintEvent(self, event: QPaintEvent) -> None:
        painter = QPainter(self)
        painter.fillRect(
            QRect(QPoint(self.width() // 2, MARGIN_PX // 2), QPoint(self.width() // 2, self.height())),
            tokens().colour("hairline"),
        )


class _Zones(QSplitter):
    def __init__(self) -> None:
        super().__init__(Qt.Orientation.Horizontal)
        self.setHandleWidth(1)
        self.setChildrenCollapsible(False)

    def createHandle(self) -> QSplitterHandle:
        return _Handle(self.orientation(), self)


class Frame(QWidget):
    """The window before the mill is in it. painted: after the first paint, once. closing: the person closes it."""

    painted = Signal()
    closing = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.setWindowTitle("blendapp")
        self.header = Header()
        self.have = Zone(_("What we have"))
        self.meet = Zone(_("What it must meet"))
        self.mix = Zone(_("What to mix"))
        self.zones = (self.have, self.meet, self.mix)
        self.bench = _Zones()
        for zone, least in zip(self.zones, (300, 380, 300), strict=True):
            zone.setMinimumWidth(least)
            self.bench.addWidget(zone)
        self.bench.setSizes([446, 574, 420])
        for place, zone in enumerate(self.zones):
            zone.widen_asked.connect(lambda place=place: self.widen(None if self.wide == place else place))
        self.middle = QStackedWidget()
        self.middle.addWidget(self.bench)
        self.footer = Footer()
        column = self._column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(0)
        column.addWidget(self.header)
        column.addWidget(Rule())
        column.addWidget(self.middle, 1)
        column.addWidget(Rule())
        column.addWidget(self.footer)
        self.wide: int | None = None
        self._strip: QWidget | None = None
        self._floats = False
        self._is_painted = False
        self._take_size()

    def _take_size(self) -> None:
        """As large as the sketch of the bench, or as the screen allows."""
        screen = self.screen().availableSize() if self.screen() is not None else QSize(WIDTH_PX, HEIGHT_PX)
        if screen.width() < LEAST_PX:
            # Too small for the three zones whatever is done; the person will move the window about.
            screen = QSize(WIDTH_PX + 40, HEIGHT_PX + 60)
        self.resize(min(WIDTH_PX, screen.width() - 40), min(HEIGHT_PX, screen.height() - 60))

    def put_strip(self, strip: QWidget) -> None:
        """Put the strip of messages under the header."""
        self._strip = strip
        self._column.insertWidget(2, strip)

    def float_strip(self, floating: bool) -> None:
        """Lay the strip over the foot of the page, where it takes no room from it, or give it its own row again."""
        if self._strip is None or floating is self._floats:
            return
        self._floats = floating
        if floating:
            self._column.removeWidget(self._strip)
        else:
            self._column.insertWidget(2, self._strip)
        self.place_strip()

    def place_strip(self) -> None:
        """Put a strip that floats where it belongs."""
        if self._strip is not None and self._floats:
            page = self.middle.geometry()
            height = self._strip.sizeHint().height()
            self._strip.setGeometry(page.left(), page.bottom() + 1 - height, page.width(), height)
            self._strip.raise_()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self.place_strip()

    def closeEvent(self, event: QCloseEvent) -> None:
        self.closing.emit()
        super().closeEvent(event)

    def widen(self, place: int | None) -> None:
        """Give the zone at a place the whole window; None shows all three."""
        self.wide = place
        for here, zone in enumerate(self.zones):
            zone.setVisible(place is None or place == here)
            zone.show_wide(place == here)

    def paintEvent(self, event: QPaintEvent) -> None:
        super().paintEvent(event)
        if not self._is_painted:
            self._is_painted = True
            # After this event, when all children have painted too.
            QTimer.singleShot(0, self.painted.emit)
