"""The bench: fills the frame with its three zones and joins them to the work. Made once the slow rooms are there."""

from __future__ import annotations

import sys
from functools import partial
from pathlib import Path
from types import TracebackType

from PySide6.QtCore import QObject, QSettings, QTimer
from PySide6.QtWidgets import QMenu, QWidget

from blendapp.desk.arrivals import Arrivals
from blendapp.desk.commands import Command, Commands
from blendapp.desk.day import DayWatch
from blendapp.desk.files import Files
from blendapp.desk.finder.ask import Ask
from blendapp.desk.finder.panel import Finder
from blendapp.desk.finder.search import Found
from blendapp.desk.formulas import Records
from blendapp.desk.have.pane import HavePane
from blendapp.desk.have.reading import NUTRIENT
from blendapp.desk.head import Head
from blendapp.desk.history.pane import HistoryPane
from blendapp.desk.listing import command_list
from blendapp.desk.lists.applied import AppliedPane
from blendapp.desk.lists.memory import MemoryPane
from blendapp.desk.meet.pane import MeetPane
from blendapp.desk.mill.pane import MillPane
from blendapp.desk.mix.pane import MixPane
from blendapp.desk.prices.effect import EffectPane
from blendapp.desk.prices.pane import ListPane
from blendapp.desk.sheet.pane import SheetPane
from blendapp.desk.sheet.printed import PrintedPane
from blendapp.desk.shell.frame import Frame
from blendapp.desk.strip import Strip
from blendapp.desk.versions.pane import VersionsPane
from blendapp.desk.welcome import Welcome
from blendapp.desk.work import Work
from blendapp.domain.formulas import LimitKind
from blendapp.domain.library import Library
from blendapp.domain.mills import ListAbout
from blendapp.domain.wording import _
from blendapp.services.approved import outside_their_limits
from blendapp.services.versions import altered


