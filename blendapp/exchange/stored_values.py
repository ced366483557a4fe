"""Stored values of every sheet of a workbook, from calamine; run as a script, in a process of its own.

As a script it takes the file on standard input and the most bytes of memory that it may use as its argument, and gives
the sheets, pickled, on standard output. It imports nothing of the program, so that it starts at once.
"""

from __future__ import annotations

import io
import pickle
import sys
from contextlib import suppress
from typing import Any

# Name, whether it is visible, and rows of cells; a blank cell is an empty text.
StoredSheet = tuple[str, bool, list[list[Any]]]

# Exit statuses of the script.
BROKEN, LOCKED = 1, 3


def stored_values(data: bytes) -> list[StoredSheet]:
    """Every worksheet in its order. Raises whatever a broken file makes the parser raise, its panics included."""
    import python_calamine

    found: list[StoredSheet] = []
    with python_calamine.load_workbook(io.BytesIO(data)) as workbook:
        for sheet in workbook.sheets_metadata:
            if sheet.typ == python_calamine.SheetTypeEnum.WorkSheet:
                visible = sheet.visible == python_calamine.SheetVisibleEnum.Visible
                rows = workbook.get_sheet_by_name(sheet.name).to_python(skip_empty_area=False)
                found.append((sheet.name, visible, rows))
    return found


def main() -> None:
    with suppress(ImportError, ValueError, OSError):  # not every system can limit a process
        import resource

        limit = int(sys.argv[1])
        resource.setrlimit(resource.RLIMIT_AS, (limit, limit))
        resource.setrlimit(resource.RLIMIT_CORE, (0, 0))
    try:
        found = stored_values(sys.stdin.buffer.read())
    except BaseException as error:  # a broken file makes the parser raise anything, its own panics included
        sys.exit(LOCKED if type(error).__name__ == "PasswordError" else BROKEN)
    pickle.dump(found, sys.stdout.buffer)


if __name__ == "__main__":
    main()
