"""The two margins of a source table: over its columns what each holds, beside its rows what became of each."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRect, QSize, Qt
from PySide6.QtGui import QColor, QFontMetrics, QPainter, QPen, QPolygonF
from PySide6.QtWidgets import QHeaderView

from blendapp.desk.theme import text_font, tokens
from blendapp.domain.list_rows import Fate
from blendapp.domain.wording import _

if TYPE_CHECKING:
    from blendapp.desk.prices.source_view import SourceTableView

PAD_PX, HEAD_PX, ROLE_PX = 6, 44, 22
MARK_PX = 16
_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
_RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
_ELIDE = Qt.TextElideMode.ElideRight


class RoleHead(QHeaderView):
    """Two lines a column: its role, and under it the letter of the column with what its heading says."""

    def __init__(self, view: SourceTableView) -> None:
        super().__init__(Qt.Orientation.Horizontal, view)
        self.view = view
        self.setSectionsClickable(True)
        self.setHighlightSections(False)
        self.setMinimumSectionSize(40)
        self.setFixedHeight(HEAD_PX)
        self.setAccessibleName(_("What the columns hold"))

    def sizeHint(self) -> QSize:
        return QSize(super().sizeHint().width(), HEAD_PX)

    def words(self, column: int) -> tuple[str, str]:
        """The role of a column, and the quiet words under it."""
        rows, row = self.view.rows, self.view.row_in_view
        found = rows.column_at(row, column)
        says = "" if found is None else found.says
        letters = str(rows.headerData(column, Qt.Orientation.Horizontal))
        if column in rows.sheet.hidden_columns:
            letters = _("{letters}, hidden").format(letters=letters)
        return rows.role_words(row, column), f"{letters}  {says}" if says else letters

    def paintSection(self, painter: QPainter, rect: QRect, section: int) -> None:
        look = tokens()
        role, under = self.words(section)
        read = self.view.rows.is_read(self.view.row_in_view, section)
        painter.fillRect(rect, look.colour("ground"))
        first = QRect(rect.left() + PAD_PX, rect.top() + 2, rect.width() - 2 * PAD_PX, ROLE_PX)
        second = first.translated(0, ROLE_PX - 3)
        for box, text, strong in ((first, role, read), (second, under, False)):
            font = text_font(strong=strong)
            painter.setFont(font)
            painter.setPen(look.colour("text" if strong else "quiet"))
            painter.drawText(box, _LEFT, QFontMetrics(font).elidedText(text, _ELIDE, box.width()))
        line = QRect(rect.left() + PAD_PX, rect.bottom() - 1, rect.width() - 2 * PAD_PX, 2)
        if read:
            painter.fillRect(line, look.colour("text"))
        if section == self.view.chosen_column:
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.setPen(QPen(look.colour("text"), 1))
            painter.drawRect(rect.adjusted(1, 1, -2, -3))


class FateGutter(QHeaderView):
    """The number of each row as the file counts it, and a mark for what became of it."""

    def __init__(self, view: SourceTableView) -> None:
        super().__init__(Qt.Orientation.Vertical, view)
        self.view = view
        self.setSectionResizeMode(QHeaderView.ResizeMode.Fixed)
        self.setHighlightSections(False)
        self.setMinimumSectionSize(8)
        self.setAccessibleName(_("What became of the rows"))

    def sizeHint(self) -> QSize:
        return QSize(self.room(), super().sizeHint().height())

    def room(self) -> int:
        """The width of the widest number, the mark, and a word where a row has one."""
        metrics = QFontMetrics(text_font())
        digits = metrics.horizontalAdvance(str(max(self.view.rows.rowCount(), 99)))
        words = (_("headings"), _("hidden")) if self.view.rows.sheet.hidden_rows else (_("headings"),)
        return digits + max(metrics.horizontalAdvance(one) for one in words) + MARK_PX + 3 * PAD_PX

    def word(self, row: int) -> str:
        """What is said of a row of the file beside its number."""
        rows = self.view.rows
        return _("headings") if rows.is_heading(row) else _("hidden") if rows.is_hidden(row) else ""

    def paintSection(self, painter: QPainter, rect: QRect, section: int) -> None:
        look, rows, row = tokens(), self.view.rows, section + 1
        painter.fillRect(rect, look.colour("ground"))
        heading = rows.is_heading(row)
        painter.setFont(text_font(strong=row == self.view.marked_row))
        painter.setPen(look.colour("text" if row == self.view.marked_row else "quiet"))
        digits = painter.fontMetrics().horizontalAdvance(str(max(rows.rowCount(), 99))) + 2
        number = QRect(rect.left() + 2, rect.top(), digits, rect.height())
        painter.drawText(number, _RIGHT, str(row))
        word = self.word(row)
        if word:
            painter.setFont(text_font(strong=heading, italic=not heading))
            painter.setPen(look.colour("text" if heading else "quiet"))
            box = QRect(number.right() + PAD_PX, rect.top(), rect.right() - number.right() - PAD_PX, rect.height())
            painter.drawText(box, _LEFT, word)
        if not heading:
            mark = QRect(rect.right() - MARK_PX - 2, rect.top(), MARK_PX, rect.height())
            draw_mark(painter, mark, rows.fates.get(row), look.colour("text"), look.colour("quiet"))
        painter.fillRect(QRect(rect.left(), rect.bottom(), rect.width(), 1), look.colour("hairline"))


def draw_mark(painter: QPainter, box: QRect, fate: Fate | None, ink: QColor, quiet: QColor) -> None:
    """A tick for taken, a question mark, a cross for refused, a dash for left alone; nothing for a blank row."""
    if fate is None:
        return
    painter.setFont(text_font(strong=True))
    if fate is Fate.ACCEPTED:
        painter.save()
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        painter.setPen(QPen(ink, 1.5))
        middle = box.center()
        points = [QPointF(middle.x() - 4, middle.y() + 0.5), QPointF(middle.x() - 1, middle.y() + 3.5),
                  QPointF(middle.x() + 4.5, middle.y() - 3.5)]
        painter.drawPolyline(QPolygonF(points))
        painter.restore()
        return
    painter.setPen(quiet if fate is Fate.IGNORED else ink)
    sign = {Fate.QUESTION: "?", Fate.REFUSED: "×", Fate.IGNORED: "–"}[fate]
    painter.drawText(box, Qt.AlignmentFlag.AlignCenter, sign)
