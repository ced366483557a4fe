"""Stored values of every sheet of a workbook, from calamine. Runs only in the process that parses."""

from __future__ import annotations

import io
from typing import Any

# Name, whether it is visible, and rows of cells; a blank cell is an empty text.
StoredSheet = tuple[str, bool, list[list[Any]]]


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
