"""What stands where on a page, read back from the PDF."""

from __future__ import annotations

import ctypes
from dataclasses import dataclass

import pypdfium2
import pypdfium2.raw as raw


@dataclass(frozen=True)
class Piece:
    """One run of text: its box in points from the bottom left, its size; across: turned, as only marks are."""

    page: int
    text: str
    left: float
    bottom: float
    right: float
    top: float
    size: float
    across: bool

    def overlaps(self, other: Piece) -> bool:
        return (
            self.left < other.right - 0.2 and other.left < self.right - 0.2
            and self.bottom < other.top - 0.2 and other.bottom < self.top - 0.2
        )


def pieces(pdf: bytes) -> list[Piece]:
    document = pypdfium2.PdfDocument(pdf)
    found = []
    for number in range(len(document)):
        page = document[number]
        text_page = page.get_textpage()
        for thing in page.get_objects(filter=[raw.FPDF_PAGEOBJ_TEXT]):
            length = raw.FPDFTextObj_GetText(thing, text_page, None, 0)
            buffer = ctypes.create_string_buffer(length)
            raw.FPDFTextObj_GetText(thing, text_page, ctypes.cast(buffer, ctypes.POINTER(ctypes.c_ushort)), length)
            text = buffer.raw.decode("utf-16-le").rstrip("\x00")
            size = ctypes.c_float()
            raw.FPDFTextObj_GetFontSize(thing, size)
            matrix = thing.get_matrix()
            found.append(Piece(number, text, *thing.get_bounds(), size.value, abs(matrix.b) > 1e-6))
    document.close()
    return found


def squeezed(texts: list[str] | str) -> str:
    """Text without white space, so that where a line was broken does not matter."""
    return "".join("".join(texts).split())


@dataclass(frozen=True)
class Rule:
    """A line across the page, in points from the bottom left."""

    page: int
    left: float
    right: float
    y: float


def rules(pdf: bytes) -> list[Rule]:
    """Every level line that is drawn."""
    document = pypdfium2.PdfDocument(pdf)
    found = []
    for number in range(len(document)):
        for thing in document[number].get_objects(filter=[raw.FPDF_PAGEOBJ_PATH]):
            left, bottom, right, top = thing.get_bounds()
            if top - bottom < 3 and right - left > 20:
                found.append(Rule(number, left, right, (top + bottom) / 2))
    document.close()
    return found


def figures_under(pdf: bytes, title: str) -> list[Piece]:
    """What stands right-aligned in the columns of that title: the nearest small text above it at its edge."""
    found = pieces(pdf)
    small = [p for p in found if p.size == 9]
    return [
        p for p in found
        if p.size > 9 and _nearest(title, [s for s in small if abs(s.right - p.right) < 2], p.page, p.top)
    ]


def places_under(pdf: bytes, title: str) -> list[Rule]:
    """The places to write in of the columns of that title."""
    small = [p for p in pieces(pdf) if p.size == 9]
    return [
        rule for rule in rules(pdf)
        if _nearest(title, [s for s in small if abs(s.left - rule.left) < 2], rule.page, rule.y)
    ]


def _nearest(title: str, aligned: list[Piece], page: int, below: float) -> bool:
    above = [s for s in aligned if s.page == page and s.bottom > below]
    return bool(above) and min(above, key=lambda s: s.bottom).text.strip() == title
