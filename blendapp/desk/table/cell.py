"""How a cell is painted and typed into."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QEvent, QModelIndex, QObject, QPersistentModelIndex, QRect, QRectF, QSize, Qt
from PySide6.QtGui import QFontMetricsF, QKeyEvent, QPainter, QPen
from PySide6.QtWidgets import QLineEdit, QStyle, QStyledItemDelegate, QStyleOptionViewItem, QWidget

from blendapp.desk.rail.paint import draw_rail
from blendapp.desk.table.look import Look
from blendapp.desk.table.names import NameField
from blendapp.desk.table.roles import EDIT
from blendapp.desk.theme import ROW_PX, Tokens, text_font

PAD_PX = 6
AnyIndex = QModelIndex | QPersistentModelIndex

_SELECTED = QStyle.StateFlag.State_Selected
_LEFT = Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter
_RIGHT = Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter
# The keys that end typing: a step to another row, or what Qt calls going to another column.
_LEAVING: dict[int, int | QStyledItemDelegate.EndEditHint] = {
    Qt.Key.Key_Return: 1, Qt.Key.Key_Enter: 1, Qt.Key.Key_Down: 1, Qt.Key.Key_Up: -1,
    Qt.Key.Key_Tab: QStyledItemDelegate.EndEditHint.EditNextItem,
    Qt.Key.Key_Backtab: QStyledItemDelegate.EndEditHint.EditPreviousItem,
}
# In a cell with names to choose from, these go through the names instead.
_THROUGH: dict[int, int] = {
    Qt.Key.Key_Down: 1, Qt.Key.Key_Up: -1, Qt.Key.Key_PageDown: 8, Qt.Key.Key_PageUp: -8,
}
_ELIDE = Qt.TextElideMode.ElideRight


@dataclass(frozen=True, slots=True)
class Here:
    """What all cells of one painting share: the cell under the keyboard (-1 without), whether selected cells are
    tinted, and the tokens. Asked once and not cell by cell."""

    row: int
    column: int
    selection: bool
    scheme: Tokens


class CellDelegate(QStyledItemDelegate):
    """Paints a Look and edits it as a line of text, or a choice. ruled: a hairline under each row.

    Its parent is a DeskTable, which it asks for the held end of a rail and whether the keyboard is here.
    """

    def __init__(self, parent: QWidget, *, ruled: bool = True) -> None:
        super().__init__(parent)
        self.table = parent
        self.ruled = ruled
        self._fonts = {
            (strong, italic): text_font(strong=strong, italic=italic)
            for strong in (False, True)
            for italic in (False, True)
        }
        metrics = QFontMetricsF(text_font())
        self._digit = metrics.horizontalAdvance("0")
        self._sign = metrics.horizontalAdvance(".")

    def sizeHint(self, option: QStyleOptionViewItem, index: AnyIndex) -> QSize:
        return QSize(80, ROW_PX)

    def paint(self, painter: QPainter, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        row, column = index.row(), index.column()
        look: Look = self.table.grid.look(row, column)  # type: ignore[attr-defined]
        here: Here = self.table.here  # type: ignore[attr-defined]
        scheme = here.scheme
        rect = option.rect
        if here.selection and option.state & _SELECTED:
            painter.fillRect(self.line_rect(rect), scheme.colour("chosen"))
        if self.ruled:
            painter.fillRect(QRect(rect.left(), rect.bottom(), rect.width(), 1), scheme.colour("hairline"))
        painter.save()
        self.paint_inside(painter, QRectF(self.line_rect(rect)), look, scheme, index)
        painter.restore()
        if look.fault:
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.setPen(QPen(scheme.colour("text"), 1, Qt.PenStyle.DashLine))
            painter.drawRect(rect.adjusted(1, 1, -2, -2))
        if row == here.row and column == here.column:
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.setPen(QPen(scheme.colour("text"), 1))
            painter.drawRect(self.line_rect(rect).adjusted(0, 0, -1, -1))

    def line_rect(self, rect: QRect) -> QRect:
        """The part of a cell in which its line stands; a taller row has more below."""
        return QRect(rect.left(), rect.top(), rect.width(), min(rect.height(), ROW_PX))

    def paint_inside(self, painter: QPainter, rect: QRectF, look: Look, scheme: Tokens, index: AnyIndex) -> None:
        """Paint what stands in the cell."""
        if look.rail is not None and look.axis is not None:
            held = self.table.held_end(index)  # type: ignore[attr-defined]
            draw_rail(painter, rect, look.rail, look.axis, scheme, held=held)
        elif look.bar is not None:
            self._paint_bar(painter, rect, look, scheme)
        else:
            self.paint_text(painter, rect.adjusted(PAD_PX, 0, -PAD_PX, 0), look, scheme)

    @staticmethod
    def _paint_bar(painter: QPainter, rect: QRectF, look: Look, scheme: Tokens) -> None:
        whole, left, middle = rect.width() - 2 * PAD_PX, rect.left() + PAD_PX, rect.center().y()
        painter.setOpacity(0.5 if look.stale else 1.0)
        length = max((look.bar or 0.0) * whole, 1.5)
        painter.fillRect(QRectF(left, middle - 4, length, 8), scheme.colour("band"))
        if look.bar_range is not None:
            low, high = (min(max(one, 0.0), 1.0) * whole for one in look.bar_range)
            painter.fillRect(QRectF(left + low, middle + 5.5, max(high - low, 1.5), 2), scheme.colour("quiet"))

    def paint_text(self, painter: QPainter, rect: QRectF, look: Look, scheme: Tokens) -> None:
        """Paint a text with its unit, or a number on its decimal sign."""
        if not look.text and not look.unit:
            return
        if look.stale:
            painter.setOpacity(0.5)
        painter.setFont(self._fonts[look.strong, look.italic])
        painter.setPen(scheme.colour("accent" if look.accent else "quiet" if look.quiet else "text"))
        metrics = painter.fontMetrics()
        if look.number:
            self._paint_number(painter, rect, look)
            return
        unit_width = QFontMetricsF(self._fonts[False, False]).horizontalAdvance(look.unit) + 6 if look.unit else 0.0
        # A long unit must not push the name out: the name has at least three fifths.
        room = max(rect.width() - unit_width, rect.width() * 0.6)
        shown = metrics.elidedText(look.text, _ELIDE, int(room) + 1)
        painter.drawText(rect, _LEFT, shown)
        if look.unit:
            rest = rect.adjusted(metrics.horizontalAdvance(shown) + 6, 0, 0, 0)
            painter.setFont(self._fonts[False, False])
            painter.setPen(scheme.colour("quiet"))
            unit = painter.fontMetrics().elidedText(look.unit, _ELIDE, int(rest.width()) + 1)
            painter.drawText(rest, _LEFT, unit)

    def _paint_number(self, painter: QPainter, rect: QRectF, look: Look) -> None:
        metrics = painter.fontMetrics()
        if look.lack:
            whole = "." not in look.text and "," not in look.text
            shift = look.lack * self._digit + (self._sign if whole else 0)
            spare = rect.width() - metrics.horizontalAdvance(look.text)
            rect = rect.adjusted(0, 0, -max(min(shift, spare), 0), 0)
        if metrics.horizontalAdvance(look.text) > rect.width() + 1:
            painter.drawText(rect, _LEFT, metrics.elidedText(look.text, _ELIDE, int(rect.width())))
        else:
            painter.drawText(rect, _RIGHT, look.text)

    # -- typing

    def createEditor(self, parent: QWidget, option: QStyleOptionViewItem, index: AnyIndex) -> QWidget:
        look: Look = index.model().look(index.row(), index.column())  # type: ignore[attr-defined]
        heading = str(index.model().headerData(index.column(), Qt.Orientation.Horizontal))
        field: QLineEdit
        if look.choices:
            field = names = NameField(look.choices, parent)
            names.chosen.connect(lambda: self._chosen(names))
        else:
            field = QLineEdit(parent)
        field.setObjectName("cell")
        field.setAccessibleName(heading)
        field.setAlignment(Qt.AlignmentFlag.AlignRight if look.number else Qt.AlignmentFlag.AlignLeft)
        return field

    def _chosen(self, names: NameField) -> None:
        self.commitData.emit(names)
        self.closeEditor.emit(names, QStyledItemDelegate.EndEditHint.NoHint)

    def setEditorData(self, editor: QWidget, index: AnyIndex) -> None:
        text = str(index.data(EDIT) or "")
        if isinstance(editor, NameField):
            editor.begin(text)
        elif isinstance(editor, QLineEdit):
            editor.setText(text)
            editor.selectAll()

    def setModelData(self, editor: QWidget, model: object, index: AnyIndex) -> None:
        assert isinstance(editor, QLineEdit)
        model.setData(index, editor.text(), EDIT)  # type: ignore[attr-defined]

    def updateEditorGeometry(self, editor: QWidget, option: QStyleOptionViewItem, index: AnyIndex) -> None:
        editor.setGeometry(self.line_rect(option.rect))

    def eventFilter(self, editor: QObject, event: QEvent) -> bool:
        # Enter goes one row down, as in a spreadsheet; Qt's own filter would only close the editor. From a text that
        # is refused no key goes on, or the next figure would land in the next record.
        key = event.key() if isinstance(event, QKeyEvent) and event.type() == QEvent.Type.KeyPress else None
        if isinstance(editor, NameField) and key in _THROUGH:
            editor.step(_THROUGH[key])
            return True
        if isinstance(event, QKeyEvent) and isinstance(editor, QLineEdit) and key in _LEAVING:
            if isinstance(editor, NameField):
                editor.pick()
            way = QStyledItemDelegate.EndEditHint
            step = _LEAVING[key]
            taken = self._commit(editor)
            if isinstance(step, int):
                self.closeEditor.emit(editor, way.NoHint)
                up = step < 0 or bool(event.modifiers() & Qt.KeyboardModifier.ShiftModifier)
                self.table.step_row((-1 if up else 1) if taken else 0)  # type: ignore[attr-defined]
            elif taken:
                self.closeEditor.emit(editor, step)
            else:
                self.closeEditor.emit(editor, way.NoHint)
                self.table.step_row(0)  # type: ignore[attr-defined]
            return True
        return super().eventFilter(editor, event)

    def _commit(self, editor: QLineEdit) -> bool:
        """Hand on what was typed; returns whether it was taken."""
        grid, index = self.table.grid, self.table.currentIndex()  # type: ignore[attr-defined]
        cell = (grid.owner(index), grid.key(index)) if index.isValid() else None
        self.commitData.emit(editor)
        return cell not in grid.refusals
