"""Messes that only a workbook can hold: struck words, macros, both epochs of days, blank tails, hidden sheets."""

from __future__ import annotations

import datetime
import zipfile
from collections.abc import Callable
from pathlib import Path

import openpyxl
import pytest
from openpyxl.cell.rich_text import CellRichText, TextBlock
from openpyxl.cell.text import InlineFont
from openpyxl.comments import Comment
from openpyxl.styles import Font, PatternFill
from openpyxl.utils.datetime import CALENDAR_MAC_1904

from blendapp.domain.library import Library
from blendapp.domain.list_rows import TAKE, Answer, Fate
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceListReading
from blendapp.exchange import read_price_list
from tests.exchange.made_lists import Rows, write_xlsx
from tests.exchange.test_hostile_files import repacked
from tests.mills import TODAY

A, Q, R, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.REFUSED, Fate.IGNORED
HEAD = ["Ingredient", "Price", "Unit"]
ROWS: Rows = [HEAD, ["Maize", 205, "t"], ["Wheat", 212, "t"]]
STRUCK, PLAIN = InlineFont(strike=True), InlineFont(strike=False)
Build = Callable[[openpyxl.Workbook], None]


def built(path: Path, library: Library, build: Build, rows: Rows = ROWS, *answers: Answer) -> PriceListReading:
    write_xlsx(path, rows)
    book = openpyxl.load_workbook(path, rich_text=True)
    build(book)
    book.save(path)
    return read_price_list(path, library, TODAY, answers=answers)


def fates(reading: PriceListReading) -> list[Fate]:
    return [row.fate for row in reading.rows]


def struck_price(book: openpyxl.Workbook) -> None:
    book["Prices"]["B2"] = CellRichText(TextBlock(STRUCK, "199"), " ", TextBlock(PLAIN, "205"))


def struck_name(book: openpyxl.Workbook) -> None:
    book["Prices"]["A2"] = CellRichText("Mai", TextBlock(STRUCK, "ze"))


def struck_note(book: openpyxl.Workbook) -> None:
    book["Prices"]["D1"], book["Prices"]["D2"] = "Remark", CellRichText("old ", TextBlock(STRUCK, "word"))


def not_struck(book: openpyxl.Workbook) -> None:
    book["Prices"]["A2"] = CellRichText("Mai", TextBlock(PLAIN, "ze"))


@pytest.mark.parametrize(
    ("build", "fate", "asked"),
    [(struck_price, Q, Asked.STRUCK), (struck_name, Q, Asked.STRUCK), (struck_note, A, None), (not_struck, A, None)],
)
def test_words_struck_through_within_a_cell_are_asked_about(
    tmp_path: Path, library: Library, build: Build, fate: Fate, asked: Asked | None
) -> None:
    reading = built(tmp_path / "list.xlsx", library, build)
    assert fates(reading) == [IGNORED, fate, A]
    assert (asked is None) or asked in [one.asked for one in reading.rows[1].questions]


def test_a_name_struck_in_part_is_taken_when_answered(tmp_path: Path, library: Library) -> None:
    answer = Answer(Asked.STRUCK, "", TAKE, sheet="Prices", row=2)
    assert fates(built(tmp_path / "list.xlsx", library, struck_name, ROWS, answer)) == [IGNORED, A, A]


@pytest.mark.parametrize(("strike", "asked"), [("<strike/>", [Asked.STRUCK]), ('<strike val="0"/>', [])])
def test_words_struck_within_a_text_that_cells_share(
    tmp_path: Path, library: Library, strike: str, asked: list[Asked]
) -> None:
    texts = (
        '<sst xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" count="2" uniqueCount="2">'
        f"<si><t>Wheat</t></si><si><r><rPr>{strike}</rPr><t>Mai</t></r><r><t>ze</t></r></si></sst>"
    )
    relation = (
        '<Relationship Id="rIdTexts" Target="sharedStrings.xml" Type="http://schemas.openxmlformats.org/officeDocument/'
        '2006/relationships/sharedStrings"/></Relationships>'
    )

    def share(name: str, data: bytes) -> bytes:
        for number, text in enumerate((b"Wheat", b"Maize")):
            data = data.replace(b't="inlineStr"><is><t>' + text + b"</t></is>", b't="s"><v>%d</v>' % number)
        return data.replace(b"</Relationships>", relation.encode()) if name == "xl/_rels/workbook.xml.rels" else data

    path = repacked(write_xlsx(tmp_path / "a.xlsx", ROWS), tmp_path / "list.xlsx", share)
    with zipfile.ZipFile(path, "a") as archive:
        archive.writestr("xl/sharedStrings.xml", texts)
    reading = read_price_list(path, library, TODAY)
    assert [row.source_name for row in reading.rows[1:]] == ["Maize", "Wheat"]
    assert [[one.asked for one in row.questions] for row in reading.rows] == [[], asked, []]


