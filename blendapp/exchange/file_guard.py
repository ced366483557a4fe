"""Looks through a packed file before any parser opens it, and says what it is. Runs in the process that parses."""

from __future__ import annotations

import io
import zipfile
import zlib
from enum import Enum

GREATEST_UNPACKED_BYTES = 300_000_000
# Deflate packs constant bytes 1000 to 1; a sheet of nothing but formatted blank cells stays near 20.
SUSPECT_RATIO = 200
SUSPECT_BYTES = 5_000_000
GREATEST_PARTS = 5_000

OLE_MARK = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
ZIP_MARKS = (b"PK\x03\x04", b"PK\x05\x06")


class Format(Enum):
    """What a file is, whatever its extension says."""

    XLSX = "xlsx"
    XLSB = "xlsb"
    XLS = "xls"
    ODS = "ods"
    TEXT = "text"


class Unfit(Exception):
    """A file that is not opened. reason: a key of files.SENTENCES; values: what its sentence names."""

    def __init__(self, reason: str, **values: object) -> None:
        super().__init__(reason)
        self.reason, self.values = reason, values


def packed_format(data: bytes) -> Format:
    """What a file is that begins with one of the marks above.

    Raises Unfit for one that is damaged, locked with a password, no workbook, or made to exhaust whoever opens it.
    """
    return _ole_format(data) if data.startswith(OLE_MARK) else _zip_format(data)


def _zip_format(data: bytes) -> Format:
    try:
        with zipfile.ZipFile(io.BytesIO(data)) as archive:
            parts = archive.infolist()
            _guard(parts)
            found = _format_of(archive, {part.filename for part in parts})
            if found is None:
                raise Unfit("archive")
            for part in parts:
                _check_part(archive, part)
            return found
    except (zipfile.BadZipFile, zlib.error, EOFError, NotImplementedError, OSError, ValueError, KeyError):
        raise Unfit("damaged") from None
    except RuntimeError:  # zipfile has no narrower one for an encrypted part
        raise Unfit("locked") from None


def _format_of(archive: zipfile.ZipFile, names: set[str]) -> Format | None:
    if "xl/workbook.bin" in names:
        return Format.XLSB
    if any(part.startswith("xl/") and part.endswith(".xml") for part in names) and "[Content_Types].xml" in names:
        return Format.XLSX
    if "mimetype" in names and "spreadsheet" in archive.read("mimetype")[:200].decode("latin-1"):
        return Format.ODS
    return None


def _guard(parts: list[zipfile.ZipInfo]) -> None:
    total = 0
    for part in parts:
        total += part.file_size
        swollen = part.file_size > SUSPECT_BYTES and part.file_size > SUSPECT_RATIO * max(part.compress_size, 1)
        if swollen or total > GREATEST_UNPACKED_BYTES or len(parts) > GREATEST_PARTS:
            raise Unfit("swollen")
        if part.flag_bits & 1:
            raise Unfit("locked")


def _check_part(archive: zipfile.ZipFile, part: zipfile.ZipInfo) -> None:
    """Unpacks a part, no further than its stated size, which checks its checksum; refuses document types."""
    with archive.open(part) as stream:
        head = stream.read(4096)
        if part.filename.endswith((".xml", ".rels")) and (b"<!DOCTYPE" in head or b"<!ENTITY" in head):
            raise Unfit("entities")
        while stream.read(1 << 20):
            pass


def _ole_format(data: bytes) -> Format:
    if "EncryptedPackage".encode("utf-16-le") in data:
        raise Unfit("locked")
    for stream in ("Workbook", "Book"):
        if stream.encode("utf-16-le") in data:
            return Format.XLS
    raise Unfit("office")
