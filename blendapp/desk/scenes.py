"""The scenes of the pictures: each brings the window into a state that people meet, and lets it be photographed."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QSettings
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.rail.geometry import End
from blendapp.desk.scenes_batches import mill, sheet, version
from blendapp.desk.scenes_lists import history, lists
from blendapp.desk.scenes_prices import prices
from blendapp.desk.shell.frame import Frame
from blendapp.desk.studio import Studio
from blendapp.domain.formulas import Amounts, LimitKind
from blendapp.services import edits
from blendapp.services import workbook as workbooks


def take_all(out_dir: Path, workbook: Path, price_list: Path, folder: Path, scale: int, only: str = "") -> None:
    """Every scene of the window at one scale, or only one of them."""
    studio = Studio(out_dir, scale)
    settings = QSettings(str(folder / "settings.ini"), QSettings.Format.IniFormat)
    frame = Frame()
    frame.show()
    studio.settle()
    studio.take(frame, "01-first-paint")
    bench = Bench(frame, settings)
    bench.start(None)
    studio.settle()
    studio.take(frame, "02-no-mill-yet")
    path = folder / "Sample mill.mill"
    made, _warnings = workbooks.new_mill(path, workbook)
    made.close()
    bench.start(str(path))
    frame.activateWindow()
    scenes = (_bench, _hands, _wide, _forms, _faults, _finding, _formulas, prices, sheet, mill, version, history,
              lists)
    for scene in scenes:
        if only and scene.__name__.lstrip("_") != only:
            continue
        scene(studio, bench, price_list)
        bench.to_bench()
        bench.strip.clear()
        frame.widen(None)
        studio.settle()
    bench.close()
    frame.close()


def _bench(studio: Studio, bench: Bench, _price_list: Path) -> None:
    bench.mix.table.setFocus()
    studio.settle(lambda: bench.work.has_further)
    studio.take(bench.frame, "03-bench")


def _hands(studio: Studio, bench: Bench, _price_list: Path) -> None:
    """An end held by the keyboard, and a price being tried."""
    table, model = bench.meet.table, bench.meet.model
    owner = next((one for one in model.owners if model.limit(one).minimum is not None), None)  # type: ignore[union-attr]
    if owner is None:
        return
    table.go_to(owner, "rail")
    index = model.cell(owner, "rail")
    look = model.look(index.row(), index.column())
    assert look.rail is not None
    assert look.axis is not None
    table.grip.nudge((owner, "rail"), End.MINIMUM, look.rail, look.axis, -2)
    studio.settle()
    studio.take(bench.frame, "04-an-end-held")
    table.grip.take_back()


def _wide(studio: Studio, bench: Bench, _price_list: Path) -> None:
    for key in ("prices", "composition", "keeping"):
        bench.have.show_set(key)
        bench.widen(0)
        studio.settle()
        studio.take(bench.frame, f"05-have-{key}")
        bench.frame.widen(None)
    bench.have.show_set("composition")
    studio.settle()
    studio.take(bench.frame, "05-have-composition-narrow")
    bench.have.show_set("prices")
    bench.widen(1)
    studio.settle()
    studio.take(bench.frame, "06-meet")
    bench.frame.widen(None)
    result = bench.work.result
    if result is not None and result.mix:
        bench.mix.model.opened = frozenset({"nutrients", "left out"})
        bench.mix.model.opened_ids = frozenset({result.mix[0].ingredient_id, result.mix[2].ingredient_id})
        bench.mix._answered()
    bench.widen(2)
    studio.settle()
    studio.take(bench.frame, "07-mix")
    bench.frame.widen(None)
    bench.have.table.setFocus()
    studio.settle()
    studio.take(bench.frame, "07-mix-narrow")
    bench.mix._forget()
    bench.mix._answered()


def _forms(studio: Studio, bench: Bench, _price_list: Path) -> None:
    bench.meet.adding.begin(LimitKind.NUTRIENT, "Potassium")
    studio.settle()
    studio.take(bench.frame, "08-add-a-limit")
    bench.meet.adding.begin(LimitKind.RATIO, "Calcium")
    bench.meet.adding.add()
    studio.settle()
    studio.take(bench.frame, "08-add-a-ratio-refused")
    bench.meet.adding.close_form()
    bench.meet.about.begin()
    studio.settle()
    studio.take(bench.frame, "09-what-the-formula-is-for")
    bench.meet.about.close_form()
    bench.records.new_nutrient()
    bench.ask.field.setText("Lysine (stone)")
    bench.ask.take()
    studio.settle()
    studio.take(bench.frame, "10-a-name-refused")
    bench.ask.leave()


def _faults(studio: Studio, bench: Bench, _price_list: Path) -> None:
    """A refused cell with its sentence, and a block of which some cells were refused."""
    model, table = bench.have.model, bench.have.table
    owners = model.owners
    table.go_to(owners[2], "price")
    model.setData(model.cell(owners[2], "price"), "cheap")
    studio.settle()
    studio.take(bench.frame, "11-a-price-refused")
    table.setFocus()
    model.forgive(owners[2], "price")
    QApplication.clipboard().setText("201.5\t\t1900\n195\t\tplenty\n18x\t\t640\n")
    table.go_to(owners[0], "price")
    table.paste()
    studio.settle()
    studio.take(bench.frame, "12-a-block-partly-taken")
    for owner in owners[:3]:
        for key in ("price", "stock_kg"):
            model.forgive(owner, key)
    bench.work.undo()


def _finding(studio: Studio, bench: Bench, _price_list: Path) -> None:
    bench.find_anything()
    studio.settle()
    studio.take(bench.frame, "13-find-anything")
    bench.finder.field.setText("ly")
    studio.settle()
    studio.take(bench.frame, "13-find-ly")
    bench.finder.leave()
    bench.choose_formula()
    studio.settle()
    studio.take(bench.frame, "14-choose-a-formula")
    bench.finder.leave()
    bench._fill_recent()
    bench.commands.fill(bench.menu, {"open": bench.recent_menu})
    bench.menu.resize(bench.menu.sizeHint())
    studio.take(bench.menu, "15-menu")


def _formulas(studio: Studio, bench: Bench, _price_list: Path) -> None:
    """A ration, a conflict, a missing price, and an old answer while the new one is worked out."""
    work = bench.work
    first = work.formula_id
    ration = next((one.id for one in work.library.formulas if one.amounts is Amounts.RATION), None)
    if ration is not None:
        work.choose(ration)
        studio.settle(lambda: work.has_further)
        studio.take(bench.frame, "16-a-ration")
    work.choose(first)
    studio.settle(lambda: not work.stale)
    limit = next(one for one in work.library.limits(first or 0) if one.minimum and one.kind is LimitKind.NUTRIENT)
    work.do(lambda mill: edits.change(mill, limit, minimum=round((limit.minimum or 0.0) * 1.12, 3), maximum=None))
    studio.settle()
    studio.take(bench.frame, "17-conflict")
    studio.settle(lambda: work.result is not None and work.result.conflict is not None)
    studio.take(bench.frame, "18-conflict-with-its-repairs")
    work.undo()
    work.stale = True
    work.answered.emit()
    studio.settle()
    studio.take(bench.frame, "19-stale")
    work.stale = False
    work.answered.emit()
