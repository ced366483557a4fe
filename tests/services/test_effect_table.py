"""What prices do, as a table: against hand-worked mixes and against formulating at both sets of prices."""

from __future__ import annotations

from pathlib import Path

import openpyxl
import pytest

from blendapp.domain.formulas import Admits, Amounts
from blendapp.domain.library import Library
from blendapp.domain.list_rows import Fate
from blendapp.domain.notation import PLAIN, use_notation
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.domain.problems import Refused
from blendapp.domain.written_tables import Figure
from blendapp.services.effect_table import (
    changed_words,
    effect_of,
    effect_tables,
    refuse_name,
    status_words,
    write_effect,
)
from blendapp.services.movers import Mover
from tests.mills import TODAY, Maker


def mill() -> Library:
    """Two feeds of maize or wheat, which alone gives protein 10 %; a ration of 5 kg; one of oil, which has no price."""
    make = Maker(currency="EUR")
    make.nutrient("Protein")
    make.ingredient("Maize", 200.0, {"Protein": 10.0})
    make.ingredient("Wheat", 220.0, {"Protein": 10.0})
    make.ingredient("Oil", None, {"Protein": 0.0})
    either = make.formula("=Either", admits=Admits.LISTED)
    for name, most in (("Maize", 60.0), ("Wheat", None)):
        make.limit(either, "ingredient", name, None, most)
    maize = make.formula("Maize alone", admits=Admits.LISTED)
    make.limit(maize, "ingredient", "Maize")
    ration = make.formula("Ration", admits=Admits.LISTED, amounts=Amounts.RATION)
    make.limit(ration, "ingredient", "Wheat", 5.0)
    oil = make.formula("Oily", admits=Admits.LISTED)
    make.limit(oil, "ingredient", "Oil", 100.0)
    return make.library


def reading(*prices: tuple[int, float]) -> PriceListReading:
    rows = tuple(PriceRow("S", at, Fate.ACCEPTED, ingredient_id=key, price=price, per="t")
                 for at, (key, price) in enumerate(prices, 2))
    return PriceListReading("a.csv", "ab" * 32, rows, currency="EUR")


@pytest.fixture
def rows() -> list[Mover]:
    """Wheat falls from 220 to 190, so that the whole of the first feed turns to it; oil gets a price."""
    use_notation(PLAIN)
    return effect_of(mill(), reading((2, 190.0), (3, 900.0)), TODAY)


def test_a_formula_has_its_cost_before_and_after_and_what_changed(rows: list[Mover]) -> None:
    formulas, _ingredients = effect_tables(rows, "EUR")
    assert formulas.headings[:8] == (
        "Formula", "Currency", "Per", "Cost before", "Cost after", "Change", "Change %", "Status")
    found = {row[0]: row for row in formulas.rows}
    # 60 % maize at 200 and 40 % wheat at 220 cost 208; wheat alone costs 190, the old mix would cost 196.
    row = found["=Either"]
    assert row[1:8] == ("EUR", "t", Figure(pytest.approx(208.0), 2), Figure(pytest.approx(190.0), 2),
                        Figure(pytest.approx(-18.0), 2), Figure(pytest.approx(-18 / 2.08), 2), "changed")
    assert row[8] == Figure(pytest.approx(196.0), 2)
    assert row[9:12] == ("Wheat", Figure(220.0, 2), Figure(190.0, 2))
    # The mean share of wheat is 70 %.
    assert row[12] == Figure(pytest.approx(-30 * 0.7), 2)
    assert row[13] == "Maize 60.000 to 0.000 %, Wheat 40.000 to 100.000 %"
    assert found["Ration"][2:5] == ("day", Figure(pytest.approx(1.1), 4), Figure(pytest.approx(0.95), 4))
    assert found["Ration"][7] == "kept"
    assert found["Ration"][13] == ""
    assert found["Oily"][3:8] == (None, Figure(pytest.approx(900.0), 2), None, None, "an answer at the new prices")
    assert "Maize alone" not in found


def test_biggest_movers_stand_first_after_those_without_an_answer(rows: list[Mover]) -> None:
    assert [row.formula for row in rows] == ["Oily", "Ration", "=Either"]


def test_the_ingredients_have_amounts_and_prices_of_both_sides(rows: list[Mover]) -> None:
    _formulas, ingredients = effect_tables(rows, "EUR")
    assert ingredients.headings[6:] == ("Price before, EUR/t", "Price after, EUR/t")
    found = {(row[0], row[1]): row[2:] for row in ingredients.rows}
    assert found["=Either", "Wheat"] == (
        "%", Figure(pytest.approx(40.0), 3), Figure(pytest.approx(100.0), 3), Figure(pytest.approx(60.0), 3),
        Figure(220.0, 2), Figure(190.0, 2))
    assert found["Ration", "Wheat"][:3] == ("kg/day", Figure(pytest.approx(5.0), 3), Figure(pytest.approx(5.0), 3))
    assert found["Oily", "Oil"] == ("%", None, Figure(pytest.approx(100.0), 3), None, None, Figure(900.0, 2))


def test_words_name_what_changes_most_first_and_leave_out_what_reads_alike(rows: list[Mover]) -> None:
    either = next(row for row in rows if row.formula == "=Either")
    assert changed_words(either, 1) == "Maize 60.0 to 0.0 %, Wheat 40.0 to 100.0 %"
    assert changed_words(either, 1, most=1) == "Maize 60.0 to 0.0 %"
    assert status_words(either) == "changed"


def test_the_file_holds_both_tables_and_formula_names_stay_text(rows: list[Mover], tmp_path: Path) -> None:
    path = tmp_path / "effect.xlsx"
    write_effect(path, rows, "EUR")
    book = openpyxl.load_workbook(path)
    assert book.sheetnames == ["Formulas", "Ingredients"]
    cell = book["Formulas"]["A4"]
    assert (cell.value, cell.data_type) == ("=Either", "s")
    assert book["Formulas"]["D4"].value == pytest.approx(208.0)
    write_effect(tmp_path / "effect.csv", rows, "EUR")
    assert "'=Either,EUR,t,208.00,190.00,-18.00,-8.65,changed" in (tmp_path / "effect.csv").read_text("utf-8-sig")


def test_a_mill_file_is_not_written_over(tmp_path: Path, rows: list[Mover]) -> None:
    path = tmp_path / "valley.mill"
    path.write_bytes(b"SQLite format 3\x00")
    for job in (lambda: refuse_name(path), lambda: write_effect(path, rows, "EUR")):
        with pytest.raises(Refused):
            job()
    assert path.read_bytes() == b"SQLite format 3\x00"


def test_neither_the_mill_nor_its_prices_change() -> None:
    library = mill()
    before = {kind: dict(found) for kind, found in library.records.items()}
    effect_of(library, reading((1, 300.0)), TODAY)
    assert {kind: dict(found) for kind, found in library.records.items()} == before
