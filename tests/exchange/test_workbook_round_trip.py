"""A mill written to the exchange workbook and read into an empty one is the same mill."""

from __future__ import annotations

import datetime
from pathlib import Path

import openpyxl
import pytest
from hypothesis import HealthCheck, given, settings

from blendapp.domain.formulas import Limit, LimitKind, Subject
from blendapp.domain.ingredients import Origin, Value
from blendapp.domain.library import Library
from blendapp.domain.problems import Problems, Refused
from blendapp.domain.quotes import Quote
from blendapp.exchange import read_workbook, write_workbook
from blendapp.exchange.workbook_tables import tables_of
from tests.exchange.made_mills import mills
from tests.mills import TODAY, Maker


def read(path: Path, into: Library | None = None) -> Library:
    library = into.copy() if into else Library()
    ids = {kind: max(found, default=0) + 1 for kind, found in library.records.items()}
    library.apply(read_workbook(path, library, ids, TODAY).changes)
    return library


@given(mills())
@settings(
    max_examples=120, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow]
)
def test_any_mill_exported_and_imported_exports_equal_tables(tmp_path: Path, library: Library) -> None:
    path = tmp_path / "mill.xlsx"
    write_workbook(path, library, TODAY)
    back = read(path)
    assert tables_of(back, TODAY, Problems()) == tables_of(library, TODAY, Problems())
    for kind in ("nutrient", "formula", "scale", "mixer", "site", "supplier", "lot", "bin"):
        ours = [record.name for record in library.all(kind)]
        assert [record.name for record in back.all(kind)] == ours
    assert read_workbook(path, back, {}, TODAY).changes == []


@given(mills())
@settings(
    max_examples=40, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture, HealthCheck.too_slow]
)
def test_values_prices_and_limits_come_back_as_the_same_numbers(tmp_path: Path, library: Library) -> None:
    path = tmp_path / "mill.xlsx"
    write_workbook(path, library, TODAY)
    back = read(path)

    def values(of: Library) -> list[object]:
        found: list[Value] = sorted(of.all("value"), key=lambda v: (v.ingredient_id, v.nutrient_id))
        return [
            (v.ingredient_id, v.nutrient_id, v.amount, v.unit or "/kg", v.basis, v.origin, v.date, v.n, v.sd)
            for v in found
        ]

    def limits(of: Library) -> list[object]:
        found: list[Limit] = [limit for formula in of.formulas for limit in of.limits(formula.id)]
        return [(x.formula_id, x.kind, x.minimum, x.maximum, x.unit, x.basis, x.at_dry_matter_percent) for x in found]

    assert values(back) == values(library)
    assert limits(back) == limits(library)
    for ingredient in library.ingredients:
        price = library.price_per_t(ingredient.id, TODAY)
        again = back.price_per_t(ingredient.id, TODAY)
        assert again == (None if price is None else pytest.approx(price, rel=1e-12))


def test_text_that_begins_like_a_formula_is_written_as_text(tmp_path: Path) -> None:
    maker = Maker()
    for name in ("=SUM(A1:A9)", "+1", "-2", "@now", "#REF!"):
        maker.ingredient(name)
    write_workbook(tmp_path / "out.xlsx", maker.library, TODAY)
    sheet = openpyxl.load_workbook(tmp_path / "out.xlsx")["Ingredients"]
    cells = [row[0] for row in sheet.iter_rows(min_row=2)]
    assert [(cell.value, cell.data_type) for cell in cells] == [
        (name, "s") for name in ("=SUM(A1:A9)", "+1", "-2", "@now", "#REF!")
    ]
    assert all(cell.quotePrefix for cell in cells[:4])


def test_a_number_keeps_all_of_its_digits(tmp_path: Path) -> None:
    maker = Maker()
    maker.nutrient("Lysine")
    maker.ingredient("Maize", 0.1 + 0.2, {"Lysine": 1 / 3}, dry_matter_percent=88.00000000000001)
    write_workbook(tmp_path / "out.xlsx", maker.library, TODAY)
    back = read(tmp_path / "out.xlsx")
    assert back.value(1, 1).amount == 1 / 3
    assert back.ingredient(1).dry_matter_percent == 88.00000000000001
    assert back.quotes_of(1)[0].price == 0.1 + 0.2


def test_a_value_with_a_source_stands_in_values_and_a_plain_one_in_its_column(tmp_path: Path) -> None:
    maker = Maker()
    maker.nutrient("Lysine")
    maker.nutrient("Starch")
    maker.ingredient("Maize", values={"Lysine": 0.25})
    maker.put(Value(9, 1, 2, 64.0, "%", origin=Origin.TABLE, source="made up"))
    write_workbook(tmp_path / "out.xlsx", maker.library, TODAY)
    book = openpyxl.load_workbook(tmp_path / "out.xlsx")
    heading = [cell.value for cell in book["Ingredients"][1]]
    row = [cell.value for cell in book["Ingredients"][2]]
    assert row[heading.index("Lysine (%)")] == 0.25
    assert row[heading.index("Starch (%)")] is None
    assert [cell.value for cell in book["Values"][2]][:7] == ["Maize", "Starch", 64, "%", "as fed", "table", "made up"]


