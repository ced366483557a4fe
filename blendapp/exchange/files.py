"""A file that arrives: what it is by its content, and the refusal in one sentence of one that cannot be a table."""

from __future__ import annotations

import hashlib
import stat
from dataclasses import dataclass
from functools import cached_property
from pathlib import Path

from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.wording import _
from blendapp.exchange.file_guard import OLE_MARK, ZIP_MARKS, Format, Unfit
from blendapp.exchange.parsing import parse_packed
from blendapp.exchange.tables import RawTable

__all__ = ["Format", "SourceFile", "open_source", "refusal", "utf16_without_mark"]

GREATEST_FILE_BYTES = 100_000_000


@dataclass(frozen=True)
class SourceFile:
    """A file as it was read, once: name without folder, content and format. tables: of a workbook, () of a text."""

    name: str
    data: bytes
    format: Format
    tables: tuple[RawTable, ...] = ()

    @cached_property
    def digest(self) -> str:
        """SHA-256 of the content, in hexadecimal."""
        return hashlib.sha256(self.data).hexdigest()


def refusal(name: str, text: str) -> Refused:
    """The refusal of a whole file in one sentence."""
    return Refused(Problem(text, Place(file=name)))


def open_source(path: str | Path) -> SourceFile:
    """Reads a file, says what it is, and has a workbook opened in a process of its own.

    Raises Refused with one sentence for a file that is missing, no file, too large, empty, damaged, locked with a
    password, no table of any known kind, or made to exhaust whoever opens it.
    """
    path = Path(path)
    data = _content(path)
    if data.startswith((*ZIP_MARKS, OLE_MARK)):
        try:
            found, tables = parse_packed(data)
        except Unfit as unfit:
            raise refusal(path.name, _sentence(unfit)) from None
        return SourceFile(path.name, data, found, tuple(tables))
    if _looks_binary(data):
        raise refusal(path.name, _("This is neither a workbook nor a table in text; save it again as .xlsx or .csv."))
    return SourceFile(path.name, data, Format.TEXT)


def _sentence(unfit: Unfit) -> str:
    """Why a workbook is not opened, with the mend."""
    known = {
        "damaged": _("The file is damaged or cut short; fetch it again."),
        "broken": _("The file is damaged and cannot be read as a workbook; open it and save it again."),
        "archive": _("This is an archive and no workbook; name the workbook inside it."),
        "office": _("This is an office document and no workbook; save the table as .xlsx."),
        "locked": _("The file is locked with a password; save a copy without one."),
        "swollen": _("The file unpacks to far more than a table holds and was not opened; ask for a clean copy."),
        "entities": _("The file declares entities, which no workbook needs, and was not opened; ask for a clean copy."),
        "repeats": _("The file repeats a filled cell far more often than a table does; ask for a clean copy."),
        "far": _("The sheet {sheet} reaches to row {row} and column {column}; delete what stands far out."),
        "long": _("A sheet has more than {count} filled rows, more than a mill buys by; keep only those needed."),
        "slow": _("The file takes too long to read; keep only the sheets needed, or save it again as .xlsx or .csv."),
        "memory": _("The file needs more memory than a table does; keep only the sheets needed."),
        "no process": _("No process can be started here to open the file safely; save the table as .csv."),
    }
    return known[unfit.reason].format(**unfit.values)


def _content(path: Path) -> bytes:
    try:
        status = path.stat()
        if stat.S_ISDIR(status.st_mode):
            raise refusal(path.name, _("This is a folder; name a file in it."))
        if not stat.S_ISREG(status.st_mode):
            raise refusal(path.name, _("This is no ordinary file; copy the table into one."))
        if status.st_size > GREATEST_FILE_BYTES:
            raise refusal(path.name, _("The file is too large to be a table of a mill; keep only the sheets needed."))
        data = path.read_bytes()
    except FileNotFoundError:
        raise refusal(path.name, _("There is no such file; check the name and the folder.")) from None
    except PermissionError:
        raise refusal(path.name, _("The file may not be read; ask for permission to read it.")) from None
    except (OSError, ValueError) as error:
        reason = getattr(error, "strerror", None) or str(error)
        raise refusal(path.name, _("The file cannot be read: {reason}.").format(reason=reason)) from None
    if not data.strip(b"\x00 \t\r\n"):
        raise refusal(path.name, _("The file is empty."))
    return data


def utf16_without_mark(head: bytes) -> str | None:
    """The codec of utf-16 text that lacks its mark: every second byte of Latin text is then 0. None if it is not."""
    even, odd = head[::2].count(0), head[1::2].count(0)
    if min(even, odd) * 20 > len(head) or max(even, odd) * 8 < len(head):
        return None
    return "utf-16-le" if odd > even else "utf-16-be"


def _looks_binary(data: bytes) -> bool:
    if data.startswith((b"\xff\xfe", b"\xfe\xff")):
        return False
    head = data[:65536]
    if b"\x00" in head:
        return utf16_without_mark(head) is None
    control = sum(byte < 32 and byte not in (9, 10, 12, 13, 26, 27) for byte in head)
    return control * 100 > len(head)
