"""The sheets of a reading: every cell as it stands, each table with its rows, and what each column holds."""

from __future__ import annotations

import datetime
from pathlib import Path

import openpyxl
from openpyxl.styles import Font

from blendapp.domain.library import Library
from blendapp.domain.list_rows import ColumnRole, SourceColumn
from blendapp.exchange import read_price_list
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows, write_text, write_xlsx
from tests.mills import TODAY


def test_a_sheet_shows_every_cell_as_it_stands(tmp_path: Path, library: Library) -> None:
    path = write_xlsx(tmp_path / "list.xlsx", [
        ["Larkwater Grain"], [], ["Ingredient", "Price", "Unit", "Date"],
        ["Maize", 205.25, "t", datetime.datetime(2026, 3, 9)], ["Wheat", "#N/A", "t"], [" Limestone ", "=1/0", True],
    ])
    book = openpyxl.load_workbook(path)
    sheet = book["Prices"]
    sheet["B5"].data_type = "e"
    sheet["E4"], sheet["E4"].number_format = 0.125, "0.0%"
    sheet.row_dimensions[5].hidden = True
    sheet["C4"].font = Font(strike=True)
    sheet.column_dimensions["D"].hidden = True
    book.save(path)
    (shown,) = read_price_list(path, library, TODAY).sheets
    assert shown.name == "Prices"
    assert list(shown.rows) == [
        ("Larkwater Grain", "", "", "", ""), ("", "", "", "", ""), ("Ingredient", "Price", "Unit", "Date", ""),
        ("Maize", "205.25", "t", "2026-03-09", "12.5 %"), ("Wheat", "#N/A", "t", "", ""),
        ("Limestone", "(no result)", "TRUE", "", ""),
    ]
    assert (shown.hidden_rows, shown.hidden_columns, shown.struck) == ({5}, {3}, {(4, 2)})


def test_the_rows_of_a_text_have_the_numbers_that_the_editor_shows(read: Read) -> None:
    rows: Rows = [["Ingredient", "Price", "Unit"], ["Maize", "1,205.25", "two\nlines"], ["Wheat", "=A1", "t"]]
    (shown,) = read(rows, write=write_text).sheets
    assert [row[0] for row in shown.rows] == ["Ingredient", "Maize", "", "Wheat"]
    assert shown.rows[1] == ("Maize", "1,205.25", "two\nlines")
    assert shown.rows[-1] == ("Wheat", "(no result)", "t")
    assert shown.rows[1:3] == (shown.rows[1], ("", "", ""))


def test_each_table_says_where_it_stands_and_what_its_columns_hold(read: Read) -> None:
    reading = read([
        ["Week 10, all prices per short ton"],
        ["Product", "Price", None, "Valid"], [None, "ex works", "Freight", "from"],
        ["Maize", 190, 14, "13/3/2026"], ["Wheat", 200, 14, "9/3/2026"], ["* subject to confirmation"], [],
        ["Ingredient", "EUR/t", "Code"], ["Limestone", "1.234,50", "x"], ["Molasses", "99,5", "y"],
    ])
    (sheet,) = reading.sheets
    upper, lower = sheet.tables
    assert (upper.heading_rows, upper.first_row, upper.last_row) == ((2, 3), 4, 5)
    assert upper.columns == (
        SourceColumn(0, "Product", ColumnRole.NAME),
        SourceColumn(1, "Price ex works", ColumnRole.PRICE, "per short ton, as a note says"),
        SourceColumn(2, "Price Freight", ColumnRole.FREIGHT, "per short ton, as a note says"),
        SourceColumn(3, "Valid from", ColumnRole.VALID_FROM, "day first"),
    )
    assert (lower.heading_rows, lower.first_row, lower.last_row) == ((8,), 9, 10)
    assert lower.columns == (
        SourceColumn(0, "Ingredient", ColumnRole.NAME),
        SourceColumn(1, "EUR/t", ColumnRole.PRICE, "EUR per t, decimal comma"),
        SourceColumn(2, "Code", ColumnRole.NOTE),
    )


def test_a_table_without_headings_has_no_heading_row(read: Read) -> None:
    (sheet,) = read([["Larkwater"], ["Maize", 205, "t"], ["Wheat", 210, "t"]]).sheets
    (table,) = sheet.tables
    assert (table.heading_rows, table.first_row, table.last_row) == ((), 1, 3)
    assert [column.role for column in table.columns] == [ColumnRole.NAME, ColumnRole.PRICE, ColumnRole.UNIT]


def test_a_sheet_without_a_table_is_shown_all_the_same(read: Read) -> None:
    (sheet,) = read([["Dear miller"], ["call 55 for prices"]]).sheets
    assert (list(sheet.rows), sheet.tables) == ([("Dear miller",), ("call 55 for prices",)], ())
