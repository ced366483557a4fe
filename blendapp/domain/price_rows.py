"""What became of every row of a price list: read once, shown in the preview, printed, and applied."""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from enum import StrEnum


class Fate(StrEnum):
    """Every source row that is not blank has exactly one."""

    ACCEPTED = "accepted"
    QUESTION = "question"
    REFUSED = "refused"
    IGNORED = "ignored"


@dataclass(frozen=True)
class PriceRow:
    """One source row. row: from 1, as the spreadsheet or text editor shows it. reason: why, in one sentence.

    price: as read, money per `per`; entered: the cell as it stands. price_per_t, old_price_per_t: money of the mill per
    tonne as fed. unit: what the list said, as it said it. ingredient: name in the mill. None: not known.
    """

    sheet: str
    row: int
    fate: Fate
    reason: str = ""
    source_name: str = ""
    ingredient_id: int | None = None
    ingredient: str | None = None
    price: float | None = None
    per: str | None = None
    bushel_lb: float | None = None
    price_per_t: float | None = None
    unit: str | None = None
    valid_from: datetime.date | None = None
    old_price_per_t: float | None = None
    entered: str = ""


@dataclass(frozen=True)
class PriceListReading:
    """A price list read whole, nothing written. digest: SHA-256 of the file. notes: about the file as a whole."""

    file_name: str
    digest: str
    currency: str
    rows: tuple[PriceRow, ...]
    notes: tuple[str, ...] = ()

    @property
    def accepted(self) -> list[PriceRow]:
        return [row for row in self.rows if row.fate is Fate.ACCEPTED]

    def count(self, fate: Fate) -> int:
        return sum(row.fate is fate for row in self.rows)
