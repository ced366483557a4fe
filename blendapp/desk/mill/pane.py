"""The page of the mill: what it has as a list on the left, one section at a time beside it, stored as it is typed."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QStackedWidget, QVBoxLayout, QWidget

from blendapp.desk.finder.search import Found
from blendapp.desk.mill.adding import adder
from blendapp.desk.mill.facts import MillFacts
from blendapp.desk.mill.model import SHOWN, RecordTable
from blendapp.desk.mill.people import PasswordForm, PeopleTable
from blendapp.desk.mill.sections import SectionList
from blendapp.desk.mill.steps import StepRows, StepTable
from blendapp.desk.shell.glyphs import GlyphButton
from blendapp.desk.shell.page import Page
from blendapp.desk.table.grid import sentence_of
from blendapp.desk.table.view import DeskTable
from blendapp.desk.theme import GAP_PX, MARGIN_PX, text_font
from blendapp.desk.work import Work
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _
from blendapp.services import edits, mixing, plant
from blendapp.services.mill import Edit, Mill

PASSWORDS_PX = 420


class MillPane(Page):
    """closed: back to the bench. said: a sentence with what can be listed below it. wanted: the page is to be shown.

    tables: by what they show, "meter", "general step" and "own step" beside the kinds of records.
    """

    said = Signal(str, list)
    wanted = Signal()

    def __init__(self, work: Work) -> None:
        super().__init__()
        self.work = work
        self.facts = MillFacts(work)
        self.passwords = PasswordForm(work)
        self.tables: dict[str, DeskTable] = {}
        self._section_of: dict[str, str] = {}
        self._pages: dict[str, QWidget] = {}
        self._beginners: dict[str, QWidget] = {"facts": self.facts}
        self.sections = SectionList([
            ("facts", _("The mill")), ("sites", _("Sites")), ("scales", _("Scales and meters")),
            ("mixers", _("Mixers")), ("bins", _("Bins")), ("lots", _("Lots")), ("steps", _("Mixing steps")),
            ("suppliers", _("Suppliers")), ("nutrients", _("Nutrients")), ("persons", _("Persons")),
        ])
        self.sections.setAccessibleName(_("What the mill has"))
        self.stack = QStackedWidget()
        self._make_pages()
        self._lay()
        self.setFocusProxy(self.sections)
        self.sections.currentRowChanged.connect(self.stack.setCurrentIndex)
        self.sections.entered_section.connect(self.go_in)
        work.opened.connect(self.fill)
        work.chosen.connect(self.fill)
        work.edited.connect(self._edited)
        for kind in self.tables:
            work.reversed.connect(self.model(kind).forgive_all)

    # -- the pages

    def _make_pages(self) -> None:
        self._page("facts", _("The mill"), "", []).addWidget(self.facts, 1)
        self._page("sites", _("Sites"), _(
            "A mill in one place needs none. Scales, mixers, bins and prices of a site count where the mill works."),
            [("site", _("Add a site"), "", 1)])
        self._page("scales", _("Scales"), _("In one load a scale weighs whole steps, from least to greatest."), [
            ("scale", _("Add a scale"), "", 3), ("meter", _("Add a liquid meter"), _("Liquid meters"), 2)])
        self._page("mixers", _("Mixers"), _("An order becomes equal batches that a mixer can fill and hold."),
                   [("mixer", _("Add a mixer"), "", 1)])
        self._page("bins", _("Bins"), _(
            "Type the name of an ingredient to say what stands in a bin; it may stand in several."),
            [("bin", _("Add a bin"), "", 1)])
        self._page("lots", _("Lots"), _("One delivery each; a bin that holds it prints it on the sheet."),
                   [("lot", _("Add a lot"), "", 1)])
        self._steps_page()
        self._page("suppliers", _("Suppliers"), _("From whom ingredients are bought, and whose price lists come."),
                   [("supplier", _("Add a supplier"), "", 1)])
        self._page("nutrients", _("Nutrients"), "", [("nutrient", _("Add a nutrient"), "", 1)])
        persons = self._page("persons", _("Persons"), _("Who prepares and approves; a person stays on record."),
                             [("person", _("Add a person"), "", 3)])
        self.passwords.setFixedWidth(PASSWORDS_PX)
        persons.addWidget(self.passwords)
        persons.addStretch(1)

    def _page(
        self, key: str, title: str, hint: str, tables: list[tuple[str, str, str, int]]
    ) -> QVBoxLayout:
        """A page with tables: what each shows, the words of its button, a title of its own and its stretch."""
        page = QWidget()
        page.setAccessibleName(title)
        column = QVBoxLayout(page)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(GAP_PX)
        for place, (kind, words, own_title, stretch) in enumerate(tables):
            add = GlyphButton("add", _("{what} (Insert)").format(what=words))
            add.clicked.connect(partial(self.add, kind))
            column.addLayout(_head(own_title or title, hint if place == 0 else "", add))
            model = PeopleTable(self.work, self) if kind == "person" else RecordTable(self.work, SHOWN[kind], self)
            table = DeskTable(model, self)
            table.setAccessibleName(own_title or title)
            self._take_table(kind, key, table)
            column.addWidget(table, stretch)
        if not tables:
            column.addLayout(_head(title, hint))
        self._pages[key] = page
        self.stack.addWidget(page)
        return column

    def _steps_page(self) -> None:
        page = QWidget()
        page.setAccessibleName(_("Mixing steps"))
        column = QVBoxLayout(page)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(GAP_PX)
        self.own_title = QLabel()
        self.copy_steps = QPushButton(_("Begin with the steps of every formula"))
        self.copy_steps.setObjectName("plain")
        self.copy_steps.clicked.connect(self._copy_steps)
        for kind, title, own in (
            ("general step", QLabel(_("Steps of every formula without its own")), False),
            ("own step", self.own_title, True),
        ):
            model = StepRows(self.work, self, own=own)
            table = StepTable(model, self)
            table.setAccessibleName(_("Steps of this formula") if own else title.text())
            table.moved.connect(self._move_step)
            words = _("Add a step to this formula") if own else _("Add a step to every formula")
            add = GlyphButton("add", _("{what} (Insert)").format(what=words))
            add.clicked.connect(partial(self.add, kind))
            up, down = GlyphButton("up", _("Move the step up (Alt+Up)")), GlyphButton(
                "down", _("Move the step down (Alt+Down)"))
            up.clicked.connect(partial(self._move_current, kind, -1))
            down.clicked.connect(partial(self._move_current, kind, 1))
            head = _head(title, "", add, up, down)
            if own:
                head.insertWidget(head.count() - 1, self.copy_steps)
            column.addLayout(head)
            column.addWidget(table, 1)
            self._take_table(kind, "steps", table)
        self._pages["steps"] = page
        self.stack.addWidget(page)

    def _take_table(self, kind: str, section: str, table: DeskTable) -> None:
        table.cleared.connect(partial(self._clear, kind))
        table.pasted.connect(partial(self._paste, kind))
        table.resized.connect(partial(self._fit, table))
        table.grid.modelReset.connect(partial(self._fit, table))
        self.tables[kind] = table
        self._section_of[kind] = section
        self._beginners.setdefault(section, table)

    def _lay(self) -> None:
        self.leave = QPushButton(_("Back to the bench"))
        self.leave.setObjectName("plain")
        self.leave.setFixedWidth(self.sections.width())
        self.leave.clicked.connect(self.closed)
        side = QVBoxLayout()
        side.setSpacing(GAP_PX)
        side.addWidget(self.sections, 1)
        side.addWidget(self.leave)
        side.addSpacing(GAP_PX)
        row = QHBoxLayout(self)
        row.setContentsMargins(MARGIN_PX, GAP_PX * 2, MARGIN_PX, 0)
        row.setSpacing(MARGIN_PX)
        row.addLayout(side)
        row.addWidget(self.stack, 1)

    def found(self) -> list[Found]:
        """Every record of the plant, as things to find."""
        kinds = {
            "site": _("site"), "scale": _("scale"), "meter": _("liquid meter"), "mixer": _("mixer"), "bin": _("bin"),
            "lot": _("lot"), "supplier": _("supplier"),
        }
        library = self.work.library
        return [
            Found(library.records[self._kind(table)][owner].name, words, partial(self._go_to, table, owner))
            for table, words in kinds.items() for owner in self.model(table).owners
        ]

    def _go_to(self, table: str, owner: int) -> None:
        self.wanted.emit()
        self.sections.choose(self._section_of[table])
        self.tables[table].go_to(owner, "name")

    def show_section(self, key: str) -> None:
        """Show a section and put the keyboard into it."""
        self.sections.choose(key)
        self.go_in()

    def go_in(self) -> None:
        """Put the keyboard into the section that is shown."""
        self._beginners[self.sections.keys[self.sections.currentRow()]].setFocus(Qt.FocusReason.TabFocusReason)

    # -- what is shown

    def model(self, kind: str) -> RecordTable | PeopleTable:
        """The model of one of the tables."""
        model = self.tables[kind].grid
        assert isinstance(model, RecordTable | PeopleTable)
        return model

    def _kind(self, table: str) -> str:
        return "person" if table == "person" else str(getattr(self.model(table), "kind", table))

    def _edited(self, edit: Edit) -> None:
        for table in self.tables:
            kind = self._kind(table)
            self.model(table).forgive_owners({change.id for change in edit.changes if change.kind == kind})
        if edit.touches("mill", "ingredient", "formula", *map(self._kind, self.tables)) or not edit.changes:
            self.fill()

    def fill(self) -> None:
        """Show what is stored."""
        for table in self.tables.values():
            self._keep(table)
        library, formula = self.work.library, self.work.formula
        if self.work.is_open:
            self.passwords.fill()
        self.facts.fill()
        for key, kind in (("sites", "site"), ("scales", "scale"), ("mixers", "mixer"), ("bins", "bin"),
                          ("lots", "lot"), ("steps", "mixing_step"), ("suppliers", "supplier"),
                          ("nutrients", "nutrient"), ("persons", "person")):
            self.sections.say_count(key, len(library.records[kind]) or None)
        own = formula is not None and not self.model("own step").owners
        self.own_title.setText("" if formula is None else _("Steps of {formula}").format(formula=formula.name))
        self.copy_steps.setVisible(own and bool(self.model("general step").owners))

    @staticmethod
    def _fit(table: DeskTable) -> None:
        """Let a column of free text have what the others leave."""
        grid = table.grid
        spare = table.viewport().width() - sum(heading.width for heading in grid.headings)
        for key in ("text", "note"):
            at = grid.column_of(key)
            if at is not None and not table.has_own_width(key):
                table.setColumnWidth(at, grid.headings[at].width + max(spare, 0))

    def _keep(self, table: DeskTable) -> None:
        """Rebuild a table with the keyboard on the same cell as before."""
        model, index = table.grid, table.currentIndex()
        assert isinstance(model, RecordTable | PeopleTable)
        kept = (model.owner(index), model.key(index)) if index.isValid() else None
        model.rebuild()
        at = model.cell(*kept) if kept is not None else None
        if at is not None and at.isValid() and at != table.currentIndex():
            table.setCurrentIndex(at)

    # -- changing

    def add(self, table: str) -> None:
        """Add a record under a free name and open the name for typing."""
        self.sections.choose(self._section_of[table])
        edit = self._try(adder(self.work, table, self._kind(table), self._after(table)))
        if edit is not None and edit.changes:
            self._type_into(table, edit, "text" if "step" in table else "name")

    def _add_here(self) -> None:
        """Add to the table that has the keyboard, else to the first of the section."""
        tables = [key for key in self.tables if self.tables[key].isVisible()]
        here = next((key for key in tables if self.tables[key].has_keyboard()), next(iter(tables), None))
        if here is not None:
            self.add(here)

    def _after(self, table: str) -> int | None:
        """The position of a new row: after the one under the keyboard, None is at the end."""
        index = self.tables[table].currentIndex()
        return index.row() + 2 if index.isValid() else None

    def _type_into(self, table: str, edit: Edit, key: str) -> None:
        kind = self._kind(table)
        new = next(change.id for change in edit.changes if change.kind == kind and change.before is None)
        if self.tables[table].go_to(new, key):
            self.tables[table].edit(self.tables[table].currentIndex())

    def _clear(self, table: str, cells: list[tuple[int, str]]) -> None:
        """Delete on a name, or on a step's number or text, removes the record; on another cell it empties it."""
        naming = ("name", "position", "text")
        if table == "person":
            cells = [(owner, key) for owner, key in cells if key == "capacity"]
            if not cells:
                self.said.emit(_("A person stays on record; write no under Active instead."), [])
                return
        elif len(cells) == 1 and cells[0][1] in naming:
            owner = cells[0][0]
            if "step" in table:
                self._try(lambda mill: mixing.remove_step(mill, owner))
            elif table == "nutrient":
                self._try(lambda mill: edits.remove_nutrient(mill, owner))
            else:
                self._try(lambda mill: plant.remove(mill, self._kind(table), owner))
            return
        self._paste(table, [(owner, key, "") for owner, key in cells if key not in naming], [], _("Clear cells"))

    def _paste(
        self, table: str, cells: list[tuple[int, str, str]], outside: list[str], what: str = ""
    ) -> None:
        what = what or _("Paste")
        model = self.model(table)
        if isinstance(model, PeopleTable):
            for owner, key, text in cells:
                index = model.cell(owner, key)
                if model.look(index.row(), index.column()).editable:
                    model.setData(index, text)
        elif cells:
            outside = outside + [text for _owner, key, text in cells if key == "position" and text.strip()]
            cells = [cell for cell in cells if cell[1] != "position"]
            try:
                model.write_block(cells, what)
            except (Refused, ValueError) as fault:
                self.said.emit(sentence_of(fault), [])
        if outside:
            self.said.emit(_("These cells fell where nothing is typed in:"), outside)

    # -- steps

    def _move_current(self, table: str, by: int) -> None:
        index = self.tables[table].currentIndex()
        if index.isValid():
            self._move_step(self.model(table).owner(index), by)

    def _move_step(self, step_id: int, by: int) -> None:
        self._try(lambda mill: mixing.move_step(mill, step_id, by))

    def _copy_steps(self) -> None:
        formula_id = self.work.formula_id
        if formula_id is not None:
            self._try(lambda mill: mixing.own_copy(mill, formula_id))
            self.tables["own step"].setFocus(Qt.FocusReason.TabFocusReason)

    def _try(self, job: Callable[[Mill], Edit]) -> Edit | None:
        try:
            return self.work.do(job)
        except (Refused, ValueError) as fault:
            self.said.emit(sentence_of(fault), [])
            return None

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Insert:
            self._add_here()
        else:
            super().keyPressEvent(event)


def _head(title: str | QLabel, hint: str, *buttons: QWidget) -> QHBoxLayout:
    """The line over a table: its title, its buttons, and what it is for."""
    label = title if isinstance(title, QLabel) else QLabel(title)
    label.setFont(text_font(strong=True))
    head = QHBoxLayout()
    head.setSpacing(GAP_PX)
    head.addWidget(label)
    for button in buttons:
        head.addWidget(button)
    if hint:
        quiet = QLabel(hint)
        quiet.setObjectName("quiet")
        quiet.setWordWrap(True)
        head.addSpacing(GAP_PX)
        head.addWidget(quiet, 1)
    else:
        head.addStretch(1)
    return head
