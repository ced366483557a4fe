"""What titles and footnotes say of all results of a table: basis, unit, and which ingredient was sampled."""

from __future__ import annotations

import re
from collections.abc import Callable, Iterable
from dataclasses import dataclass

from blendapp.domain.ingredients import Basis
from blendapp.exchange.composition_words import read_basis, read_heading
from blendapp.exchange.tables import CellKind, RawTable, kind_of

# "The results relate to the sample as received" says nothing of the basis: a basis is called one, or expressed on.
_SPEAKS_OF_BASIS = re.compile(
    r"\bbasis\b|\b(?:expressed|reported|given|stated|calculated|shown)\s+(?:on|as|in|per)\b", re.IGNORECASE
)
_SPEAKS_OF_ALL = re.compile(
    r"\b(?:results?|values?|figures|analys[ei]s|contents?|concentrations?|all)\b.*\b(?:in|as|on|are|per)\b|"
    r"\b(?:results?|values?|figures|units?)\s*:", re.IGNORECASE,
)
# "Results as fed" alone in a title is the basis of all of them.
_RESULTS_AS_FED = re.compile(
    r"(?:all\s+)?(?:results?|values|figures|analys[ei]s)\s*[:,–-]?\s*(?:are\s+)?as[ -](?:fed|received|is)\b\W*",
    re.IGNORECASE,
)
_ABOUT_SAMPLES = re.compile(
    r"\b(?:samples?|specimens?)\s+(?:\w+\s+)?as\s+(?:received|delivered|submitted)\b", re.IGNORECASE
)
_LABEL = re.compile(
    r"^(?:product|raw\s+material|material|ingredient|commodity|sample|feed|goods|item|description|matrix)"
    r"(?:\s+name)?\s*[:\-–]\s*", re.IGNORECASE,
)


@dataclass(frozen=True)
class TableNotes:
    """basis: None where no note says it. units: unit and factor that notes give to all. name: of the one ingredient
    that titles name, "" where they name none or several."""

    basis: Basis | None = None
    units: tuple[tuple[str, float], ...] = ()
    name: str = ""

    def after(self, titles: TableNotes) -> TableNotes:
        """These notes, and where they are silent those of the tables above."""
        return TableNotes(self.basis or titles.basis, self.units or titles.units, self.name or titles.name)


def read_notes(
    raw: RawTable, rows: Iterable[int], titles: Iterable[int], is_known: Callable[[str], bool]
) -> TableNotes:
    """The notes among rows: those with one filled cell, a text. titles: rows among which one may name an ingredient."""
    bases: set[Basis] = set()
    units: dict[tuple[str, float], None] = {}
    for row in rows:
        cells = [value for value in raw.rows[row] if kind_of(value) is not CellKind.BLANK]
        if len(cells) != 1 or not isinstance(cells[0], str):
            continue
        text = " ".join(cells[0].split())
        words = read_heading(text)
        speaks = _SPEAKS_OF_ALL.search(text) is not None
        of_all = speaks and bool(words.unit)
        basis = read_basis(_ABOUT_SAMPLES.sub(" ", text))
        if basis is not None and (of_all or _SPEAKS_OF_BASIS.search(text) or _RESULTS_AS_FED.fullmatch(text)):
            bases.add(basis)
        if of_all:
            units[words.unit, words.factor] = None
    return TableNotes(
        bases.pop() if len(bases) == 1 else None, tuple(units), _name(raw, titles, is_known)
    )


def _name(raw: RawTable, titles: Iterable[int], is_known: Callable[[str], bool]) -> str:
    texts = [cell for row in titles for cell in raw.rows[row] if isinstance(cell, str)]
    named = [name for text in texts if is_known(name := _LABEL.sub("", " ".join(text.split())))]
    if not named and raw.sheet and is_known(raw.sheet):
        named = [raw.sheet]
    return named[0] if len(set(named)) == 1 else ""
