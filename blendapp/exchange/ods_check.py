"""A look at an OpenDocument sheet before it is opened: whether it is sound, and how far its cells would spread."""

from __future__ import annotations

from blendapp.exchange.xlsx_scan import careful_parser

GREATEST_FILLED = 5_000_000
_TABLE = "urn:oasis:names:tc:opendocument:xmlns:table:1.0 "
_OFFICE = "urn:oasis:names:tc:opendocument:xmlns:office:1.0 "


class SpreadsTooFar(Exception):
    """Filled cells are repeated, or stand so far out, that no memory would hold the sheet."""


class _Sheet:
    """Follows rows and cells; a blank cell may repeat as often as it likes, a filled one may not."""

    def __init__(self) -> None:
        self.rows = self.repeated = self.column = self.last_column = 0
        self.widest = 0

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        if tag == _TABLE + "table":
            self.rows = self.widest = 0
        elif tag == _TABLE + "table-row":
            self.repeated = _count(attributes.get(_TABLE + "number-rows-repeated"))
            self.column = self.last_column = 0
        elif tag in (_TABLE + "table-cell", _TABLE + "covered-table-cell"):
            self.column += _count(attributes.get(_TABLE + "number-columns-repeated"))
            if _OFFICE + "value-type" in attributes or _TABLE + "formula" in attributes:
                self.last_column = self.column

    def end(self, tag: str) -> None:
        if tag != _TABLE + "table-row":
            return
        self.rows += self.repeated
        if self.last_column:
            self.widest = max(self.widest, self.last_column)
            if self.rows * self.widest > GREATEST_FILLED:
                raise SpreadsTooFar


def _count(text: str | None) -> int:
    return int(text) if text and text.isascii() and text.isdigit() else 1


def check_content(content: bytes) -> None:
    """Raises expat.ExpatError, xlsx_scan.ForbiddenEntities or SpreadsTooFar for content that must not be opened."""
    sheet = _Sheet()
    parser = careful_parser(namespaces=True)
    parser.StartElementHandler = sheet.start
    parser.EndElementHandler = sheet.end
    parser.Parse(content, True)


