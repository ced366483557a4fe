"""The way into the window: paint the frame, then fetch the slow rooms on a thread, then open the mill.

Nothing that is imported here, directly or not, may import services or a library that takes long.
"""

from __future__ import annotations

import os
import sys
import threading
import time
from collections.abc import Sequence

from PySide6.QtCore import QLocale, QObject, Signal
from PySide6.QtWidgets import QApplication

from blendapp.desk.shell.frame import Frame
from blendapp.desk.theme import dress, follow_system, load_fonts
from blendapp.domain.notation import Notation, use_notation

# When set, the program prints the seconds since this clock reading of time.time() until "painted" or "ready", and ends.
MEASURE = "BLENDAPP_MEASURE_START"


class _Fetch(QObject):
    """Imports the rooms behind the desk on a thread, so that the window never waits for them."""

    done = Signal()

    def begin(self) -> None:
        threading.Thread(target=self._run, daemon=True, name="fetch").start()

    def _run(self) -> None:
        import blendapp.desk.bench  # noqa: F401 - imported for its time, used by the window's thread afterwards

        self.done.emit()


def take_locale(locale: QLocale) -> None:
    """Read and write numbers as a locale does: its decimal sign, without grouping."""
    use_notation(Notation(decimal="," if locale.decimalPoint() == "," else "."))


def make_app(argv: Sequence[str]) -> QApplication:
    """The Qt application with the program's fonts and look."""
    app = QApplication.instance()
    if not isinstance(app, QApplication):
        app = QApplication(list(argv))
    app.setApplicationName("blendapp")
    app.setApplicationDisplayName("blendapp")
    load_fonts()
    dress(app)
    follow_system(app)
    return app


def run(paths: Sequence[str] = ()) -> int:
    """Open the window, on a mill file where one is given; returns the exit status."""
    take_locale(QLocale())
    app = make_app(sys.argv[:1])
    frame = Frame()
    measured = os.environ.get(MEASURE, "")
    fetch = _Fetch()

    def painted() -> None:
        if measured.startswith("painted"):
            _tell(app, measured)
            return
        fetch.begin()

    def fetched() -> None:
        from blendapp.desk.bench import Bench

        frame.bench_object = Bench(frame)  # type: ignore[attr-defined]
        frame.bench_object.start(paths[0] if paths else None)  # type: ignore[attr-defined]
        if measured.startswith("ready"):
            _tell(app, measured)

    frame.painted.connect(painted)
    fetch.done.connect(fetched)
    frame.show()
    return app.exec()


def _tell(app: QApplication, measured: str) -> None:
    begun = float(measured.partition(" ")[2] or "nan")
    sys.stdout.write(f"{time.time() - begun:.4f}\n")
    sys.stdout.flush()
    app.quit()
