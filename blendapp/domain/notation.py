"""How a person writes numbers: the decimal sign and the grouping sign of a locale, read and written."""

from __future__ import annotations

import math
from dataclasses import dataclass

from blendapp.domain.wording import _

_SPACES = "\u00a0\u202f\u2009 "


@dataclass(frozen=True)
class Notation:
    """Decimal and grouping signs. Grouping "" writes none; when read, spaces and the sign given are taken.

    minus: as shown, for example the true minus sign; what an editor opens with has the plain one, which files know.
    """

    decimal: str = "."
    grouping: str = ""
    minus: str = "-"

    def write(self, value: float | None, decimals: int) -> str:
        """A number with a fixed count of decimals; None is the empty text. A rounded -0 is written 0."""
        if value is None:
            return ""
        text = f"{value:,.{decimals}f}"
        if text.startswith("-") and not text.strip("-0.,"):
            text = text[1:]
        text = text.replace(",", "\x00").replace(".", self.decimal).replace("\x00", self.grouping)
        return text.replace("-", self.minus)

    def write_short(self, value: float | None, most_decimals: int = 6) -> str:
        """A number without trailing zeros, as a person would type it."""
        if value is None:
            return ""
        text = f"{value:.{most_decimals}f}" if abs(value) < 1e15 else f"{value:g}"
        if "." in text and "e" not in text:
            text = text.rstrip("0").rstrip(".")
        if value != 0 and float(text) == 0:
            text = f"{value:.3g}"
        if text == "-0":
            text = "0"
        return text.replace(".", self.decimal).replace("-", self.minus)

    def write_exact(self, value: float | None) -> str:
        """The shortest text that reads back as the very same number: what an editor opens with."""
        if value is None:
            return ""
        text = repr(value + 0.0).removesuffix(".0")
        mantissa, e, exponent = text.partition("e")
        if e and -7 < int(exponent) < 0:
            text = f"{value:.{len(mantissa.lstrip('-').replace('.', '')) - 1 - int(exponent)}f}"
        return text.replace(".", self.decimal)

    def read(self, text: str) -> float:
        """The number in a typed text.

        Raises ValueError with one sentence for the person if it is not a number in this notation. Grouping is
        taken only in groups of three after a digit other than 0, so that 12,5 is never read as 125 nor 0,950 as 950.
        """
        plain = text.strip().replace("\u2212", "-")
        for space in _SPACES:
            plain = plain.replace(space, " ")
        other = "," if self.decimal == "." else "."
        whole, sign, fraction = plain.partition(self.decimal)
        for group in (" ", "'", other):
            if group in whole:
                head, *rest = whole.lstrip("+-").split(group)
                fits = head.isdigit() and len(head) <= 3 and all(len(r) == 3 and r.isdigit() for r in rest)
                if not fits or head.startswith("0"):
                    raise ValueError(self._refusal(text))
                whole = whole.replace(group, "")
                break
        candidate = whole + ("." + fraction if sign else "")
        if other in candidate.replace(".", "", 1) and other != ".":
            raise ValueError(self._refusal(text))
        if not _is_plain_number(candidate):
            raise ValueError(self._refusal(text))
        value = float(candidate)
        if not math.isfinite(value):
            raise ValueError(self._refusal(text))
        return value

    def _refusal(self, text: str) -> str:
        return _("“{text}” is not a number here; write it like {example}.").format(
            text=text.strip(), example="1234" + self.decimal + "5"
        )


def _is_plain_number(text: str) -> bool:
    if not text or not text.isascii() or any(c in text for c in "_ "):
        return False
    try:
        float(text)
    except ValueError:
        return False
    return any(c.isdigit() for c in text)


PLAIN = Notation()
COMMA = Notation(decimal=",")

_in_use = PLAIN


def notation() -> Notation:
    """The notation in use on screens and pages; files and JSON never ask it."""
    return _in_use


def use_notation(chosen: Notation) -> None:
    """Take a notation, once, when the program starts or the person changes language."""
    global _in_use
    _in_use = chosen
