"""For which site a price is and who offers it, where a column says so, or a title says it of the whole list."""

from __future__ import annotations

import datetime
import re
from collections.abc import Iterable
from dataclasses import replace

from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT, ColumnRole, Fate, Question
from blendapp.domain.mills import Asked
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_names import match_key
from blendapp.exchange.list_placing import Placing
from blendapp.exchange.price_columns import Table
from blendapp.exchange.source_sheets import shown_text
from blendapp.exchange.tables import CellKind, RawTable, kind_of

# Headings over sites of the mill, and those that stand as often over places that are none of its sites.
_SITES = frozenset({
    "site", "for site", "our site", "delivered to", "deliver to", "delivery to", "delivery site", "receiving site",
    "destination",
})
_PLACES = frozenset({
    "location", "depot", "store", "place", "port", "warehouse", "plant", "mill", "our mill", "delivery point",
    "delivery place", "point of delivery", "place of delivery",
})
_SUPPLIERS = frozenset({
    "supplier", "from supplier", "vendor", "seller", "merchant", "offered by", "supplied by",
    "trader",
})
_MOST_CHOICES = 9
_BEFORE_SITE = r"(?:deliver\w*|del'?d|dlvd|for|to|at|into|site|store|depot)[:\s]+(?:(?:to|at|into|for|our|the)\s+)*"
_TITLE_ROWS = 12


def settle_places(found: Table, raw: RawTable, library: Library, placing: Placing) -> None:
    """Gives the columns of sites and of suppliers their role, where the mill has any that they may name."""
    said = {index for index in found.headings if placing.names_columns and placing.role(found.headings[index], index)}
    for index, heading in found.headings.items():
        role = found.roles.get(index)
        plain = " ".join(re.sub(r"[^a-z]+", " ", heading.casefold()).split())
        if index in said or index == found.name or role not in (ColumnRole.NOTE, ColumnRole.OTHER):
            continue
        if plain in _SITES | _PLACES and library.all("site") and found.first(ColumnRole.SITE) is None:
            if plain in _SITES or _names_any(raw, index, found.first_row, library, "site"):
                found.roles[index] = ColumnRole.SITE
        elif (
            plain in _SUPPLIERS and found.first(ColumnRole.SUPPLIER) is None
            and _names_any(raw, index, found.first_row, library, "supplier")
        ):
            found.roles[index] = ColumnRole.SUPPLIER


def _names_any(raw: RawTable, index: int, first_row: int, library: Library, kind: str) -> bool:
    known = {match_key(one.name) for one in library.all(kind)}
    return bool(known) and any(
        match_key(shown_text(cells[index])) in known for cells in raw.rows[first_row:] if index < len(cells)
    )


def placed(
    raw: RawTable, row: PriceRow, table: Table, library: Library, answers: Answers, today: datetime.date
) -> PriceRow:
    """A row with the site that it is for and the supplier that it names; a site that the mill has not is a question."""
    if row.fate not in (Fate.ACCEPTED, Fate.QUESTION):
        return row
    supplier = _text(raw, row, table.first(ColumnRole.SUPPLIER))
    if supplier:
        known = _named(supplier, library, answers, Asked.SUPPLIER)
        if isinstance(known, int):
            text = _("From “{name}”.").format(name=library.records["supplier"][known].name)
            row = _with_remark(replace(row, supplier_id=known), text)
        else:
            row = _with_remark(
                row, _("The mill has no supplier “{name}”; the price is kept without one.").format(name=supplier)
            )
    site = _text(raw, row, table.first(ColumnRole.SITE))
    if not site:
        return row
    found = _named(site, library, answers, Asked.SITE)
    if found == LEAVE_OUT:
        return replace(row, fate=Fate.IGNORED, reason=_("Left out, as answered."), questions=())
    if isinstance(found, int):
        at = row.ingredient_id
        old = row.old_price_per_t if at is None else library.price_per_t(at, today, found)
        text = _("For the site “{name}”.").format(name=library.records["site"][found].name)
        return _with_remark(replace(row, site_id=found, old_price_per_t=old), text)
    text = _("The mill has no site “{name}”; say which site it is, or leave its prices out.").format(name=site)
    choices = (*(one.name for one in library.all("site")[:_MOST_CHOICES]), LEAVE_OUT)
    earlier = row.reason if row.fate is Fate.QUESTION else ""
    return replace(
        row, fate=Fate.QUESTION, reason=f"{earlier} {text}".strip(),
        questions=(*row.questions, Question(Asked.SITE, site, text, choices)),
    )


def _with_remark(row: PriceRow, text: str) -> PriceRow:
    return row if row.fate is Fate.QUESTION else replace(row, reason=f"{row.reason} {text}".strip())


def _text(raw: RawTable, row: PriceRow, index: int | None) -> str:
    if index is None:
        return ""
    value = raw.cell(row.row - 1, index)
    if kind_of(value) is CellKind.BLANK:
        value = raw.cell(raw.top_of_merged(row.row - 1, index), index)
    return " ".join(shown_text(value).split())


def _named(name: str, library: Library, answers: Answers, asked: Asked) -> int | str:
    """The identifier of the site or supplier of a name, as it stands or as it was answered; LEAVE_OUT; "" for none."""
    records = {match_key(one.name): int(one.id) for one in library.all(asked.value)}
    answer = answers.find(asked, name)
    if answer is not None and answer.answer == LEAVE_OUT:
        return LEAVE_OUT
    words = (name, answer.answer) if answer is not None else (name,)
    return next((records[match_key(one)] for one in words if match_key(one) in records), "")


def site_in_titles(tables: Iterable[RawTable], library: Library) -> str:
    """The one site that the rows above the tables name as the place of delivery; "" where they name none or several."""
    found = set()
    for table in tables:
        for cells in table.rows[:_TITLE_ROWS]:
            filled = [" ".join(shown_text(value).split()) for value in cells if kind_of(value) is not CellKind.BLANK]
            if len(filled) > 2:
                break
            found |= {site.name for site in library.all("site") for text in filled if _is_for(site.name, text)}
    return found.pop() if len(found) == 1 else ""


def _is_for(site: str, text: str) -> bool:
    """Whether a title says that prices are for a site: "Delivered Larkwater", not "Larkwater Grain Ltd"."""
    name = r"\s+".join(map(re.escape, site.split()))
    after = r"(?:$|\s*[,;:.()–-]|\s+(?:site|store|mill|depot)?\s*$)"
    return re.search(rf"(?:^|\b{_BEFORE_SITE}){name}{after}", text, re.IGNORECASE) is not None
