"""The tables of a mill file: one for each kind of record, named as the kind, and the change log.

A table has the fields of its record class as columns, in order. Beside numbers kept as entered stand their canonical
values, which no record holds: value.canonical, lot_value.canonical (units.Unit) and quote.price_per_t. Foreign keys are
checked when a transaction ends, so that records may be written in any order.

A change here needs a step in upgrades/steps and a new REVISION; tests hold the three equal.
"""

from __future__ import annotations

import datetime
from typing import Any

from sqlalchemy import (
    Boolean,
    CheckConstraint,
    Column,
    Date,
    DateTime,
    Dialect,
    Double,
    ForeignKey,
    Integer,
    MetaData,
    Table,
    Text,
    TypeDecorator,
    UniqueConstraint,
)

APPLICATION_ID = 0x4D696C6C  # "Mill", in the header of every mill file
REVISIONS: tuple[str, ...] = ("0001", "0002")  # oldest first; the last is that of this program
REVISION = REVISIONS[-1]


class Moment(TypeDecorator[datetime.datetime]):
    """A moment with its time zone, kept in UTC; one without a time zone is refused (ValueError)."""

    impl = DateTime(timezone=True)
    cache_ok = True

    def process_bind_param(self, value: datetime.datetime | None, dialect: Dialect) -> datetime.datetime | None:
        if value is None:
            return None
        if value.tzinfo is None:
            raise ValueError(f"A moment needs its time zone; {value.isoformat()} has none.")
        return value.astimezone(datetime.UTC)

    def process_result_value(self, value: datetime.datetime | None, dialect: Dialect) -> datetime.datetime | None:
        if value is None or value.tzinfo is not None:
            return value
        return value.replace(tzinfo=datetime.UTC)


metadata = MetaData(
    naming_convention={
        "ix": "ix_%(table_name)s_%(column_0_N_name)s",
        "uq": "uq_%(table_name)s_%(column_0_N_name)s",
        "ck": "ck_%(table_name)s_%(constraint_name)s",
        "fk": "fk_%(table_name)s_%(column_0_name)s",
        "pk": "pk_%(table_name)s",
    }
)


def _id() -> Column[int]:
    return Column("id", Integer, primary_key=True, autoincrement=False)


def _text(name: str, optional: bool = False, unique: bool = False) -> Column[str]:
    return Column(name, Text, nullable=optional, unique=unique)


def _number(name: str, optional: bool = True) -> Column[float]:
    return Column(name, Double, nullable=optional)


def _count(name: str, optional: bool = False, unique: bool = False) -> Column[int]:
    return Column(name, Integer, nullable=optional, unique=unique)


def _mark(name: str) -> Column[bool]:
    return Column(name, Boolean, nullable=False)


def _day(name: str) -> Column[datetime.date]:
    return Column(name, Date)


def _moment(name: str, optional: bool = False) -> Column[datetime.datetime]:
    return Column(name, Moment, nullable=optional)


def _link(name: str, kind: str, optional: bool = False) -> Column[int]:
    """A record of another kind, by its identifier."""
    key = ForeignKey(f"{kind}.id", deferrable=True, initially="DEFERRED")
    return Column(name, Integer, key, nullable=optional, index=True)


def _table(kind: str, *columns: Any) -> Table:
    return Table(kind, metadata, _id(), *columns)