def test_a_class_that_shares_its_name_with_an_ingredient_is_written_as_its_members(tmp_path: Path) -> None:
    maker = Maker()
    maker.ingredient("Wheat", class_name="Wheat")
    maker.ingredient("Wheat bran", class_name="Wheat")
    feed = maker.formula()
    maker.put(Limit(1, feed.id, LimitKind.GROUP, Subject.of_class("Wheat"), maximum=30))
    write_workbook(tmp_path / "out.xlsx", maker.library, TODAY)
    assert read(tmp_path / "out.xlsx").limits(1)[0].subject.ids == (1, 2)


def test_a_price_per_bushel_whose_weight_has_changed_is_written_per_tonne(tmp_path: Path) -> None:
    maker = Maker()
    maker.ingredient("Maize", bushel_lb=54.0)
    maker.put(Quote(7, 1, 4.5, "bu", 56.0))
    before = maker.library.price_per_t(1, TODAY)
    write_workbook(tmp_path / "out.xlsx", maker.library, TODAY)
    back = read(tmp_path / "out.xlsx")
    assert back.price_per_t(1, TODAY) == before
    assert back.quotes_of(1)[0].per == "t"


def test_a_hundredweight_of_the_mill_keeps_its_price(tmp_path: Path) -> None:
    maker = Maker(cwt_means="112 lb")
    maker.ingredient("Salt", 5.0, per="cwt")
    before = maker.library.price_per_t(1, TODAY)
    write_workbook(tmp_path / "out.xlsx", maker.library, TODAY)
    assert read(tmp_path / "out.xlsx").price_per_t(1, TODAY) == pytest.approx(before, rel=1e-15)


def test_only_the_price_in_force_is_written_and_the_rest_is_said(tmp_path: Path) -> None:
    maker = Maker()
    maker.ingredient("Maize", 200.0)
    maker.put(Quote(5, 1, 210.0, valid_from=TODAY))
    maker.put(Quote(6, 1, 230.0, valid_from=TODAY + datetime.timedelta(days=1)))
    warnings = write_workbook(tmp_path / "out.xlsx", maker.library, TODAY)
    assert any("several quotes" in problem.text for problem in warnings)
    assert [quote.price for quote in read(tmp_path / "out.xlsx").quotes_of(1)] == [210.0]


def test_a_mill_without_history_exports_without_a_warning(tmp_path: Path) -> None:
    maker = Maker()
    maker.ingredient("Maize", 200.0)
    assert write_workbook(tmp_path / "out.xlsx", maker.library, TODAY) == []


def test_the_headings_stay_in_view_when_the_sheet_is_scrolled(tmp_path: Path) -> None:
    write_workbook(tmp_path / "out.xlsx", Maker().library, TODAY)
    book = openpyxl.load_workbook(tmp_path / "out.xlsx")
    assert all(sheet.freeze_panes in ("A2", "B2") for sheet in book)


def test_an_export_that_fails_leaves_the_older_file_and_no_leftover(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    path = tmp_path / "out.xlsx"
    path.write_bytes(b"older")

    def full(*_arguments: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr("blendapp.exchange.written_cells.os.fsync", full)
    with pytest.raises(Refused, match="No space left"):
        write_workbook(path, Maker().library, TODAY)
    assert path.read_bytes() == b"older"
    assert list(tmp_path.iterdir()) == [path]


def test_an_export_into_a_folder_that_is_not_there_is_refused_in_one_sentence(tmp_path: Path) -> None:
    with pytest.raises(Refused) as refused:
        write_workbook(tmp_path / "nowhere" / "out.xlsx", Maker().library, TODAY)
    assert len(refused.value.problems) == 1


def test_a_text_longer_than_a_cell_is_cut_and_said(tmp_path: Path) -> None:
    maker = Maker()
    maker.ingredient("Maize", note="n" * 40_000)
    warnings = write_workbook(tmp_path / "out.xlsx", maker.library, TODAY)
    assert ["longer than a cell" in problem.text for problem in warnings] == [True]
    assert len(read(tmp_path / "out.xlsx").ingredient(1).note) == 32_767




@pytest.mark.parametrize(
    ("means", "per", "exported"),
    [
        ("112 lb", "long cwt", "cwt"), ("112 lb", "cwt", "100 lb"), ("100 lb", "cwt", "cwt"), ("", "cwt", "cwt"),
        ("100 lb", "long cwt", "long cwt"), ("", "long cwt", "long cwt"),
    ],
)
def test_a_price_per_hundredweight_comes_out_as_typed_whatever_the_mill_calls_one(
    tmp_path: Path, means: str, per: str, exported: str
) -> None:
    maker = Maker(cwt_means=means)
    maker.ingredient("Maize", 8.4, per=per)
    path = tmp_path / "mill.xlsx"
    write_workbook(path, maker.library, TODAY)
    heads, row, *_rest = openpyxl.load_workbook(path)["Ingredients"].values
    assert (row[heads.index("Price")], row[heads.index("Price per")]) == (8.4, exported)
    back = read(path)
    assert [(quote.price, quote.per) for quote in back.quotes_of(1)] == [(8.4, per)]
    assert back.price_per_t(1, TODAY) == maker.library.price_per_t(1, TODAY)
