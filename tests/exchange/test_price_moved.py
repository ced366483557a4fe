"""A table that a person moves, and columns that a person names: they come before what was found."""

from __future__ import annotations

from pathlib import Path

import openpyxl
import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer, ColumnRole, Fate
from blendapp.domain.mills import Asked, Synonym
from blendapp.domain.records import added
from blendapp.exchange import read_price_list
from tests.exchange.conftest import Read
from tests.exchange.made_lists import Rows, write_text
from tests.mills import TODAY

A, Q, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.IGNORED
# Headings in words that nobody knows, under a heading that looks better than it is.
STRANGE: Rows = [
    ["Larkwater"], ["Futter", "Preis", "je"], ["Maize", 205, "t"], ["Wheat", 212, "t"], ["Limestone", 44, "t"],
]


def table(row: str, sheet: str = "Prices") -> Answer:
    return Answer(Asked.TABLE, sheet, row)


def column(about: str, role: ColumnRole | str) -> Answer:
    return Answer(Asked.COLUMN, about, str(role))


def test_a_table_that_nobody_finds_is_read_once_it_is_pointed_out(read: Read) -> None:
    rows: Rows = [["Futter", "Preis", "je"], ["Malz", 205, "t"], ["Weizen", 212, "t"]]
    first = read(rows)
    assert [row.fate for row in first.rows] == [IGNORED, Q, Q]
    (question,) = first.questions
    assert (question.asked, question.about, question.choices) == (Asked.TABLE, "Prices", ("row 1", "row 0"))
    second = read(rows, table("row 1"))
    assert [row.fate for row in second.rows] == [IGNORED, Q, Q]
    assert [(one.asked, one.about) for one in second.questions] == [
        (Asked.COLUMN, "Futter"), (Asked.COLUMN, "Preis"), (Asked.COLUMN, "je"),
    ]
    assert second.sheets[0].tables[0].heading_rows == (1,)
    third = read(
        rows, table("row 1"), column("Futter", ColumnRole.NAME), column("Preis", ColumnRole.PRICE),
        column("je", ColumnRole.UNIT),
    )
    assert [(row.source_name, row.price_per_t) for row in third.rows if row.fate is Q] == [
        ("Malz", 205), ("Weizen", 212),
    ]
    assert {one.asked for one in third.questions} == {Asked.INGREDIENT}
    assert third.notes == ()


def test_what_columns_hold_as_answered_finds_the_table_without_its_row(read: Read) -> None:
    reading = read(STRANGE, column("Preis", ColumnRole.PRICE), column("je", ColumnRole.UNIT))
    assert [row.fate for row in reading.rows] == [IGNORED, IGNORED, A, A, A]
    assert [one.role for one in reading.sheets[0].tables[0].columns] == [
        ColumnRole.NAME, ColumnRole.PRICE, ColumnRole.UNIT,
    ]


def test_a_table_is_read_from_the_row_that_was_pointed_out(read: Read) -> None:
    rows: Rows = [
        ["Ingredient", "Price", "Unit"], ["Maize", 999, "t"], ["Product", "Price", "Unit"], ["Wheat", 212, "t"],
    ]
    assert [row.ingredient for row in read(rows).rows if row.fate is not IGNORED] == ["Maize", "Wheat"]
    moved = read(rows, table("row 3"))
    assert [row.fate for row in moved.rows] == [IGNORED, IGNORED, IGNORED, A]
    assert moved.sheets[0].tables[0].heading_rows == (3,)


def test_headings_that_hold_numbers_can_be_pointed_out(read: Read) -> None:
    reading = read([["Product", 2026], ["Maize", 205]], table("row 1"), column("2026", ColumnRole.PRICE),
                   Answer(Asked.UNIT, "", "t"))
    assert [(row.fate, row.price_per_t) for row in reading.rows] == [(IGNORED, None), (A, 205)]


def test_columns_without_headings_are_named_by_their_number(read: Read) -> None:
    rows: Rows = [["x", "Malz", 205, 3], ["y", "Weizen", 212, 4]]
    reading = read(rows, table("row 0"), column("column 2", ColumnRole.NAME), column("column 3", ColumnRole.PRICE))
    assert [(row.source_name, row.price) for row in reading.rows] == [("Malz", 205), ("Weizen", 212)]
    assert reading.sheets[0].tables[0].heading_rows == ()


def test_a_column_without_a_heading_beside_headed_ones_can_hold_the_price(read: Read) -> None:
    rows: Rows = [["Ingredient", None, "Unit"], ["Maize", 205, "t"]]
    reading = read(rows, table("row 1"), column("column 2", ColumnRole.PRICE))
    assert [row.price_per_t for row in reading.rows if row.fate is A] == [205]


