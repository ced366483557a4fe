"""Lists made by code, one mess each, and the steps of a person who reads them in the window."""

from __future__ import annotations

import time
from collections.abc import Sequence
from pathlib import Path
from typing import Any

import openpyxl
from openpyxl.styles import Font
from PySide6.QtCore import QAbstractItemModel
from PySide6.QtTest import QAbstractItemModelTester, QTest
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import ListAbout

Rows = Sequence[Sequence[Any]]

TWO_ROW_HEADINGS: Rows = [
    ["Bay Grain, prices of the week"], [], ["Product", "Price", None], [None, "USD", "per"],
    ["Maize", 210, "t"], ["Limestone", 52, "t"], ["* subject to confirmation"],
]
UNITS_OPEN: Rows = [["Ingredient", "Price", "Unit"], ["Maize", 190, "ton"], ["Soybean meal", 390, "ton"],
                    ["Limestone", 52, "t"]]
FOREIGN: Rows = [["Ingredient", "EUR/t"], ["Maize", 200], ["Soybean meal", 400]]
UNKNOWN_NAMES: Rows = [["Ingredient", "USD/t"], ["Maize", 210], ["Soya bean ml", 430], ["Chalk", 51], ["Oddity", 5]]
DUPLICATES: Rows = [["Ingredient", "USD/t"], ["Maize", 210], ["Limestone", 51], ["Maize", 208]]
TWO_DECIMALS: Rows = [["Ingredient", "USD/t"], ["Maize", "210,500"], ["Soybean meal", "430,250"]]


def write(path: Path, rows: Rows, sheet: str = "Prices", **further: Rows) -> Path:
    """A workbook with a sheet of rows, and further sheets by name."""
    workbook = openpyxl.Workbook()
    workbook.worksheets[0].title = sheet
    for row in rows:
        workbook.worksheets[0].append(list(row))
    for name, more in further.items():
        made = workbook.create_sheet(name)
        for row in more:
            made.append(list(row))
    workbook.save(path)
    return path


def hide_and_strike(path: Path, hidden: int, struck: int) -> Path:
    """Hide one row of the first sheet and strike another through."""
    workbook = openpyxl.load_workbook(path)
    sheet = workbook.worksheets[0]
    sheet.row_dimensions[hidden].hidden = True
    for cell in sheet[struck]:
        cell.font = Font(strike=True)
    workbook.save(path)
    return path


def wait(bench: Bench) -> None:
    """Wait until the list is read and what follows from it is shown."""
    end = time.monotonic() + 20
    QApplication.processEvents()
    while bench.prices.reader.running and time.monotonic() < end:
        QTest.qWait(2)
    assert not bench.prices.reader.running
    QApplication.processEvents()


def read(bench: Bench, path: Path, about: ListAbout = ListAbout.PRICES) -> None:
    """Have a list read, as after choosing it."""
    bench.arrivals.choose(about, path)
    wait(bench)


def fates(bench: Bench) -> list[str]:
    """What became of every row that is not blank, in the order of the file."""
    assert bench.prices.reading is not None
    return [row.fate.value for row in bench.prices.reading.rows]


def count(bench: Bench, fate: Fate) -> int:
    assert bench.prices.reading is not None
    return bench.prices.reading.count(fate)


def price(bench: Bench, ingredient_id: int) -> float | None:
    """The price per tonne that is in force."""
    return bench.work.library.price_per_t(ingredient_id, bench.work.on)


def watch(bench: Bench) -> list[QAbstractItemModelTester]:
    """Testers on every model of the page; what they find is a warning, and a warning fails the test."""
    panel = bench.prices.questions
    models: list[QAbstractItemModel] = [
        bench.prices.parts.price_rows, bench.prices.parts.sample_rows, bench.prices.source.rows, panel.choices.rows,
        panel.others.rows,
    ]
    mode = QAbstractItemModelTester.FailureReportingMode.Warning
    return [QAbstractItemModelTester(model, mode) for model in models]
