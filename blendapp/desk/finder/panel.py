"""The panel over the bench in which one types what one looks for."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from PySide6.QtCore import (
    QAbstractListModel,
    QEvent,
    QModelIndex,
    QObject,
    QPersistentModelIndex,
    QRect,
    QSize,
    Qt,
    Signal,
)
from PySide6.QtGui import QKeyEvent, QPainter
from PySide6.QtWidgets import (
    QLabel,
    QLineEdit,
    QListView,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QVBoxLayout,
    QWidget,
)

from blendapp.desk.finder.focus import Return
from blendapp.desk.finder.raised import Raised
from blendapp.desk.finder.search import Found, best
from blendapp.desk.table.roles import ACCESSIBLE_TEXT, DISPLAY
from blendapp.desk.theme import ROW_PX, tokens
from blendapp.domain.wording import _

WIDTH_PX, SHOWN_ROWS = 560, 11
AnyIndex = QModelIndex | QPersistentModelIndex


class FoundModel(QAbstractListModel):
    """What fits, as a list."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.found: list[Found] = []

    def show(self, found: Sequence[Found]) -> None:
        """Show these."""
        self.beginResetModel()
        self.found = list(found)
        self.endResetModel()

    def rowCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008 - Qt's own signature
        return 0 if parent.isValid() else len(self.found)

    def data(self, index: AnyIndex, role: int = DISPLAY) -> Any:
        if not index.isValid():
            return None
        one = self.found[index.row()]
        if role == DISPLAY:
            return one.words
        if role == ACCESSIBLE_TEXT:
            return f"{one.words}, {one.kind}"
        return None


class _Row(QStyledItemDelegate):
    def sizeHint(self, option: QStyleOptionViewItem, index: AnyIndex) -> QSize:
        return QSize(100, ROW_PX)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        model = index.model()
        assert isinstance(model, FoundModel)
        one = model.found[index.row()]
        look = tokens()
        rect: QRect = option.rect
        if option.state & QStyle.StateFlag.State_Selected:
            painter.fillRect(rect, look.colour("chosen"))
        inside = rect.adjusted(16, 0, -16, 0)
        right = f"{one.kind}   {one.keys}" if one.keys else one.kind
        metrics = painter.fontMetrics()
        painter.setPen(look.colour("quiet"))
        painter.drawText(inside, Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter, right)
        painter.setPen(look.colour("text"))
        room = inside.width() - metrics.horizontalAdvance(right) - 16
        shown = metrics.elidedText(one.words, Qt.TextElideMode.ElideRight, room)
        painter.drawText(inside, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, shown)


class Finder(Raised):
    """Opened with what can be found; runs what is chosen. closed: whichever way it went."""

    closed = Signal()

    def __init__(self, window: QWidget) -> None:
        super().__init__(window)
        self._return = Return()
        self.things: list[Found] = []
        self.field = QLineEdit()
        self.field.setAccessibleName(_("Find"))
        self.field.setObjectName("find")
        # What is said where nothing fits; all things then stand below it.
        self.none = QLabel()
        self.none.setObjectName("quiet")
        self.found = FoundModel(self)
        self.list = QListView()
        self.list.setModel(self.found)
        self.list.setItemDelegate(_Row(self.list))
        self.list.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.list.setMouseTracking(True)
        self.list.setUniformItemSizes(True)
        self.list.setAccessibleName(_("Found"))
        self.list.setObjectName("found")
        column = QVBoxLayout(self)
        column.setContentsMargins(1, 12, 1, 8)
        column.setSpacing(8)
        inset = QVBoxLayout()
        inset.setContentsMargins(12, 0, 12, 0)
        inset.addWidget(self.field)
        inset.addWidget(self.none)
        column.addLayout(inset)
        column.addWidget(self.list)
        self.field.textChanged.connect(self._narrow)
        self.field.installEventFilter(self)
        self.list.clicked.connect(self._run)
        self.list.entered.connect(self.list.setCurrentIndex)

    def open(self, things: Sequence[Found], prompt: str, below: QWidget | None = None, none: str = "") -> None:
        """Offer things; below: a button under which the panel stands, else it is centred. none: said above all of them
        where nothing fits."""
        self._return.remember(self)
        self.none.setText(none)
        self.things = list(things)
        self.field.setPlaceholderText(prompt)
        self.field.clear()
        self._narrow("")
        window = self.inside
        width = min(WIDTH_PX, window.width() - 32)
        left = (window.width() - width) // 2
        top = 72
        if below is not None:
            at = below.mapTo(window, below.rect().bottomLeft())
            left, top = max(16, min(at.x(), window.width() - width - 16)), at.y() + 6
        self.setGeometry(left, top, width, min(64 + SHOWN_ROWS * ROW_PX, window.height() - top - 48))
        self.show()
        self.raise_()
        self.field.setFocus()

    def leave(self) -> None:
        """Close without running anything."""
        if self.isVisible():
            self._shut()

    def _narrow(self, typed: str) -> None:
        found = best(self.things, typed)
        lacking = not found and bool(self.none.text())
        self.none.setVisible(lacking)
        self.found.show(self.things if lacking else found)
        if lacking:
            self.list.setCurrentIndex(QModelIndex())
        elif found:
            self.list.setCurrentIndex(self.found.index(0))

    def _run(self, index: QModelIndex) -> None:
        if index.isValid():
            chosen = self.found.found[index.row()]
            self._shut()
            chosen.run()

    def _shut(self) -> None:
        self.hide()
        self._return.give_back()
        self.closed.emit()

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        if watched is self.field and event.type() == QEvent.Type.KeyPress and isinstance(event, QKeyEvent):
            step = {Qt.Key.Key_Down: 1, Qt.Key.Key_Up: -1, Qt.Key.Key_PageDown: 10, Qt.Key.Key_PageUp: -10}.get(
                Qt.Key(event.key()))
            if step is not None:
                row = min(max(self.list.currentIndex().row() + step, 0), len(self.found.found) - 1)
                self.list.setCurrentIndex(self.found.index(row))
                return True
            if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter):
                self._run(self.list.currentIndex())
                return True
            if event.key() == Qt.Key.Key_Escape:
                self.leave()
                return True
        if watched is self.field and event.type() == QEvent.Type.FocusOut and self.isVisible():
            window = self.window()
            if window.isActiveWindow():
                self.leave()
        return super().eventFilter(watched, event)
