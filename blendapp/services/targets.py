"""Where pages and workbooks may be written: a slip of the finger must not replace a mill file."""

from __future__ import annotations

import os
from pathlib import Path

from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.wording import _

# What every SQLite file begins with; a mill file is one.
_DATABASE = b"SQLite format 3\0"


def refuse_over_a_mill(path: Path) -> None:
    """Raises Refused where a mill file, or another database, stands at the path already."""
    if _is_database(path):
        text = _("A mill file stands here and would be lost; choose another name.")
        raise Refused(Problem(text, Place(file=str(path))))


def _is_database(path: Path) -> bool:
    if not path.is_file():
        return False
    # Closing a file drops the locks that this process holds on it, so that one which may be open here is not opened.
    if path.suffix == ".mill" or os.path.exists(f"{path}-wal"):
        return True
    try:
        with open(path, "rb") as file:
            return file.read(len(_DATABASE)) == _DATABASE
    except OSError:
        return False
