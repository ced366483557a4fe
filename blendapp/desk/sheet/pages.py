"""Pages of a PDF drawn into the window, made on a thread so that typing never waits for them."""

from __future__ import annotations

import itertools
from collections.abc import Callable, Iterator

from PySide6.QtCore import QSize, Qt, QTimer, Signal
from PySide6.QtGui import QImage, QPixmap, QResizeEvent
from PySide6.QtWidgets import QGraphicsOpacityEffect, QLabel, QScrollArea, QVBoxLayout, QWidget

from blendapp.desk.aside import Aside
from blendapp.desk.theme import GAP_PX
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _, plural
from blendapp.services import sheets

PAGE_WIDTH_IN = 8.27
# Further pages of a long order are counted and printed, and not drawn into the window.
MOST_PAGES = 24
REST_MS = 150


class PageView(QScrollArea):
    """Shows the pages of a PDF. shown: after new pages are in view. failed: a sentence."""

    shown = Signal()
    failed = Signal(str)

    def __init__(self) -> None:
        super().__init__()
        self.pages: list[bytes] = []
        self.count = 0
        self._making: Callable[[], bytes] | None = None
        self._width = 0
        self._stale = False
        self._rest = QTimer(self, singleShot=True, interval=REST_MS)
        self._rest.timeout.connect(self._again)
        self.inside = QWidget()
        self.column = QVBoxLayout(self.inside)
        self.column.setContentsMargins(GAP_PX * 2, GAP_PX, GAP_PX * 2, GAP_PX * 2)
        self.column.setSpacing(GAP_PX * 2)
        self.column.addStretch(1)
        self.setWidget(self.inside)
        self.setWidgetResizable(True)
        self.setAlignment(Qt.AlignmentFlag.AlignHCenter)
        self.setAccessibleName(_("Preview of the page"))
        self._aside = Aside(self, (Refused, ValueError, OSError))
        self._aside.done.connect(self._take)

    def show_pdf(self, make: Callable[[], bytes]) -> None:
        """Show the PDF that a function makes; it runs on a thread and must not touch the mill."""
        self._making = make
        self._width = self.page_width()
        dots = self.page_width() * self.devicePixelRatioF() / PAGE_WIDTH_IN
        self._aside.ask(lambda: _first_pages(make(), dots))

    def say_stale(self, stale: bool) -> None:
        """Grey the pages while others are made."""
        self._stale = stale
        for page in self.inside.findChildren(QLabel):
            effect = QGraphicsOpacityEffect(page)
            effect.setOpacity(0.4 if stale else 1.0)
            page.setGraphicsEffect(effect if stale else None)  # type: ignore[arg-type]

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        if self._making is not None and self.page_width() != self._width:
            self._rest.start()

    def _again(self) -> None:
        if self._making is not None:
            self.show_pdf(self._making)

    def page_width(self) -> int:
        """Pixels that a page takes in width."""
        return max(min(self.viewport().width() - 4 * GAP_PX, 860), 320)

    def _take(self, found: tuple[list[bytes], int] | None, fault: Exception | None) -> None:
        if fault is not None or found is None:
            self.failed.emit(str(fault))
            return
        self.pages, self.count = found
        self._fill()
        self.shown.emit()

    def _fill(self) -> None:
        self.clear(keep_pages=True)
        ratio = self.devicePixelRatioF()
        for number, data in enumerate(self.pages, 1):
            pixmap = QPixmap.fromImage(QImage.fromData(data))
            pixmap.setDevicePixelRatio(ratio)
            page = QLabel()
            page.setObjectName("page")
            page.setPixmap(pixmap)
            page.setFixedSize(QSize(round(pixmap.width() / ratio) + 2, round(pixmap.height() / ratio) + 2))
            page.setAccessibleName(_("Page {number} of {count}").format(number=number, count=self.count))
            self.column.insertWidget(self.column.count() - 1, page, 0, Qt.AlignmentFlag.AlignHCenter)
        more = self.count - len(self.pages)
        if more > 0:
            words = plural("{count} more page comes with these.", "{count} more pages come with these.", more)
            rest = QLabel(words.format(count=more))
            self.column.insertWidget(self.column.count() - 1, rest, 0, Qt.AlignmentFlag.AlignHCenter)

    def clear(self, *, keep_pages: bool = False) -> None:
        """Show nothing."""
        if not keep_pages:
            self.pages, self.count = [], 0
            self._making = None
            self._aside.forget()
        while self.column.count() > 1:
            item = self.column.takeAt(0)
            widget = item.widget() if item is not None else None
            if widget is not None:
                # A page that is refused goes at once, not when Qt gets to it.
                widget.hide()
                widget.deleteLater()

    def words(self) -> str:
        """How many pages there are."""
        return plural("{count} page", "{count} pages", self.count).format(count=self.count)


def _first_pages(pdf: bytes, dots_per_inch: float) -> tuple[list[bytes], int]:
    return list(itertools.islice(sheets.page_images(pdf, dots_per_inch), MOST_PAGES)), sheets.page_count(pdf)


def images_for_printer(pdf: bytes, dots_per_inch: float) -> Iterator[QImage]:
    """The pages at the printer's resolution, one after the other."""
    return (QImage.fromData(data) for data in sheets.page_images(pdf, dots_per_inch))
