"""The dry matter that a price list itself gives of its goods, in a column of its own."""

from __future__ import annotations

import re
from collections.abc import Mapping

from blendapp.exchange.tables import CellKind, PercentCell, RawTable, kind_of

_DRY_MATTER = re.compile(
    r"(?:%\s*)?(?:dm|d\.m\.|dry\s+matter)(?:\s+content)?\s*[(\[,]?\s*(%|per\s?cent|g/kg)?\s*[)\]]?", re.IGNORECASE
)
_MOISTURE = re.compile(
    r"(?:%\s*)?(?:moisture|water)(?:\s+content)?\s*[(\[,]?\s*(%|per\s?cent|g/kg)?\s*[)\]]?", re.IGNORECASE
)


def dry_fraction_of_row(raw: RawTable, row: int, headings: Mapping[int, str]) -> float | None:
    """Kilograms of dry matter in one of the goods as fed, as the row says it; None where it does not."""
    for index, heading in headings.items():
        for pattern, is_water in ((_DRY_MATTER, False), (_MOISTURE, True)):
            found = pattern.fullmatch(heading.strip())
            amount = _amount(raw, row, index) if found else None
            if found and amount is not None:
                share = amount / (1000 if (found[1] or "").casefold() == "g/kg" else 100)
                share = 1 - share if is_water else share
                if 0.02 < share <= 1:
                    return share
    return None


def _amount(raw: RawTable, row: int, index: int) -> float | None:
    """A figure in percent, or in the unit of its heading."""
    value = raw.cell(row, index)
    if isinstance(value, PercentCell):
        return value.amount * 100
    kind = kind_of(value)
    if kind is CellKind.NUMBER:
        assert isinstance(value, float | int)
        return float(value)
    plain = re.fullmatch(r"([0-9]{1,3}(?:[.,][0-9]+)?)\s*%?", str(value).strip()) if kind is CellKind.TEXT else None
    return float(plain[1].replace(",", ".")) if plain else None