class Bench(QObject):
    """One window's work. frame: what was painted first; settings: where recent files are remembered."""

    def __init__(self, frame: Frame, settings: QSettings | None = None) -> None:
        super().__init__(frame)
        self.frame = frame
        self.work = Work(self)
        self.settings = settings or QSettings("blendapp", "blendapp")
        self.strip = Strip()
        frame.put_strip(self.strip)
        self.files = Files(self.work, frame, self.settings)
        self.finder = Finder(frame)
        self.ask = Ask(frame)
        self.records = Records(self.work, self.ask)
        self.have = HavePane(self.work, frame.have)
        self.meet = MeetPane(self.work, frame.meet)
        self.mix = MixPane(self.work, frame.mix)
        for zone, pane in zip(frame.zones, (self.have, self.meet, self.mix), strict=True):
            zone.put(pane)
        self.head = Head(self.work, frame)
        self.welcome = Welcome(self.files)
        self.prices = ListPane(self.work, self.finder, self.ask)
        self.arrivals = Arrivals(frame, self.prices, self.files, self.strip, self.settings, self.show_page)
        self.head.page_undo, self.head.page_redo = self.arrivals.undo_words, self.arrivals.redo_words
        self.effect = EffectPane(self.work)
        self.sheet = SheetPane(self.work)
        self.printed = PrintedPane(self.work, self.sheet.printing)
        self.mill = MillPane(self.work)
        self.versions = VersionsPane(self.work)
        self.history = HistoryPane(self.work)
        for page in (
            self.welcome, self.prices, self.effect, self.sheet, self.printed, self.mill, self.versions, self.history,
        ):
            frame.middle.addWidget(page)
        self.commands = Commands(frame, command_list(self), self._before_command)
        self._effect_taken = True
        self.menu = QMenu(frame)
        self.recent_menu = QMenu(_("Opened last"), self.menu)
        self._connect()
        self._add_list_pages()
        self.day = DayWatch(self.work)

    def _connect(self) -> None:
        header = self.frame.header
        header.undo.clicked.connect(self.undo)
        header.redo.clicked.connect(self.redo)
        header.finder.clicked.connect(self.find_anything)
        header.formula.clicked.connect(self.choose_formula)
        header.menu.clicked.connect(self.open_menu)
        header.state.clicked.connect(self.show_versions)
        self.versions.people_wanted.connect(self.show_people)
        self.mill.wanted.connect(self.show_mill)
        self.have.add.clicked.connect(self.have.add_ingredient)
        self.have.column_asked.connect(self._offer_column)
        self.have.history_asked.connect(self.show_history)
        self.prices.changed.connect(self.head.say_undo)
        self.mix.limit_wanted.connect(lambda name: self.meet.adding.begin(LimitKind.INGREDIENT, name))
        # What is said of an edit is said after it, so that the edit takes away only what was said before.
        self.work.edited.connect(lambda _edit: self.strip.clear())
        self.work.chosen.connect(self.strip.clear)
        self.sheet.form.order.textEdited.connect(self.strip.clear)
        self.sheet.form.paper.activated.connect(self.strip.clear)
        self.sheet.printed_wanted.connect(self.show_printed)
        self.sheet.scale_wanted.connect(self.to_scale_of)
        self.printed.sheet_wanted.connect(self.show_sheet)
        self.strip.resized.connect(self.frame.place_strip)
        self.frame.middle.currentChanged.connect(
            lambda _at: self.frame.float_strip(self.frame.middle.currentWidget() in (self.sheet, self.printed)))
        self.work.said.connect(self.strip.say)
        self.files.said.connect(self.strip.say)
        self.work.opened.connect(self._opened)
        for page in (self.prices, self.sheet, self.printed, self.mill, self.versions, self.history):
            page.closed.connect(self.strip.clear)
            page.closed.connect(self.to_bench)
            page.said.connect(self.strip.say)
        self.prices.effect_wanted.connect(self.show_effect)
        self.effect.closed.connect(self._leave_effect)
        self.effect.said.connect(self.strip.say)
        self.effect.chosen.connect(self._show_formula)
        self.effect.table_wanted.connect(lambda: self.files.write_table(
            _("Write what the prices do"), _("price effect") + ".xlsx", self.effect.write_table))
        self.frame.closing.connect(self.close)

    def _add_list_pages(self) -> None:
        """The pages of the lists that were applied, and of what is remembered of lists."""
        self.applied, self.memory = AppliedPane(self.work), MemoryPane(self.work)
        for page in (self.applied, self.memory):
            self.frame.middle.addWidget(page)
            page.closed.connect(self.strip.clear)
            page.closed.connect(self.to_bench)
            page.said.connect(self.strip.say)
        self.history.list_wanted.connect(self.show_applied)
        self.applied.memory_wanted.connect(self.show_memory)
        self.prices.parts.whose.memory_wanted.connect(self.show_memory)
        self.prices.parts.whose.memory_wanted.connect(self.arrivals.leave_for_memory)
        self.memory.closed.connect(self.arrivals.return_from_memory)

    # -- beginning and ending

    def start(self, path: str | None) -> None:
        """Open a mill file; without one, the last one that was open, else say that there is none."""
        recent = self.files.recent()
        if path is not None:
            self.files.open_path(Path(path))
        elif recent:
            self.files.open_path(recent[0])
        if not self.work.is_open:
            self.to_bench()
            self.head.say_all()
            self.welcome.buttons[0].setFocus()
        else:
            self.have.table.setFocus()

    def close(self) -> None:
        """Let the mill file go; what is being typed is taken first, if it can be."""
        typing = self.frame.focusWidget()
        if typing is not None:
            # An editor that outlived its mill would write into nothing.
            typing.clearFocus()
        self.finder.hide()
        self.effect.stop_all()
        self.prices.reader.forget()
        self.work.close()

    def tell_of_fault(self, kind: type[BaseException], fault: BaseException, trace: TracebackType | None) -> None:
        """Say on the strip that the program has failed in something, and leave the trace on standard error."""
        sys.__excepthook__(kind, fault, trace)
        text = _("The program failed in what it was just doing ({fault}). What was stored before is safe.")
        self.strip.say(text.format(fault=f"{kind.__name__}: {fault}"))

    def _opened(self) -> None:
        self.strip.clear()
        self.to_bench()
        if self.work.is_open:
            # After the answer is in view, and behind whatever else there is to say of the file.
            QTimer.singleShot(0, self, self._say_approved)

    def _say_approved(self) -> None:
        """Say which approved versions may not be fed as they stand, and which other hands have changed."""
        if not self.work.is_open:
            return
        outside = outside_their_limits(self.work.mill, self.work.on)
        listed = altered(self.work.mill)
        for one in outside:
            name = _("{formula}, version {number}").format(formula=one.formula, number=one.version)
            listed += [f"{name}: {sentence}" for sentence in one.sentences]
        if not listed:
            return
        before = [self.strip.words.text(), *self.strip.list.text().splitlines()] if self.strip.isVisible() else []
        self.strip.say(_("What was approved does not stand as it was:"), [*listed, *(one for one in before if one)])

    # -- pages

    def to_bench(self) -> None:
        """Show the three zones, or the welcome without a mill."""
        self.frame.middle.setCurrentWidget(self.frame.bench if self.work.is_open else self.welcome)
        if self.work.is_open and self.frame.isVisible():
            self.have.table.setFocus()

    def _before_command(self, command: Command) -> None:
        """What was said leaves with the next thing that is done; looking about is not yet doing."""
        if command.group != "view" and command.key not in ("find", "filter"):
            self.strip.clear()

    def show_page(self, page: QWidget) -> None:
        """Show a page in place of the three zones; header and caution stay."""
        self.strip.clear()
        self.frame.middle.setCurrentWidget(page)
        page.setFocus()

    def undo(self) -> None:
        """Take the last answer for the list in view back, else the last edit."""
        if not (self.arrivals.undo_words() and self.prices.take_back()):
            self.work.undo()

    def redo(self) -> None:
        """Take the last undo back."""
        if not (self.arrivals.redo_words() and self.prices.give_again()):
            self.work.redo()

    def bring_in_prices(self, path: Path | None = None) -> None:
        """Read a price list and show what would become of each row."""
        self.arrivals.choose(ListAbout.PRICES, path)

    def bring_in_analyses(self, path: Path | None = None) -> None:
        """Read a list of analyses and show what would become of each row."""
        self.arrivals.choose(ListAbout.COMPOSITION, path)

    def show_effect(self, before: Library, after: Library, taken: bool) -> None:
        """Show what prices do to every formula, or would do if they were taken."""
        self._effect_taken = taken
        title = _("What the new prices do") if taken else _("What these prices would do")
        self.effect.begin(before, after, title, _("Back to the bench") if taken else _("Back to the list"))
        self.show_page(self.effect)

    def back_to_effect(self) -> None:
        """Show once more what the last prices did."""
        if self.effect.has_any:
            self.show_page(self.effect)

    def _leave_effect(self) -> None:
        if self._effect_taken:
            self.to_bench()
        else:
            self.show_page(self.prices)

    def _show_formula(self, formula_id: int) -> None:
        if formula_id in self.work.library.records["formula"]:
            self.work.choose(formula_id)
            self.to_bench()

    def show_history(self, ingredient_id: int | None = None) -> None:
        """Show the prices of an ingredient over time; None is the one under the keyboard in the first zone."""
        chosen = self.have.current() if ingredient_id is None else ingredient_id
        if chosen is not None:
            self.show_page(self.history)
            self.history.begin(chosen)

    def show_applied(self, list_id: int | None = None) -> None:
        """Show the lists that were applied, with one of them opened."""
        self.show_page(self.applied)
        self.applied.begin(list_id)

    def show_memory(self, source: str = "") -> None:
        """Show what is remembered of lists, or of the lists of one source."""
        self.show_page(self.memory)
        self.memory.begin(source)

    def show_mill(self, section: str = "") -> None:
        """Show the mill's own page, at one of its sections if one is named."""
        self.mill.fill()
        self.show_page(self.mill)
        if section:
            self.mill.show_section(section)

    def show_people(self) -> None:
        """Show where the mill's persons are kept."""
        self.show_mill("persons")

    def show_versions(self) -> None:
        """Show the versions of the chosen formula."""
        if self.work.formula_id is not None:
            self.show_page(self.versions)
            self.versions.begin()

    def show_sheet(self) -> None:
        """Show the batch sheet of the chosen formula as it would be printed."""
        if self.work.formula_id is not None:
            # Shown first, so that the page is drawn at the size it has room for.
            self.show_page(self.sheet)
            self.sheet.begin_anew()

    def show_batch_page(self, view: str) -> None:
        """Show the lines or one of the pages of a batch of the chosen formula."""
        if self.frame.middle.currentWidget() is not self.sheet:
            self.show_sheet()
        self.sheet.view.turn(view)

    def batch_or_print(self) -> None:
        """Show the batch of the chosen formula; print the page that is looked at where it is shown already."""
        if self.frame.middle.currentWidget() is self.sheet:
            self.sheet.to_printer()
        else:
            self.show_sheet()

    def show_printed(self, record_id: int | None = None) -> None:
        """Show the batch sheets that were printed, at one of them if it is named."""
        self.show_page(self.printed)
        self.printed.begin(record_id)

    def widen(self, place: int) -> None:
        """Give a zone the whole window, or give it back, and put the keyboard there."""
        self.to_bench()
        self.frame.widen(None if self.frame.wide == place else place)
        self.go_to_zone(place)

    def go_to_zone(self, place: int) -> None:
        """Put the keyboard into a zone."""
        self.frame.middle.setCurrentWidget(self.frame.bench)
        if self.frame.wide is not None and self.frame.wide != place:
            self.frame.widen(place)
        (self.have, self.meet, self.mix)[place].table.setFocus()

    # -- finding

    def open_menu(self) -> None:
        """Open the menu under its button."""
        self._fill_recent()
        self.commands.fill(self.menu, {"open": self.recent_menu})
        button = self.frame.header.menu
        self.menu.popup(button.mapToGlobal(button.rect().bottomLeft()))

    def _fill_recent(self) -> None:
        self.recent_menu.clear()
        for path in self.files.recent():
            self.recent_menu.addAction(path.stem, partial(self.files.open_path, path)).setToolTip(str(path))
        self.recent_menu.setEnabled(bool(self.files.recent()))

    def choose_formula(self) -> None:
        """Offer the formulas under the formula's name."""
        if self.work.is_open:
            things = [*self.records.formulas(), *(thing for thing in self.commands.found() if "ormula" in thing.words)]
            self.finder.open(things, _("Formula"), self.frame.header.formula)

    def find_anything(self) -> None:
        """Offer every record and command."""
        self.finder.open(self.things(), _("Ingredient, nutrient, limit, formula, or what to do"))

    def things(self) -> list[Found]:
        """Everything that can be found now."""
        library = self.work.library
        things = self.records.formulas()
        things += [
            Found(one.name, _("ingredient"), partial(self.to_ingredient, one.id)) for one in library.ingredients
        ]
        things += [
            Found(_("{name}: prices over time").format(name=one.name), _("price history"),
                  partial(self.show_history, one.id))
            for one in library.ingredients
        ]
        if self.work.formula is not None:
            things += self.meet.found()
        things += [
            Found(one.name, _("nutrient"), partial(self.to_nutrient, one.id)) for one in library.nutrients
        ]
        things += self.mill.found() + self.printed.found(self.show_printed) + self.commands.found()
        return self.prices.found() + things + self.arrivals.found()

    def to_ingredient(self, ingredient_id: int) -> None:
        """Show an ingredient in the first zone."""
        self.have.filter.clear()
        self.go_to_zone(0)
        self.have.table.go_to(ingredient_id, "name")

    def to_scale_of(self, ingredient_id: int) -> None:
        """Show where an ingredient gets its scale."""
        self.have.filter.clear()
        self.have.show_set("keeping")
        self.go_to_zone(0)
        self.have.table.go_to(ingredient_id, "scale_id")

    def to_nutrient(self, nutrient_id: int) -> None:
        """Show a nutrient's column in the first zone."""
        self.have.show_set("composition")
        self.go_to_zone(0)
        if self.have.model.owners:
            self.have.table.go_to(self.have.model.owners[0], f"{NUTRIENT}{nutrient_id}")

    def _offer_column(self, nutrient_id: int, menu: QMenu) -> None:
        nutrient = self.work.library.nutrient(nutrient_id)
        menu.addAction(_("Rename {name}").format(name=nutrient.name), lambda: self.records.change_nutrient(nutrient_id))
        turn = menu.addAction(_("Never negative"), lambda: self.records.turn_never_negative(nutrient_id))
        turn.setCheckable(True)
        turn.setChecked(nutrient.never_negative)
        menu.addAction(_("Remove {name}").format(name=nutrient.name), lambda: self.records.remove_nutrient(nutrient_id))
        menu.addAction(_("Add a nutrient…"), self.records.new_nutrient)
