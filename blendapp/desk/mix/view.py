"""How the lines of the answer are painted and laid out."""

from __future__ import annotations

from PySide6.QtCore import QPointF, QRect, QRectF, Qt
from PySide6.QtGui import QFontMetrics, QPainter, QPen, QPolygonF, QResizeEvent
from PySide6.QtWidgets import QStyleOptionViewItem, QWidget

from blendapp.desk.mix.lines import Part
from blendapp.desk.mix.model import MixModel
from blendapp.desk.table.cell import PAD_PX, AnyIndex, CellDelegate
from blendapp.desk.table.look import Look
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import Tokens, text_font, tokens

LINE_PX = 28
WIDEST_PX = 960
WIDE_PX = 700
TIGHT_PX = 320
_WRAPPED = (Part.SENTENCE, Part.CAUTION, Part.ACTION)
_WRAP = int(Qt.TextFlag.TextWordWrap)
_TOP = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop)
_MIDDLE = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)


class MixDelegate(CellDelegate):
    """Paints a line by what part of the answer it is."""

    def __init__(self, table: MixTable) -> None:
        super().__init__(table, ruled=False)
        self.mix = table

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        super().paint(painter, option, index)
        line = self.mix.lines.line(index.row())
        if line.part is Part.TOTAL:
            rect = option.rect
            painter.fillRect(QRect(rect.left(), rect.top() + 5, rect.width(), 1), tokens().colour("hairline"))

    def line_rect(self, rect: QRect) -> QRect:
        return rect

    def paint_inside(self, painter: QPainter, rect: QRectF, look: Look, scheme: Tokens, index: AnyIndex) -> None:
        line = self.mix.lines.line(index.row())
        inside = rect.adjusted(PAD_PX, 0, -PAD_PX, 0)
        if line.part in (Part.TOTAL, Part.HEADING):
            rect = rect.adjusted(0, 8, 0, 0)
            inside = inside.adjusted(0, 8, 0, 0)
        if line.part is Part.HEADING:
            painter.setFont(text_font(strong=True))
            painter.setPen(scheme.colour("quiet" if self.mix.has_answer() else "text"))
            painter.drawText(inside, _MIDDLE, look.text)
        elif line.part is Part.FOLD and look.text:
            self._paint_fold(painter, inside, look, scheme, line.fold in self.mix.lines.opened)
        elif line.part is Part.SENTENCE:
            painter.setPen(scheme.colour("text"))
            painter.drawText(inside.adjusted(0, 5, 0, 0), _WRAP | _TOP, look.text)
        elif line.part is Part.CAUTION:
            painter.fillRect(QRectF(inside.left(), inside.top() + 7, 3, inside.height() - 12), scheme.colour("text"))
            painter.setPen(scheme.colour("text"))
            painter.drawText(inside.adjusted(12, 5, 0, 0), _WRAP | _TOP, look.text)
        elif line.part is Part.ACTION:
            self._paint_action(painter, inside, look, scheme)
        else:
            super().paint_inside(painter, rect, look, scheme, index)

    @staticmethod
    def _paint_fold(painter: QPainter, inside: QRectF, look: Look, scheme: Tokens, is_open: bool) -> None:
        x, y = inside.left() + 4, inside.center().y()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(scheme.colour("quiet"), 1.5))
        if is_open:
            painter.drawPolyline(QPolygonF([QPointF(x - 3, y - 2), QPointF(x + 1, y + 2), QPointF(x + 5, y - 2)]))
        else:
            painter.drawPolyline(QPolygonF([QPointF(x - 1, y - 4), QPointF(x + 3, y), QPointF(x - 1, y + 4)]))
        painter.setPen(scheme.colour("quiet"))
        painter.drawText(inside.adjusted(16, 0, 0, 0), _MIDDLE, look.text)

    @staticmethod
    def _paint_action(painter: QPainter, inside: QRectF, look: Look, scheme: Tokens) -> None:
        box = inside.adjusted(0.5, 4.5, -0.5, -3.5)
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(scheme.colour("quiet"), 1))
        painter.setBrush(scheme.colour("raised"))
        painter.drawRoundedRect(box, 4, 4)
        painter.setPen(scheme.colour("text"))
        painter.drawText(box.adjusted(10, 6, -10, -5), _WRAP | _MIDDLE, look.text)


class MixTable(DeskTable):
    """The lines of a MixModel, each as high as it needs."""

    def __init__(self, model: MixModel, parent: QWidget | None = None) -> None:
        self.lines = model
        super().__init__(model, parent, ruled=False)
        self.cells = MixDelegate(self)
        self.setItemDelegate(self.cells)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.verticalHeader().setDefaultSectionSize(LINE_PX)

    def has_answer(self) -> bool:
        """Whether what is shown is an answer."""
        return self.lines.work.result is not None and self.lines.work.result.has_answer

    def _take_widths(self) -> None:
        """The widths follow the width of the zone."""

    def lay(self) -> None:
        """Lay out columns, spans and heights for the lines shown now."""
        width = self.viewport().width()
        if (width > WIDE_PX) is not self.lines.wide:
            self.lines.wide = width > WIDE_PX
            self.lines.rebuild()
        if self.grid.columnCount() < 4:
            return
        amount, cost = (66, 78) if width > TIGHT_PX else (58, 66)
        further = [heading.width for heading in self.grid.headings[4:]]
        # In a wide zone the figures stay near their names.
        width = min(width, WIDEST_PX)
        rest = width - amount - cost - sum(further)
        bar = max(40, min(int(rest * 0.36), 420))
        for at, one in enumerate((max(rest - bar, 80), bar, amount, cost, *further)):
            self.setColumnWidth(at, one)
        metrics = QFontMetrics(text_font())
        self.clearSpans()
        for row, line in enumerate(self.lines.lines):
            if line.part in (Part.PAIR, Part.RAIL):
                self.setSpan(row, 1, 1, 3)
            elif line.part is Part.TOTAL:
                self.setSpan(row, 0, 1, 3)
            elif line.part is not Part.INGREDIENT:
                self.setSpan(row, 0, 1, self.grid.columnCount())
            height = self._height(line.part, line.text, width, metrics)
            if self.rowHeight(row) != height:
                self.setRowHeight(row, height)

    @staticmethod
    def _height(part: Part, text: str, width: int, metrics: QFontMetrics) -> int:
        if part in (Part.TOTAL, Part.HEADING):
            return LINE_PX + 12
        if part in _WRAPPED:
            inset = {Part.SENTENCE: 0, Part.CAUTION: 12, Part.ACTION: 20}[part]
            box = QRect(0, 0, max(width - 2 * PAD_PX - inset - 2, 40), 10000)
            return metrics.boundingRect(box, _WRAP, text).height() + (20 if part is Part.ACTION else 10)
        return LINE_PX

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self.lay()


