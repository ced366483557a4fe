"""The answers that may be given, as a numbered list: the first nine by their figure."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from PySide6.QtCore import QAbstractListModel, QModelIndex, QObject, QPersistentModelIndex, QRect, QSize, Qt
from PySide6.QtGui import QPainter
from PySide6.QtWidgets import QListView, QStyle, QStyledItemDelegate, QStyleOptionViewItem, QWidget

from blendapp.desk.prices.asking import Choice
from blendapp.desk.table.roles import ACCESSIBLE_TEXT, DISPLAY
from blendapp.desk.theme import tokens
from blendapp.domain.wording import _

LINE_PX, MOST_LINES, NUMBERED = 28, 6, 9
AnyIndex = QModelIndex | QPersistentModelIndex


class ChoiceRows(QAbstractListModel):
    """Choices in a row. numbered: whether a figure before each takes it."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self.choices: list[Choice] = []
        self.numbered = True

    def show(self, choices: Sequence[Choice], numbered: bool = True) -> None:
        """Show these."""
        self.beginResetModel()
        self.choices, self.numbered = list(choices), numbered
        self.endResetModel()

    def number(self, row: int) -> str:
        """The figure that takes a choice, "" where none does."""
        return str(row + 1) if self.numbered and row < NUMBERED else ""

    def rowCount(self, parent: AnyIndex = QModelIndex()) -> int:  # noqa: B008 - Qt's own signature
        return 0 if parent.isValid() else len(self.choices)

    def data(self, index: AnyIndex, role: int = DISPLAY) -> Any:
        if not index.isValid():
            return None
        one = self.choices[index.row()]
        if role == DISPLAY:
            return one.words
        if role == ACCESSIBLE_TEXT:
            return " ".join(part for part in (self.number(index.row()), one.words, one.remark) if part)
        return None


class _Line(QStyledItemDelegate):
    def sizeHint(self, option: QStyleOptionViewItem, index: AnyIndex) -> QSize:
        return QSize(100, LINE_PX)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        model = index.model()
        assert isinstance(model, ChoiceRows)
        one, look = model.choices[index.row()], tokens()
        rect: QRect = option.rect
        if option.state & QStyle.StateFlag.State_Selected:
            painter.fillRect(rect, look.colour("chosen"))
        inside = rect.adjusted(8, 0, -8, 0)
        metrics = painter.fontMetrics()
        left, middle = Qt.AlignmentFlag.AlignLeft, Qt.AlignmentFlag.AlignVCenter
        painter.setPen(look.colour("quiet"))
        number = model.number(index.row())
        box = QRect(inside.left(), inside.top() + 5, 18, inside.height() - 10)
        if number:
            painter.drawRoundedRect(box.adjusted(0, 0, -1, -1), 3, 3)
            painter.drawText(box, Qt.AlignmentFlag.AlignCenter, number)
        painter.drawText(inside, Qt.AlignmentFlag.AlignRight | middle, one.remark)
        painter.setPen(look.colour("quiet" if one.is_aside else "text"))
        room = inside.adjusted(28 if model.numbered else 0, 0, -metrics.horizontalAdvance(one.remark) - 8, 0)
        shown = metrics.elidedText(one.words, Qt.TextElideMode.ElideRight, room.width())
        painter.drawText(room, left | middle, shown)


class ChoiceList(QListView):
    """Shows choices, at most so many lines high."""

    def __init__(self, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.rows = ChoiceRows(self)
        self.setModel(self.rows)
        self.setItemDelegate(_Line(self))
        self.setUniformItemSizes(True)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setEditTriggers(QListView.EditTrigger.NoEditTriggers)
        self.setAccessibleName(_("What may be answered"))

    def show_choices(self, choices: Sequence[Choice], numbered: bool = True) -> None:
        """Show choices, none of them marked: an answer is chosen, and never stands ready."""
        self.rows.show(choices, numbered)
        self.setFixedHeight(max(min(len(choices), MOST_LINES), 1) * LINE_PX + 2)
        self.setVisible(bool(choices))
        self.clearSelection()
        self.setCurrentIndex(QModelIndex())
        self.scrollToTop()

    def mark(self, row: int) -> None:
        """Mark a choice."""
        if self.rows.choices:
            index = self.rows.index(min(max(row, 0), len(self.rows.choices) - 1))
            self.setCurrentIndex(index)
            self.scrollTo(index)

    def step(self, by: int) -> None:
        """Mark the choice so many lines on; where none is marked, the first or the last."""
        here = self.currentIndex()
        self.mark(here.row() + by if here.isValid() else 0 if by > 0 else len(self.rows.choices) - 1)

    @property
    def marked(self) -> Choice | None:
        """The marked choice."""
        index = self.currentIndex()
        return self.rows.choices[index.row()] if index.isValid() else None
