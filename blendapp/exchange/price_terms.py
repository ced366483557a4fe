"""What words say of the terms of a price: ex works or delivered, with freight or without."""

from __future__ import annotations

import re

from blendapp.domain.quotes import Terms

WITHOUT_FREIGHT = re.compile(
    r"(?:\+|\b(?:plus|excl\w*|without|not\s+incl\w*)\b)[. ]*(?:of\s+)?(?:freight|haulage|carriage|delivery|transport)|"
    r"\b(?:freight|haulage|carriage|delivery|transport)\s+(?:is\s+|are\s+)?(?:extra|excluded|not\s+included)\b",
    re.IGNORECASE,
)
_WITH_FREIGHT = re.compile(
    r"\bincl\w*[. ]*(?:of\s+)?(?:freight|haulage|carriage|delivery|transport)|"
    r"\b(?:freight|haulage|carriage|delivery|transport)\s+(?:is\s+|are\s+)?(?:included|paid)\b", re.IGNORECASE,
)


def read_terms(text: str) -> Terms | None:
    """Ex works or delivered, as words say it; None where they say neither, or both."""
    if WITHOUT_FREIGHT.search(text):
        return Terms.EX_WORKS
    if _WITH_FREIGHT.search(text):
        return Terms.DELIVERED
    plain = " ".join(re.sub(r"[^a-z]+", " ", text.casefold()).split())
    delivered = re.search(r"\b(?:delivered|cif|dap|ddp|del)\b", plain) is not None
    ex_works = re.search(r"\b(?:ex|exw|fob|fca|collected)\b", plain) is not None
    if delivered == ex_works:
        return None
    return Terms.DELIVERED if delivered else Terms.EX_WORKS
