"""The table of what was understood: under each line, over its whole width, the sentence about it."""

from __future__ import annotations

import math

from PySide6.QtCore import QRect, QRectF, Qt, QTimer
from PySide6.QtGui import QFontMetrics, QPainter, QPaintEvent
from PySide6.QtWidgets import QWidget

from blendapp.desk.prices.understood import UnderstoodRows
from blendapp.desk.table.cell import PAD_PX
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import ROW_PX, text_font, tokens

_WRAP = int(Qt.TextFlag.TextWordWrap) | int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop)
_INSET_PX, _MOST_MEASURED = 118, 500
# Columns that give way where there is no room, the first first.
_GIVE_WAY = ("percent", "sampled", "sample")
_LEAST_PX, _MOST_PX, _FURTHER_PX = 110, 360, 25


class UnderstoodTable(DeskTable):
    """A DeskTable of UnderstoodRows."""

    def __init__(self, model: UnderstoodRows, parent: QWidget | None = None) -> None:
        super().__init__(model, parent, ruled=False)
        self.understood = model
        # Nothing is typed here, so Tab goes on to the next part of the page.
        self.setTabKeyNavigation(False)
        # After every view of the model was reset; heights are of no use before.
        self._soon = QTimer(self, singleShot=True, interval=0)
        self._soon.timeout.connect(self.lay)
        self.resized.connect(self._soon.start)
        model.modelReset.connect(self._soon.start)

    def lay(self) -> None:
        """Share the width out, and give each line the height that its sentence needs."""
        model = self.understood
        width = self.viewport().width()
        widths = {heading.key: heading.width for heading in model.headings if heading.key != model.stretch}
        spare = width - sum(widths.values())
        for key in _GIVE_WAY:
            column = model.column_of(key)
            if column is not None:
                hidden = spare < _LEAST_PX + 30
                self.setColumnHidden(column, hidden)
                spare += widths[key] if hidden else 0
        column = model.column_of(model.stretch)
        if column is not None and not self.has_own_width(model.stretch):
            self.setColumnWidth(column, min(max(spare, _LEAST_PX), _MOST_PX))
        metrics = QFontMetrics(text_font())
        room, line = max(width - _INSET_PX - PAD_PX, 100), metrics.height()
        # In a long list the letters are counted; measuring each sentence would hold the window up.
        exact, letter = model.rowCount() <= _MOST_MEASURED, metrics.averageCharWidth() * 0.95
        head = self.verticalHeader()
        head.blockSignals(True)
        for row, owner in enumerate(model.owners):
            text = model.detail_of(owner)
            height = ROW_PX if model.begins_row(owner) else _FURTHER_PX
            if text:
                if not exact:
                    tall = line * math.ceil(len(text) * letter / room)
                elif metrics.horizontalAdvance(text) < room:
                    tall = line
                else:
                    tall = metrics.boundingRect(QRect(0, 0, room, 10000), _WRAP, text).height()
                height += tall + 2
            if head.sectionSize(row) != height:
                head.resizeSection(row, height)
        head.blockSignals(False)
        self.updateGeometries()
        self.viewport().update()

    def paintEvent(self, event: QPaintEvent) -> None:
        super().paintEvent(event)
        painter, look, model = QPainter(self.viewport()), tokens(), self.understood
        painter.setFont(text_font())
        width, height = self.viewport().width(), self.viewport().height()
        first = max(self.rowAt(0), 0)
        for row in range(first, model.rowCount()):
            top, tall = self.rowViewportPosition(row), self.rowHeight(row)
            if top > height:
                break
            text = model.detail_of(model.owners[row])
            if text and tall > ROW_PX:
                painter.setPen(look.colour("quiet"))
                box = QRectF(_INSET_PX, top + ROW_PX - 5, width - _INSET_PX - PAD_PX, tall - ROW_PX + 6)
                painter.drawText(box, _WRAP, text)
            if model.begins_row(model.owners[row] + 1):
                painter.fillRect(QRectF(0, top + tall - 1, width, 1), look.colour("hairline"))
