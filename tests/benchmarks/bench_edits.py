"""From an edit in the sample mill to the repainted results: 100 random edits through the window's own models.

Run: python tests/benchmarks/bench_edits.py. At most 50 ms in the median and 100 ms at the 95th percentile.
"""

from __future__ import annotations

import argparse
import os
import random
import statistics
import tempfile
import time
from pathlib import Path

os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

SAMPLE = Path(__file__).resolve().parents[2] / "sample_data" / "mill.xlsx"


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--edits", type=int, default=100)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--pause-ms", type=int, default=0,
                        help="rest up to so long between edits, so that what follows an answer is under way")
    asked = parser.parse_args()

    from PySide6.QtCore import QSettings
    from PySide6.QtWidgets import QApplication

    from blendapp.desk.bench import Bench
    from blendapp.desk.shell.frame import Frame
    from blendapp.desk.start import make_app
    from blendapp.services import workbook

    app = make_app(["blendapp"])
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "mill.mill"
        workbook.new_mill(path, SAMPLE)[0].close()
        frame = Frame()
        bench = Bench(frame, QSettings(str(Path(folder) / "s.ini"), QSettings.Format.IniFormat))
        frame.show()
        bench.start(str(path))
        app.processEvents()
        random.seed(asked.seed)
        both = []
        for _edit in range(asked.edits):
            end = time.monotonic() + random.random() * asked.pause_ms / 1000
            while time.monotonic() < end:
                app.processEvents()
                time.sleep(0.001)
            both.append(one_edit(bench, app))
        assert isinstance(app, QApplication)
        bench.close()
    print(f"{len(both)} edits to repainted results")
    for words, seconds in (("by the clock", [one[0] for one in both]), ("of one core", [one[1] for one in both])):
        ordered = sorted(one * 1000 for one in seconds)
        print(f"  {words}: median {statistics.median(ordered):.1f} ms, "
              f"95th percentile {ordered[int(len(ordered) * 0.95)]:.1f} ms, worst {ordered[-1]:.1f} ms")


def one_edit(bench: object, app: object) -> tuple[float, float]:
    """Seconds by the clock and of the processor that one random edit took: a price, a composition value or a bound
    of a random formula. The second leaves out what other processes took meanwhile."""
    work, have, meet = bench.work, bench.have, bench.meet  # type: ignore[attr-defined]
    formula = random.choice(work.library.formulas)
    if work.formula_id != formula.id:
        work.choose(formula.id)
        app.processEvents()  # type: ignore[attr-defined]
    kind = random.choice(("price", "value", "bound"))
    if kind == "bound":
        limits = [one for one in work.library.limits(formula.id) if one.minimum]
        limit = random.choice(limits)
        model, index = meet.model, meet.model.cell(limit.id, "minimum")
        text = f"{limit.minimum * random.uniform(0.98, 1.0):.4f}"
    else:
        ingredient = random.choice(sorted(work.admitted_ids))
        price = work.library.price_per_t(ingredient, work.on) or 300.0
        if kind == "price":
            have.show_set("prices")
            key, text = "price", f"{price * random.uniform(0.97, 1.03):.2f}"
        else:
            have.show_set("composition")
            nutrient = random.choice(work.library.nutrients)
            value = work.library.value(ingredient, nutrient.id)
            amount = 1.0 if value is None else value.amount * random.uniform(0.99, 1.01) + 0.001
            key, text = f"nutrient {nutrient.id}", f"{amount:.4f}"
        model, index = have.model, have.model.cell(ingredient, key)
    app.processEvents()  # type: ignore[attr-defined]
    begun, begun_here = time.perf_counter(), time.process_time()
    model.setData(index, text)
    while work.stale:
        app.processEvents()  # type: ignore[attr-defined]
    app.processEvents()  # type: ignore[attr-defined]
    return time.perf_counter() - begun, time.process_time() - begun_here


if __name__ == "__main__":
    main()