@pytest.mark.parametrize("epoch", [None, CALENDAR_MAC_1904])
def test_days_are_those_of_either_epoch(tmp_path: Path, library: Library, epoch: datetime.datetime | None) -> None:
    def dated(book: openpyxl.Workbook) -> None:
        if epoch is not None:
            book.epoch = epoch
        book["Prices"]["D1"], book["Prices"]["D2"] = "Valid from", datetime.datetime(2026, 3, 9)

    reading = built(tmp_path / "list.xlsx", library, dated)
    assert reading.rows[1].valid_from == datetime.date(2026, 3, 9)


def test_ten_thousand_formatted_rows_below_are_no_rows(tmp_path: Path, library: Library) -> None:
    def painted(book: openpyxl.Workbook) -> None:
        for row in range(4, 10_004):
            book["Prices"].cell(row, 1).fill = PatternFill("solid", "FFFF00")

    assert [row.row for row in built(tmp_path / "list.xlsx", library, painted).rows] == [1, 2, 3]


def test_macros_are_neither_run_nor_in_the_way(tmp_path: Path, library: Library) -> None:
    path = write_xlsx(tmp_path / "a.xlsx", ROWS)
    with zipfile.ZipFile(path, "a") as archive:
        archive.writestr("xl/vbaProject.bin", bytes(2000))
    path = repacked(path, tmp_path / "list.xlsm", lambda name, data: data.replace(
        b"spreadsheetml.sheet.main+xml", b"ms-excel.sheet.macroEnabled.main+xml")
        if name == "[Content_Types].xml" else data)
    assert fates(read_price_list(path, library, TODAY)) == [IGNORED, A, A]


def hidden_sheet(book: openpyxl.Workbook) -> None:
    sheet = book.create_sheet("Old")
    sheet.append(HEAD)
    sheet.append(["Maize", 999, "t"])
    sheet.sheet_state = "hidden"


def second_sheet(book: openpyxl.Workbook) -> None:
    sheet = book.create_sheet("Minerals")
    sheet.append(["Product", "USD/t"])
    sheet.append(["Limestone", 44])


def formula(book: openpyxl.Workbook) -> None:
    book["Prices"]["B2"] = "=B3-7"


def error(book: openpyxl.Workbook) -> None:
    book["Prices"]["B2"] = "#REF!"


def euros(book: openpyxl.Workbook) -> None:
    book["Prices"]["B2"].number_format = '#,##0.00\\ [$€-407]'


def dollars(book: openpyxl.Workbook) -> None:
    book["Prices"]["B2"].number_format = '"$"#,##0.00'


def merged_title(book: openpyxl.Workbook) -> None:
    book["Prices"].insert_rows(1, 2)
    book["Prices"]["A1"] = "Prices of the week"
    book["Prices"].merge_cells("A1:C1")


def hidden_row(book: openpyxl.Workbook) -> None:
    book["Prices"].row_dimensions[2].hidden = True


def whole_row_struck(book: openpyxl.Workbook) -> None:
    for cell in book["Prices"][2]:
        cell.font = Font(strike=True)


@pytest.mark.parametrize(
    ("build", "expected"),
    [
        (hidden_sheet, [IGNORED, A, A]), (second_sheet, [IGNORED, A, A, IGNORED, A]), (formula, [IGNORED, R, A]),
        (error, [IGNORED, R, A]), (euros, [IGNORED, Q, A]), (dollars, [IGNORED, A, A]),
        (merged_title, [IGNORED, IGNORED, A, A]), (hidden_row, [IGNORED, Q, A]), (whole_row_struck, [IGNORED, Q, A]),
    ],
)
def test_each_row_of_a_built_workbook_has_the_expected_fate(
    tmp_path: Path, library: Library, build: Build, expected: list[Fate]
) -> None:
    assert fates(built(tmp_path / "list.xlsx", library, build)) == expected


