"""A whole library in and out of the exchange workbook, and new mill files made from one."""

from __future__ import annotations

import datetime
from pathlib import Path

from blendapp.domain.library import Library
from blendapp.domain.mills import MillInfo
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.records import KINDS, Change, added
from blendapp.domain.wording import _
from blendapp.services.mill import Edit, Mill
from blendapp.services.targets import refuse_over_a_mill


def new_mill(
    path: Path | str, workbook: Path | str | None = None, *, on: datetime.date | None = None, who: str = "",
    name: str = "",
) -> tuple[Mill, list[Problem]]:
    """Make a mill file, from a workbook if one is given, and open it; with the warnings of the workbook.

    Nothing is made where the workbook has a fault. Raises Refused (workbook) or MillFileError (a file is in the way, or
    the place cannot be written).
    """
    from blendapp.storage import create

    changes: list[Change] = [added(MillInfo(name=name))]
    warnings: list[Problem] = []
    what = _("New mill")
    if Path(path).exists():
        raise Refused(Problem(_("The file is there already; choose another name, or open it."), Place(file=str(path))))
    if workbook is not None:
        changes, warnings = read(workbook, Library(), dict.fromkeys(KINDS, 1), on or datetime.date.today())
        what = _("New mill from {workbook}").format(workbook=Path(workbook).name)
        if not any(change.kind == "mill" for change in changes):
            changes = [added(MillInfo(name=name)), *changes]
    return Mill(create(path, changes, what, who), who), warnings


def import_workbook(mill: Mill, workbook: Path | str, on: datetime.date) -> tuple[Edit, list[Problem]]:
    """Take a workbook into an open mill, by name, as one undoable edit; with its warnings. Raises Refused."""
    changes, warnings = read(workbook, mill.library, mill.next_ids(), on)
    for change in changes:
        if change.before is None:
            mill.used_id(change.kind, change.id)
    what = _("Import {workbook}").format(workbook=Path(workbook).name)
    return mill.apply(what, changes), warnings


def read(
    workbook: Path | str, library: Library, next_ids: dict[str, int], on: datetime.date
) -> tuple[list[Change], list[Problem]]:
    """The changes that a workbook asks for, and its warnings. Raises Refused with every fault."""
    from blendapp.exchange import read_workbook

    reading = read_workbook(Path(workbook), library, next_ids, on)
    return list(reading.changes), list(reading.warnings)


def export_workbook(library: Library, workbook: Path | str, on: datetime.date) -> list[Problem]:
    """Write the exchange workbook; an older workbook of that name is replaced whole. Returns warnings.

    Raises Refused, also where a mill file stands there.
    """
    from blendapp.exchange import write_workbook

    refuse_over_a_mill(Path(workbook))
    return list(write_workbook(Path(workbook), library, on))
