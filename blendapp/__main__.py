"""python -m blendapp: a window with no arguments or with a mill file, a command with one."""

from __future__ import annotations

import sys
from collections.abc import Sequence


def main(arguments: Sequence[str] | None = None) -> int:
    """Returns the exit status."""
    given = list(sys.argv[1:] if arguments is None else arguments)
    if given == ["--parse-table"]:  # how the frozen program starts the process that opens foreign files
        from blendapp.exchange import parse_child

        return parse_child.main()
    from blendapp import cli

    if cli.is_command(given):
        return cli.run(given)
    from blendapp.desk import start

    return start.run(given)


if __name__ == "__main__":
    sys.exit(main())
