"""Bring a file to the schema of this program by the steps in upgrades/. Imported only when a file needs it."""

from __future__ import annotations

import io
from pathlib import Path

from alembic import command
from alembic.config import Config
from sqlalchemy import Connection

HOME = Path(__file__).resolve().parent / "upgrades"


def _config(places: tuple[Path, ...]) -> Config:
    config = Config()
    config.set_main_option("script_location", _escaped(HOME))
    config.set_main_option("path_separator", "newline")
    config.set_main_option("version_locations", "\n".join(map(_escaped, places)))
    return config


def _escaped(path: Path) -> str:
    return str(path).replace("%", "%%")


# Folders that hold steps.
STEPS: tuple[Path, ...] = (HOME / "steps",)


def upgrade(connection: Connection) -> None:
    """Run every step that the file lacks, inside the transaction that the caller began."""
    config = _config(STEPS)
    config.attributes["connection"] = connection
    command.upgrade(config, "head")


def statements(dialect: str) -> str:
    """All steps as the text of SQL statements in another database's dialect, without a server."""
    text = io.StringIO()
    config = _config(STEPS)
    config.attributes["dialect"] = dialect
    config.output_buffer = text
    command.upgrade(config, "head", sql=True)
    return text.getvalue()
