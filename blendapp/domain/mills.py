"""The mill itself, its people, its documents: what a mill file holds besides feed."""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from enum import StrEnum

# What sheets may be weighed in, and printed on.
SHEET_MASSES = ("kg", "lb")
PAPERS = ("A4", "letter")


@dataclass(frozen=True)
class MillInfo:
    """One record per mill file, identifier 1.

    currency: ISO 4217 code. ton_means: one of units.TON_MEANINGS, "" asks. cwt_means: one of units.CWT_MEANINGS, ""
    is 100 lb in the exchange workbook and asks in price lists. one_person_approves: whether who prepared a version may
    also approve it; it stands in no workbook, so that no import can loosen it. site_id: the site whose prices, scales,
    mixers and bins count, besides those of the whole mill; None counts all plant, and prices of no site. sheet_mass:
    what sheets are weighed in, "kg" or "lb". paper: "A4" or "letter".
    """

    id: int = 1
    name: str = ""
    currency: str = "USD"
    ton_means: str = ""
    cwt_means: str = ""
    one_person_approves: bool = False
    site_id: int | None = None
    sheet_mass: str = "kg"
    paper: str = "A4"


@dataclass(frozen=True)
class Person:
    """Somebody who edits, checks or approves. password_hash: "" until the person may approve."""

    id: int
    name: str
    capacity: str = ""
    password_hash: str = ""
    active: bool = True


class VersionState(StrEnum):
    DRAFT = "draft"
    APPROVED = "approved"
    SUPERSEDED = "superseded"


@dataclass(frozen=True)
class FormulaVersion:
    """A snapshot of a formula that does not change once it is approved.

    number: from 1 within a formula. snapshot: JSON of versions.Snapshot. made, made_by: when and by whom it was
    prepared. approved_by, made_by: names as they were then. capacity: in which the approver approved. seal: of an
    approved version and its acknowledgements (versions.seal), "" before.
    """

    id: int
    formula_id: int
    number: int
    state: VersionState
    snapshot: str
    made: datetime.datetime
    made_by: str = ""
    made_by_id: int | None = None
    approved: datetime.datetime | None = None
    approved_by: str = ""
    approved_by_id: int | None = None
    capacity: str = ""
    note: str = ""
    seal: str = ""


class ListAbout(StrEnum):
    """What a list that arrives is about."""

    PRICES = "prices"
    COMPOSITION = "composition"


@dataclass(frozen=True)
class PriceList:
    """A list that was applied: of prices, or of analyses. digest: SHA-256 of the file, in hexadecimal.

    source: whom its answers are remembered for. report: JSON of the fate of every row. withdrawn: when it was rolled
    back, None while what it brought stands. supplier_id, site_id: whose prices, and for which site, if one was said.
    """

    id: int
    file_name: str
    digest: str
    applied: datetime.datetime
    rows: int
    accepted: int
    supplier_id: int | None = None
    report: str = ""
    source: str = ""
    withdrawn: datetime.datetime | None = None
    about: ListAbout = ListAbout.PRICES
    site_id: int | None = None


class Asked(StrEnum):
    """What a list may leave open. Those above the gap are remembered for the source; the last ones hold for one row.

    With each, what it is about and what may be answered:
    INGREDIENT: a name; its ingredient, or LEAVE_OUT. UNIT: the words in doubt, "" where none stand; words of one unit.
    RATE: a currency code or sign; the rate and its day. CENTS: ""; TAKE.
    PRICE: the headings of several columns of prices; the heading that holds, or ADD. Or what comes on top of a price;
    TAKE.
    DECIMAL: a heading; "." or ",". DATES: a heading; DAY_FIRST or MONTH_FIRST. HIDDEN_COLUMN: a heading; TAKE.
    TABLE: a sheet; "row 5", the row of its headings, or "row 0" where it has none. COLUMN: a heading, or "column 3"
    where it has none; one of list_rows.ColumnRole.
    SUPPLIER, SITE: ""; a name, whose list it is and for which site, or LEAVE_OUT: none, whatever its title says. Or a
    name in the list that the mill has not; its own name for it, or LEAVE_OUT.
    NUTRIENT: a heading; a nutrient's name, "Dry matter", or LEAVE_OUT. CONCENTRATION: a heading, or "" for all
    without a unit that are kept in % or g/kg; a unit. BASIS: a heading, or "" for all; one of ingredients.Basis.
    USUAL_CHANGE, of every source: a class of ingredients, "" for all others; by how many percent a price may change
    without a question.
    SIDE, of this list alone, since both tables are read, one after the other: the names' headings of tables that stand
    side by side; "columns A to B", those of the one that is read now.
    EXPIRED_LIST, of this list alone, and not remembered: a day as 2026-03-09, on which all of its prices ended; TAKE or
    LEAVE_OUT. Of a row: TAKE or LEAVE_OUT; for AMOUNT and REMARK also the price, as a plain number in the unit of the
    row, and for NAMELESS an ingredient.
    """

    INGREDIENT = "ingredient"
    UNIT = "unit"
    RATE = "rate"
    CENTS = "cents"
    PRICE = "price"
    DECIMAL = "decimal"
    DATES = "dates"
    HIDDEN_COLUMN = "hidden column"
    TABLE = "table"
    COLUMN = "column"
    SUPPLIER = "supplier"
    SITE = "site"
    NUTRIENT = "nutrient"
    CONCENTRATION = "concentration"
    BASIS = "basis"
    USUAL_CHANGE = "usual change"

    SIDE = "side"
    EXPIRED_LIST = "expired list"

    HIDDEN = "hidden"
    STRUCK = "struck"
    CHANGE = "change"
    EXPIRED = "expired"
    SIGN = "sign"
    TERMS = "terms"
    TWIN = "twin"
    AMOUNT = "amount"
    REMARK = "remark"
    NAMELESS = "nameless"

    @property
    def is_of_row(self) -> bool:
        """Whether the answer holds for one row of one list."""
        return self in (
            Asked.HIDDEN, Asked.STRUCK, Asked.CHANGE, Asked.EXPIRED, Asked.SIGN, Asked.TERMS, Asked.TWIN, Asked.AMOUNT,
            Asked.REMARK, Asked.NAMELESS,
        )

    @property
    def is_remembered(self) -> bool:
        return not self.is_of_row and self not in (Asked.EXPIRED_LIST, Asked.SIDE)


@dataclass(frozen=True)
class Synonym:
    """What a source means by its words, as it was answered once: remembered for its next list.

    name: what was asked about (see Asked). per: of a name, the unit where the list leaves it open, "" if none.
    rate: money of the mill for one of the currency, on the day `given`.
    """

    id: int
    source: str
    name: str
    ingredient_id: int | None = None
    per: str = ""
    asked: Asked = Asked.INGREDIENT
    answer: str = ""
    rate: float | None = None
    given: datetime.date | None = None


@dataclass(frozen=True)
class PrintedBatch:
    """A batch sheet that was given a number. sheet: JSON of domain.batches.Batch, so that a copy prints alike."""

    id: int
    number: int
    formula_id: int
    version: str
    order_kg: float
    printed: datetime.datetime
    printed_by: str = ""
    accepted_reason: str = ""
    accepted_by: str = ""
    sheet: str = ""
    copies: int = 0
    mixer_id: int | None = None


@dataclass(frozen=True)
class Acknowledgement:
    """A caution or an unsafe unknown that a person took on, for one version, with a reason. by: the name as it was."""

    id: int
    version_id: int
    caution: str
    reason: str
    person_id: int
    made: datetime.datetime
    by: str = ""
