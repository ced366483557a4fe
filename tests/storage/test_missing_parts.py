"""A file that lacks a table or a column, as a tool from outside may leave it."""

from __future__ import annotations

import sqlite3
from pathlib import Path

import pytest

from blendapp.storage import Cause, MillFileError, create, open_store


def test_a_missing_column_is_one_sentence_that_names_file_and_column(tmp_path: Path) -> None:
    path = tmp_path / "cut.mill"
    create(path).close()
    with sqlite3.connect(path) as connection:
        connection.execute("ALTER TABLE nutrient DROP COLUMN note")
    connection.close()
    store = open_store(path)
    try:
        with pytest.raises(MillFileError) as caught:
            store.read_all()
    finally:
        store.close()
    assert caught.value.cause is Cause.DAMAGED
    assert "cut.mill" in str(caught.value)
    assert "nutrient.note" in str(caught.value)
    assert "\n" not in str(caught.value)
