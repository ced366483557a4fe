"""The page of what is remembered of each source: answers are changed in their cells, and forgotten."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import QTimer, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QLineEdit, QPushButton, QVBoxLayout

from blendapp.desk.choice import Choice
from blendapp.desk.lists.model import MemoryRows
from blendapp.desk.shell.page import Page, labelled
from blendapp.desk.shell.zone import Elided
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.list_rows import Answer
from blendapp.domain.mills import Asked
from blendapp.domain.notation import notation
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _, plural
from blendapp.services.list_memory import forget, remember, set_usual_change
from blendapp.services.mill import Edit

SIDE_PX = 300


class MemoryPane(Page):
    """closed: back to the bench. said: a sentence with what can be listed below it."""

    said = Signal(str, list)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.rows = MemoryRows(work, self)
        self.table = DeskTable(self.rows, self)
        self.table.setAccessibleName(_("What is remembered"))
        self.filter = QLineEdit()
        self.filter.setPlaceholderText(_("Show only…"))
        self.filter.setAccessibleName(_("Show only answers that hold this text"))
        self.filter.setClearButtonEnabled(True)
        self.filter.textChanged.connect(self._narrow)
        self.remark = Elided()
        self.remark.setObjectName("quiet")
        self.forget = QPushButton(_("Forget the chosen answers"))
        self.forget.setToolTip(_("The next list of the source is asked again."))
        self.forget.setObjectName("plain")
        self.forget.clicked.connect(self._forget_chosen)
        head = QHBoxLayout()
        head.setSpacing(GAP_PX * 2)
        head.addWidget(self.filter, 1)
        head.addWidget(self.remark, 1)
        head.addWidget(self.forget)
        right = QVBoxLayout()
        right.setSpacing(GAP_PX)
        right.addLayout(head)
        right.addWidget(self.table, 1)
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX, 0)
        row.setSpacing(MARGIN_PX)
        row.addLayout(self._side())
        row.addLayout(right, 1)
        self.setFocusProxy(self.table)
        self.table.cleared.connect(lambda _cells: self._forget_chosen())
        work.edited.connect(self._edited)
        work.opened.connect(self._opened)
        work.reversed.connect(self.rows.forgive_all)

    def _side(self) -> QVBoxLayout:
        title = QLabel(_("What is remembered of lists"))
        title.setFont(text_font(strong=True))
        about = QLabel(_("What a list left open was asked once. Its answer holds for every later list of the same "
                         "source, until it is changed or forgotten here."))
        about.setObjectName("quiet")
        self.class_name = Choice()
        self.percent = QLineEdit()
        self.percent.setPlaceholderText("30")
        self.set_change = QPushButton(_("Ask above this change"))
        self.set_change.clicked.connect(self._set_change)
        self.source = QLineEdit()
        self.source.setPlaceholderText(_("name of the file, without its date"))
        self.name = QLineEdit()
        self.ingredient = Choice()
        self.keep = QPushButton(_("Remember this name"))
        self.keep.clicked.connect(self._keep_name)
        self.fault = QLabel()
        self.leave = QPushButton(_("Back to the bench"))
        self.leave.clicked.connect(self.closed)
        side = QVBoxLayout()
        side.setSpacing(GAP_PX + 2)
        for label in (title, about):
            side.addWidget(label)
        side.addWidget(_head(_("Usual change of a price")))
        side.addLayout(labelled([(_("Class"), self.class_name), (_("by %"), self.percent)]))
        side.addWidget(self.set_change)
        side.addWidget(_head(_("Another name of an ingredient")))
        side.addLayout(labelled([(_("In the lists of"), self.source), (_("Name there"), self.name),
                              (_("Ingredient"), self.ingredient)]))
        side.addWidget(self.keep)
        side.addWidget(self.fault)
        side.addWidget(self.leave)
        side.addStretch(1)
        for button in (self.set_change, self.keep, self.leave):
            button.setObjectName("plain")
        for widget in (title, about, self.fault, self.set_change, self.keep, self.leave):
            widget.setFixedWidth(SIDE_PX)
        for label in (title, about, self.fault):
            label.setWordWrap(True)
        self.fault.hide()
        self.percent.returnPressed.connect(self._set_change)
        self.name.returnPressed.connect(self._keep_name)
        return side

    # -- what is shown

    def begin(self, source: str = "") -> None:
        """Show everything that is remembered, or of one source."""
        self.fill()
        self.filter.setText(source)
        self._narrow(source)
        if self.rows.owners and not self.table.currentIndex().isValid():
            self.table.go_to(self.rows.owners[0], "answer")

    def fill(self) -> None:
        """Show what the mill holds now."""
        self.rows.rebuild()
        library = self.work.library
        names = sorted({one.class_name for one in library.ingredients if one.class_name}, key=str.casefold)
        _offer(self.class_name, [(_("all other ingredients"), ""), *((name, name) for name in names)])
        _offer(self.ingredient, [(one.name, one.id) for one in library.ingredients])
        count = len(self.rows.owners)
        self.remark.say(plural("{count} answer", "{count} answers", count).format(count=count))
        self.forget.setEnabled(count > 0 and self.work.is_open and self.work.mill.writable)

    def _narrow(self, text: str) -> None:
        self.rows.filter_text = text
        self.fill()

    def _edited(self, edit: Edit) -> None:
        if not self.isVisible() or not edit.touches("synonym", "ingredient", "supplier", "site", "nutrient", "mill"):
            return
        self.rows.forgive_owners({change.id for change in edit.changes if change.kind == "synonym"})
        if self.table.state() is DeskTable.State.EditingState:
            QTimer.singleShot(0, self, self._refill)
        else:
            self._refill()

    def _refill(self) -> None:
        """Show what is remembered now, with the keyboard on the row or the place where it was."""
        index = self.table.currentIndex()
        kept = (self.rows.owner(index), index.row(), index.column()) if index.isValid() else None
        self.fill()
        if kept is not None and self.rows.owners and not self.table.currentIndex().isValid():
            row = self.rows.owners.index(kept[0]) if kept[0] in self.rows.owners else kept[1]
            self.table.setCurrentIndex(self.rows.index(min(row, len(self.rows.owners) - 1), kept[2]))

    def _opened(self) -> None:
        self.filter.clear()
        self.fill()

    # -- changing

    def _try(self, job: Callable[[], object]) -> bool:
        try:
            job()
        except (Refused, ValueError) as fault:
            self.fault.setText(sentence_of(fault))
            self.fault.show()
            return False
        self.fault.hide()
        return True

    def _forget_chosen(self) -> None:
        chosen = {owner for owner, _key in self.table.selected_cells()}
        if chosen:
            self._try(lambda: self.work.do(lambda mill: forget(mill, chosen)))
            self.table.setFocus()

    def _set_change(self) -> None:
        def job() -> None:
            percent = notation().read(self.percent.text().strip().removesuffix("%"))
            self.work.do(lambda mill: set_usual_change(mill, self.class_name.currentData(), percent))

        if self._try(job):
            self.percent.clear()

    def _keep_name(self) -> None:
        def job() -> None:
            source, name, key = self.source.text().strip(), self.name.text().strip(), self.ingredient.currentData()
            if not source or not name or key is None:
                raise ValueError(_("Write whose lists they are and the name as it stands there, and choose what it "
                                   "means."))
            self.work.do(lambda mill: remember(mill, source, Answer(Asked.INGREDIENT, name, ingredient_id=key)))

        if self._try(job):
            self.name.clear()


def _head(words: str) -> QLabel:
    label = QLabel(words)
    label.setFont(text_font(strong=True))
    label.setContentsMargins(0, GAP_PX, 0, 0)
    return label


def _offer(box: Choice, items: list[tuple[str, object]]) -> None:
    """Offer these; what was chosen stays so."""
    kept = box.currentData()
    if [box.itemText(at) for at in range(box.count())] == [words for words, _data in items]:
        return
    box.clear()
    for words, data in items:
        box.addItem(words, data)
    box.setCurrentIndex(max(box.findData(kept), 0) if items else -1)
