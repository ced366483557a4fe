"""What is said of a list as a whole: before it is taken, on the button that takes it, and after. No Qt."""

from __future__ import annotations

from blendapp.domain.list_rows import Fate, ListReading
from blendapp.domain.mills import ListAbout
from blendapp.domain.wording import _, plural


def take_words(about: ListAbout, count: int) -> str:
    """What the button says that takes so many rows."""
    if not count:
        return _("Nothing to take yet")
    if about is ListAbout.PRICES:
        return plural("Take {count} price", "Take {count} prices", count).format(count=count)
    return plural("Take {count} sample", "Take {count} samples", count).format(count=count)


def state_words(about: ListAbout, *, running: bool, taken: bool, before: bool, more: bool) -> str:
    """How far a list has come. before: whether this very file was taken already. more: whether there is anything left
    to take."""
    if running:
        return _("reading…")
    if about is ListAbout.PRICES and (taken or before):
        if more:
            return _("taken before; what was settled since is taken alone")
        return _("taken; Ctrl+Z takes it back") if taken else _("taken before; all that it settles is on record")
    if taken:
        return _("taken; Ctrl+Z takes it back")
    if before:
        return _("this very file was taken before; taking it again records everything a second time")
    if about is ListAbout.COMPOSITION:
        return _("nothing is stored before it is taken; the mean of an ingredient's samples becomes its value")
    return _("nothing is stored before it is taken")


def unsettled_words() -> str:
    """What is said of an answer that changed nothing."""
    return _("That does not answer it; the list reads as before. Answer otherwise, or leave it.")


def taken_words(about: ListAbout, count: int, file_name: str) -> str:
    """What is said once a list is taken."""
    if about is ListAbout.PRICES:
        text = plural("{count} price from {file} is in force; Ctrl+Z takes it back.",
                      "{count} prices from {file} are in force; Ctrl+Z takes them back.", count)
    else:
        text = plural("{count} sample from {file} is taken; Ctrl+Z takes it back.",
                      "{count} samples from {file} are taken; Ctrl+Z takes them back.", count)
    return text.format(count=count, file=file_name)


def left_open(reading: ListReading) -> list[str]:
    """The rows that were not taken and would have had something to say, a line each."""
    return [
        f"{row.sheet} {row.row}, {row.source_name}: {row.reason}".strip()
        for row in reading.rows if row.fate in (Fate.QUESTION, Fate.REFUSED)
    ]
