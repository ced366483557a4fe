"""The header: the formula, the way to anything, and what a tonne costs. It stays in every state of the window."""

from __future__ import annotations

from PySide6.QtCore import QRectF, QSize, Qt
from PySide6.QtGui import QPen, QResizeEvent
from PySide6.QtWidgets import (
    QHBoxLayout,
    QLabel,
    QPushButton,
    QSizePolicy,
    QStyle,
    QStyleOptionToolButton,
    QStylePainter,
    QToolButton,
    QVBoxLayout,
    QWidget,
)

from blendapp.desk.shell.glyphs import GlyphButton, draw_glyph
from blendapp.desk.theme import GAP_PX, MARGIN_PX, large_font, tokens
from blendapp.domain.wording import _

HEIGHT_PX = 60


class FormulaButton(QToolButton):
    """The formula's name, large; pressing it chooses another."""

    def __init__(self) -> None:
        super().__init__()
        self._name = ""
        self.setFont(large_font())
        self.setAccessibleName(_("Formula"))
        self.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Fixed)

    def say(self, name: str) -> None:
        """Show a formula's name."""
        self._name = name
        self.setText(name)
        self.setAccessibleName(_("Formula {name}").format(name=name) if name else _("Formula"))
        self.setToolTip(_("Choose another formula (Ctrl+L)"))
        self.updateGeometry()
        self.update()

    def sizeHint(self) -> QSize:
        width = self.fontMetrics().horizontalAdvance(self._name or " ")
        return QSize(min(width, 400) + 42, 40)

    def minimumSizeHint(self) -> QSize:
        return QSize(80, 40)

    def paintEvent(self, _event: object) -> None:
        option = QStyleOptionToolButton()
        self.initStyleOption(option)
        option.text = ""
        painter = QStylePainter(self)
        painter.drawComplexControl(QStyle.ComplexControl.CC_ToolButton, option)
        look = tokens()
        inner = self.rect().adjusted(8, 0, -28, 0)
        painter.setPen(look.colour("text"))
        shown = self.fontMetrics().elidedText(self._name, Qt.TextElideMode.ElideRight, inner.width())
        painter.drawText(inner, Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignLeft, shown)
        if self._name:
            used = min(self.fontMetrics().horizontalAdvance(shown), inner.width())
            box = QRectF(inner.left() + used + 5, 2, 18, self.height())
            draw_glyph(painter, "down", box, QPen(look.colour("quiet"), 1.5))


class StandingButton(QPushButton):
    """Whether the formula stands as approved; shortened where there is no room. Pressing it opens its versions."""

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("standing")
        self.whole = ""
        self.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        self.setEnabled(False)

    def say(self, text: str) -> None:
        """Show a standing; nothing to press without one."""
        self.whole = text
        self.setEnabled(bool(text))
        self.setAccessibleName(_("Versions: {standing}").format(standing=text))
        self._fit()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._fit()

    def _fit(self) -> None:
        shown = self.fontMetrics().elidedText(self.whole, Qt.TextElideMode.ElideRight, max(self.width() - 14, 0))
        if shown != self.text():
            self.setText(shown)
        text = _("{standing}. Versions, differences and approval")
        self.setToolTip(text.format(standing=self.whole) if self.whole else "")


class Cost(QWidget):
    """What a tonne, or a day, costs: large, with its two changes beside it."""

    def __init__(self) -> None:
        super().__init__()
        self.figure = QLabel("")
        self.figure.setFont(large_font())
        self.figure.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        self.since_last = QLabel("")
        self.since_approved = QLabel("")
        changes = QVBoxLayout()
        changes.setSpacing(1)
        changes.addStretch(1)
        for label in (self.since_last, self.since_approved):
            label.setObjectName("quiet")
            changes.addWidget(label)
        changes.addStretch(1)
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(GAP_PX * 2)
        row.addWidget(self.figure)
        row.addLayout(changes)

    def say(self, figure: str, since_last: str = "", since_approved: str = "", *, stale: bool = False) -> None:
        """Show a cost with its changes, already written out; stale is said in a word and in quiet ink."""
        self.figure.setText(figure)
        self.figure.setAccessibleName(_("Cost {cost}").format(cost=figure) if figure else _("No cost"))
        self.figure.setObjectName("quiet" if stale else "")
        self.figure.style().unpolish(self.figure)
        self.figure.style().polish(self.figure)
        self.since_last.setText(_("stale, working it out") if stale else since_last)
        self.since_last.setVisible(bool(self.since_last.text()))
        self.since_approved.setText(since_approved)
        self.since_approved.setVisible(bool(since_approved))


class Header(QWidget):
    """The top of the window. Its buttons do nothing until the bench connects them."""

    def __init__(self) -> None:
        super().__init__()
        self.setObjectName("header")
        self.setAttribute(Qt.WidgetAttribute.WA_StyledBackground)
        self.setFixedHeight(HEIGHT_PX)
        self.menu = GlyphButton("menu", _("Mill file, formula and paper"))
        self.formula = FormulaButton()
        self.state = StandingButton()
        self.undo = GlyphButton("undo", _("Nothing to undo"))
        self.redo = GlyphButton("redo", _("Nothing to redo"))
        self.finder = QToolButton()
        self.finder.setObjectName("quiet")
        self.finder.setText(_("Ctrl+K  find anything"))
        self.finder.setAccessibleName(_("Find any ingredient, nutrient, formula or command"))
        self.cost = Cost()
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX - GAP_PX, 0, MARGIN_PX, 0)
        row.setSpacing(GAP_PX)
        row.addWidget(self.menu)
        row.addWidget(self.formula)
        row.addSpacing(GAP_PX)
        row.addWidget(self.state, 1)
        row.addWidget(self.undo)
        row.addWidget(self.redo)
        row.addSpacing(GAP_PX)
        row.addWidget(self.finder)
        row.addSpacing(GAP_PX * 4)
        row.addWidget(self.cost)
        for button in (self.undo, self.redo):
            button.setEnabled(False)
