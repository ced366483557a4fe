"""Reading tables against a bare default openpyxl load of the same file: a workbook of 2,000 ingredients, a price list.

Bare and ours in turn in one process, so that both meet the same load; medians of paired ratios. Memory: the most that
a process of its own holds, less what it holds before it reads, with the process that parses (from /proc, Linux only).
Run: python tests/benchmarks/bench_import.py
"""

from __future__ import annotations

import argparse
import datetime
import random
import statistics
import subprocess
import sys
import tempfile
import time
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


_HELD = """
import sys
def most(process="self"):
    return int(next(line for line in open(f"/proc/{process}/status") if line.startswith("VmHWM")).split()[1])
from blendapp.domain.library import Library
from blendapp.exchange import parsing, read_price_list, read_workbook
import datetime, openpyxl
path, what, source = sys.argv[1:]
today = datetime.date(2026, 3, 2)
library = Library()
if source:
    library.apply(read_workbook(source, Library(), {}, today).changes)
    parsing.end_process()
ids = {kind: len(found) + 1 for kind, found in library.records.items()}
before = most()
found = {
    "bare": lambda: openpyxl.load_workbook(path), "workbook": lambda: read_workbook(path, library, ids, today),
    "prices": lambda: read_price_list(path, library, today),
}[what]()
print(most() - before + (0 if parsing._kept is None else most(parsing._kept._process.pid)))
"""


def held_kb(path: Path, what: str, source: Path | str) -> int:
    """The most memory held to read a file, in kB. source: a workbook whose library is filled before, "" for none."""
    done = subprocess.run(
        [sys.executable, "-c", _HELD, str(path), what, str(source)], check=True, capture_output=True, text=True
    )
    return int(done.stdout)


def compare(name: str, path: Path, ours: Callable[[], object], runs: int, what: str, source: Path | str) -> None:
    def bare() -> object:
        return openpyxl.load_workbook(path)

    bare()
    ours()
    pairs = [(seconds(bare), seconds(ours)) for _run in range(runs)]
    ratio = statistics.median(b / a for a, b in pairs)
    plain, own = (statistics.median(side) * 1000 for side in zip(*pairs, strict=True))
    most, least = held_kb(path, what, source), held_kb(path, "bare", "")
    print(f"{name}: {ratio:.2f} times a bare load ({own:.0f} ms to {plain:.0f} ms), "
          f"memory {most / least:.2f} times ({most / 1024:.0f} MB to {least / 1024:.0f} MB)")


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
                lambda: read_workbook(workbook, Library(), {}, TODAY), asked.runs, "workbook", "")
        ids = {kind: len(found) + 1 for kind, found in library.records.items()}
        compare("workbook, 2,000 x 30, into the same library", workbook,
                lambda: read_workbook(workbook, library, ids, TODAY), asked.runs, "workbook", workbook)
        prices = Path(folder, "prices.xlsx")
        make_price_list(prices, library, 5000, 20)
        compare("price list, 5,000 x 20", prices, lambda: read_price_list(prices, library, TODAY), asked.runs, "prices",
                workbook)
        make_price_list(prices, library, 5000, 20, '"$"#,##0.00')
        compare("the same with currency formats", prices, lambda: read_price_list(prices, library, TODAY), asked.runs,
                "prices", workbook)


if __name__ == "__main__":
    main()
