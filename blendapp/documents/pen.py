"""A pen on one page: points from the left and from the top. Black and dark grey, so that any printer holds it."""

from __future__ import annotations

from typing import TYPE_CHECKING, Protocol

from reportlab.lib.colors import HexColor

from blendapp.documents.letters import width_of

if TYPE_CHECKING:
    from reportlab.pdfgen.canvas import Canvas

INK = "#000000"
SOFT = "#333333"
LINE = "#444444"
WASH = "#e4e4e4"
PAPER = "#ffffff"


class TextStyle(Protocol):
    @property
    def size(self) -> float: ...
    @property
    def font(self) -> str: ...
    @property
    def line(self) -> float: ...
    @property
    def ink(self) -> str: ...


class Pen:
    """Draws on a canvas of a page `height` points high."""

    def __init__(self, canvas: Canvas, height: float) -> None:
        self.canvas = canvas
        self.height = height

    def text(self, left: float, top: float, text: str, style: TextStyle) -> None:
        """One line whose line box begins at `top`; `text` is plain (letters.plain)."""
        self._write(left, self._baseline(top, style), text, style)

    def text_right(self, right: float, top: float, text: str, style: TextStyle) -> None:
        self._write(right - width_of(text, style.font, style.size), self._baseline(top, style), text, style)

    def text_middle(self, middle: float, top: float, text: str, style: TextStyle) -> None:
        self._write(middle - width_of(text, style.font, style.size) / 2, self._baseline(top, style), text, style)

    def _baseline(self, top: float, style: TextStyle) -> float:
        # The letters of Plex reach 0.78 above and 0.22 below the line, of their size.
        return top + (style.line - style.size) / 2 + style.size * 0.78

    def _write(self, left: float, baseline: float, text: str, style: TextStyle) -> None:
        if text:
            self.canvas.setFillColor(HexColor(style.ink))
            self.canvas.setFont(style.font, style.size)
            self.canvas.drawString(left, self.height - baseline, text)

    def rule(self, left: float, right: float, y: float, weight: float = 0.5, ink: str = LINE) -> None:
        """A line across."""
        self.canvas.setStrokeColor(HexColor(ink))
        self.canvas.setLineWidth(weight)
        self.canvas.line(left, self.height - y, right, self.height - y)

    def upright(self, x: float, top: float, bottom: float, weight: float = 0.5, ink: str = LINE) -> None:
        """A line down."""
        self.canvas.setStrokeColor(HexColor(ink))
        self.canvas.setLineWidth(weight)
        self.canvas.line(x, self.height - top, x, self.height - bottom)

    def box(self, left: float, top: float, width: float, height: float, *, filled: bool = False) -> None:
        """A black box, or the outline of one."""
        self.canvas.setStrokeColor(HexColor(INK))
        self.canvas.setFillColor(HexColor(INK))
        self.canvas.setLineWidth(1)
        self.canvas.rect(left, self.height - top - height, width, height, stroke=1, fill=1 if filled else 0)

    def outline(self, left: float, top: float, width: float, height: float) -> None:
        """A box to tick: white inside, so that what is under it does not fill it."""
        self.canvas.setStrokeColor(HexColor(INK))
        self.canvas.setFillColor(HexColor(PAPER))
        self.canvas.setLineWidth(1)
        self.canvas.rect(left, self.height - top - height, width, height, stroke=1, fill=1)
