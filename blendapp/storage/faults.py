"""What can be wrong with a mill file: one sentence each, naming the file and the mend."""

from __future__ import annotations

import errno
from enum import StrEnum
from pathlib import Path

from blendapp.domain.wording import _


class Cause(StrEnum):
    """Why a mill file could not be made, opened, read or written."""

    MISSING = "missing"
    EXISTS = "exists"
    FOLDER = "folder"
    NOT_A_MILL_FILE = "not a mill file"
    NEWER = "newer version"
    OLDER = "older version that cannot be upgraded here"
    HELD = "held by another process"
    READ_ONLY = "read-only"
    NOT_ALLOWED = "not allowed"
    FULL = "cannot grow"
    DAMAGED = "damaged"
    DISK = "the disk or the network failed"
    CHANGED_ELSEWHERE = "changed elsewhere"
    MOVED = "moved or replaced while open"
    INCONSISTENT = "would not be consistent"
    ADDRESS = "a database address"


class MillFileError(Exception):
    """One sentence for the person, with the file and the mend. Nothing was written where this is raised."""

    def __init__(self, text: str, cause: Cause, path: Path | None = None) -> None:
        super().__init__(text)
        self.cause = cause
        self.path = path



def fault(cause: Cause, path: Path | str) -> MillFileError:
    """The plain error of a cause about a file."""
    return MillFileError(sentence(cause, path), cause, Path(path))


def sentence(cause: Cause, path: Path | str) -> str:
    """The sentence of a cause, with the file in its place."""
    return _texts()[cause].format(file=path)


def _texts() -> dict[Cause, str]:
    return {
        Cause.MISSING: _("There is no file “{file}”; check the name, or make a new mill file."),
        Cause.EXISTS: _("“{file}” exists already and is left as it is; choose another name."),
        Cause.FOLDER: _("“{file}” is a folder; choose a mill file in it."),
        Cause.NOT_A_MILL_FILE: _("“{file}” is not a mill file; choose a file that this program made."),
        Cause.NEWER: _("“{file}” comes from a newer version of this program and is left as it is; install that one."),
        Cause.OLDER: _(
            "“{file}” comes from an older version and must be upgraded, but it cannot be written here now; "
            "close it in other windows, or copy it to a folder where you may write."
        ),
        Cause.HELD: _(
            "“{file}” is open in another process, so it can only be read here; "
            "to edit it, close it there and open it here again."
        ),
        Cause.READ_ONLY: _(
            "“{file}” or its folder may only be read; to edit it, copy it to a folder where you may write."
        ),
        Cause.NOT_ALLOWED: _("You are not allowed to read “{file}”; ask its owner for the right, or choose another."),
        Cause.FULL: _(
            "“{file}” cannot grow: the disk or the space allotted to it is full; make room and repeat. "
            "Nothing was changed."
        ),
        Cause.DAMAGED: _(
            "“{file}” is damaged and is left as it is; open a copy of it that you saved, "
            "or have the disk that it lies on checked."
        ),
        Cause.DISK: _(
            "“{file}” could not be read or written: the disk or the network failed; check it, then repeat the edit."
        ),
        Cause.CHANGED_ELSEWHERE: _(
            "“{file}” was changed elsewhere since it was read here; open it again and repeat the edit. "
            "Nothing was changed."
        ),
        Cause.MOVED: _(
            "“{file}” was moved, deleted or replaced while it was open; save a copy under a new name and go on in "
            "that one. Nothing was changed."
        ),
        Cause.ADDRESS: _("“{file}” is a database address, and only mill files can be opened yet; give a file."),
    }


# SQLite's primary result codes, https://www.sqlite.org/rescode.html
_BUSY, _LOCKED = 5, 6
_READONLY, _IOERR, _CORRUPT, _FULL, _CANTOPEN, _PERM, _NOTADB, _CONSTRAINT = 8, 10, 11, 13, 14, 3, 26, 19
_CAUSE_OF_CODE: dict[int, Cause] = {
    _BUSY: Cause.HELD,
    _LOCKED: Cause.HELD,
    _READONLY: Cause.READ_ONLY,
    _CANTOPEN: Cause.READ_ONLY,
    _PERM: Cause.NOT_ALLOWED,
    _IOERR: Cause.DISK,
    _FULL: Cause.FULL,
    _CORRUPT: Cause.DAMAGED,
    _NOTADB: Cause.NOT_A_MILL_FILE,
    _CONSTRAINT: Cause.INCONSISTENT,
}


def from_sqlite(error: BaseException | None, path: Path | str) -> MillFileError | None:
    """The sentence for an error of SQLite; None where it is not about the file (a fault of this program)."""
    code = getattr(error, "sqlite_errorcode", None)
    if code is None:
        return None
    cause = _CAUSE_OF_CODE.get(code & 0xFF)
    if cause is Cause.INCONSISTENT:
        text = _("The edit does not fit what “{file}” holds and was not stored ({reason}); correct it and repeat.")
        return MillFileError(text.format(file=path, reason=error), cause, Path(path))
    return None if cause is None else fault(cause, path)


_CAUSE_OF_ERRNO: dict[int, Cause] = {
    errno.ENOENT: Cause.MISSING,
    errno.ENOTDIR: Cause.MISSING,
    errno.EISDIR: Cause.FOLDER,
    errno.EEXIST: Cause.EXISTS,
    errno.EACCES: Cause.NOT_ALLOWED,
    errno.EPERM: Cause.NOT_ALLOWED,
    errno.EROFS: Cause.READ_ONLY,
    errno.ENOSPC: Cause.FULL,
    errno.EDQUOT: Cause.FULL,
    errno.EFBIG: Cause.FULL,
}


def from_system(error: OSError, path: Path | str) -> MillFileError:
    """The sentence for an error of the operating system about a file."""
    cause = _CAUSE_OF_ERRNO.get(error.errno or 0)
    if cause is not None:
        return fault(cause, path)
    text = _("“{file}” could not be used ({reason}); check the disk or the network and try again.")
    return MillFileError(text.format(file=path, reason=error.strerror), Cause.DISK, Path(path))
