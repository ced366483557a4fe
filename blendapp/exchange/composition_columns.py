"""What each column of a table of analyses holds: name, sample, day, basis, and what was measured."""

from __future__ import annotations

import re
from dataclasses import dataclass, field

from blendapp.domain.list_rows import ColumnRole
from blendapp.domain.names import fold
from blendapp.domain.nutrients import DRY_MATTER, MOISTURE
from blendapp.exchange.composition_nutrients import NutrientFinder, NutrientMatch
from blendapp.exchange.composition_words import HeadingWords, read_heading
from blendapp.exchange.list_placing import Placing, column_name
from blendapp.exchange.list_table import ListTable

# What a column of a list of analyses may hold.
COMPOSITION_ROLES = (
    ColumnRole.NAME, ColumnRole.SAMPLE, ColumnRole.SAMPLED, ColumnRole.BASIS, ColumnRole.DRY_MATTER,
    ColumnRole.NUTRIENT, ColumnRole.NOTE, ColumnRole.OTHER,
)
VALUE_ROLES = frozenset({ColumnRole.DRY_MATTER, ColumnRole.NUTRIENT})

_NAME_HEADINGS = frozenset({
    "ingredient", "ingredients", "commodity", "product", "products", "material", "raw material", "feed material",
    "feed", "feedstuff", "feedstuffs", "description", "name", "matrix", "grain", "goods", "article", "item",
    "sample name", "sample description", "sample type", "product name", "material name", "ingredient name",
    "commodity name", "feed name", "type of sample", "sample material",
})
# A heading of these words alone, one of the numbered things among them, is that of sample numbers.
_SAMPLE_WORDS = frozenset({
    "sample", "samples", "lot", "batch", "lab", "laboratory", "certificate", "report", "analysis", "ref", "reference",
    "no", "nr", "number", "id", "code", "our", "your", "internal", "of",
})
_SAMPLE_HEADINGS = frozenset({"no", "nr", "number", "analysis no", "analysis number"})
_NUMBERED = frozenset({
    "sample", "lot", "batch", "lab", "laboratory", "certificate", "report", "ref", "reference", "id", "code",
})
# The day that says most of the goods comes first.
_DAY_HEADINGS = (
    "sampled", "sampling date", "date sampled", "sample date", "date of sampling", "sampled on", "delivered",
    "delivery date", "date delivered", "received", "date received", "date of receipt", "received on", "receipt date",
    "arrival date", "date", "day", "analysis date", "date analysed", "date analyzed", "date of analysis", "analysed",
    "analyzed", "report date", "date reported", "reported", "production date", "date of production",
)
_BASIS_HEADINGS = frozenset({"basis", "base", "reported basis", "result basis", "basis of results", "reported on"})
_NOTE_HEADINGS = frozenset({
    "note", "notes", "remark", "remarks", "comment", "comments", "supplier", "origin", "vendor", "client", "customer",
    "laboratory", "lab", "method", "analyst", "sampled by", "sampler", "truck", "vehicle", "ticket", "invoice", "order",
    "order no", "po", "po number", "quantity", "qty", "weight", "tonnage", "mass", "price", "cost", "site", "location",
    "place", "silo", "bin", "store", "grade", "class", "quality", "status", "country", "season", "week", "month",
    "year", "page", "line", "row", "pos", "position", "depot", "port", "vessel", "time", "kg", "sd", "std", "std dev",
    "stdev", "cv", "uncertainty", "error", "expanded uncertainty", "repeatability", "lod", "loq", "detection limit",
    "min", "max", "minimum", "maximum", "limit", "spec", "specification", "guarantee", "target", "sr no", "s no",
    "sl no", "serial no", "serial number", "row no", "line no", "item no",
})
# How many samples a row stands for.
COUNT_HEADINGS = frozenset({"n", "count", "samples", "no of samples", "number of samples", "sample count"})


@dataclass(frozen=True)
class ValueColumn:
    """A column of results. match: what is measured; words: what its heading says."""

    index: int
    heading: str
    words: HeadingWords
    match: NutrientMatch

    @property
    def is_built_in(self) -> bool:
        return bool(self.match.built_in)


@dataclass
class AnalysisTable(ListTable):
    """A table of analyses within a sheet. count: the column of how many samples a row stands for."""

    values: list[ValueColumn] = field(default_factory=list)
    count: int | None = None

    @property
    def known(self) -> int:
        """How many columns hold what the mill knows."""
        return sum(column.match.is_settled for column in self.values)

    def twins_of(self, column: ValueColumn) -> list[ValueColumn]:
        """The columns that hold the same as a column of a settled match, itself among them."""
        return [one for one in self.values if one.match.name and one.match.name == column.match.name]


def plain_heading(text: str) -> str:
    """A heading without case and punctuation: "Sample No." is "sample no"."""
    return " ".join(re.sub(r"[^a-z0-9]+", " ", fold(text)).split())


def role_of(
    heading: str, index: int, finder: NutrientFinder, placing: Placing, about: str = ""
) -> tuple[ColumnRole, NutrientMatch]:
    """The role that a heading gives its column, what a person said coming first, and what the column measures.

    about: what an answer calls the column, where its heading stands over another one too.
    """
    match = finder.find(heading or column_name(index), about)
    said = placing.role(about or heading, index) if placing.names_columns else None
    if said is ColumnRole.DRY_MATTER and not match.built_in:
        words = read_heading(heading)
        return said, NutrientMatch(built_in=MOISTURE if words.is_moisture else DRY_MATTER)
    if said is not None:
        return said, match
    if match.left_out:
        return ColumnRole.OTHER, match
    if match.built_in:
        return ColumnRole.DRY_MATTER, match
    plain = plain_heading(heading)
    if match.is_settled:
        return ColumnRole.NUTRIENT, match
    for headings, role in (
        (_NAME_HEADINGS, ColumnRole.NAME), (_SAMPLE_HEADINGS, ColumnRole.SAMPLE),
        (frozenset(_DAY_HEADINGS), ColumnRole.SAMPLED), (_BASIS_HEADINGS, ColumnRole.BASIS),
        (_NOTE_HEADINGS | COUNT_HEADINGS, ColumnRole.NOTE),
    ):
        if plain in headings:
            return role, match
    tokens = frozenset(plain.split())
    if tokens <= _SAMPLE_WORDS and tokens & _NUMBERED:
        return ColumnRole.SAMPLE, match
    if heading and not plain and "%" not in heading:  # "±", "#"
        return ColumnRole.NOTE, match
    words = read_heading(heading)
    return (ColumnRole.NUTRIENT if words.name and (words.says_unit or match.may_be) else ColumnRole.OTHER), match


def best_day(table: AnalysisTable) -> None:
    """Of several columns of days the one that says most of the goods; the others are notes."""
    days = [index for index, role in table.roles.items() if role is ColumnRole.SAMPLED]
    if len(days) < 2:
        return
    order = {heading: place for place, heading in enumerate(_DAY_HEADINGS)}
    best = min(days, key=lambda index: (order.get(plain_heading(table.headings.get(index, "")), -1), index))
    for index in days:
        if index != best:
            table.roles[index] = ColumnRole.NOTE
