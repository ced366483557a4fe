"""One entry of the change log: undo list, history and audit trail in one."""

from __future__ import annotations

import datetime
from dataclasses import dataclass
from enum import StrEnum

from blendapp.domain.records import Change


class Role(StrEnum):
    """EDIT can be undone; UNDO and REDO name the entry that they undo or redo; RECORD stands for good."""

    EDIT = "edit"
    UNDO = "undo"
    REDO = "redo"
    RECORD = "record"


@dataclass(frozen=True)
class Entry:
    """What one write changed. made: with its time zone (UTC). of: the entry that an undo or redo is about."""

    id: int
    made: datetime.datetime
    who: str
    what: str
    role: Role
    of: int | None
    changes: tuple[Change, ...]
