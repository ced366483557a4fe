"""The list of what a mill has, at the left of its page: arrows choose a section, Enter goes into it."""

from __future__ import annotations

from collections.abc import Sequence

from PySide6.QtCore import QModelIndex, QRect, QSize, Qt, Signal
from PySide6.QtGui import QKeyEvent, QPainter, QPen
from PySide6.QtWidgets import (
    QListWidget,
    QListWidgetItem,
    QStyle,
    QStyledItemDelegate,
    QStyleOptionViewItem,
    QWidget,
)

from blendapp.desk.shell.zone import INSET_PX
from blendapp.desk.table.roles import ACCESSIBLE_TEXT
from blendapp.desk.theme import ROW_PX, text_font, tokens

WIDTH_PX = 190
_COUNT = int(Qt.ItemDataRole.UserRole) + 1


class _Line(QStyledItemDelegate):
    def sizeHint(self, option: QStyleOptionViewItem, index: object) -> QSize:
        return QSize(100, ROW_PX)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: QModelIndex) -> None:  # type: ignore[override]
        look, rect = tokens(), QRect(option.rect)
        chosen = bool(option.state & QStyle.StateFlag.State_Selected)
        painter.save()
        if chosen:
            painter.fillRect(rect, look.colour("chosen"))
        if chosen and option.state & QStyle.StateFlag.State_HasFocus:
            painter.setPen(QPen(look.colour("text"), 1))
            painter.drawRect(rect.adjusted(0, 0, -1, -1))
        inside = rect.adjusted(INSET_PX, 0, -INSET_PX, 0)
        painter.setFont(text_font(strong=chosen))
        painter.setPen(look.colour("text"))
        painter.drawText(inside, Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter, str(index.data()))
        painter.setFont(text_font())
        painter.setPen(look.colour("quiet"))
        painter.drawText(inside, Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter, index.data(_COUNT) or "")
        painter.restore()


class SectionList(QListWidget):
    """entered: the person wants to go into the section that is chosen."""

    entered_section = Signal()

    def __init__(self, sections: Sequence[tuple[str, str]], parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.keys = [key for key, _words in sections]
        for _key, words in sections:
            self.addItem(QListWidgetItem(words))
        self.setItemDelegate(_Line(self))
        self.setFixedWidth(WIDTH_PX)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setCurrentRow(0)
        self.itemActivated.connect(lambda _item: self.entered_section.emit())

    def say_count(self, key: str, count: int | None) -> None:
        """Say beside a section how many it holds."""
        item = self.item(self.keys.index(key))
        text = "" if count is None else str(count)
        if item.data(_COUNT) != text:
            item.setData(_COUNT, text)
            item.setData(ACCESSIBLE_TEXT, f"{item.text()} {text}".strip())

    def choose(self, key: str) -> None:
        """Show a section."""
        self.setCurrentRow(self.keys.index(key))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter, Qt.Key.Key_Right):
            self.entered_section.emit()
        else:
            super().keyPressEvent(event)
