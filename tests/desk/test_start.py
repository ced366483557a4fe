"""The way into the window: light before the first paint, the mill after it, and nothing left locked."""

from __future__ import annotations

import os
import subprocess
import sys
from pathlib import Path

from PySide6.QtCore import QLocale
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.start import take_locale
from blendapp.desk.table.look import number_look
from blendapp.domain.notation import PLAIN, notation, use_notation
from blendapp.domain.wording import use_language
from blendapp.services.mill import open_mill

HEAVY = ("blendapp.services", "blendapp.optimise", "blendapp.storage", "numpy", "scipy", "pandas", "sqlalchemy",
         "openpyxl", "reportlab")
RUN = "import sys; from blendapp.desk.start import run; sys.exit(run(sys.argv[1:]))"


def run(code: str, *arguments: str, measure: str = "", home: Path) -> subprocess.CompletedProcess[str]:
    environment = {**os.environ, "QT_QPA_PLATFORM": "offscreen", "BLENDAPP_MEASURE_START": measure,
                   "XDG_CONFIG_HOME": str(home)}
    return subprocess.run([sys.executable, "-c", code, *arguments], env=environment, capture_output=True, text=True,
                          timeout=120, check=False)


def test_nothing_slow_is_imported_before_the_first_paint(tmp_path: Path) -> None:
    code = f"import sys, blendapp.desk.start; print([name for name in {HEAVY!r} if name in sys.modules])"
    done = run(code, home=tmp_path)
    assert done.stdout.strip() == "[]", done.stderr


def test_the_window_paints_and_ends(tmp_path: Path) -> None:
    done = run(RUN, measure="painted", home=tmp_path)
    assert done.returncode == 0, done.stderr


def test_the_window_opens_a_mill_and_lets_it_go_when_it_ends(tmp_path: Path, mill_file: Path) -> None:
    done = run(RUN, str(mill_file), measure="ready", home=tmp_path)
    assert done.returncode == 0, done.stderr
    assert "Traceback" not in done.stderr
    mill = open_mill(mill_file)
    assert mill.writable
    mill.close()
    assert sorted(path.name for path in mill_file.parent.glob("Test mill.mill*")) == ["Test mill.mill"]


def test_the_desktop_knows_the_program_by_its_name_and_its_mark(empty_bench: Bench) -> None:
    app = QApplication.instance()
    assert isinstance(app, QApplication)
    assert app.desktopFileName() == "blendapp"
    image = app.windowIcon().pixmap(64, 64).toImage()
    assert len({image.pixel(x, y) for x in range(64) for y in range(64)}) > 4


def test_the_window_shows_a_true_minus_sign_and_types_the_plain_one() -> None:
    try:
        take_locale(QLocale(QLocale.Language.English))
        cell = number_look(-12.5, 1)
        assert (cell.text, cell.typed) == ("\u221212.5", "-12.5")
        assert notation().write_short(-1.5) == "\u22121.5"
        assert notation().read(cell.text) == notation().read(cell.typed) == -12.5
    finally:
        use_notation(PLAIN)
        use_language(None)
