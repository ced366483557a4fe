"""Tables for other programs: text stays text, numbers are numbers, a file is whole or not there."""

from __future__ import annotations

import csv
import io
from pathlib import Path

import openpyxl
import pytest
from hypothesis import given
from hypothesis import strategies as st

from blendapp.domain.problems import Refused
from blendapp.domain.written_tables import Figure, WrittenTable
from blendapp.exchange.table_write import delimited, write_tables

RISKY = ("=1+1", "+49 30", "-5 % protein", "@SUM(A1)", "\t=1", "\r=1")
TABLE = WrittenTable("Formulas", ("Formula", "Cost", "Note"), (
    ("Layer, peak", Figure(246.914, 2), "kept"), ("Pig \"finisher\"", Figure(-0.5, 4), None),
    *((text, None, text) for text in RISKY),
))
OTHER = WrittenTable("Ingredients", ("Ingredient", "%"), (("Maize", Figure(41.32, 3)),))


def test_a_workbook_holds_every_table_with_numbers_as_numbers(tmp_path: Path) -> None:
    path = tmp_path / "effect.XLSX"
    write_tables(path, (TABLE, OTHER))
    book = openpyxl.load_workbook(path)
    assert book.sheetnames == ["Formulas", "Ingredients"]
    sheet = book["Formulas"]
    assert [cell.value for cell in sheet[2]] == ["Layer, peak", 246.914, "kept"]
    assert sheet["B2"].data_type == "n"
    assert (sheet["B2"].number_format, sheet["B3"].number_format) == ("0.00", "0.0000")
    assert sheet["C3"].value is None
    assert book["Ingredients"]["B2"].number_format == "0.000"


def test_a_text_of_a_workbook_never_becomes_a_formula(tmp_path: Path) -> None:
    path = tmp_path / "effect.xlsx"
    write_tables(path, (TABLE,))
    sheet = openpyxl.load_workbook(path)["Formulas"]
    for row, text in enumerate(RISKY, start=4):
        cell = sheet.cell(row, 1)
        assert cell.data_type == "s"
        assert cell.value.replace("_x000D_", "\r") == text
        if text[0] in "=+-@":
            assert cell.quotePrefix


def test_delimited_text_holds_the_first_table_with_plain_decimals(tmp_path: Path) -> None:
    path = tmp_path / "effect.csv"
    write_tables(path, (TABLE, OTHER))
    raw = path.read_bytes()
    assert raw.startswith(b"\xef\xbb\xbf")
    assert b"\r\n" in raw
    rows = list(csv.reader(io.StringIO(raw.decode("utf-8-sig"), newline="")))
    assert rows[0] == ["Formula", "Cost", "Note"]
    assert rows[1:3] == [["Layer, peak", "246.91", "kept"], ['Pig "finisher"', "-0.5000", ""]]
    assert [row[0] for row in rows[3:]] == [f"'{text}" for text in RISKY]


@given(st.lists(st.tuples(st.text(), st.floats(-1e6, 1e6), st.text()), max_size=6))
def test_no_cell_of_delimited_text_begins_like_a_formula_unless_it_is_a_number(
    rows: list[tuple[str, float, str]]
) -> None:
    table = WrittenTable("T", ("a", "b", "c"), tuple((one, Figure(value, 3), other) for one, value, other in rows))
    read = list(csv.reader(io.StringIO(delimited(table), newline="")))
    assert len(read) == len(rows) + 1
    for cells, (_one, value, _other) in zip(read[1:], rows, strict=True):
        assert float(cells[1]) == pytest.approx(value, abs=6e-4)
        assert not cells[0].startswith(("=", "+", "-", "@", "\t", "\r"))
        assert not cells[2].startswith(("=", "+", "-", "@", "\t", "\r"))


def test_another_ending_is_refused_and_names_both(tmp_path: Path) -> None:
    with pytest.raises(Refused, match=r"neither .xlsx nor .csv"):
        write_tables(tmp_path / "effect.pdf", (TABLE,))
    assert list(tmp_path.iterdir()) == []


def test_what_cannot_be_written_leaves_the_older_file(tmp_path: Path) -> None:
    folder = tmp_path / "effect.csv"
    folder.mkdir()
    with pytest.raises(Refused, match="cannot be written"):
        write_tables(folder, (TABLE,))
    with pytest.raises(Refused, match="cannot be written"):
        write_tables(tmp_path / "nowhere" / "effect.xlsx", (TABLE,))
    assert [path.name for path in tmp_path.iterdir()] == ["effect.csv"]
