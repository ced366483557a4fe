"""Other people's tables: the exchange workbook, price lists, lists of analyses. Slow libraries are fetched late."""

from __future__ import annotations

from typing import TYPE_CHECKING

if TYPE_CHECKING:  # the process that parses foreign files imports this room and shall start at once
    import datetime
    from collections.abc import Mapping, Sequence
    from pathlib import Path

    from blendapp.domain.composition_rows import CompositionReading
    from blendapp.domain.library import Library
    from blendapp.domain.list_rows import Answer
    from blendapp.domain.price_rows import PriceListReading
    from blendapp.domain.problems import Problem
    from blendapp.exchange.workbook_read import WorkbookReading


def read_workbook(
    path: str | Path, library: Library, next_ids: Mapping[str, int], today: datetime.date
) -> WorkbookReading:
    """See workbook_read.read_workbook."""
    from blendapp.exchange.workbook_read import read_workbook as read

    return read(path, library, next_ids, today)


def write_workbook(path: str | Path, library: Library, today: datetime.date) -> list[Problem]:
    """See workbook_write.write_workbook."""
    from blendapp.exchange.workbook_write import write_workbook as write

    return write(path, library, today)


def read_price_list(
    path: str | Path, library: Library, today: datetime.date, sheet: str | None = None,
    answers: Sequence[Answer] = (), source: str = "",
) -> PriceListReading:
    """See price_list.read_price_list."""
    from blendapp.exchange.price_list import read_price_list as read

    return read(path, library, today, sheet, answers, source)


def read_composition_list(
    path: str | Path, library: Library, today: datetime.date, sheet: str | None = None,
    answers: Sequence[Answer] = (), source: str = "",
) -> CompositionReading:
    """See composition_list.read_composition_list."""
    from blendapp.exchange.composition_list import read_composition_list as read

    return read(path, library, today, sheet, answers, source)
