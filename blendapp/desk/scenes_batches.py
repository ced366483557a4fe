"""Scenes of the mill's plant, of batches with their pages, and of versions."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QLineEdit

from blendapp.desk.bench import Bench
from blendapp.domain.formulas import LimitKind
from blendapp.domain.versions import Snapshot
from blendapp.services import edits, people, sheets, versions

if TYPE_CHECKING:
    from blendapp.desk.studio import Studio


def mill(studio: Studio, bench: Bench, _price_list: Path) -> None:
    """Every section of the mill's page, at the size of a small screen."""
    size = bench.frame.size()
    bench.frame.resize(1100, 700)
    bench.show_mill("facts")
    studio.settle()
    studio.take(bench.frame, "24-mill-facts")
    for key in ("sites", "scales", "mixers", "bins", "lots", "steps", "suppliers", "nutrients", "persons"):
        bench.show_mill(key)
        studio.settle()
        studio.take(bench.frame, f"24-mill-{key}")
    table = bench.mill.tables["bin"]
    bench.show_mill("bins")
    table.go_to(table.grid.owners[1], "ingredient_id")
    table.edit(table.currentIndex())
    field = bench.frame.focusWidget()
    assert isinstance(field, QLineEdit)
    field.setText("ma")
    field.textEdited.emit("ma")
    studio.settle()
    studio.take(bench.frame, "24-mill-a-name-typed")
    for kind in (QEvent.Type.KeyPress, QEvent.Type.KeyRelease):
        studio.app.sendEvent(field, QKeyEvent(kind, Qt.Key.Key_Escape, Qt.KeyboardModifier.NoModifier))
    bench.frame.resize(size)


def sheet(studio: Studio, bench: Bench, _price_list: Path) -> None:
    """A batch: its lines, while it is worked out, with rework and a line that cannot be, and each of its pages."""
    pane = bench.sheet
    bench.show_sheet()
    studio.settle(lambda: pane.batch is not None)
    studio.take(bench.frame, "22-batch")
    size = bench.frame.size()
    bench.frame.resize(1100, 700)
    maize = bench.work.library.ingredients[0].id
    pane.form.rework.write(0, "name", bench.work.library.ingredients[5].name)
    pane.form.rework.write(bench.work.library.ingredients[5].id, "percent", "3")
    studio.settle(lambda: pane.batch is not None)
    pane.lines.setData(pane.lines.cell(maize, "kg"), "1002")
    studio.settle(lambda: bool(pane.lines.refusals) and pane.batch is not None)
    studio.take(bench.frame, "22-batch-with-rework")
    bench.work.stale = True
    bench.work.answered.emit()
    studio.settle()
    studio.take(bench.frame, "22-batch-stale")
    bench.work.stale = False
    bench.work.answered.emit()
    bench.frame.resize(size)
    studio.settle(lambda: pane.batch is not None)
    for key in list(pane.view.buttons)[1:]:
        pane.view.pages.pages = []
        pane.view.turn(key)
        studio.settle(lambda: bool(pane.view.pages.pages))
        studio.take(bench.frame, f"23-page-{key}")
    if pane.batch is not None:
        for number, image in enumerate(sheets.page_images(sheets.batch_pdf(pane.batch), 96.0 * studio.scale), 1):
            (studio.out_dir / f"23-batch-sheet-page-{number}-{studio.scale}00.png").write_bytes(image)
    pane.printing.ask_save = lambda _title, name: str(studio.out_dir / name)
    pane.view.turn("sheet")
    pane.to_file()
    studio.settle(lambda: pane.batch is not None)
    bench.show_printed()
    studio.settle(lambda: bool(bench.printed.pages.pages))
    studio.take(bench.frame, "23-printed-sheets")
    pane.view.turn("lines")


def version(studio: Studio, bench: Bench, _price_list: Path) -> None:
    """A formula approved once and changed since, and a draft whose cautions are to be taken on."""
    work = bench.work
    words = {"Ada Marsh": "prepares the feeds", "Ben Holt": "approves the feeds"}
    for name, word in words.items():
        person = people.add_person(work.mill, name, "nutritionist" if name.startswith("Ada") else "head of feeds")
        people.set_password(work.mill, person.id, word)
    ada, ben = (work.library.named("person", name) for name in words)
    assert ada is not None
    assert ben is not None
    assert work.formula_id is not None

    def approve(formula_id: int) -> None:
        draft = versions.prepare(work.mill, formula_id, ada.id, words["Ada Marsh"], work.on)
        result = Snapshot.decode(draft.snapshot).result
        reasons = {} if result is None else dict.fromkeys(versions.to_acknowledge(result), "checked")
        versions.approve(work.mill, draft.id, ben.id, words["Ben Holt"], reasons=reasons, on=work.on)
        work.recorded()

    approve(work.formula_id)
    limit = next(one for one in work.library.limits(work.formula_id) if one.minimum and one.kind is LimitKind.NUTRIENT)
    work.do(lambda mill: edits.set_bound(mill, limit.id, "minimum", round((limit.minimum or 0.0) * 0.99, 3)))
    bench.show_versions()
    studio.settle()
    studio.take(bench.frame, "25-versions")
    versions.prepare(work.mill, work.formula_id, ada.id, words["Ada Marsh"], work.on)
    work.recorded()
    bench.versions.form.approve.emit()
    studio.settle(lambda: bench.versions.form.approve_button.isEnabled())
    studio.take(bench.frame, "26-a-draft-to-approve")
    bench.show_people()
    studio.settle()
    studio.take(bench.frame, "27-persons")
    bench.show_sheet()
    studio.settle(lambda: bench.sheet.batch is not None)
    studio.take(bench.frame, "28-batch-as-approved")
