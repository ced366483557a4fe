"""The body of the first zone: find, column sets, the table, and what to do with a row."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from PySide6.QtCore import QModelIndex, QPoint, Qt, Signal
from PySide6.QtWidgets import QButtonGroup, QHBoxLayout, QLineEdit, QMenu, QPushButton, QTableView, QVBoxLayout, QWidget

from blendapp.desk.have.making import Making
from blendapp.desk.have.model import PRICES, HaveModel, column_sets
from blendapp.desk.have.reading import NUTRIENT, PRICE_KEYS
from blendapp.desk.rail.geometry import End
from blendapp.desk.shell.glyphs import GlyphButton
from blendapp.desk.shell.zone import INSET_PX, Zone
from blendapp.desk.table.frozen import FrozenTable
from blendapp.desk.theme import GAP_PX
from blendapp.desk.work import Work
from blendapp.domain.formulas import LimitKind
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote
from blendapp.domain.records import added, removed
from blendapp.domain.wording import _, plural
from blendapp.services import edits
from blendapp.services.mill import Edit

WIDE_PX = 800
# Cells of a price that are not typed into.
HISTORY_KEYS = ("holds", "since", "source")


class HavePane(QWidget):
    """The ingredients of the mill. column_asked: the menu of a nutrient's column is wanted, to be filled.
    history_asked: the prices of an ingredient over time are to be shown.
    """

    column_asked = Signal(int, QMenu)
    history_asked = Signal(int)

    def __init__(self, work: Work, zone: Zone) -> None:
        super().__init__()
        self.work = work
        self.zone = zone
        self.model = HaveModel(work, self)
        self._ended = 0
        self.table = FrozenTable(self.model, self)
        self.table.setAccessibleName(_("Ingredients"))
        self.making = Making(work, self.table)
        self.filter = QLineEdit()
        self.filter.setPlaceholderText(_("Show only…"))
        self.filter.setAccessibleName(_("Show only ingredients that hold this text"))
        self.filter.setClearButtonEnabled(True)
        self.filter.textChanged.connect(self._narrow)
        self.add = GlyphButton("add", _("Add an ingredient"))
        zone.tools.addWidget(self.add)
        row = QHBoxLayout()
        row.setContentsMargins(INSET_PX, 0, 0, 0)
        row.setSpacing(2)
        row.addWidget(self.filter, 1)
        row.addSpacing(GAP_PX)
        self.sets = QButtonGroup(self)
        self._buttons: dict[str, QPushButton] = {}
        for key, words in column_sets().items():
            button = QPushButton(words)
            button.setCheckable(True)
            button.setObjectName("set")
            button.clicked.connect(lambda _checked, key=key: self.show_set(key))
            self.sets.addButton(button)
            self._buttons[key] = button
            row.addWidget(button)
        self._buttons[self.model.column_set].setChecked(True)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(GAP_PX)
        column.addLayout(row)
        column.addWidget(self.table, 1)
        self.setFocusProxy(self.table)
        self._connect()

    def _connect(self) -> None:
        work, table = self.work, self.table
        work.opened.connect(self._opened)
        work.edited.connect(self._edited)
        work.reversed.connect(self.model.forgive_all)
        work.chosen.connect(self._chosen)
        work.day_came.connect(self._day_came)
        work.answered.connect(self._answered)
        table.resized.connect(self._fit_name)
        table.pasted.connect(self._paste)
        table.cleared.connect(self._clear)
        table.asked.connect(self._asked)
        table.grip.proposed.connect(self._propose)
        table.grip.given.connect(self._give)
        table.grip.taken_back.connect(self._take_back)
        for view in (table, table.names):
            view.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
            view.customContextMenuRequested.connect(partial(self._offer, view))
            view.horizontalHeader().setSectionsClickable(True)
            view.horizontalHeader().sectionClicked.connect(self._sort)
        head = table.horizontalHeader()
        head.setContextMenuPolicy(Qt.ContextMenuPolicy.CustomContextMenu)
        head.customContextMenuRequested.connect(self._offer_column)

    # -- what is shown

    def current(self) -> int | None:
        """The ingredient under the keyboard, or that was there last."""
        index = self.table.currentIndex()
        return self.model.owner(index) if index.isValid() else None

    def _asked(self, index: QModelIndex) -> None:
        """Enter on what is said of a price shows all of them."""
        if self.model.key(index) in HISTORY_KEYS:
            self.history_asked.emit(self.model.owner(index))

    def _opened(self) -> None:
        self.model.refusals.clear()
        self.model.take_decimals()
        self._ended = self.model.count_expired()
        self.model.rebuild()
        self._fit_name()
        self.table.go_to_top()

    def show_set(self, key: str) -> None:
        """Show another set of columns."""
        self.model.column_set = key
        self._buttons[key].setChecked(True)
        self.model.rebuild()
        self._fit_name()

    def _fit_name(self) -> None:
        """Let the name take what the first figures leave, so that a narrow zone shows them whole."""
        table, model = self.table, self.model
        if model.column_set == PRICES and model.columnCount() > 6:
            wide = table.viewport().width() > WIDE_PX
            if not table.has_own_width("holds"):
                table.setColumnWidth(2, 320 if wide else model.headings[2].width)
            shown = sum(table.columnWidth(at) for at in (1, 2, 3))
            if not table.has_own_width("name"):
                table.setColumnWidth(0, min(max(table.viewport().width() - shown, 110), 200))

    def _narrow(self, text: str) -> None:
        self.model.filter_text = text
        self.model.rebuild()

    def _sort(self, section: int) -> None:
        key = self.model.headings[section].key
        if self.model.sort_key != key:
            self.model.sort_key, self.model.sort_down = key, False
        elif not self.model.sort_down:
            self.model.sort_down = True
        else:
            self.model.sort_key = None
        self.model.rebuild()

    def _edited(self, edit: Edit) -> None:
        self.model.forgive_stored(edit)
        if edit.touches("quote", "ingredient", "mill"):
            self._ended = self.model.count_expired()
        if edit.touches("nutrient"):
            self.model.take_decimals()
        if edit.touches("ingredient", "nutrient", "mill", "scale", "formula", "supplier"):
            self._keep(self.model.rebuild)
        else:
            self.model.refresh()

    def _keep(self, rebuild: Callable[[], None]) -> None:
        """Rebuild with the keyboard on the same cell as before."""
        index = self.table.currentIndex()
        kept = (self.model.owner(index), self.model.key(index)) if index.isValid() else None
        rebuild()
        if kept is not None and not self.table.currentIndex().isValid():
            at = self.model.cell(*kept)
            if at.isValid():
                self.table.setCurrentIndex(at)

    def _chosen(self) -> None:
        self.model.refusals.clear()
        self._say()
        self.model.refresh()

    def _day_came(self) -> None:
        """Other prices may be in force, and ages are counted from another day."""
        self._ended = self.model.count_expired()
        self._keep(self.model.rebuild)
        self._say()

    def _answered(self) -> None:
        self._say()
        if not self.work.trying or self.work.result is not self.work.stored_result:
            self.model.refresh()

    def _say(self) -> None:
        count = len(self.work.library.ingredients)
        if self.work.formula is None:
            self.zone.remark.say(plural("{count} ingredient", "{count} ingredients", count).format(count=count))
        else:
            text = _("{admitted} admitted of {count}").format(admitted=len(self.work.admitted_ids), count=count)
            if self._ended:
                text = plural("{text}, {count} price expired", "{text}, {count} prices expired", self._ended).format(
                    text=text, count=self._ended)
            self.zone.remark.say(text)

    # -- blocks

    def _paste(self, cells: list[tuple[int, str, str]], outside: list[str]) -> None:
        blank = [cell for cell in cells if cell[1] in PRICE_KEYS and not cell[2].strip()]
        usable = [cell for cell in cells if self.model.can_write(cell[1]) and cell not in blank]
        skipped = [cell for cell in cells if not self.model.can_write(cell[1]) and cell[2].strip()]
        lines = [
            _("{ingredient}, {column}: the cell is blank, so the price is left as it is; Delete takes it away.").format(
                ingredient=self.work.library.ingredient(owner).name, column=self._column(key))
            for owner, key, _text in blank if self.model.has_price(owner)
        ]
        lines += _fallen([*outside, *(cell[2].strip() for cell in skipped)])
        self._write_block(usable, _("Paste"), lines, pasted=True)

    def _clear(self, cells: list[tuple[int, str]]) -> None:
        names = [cell for cell in cells if cell[1] == "name"]
        usable = [(owner, key, "") for owner, key in cells if key != "name" and self.model.can_write(key)]
        if usable:
            self._write_block(usable, _("Clear cells"), [])
        elif len(names) == 1:
            self.remove(names[0][0])

    def _write_block(
        self, cells: list[tuple[int, str, str]], what: str, left: list[str], *, pasted: bool = False
    ) -> None:
        """Take a block. left: lines about cells that are not even tried."""
        try:
            bad = self.model.write_block(cells, what, pasted=pasted)
        except Refused as refusal:
            self.work.said.emit(" ".join(problem.text for problem in refusal.problems), [])
            return
        for at, (owner, key, text) in enumerate(cells):
            if at in bad:
                self.model.refuse(owner, key, text, bad[at])
            else:
                self.model.forgive(owner, key)
        if bad or left:
            self._tell(cells, bad, left)

    def _column(self, key: str) -> str:
        return next(heading.words for heading in self.model.headings if heading.key == key)

    def _tell(self, cells: list[tuple[int, str, str]], bad: dict[int, str], left: list[str]) -> None:
        lines = [
            _("{ingredient}, {column}, “{text}”: {fault}").format(
                ingredient=self.work.library.ingredient(cells[at][0]).name, column=self._column(cells[at][1]),
                text=cells[at][2], fault=sentence,
            )
            for at, sentence in bad.items()
        ]
        count = len(cells) + len(left)
        words = plural("{taken} of {all} cell taken; what was not taken stands below.",
                       "{taken} of {all} cells taken; what was not taken stands below.", count)
        self.work.said.emit(words.format(taken=len(cells) - len(bad), all=count), lines + left)

    # -- a price by hand

    def _propose(self, owner: tuple[int, str], _end: End, value: float) -> None:
        self.model.try_price(owner[0], value)
        on = self.work.on
        trial = Quote(-1, owner[0], value, "t", valid_from=on, recorded=on)
        old = self.work.library.quote_in_force(owner[0], on)
        if old is not None:
            # A quote of the same day would win by its identifier; the trial must stand above it.
            trial = Quote(1 << 60, owner[0], value, "t", site_id=old.site_id, valid_from=max(on, old.valid_from or on),
                          recorded=on)
        self.work.try_changes([added(trial)])

    def _give(self, owner: tuple[int, str], _end: End, value: float) -> None:
        self.model.try_price(owner[0], None)
        try:
            self.work.do(lambda mill: edits.set_price_per_t(mill, owner[0], value, self.work.on))
        except (Refused, ValueError) as fault:
            self.work.end_trial()
            self.work.said.emit(str(fault), [])

    def _take_back(self, owner: tuple[int, str]) -> None:
        self.model.try_price(owner[0], None)
        self.work.end_trial()

    # -- rows

    def _offer(self, view: QTableView, point: QPoint) -> None:
        index = view.indexAt(point)
        if index.isValid():
            self.row_menu(self.model.owner(index)).popup(view.viewport().mapToGlobal(point))

    def _offer_column(self, point: QPoint) -> None:
        section = self.table.horizontalHeader().logicalIndexAt(point)
        if not 0 <= section < len(self.model.headings):
            return
        key = self.model.headings[section].key
        if key.startswith(NUTRIENT):
            menu = QMenu(self)
            menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
            self.column_asked.emit(int(key.removeprefix(NUTRIENT)), menu)
            menu.popup(self.table.horizontalHeader().mapToGlobal(point))

    def row_menu(self, owner: int) -> QMenu:
        """What can be done with an ingredient."""
        menu = QMenu(self)
        menu.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        name = self.work.library.ingredient(owner).name
        if self.work.formula_id is not None and owner not in self.work.admitted_ids:
            menu.addAction(_("Admit {name} to this formula").format(name=name), lambda: self.admit(owner))
        elif self.work.formula_id is not None and owner in self.work.library.listed_ids(self.work.formula_id):
            menu.addAction(_("Take {name} off this formula's list").format(name=name), lambda: self.unlist(owner))
        menu.addAction(_("Prices of {name} over time").format(name=name), lambda: self.history_asked.emit(owner))
        if self.making.maker(owner) is not None:
            menu.addAction(self.making.words(owner), lambda: self.making.take(owner))
        menu.addAction(_("Rename"), lambda: self.rename(owner))
        menu.addAction(_("Remove {name}").format(name=name), lambda: self.remove(owner))
        return menu

    def admit(self, owner: int) -> None:
        """Admit an ingredient to the chosen formula without bounds."""
        formula_id = self.work.formula_id
        if formula_id is not None:
            self._try(lambda: self.work.do(lambda mill: edits.admit(mill, formula_id, owner)))

    def unlist(self, owner: int) -> None:
        """Remove the inclusion limits that list an ingredient in the chosen formula, as one undo."""
        limits = [one for one in self.work.library.limits(self.work.formula_id or 0)
                  if one.kind is LimitKind.INGREDIENT and one.subject.ids == (owner,)]
        what = _("Take {name} off the list").format(name=self.work.library.ingredient(owner).name)
        self._try(lambda: self.work.apply(what, [removed(one) for one in limits]))

    def rename(self, owner: int) -> None:
        """Open the name of an ingredient for typing."""
        if self.table.go_to(owner, "name"):
            self.table.edit(self.table.currentIndex())

    def remove(self, owner: int) -> None:
        """Remove an ingredient; undo brings it back whole."""
        self._try(lambda: self.work.do(lambda mill: edits.remove_ingredient(mill, owner)))

    def add_ingredient(self) -> None:
        """Add an ingredient under a free name and open the name for typing."""
        name = edits.free_name(self.work.library, "ingredient", _("New ingredient"))
        self.filter.clear()
        edit = self._try(lambda: self.work.do(lambda mill: edits.add_ingredient(mill, name)))
        if isinstance(edit, Edit) and edit.changes:
            self.rename(edit.changes[0].id)

    def _try(self, job: Callable[[], object]) -> object:
        try:
            return job()
        except (Refused, ValueError) as fault:
            self.work.said.emit(str(fault), [])
            return None


def _fallen(texts: list[str]) -> list[str]:
    return [_("“{text}” fell where nothing is typed in.").format(text=text) for text in texts]
