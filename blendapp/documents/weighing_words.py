"""What stands under a line besides its figures: where it is taken from, what it stands for, what it carries."""

from __future__ import annotations

from blendapp.documents import letters
from blendapp.documents.flow import Block, Style, paragraph
from blendapp.documents.letters import BOLD
from blendapp.documents.pen import PAPER, Pen
from blendapp.domain.batches import BatchLine, BatchPage
from blendapp.domain.wording import _

_DETAIL = Style(10, leading=13)
_LOUD = Style(11, BOLD, leading=15)
_TAG = Style(11, BOLD, leading=15, ink=PAPER)
_TAG_PAD = 5.0


def details(line: BatchLine, page: BatchPage) -> list[str]:
    """Sentences under the name. Which bin holds it is true of one batch: only its sheet names them."""
    found = []
    if not line.target_kg:
        return [_("Left out of this batch")]
    if line.bins and page is BatchPage.SHEET:
        found.append(_("From {bins}").format(bins=_(" or ").join(line.bins)))
    if line.rework:
        found.append(_("Rework, at a stated share"))
    if line.of_opened:
        found.append(_("In place of {names}").format(names=", ".join(line.of_opened)))
    if line.fixed:
        found.append(_("Fixed by hand"))
    return found


def is_medicated(line: BatchLine) -> bool:
    return bool(line.drug or line.drug_level or line.drug_species or line.withdrawal)


def medicated(line: BatchLine, width: float, indent: float) -> list[Block]:
    """A black tag with the drug beside it, then level, species and withdrawal as entered; nothing for other lines."""
    if not is_medicated(line):
        return []
    said = [*([_("Level: {text}").format(text=line.drug_level)] if line.drug_level else []), *use(line)]
    blocks = tagged(_("MEDICATED"), line.drug, width, indent)
    if said:
        blocks += paragraph(" · ".join(said), _DETAIL, width, indent=indent)
    last = blocks[-1]
    return [*blocks[:-1], Block(last.height + 4, last.draw, last.gap, last.keep_next)]


def use(line: BatchLine) -> list[str]:
    """For which animals a drug is, and how long before slaughter or milking it is withdrawn, as entered."""
    entered = ((_("Species: {text}"), line.drug_species), (_("Withdrawal: {text}"), line.withdrawal))
    return [words.format(text=text) for words, text in entered if text]


def tagged(tag: str, text: str, width: float, indent: float) -> list[Block]:
    """A word in white on black, and a text beside it; the text goes on under the tag."""
    word = letters.shortened(tag, _TAG.font, _TAG.size, width * 0.6)
    tag_width = _TAG.width(word) + 2 * _TAG_PAD
    lines = _LOUD.wrap(text, width - indent - tag_width - 8) if text else [""]

    def draw(pen: Pen, left: float, top: float) -> None:
        pen.box(left + indent, top, tag_width, _TAG.line, filled=True)
        pen.text(left + indent + _TAG_PAD, top, word, _TAG)
        pen.text(left + indent + tag_width + 8, top, lines[0], _LOUD)

    blocks = [Block(_TAG.line + 2, draw, keep_next=True)]
    for line in lines[1:]:

        def go_on(pen: Pen, left: float, top: float, line: str = line) -> None:
            pen.text(left + indent + tag_width + 8, top, line, _LOUD)

        blocks.append(Block(_LOUD.line, go_on, keep_next=True))
    return blocks
