"""Every text that a person sees passes through here, so that one catalogue translates screens, pages and commands."""

from __future__ import annotations

import gettext
from collections.abc import Callable
from pathlib import Path

_DOMAIN = "blendapp"
_CATALOGUES = Path(__file__).resolve().parent.parent / "translations"

_translate: Callable[[str], str] = str
_translate_plural: Callable[[str, str, int], str]


def _plain_plural(one: str, many: str, count: int) -> str:
    return one if count == 1 else many


_translate_plural = _plain_plural


def _(text: str) -> str:
    """The text in the language in use. Named places in braces are filled in by the caller, after this."""
    return _translate(text)


def plural(one: str, many: str, count: int) -> str:
    """The form of a text that fits a count, in the language in use."""
    return _translate_plural(one, many, count)


def use_language(language: str | None) -> None:
    """Take the catalogue of a language ("de", "pt_BR"); None, or a language without a catalogue, is English."""
    found = gettext.translation(_DOMAIN, _CATALOGUES, [language] if language else [], fallback=True)
    use_translator(found.gettext, found.ngettext)


def use_translator(single: Callable[[str], str], several: Callable[[str, str, int], str] = _plain_plural) -> None:
    """Take any translator; a test uses this to show that no visible text goes past the catalogue."""
    global _translate, _translate_plural
    _translate, _translate_plural = single, several
