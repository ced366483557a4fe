"""What words say of the terms of a price: ex works or delivered, with freight or without."""

from __future__ import annotations

import re

from blendapp.domain.quotes import Terms

_KINDS = r"(?:freight|haulage|carriage|delivery|transport)"
# Some words of one clause: a point or a comma ends it unless a figure follows.
_SOME = r"(?:[^.,;]|[.,](?=[0-9])){0,40}?"
# "12.00", "$12.00/t", "14 USD per short ton for".
_SUM = r"(?:[A-Z]{0,3}[$€£]?\s*[0-9]+(?:[.,][0-9]+)*\s*(?:[A-Z]{3}\b|[$€£])?\s*(?:(?:/|\bper\b)[\w ]{1,14}?)?\s*)?"
FREIGHT = re.compile(rf"\b{_KINDS}\b", re.IGNORECASE)
WITHOUT_FREIGHT = re.compile(
    rf"(?:\+|\b(?:plus|excl\w*|without|not\s+incl\w*)\b)[. ]*(?:of\s+)?{_KINDS}|"
    rf"(?:\+|\b(?:plus|add)\b)\s*{_SUM}(?:for\s+|of\s+)?{_KINDS}\b|"
    rf"\b{_KINDS}\b(?:\s+(?:is\s+|are\s+)?|{_SOME}\s)(?:extra|excluded|not\s+included|on\s+top|(?:to\s+be\s+)?added)\b",
    re.IGNORECASE,
)
WITH_FREIGHT = re.compile(
    rf"\bincl\w*[. ]*(?:of\s+)?{_KINDS}|\b{_KINDS}\s+(?:is\s+|are\s+)?(?:included|paid|free)\b|\bfree\s+{_KINDS}\b",
    re.IGNORECASE,
)


def read_terms(text: str) -> Terms | None:
    """Ex works or delivered, as words say it; None where they say neither, or both."""
    if WITHOUT_FREIGHT.search(text):
        return Terms.EX_WORKS
    if WITH_FREIGHT.search(text):
        return Terms.DELIVERED
    plain = " ".join(re.sub(r"[^a-z]+", " ", text.casefold()).split())
    delivered = re.search(r"\b(?:delivered|cif|dap|ddp|del)\b", plain) is not None
    ex_works = re.search(r"\b(?:ex|exw|fob|fca|collected)\b", plain) is not None
    if delivered == ex_works:
        return None
    return Terms.DELIVERED if delivered else Terms.EX_WORKS
