"""Files in which nothing stands, and sheets that are too long: refused in one sentence, without reading on."""

from __future__ import annotations

from pathlib import Path

import pytest

from blendapp.domain.library import Library
from blendapp.domain.problems import Refused
from blendapp.exchange import read_price_list, spreadsheets, xlsx_scan
from blendapp.exchange.file_guard import Format, Unfit
from tests.exchange.made_lists import Rows, write_text, write_xlsx
from tests.mills import TODAY


@pytest.mark.parametrize("text", ["\ufeff", "\ufeff\r\n", " , ,\r\n", "\t\r\n \t \r\n"])
def test_a_text_that_holds_nothing_but_a_mark_and_blanks_is_refused(
    tmp_path: Path, library: Library, text: str
) -> None:
    (tmp_path / "Larkwater.csv").write_text(text, encoding="utf-8")
    with pytest.raises(Refused, match=r"empty|No cell is filled"):
        read_price_list(tmp_path / "Larkwater.csv", library, TODAY)


def test_a_workbook_without_a_filled_cell_is_refused(tmp_path: Path, library: Library) -> None:
    with pytest.raises(Refused, match="No cell is filled"):
        read_price_list(write_xlsx(tmp_path / "Larkwater.xlsx", []), library, TODAY)


def test_one_filled_cell_is_enough_to_be_read(tmp_path: Path, library: Library) -> None:
    reading = read_price_list(write_text(tmp_path / "Larkwater.csv", [["Dear miller"]]), library, TODAY)
    assert len(reading.rows) == 1


LONG: Rows = [["Maize", 205]] * 40


@pytest.mark.parametrize(("most", "is_refused"), [(39, True), (40, False)])
def test_a_sheet_is_looked_through_no_further_than_its_greatest_number_of_filled_rows(
    tmp_path: Path, monkeypatch: pytest.MonkeyPatch, most: int, is_refused: bool
) -> None:
    monkeypatch.setattr(xlsx_scan, "MOST_ROWS", most)
    data = write_xlsx(tmp_path / "a.xlsx", LONG).read_bytes()
    if is_refused:
        with pytest.raises(Unfit) as refused:
            spreadsheets.parse_spreadsheet(data, Format.XLSX)
        assert (refused.value.reason, refused.value.values) == ("long", {"count": most})
    else:
        assert len(spreadsheets.parse_spreadsheet(data, Format.XLSX)[0].rows) == 40


def test_blank_rows_do_not_count(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(xlsx_scan, "MOST_ROWS", 2)
    rows: Rows = [["Maize", 205], *[[None, None]] * 20, ["Wheat", 212]]
    data = write_xlsx(tmp_path / "a.xlsx", rows).read_bytes()
    assert len(spreadsheets.parse_spreadsheet(data, Format.XLSX)[0].rows) == 22
