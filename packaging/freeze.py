"""Build blendapp as one folder that needs no Python: `python3 packaging/freeze.py` writes build/frozen/blendapp/.

Works for the system that it runs on, with the versions of packaging/pins.txt and a PyInstaller of its own. Tried on
Debian 12 only.
"""

from __future__ import annotations

import shutil
import sys
from pathlib import Path

from start import PROJECT, Stop, call, install_pins, install_project, make_environment, provide_libraries, say

PYINSTALLER = "pyinstaller==6.22.3"
FROZEN = PROJECT / "build" / "frozen"
# What the program fetches by name while it runs, so that following its imports does not find it.
WHOLE = (
    "blendapp", "alembic", "highspy", "python_calamine", "rapidfuzz", "reportlab", "pypdfium2", "pypdfium2_raw",
)
# In the pinned set for the tests, or reached only by parts of libraries that the program does not use.
LEFT_OUT = ("pytest", "hypothesis", "mypy", "pint", "swiglpk", "tkinter", "IPython", "matplotlib", "setuptools", "pip",
            "PySide6.QtQml", "PySide6.QtQuick")


def freeze(python: Path) -> int:
    """Run PyInstaller; its exit status."""
    options = ["--noconfirm", "--clean", "--onedir", "--name", "blendapp", "--log-level", "WARN",
               "--distpath", str(FROZEN), "--workpath", str(FROZEN / "work"), "--specpath", str(FROZEN / "work"),
               "--icon", str(PROJECT / "packaging" / "blendapp.png")]
    for name in WHOLE:
        options += ["--collect-all", name]
    for name in LEFT_OUT:
        options += ["--exclude-module", name]
    return call([python, "-m", "PyInstaller", *options, str(PROJECT / "blendapp" / "__main__.py")])


def main() -> int:
    try:
        python = make_environment(FROZEN / "environment")
        say("Fetching the pinned packages and PyInstaller")
        install_pins(python)
        install_project(python)
        if call([python, "-m", "pip", "install", "-q", PYINSTALLER]) != 0:
            raise Stop("PyInstaller could not be installed; pip's words above say why.")
        provide_libraries(on_screen=True)  # those found here are carried along
        say("Building; this takes some minutes")
        if freeze(python) != 0:
            raise Stop("PyInstaller failed; its words above say why.")
    except Stop as stop:
        print(stop, file=sys.stderr)
        return 2
    for name in ("LICENSE", "blendapp.desktop", "blendapp.png", "blendapp.svg"):
        shutil.copy(PROJECT / "packaging" / name, FROZEN / "blendapp")
    say(f"The program is in {FROZEN / 'blendapp'}")
    return 0


if __name__ == "__main__":
    sys.exit(main())
