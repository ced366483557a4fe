"""The page of one ingredient's prices: plot, quotes, the rule, and entries that are each one undo."""

from __future__ import annotations

import datetime
import subprocess
import sys

import pytest
from PySide6.QtCore import Qt
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.history.model import read_day
from blendapp.desk.theme import dress
from blendapp.domain.notation import PLAIN, use_notation
from blendapp.domain.quotes import rule
from blendapp.services import plant, price_history
from tests.desk.conftest import Hands

DAY = datetime.timedelta(days=1)


@pytest.fixture
def page(bench: Bench) -> Bench:
    """The prices of maize: 200 without a day, 210 of Bay Grain since five days, 190 of Delta to come."""
    work = bench.work
    for name in ("Bay Grain", "Delta"):
        work.do(lambda mill, name=name: plant.add_supplier(mill, name))
    work.do(lambda mill: plant.add_site(mill, "North yard"))
    for price, supplier, days in ((210.0, "Bay Grain", -5), (190.0, "Delta", 4)):
        work.do(lambda mill, price=price, supplier=supplier, days=days: price_history.add_quote(
            mill, 1, price, work.on, supplier=supplier, valid_from=work.on + days * DAY))
    bench.have.table.go_to(1, "price")
    bench.commands.run("history")
    QApplication.processEvents()
    return bench


def cell(bench: Bench, owner: int, key: str) -> str:
    return str(bench.history.rows.cell(owner, key).data())


def ids(bench: Bench) -> dict[float | None, int]:
    """The quote that counts of each price."""
    return {one.price: one.id for one in reversed(bench.work.library.quotes_of(1))}


def test_the_page_shows_every_quote_the_rule_and_why(page: Bench) -> None:
    assert page.frame.middle.currentWidget() is page.history
    assert page.history.rule.text() == rule()
    assert page.history.why.text().startswith("In force is 210 per t of Bay Grain")
    assert "later than that of one without a first day" in page.history.why.text()
    standings = [cell(page, owner, "standing") for owner in page.history.rows.owners]
    assert [words.split("  ")[1] for words in standings] == ["to come", "in force", "gives way"]
    # Three suppliers, three marks.
    assert len({words.split("  ")[0] for words in standings}) == 3
    assert page.history.legend.whole == (
        "● nobody in particular   ■ Bay Grain   ▲ Delta   hollow: to come, or of another site")
    assert page.history.table.currentIndex().row() == 1


@pytest.mark.parametrize("key", ["holds", "since", "source"])
def test_enter_on_what_is_said_of_a_price_opens_the_page(bench: Bench, hands: Hands, key: str) -> None:
    hands.go(bench.have.table, 2, key)
    hands.key(Qt.Key.Key_Return)
    assert bench.frame.middle.currentWidget() is bench.history
    assert bench.history.title.text() == "Soybean meal: prices"
    hands.key(Qt.Key.Key_Escape)
    assert bench.frame.middle.currentWidget() is bench.frame.bench


def test_the_finder_and_the_menu_of_a_row_lead_there_too(bench: Bench) -> None:
    next(thing for thing in bench.things() if thing.words == "Limestone: prices over time").run()
    assert bench.history.title.text() == "Limestone: prices"
    action = next(one for one in bench.have.row_menu(4).actions() if one.text() == "Prices of Peas over time")
    action.trigger()
    assert bench.history.title.text() == "Peas: prices"
    assert "left out of every mix" in bench.history.why.text()


def test_a_price_is_added_with_supplier_site_and_days_and_taken_back(page: Bench, hands: Hands) -> None:
    form = page.history.form
    form.price.setFocus()
    hands.write("9.5 / cwt")
    form.supplier.box.setCurrentIndex(form.supplier.box.findText("Delta"))
    form.site.setCurrentIndex(form.site.findText("North yard"))
    form.last.setFocus()
    hands.write("+7")
    hands.key(Qt.Key.Key_Return)
    new = page.work.library.quotes_of(1)[-1]
    assert (new.price, new.per, new.supplier_id, new.site_id) == (9.5, "cwt", 2, 1)
    assert (new.valid_from, new.valid_to) == (page.work.on, page.work.on + 7 * DAY)
    assert form.fault.text() == ""
    assert form.price.text() == ""
    assert "another site" in cell(page, new.id, "standing")
    assert page.history.legend.whole.endswith("by name: a site's own")
    assert page.history.plot is not None
    assert page.history.plot.where(new.id).x() > 0
    page.work.undo()
    assert new.id not in page.history.rows.owners


