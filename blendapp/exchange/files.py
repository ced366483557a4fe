"""What a file is by its content, and the refusal of files that are damaged, locked or hostile, before any is parsed."""

from __future__ import annotations

import hashlib
import io
import stat
import zipfile
import zlib
from dataclasses import dataclass
from enum import Enum
from functools import cached_property
from pathlib import Path

from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.wording import _

GREATEST_FILE_BYTES = 100_000_000
GREATEST_UNPACKED_BYTES = 300_000_000
# Deflate packs constant bytes 1000 to 1; a sheet of nothing but formatted blank cells stays near 20.
SUSPECT_RATIO = 200
SUSPECT_BYTES = 5_000_000
GREATEST_PARTS = 5_000

_OLE = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_ZIP = b"PK\x03\x04"


class Format(Enum):
    """What a file is, whatever its extension says."""

    XLSX = "xlsx"
    XLSB = "xlsb"
    XLS = "xls"
    ODS = "ods"
    TEXT = "text"


@dataclass(frozen=True)
class SourceFile:
    """A file as it was read, once: name without folder, content and format."""

    name: str
    data: bytes
    format: Format

    @cached_property
    def digest(self) -> str:
        """SHA-256 of the content, in hexadecimal."""
        return hashlib.sha256(self.data).hexdigest()


def refusal(name: str, text: str) -> Refused:
    """The refusal of a whole file in one sentence."""
    return Refused(Problem(text, Place(file=name)))


def open_source(path: str | Path) -> SourceFile:
    """Reads a file and says what it is.

    Raises Refused with one sentence for a file that is missing, no file, too large, empty, damaged, locked with a
    password, no table of any known kind, or made to exhaust whoever opens it.
    """
    path = Path(path)
    data = _content(path)
    if data.startswith((_ZIP, b"PK\x05\x06")):
        return SourceFile(path.name, data, _zip_format(path.name, data))
    if data.startswith(_OLE):
        return SourceFile(path.name, data, _ole_format(path.name, data))
    if _looks_binary(data):
        raise refusal(path.name, _("This is neither a workbook nor a table in text; save it again as .xlsx or .csv."))
    return SourceFile(path.name, data, Format.TEXT)


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


def _zip_format(name: str, data: bytes) -> Format:
    damaged = refusal(name, _("The file is damaged or cut short; fetch it again."))
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            parts = archive.infolist()
            _guard(name, parts)
            names = {part.filename for part in parts}
            found = _format_of(archive, names)
            if found is None:
                sentence = _("This is an archive and no workbook; name the workbook inside it.")
                raise refusal(name, sentence)
            for part in parts:
                _check_part(name, archive, part)
            return found
    except (zipfile.BadZipFile, zlib.error, EOFError, NotImplementedError, OSError, ValueError, KeyError):
        raise damaged from None
    except RuntimeError:  # zipfile has no narrower one for an encrypted part
        raise locked(name) from None


def _format_of(archive: zipfile.ZipFile, names: set[str]) -> Format | None:
    if "xl/workbook.bin" in names:
        return Format.XLSB
    if any(part.startswith("xl/") and part.endswith(".xml") for part in names) and "[Content_Types].xml" in names:
        return Format.XLSX
    if "mimetype" in names and "spreadsheet" in archive.read("mimetype")[:200].decode("latin-1"):
        return Format.ODS
    return None


def _guard(name: str, parts: list[zipfile.ZipInfo]) -> None:
    total = 0
    for part in parts:
        total += part.file_size
        swollen = part.file_size > SUSPECT_BYTES and part.file_size > SUSPECT_RATIO * max(part.compress_size, 1)
        if swollen or total > GREATEST_UNPACKED_BYTES or len(parts) > GREATEST_PARTS:
            sentence = _("The file unpacks to far more than a table holds and was not opened; ask for a clean copy.")
            raise refusal(name, sentence)
        if part.flag_bits & 1:
            raise locked(name)


def _check_part(name: str, archive: zipfile.ZipFile, part: zipfile.ZipInfo) -> None:
    """Unpacks a part, no further than its stated size, which checks its checksum; refuses document types."""
    with archive.open(part) as stream:
        head = stream.read(4096)
        if part.filename.endswith((".xml", ".rels")) and (b"<!DOCTYPE" in head or b"<!ENTITY" in head):
            raise refusal(name, entities_sentence())
        while stream.read(1 << 20):
            pass


def entities_sentence() -> str:
    return _("The file declares entities, which no workbook needs, and was not opened; ask for a clean copy.")


def _ole_format(name: str, data: bytes) -> Format:
    if "EncryptedPackage".encode("utf-16-le") in data:
        raise locked(name)
    for stream in ("Workbook", "Book"):
        if stream.encode("utf-16-le") in data:
            return Format.XLS
    raise refusal(name, _("This is an office document and no workbook; save the table as .xlsx."))


def locked(name: str) -> Refused:
    """The refusal of a file that needs a password."""
    return refusal(name, _("The file is locked with a password; save a copy without one."))


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
