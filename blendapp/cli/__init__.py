"""The jobs of the window without a screen: parse, call a service, print."""

from __future__ import annotations

from collections.abc import Sequence

COMMANDS = ("new", "formulate", "prices", "composition", "lists", "sheet", "export")


def is_command(arguments: Sequence[str]) -> bool:
    """Whether the arguments ask for a command or its help rather than for a window."""
    if not arguments:
        return False
    first = arguments[0]
    return first in COMMANDS or first.startswith("-") or len(arguments) > 1 or not _names_a_mill(first)


def _names_a_mill(argument: str) -> bool:
    from pathlib import Path

    return argument.endswith(".mill") or Path(argument).exists()


def run(arguments: Sequence[str]) -> int:
    """Run a command; returns the exit status."""
    from blendapp.cli import commands

    return commands.run(arguments)