@pytest.mark.parametrize(
    ("letter", "expected"), [("C", [IGNORED, Q, Q]), ("D", [IGNORED, Q, A]), ("E", [IGNORED, A, A])]
)
def test_a_hidden_column_on_which_prices_hang_is_asked_about(
    tmp_path: Path, library: Library, letter: str, expected: list[Fate]
) -> None:
    def hidden_column(book: openpyxl.Workbook) -> None:
        book["Prices"].column_dimensions[letter].hidden = True

    rows: Rows = [[*HEAD, "Currency", "Remark"], ["Maize", 205, "t", "USD", "x"], ["Wheat", 212, "t", None, "y"]]
    reading = built(tmp_path / "list.xlsx", library, hidden_column, rows)
    assert fates(reading) == expected
    answer = Answer(Asked.HIDDEN_COLUMN, {"C": "Unit", "D": "Currency", "E": "Remark"}[letter], TAKE)
    assert fates(built(tmp_path / "list.xlsx", library, hidden_column, rows, answer)) == [IGNORED, A, A]


def with_format(number_format: str) -> Build:
    def build(book: openpyxl.Workbook) -> None:
        book["Prices"]["B2"].number_format = number_format

    return build


@pytest.mark.parametrize(("number_format", "rows", "fate", "price"), [
    ('0.00" /short ton"', [HEAD[:2], ["Maize", 186]], A, 205.03),
    ('"$"0.00" per 100 kg"', [HEAD[:2], ["Maize", 20.5]], A, 205),
    ('0.00" /short ton"', ROWS, Q, None), ('0.00" /t"', ROWS, A, 205), ('0.00" each"', ROWS, A, 205),
    ('0.00" DM"', [HEAD, ["Maize", 233, "t"]], A, 205.04), ('0.00', ROWS, A, 205),
])
def test_a_unit_or_basis_that_a_number_format_shows_counts(
    tmp_path: Path, library: Library, number_format: str, rows: Rows, fate: Fate, price: float | None
) -> None:
    row = built(tmp_path / "list.xlsx", library, with_format(number_format), rows).rows[1]
    assert row.fate is fate
    assert price is None or row.price_per_t == pytest.approx(price, abs=0.005)


@pytest.mark.parametrize(("cell", "words", "fate"), [
    ("B2", "per short ton", Q), ("B2", "A. Miller:\nper short ton", Q), ("A2", "discontinued", Q),
    ("B2", "per tonne", A), ("B2", "checked on Monday", A), ("E9", "per short ton", A),
    ("C2", "old price, do not use", Q),
    ("B2", "[Threaded comment]\n\nYour version shows this only.\n\nComment:\n    plus freight", Q),
])
def test_a_comment_on_a_cell_of_a_price_is_read(
    tmp_path: Path, library: Library, cell: str, words: str, fate: Fate
) -> None:
    def build(book: openpyxl.Workbook) -> None:
        book["Prices"][cell].comment = Comment(words, "A. Miller")

    reading = built(tmp_path / "list.xlsx", library, build)
    assert fates(reading) == [IGNORED, fate, A]
    said = words.split("\n")[-1].strip()
    assert fate is A or f"“{said}”" in reading.rows[1].questions[0].text


def test_two_prices_of_which_one_is_struck_are_never_read_as_one(tmp_path: Path, library: Library) -> None:
    row = built(tmp_path / "list.xlsx", library, struck_price).rows[1]
    assert (row.price, row.price_per_t, row.entered.replace(" ", "")) == (None, None, "199205")
    assert [one.asked for one in row.questions] == [Asked.STRUCK, Asked.AMOUNT]
    taken = Answer(Asked.STRUCK, "", TAKE, sheet="Prices", row=2)
    assert built(tmp_path / "list.xlsx", library, struck_price, ROWS, taken).rows[1].fate is Q
    typed = Answer(Asked.AMOUNT, "", "205", sheet="Prices", row=2)
    assert built(tmp_path / "list.xlsx", library, struck_price, ROWS, typed).rows[1].price_per_t == 205
