"""The page of the lists that were applied: each opens with the rows as they were, and can be rolled back."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QVBoxLayout

from blendapp.desk.lists.model import AppliedRows, OpenedRows, fate_words
from blendapp.desk.shell.page import Page
from blendapp.desk.shell.zone import Elided
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import PriceList
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _, plural
from blendapp.services.lists import applied_lists, open_list, roll_back
from blendapp.services.mill import Edit


class AppliedPane(Page):
    """closed: back to the bench. said: a sentence with what can be listed below it. memory_wanted: what is remembered
    of a source is to be shown."""

    said = Signal(str, list)
    memory_wanted = Signal(str)

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        title = QLabel(_("Lists that were applied"))
        title.setFont(text_font(strong=True))
        self.remark = Elided()
        self.remark.setObjectName("quiet")
        self.memory = QPushButton(_("What is remembered of its source"))
        self.roll = QPushButton(_("Roll it back"))
        self.roll.setToolTip(_("Withdraws what this list brought, and nothing else; one undo takes that back."))
        self.leave = QPushButton(_("Back to the bench"))
        head = QHBoxLayout()
        head.setSpacing(GAP_PX * 2)
        head.addWidget(title)
        head.addWidget(self.remark, 1)
        for button in (self.memory, self.roll, self.leave):
            button.setObjectName("plain")
            head.addWidget(button)
        self.rows = AppliedRows(work, self)
        self.table = DeskTable(self.rows, self)
        self.table.setAccessibleName(title.text())
        self.heading = Elided()
        self.heading.setFont(text_font(strong=True))
        self.opened = OpenedRows(self)
        self.inside = DeskTable(self.opened, self)
        self.inside.setAccessibleName(_("Rows of the list"))
        column = QVBoxLayout(self)
        column.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX, 0)
        column.setSpacing(GAP_PX)
        column.addLayout(head)
        column.addWidget(self.table, 2)
        column.addWidget(self.heading)
        column.addWidget(self.inside, 3)
        self.setFocusProxy(self.table)
        self._shown: int | None = None
        self.leave.clicked.connect(self.closed)
        self.roll.clicked.connect(self._roll_back)
        self.memory.clicked.connect(self._remembered)
        self.table.selectionModel().currentRowChanged.connect(lambda _now, _before: self._open())
        self.table.asked.connect(lambda _index: self.inside.setFocus(Qt.FocusReason.TabFocusReason))
        work.edited.connect(self._edited)
        work.opened.connect(self._forget)

    def begin(self, list_id: int | None = None) -> None:
        """Show every list, with one of them opened: the latest unless it is named."""
        self.fill()
        owner = list_id if list_id in self.rows.owners else next(iter(self.rows.owners), None)
        if owner is not None:
            self.table.go_to(owner, "file_name")
        self._open()

    def fill(self) -> None:
        """Show what the mill holds now."""
        found = applied_lists(self.work.mill) if self.work.is_open else []
        self.rows.show(found)
        gone = sum(one.withdrawn is not None for one in found)
        text = plural("{count} list", "{count} lists", len(found)).format(count=len(found))
        if gone:
            text = _("{lists}, {count} of them rolled back").format(lists=text, count=gone)
        self.remark.say(text if found else _("no list was applied yet"))
        self._open()

    def chosen(self) -> PriceList | None:
        """The list under the keyboard."""
        index = self.table.currentIndex()
        return self.rows.list_of(self.rows.owner(index)) if index.isValid() else None

    def _open(self) -> None:
        one = self.chosen()
        self.roll.setEnabled(one is not None and one.withdrawn is None and self.work.mill.writable)
        self.memory.setEnabled(one is not None and bool(one.source))
        if one is None:
            self._shown = None
            self.heading.say("")
            self.opened.show([], "")
            return
        if one.id == self._shown:
            return
        self._shown = one.id
        try:
            rows = open_list(self.work.mill, one.id)
        except Refused as refusal:
            self.opened.show([], "")
            self.heading.say(sentence_of(refusal))
            return
        self.opened.show(rows, self.work.library.mill.currency)
        counts = [(fate, sum(row.fate is fate for row in rows)) for fate in Fate]
        words = ", ".join(f"{fate_words(fate)} {count}" for fate, count in counts if count)
        self.heading.say(_("{file}: {counts}").format(file=one.file_name, counts=words))

    def _roll_back(self) -> None:
        one = self.chosen()
        if one is None:
            return
        try:
            edit: Edit = self.work.do(lambda mill: roll_back(mill, one.id))
        except Refused as refusal:
            self.said.emit(sentence_of(refusal), [])
            return
        self.table.go_to(one.id, "stands")
        count = sum(change.after is None for change in edit.changes)
        text = plural("{file} is rolled back: {count} record that it brought is withdrawn; Ctrl+Z takes this back.",
                      "{file} is rolled back: {count} records that it brought are withdrawn; Ctrl+Z takes this back.",
                      count)
        self.said.emit(text.format(file=one.file_name, count=count), [str(odd) for odd in edit.oddities])

    def _remembered(self) -> None:
        one = self.chosen()
        if one is not None:
            self.memory_wanted.emit(one.source)

    def _edited(self, edit: Edit) -> None:
        if self.isVisible() and edit.touches("price_list", "supplier", "site"):
            kept = self.chosen()
            self.fill()
            if kept is not None and not self.table.currentIndex().isValid():
                index = self.rows.cell(kept.id, "file_name")
                self.table.setCurrentIndex(index if index.isValid() else self.rows.index(0, 0))

    def _forget(self) -> None:
        self._shown = None
        self.rows.show([])
        self.opened.show([], "")
