"""The frame of every page: running head, marks across it, the general caution and page n of m at its foot."""

from __future__ import annotations

import io
import math
from collections.abc import Sequence
from dataclasses import dataclass

from reportlab.lib.colors import HexColor
from reportlab.pdfgen.canvas import Canvas

from blendapp.documents import letters
from blendapp.documents.flow import Block, Style, paginate, paragraph
from blendapp.documents.letters import BOLD
from blendapp.documents.paper import MM, Paper
from blendapp.documents.pen import INK, PAPER, SOFT, WASH, Pen
from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.wording import _

MARGIN = 15 * MM
_HEAD = Style(9, ink=SOFT)
_FOOT = Style(8.5, leading=10.5, ink=SOFT)
_BAR = Style(15, BOLD, leading=24)
_BAR_PAD = 10.0


@dataclass(frozen=True)
class Mark:
    """A word across the page. warning: white on black in the bar at the head of the page, else in an outline."""

    text: str
    warning: bool = False


@dataclass(frozen=True)
class Frame:
    """What stands on every page. name and rest make the running head ("name · rest"); the name is cut where it is
    too long, the rest is kept. kind: what sort of page it is."""

    paper: Paper
    title: str
    kind: str
    owner: str
    name: str
    rest: str
    marks: Sequence[Mark] = ()

    @property
    def width(self) -> float:
        """The width for blocks, in points."""
        return self.paper.size_pt[0] - 2 * MARGIN

    @property
    def _page_words_width(self) -> float:
        return letters.width_of(letters.plain(_page_words(888, 888)), _FOOT.font, _FOOT.size) + 18

    def _foot(self) -> list[str]:
        return _FOOT.wrap(_(GENERAL_CAUTION), self.width - self._page_words_width)

    @property
    def _top(self) -> float:
        """Where blocks may begin, from the top of the page."""
        return MARGIN - 12 + _HEAD.line + 12 + (_BAR.line + 10 if self.marks else 0.0)

    @property
    def _foot_top(self) -> float:
        return self.paper.size_pt[1] - MARGIN + 12 - len(self._foot()) * _FOOT.line

    @property
    def height(self) -> float:
        """The height for blocks, in points."""
        return self._foot_top - 14 - self._top

    def draw(self, blocks: Sequence[Block]) -> bytes:
        """The document. The same blocks give the same bytes."""
        return draw_all([(self, blocks)])

    def draw_pages(self, canvas: Canvas, blocks: Sequence[Block]) -> None:
        """The pages of one document on a canvas, numbered from 1."""
        pages = paginate([*self._whole_owner(), *blocks], self.height)
        pen = Pen(canvas, self.paper.size_pt[1])
        for number, page in enumerate(pages, start=1):
            self._draw_across(canvas)
            self._draw_head(pen, number)
            self._draw_foot(pen, number, len(pages))
            for placed in page:
                placed.block.draw(pen, MARGIN, self._top + placed.top)
            canvas.showPage()

    def _whole_owner(self) -> list[Block]:
        """The owner's name once more, where the head of the first page is too short for it."""
        kind = letters.width_of(letters.plain(self.kind), _HEAD.font, _HEAD.size)
        if _HEAD.width(self.owner) <= self.width - kind - 16:
            return []
        return paragraph(self.owner, _HEAD, self.width)

    def _draw_head(self, pen: Pen, number: int) -> None:
        top = MARGIN - 12
        left, right = MARGIN, MARGIN + self.width
        kind = letters.shortened(self.kind, _HEAD.font, _HEAD.size, self.width * 0.35)
        kind_width = letters.width_of(kind, _HEAD.font, _HEAD.size)
        pen.text_right(right, top, kind, _HEAD)
        space = self.width - kind_width - 16
        words = self._owner_words() if number == 1 else self._running_words(space)
        pen.text(left, top, letters.shortened(words, _HEAD.font, _HEAD.size, space), _HEAD)
        pen.rule(left, right, top + _HEAD.line + 3, 0.6)
        if self.marks:
            self._draw_bar(pen, top + _HEAD.line + 12)

    def _owner_words(self) -> str:
        return self.owner or "blendapp"

    def _running_words(self, width: float) -> str:
        """Formula, version and number, the formula's name cut where they would not fit."""
        rest = " · " + letters.plain(self.rest) if self.rest else ""
        space = width - letters.width_of(rest, _HEAD.font, _HEAD.size)
        return letters.shortened(self.name, _HEAD.font, _HEAD.size, max(space, width * 0.3)) + rest

    def _draw_bar(self, pen: Pen, top: float) -> None:
        """The marks in a row at the head of the page, in full black, so that no copier can lose them."""
        widths = [_BAR.width(mark.text) + 2 * _BAR_PAD for mark in self.marks]
        shrink = min(1.0, (self.width - 8 * (len(widths) - 1)) / sum(widths))
        left = MARGIN
        for mark, width in zip(self.marks, widths, strict=True):
            style = Style(_BAR.size * shrink, BOLD, _BAR.line, PAPER if mark.warning else INK)
            pen.box(left, top, width * shrink, _BAR.line, filled=mark.warning)
            pen.text_middle(left + width * shrink / 2, top, letters.plain(mark.text), style)
            left += width * shrink + 8

    def _draw_across(self, canvas: Canvas) -> None:
        """The marks in pale grey from corner to corner, under all else: text over them keeps its contrast."""
        if not self.marks:
            return
        width, height = self.paper.size_pt
        texts = [letters.plain(mark.text) for mark in self.marks]
        widest = max(letters.width_of(text, BOLD, 1.0) for text in texts)
        size = min(0.68 * math.hypot(width, height) / widest, 150.0, 300.0 / len(texts))
        canvas.saveState()
        canvas.translate(width / 2, height / 2)
        canvas.rotate(math.degrees(math.atan2(height, width)))
        canvas.setFillColor(HexColor(WASH))
        canvas.setFont(BOLD, size)
        for place, text in enumerate(texts):
            y = ((len(texts) - 1) / 2 - place) * size * 1.1 - size * 0.35
            canvas.drawCentredString(0, y, text)
        canvas.restoreState()

    def _draw_foot(self, pen: Pen, number: int, of: int) -> None:
        top = self._foot_top
        left, right = MARGIN, MARGIN + self.width
        pen.rule(left, right, top - 4, 0.6)
        for place, line in enumerate(self._foot()):
            pen.text(left, top + place * _FOOT.line, line, _FOOT)
        pen.text_right(right, top, letters.plain(_page_words(number, of)), _FOOT)


def draw_all(documents: Sequence[tuple[Frame, Sequence[Block]]]) -> bytes:
    """Several documents of one paper in one file, under the title of the first, each with its own numbers of pages."""
    first = documents[0][0]
    out = io.BytesIO()
    canvas = Canvas(out, pagesize=first.paper.size_pt, invariant=1, pageCompression=1)
    canvas.setTitle(first.title)
    canvas.setCreator("blendapp")
    canvas.setAuthor(first.owner or "blendapp")
    for frame, blocks in documents:
        frame.draw_pages(canvas, blocks)
    canvas.save()
    return out.getvalue()


def _page_words(number: int, of: int) -> str:
    return _("Page {number} of {count}").format(number=number, count=of)
