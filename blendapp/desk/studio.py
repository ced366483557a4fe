"""Brings the window to rest and photographs it, for the pictures of every screen."""

from __future__ import annotations

import time
from collections.abc import Callable
from pathlib import Path

from PySide6.QtWidgets import QWidget

from blendapp.desk.start import make_app
from blendapp.desk.theme import dress

WAIT_S = 20.0


class Studio:
    """Takes pictures of one window, light and dark."""

    def __init__(self, out_dir: Path, scale: int) -> None:
        self.app = make_app(["blendapp"])
        self.out_dir = out_dir
        self.scale = scale

    def settle(self, until: Callable[[], bool] = lambda: True) -> None:
        """Let the window come to rest."""
        end = time.monotonic() + WAIT_S
        for _turn in range(3):
            self.app.processEvents()
        while not until() and time.monotonic() < end:
            self.app.processEvents()
            time.sleep(0.01)
        self.app.processEvents()

    def take(self, widget: QWidget, name: str) -> None:
        """One picture in each scheme."""
        for dark, scheme in ((False, "light"), (True, "dark")):
            dress(self.app, dark=dark)
            self.settle()
            widget.grab().save(str(self.out_dir / f"{name}-{scheme}-{self.scale}00.png"))
