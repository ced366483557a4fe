"""What the styles of an .xlsx file say of its cells: number formats that tell something, and what is struck through."""

from __future__ import annotations

import re
import zipfile
from dataclasses import dataclass, field

from blendapp.exchange.xlsx_parser import careful_parser

_PERCENT_IDS = {"9": "0%", "10": "0.00%"}


@dataclass
class CellStyles:
    """By the number of a cell style, as the cells of a sheet name it. "0" is the style of a cell that names none.

    formats: number formats that the file spells out, and percentages. struck: styles whose font is struck through.
    """

    formats: dict[str, str] = field(default_factory=dict)
    struck: set[str] = field(default_factory=set)

    @property
    def telling(self) -> frozenset[str]:
        return frozenset(self.formats) | frozenset(self.struck)


def read_styles(archive: zipfile.ZipFile) -> CellStyles:
    """The styles of a workbook; none where it has no such part. Raises ForbiddenEntities, expat.ExpatError."""
    try:
        data = archive.read("xl/styles.xml")
    except KeyError:
        return CellStyles()
    reading = _Reading()
    parser = careful_parser()
    parser.StartElementHandler = reading.start
    parser.EndElementHandler = reading.end
    parser.Parse(data, True)
    return reading.styles


def is_set(attributes: dict[str, str]) -> bool:
    """Whether a property that is on where it stands alone is not switched off."""
    return attributes.get("val", "1") not in ("0", "false")


def read_struck_texts(data: bytes) -> set[int]:
    """Which of the shared texts of a workbook, from 0, hold words that are struck through.

    Raises ForbiddenEntities, expat.ExpatError.
    """
    struck: set[int] = set()
    texts = 0

    def start(tag: str, attributes: dict[str, str]) -> None:
        nonlocal texts
        tag = tag.rpartition(":")[2]
        if tag == "si":
            texts += 1
        elif tag == "strike" and is_set(attributes):
            struck.add(texts - 1)

    parser = careful_parser()
    if b"strike" in data:
        parser.StartElementHandler = start
    parser.Parse(data, True)
    return struck


class _Reading:
    def __init__(self) -> None:
        self.styles = CellStyles()
        self.codes: dict[str, str] = {}
        self.font, self.style = -1, -1
        self.struck_fonts: set[str] = set()
        self.inside: list[str] = []

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        tag = tag.rpartition(":")[2]
        above = self.inside[-1] if self.inside else ""
        self.inside.append(tag)
        if tag == "numFmt" and above == "numFmts":
            self.codes[attributes.get("numFmtId", "")] = attributes.get("formatCode", "")
        elif tag == "font" and above == "fonts":
            self.font += 1
        elif tag == "strike" and above == "font" and is_set(attributes):
            self.struck_fonts.add(str(self.font))
        elif tag == "xf" and above == "cellXfs":
            self.style += 1
            self._take(str(self.style), attributes)

    def end(self, _tag: str) -> None:
        self.inside.pop()

    def _take(self, style: str, attributes: dict[str, str]) -> None:
        number = attributes.get("numFmtId", "0")
        code = self.codes.get(number) or _PERCENT_IDS.get(number, "")
        if code and (shows_percent(code) or _PRINTS_WORDS.search(code)):
            self.styles.formats[style] = code
        if attributes.get("fontId", "0") in self.struck_fonts:
            self.styles.struck.add(style)


# A format that prints a sign, a code or a word beside the number; built-in ones depend on where the file is opened.
_PRINTS_WORDS = re.compile(r'["$\\\[]|[^\x00-\x7f]')


def shows_percent(number_format: str) -> bool:
    """Whether a format shows 0.12 as 12 %; a percent sign in quotes or behind a backslash is only printed."""
    return "%" in re.sub(r'"[^"]*"|\\.', "", number_format)
