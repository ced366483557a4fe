"""When two names are the same name: case, spaces and the form of the letters do not count."""

from __future__ import annotations

import unicodedata


def fold(name: str) -> str:
    """The form in which names are compared: compatibility letters, one space between words, no case."""
    return " ".join(unicodedata.normalize("NFKC", name).split()).casefold()
