"""Window start to first paint, and until the sample mill can be edited, against a bare window that imports numpy.

Whole processes, the two in turn, so that both meet the same load; medians of ratios.
Run: python tests/benchmarks/bench_start.py --mill MILL
"""

from __future__ import annotations

import argparse
import os
import statistics
import subprocess
import sys
import time
from pathlib import Path

BARE = """
import sys
import numpy
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QWidget
class Bare(QWidget):
    def paintEvent(self, event):
        QTimer.singleShot(0, app.quit)
app = QApplication(sys.argv)
window = Bare()
window.resize(1440, 900)
window.show()
app.exec()
"""
OURS = "import sys; from blendapp.desk.start import run; sys.exit(run(sys.argv[1:]))"


def seconds(code: str, arguments: list[str], measure: str = "") -> float:
    """Seconds from before the process is made until it has ended."""
    environment = {**os.environ, "BLENDAPP_MEASURE_START": measure}
    environment.setdefault("QT_QPA_PLATFORM", "offscreen")
    begun = time.perf_counter()
    subprocess.run([sys.executable, "-c", code, *arguments], check=True, env=environment, capture_output=True)
    return time.perf_counter() - begun


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--runs", type=int, default=15)
    parser.add_argument("--mill", type=Path, default=None, help="a mill file; without it only the first paint is timed")
    asked = parser.parse_args()
    paint_ratios, bare_all, paint_all, ready_all = [], [], [], []
    seconds(BARE, [])
    seconds(OURS, [], "painted")
    for _run in range(asked.runs):
        bare = seconds(BARE, [])
        paint = seconds(OURS, [], "painted")
        bare_all.append(bare)
        paint_all.append(paint)
        paint_ratios.append(paint / bare)
        if asked.mill is not None:
            ready_all.append(seconds(OURS, [str(asked.mill)], "ready"))
    print(f"bare window with numpy: median {statistics.median(bare_all) * 1000:.0f} ms")
    print(f"first paint: median {statistics.median(paint_all) * 1000:.0f} ms, "
          f"median of ratios {statistics.median(paint_ratios):.2f} (at most 1.4)")
    if ready_all:
        print(f"sample mill can be edited: median {statistics.median(ready_all) * 1000:.0f} ms")


if __name__ == "__main__":
    main()
