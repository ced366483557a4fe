"""The list of commands of the bench."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from PySide6.QtWidgets import QApplication

from blendapp.desk.commands import Command
from blendapp.desk.sheet.view import view_words
from blendapp.desk.theme import dress
from blendapp.domain.wording import _

if TYPE_CHECKING:
    from blendapp.desk.bench import Bench


def command_list(bench: Bench) -> list[Command]:
    """Every command, in the order of the menu."""
    return [*_file(bench), *_edit(bench), *_formula(bench), *_paper(bench), *_view(bench)]


def _file(bench: Bench) -> list[Command]:
    files = bench.files

    def is_open() -> bool:
        return bench.work.is_open

    def writable() -> bool:
        return bench.work.is_open and bench.work.mill.writable

    return [
        Command("new", _("New mill file…"), "mill", files.new, "Ctrl+N"),
        Command("new from", _("New mill file from a workbook…"), "mill", files.new_from),
        Command("open", _("Open a mill file…"), "mill", files.open, "Ctrl+O"),
        Command("copy file", _("Save a copy as…"), "mill", files.save_copy, "Ctrl+Shift+S", is_open),
        Command("prices", _("Read a price list…"), "exchange", bench.bring_in_prices, "Ctrl+I", writable),
        Command("analyses", _("Read analyses…"), "exchange", bench.bring_in_analyses, "Ctrl+Shift+I", writable),
        Command("latest list", _("Read the list that arrived last"), "exchange", bench.arrivals.latest, "Ctrl+J",
                lambda: writable() and bench.arrivals.folder is not None),
        Command("back to list", _("Back to the list that was read"), "exchange", bench.arrivals.back, "",
                lambda: is_open() and bench.arrivals.has_list),
        Command("effect", _("What the last prices did"), "exchange", bench.back_to_effect, "",
                lambda: bench.effect.has_any),
        Command("history", _("Prices of this ingredient over time"), "exchange", bench.show_history, "Ctrl+H",
                lambda: bench.have.current() is not None),
        Command("applied", _("Lists that were applied: open, roll back"), "exchange", bench.show_applied, "", is_open),
        Command("memory", _("What is remembered of lists"), "exchange", bench.show_memory, "", is_open),
        Command("import", _("Bring in a workbook…"), "exchange", files.import_workbook, "", writable),
        Command("export", _("Write the workbook…"), "exchange", files.export_workbook, "Ctrl+E", is_open),
    ]


def _edit(bench: Bench) -> list[Command]:
    work = bench.work

    def writable() -> bool:
        return work.is_open and work.mill.writable

    making = bench.have.making

    def undo_words() -> str:
        what = bench.arrivals.undo_words() or (work.mill.undo_text if work.is_open else None)
        return _("Undo: {what}").format(what=what) if what else _("Undo")

    def redo_words() -> str:
        what = bench.arrivals.redo_words() or (work.mill.redo_text if work.is_open else None)
        return _("Redo: {what}").format(what=what) if what else _("Redo")

    return [
        Command("undo", _("Undo"), "edit", bench.undo, "Ctrl+Z",
                lambda: writable() and bool(bench.arrivals.undo_words() or work.mill.undo_text), words_now=undo_words),
        Command("redo", _("Redo"), "edit", bench.redo, "Ctrl+Shift+Z | Ctrl+Y",
                lambda: writable() and bool(bench.arrivals.redo_words() or work.mill.redo_text), words_now=redo_words),
        Command("find", _("Find anything"), "edit", bench.find_anything, "Ctrl+K", in_menu=False),
        Command("filter", _("Show only some ingredients"), "edit", bench.have.filter.setFocus, "Ctrl+F",
                lambda: work.is_open, False),
        Command("add ingredient", _("Add an ingredient"), "library", bench.have.add_ingredient, "", writable),
        Command("add nutrient", _("Add a nutrient…"), "library", bench.records.new_nutrient, "", writable),
        Command("take made", _("Take composition and price from its formula"), "library", making.take_chosen, "",
                lambda: writable() and making.chosen() is not None, words_now=making.words_now),
        Command("compare made", _("Compare made ingredients with their formulas"), "library", making.compare_all, "",
                lambda: work.is_open and making.has_any, False),
        Command("mill", _("The mill: scales, bins, steps, persons"), "library", bench.show_mill, "Ctrl+Shift+M",
                lambda: work.is_open),
        *(
            Command(f"mill {key}", _("Mill: {section}").format(section=bench.mill.sections.item(at).text()), "library",
                    partial(bench.show_mill, key), "", lambda: work.is_open, False)
            for at, key in enumerate(bench.mill.sections.keys)
        ),
    ]


def _formula(bench: Bench) -> list[Command]:
    work, records = bench.work, bench.records

    def chosen() -> bool:
        return work.formula is not None and work.mill.writable

    return [
        Command("choose formula", _("Choose a formula"), "formula", bench.choose_formula, "Ctrl+L",
                lambda: work.is_open, False),
        Command("new formula", _("New formula…"), "formula", records.new_formula, "",
                lambda: work.is_open and work.mill.writable),
        Command("copy formula", _("Copy this formula…"), "formula", records.copy_formula, "", chosen),
        Command("rename formula", _("Rename this formula…"), "formula", records.rename_formula, "", chosen),
        Command("about formula", _("What this formula is for"), "formula", bench.meet.about.begin, "", chosen),
        Command("versions", _("Versions and approval of this formula"), "formula", bench.show_versions, "",
                lambda: work.formula is not None),
        Command("remove formula", _("Remove this formula"), "formula", records.remove_formula, "", chosen),
        Command("add limit", _("Add a limit to this formula"), "formula", bench.meet.start_adding, "Ctrl+M", chosen),
    ]


def _paper(bench: Bench) -> list[Command]:
    return [
        Command("sheet", _("Batch of this formula…"), "paper", bench.batch_or_print, "Ctrl+P",
                lambda: bench.work.formula is not None),
        *(
            Command(f"batch {view}", _("Batch: {view}").format(view=words), "paper",
                    partial(bench.show_batch_page, view), "", lambda: bench.work.formula is not None, False)
            for view, words in view_words().items()
        ),
        Command("printed", _("Printed batch sheets"), "paper", bench.show_printed, "", lambda: bench.work.is_open),
    ]


def _view(bench: Bench) -> list[Command]:
    titles = [zone.title.text() for zone in bench.frame.zones]

    def set_scheme(dark: bool | None) -> None:
        app = QApplication.instance()
        assert isinstance(app, QApplication)
        dress(app, dark=dark)
        bench.settings.setValue("dark", "" if dark is None else "1" if dark else "0")

    def is_open() -> bool:
        return bench.work.is_open

    commands = [
        Command(f"zone {at}", _("Go to “{zone}”").format(zone=title), "view",
                partial(bench.go_to_zone, at), f"Ctrl+{at + 1}", is_open, False)
        for at, title in enumerate(titles)
    ]
    commands += [
        Command(f"widen {at}", _("“{zone}” in the whole window").format(zone=title), "view",
                partial(bench.widen, at), f"Ctrl+Shift+{at + 1}", is_open, False)
        for at, title in enumerate(titles)
    ]
    return [
        *commands,
        Command("light", _("Light"), "view", lambda: set_scheme(False)),
        Command("dark", _("Dark"), "view", lambda: set_scheme(True)),
        Command("system scheme", _("Light or dark as the system"), "view", lambda: set_scheme(None)),
    ]
