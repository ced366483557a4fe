"""A page that takes the place of the bench, with what pages share: the way back, a column at the side, named fields."""

from __future__ import annotations

from collections.abc import Iterable

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QFormLayout, QLabel, QScrollArea, QVBoxLayout, QWidget

from blendapp.desk.theme import GAP_PX


class Page(QWidget):
    """closed: back to where the person came from; Escape asks for it."""

    closed = Signal()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.closed.emit()
        else:
            super().keyPressEvent(event)


def side_column(above: Iterable[QWidget], width_px: int, below: Iterable[QWidget] = ()) -> QScrollArea:
    """Widgets under each other in a column of fixed width that scrolls; `below` at its foot."""
    inside = QWidget()
    side = QVBoxLayout(inside)
    side.setContentsMargins(0, 0, GAP_PX, GAP_PX)
    side.setSpacing(GAP_PX + 4)
    for widget in above:
        side.addWidget(widget)
    side.addStretch(1)
    for widget in below:
        side.addWidget(widget)
    scroll = QScrollArea()
    scroll.setWidget(inside)
    scroll.setWidgetResizable(True)
    scroll.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
    scroll.setFixedWidth(width_px)
    return scroll


def labelled(rows: Iterable[tuple[str, QWidget]] = ()) -> QFormLayout:
    """Fields under each other, each with its words before it."""
    form = QFormLayout()
    form.setSpacing(GAP_PX)
    form.setLabelAlignment(Qt.AlignmentFlag.AlignLeft)
    for words, field in rows:
        add_labelled(form, words, field)
    return form


def add_labelled(form: QFormLayout, words: str, field: QWidget) -> QLabel:
    """Add a field with its words, which also name it to a screen reader; returns their label."""
    label = QLabel(words)
    label.setObjectName("quiet")
    label.setBuddy(field)
    field.setAccessibleName(words)
    form.addRow(label, field)
    return label
