"""Letters: the embedded fonts, what they can write, and lines that fit a width.

IBM Plex Sans has figures of equal width by default, so columns of numbers stand under each other.
"""

from __future__ import annotations

import re
import unicodedata
from functools import cache
from pathlib import Path

from reportlab.pdfbase import pdfmetrics
from reportlab.pdfbase.ttfonts import TTFont

REGULAR = "Page"
BOLD = "PageBold"
ITALIC = "PageItalic"

_FILES = {REGULAR: "IBMPlexSans-Regular.ttf", BOLD: "IBMPlexSans-SemiBold.ttf", ITALIC: "IBMPlexSans-Italic.ttf"}
# Every run of white space but those that keep a figure and its unit on one line.
_SPACES = re.compile("[^\\S\u00a0\u202f]+")
_UNITS = frozenset(("%", "kg", "g", "mg", "t", "l", "lb"))
_FOLDER = Path(__file__).resolve().parent.parent / "fonts"


@cache
def _letters() -> frozenset[int]:
    """The characters that every font of the page has; loads and registers the fonts."""
    known: set[int] | None = None
    for name, file in _FILES.items():
        font = TTFont(name, str(_FOLDER / file))
        pdfmetrics.registerFont(font)
        own = set(font.face.charToGlyph)
        known = own if known is None else known & own
    return frozenset(known or ())


def plain(text: str) -> str:
    """The text as the page can write it: one space between words (one that joins stays), no invisible signs.

    A character without a letter in the fonts is written by its code in angle quotes, so that two names never look
    alike on paper because both are rows of empty boxes.
    """
    letters = _letters()
    whole = _SPACES.sub(" ", unicodedata.normalize("NFC", text))
    seen = (sign for sign in whole if unicodedata.category(sign) not in ("Cc", "Cf"))
    return "".join(sign if ord(sign) in letters else f"‹{ord(sign):04X}›" for sign in seen).strip(" ")


def width_of(text: str, font: str, size: float) -> float:
    """The width of a plain text in points."""
    _letters()
    return float(pdfmetrics.stringWidth(text, font, size))


def wrapped(text: str, font: str, size: float, width: float) -> list[str]:
    """The text in lines no wider than `width` points; a word wider than that is cut. At least one line."""
    lines: list[str] = []
    line = ""
    for word in _words(plain(text)):
        candidate = f"{line} {word}" if line else word
        if width_of(candidate, font, size) <= width:
            line = candidate
            continue
        if line:
            lines.append(line)
        while width_of(word, font, size) > width and len(word) > 1:
            cut = _break(word, _fitting(word, font, size, width))
            lines.append(word[:cut])
            word = word[cut:]
        line = word
    return [*lines, line]


def _words(text: str) -> list[str]:
    """The words of a plain text; a unit stays with its figure, as in "Choline chloride 60 %"."""
    words: list[str] = []
    for word in text.split(" "):
        if word in _UNITS and words and words[-1][-1:].isdigit():
            words[-1] += f" {word}"
        else:
            words.append(word)
    return words


def _break(word: str, most: int) -> int:
    """Where to cut a word that is too long: after a hyphen or slash if there is one, else where the line is full."""
    seam = max(word.rfind(sign, 0, most) for sign in "-/+_")
    return seam + 1 if seam >= 3 else most


def shortened(text: str, font: str, size: float, width: float) -> str:
    """The text on one line, its end replaced by an ellipsis where it is wider than `width` points."""
    whole = plain(text)
    if width_of(whole, font, size) <= width:
        return whole
    cut = _fitting(whole, font, size, width - width_of("…", font, size))
    return whole[:cut].rstrip() + "…"


def _fitting(word: str, font: str, size: float, width: float) -> int:
    """How many signs of a word fit, at least one."""
    low, high = 1, len(word)
    while low < high:
        middle = (low + high + 1) // 2
        if width_of(word[:middle], font, size) <= width:
            low = middle
        else:
            high = middle - 1
    return low
