"""The batch screen beyond its order: bins and meters, rework, what went before, what is made first, and its pages."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QPushButton
from pytestqt.qtbot import QtBot

from blendapp.desk.bench import Bench
from blendapp.desk.sheet.lines import HAND_ADDS, TOTAL
from blendapp.domain.batches import CleanOut
from blendapp.domain.formulas import Admits, Animal
from blendapp.domain.ingredients import Basis, Ingredient, Tag, Value
from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.plant import Bin, Lot, Mixer, Scale
from blendapp.domain.quotes import Quote
from blendapp.domain.records import KINDS, Change, added
from blendapp.services import edits, people
from blendapp.storage import create
from tests.desk.conftest import Hands, small_mill

OIL, PREMIX, OLD, DRUGGED = 5, 6, 7, 8
PREMIX_FORMULA, MEDICATED_FORMULA = 3, 4


def plant_mill() -> Library:
    """The small mill with a mixer, a meter, bins, a premix it makes itself, and a medicated feed."""
    library = small_mill()

    def put(record: object) -> None:
        library.apply([Change(None, record)])

    def ingredient(key: int, name: str, price: float, values: dict[int, float], **fields: object) -> None:
        put(Ingredient(key, name, **fields))  # type: ignore[arg-type]
        put(Quote(key, key, price, "t"))
        for at, (nutrient, amount) in enumerate(values.items()):
            put(Value(100 * key + at, key, nutrient, amount, "%", Basis.AS_FED))

    formula = library.formula(1)
    library.apply([Change(formula, type(formula)(**{**vars_of(formula), "loss_percent": 1.0, "animal": Animal.POULTRY,
                                                    "admits": Admits.LISTED}))])
    put(Scale(2, "Hand scale", 0.01, hand_add=True, tolerance_percent=1.0))
    put(Scale(3, "Oil meter", None, step_l=0.5))
    put(Mixer(1, "Paddle mixer", 100.0, 1000.0))
    put(Mixer(2, "Drum", None, 2000.0))
    ingredient(OIL, "Oil", 900.0, {}, scale_id=3, density_kg_per_l=1.0)
    ingredient(OLD, "Last week's feed", 150.0, {1: 19.5, 2: 0.9, 3: 0.9}, scale_id=1, tags=(Tag.ONLY_WHEN_LISTED,))
    ingredient(DRUGGED, "Drug premix", 5000.0, {}, scale_id=2, tags=(Tag.MEDICATED,), drug="otterolin",
               drug_level="100 g/kg", withdrawal="5 days")
    make = limit_maker(library)
    premix = type(formula)(PREMIX_FORMULA, "Premix 1 %", admits=Admits.LISTED, batch_kg=200.0)
    put(premix)
    make(PREMIX_FORMULA, 3, None, None)
    ingredient(PREMIX, "Premix", 300.0, {3: 38.0}, scale_id=2, made_by_formula_id=PREMIX_FORMULA,
               tags=(Tag.ONLY_WHEN_LISTED,))
    put(type(formula)(MEDICATED_FORMULA, "Medicated grower", admits=Admits.LISTED, batch_kg=1000.0))
    for key, least, most in ((1, None, None), (DRUGGED, 0.1, 0.1)):
        make(MEDICATED_FORMULA, key, least, most)
    for key, least, most in ((1, None, 90.0), (2, None, None), (3, None, None), (OIL, 1.8, 2.2), (PREMIX, 0.9, 1.1)):
        make(1, key, least, most)
    put(Lot(1, 1, "A 17"))
    put(Bin(1, "Silo 1", 1, 1))
    put(Bin(2, "Silo 2", 1))
    return library


def vars_of(record: object) -> dict[str, object]:
    return {name: getattr(record, name) for name in record.__dataclass_fields__}  # type: ignore[attr-defined]


def limit_maker(library: Library):  # type: ignore[no-untyped-def]
    from blendapp.domain.formulas import Limit, LimitKind, Subject

    def make(formula_id: int, ingredient_id: int, minimum: float | None, maximum: float | None) -> None:
        key = max(library.records["limit"], default=0) + 1
        subject = Subject.ingredients(ingredient_id)
        library.apply([Change(None, Limit(key, formula_id, LimitKind.INGREDIENT, subject, None, minimum, maximum))])

    return make


@pytest.fixture
def screen(empty_bench: Bench, tmp_path: Path, qtbot: QtBot) -> Bench:
    """The window with the usual batch of Grower in view."""
    path = tmp_path / "Plant.mill"
    library = plant_mill()
    create(path, [added(record) for kind in KINDS for record in library.all(kind)]).close()
    empty_bench.start(str(path))
    empty_bench.show_sheet()
    settled(empty_bench, qtbot)
    return empty_bench


def settled(bench: Bench, qtbot: QtBot) -> None:
    qtbot.waitUntil(lambda: bench.sheet.batch is not None, timeout=20000)


def text(bench: Bench, owner: int, key: str) -> str:
    lines = bench.sheet.lines
    index = lines.cell(owner, key)
    assert index.isValid(), (owner, key)
    return lines.look(index.row(), index.column()).text


def test_a_line_says_where_it_stands_on_what_it_is_weighed_and_how_near_it_comes(screen: Bench) -> None:
    lines = screen.sheet.lines
    assert text(screen, 1, "bins") == "Silo 1, lot A 17, Silo 2"
    assert (text(screen, 1, "scale"), text(screen, 1, "step")) == ("Big scale", "1 kg")
    assert (text(screen, OIL, "scale"), text(screen, OIL, "step")) == ("Oil meter", "0.5 l")
    batch = screen.sheet.batch
    assert batch is not None
    oil = next(line for line in batch.lines if line.ingredient_id == OIL)
    assert oil.target_l is not None
    assert text(screen, OIL, "litres") == f"{oil.target_l:g}"
    assert text(screen, OIL, "deviation").startswith(("+", "−", "0"))
    # Hand-adds stand apart, under all others; the total is the last row.
    assert lines.owners.index(HAND_ADDS) < lines.owners.index(PREMIX)
    assert all(lines.owners.index(key) < lines.owners.index(HAND_ADDS) for key in (1, 2, OIL))
    assert lines.owners[-1] == TOTAL
    # The finest step is 0.01 kg by hand.
    assert text(screen, TOTAL, "kg") == notation().write(batch.total_kg, 2)
    assert "Expected yield" in screen.sheet.view.yielding.text()
    assert screen.sheet.view.yielding.isVisible()
    assert "Paddle mixer" in screen.sheet.words.text()


def test_rework_is_typed_by_name_and_share_and_taken_out_again(screen: Bench, hands: Hands, qtbot: QtBot) -> None:
    form = screen.sheet.form
    hands.go(form.rework_table, 0, "name")
    hands.write("last")
    hands.key(Qt.Key.Key_Return)
    assert OLD in form.rework.percent
    # The keyboard goes on to its share.
    hands.write("120")
    hands.key(Qt.Key.Key_Return)
    assert form.rework.look(0, 1).fault
    hands.go(form.rework_table, OLD, "percent")
    hands.write("5")
    hands.key(Qt.Key.Key_Return)
    assert screen.sheet.batch is None
    settled(screen, qtbot)
    batch = screen.sheet.batch
    assert batch is not None
    (old,) = (line for line in batch.lines if line.rework)
    assert old.ingredient_id == OLD
    assert old.share_kg == pytest.approx(50)
    hands.go(form.rework_table, OLD, "name")
    hands.key(Qt.Key.Key_Delete)
    settled(screen, qtbot)
    assert screen.sheet.batch is not None
    assert not any(line.rework for line in screen.sheet.batch.lines)


def test_another_mixer_is_chosen_and_takes_the_whole_order(screen: Bench, hands: Hands, qtbot: QtBot) -> None:
    form = screen.sheet.form
    form.order.setFocus()
    form.order.selectAll()
    hands.write("2000")
    settled(screen, qtbot)
    form.mixer.setCurrentIndex(form.mixer.findText("Paddle mixer"))
    form.mixer.activated.emit(form.mixer.currentIndex())
    settled(screen, qtbot)
    assert screen.sheet.batch is not None
    assert (screen.sheet.batch.batches, screen.sheet.batch.mixer) == (2, "Paddle mixer")
    form.mixer.setCurrentIndex(form.mixer.findText("Drum"))
    form.mixer.activated.emit(form.mixer.currentIndex())
    settled(screen, qtbot)
    assert screen.sheet.batch is not None
    assert (screen.sheet.batch.batches, screen.sheet.batch.mixer) == (1, "Drum")


def test_what_must_be_made_first_opens_its_batch_with_that_mass_and_leads_back(
    screen: Bench, hands: Hands, qtbot: QtBot
) -> None:
    batch = screen.sheet.batch
    assert batch is not None
    (one,) = batch.to_make
    assert one.formula_id == PREMIX_FORMULA
    (button,) = (b for b in screen.sheet.view.findChildren(QPushButton) if "Premix 1 %" in b.accessibleName())
    button.setFocus()
    hands.key(Qt.Key.Key_Space)
    assert screen.work.formula_id == PREMIX_FORMULA
    settled(screen, qtbot)
    assert screen.sheet.batch is not None
    assert screen.sheet.batch.order_kg == pytest.approx(one.mass_kg)
    assert "Grower" in screen.sheet.back.text()
    hands.click(screen.sheet.back)
    settled(screen, qtbot)
    assert screen.work.formula_id == 1
    assert screen.sheet.batch is not None
    assert screen.sheet.batch.order_kg == 1000
    assert not screen.sheet.back.isVisible()


def test_after_a_medicated_feed_the_mixer_is_cleaned_out_or_somebody_says_why_not(
    screen: Bench, hands: Hands, qtbot: QtBot, tmp_path: Path
) -> None:
    pane = screen.sheet
    screen.work.choose(MEDICATED_FORMULA)
    settled(screen, qtbot)
    pane.printing.ask_save = lambda _title, name: str(tmp_path / name)
    hands.click(pane.view.save_button)
    assert (tmp_path / "Medicated grower.pdf").is_file(), screen.strip.words.text()
    screen.work.choose(1)
    settled(screen, qtbot)
    assert "Medicated grower (sheet 1" in pane.form.before.placeholderText()
    assert pane.form.why_clean.isVisible()
    assert "otterolin" in pane.form.why_clean.text()
    assert pane.accepting.isVisible()
    hands.click(pane.view.save_button)
    assert not (tmp_path / "Grower.pdf").is_file()
    assert "Choose physical, flush or sequence" in screen.strip.words.text()
    pane.form.clean_out.setFocus()
    hands.key(Qt.Key.Key_Down)
    hands.key(Qt.Key.Key_Down)
    assert CleanOut(pane.form.clean_out.currentData()) is CleanOut.FLUSH
    pane.form.clean_out.activated.emit(pane.form.clean_out.currentIndex())
    settled(screen, qtbot)
    assert not pane.accepting.isVisible(), pane.words.text()
    hands.click(pane.view.save_button)
    assert (tmp_path / "Grower.pdf").is_file()


def test_each_page_is_looked_at_by_the_keyboard_and_kept_without_a_number_but_the_sheet(
    screen: Bench, hands: Hands, qtbot: QtBot, tmp_path: Path
) -> None:
    pane = screen.sheet
    names: list[str] = []

    def save(_title: str, name: str) -> str:
        names.append(name)
        return str(tmp_path / name)

    pane.printing.ask_save = save
    for page in ("sheet", "master", "blank"):
        with qtbot.waitSignal(pane.view.pages.shown, timeout=20000):
            hands.key(Qt.Key.Key_PageDown, Qt.KeyboardModifier.ControlModifier)
        assert pane.view.shown == page
        assert pane.view.pages.pages
        hands.click(pane.view.save_button)
        pane.form.order.setFocus()
        settled(screen, qtbot)
    assert names == ["Grower.pdf", "Grower, master formula record.pdf", "Grower, blank batch record.pdf"]
    assert all((tmp_path / name).read_bytes().startswith(b"%PDF") for name in names)
    assert [one.number for one in screen.work.library.all("batch")] == [1]
    hands.key(Qt.Key.Key_PageDown, Qt.KeyboardModifier.ControlModifier)
    assert pane.view.table.isVisible()


def test_paper_and_masses_of_the_pages_are_chosen_here(screen: Bench, qtbot: QtBot) -> None:
    form = screen.sheet.form
    form.mass.setCurrentIndex(form.mass.findData("lb"))
    form.paper.setCurrentIndex(form.paper.findData("letter"))
    settled(screen, qtbot)
    batch = screen.sheet.batch
    assert batch is not None
    assert (batch.mass_unit, batch.paper) == ("lb", "letter")


def test_each_page_is_printed_by_the_printers_own_dialog(screen: Bench, hands: Hands, qtbot: QtBot) -> None:
    pane = screen.sheet
    given: list[bytes] = []
    pane.printing.choose_printer = lambda _paper: True
    pane.printing.print_pdf = lambda pdf: not given.append(pdf)  # type: ignore[func-returns-value]
    pane.view.turn("blank")
    hands.click(pane.view.print_button)
    assert given[0].startswith(b"%PDF")
    assert not screen.work.library.all("batch")
    pane.view.turn("lines")
    QTest.keyClick(screen.frame, Qt.Key.Key_P, Qt.KeyboardModifier.ControlModifier)
    assert len(given) == 2
    (record,) = screen.work.library.all("batch")
    settled(screen, qtbot)
    screen.show_printed()
    hands.click(screen.printed.print_button)
    assert len(given) == 3
    assert screen.work.library.records["batch"][record.id].copies == 1


def test_a_printed_sheet_is_found_by_its_number_and_looked_at(
    screen: Bench, hands: Hands, qtbot: QtBot, tmp_path: Path
) -> None:
    pane = screen.sheet
    pane.printing.ask_save = lambda _title, _name: str(tmp_path / "one.pdf")
    for _time in range(3):
        hands.click(pane.view.save_button)
        settled(screen, qtbot)
    screen.to_bench()
    screen.find_anything()
    hands.write("batch sheet 2")
    with qtbot.waitSignal(screen.printed.pages.shown, timeout=20000):
        hands.key(Qt.Key.Key_Return)
    assert screen.frame.middle.currentWidget() is screen.printed
    chosen = screen.printed.chosen()
    assert chosen is not None
    assert chosen.number == 2
    assert screen.printed.rows.owners == [3, 2, 1]
    screen.printed.filter.setFocus()
    hands.write("3")
    assert screen.printed.rows.owners == [3]
    hands.write("0")
    assert "No sheet fits" in screen.printed.told.text()
    assert not screen.printed.print_button.isEnabled()
    hands.key(Qt.Key.Key_Escape)
    assert screen.frame.middle.currentWidget() is screen.frame.bench
    assert QApplication.activeModalWidget() is None


def test_a_page_of_the_batch_is_found_by_typing_its_name(screen: Bench, hands: Hands, qtbot: QtBot) -> None:
    screen.to_bench()
    screen.find_anything()
    hands.write("master formula")
    with qtbot.waitSignal(screen.sheet.view.pages.shown, timeout=20000):
        hands.key(Qt.Key.Key_Return)
    assert screen.sheet.view.shown == "master"
    assert screen.sheet.view.pages.isVisible()


def test_a_made_ingredient_that_is_opened_is_named_beside_the_lines(screen: Bench, qtbot: QtBot) -> None:
    premix = screen.work.library.ingredient(PREMIX)
    screen.work.do(lambda mill: edits.change(mill, premix, opened=True))
    settled(screen, qtbot)
    batch = screen.sheet.batch
    assert batch is not None
    assert not batch.to_make
    assert PREMIX not in {line.ingredient_id for line in batch.lines}
    assert "Opened: Premix" in screen.sheet.view.yielding.text()


@pytest.mark.parametrize(("order", "kg"), [("1 t", 1000.0), ("2000 lb", 907.18474), ("1500", 1500.0)])
def test_an_order_may_be_given_in_another_unit_of_mass(
    screen: Bench, hands: Hands, qtbot: QtBot, order: str, kg: float
) -> None:
    screen.sheet.form.order.setFocus()
    screen.sheet.form.order.selectAll()
    hands.write(order)
    assert screen.sheet.batch is None
    settled(screen, qtbot)
    assert screen.sheet.batch is not None
    assert screen.sheet.batch.order_kg == pytest.approx(kg)


def test_an_order_in_an_unknown_unit_says_which_are_known(screen: Bench, hands: Hands, qtbot: QtBot) -> None:
    screen.sheet.form.order.setFocus()
    screen.sheet.form.order.selectAll()
    hands.write("5 stone")
    qtbot.waitUntil(lambda: "stone" in screen.sheet.words.text(), timeout=5000)
    assert "short ton" in screen.sheet.words.text()


def test_an_ingredient_without_a_scale_leads_to_where_it_gets_one(screen: Bench, hands: Hands, qtbot: QtBot) -> None:
    maize = screen.work.library.ingredient(1)
    screen.work.do(lambda mill: edits.change(mill, maize, scale_id=None))
    qtbot.waitUntil(screen.sheet.give_scale.isVisible, timeout=20000)
    assert "Maize" in screen.sheet.words.text()
    hands.click(screen.sheet.give_scale)
    assert screen.frame.middle.currentWidget() is screen.frame.bench
    assert screen.have.table.hasFocus()
    hands.write("big")
    hands.key(Qt.Key.Key_Return)
    assert screen.work.library.ingredient(1).scale_id == 1
    screen.show_sheet()
    settled(screen, qtbot)
    assert not screen.sheet.give_scale.isVisible()


def test_who_accepts_is_chosen_among_the_persons_of_the_mill(screen: Bench, qtbot: QtBot, tmp_path: Path) -> None:
    work, pane = screen.work, screen.sheet
    for name in ("Ann Ågren", "Ben Marsh"):
        people.add_person(work.mill, name)
    pane.lines.fixed[PREMIX] = 15.0  # far above its greatest share
    pane.make()
    qtbot.waitUntil(lambda: pane.batch is not None and bool(pane.batch.broken), timeout=20000)
    assert pane.accepting.isVisible()
    assert pane.accepting.names.stringList() == ["Ann Ågren", "Ben Marsh"]
    assert pane.by.completer() is not None
    pane.printing.ask_save = lambda _title, _name: str(tmp_path / "sheet.pdf")
    pane.reason.setText("seen")
    pane.by.setText("Ben Mash")
    pane.to_file()
    assert "did you mean Ben Marsh?" in screen.strip.words.text()
    assert not work.library.all("batch")
    pane.by.setText("ben marsh")
    pane.to_file()
    assert [record.accepted_by for record in work.library.all("batch")] == ["Ben Marsh"]
