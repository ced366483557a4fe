"""A cell in which a name is typed: the names that fit stand in a list under it, the best first."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QModelIndex, QPoint, QSize, QStringListModel, Qt, Signal
from PySide6.QtGui import QFontMetrics, QHideEvent, QMoveEvent, QResizeEvent, QShowEvent
from PySide6.QtWidgets import QLineEdit, QListView, QStyledItemDelegate, QStyleOptionViewItem, QWidget

from blendapp.desk.finder.search import rank
from blendapp.domain.names import fold
from blendapp.domain.wording import _

LINE_PX, MOST_LINES, LEAST_PX = 28, 9, 120


class _Line(QStyledItemDelegate):
    def sizeHint(self, option: QStyleOptionViewItem, index: object) -> QSize:
        return QSize(LEAST_PX, LINE_PX)


class NameField(QLineEdit):
    """Opened on a name with all that may be chosen. chosen: one was clicked, and is the text now.

    Arrows go through the list. What is merely typed stays as it is until pick() is called, so that leaving the cell
    in any other way takes nothing that was not written out.
    """

    chosen = Signal()

    def __init__(self, choices: Sequence[str], parent: QWidget) -> None:
        super().__init__(parent)
        self.choices = [one for one in dict.fromkeys(choices) if one]
        self.list = QListView(parent.window())
        self.list.setObjectName("offered")
        # The list outlives the field by a moment, and its model with it.
        self._found = QStringListModel(self.list)
        self.list.setModel(self._found)
        self.list.setItemDelegate(_Line(self.list))
        self.list.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.list.setUniformItemSizes(True)
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.list.setEditTriggers(QListView.EditTrigger.NoEditTriggers)
        self.list.setAccessibleName(_("What may be chosen"))
        self.list.clicked.connect(self._clicked)
        self.list.hide()
        self.destroyed.connect(self.list.deleteLater)
        self.textEdited.connect(lambda _text: self._narrow())

    def begin(self, text: str) -> None:
        """Open on a text, with every choice in view and the text's own marked."""
        self.setText(text)
        self.selectAll()
        self._show(self.choices)
        if text in self.choices:
            self._mark(self.choices.index(text))

    @property
    def offered(self) -> list[str]:
        """What stands in the list now."""
        return self._found.stringList()

    def _narrow(self) -> None:
        typed = self.text()
        ranked = [(rank(one, typed), at, one) for at, one in enumerate(self.choices)]
        self._show([one for _fit, _at, one in sorted((fit, at, one) for fit, at, one in ranked if fit is not None)])
        if typed.strip() and self.offered:
            exact = next((at for at, one in enumerate(self.offered) if fold(one) == fold(typed)), 0)
            self._mark(exact)

    def _show(self, names: Sequence[str]) -> None:
        self._found.setStringList(list(names))
        self.list.setCurrentIndex(QModelIndex())
        self._place()

    def _mark(self, row: int) -> None:
        self.list.setCurrentIndex(self._found.index(row))

    def step(self, by: int) -> None:
        """Mark the name so many lines below or above the marked one."""
        if self.offered:
            row = self.list.currentIndex().row() if self.list.currentIndex().isValid() else (-1 if by > 0 else 0)
            self._mark(min(max(row + by, 0), len(self.offered) - 1))

    def pick(self) -> None:
        """Take the marked name in place of what was typed; without one the text stays."""
        index = self.list.currentIndex()
        if index.isValid():
            self.setText(self.offered[index.row()])

    def _clicked(self, index: QModelIndex) -> None:
        self.setText(self.offered[index.row()])
        self.chosen.emit()

    def _place(self) -> None:
        """Hang the list under the field, or over it where there is more room."""
        if not self.offered or not self.isVisible():
            self.list.hide()
            return
        window = self.window()
        metrics = QFontMetrics(self.font())
        # The list scrolls where it is long, and its marked line must not stand under the bar.
        width = max(metrics.horizontalAdvance(one) for one in self.offered) + 36
        width = min(max(width, self.width(), LEAST_PX), window.width() - 16)
        height = min(len(self.offered), MOST_LINES) * LINE_PX + 6
        at = self.mapTo(window, QPoint(0, self.height() + 1))
        top = at.y()
        if top + height > window.height() - 8:
            above = self.mapTo(window, QPoint(0, 0)).y() - height - 1
            top = above if above > 8 else max(window.height() - 8 - height, 8)
        self.list.setGeometry(min(max(at.x(), 8), max(window.width() - width - 8, 8)), top, width, height)
        self.list.show()
        self.list.raise_()
        if self.list.currentIndex().isValid():
            self.list.scrollTo(self.list.currentIndex())

    def moveEvent(self, event: QMoveEvent) -> None:
        super().moveEvent(event)
        self._place()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._place()

    def showEvent(self, event: QShowEvent) -> None:
        super().showEvent(event)
        self._place()

    def hideEvent(self, event: QHideEvent) -> None:
        super().hideEvent(event)
        self.list.hide()