def test_a_new_supplier_comes_with_its_first_price_as_one_undo(page: Bench, hands: Hands) -> None:
    form = page.history.form
    form.price.setText("188")
    form.supplier.box.setCurrentIndex(form.supplier.box.count() - 1)
    form.supplier.box.activated.emit(form.supplier.box.count() - 1)
    hands.click(form.take)
    assert "name of the new supplier" in form.fault.text()
    form.supplier.name.setText("Hill Farms")
    hands.click(form.take)
    assert page.work.library.named("supplier", "hill farms") is not None
    assert page.work.library.price_per_t(1, page.work.on) == 188
    page.work.undo()
    assert page.work.library.named("supplier", "hill farms") is None


def test_what_cannot_be_read_is_said_under_the_form_and_stays(page: Bench, hands: Hands) -> None:
    form = page.history.form
    form.price.setText("cheap")
    hands.click(form.take)
    assert "not a number" in form.fault.text()
    assert form.price.text() == "cheap"
    form.price.setText("200")
    form.first.setText("tomorrow week")
    hands.click(form.take)
    assert "is no day" in form.fault.text()
    form.first.setText(page.work.on.isoformat())
    form.last.setText("-3")
    hands.click(form.take)
    assert "before its first" in form.fault.text()


def test_a_cell_typed_into_makes_a_quote_in_the_place_of_the_old_one(page: Bench, hands: Hands) -> None:
    old = ids(page)[210.0]
    hands.go(page.history.table, old, "valid_to")
    hands.write("+2")
    hands.key(Qt.Key.Key_Return)
    new = page.work.library.quotes_of(1)[-1]
    assert (new.price, new.replaces_id, new.valid_to) == (210.0, old, page.work.on + 2 * DAY)
    assert old not in page.history.rows.owners
    assert page.work.library.records["quote"][old].valid_to is None
    page.history.replaced.setChecked(True)
    assert "replaced" in cell(page, old, "standing")
    index = page.history.rows.cell(old, "valid_to")
    assert not index.flags() & Qt.ItemFlag.ItemIsEditable
    page.work.undo()
    assert "in force" in cell(page, old, "standing")


def test_supplier_and_terms_are_chosen_in_their_cells(page: Bench) -> None:
    owner = ids(page)[210.0]
    assert page.history.rows.setData(page.history.rows.cell(owner, "supplier_id"), "Delta")
    owner = page.work.library.quotes_of(1)[-1].id
    assert cell(page, owner, "supplier_id") == "Delta"
    assert page.history.rows.setData(page.history.rows.cell(owner, "terms"), "delivered")
    owner = page.work.library.quotes_of(1)[-1].id
    assert cell(page, owner, "terms") == "delivered"
    assert not page.history.rows.setData(page.history.rows.cell(owner, "terms"), "by ship")
    assert page.history.rows.setData(page.history.rows.cell(owner, "terms"), "")
    owner = page.work.library.quotes_of(1)[-1].id
    assert page.history.rows.setData(page.history.rows.cell(owner, "kind"), "Contract")
    owner = page.work.library.quotes_of(1)[-1].id
    assert (cell(page, owner, "terms"), cell(page, owner, "kind")) == ("", "contract")
    assert not page.history.rows.setData(page.history.rows.cell(owner, "supplier_id"), "Nobody Known")
    assert not page.history.rows.setData(page.history.rows.cell(owner, "valid_from"), "soon")


def test_ending_and_withdrawing_are_one_undo_each(page: Bench, hands: Hands) -> None:
    work = page.work
    hands.go(page.history.table, ids(page)[210.0], "quoted")
    hands.click(page.history.end)
    assert work.library.price_per_t(1, work.on) == 210
    assert work.library.price_per_t(1, work.on + DAY) == 200
    work.undo()
    hands.go(page.history.table, ids(page)[210.0], "quoted")
    hands.click(page.history.withdraw)
    assert work.library.price_per_t(1, work.on) is None
    assert work.library.price_per_t(1, work.on - DAY) == 210
    assert "unknown, not 0" in page.history.why.text()
    assert cell(page, work.library.quotes_of(1)[-1].id, "standing").startswith("✕")
    assert not page.history.withdraw.isEnabled()
    work.undo()
    assert work.library.price_per_t(1, work.on) == 210


def test_delete_opens_the_last_day_and_a_price_is_not_deleted(page: Bench, hands: Hands) -> None:
    work = page.work
    work.do(lambda mill: price_history.end_quote(mill, ids(page)[210.0], work.on + DAY, work.on))
    owner = work.library.quotes_of(1)[-1].id
    hands.go(page.history.table, owner, "valid_to")
    hands.key(Qt.Key.Key_Delete)
    owner = work.library.quotes_of(1)[-1].id
    assert work.library.records["quote"][owner].valid_to is None
    hands.go(page.history.table, owner, "quoted")
    hands.key(Qt.Key.Key_Delete)
    assert work.library.records["quote"][owner].price == 210
    assert "withdrawn or ended" in page.history.rows.refusals[owner, "quoted"].sentence