def test_of_two_columns_headed_alike_the_number_tells_them_apart(read: Read) -> None:
    rows: Rows = [["Product", "Price $/t", "Price $/t"], ["Maize", 200, 205]]
    reading = read(rows, column("column 2", ColumnRole.OTHER))
    assert [row.price_per_t for row in reading.rows if row.fate is A] == [205]


@pytest.mark.parametrize(
    ("answer", "said"),
    [
        (table("row 99"), "ends with row 5"), (table("the top"), "names no row"), (table("row 3", "Other"), "“Other”"),
        (column("Price", ColumnRole.PRICE), "No column is headed “Price”"),
        (column("Preis", "colour"), "“colour” is nothing that a column holds"),
        (column("Preis", ColumnRole.SAMPLE), "“sample” is nothing that a column holds"),
    ],
)
def test_a_wrong_answer_is_a_note_and_loses_nothing(read: Read, answer: Answer, said: str) -> None:
    reading = read(STRANGE, answer)
    assert any(said in note for note in reading.notes)
    assert [row.row for row in reading.rows] == [1, 2, 3, 4, 5]


def test_two_columns_said_to_hold_the_name_are_a_note(read: Read) -> None:
    rows: Rows = [["Product", "Was", "Price $/t"], ["Maize", "yellow", 205], ["Wheat", "red", 210]]
    reading = read(rows, column("Product", ColumnRole.NAME), column("Was", ColumnRole.NAME))
    assert [row.ingredient for row in reading.accepted] == ["Maize", "Wheat"]
    assert any("Several columns" in note and "column A" in note for note in reading.notes)


def remembered(library: Library, *answers: Answer) -> Library:
    library.apply([
        added(Synonym(number, "larkwater", one.about, asked=one.asked, answer=one.answer))
        for number, one in enumerate(answers, start=1)
    ])
    return library


def test_a_moved_table_is_found_again_the_next_week(read: Read, library: Library) -> None:
    remembered(library, table("row 2"), column("Preis", ColumnRole.PRICE), column("je", ColumnRole.UNIT))
    reading = read(STRANGE)
    assert [row.price_per_t for row in reading.accepted] == [205, 212, 44]
    assert reading.notes == ()


def test_headings_that_have_moved_since_are_read_where_they_stand(read: Read, library: Library) -> None:
    remembered(library, table("row 2"), column("Preis", ColumnRole.PRICE), column("je", ColumnRole.UNIT))
    reading = read([["Larkwater"], ["Week 11"], *STRANGE[1:]])
    assert [row.price_per_t for row in reading.accepted] == [205, 212, 44]
    assert reading.notes == ("The headings were last in row 2; those in row 3 were read.",)


def test_the_text_has_one_table_whose_headings_can_be_pointed_out(read: Read) -> None:
    reading = read(STRANGE, table("row 2", ""), column("Preis", ColumnRole.PRICE), column("je", ColumnRole.UNIT),
                   write=write_text)
    assert len(reading.accepted) == 3


def test_each_sheet_has_a_table_of_its_own(tmp_path: Path, library: Library) -> None:
    book = openpyxl.Workbook()
    for name, rows in (("One", STRANGE), ("Two", [["Ingredient", "Price", "Unit"], ["Molasses", 99, "t"]])):
        sheet = book.create_sheet(name)
        for row in rows:
            sheet.append(row)
    book.remove(book.worksheets[0])
    book.save(tmp_path / "list.xlsx")
    answers = [table("row 2", "One"), column("Preis", ColumnRole.PRICE), column("je", ColumnRole.UNIT)]
    reading = read_price_list(tmp_path / "list.xlsx", library, TODAY, answers=answers)
    assert [row.ingredient for row in reading.accepted] == ["Maize", "Wheat", "Limestone", "Molasses"]


def test_every_row_has_one_fate_whatever_is_answered(read: Read) -> None:
    sides: Rows = [["Grain", "Price $/t", None, "Product", "Price $/t"], ["Maize", 205, None, "Soybean meal", 410]]
    for rows in (STRANGE, sides):
        filled = [number for number, cells in enumerate(rows, start=1) if any(cells)]
        for row in range(7):
            for role in ColumnRole:
                for about in ("column 1", "column 2", "Preis", "Price $/t"):
                    reading = read(rows, table(f"row {row}", ""), column(about, role), write=write_text)
                    assert [one.row for one in reading.rows] == filled
