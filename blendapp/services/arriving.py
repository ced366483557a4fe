"""A list that arrives, of prices or of analyses: read from a copy of the library, beside the window, and taken."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, TypeVar

from blendapp.domain.composition_rows import CompositionReading
from blendapp.domain.library import Library
from blendapp.domain.list_rows import ListReading, source_of
from blendapp.domain.mills import ListAbout, PriceList
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.wording import _
from blendapp.services.already_taken import without_taken
from blendapp.services.composition import apply_composition_list
from blendapp.services.mill import Edit, Mill
from blendapp.services.prices import apply_price_list

if TYPE_CHECKING:
    from blendapp.domain.list_rows import Answer

AnyReading = TypeVar("AnyReading", bound=ListReading)


def read_list(
    library: Library, path: Path, on: datetime.date, about: ListAbout = ListAbout.PRICES,
    answers: Sequence[Answer] = (), source: str = "",
) -> ListReading:
    """As read_price_list or read_composition_list, for a library that nobody edits meanwhile.

    Prices that were taken from this very file already are left alone, so that taking it records only what is new.
    Raises Refused for a file that cannot be read.
    """
    if about is ListAbout.PRICES:
        from blendapp.exchange import read_price_list

        return without_taken(library, read_price_list(path, library, on, None, answers, source))
    from blendapp.exchange import read_composition_list

    return read_composition_list(path, library, on, None, answers, source)


def apply_list(mill: Mill, reading: ListReading, on: datetime.date) -> Edit:
    """Record every accepted row of a reading, its answers and the list itself as one undo. Raises Refused."""
    if isinstance(reading, PriceListReading):
        return apply_price_list(mill, reading, on)
    assert isinstance(reading, CompositionReading)
    return apply_composition_list(mill, reading, on)


def likely_about(library: Library, file_name: str) -> ListAbout:
    """What a file that is merely dropped is about: what the last list of its source was, else prices."""
    source = source_of(file_name)
    known: list[PriceList] = [one for one in library.all("price_list") if source_of(one.source) == source]
    return known[-1].about if known else ListAbout.PRICES


def taken_before(library: Library, digest: str) -> PriceList | None:
    """The record of this very file where it was taken already and stands."""
    known: list[PriceList] = library.all("price_list")
    return next((one for one in reversed(known) if one.digest == digest and one.withdrawn is None), None)


def with_note_of_earlier(library: Library, reading: AnyReading) -> AnyReading:
    """A reading with a note where this very file was taken before."""
    before = taken_before(library, reading.digest)
    if before is None:
        return reading
    text = _("This very file was taken before, on {day}, as list {number}; taken again, its prices are recorded twice.")
    if before.about is not ListAbout.PRICES:
        text = _("This very file was taken before, on {day}, as list {number}; taken again, it is recorded twice.")
    note = text.format(day=before.applied.date().isoformat(), number=before.id)
    return replace(reading, notes=(*reading.notes, note))
