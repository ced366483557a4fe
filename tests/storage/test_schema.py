"""The tables, the record classes and the upgrade steps say the same thing, for SQLite and for PostgreSQL."""

from __future__ import annotations

import datetime
from pathlib import Path
from typing import Any

import pytest
import sqlalchemy as sa
from alembic.autogenerate import compare_metadata
from alembic.migration import MigrationContext
from sqlalchemy.dialects import postgresql

from blendapp.domain.records import KINDS, field_types
from blendapp.storage import upgrading, writing
from blendapp.storage.connections import connect, disconnect, transaction
from blendapp.storage.rows import DERIVED, select_of
from blendapp.storage.schema import REVISION, counter, log_change, log_entry, metadata, table_of

_LOG_AND_COUNTER = {"counter", "log_entry", "log_change"}


def test_there_is_one_table_for_each_kind_of_record_and_the_log() -> None:
    assert set(metadata.tables) == set(KINDS) | _LOG_AND_COUNTER


@pytest.mark.parametrize("kind", KINDS)
def test_a_table_has_the_fields_of_its_record_in_order_and_then_the_derived_columns(kind: str) -> None:
    assert list(table_of(kind).c.keys()) == [*field_types(KINDS[kind]), *DERIVED.get(kind, {})]


@pytest.mark.parametrize("kind", KINDS)
def test_a_column_takes_what_its_field_holds(kind: str) -> None:
    expected: dict[Any, type[Any]] = {
        float: sa.Double, int: sa.Integer, bool: sa.Boolean, datetime.date: sa.Date, datetime.datetime: sa.DateTime,
    }
    for name, (declared, optional) in field_types(KINDS[kind]).items():
        column = table_of(kind).c[name]
        kept = column.type.impl if isinstance(column.type, sa.TypeDecorator) else column.type
        assert type(kept) is expected.get(declared, sa.Text), name
        assert bool(column.nullable) == optional, name


@pytest.mark.parametrize("kind", KINDS)
def test_every_identifier_of_another_record_is_a_foreign_key(kind: str) -> None:
    targets = {"made_by_formula": "formula", "approved_by": "person", "made_by": "person", "replaces": "quote"}
    for name in field_types(KINDS[kind]):
        if name.endswith("_id"):
            (key,) = table_of(kind).c[name].foreign_keys
            assert key.column.table.name == targets.get(name.removesuffix("_id"), name.removesuffix("_id"))


def test_the_upgrade_steps_make_the_schema_of_this_program(tmp_path: Path) -> None:
    path = tmp_path / "steps.mill"
    path.touch()
    connection = connect(path, writable=True)
    with transaction(connection):
        upgrading.upgrade(connection)
        made = MigrationContext.configure(connection, opts={"compare_type": True})
        assert compare_metadata(made, metadata) == []
        assert connection.execute(sa.text("SELECT version_num FROM alembic_version")).scalar() == REVISION
        inspector = sa.inspect(connection)
        for name, table in metadata.tables.items():
            made_keys = {tuple(key["column_names"]) for key in inspector.get_unique_constraints(name)}
            wanted = {
                tuple(column.name for column in key.columns)
                for key in table.constraints
                if isinstance(key, sa.UniqueConstraint)
            }
            assert made_keys == wanted, name
    disconnect(connection)


def test_the_whole_schema_can_be_made_in_postgresql() -> None:
    text = upgrading.statements("postgresql")
    for name in metadata.tables:
        assert f"CREATE TABLE {postgresql.dialect().identifier_preparer.quote(name)} (" in text
    assert "DOUBLE PRECISION" in text
    assert "TIMESTAMP WITH TIME ZONE" in text
    assert "DEFERRABLE INITIALLY DEFERRED" in text
    assert text.count("SERIAL") == 1  # entries of the log; records bring their identifiers
    assert "PRAGMA" not in text
    assert "TRIGGER" not in text


@pytest.mark.parametrize("kind", KINDS)
def test_reading_and_writing_a_kind_can_be_said_in_postgresql(kind: str) -> None:
    table = table_of(kind)
    for statement in (select_of(kind), select_of(kind).where(table.c.id.in_([1, 2])), sa.insert(table),
                      writing.deletion_of(kind)):
        compiled = str(statement.compile(dialect=postgresql.dialect()))
        assert postgresql.dialect().identifier_preparer.quote(kind) in compiled


def test_the_log_and_the_counters_can_be_said_in_postgresql() -> None:
    for statement in (sa.insert(log_entry), sa.insert(log_change), sa.insert(counter), writing.COUNTERS,
                      writing.heads_between(3, 9), writing.changes_between(3, 9), writing.moved_counter("quote")):
        compiled = str(statement.compile(dialect=postgresql.dialect()))
        assert "counter" in compiled or "log_" in compiled
    columns = [column.name for column in log_entry.c if column.name != "id"]
    inserted = str(sa.insert(log_entry).compile(dialect=postgresql.dialect(), column_keys=columns))
    assert "(made, who, what, role, of_id)" in inserted  # the server numbers the entries
