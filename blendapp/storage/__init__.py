"""The mill file: everything a mill keeps, in one file, with the log of every change made to it.

    schema      the tables, one for each kind of record, and the log
    upgrades    the steps that bring a file from one revision of the schema to the next
    opening     create and open: what is refused, what is opened to be read only, what is upgraded
    store       an open mill file: read everything, write one edit
    faults      what can be wrong with a mill file, in sentences

Names are imported when first used, so that a window can paint before the database library loads.
"""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from blendapp.storage.entries import Entry, Role
from blendapp.storage.faults import Cause, MillFileError

if TYPE_CHECKING:
    from blendapp.storage.opening import create, open_store
    from blendapp.storage.store import Store

__all__ = ["Cause", "Entry", "MillFileError", "Role", "Store", "create", "open_store"]


def __getattr__(name: str) -> Any:
    if name in ("create", "open_store"):
        from blendapp.storage import opening

        return getattr(opening, name)
    if name == "Store":
        from blendapp.storage.store import Store

        return Store
    raise AttributeError(name)
