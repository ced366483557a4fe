"""Cells of a workbook that stay what they are, and a file that is written whole or not at all."""

from __future__ import annotations

import os
import re
import tempfile
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path
from typing import TYPE_CHECKING, BinaryIO

from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.wording import _

if TYPE_CHECKING:
    from openpyxl.cell.cell import Cell

LONGEST_TEXT = 32_767  # of one cell, a limit of the format
# What a spreadsheet would take for the beginning of a formula.
MARKED_AS_TEXT = ("=", "+", "-", "@")
# What XML cannot hold, and text that would be taken for the escape of it (ISO/IEC 29500, ST_Xstring).
_UNWRITABLE = re.compile("[\x00-\x08\x0b-\x0d\x0e-\x1f\ufffe\uffff]|_(?=x[0-9A-Fa-f]{4}_)")


def fill_text(cell: Cell, text: str) -> None:
    """A text that stays one: never a formula, an error or a date, whatever it begins with."""
    cell.value = _UNWRITABLE.sub(lambda found: f"_x{ord(found[0]):04X}_", text)
    cell.data_type = "s"
    if text.startswith(MARKED_AS_TEXT):
        cell.quotePrefix = True  # so that it is still a text after somebody has edited the cell


def fill_number(cell: Cell, value: float) -> None:
    """A number that reads back as the very same: written by hand, since the library rounds to 16 digits."""
    cell.value = str(int(value)) if value == int(value) and abs(value) < 1e15 else repr(float(value))
    cell.data_type = "n"


def replace_file(path: Path, write: Callable[[BinaryIO], object]) -> None:
    """Have a file written beside its place and put into it when it is whole.

    Raises Refused if that cannot be; an older file then stays.
    """
    temporary = ""
    try:
        if path.is_dir():
            raise IsADirectoryError(0, _("it is a folder"))
        handle, temporary = tempfile.mkstemp(".part", f".{path.name[:80]}.", path.parent)
        with os.fdopen(handle, "wb") as stream:
            write(stream)
            stream.flush()
            os.fsync(stream.fileno())
        os.chmod(temporary, _mode_of(path))
        os.replace(temporary, path)
    except OSError as error:
        if temporary:
            with suppress(OSError):
                os.unlink(temporary)
        text = _("The file cannot be written: {reason}. Choose another place, or close it where it is open.")
        raise Refused(Problem(text.format(reason=error.strerror or error), Place(file=path.name))) from None


def _mode_of(path: Path) -> int:
    """Permissions of the file in the place, or those that a new file gets."""
    with suppress(OSError):
        return path.stat().st_mode & 0o777
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask
