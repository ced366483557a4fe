"""Whose list it is, and for which site: said in words, and changed in place."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QPushButton, QWidget

from blendapp.desk.finder.ask import Ask
from blendapp.desk.finder.panel import Finder
from blendapp.desk.finder.search import Found
from blendapp.desk.prices.proposed import proposed_supplier
from blendapp.desk.theme import GAP_PX
from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer, ListReading, source_of
from blendapp.domain.mills import Asked
from blendapp.domain.wording import _, plural


class Whose(QWidget):
    """source_said: whom the list is from. answered: an Answer about supplier or site. memory_wanted: the person wants
    to see what is remembered for a source."""

    source_said = Signal(str)
    memory_wanted = Signal(str)
    answered = Signal(object)

    def __init__(self, finder: Finder, ask: Ask) -> None:
        super().__init__()
        self.finder, self.ask = finder, ask
        self.library = Library()
        self.source_name = self._proposal = ""
        self.source, self.supplier = QPushButton(_("Whose list it is")), QPushButton(_("Supplier"))
        self.site, self.memory = QPushButton(_("Site")), QPushButton(_("Answers remembered"))
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(GAP_PX)
        self.proposed = QPushButton(_("Supplier that the list names"))
        self.proposed.setToolTip(_("As the list names it; nothing is said of its supplier until you take this"))
        self.proposed.clicked.connect(self.take_proposed)
        self.proposed.hide()
        for button in (self.source, self.supplier, self.proposed, self.site, self.memory):
            button.setObjectName("order")
            row.addWidget(button)
        self.source.setToolTip(_("Whom answers are remembered for; press to say another"))
        self.source.clicked.connect(self._ask_source)
        self.memory.setToolTip(_("See, change and forget what is remembered of this source"))
        self.memory.clicked.connect(lambda: self.memory_wanted.emit(self.source_name))
        self.supplier.clicked.connect(partial(self._offer, Asked.SUPPLIER, "supplier"))
        self.site.clicked.connect(partial(self._offer, Asked.SITE, "site"))

    def show_reading(self, reading: ListReading, library: Library) -> None:
        """Say what a reading knows; supplier and site only where the mill has any."""
        self.library, self.source_name = library, reading.source
        self.source.setText(_("list of: {source}").format(source=reading.source))
        count = sum(source_of(one.source) == source_of(reading.source) for one in library.all("synonym"))
        self.memory.setText(plural("{count} answer remembered", "{count} answers remembered", count)
                            .format(count=count))
        self.memory.setVisible(count > 0)
        for button, kind, words, key in (
            (self.supplier, "supplier", _("supplier: {name}"), reading.supplier_id),
            (self.site, "site", _("for site: {name}"), reading.site_id),
        ):
            record = None if key is None else library.records[kind].get(key)
            button.setText(words.format(name=_("none said") if record is None else record.name))
            button.setVisible(bool(library.records[kind]))
        self._proposal = proposed_supplier(reading, library)
        self.proposed.setText(_("{name}? F6 takes it").format(name=self._proposal))
        self.proposed.setVisible(bool(self._proposal))

    def take_proposed(self) -> None:
        """Say that the list is of the supplier that it names."""
        if self._proposal and self.isVisible():
            name, self._proposal = self._proposal, ""
            self.answered.emit(Answer(Asked.SUPPLIER, "", name))

    def _ask_source(self) -> None:
        known = sorted({one.source for one in self.library.all("price_list")} |
                       {one.source for one in self.library.all("synonym")} - {"", self.source_name})
        hint = _("Answers are remembered for this name, whatever the file is called.")
        if known:
            hint += " " + _("Known already: {names}.").format(names=", ".join(one for one in known if one))
        self.ask.open(_("Whose list is it?"), self.source_name, _("Read it again"), self._say_source, hint)

    def _say_source(self, text: str) -> None:
        if not text.strip():
            raise ValueError(_("Give the list a name, or leave the one that the file has."))
        self.source_said.emit(text.strip())

    def _offer(self, asked: Asked, kind: str, _checked: bool = False) -> None:
        prompt = _("Whose list is it?") if asked is Asked.SUPPLIER else _("For which site is it?")
        things = [Found(one.name, _(kind), self._saying(asked, one.name)) for one in self.library.all(kind)]
        things.append(Found(_("none said"), _(kind), self._saying(asked, "")))
        self.finder.open(things, prompt, self.supplier if asked is Asked.SUPPLIER else self.site)

    def _saying(self, asked: Asked, name: str) -> Callable[[], object]:
        return lambda: self.answered.emit(Answer(asked, "", name))
