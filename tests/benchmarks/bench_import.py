"""Reading tables against a bare default openpyxl load of the same file: a workbook of 2,000 ingredients, a price list.

Bare and ours in turn in one process, so that both meet the same load; medians of paired ratios.
Run: python tests/benchmarks/bench_import.py
"""

from __future__ import annotations

import argparse
import datetime
import random
import statistics
import tempfile
import time
import tracemalloc
from collections.abc import Callable
from pathlib import Path

import openpyxl

from blendapp.domain.library import Library
from blendapp.exchange import read_price_list, read_workbook

TODAY = datetime.date(2026, 3, 2)


def make_workbook(path: Path, ingredients: int, nutrients: int) -> None:
    chance = random.Random(1)
    workbook = openpyxl.Workbook()
    workbook.remove(workbook.worksheets[0])
    names = [f"Nutrient {n + 1}" for n in range(nutrients)]
    sheet = workbook.create_sheet("Nutrients")
    sheet.append(["Nutrient", "Unit", "Never negative", "Key", "Note"])
    for name in names:
        sheet.append([name, "%", "yes", None, None])
    sheet = workbook.create_sheet("Ingredients")
    columns = [f"{name} (%)" for name in names]
    sheet.append(["Ingredient", "Class", "Dry matter %", "Price", "Price per", "Basis", "Note", *columns])
    for number in range(ingredients):
        values = [round(chance.uniform(0, 60), 3) for _name in names]
        sheet.append([
            f"Ingredient {number + 1}", "Cereals", 88, round(chance.uniform(100, 900), 2), "t", "as fed", None, *values
        ])
    sheet = workbook.create_sheet("Formulas")
    sheet.append(["Formula", "Amounts", "Animal", "Stage", "Batch kg", "Admits", "Note"])
    sheet.append(["Layer feed", "blend", "poultry", None, 2000, "all", None])
    sheet = workbook.create_sheet("Limits")
    sheet.append(["Formula", "Kind", "Name", "Per", "Minimum", "Maximum", "Unit", "Basis"])
    sheet.append(["Layer feed", "nutrient", names[0], None, 16, None, "%", "as fed"])
    workbook.save(path)


def make_price_list(path: Path, library: Library, rows: int, columns: int, number_format: str = "") -> None:
    chance = random.Random(2)
    workbook = openpyxl.Workbook()
    sheet = workbook.worksheets[0]
    notes = [f"Remark {n + 1}" for n in range(columns - 3)]
    sheet.append(["Ingredient", "Price", "Unit", *notes])
    for number in range(rows):
        known = number < len(library.ingredients)
        name = library.ingredients[number].name if known else f"Other goods {number}"
        sheet.append([name, round(chance.uniform(100, 900), 2), "t", *(f"text {number}" for _note in notes)])
        if number_format:
            sheet.cell(number + 2, 2).number_format = number_format
    workbook.save(path)


def seconds(job: Callable[[], object]) -> float:
    begun = time.perf_counter()
    job()
    return time.perf_counter() - begun


def peak(job: Callable[[], object]) -> int:
    tracemalloc.start()
    job()
    found = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    return found


def compare(name: str, path: Path, ours: Callable[[], object], runs: int) -> None:
    def bare() -> object:
        return openpyxl.load_workbook(path)

    bare()
    ours()
    pairs = [(seconds(bare), seconds(ours)) for _run in range(runs)]
    ratio = statistics.median(b / a for a, b in pairs)
    plain, own = (statistics.median(side) * 1000 for side in zip(*pairs, strict=True))
    memory = peak(ours) / peak(bare)
    print(f"{name}: {ratio:.2f} times a bare load ({own:.0f} ms to {plain:.0f} ms), Python memory {memory:.2f} times")


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--runs", type=int, default=9)
    asked = parser.parse_args()
    with tempfile.TemporaryDirectory() as folder:
        workbook = Path(folder, "workbook.xlsx")
        make_workbook(workbook, 2000, 30)
        library = Library()
        library.apply(read_workbook(workbook, Library(), {}, TODAY).changes)
        compare("workbook, 2,000 x 30, into an empty library", workbook,
                lambda: read_workbook(workbook, Library(), {}, TODAY), asked.runs)
        ids = {kind: len(found) + 1 for kind, found in library.records.items()}
        compare("workbook, 2,000 x 30, into the same library", workbook,
                lambda: read_workbook(workbook, library, ids, TODAY), asked.runs)
        prices = Path(folder, "prices.xlsx")
        make_price_list(prices, library, 5000, 20)
        compare("price list, 5,000 x 20", prices, lambda: read_price_list(prices, library, TODAY), asked.runs)
        make_price_list(prices, library, 5000, 20, '"$"#,##0.00')
        compare("the same with currency formats", prices, lambda: read_price_list(prices, library, TODAY), asked.runs)


if __name__ == "__main__":
    main()