def test_whom_it_is_bought_from_is_chosen_beside_the_rule(page: Bench) -> None:
    box = page.history.form.buy.box
    at = box.findText("Delta")
    box.setCurrentIndex(at)
    box.activated.emit(at)
    assert page.work.library.ingredient(1).supplier_id == 2
    # Of nobody in particular counts before another supplier's.
    assert page.work.library.price_per_t(1, page.work.on) == 200
    assert "it is bought from Delta" in page.history.why.text()
    page.work.undo()
    assert box.currentText() == "nobody in particular"


def test_the_plot_follows_keys_and_clicks_and_names_the_quote(page: Bench, hands: Hands) -> None:
    plot = page.history.plot
    assert plot is not None
    plot.setFocus()
    hands.key(Qt.Key.Key_Home)
    assert plot.quote_id == ids(page)[200.0]
    hands.key(Qt.Key.Key_End)
    assert plot.quote_id == ids(page)[190.0]
    assert plot.accessibleDescription() == f"{page.work.on + 4 * DAY}, 190 per t, Delta, to come"
    hands.key(Qt.Key.Key_Left)
    assert plot.quote_id == ids(page)[210.0]
    assert page.history.chosen_cell()[0] == ids(page)[210.0]
    assert QApplication.focusWidget() is plot
    place = plot.where(ids(page)[190.0]).toPoint()
    QTest.mouseClick(plot.viewport(), Qt.MouseButton.LeftButton, Qt.KeyboardModifier.NoModifier, place)
    QApplication.processEvents()
    assert page.history.chosen_cell()[0] == ids(page)[190.0]


def test_the_plot_breaks_its_line_where_no_price_was_known(page: Bench) -> None:
    work, plot = page.work, page.history.plot
    assert plot is not None

    def lines() -> list[list[tuple[float, float]]]:
        found = [one.getData() for one in plot.box.addedItems if type(one).__name__ == "PlotCurveItem"
                 and one.opts["pen"].widthF() == 2.0]
        return [list(zip(x.tolist(), y.tolist(), strict=True)) for x, y in found]

    on = float(work.on.toordinal())
    assert next(points[-1] for points in lines()) == (on + 1, 210.0)
    work.do(lambda mill: price_history.add_quote(
        mill, 1, None, work.on, valid_from=work.on - 2 * DAY, valid_to=work.on - DAY))
    first, second = lines()[:2]
    assert first[-1] == (on - 2, 210.0)
    assert second[0] == (on, 210.0)
    assert all(y > 0 for points in lines() for _x, y in points)


def test_the_plot_is_drawn_again_in_the_other_scheme(page: Bench, qapp: QApplication) -> None:
    plot = page.history.plot
    assert plot is not None
    light = plot.grab().toImage().pixelColor(5, 5).lightness()
    dress(qapp, dark=True)
    QApplication.processEvents()
    dark = plot.grab().toImage().pixelColor(5, 5).lightness()
    dress(qapp, dark=False)
    assert light > 200
    assert dark < 60


def test_an_ingredient_that_is_removed_leads_back_to_the_bench(page: Bench) -> None:
    page.history.begin(4)
    page.have.remove(4)
    assert page.frame.middle.currentWidget() is page.frame.bench


@pytest.mark.parametrize(("text", "days"), [("2026-03-04", 2), ("today", 0), ("+7", 7), ("-1", -1), (" ", None)])
def test_a_day_is_typed_in_full_or_from_today(text: str, days: int | None) -> None:
    use_notation(PLAIN)
    on = datetime.date(2026, 3, 2)
    assert read_day(text, on) == (None if days is None else on + days * DAY)


@pytest.mark.parametrize("text", ["03/04/2026", "soon", "+99999999999", "2026-02-30"])
def test_what_is_no_day_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match="year first"):
        read_day(text, datetime.date(2026, 3, 2))


def test_the_library_of_plots_is_not_imported_before_a_page_needs_it() -> None:
    code = "import sys, blendapp.desk.bench; print(sorted({'pyqtgraph', 'colorama'} & set(sys.modules)))"
    ran = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert ran.stdout.strip() == "[]"


def test_a_price_typed_in_the_first_zone_may_name_its_supplier_and_site(page: Bench, hands: Hands) -> None:
    page.to_bench()
    hands.go(page.have.table, 1, "quoted")
    hands.write("20.5 / cwt from Delta at North yard")
    hands.key(Qt.Key.Key_Return)
    quote = page.work.library.quotes_of(1)[-1]
    assert (quote.price, quote.per, quote.supplier_id, quote.site_id) == (20.5, "cwt", 2, 1)
    hands.go(page.have.table, 1, "price")
    hands.write("199 from Bay Grain")
    hands.key(Qt.Key.Key_Return)
    assert page.work.library.price_per_t(1, page.work.on) == 199
    assert page.have.model.cell(1, "source").data() == "Bay Grain, typed by hand"
    page.work.undo()
    assert page.work.library.price_per_t(1, page.work.on) == 210