_table(
    "mill", _text("name"), _text("currency"), _text("ton_means"), _text("cwt_means"), _mark("one_person_approves"),
    _link("site_id", "site", optional=True), _text("sheet_mass"), _text("paper"),
    CheckConstraint("id = 1", name="one_mill"),
)
_table("person", _text("name", unique=True), _text("capacity"), _text("password_hash"), _mark("active"))
_table("site", _text("name", unique=True))
_table("supplier", _text("name", unique=True), _text("note"))
_table(
    "scale", _text("name", unique=True), _number("step_kg"), _number("least_kg"), _number("greatest_kg"),
    _number("tolerance_percent"), _mark("hand_add"), _link("site_id", "site", optional=True), _number("step_l"),
    _number("least_l"), _number("greatest_l"),
)
_table(
    "mixer", _text("name", unique=True), _number("least_kg"), _number("greatest_kg"),
    _link("site_id", "site", optional=True),
)
_table(
    "nutrient", _text("name", unique=True), _text("unit"), _mark("never_negative"), _text("key"), _text("note"),
)
_table(
    "formula", _text("name", unique=True), _text("amounts"), _text("animal", optional=True), _text("stage"),
    _number("batch_kg"), _text("admits"), _text("note"), _number("loss_percent"),
    _number("product_dry_matter_percent"),
)
_table(
    "mixing_step", _link("formula_id", "formula", optional=True), _count("position"), _text("text"),
    _number("minutes"), _text("setting"),
)
_table(
    "ingredient", _text("name", unique=True), _text("class_name"), _number("dry_matter_percent"), _text("basis"),
    _text("code"), _link("scale_id", "scale", optional=True), _number("stock_kg"), _number("density_kg_per_l"),
    _number("bushel_lb"), _text("tags"), _link("made_by_formula_id", "formula", optional=True), _text("drug"),
    _text("drug_level"), _text("drug_species"), _text("withdrawal"), _text("note"), _mark("opened"),
    _link("supplier_id", "supplier", optional=True),
)
_table(
    "value", _link("ingredient_id", "ingredient"), _link("nutrient_id", "nutrient"), _number("amount", optional=False),
    _text("unit"), _text("basis"), _text("origin", optional=True), _text("source"), _day("date"),
    _count("n", optional=True), _number("sd"), _text("entered"), _number("canonical", optional=False),
    UniqueConstraint("ingredient_id", "nutrient_id"),
)
_table(
    "lot", _link("ingredient_id", "ingredient"), _text("name"), _day("received"), _number("mass_kg"),
    _link("supplier_id", "supplier", optional=True), _text("note"),
    _link("price_list_id", "price_list", optional=True), _number("dry_matter_percent"),
)
_table(
    "lot_value", _link("lot_id", "lot"), _link("nutrient_id", "nutrient"), _number("amount", optional=False),
    _text("unit"), _text("basis"), _text("source"), _day("date"), _number("canonical", optional=False),
)
_table(
    "bin", _text("name"), _link("ingredient_id", "ingredient", optional=True), _link("lot_id", "lot", optional=True),
    _link("site_id", "site", optional=True),
)
_table(
    "price_list", _text("file_name"), _text("digest"), _moment("applied"), _count("rows"), _count("accepted"),
    _link("supplier_id", "supplier", optional=True), _text("report"), _text("source"),
    _moment("withdrawn", optional=True), _text("about"), _link("site_id", "site", optional=True),
)
_table(
    "quote", _link("ingredient_id", "ingredient"), _number("price"), _text("per"), _number("bushel_lb"),
    _link("site_id", "site", optional=True), _link("supplier_id", "supplier", optional=True), _text("kind"),
    _text("terms", optional=True), _day("valid_from"), _day("valid_to"), _day("recorded"), _text("source"),
    _text("entered"), _link("price_list_id", "price_list", optional=True), _link("replaces_id", "quote", optional=True),
    _number("price_per_t"),
)
_table(
    "synonym", _text("source"), _text("name"), _link("ingredient_id", "ingredient", optional=True), _text("per"),
    _text("asked"), _text("answer"), _number("rate"), _day("given"),
)
_table(
    "limit", _link("formula_id", "formula"), _text("kind"), _text("subject"), _text("per", optional=True),
    _number("minimum"), _number("maximum"), _text("unit"), _text("basis"), _number("at_dry_matter_percent"),
    _text("note"),
)
_table(
    "version", _link("formula_id", "formula"), _count("number"), _text("state"), _text("snapshot"), _moment("made"),
    _text("made_by"), _link("made_by_id", "person", optional=True), _moment("approved", optional=True),
    _text("approved_by"), _link("approved_by_id", "person", optional=True), _text("capacity"), _text("note"),
    _text("seal"), UniqueConstraint("formula_id", "number"),
)
_table(
    "acknowledgement", _link("version_id", "version"), _text("caution"), _text("reason"), _link("person_id", "person"),
    _moment("made"), _text("by"),
)
_table(
    "batch", _count("number", unique=True), _link("formula_id", "formula"), _text("version"),
    _number("order_kg", optional=False), _moment("printed"), _text("printed_by"), _text("accepted_reason"),
    _text("accepted_by"), _text("sheet"), _count("copies"), _link("mixer_id", "mixer", optional=True),
)

# What no kind of record holds: the first identifier or number never used so far, by kind or by BATCH_NUMBER.
counter = Table(
    "counter", metadata,
    Column("name", Text, primary_key=True), Column("next_value", Integer, nullable=False),
)
BATCH_NUMBER = "batch number"

# The change log is only ever added to. `before` and `after` are JSON of records.to_plain.
log_entry = Table(
    "log_entry", metadata,
    Column("id", Integer, primary_key=True), _moment("made"), _text("who"), _text("what"), _text("role"),
    Column("of_id", Integer, ForeignKey("log_entry.id", deferrable=True, initially="DEFERRED"), index=True),
    sqlite_autoincrement=True,
)
log_change = Table(
    "log_change", metadata,
    Column("entry_id", Integer, ForeignKey("log_entry.id", deferrable=True, initially="DEFERRED"), primary_key=True),
    Column("position", Integer, primary_key=True),
    _text("kind"), _count("record_id"), _text("before", optional=True), _text("after", optional=True),
)


def table_of(kind: str) -> Table:
    """The table of a kind of record."""
    return metadata.tables[kind]
