"""The form beside the history: whom the ingredient is bought from, and a price to be added."""

from __future__ import annotations

import datetime
from dataclasses import dataclass

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QLabel, QLineEdit, QPushButton, QVBoxLayout, QWidget

from blendapp.desk.choice import Choice
from blendapp.desk.have.reading import read_price
from blendapp.desk.history.model import read_day
from blendapp.desk.shell.page import labelled
from blendapp.desk.theme import GAP_PX, text_font
from blendapp.domain.fields import field_of
from blendapp.domain.library import Library
from blendapp.domain.price_history import day_words
from blendapp.domain.quotes import QuoteKind, Terms
from blendapp.domain.wording import _

NEW = -1


@dataclass(frozen=True)
class Given:
    """What was typed. price: money per `per`."""

    price: float
    per: str
    entered: str
    supplier: str
    site: str
    valid_from: datetime.date | None
    valid_to: datetime.date | None
    terms: Terms | None
    kind: QuoteKind


class Suppliers(QWidget):
    """The suppliers as a choice, with a line for the name of a new one. chosen: another one was chosen or named."""

    chosen = Signal()

    def __init__(self, words: str) -> None:
        super().__init__()
        self.box = Choice()
        self.box.setAccessibleName(words)
        self.name = QLineEdit()
        self.name.setPlaceholderText(_("name of the new supplier"))
        self.name.setAccessibleName(_("Name of the new supplier"))
        self.name.hide()
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(4)
        column.addWidget(self.box)
        column.addWidget(self.name)
        self.setFocusProxy(self.box)
        self.box.activated.connect(self._activated)
        self.name.returnPressed.connect(self.chosen)

    def fill(self, library: Library) -> None:
        """Offer the mill's suppliers; what is chosen stays chosen."""
        kept = self.box.currentData()
        self.box.clear()
        self.box.addItem(_("nobody in particular"), None)
        for one in sorted(library.all("supplier"), key=lambda one: one.name.casefold()):
            self.box.addItem(one.name, one.id)
        self.box.addItem(_("a new supplier…"), NEW)
        self.choose(kept)

    def choose(self, supplier_id: int | None) -> None:
        """Show one as chosen."""
        self.box.setCurrentIndex(max(self.box.findData(supplier_id), 0))
        self.name.setVisible(self.box.currentData() == NEW)

    def _activated(self, _at: int) -> None:
        new = self.box.currentData() == NEW
        self.name.setVisible(new)
        if new:
            self.name.setFocus()
        else:
            self.chosen.emit()

    def given(self) -> str:
        """The name of the chosen supplier, "" for none. Raises ValueError for a new one without a name."""
        if self.box.currentData() is None:
            return ""
        if self.box.currentData() == NEW:
            if not self.name.text().strip():
                raise ValueError(_("Write the name of the new supplier."))
            return self.name.text()
        return self.box.currentText()


class PriceForm(QWidget):
    """add: the price is to be recorded. bought_from: another supplier was chosen to buy from."""

    add = Signal()
    bought_from = Signal()

    def __init__(self) -> None:
        super().__init__()
        self.buy = Suppliers(_("Bought from"))
        self.price = QLineEdit()
        self.price.setPlaceholderText(_("for example 212, or 18.2 / cwt"))
        self.supplier = Suppliers(field_of("quote", "supplier_id").label)
        self.site = Choice()
        self.first = QLineEdit()
        self.last = QLineEdit()
        self.last.setPlaceholderText(_("open"))
        self.terms = Choice()
        self.terms.addItem("", None)
        for term in Terms:
            self.terms.addItem(_(term.value), term)
        self.kind = Choice()
        for kind in QuoteKind:
            self.kind.addItem(_(kind.value), kind)
        self.fault = QLabel()
        self.fault.setWordWrap(True)
        self.fault.hide()
        self.take = QPushButton(_("Add this price"))
        self.take.setObjectName("plain")
        self.take.clicked.connect(self.add)
        head = QLabel(_("Another price"))
        head.setFont(text_font(strong=True))
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(GAP_PX)
        column.addLayout(labelled([(_("Bought from"), self.buy)]))
        column.addSpacing(GAP_PX)
        column.addWidget(head)
        rows: list[tuple[str, QWidget]] = [(_("Price"), self.price)]
        rows += [(field_of("quote", key).label, field) for key, field in (
            ("supplier_id", self.supplier), ("site_id", self.site), ("valid_from", self.first),
            ("valid_to", self.last), ("terms", self.terms), ("kind", self.kind))]
        column.addLayout(labelled(rows))
        column.addWidget(self.take)
        column.addWidget(self.fault)
        self.buy.chosen.connect(self.bought_from)

    def fill(self, library: Library, supplier_id: int | None, on: datetime.date) -> None:
        """Offer what the mill knows. supplier_id: whom the ingredient is bought from."""
        self.buy.fill(library)
        self.buy.choose(supplier_id)
        self.supplier.fill(library)
        kept = self.site.currentData()
        self.site.clear()
        self.site.addItem(_("whole mill"), None)
        for one in library.all("site"):
            self.site.addItem(one.name, one.id)
        self.site.setCurrentIndex(max(self.site.findData(kept), 0))
        if not self.first.text().strip():
            self.first.setText(day_words(on))

    def clear(self, on: datetime.date) -> None:
        """Nothing typed."""
        self.price.clear()
        self.first.setText(day_words(on))
        self.last.clear()
        self.say("")

    def given(self, on: datetime.date) -> Given:
        """What was typed. Raises ValueError with the sentence."""
        text = self.price.text().strip()
        if not text:
            raise ValueError(_("Write the price, with what it is per unless it is per tonne: 212, or 18.2 / cwt."))
        price, per = read_price(text)
        site = "" if self.site.currentData() is None else self.site.currentText()
        return Given(
            price, per or "t", text, self.supplier.given(), site, read_day(self.first.text(), on),
            read_day(self.last.text(), on), self.terms.currentData(), self.kind.currentData(),
        )

    def say(self, sentence: str) -> None:
        """Say what stands against it, or nothing."""
        self.fault.setText(sentence)
        self.fault.setVisible(bool(sentence))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        typing = isinstance(self.focusWidget(), QLineEdit) and self.focusWidget() is not self.buy.name
        if event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and typing:
            self.add.emit()
        else:
            super().keyPressEvent(event)
