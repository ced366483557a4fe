"""Whom a list is from, where nobody has said: by its file name, else by its title, else by its folder."""

from __future__ import annotations

import re
from collections.abc import Iterable
from pathlib import Path

from blendapp.domain.list_rows import source_of
from blendapp.domain.wording import _
from blendapp.exchange.tables import CellKind, RawTable, kind_of

# Words that any mill's lists bear: a name of nothing else says nothing of who wrote it.
_OF_ANYBODY = frozenset({
    "price", "prices", "pricing", "pricelist", "list", "lists", "sheet", "sheets", "book", "workbook", "table",
    "tables", "quote", "quotes", "quotation", "quotations", "offer", "offers", "feed", "feeds", "ingredient",
    "ingredients", "commodity", "commodities", "grain", "grains", "product", "products", "weekly", "daily", "monthly",
    "week", "month", "today", "current", "latest", "update", "updated", "export", "import", "data", "file", "files",
    "document", "documents", "unnamed", "untitled", "report", "analysis", "analyses", "results", "result", "sample",
    "samples", "lab", "xls", "xlsx", "csv", "ods", "txt", "of", "for", "the", "and", "in", "from", "our", "all",
    "january", "february", "march", "april", "may", "june", "july", "august", "september", "october", "november",
    "december",
})
_FOLDERS_OF_ANYBODY = frozenset({
    "downloads", "download", "desktop", "home", "users", "user", "mail", "email", "attachments", "attachment", "inbox",
    "temp", "tmp", "work", "excel", "folder", "new", "shared", "public", "mill", "blendapp",
})
# What companies of the trade are called; common practice, no source.
_COMPANY = re.compile(
    r"\b(?:ltd|limited|inc|llc|llp|plc|gmbh|pty|sarl|corp|corporation|company|co-?op|co-?operative|bros|brothers|sons|"
    r"traders|trading|brokers?|brokerage|merchants|mills?|milling|terminal|elevators?|grain|laborator(?:y|ies))\b",
    re.IGNORECASE,
)
_TITLE_ROWS = 12


def find_source(path: Path, tables: Iterable[RawTable]) -> tuple[str, str]:
    """Whom the answers of a list are remembered for, and a note where the file name does not tell; "" where it does."""
    by_name = source_of(path.name)
    if _says_something(by_name):
        return by_name, ""
    title = next((found for table in tables for found in _titles(table)), "")
    if title:
        text = _("The file name does not say whom the list is from; after its title, answers are kept for “{source}”.")
        return title, text.format(source=title)
    folder = source_of(path.absolute().parent.name)
    if _says_something(folder, _FOLDERS_OF_ANYBODY):
        text = _("The file name does not say whom the list is from; after its folder, answers are kept for “{source}”.")
        return folder, text.format(source=folder)
    text = _("Nothing says whom the list is from; answers are kept for “{source}”, as for every file of that name.")
    return by_name, text.format(source=by_name)


def _says_something(source: str, more: frozenset[str] = frozenset()) -> bool:
    words = re.findall(r"[^\W\d_]+", source)
    return any(word not in _OF_ANYBODY and word not in more for word in words)


def _titles(table: RawTable) -> Iterable[str]:
    """Names of companies in the rows above a table, without what they say of prices and days."""
    for cells in table.rows[:_TITLE_ROWS]:
        filled = [value for value in cells if kind_of(value) is not CellKind.BLANK]
        if len(filled) > 2:  # the headings, or the table itself
            return
        for value in filled:
            if not isinstance(value, str) or not _COMPANY.search(value):
                continue
            part = next(part for part in re.split(r"\s[-–—|]\s|[:;,]\s", value) if _COMPANY.search(part))
            words = source_of(part).split()
            name = [word for word in words if word not in _OF_ANYBODY or _COMPANY.fullmatch(word)]
            if len(name) > 1 and len(name) <= 6 and _says_something(" ".join(name)):
                yield " ".join(name)
