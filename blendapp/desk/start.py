"""The way into the window: paint the frame, then fetch the slow rooms on a thread, then open the mill.

Nothing that is imported here, directly or not, may import services or a library that takes long.
"""

from __future__ import annotations

import os
import sys
import threading
from collections.abc import Sequence
from typing import Any

from PySide6.QtCore import QLocale, QObject, QSettings, Signal
from PySide6.QtWidgets import QApplication

from blendapp.desk.shell.frame import Frame
from blendapp.desk.shell.icon import window_icon
from blendapp.desk.theme import dress, follow_system, load_fonts
from blendapp.domain.notation import Notation, use_notation
from blendapp.domain.wording import use_language

# When this is "painted" or "ready", the program ends as soon as it is that far; the benchmark of the start sets it.
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
    """Take the language of a locale, and its decimal sign, without grouping. Figures have a true minus sign."""
    use_language(locale.name())
    use_notation(Notation(decimal="," if locale.decimalPoint() == "," else ".", minus="\u2212"))


def make_app(argv: Sequence[str]) -> QApplication:
    """The Qt application with the program's fonts and look."""
    app = QApplication.instance()
    if not isinstance(app, QApplication):
        app = QApplication(list(argv))
    app.setApplicationName("blendapp")
    app.setApplicationDisplayName("blendapp")
    app.setDesktopFileName("blendapp")
    app.setWindowIcon(window_icon())
    load_fonts()
    dress(app, dark=_chosen_scheme())
    follow_system(app)
    return app


def _chosen_scheme() -> bool | None:
    """The scheme that was set by hand, None to follow the system."""
    return {"1": True, "0": False}.get(str(QSettings("blendapp", "blendapp").value("dark", "")))


def run(paths: Sequence[str] = ()) -> int:
    """Open the window, on a mill file where one is given; returns the exit status."""
    take_locale(QLocale())
    app = make_app(sys.argv[:1])
    frame = Frame()
    measured = os.environ.get(MEASURE, "")
    fetch = _Fetch()
    opened: list[Any] = []

    def painted() -> None:
        if measured.startswith("painted"):
            app.quit()
            return
        fetch.begin()

    def fetched() -> None:
        from blendapp.desk.bench import Bench

        bench = Bench(frame)
        opened.append(bench)
        sys.excepthook = bench.tell_of_fault
        bench.start(paths[0] if paths else None)
        if measured.startswith("ready"):
            app.quit()

    frame.painted.connect(painted)
    fetch.done.connect(fetched)
    frame.show()
    status = app.exec()
    for bench in opened:
        bench.close()
    return status
