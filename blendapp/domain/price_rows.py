"""What became of every row of a price list: read once, shown in the preview, printed, and applied."""

from __future__ import annotations

import datetime
from dataclasses import dataclass

from blendapp.domain.list_rows import Fate, ListReading, ListRow
from blendapp.domain.quotes import Terms


@dataclass(frozen=True)
class PriceRow(ListRow):
    """One row of a price list.

    price: as read, money per `per`; entered: the cell as it stands. price_per_t, old_price_per_t: money of the mill per
    tonne as fed. dry_matter_price_per_t: likewise of dry matter, where the list gives the price so. unit: what the list
    said, as it said it. None: not known. currency: code, sign or word of another currency, in which `price` still
    stands; then it has no price per tonne. site_id, supplier_id: where the row names them, None where the list counts.
    """

    price: float | None = None
    per: str | None = None
    bushel_lb: float | None = None
    price_per_t: float | None = None
    unit: str | None = None
    valid_from: datetime.date | None = None
    old_price_per_t: float | None = None
    entered: str = ""
    valid_to: datetime.date | None = None
    terms: Terms | None = None
    dry_matter_price_per_t: float | None = None
    currency: str = ""
    site_id: int | None = None
    supplier_id: int | None = None


@dataclass(frozen=True)
class PriceListReading(ListReading):
    """A price list read whole. currency: of the mill, in which every price per tonne stands."""

    rows: tuple[PriceRow, ...]
    currency: str = ""

    @property
    def accepted(self) -> list[PriceRow]:
        return [row for row in self.rows if row.fate is Fate.ACCEPTED]
