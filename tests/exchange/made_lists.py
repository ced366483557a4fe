"""Price lists made by code in every format: workbook, delimited text, OpenDocument, and the old binary workbook."""

from __future__ import annotations

import struct
import zipfile
from collections.abc import Sequence
from pathlib import Path
from typing import Any
from xml.sax.saxutils import escape

import openpyxl

Rows = Sequence[Sequence[Any]]


def write_xlsx(path: Path, rows: Rows, sheet: str = "Prices") -> Path:
    workbook = openpyxl.Workbook()
    workbook.worksheets[0].title = sheet
    for row in rows:
        workbook.worksheets[0].append(list(row))
    workbook.save(path)
    return path


def write_text(path: Path, rows: Rows, separator: str = ",", encoding: str = "utf-8") -> Path:
    def cell(value: Any) -> str:
        text = "" if value is None else str(value)
        return '"' + text.replace('"', '""') + '"' if any(c in text for c in (separator, '"', "\n")) else text

    text = "\r\n".join(separator.join(cell(value) for value in row) for row in rows) + "\r\n"
    path.write_bytes(text.encode(encoding))
    return path


def write_ods(path: Path, rows: Rows, sheet: str = "Prices") -> Path:
    def cell(value: Any) -> str:
        if value is None:
            return "<table:table-cell/>"
        if isinstance(value, int | float):
            kind, text = f'office:value-type="float" office:value="{value}"', str(value)
        else:
            kind, text = 'office:value-type="string"', escape(str(value))
        return f"<table:table-cell {kind}><text:p>{text}</text:p></table:table-cell>"

    body = "".join(f"<table:table-row>{''.join(map(cell, row))}</table:table-row>" for row in rows)
    across = '<table:table-cell table:number-columns-repeated="16384"/>'
    blank = f'<table:table-row table:number-rows-repeated="1040000">{across}</table:table-row>'
    content = (
        '<?xml version="1.0" encoding="UTF-8"?><office:document-content '
        'xmlns:office="urn:oasis:names:tc:opendocument:xmlns:office:1.0" '
        'xmlns:table="urn:oasis:names:tc:opendocument:xmlns:table:1.0" '
        'xmlns:text="urn:oasis:names:tc:opendocument:xmlns:text:1.0" office:version="1.2"><office:body>'
        f'<office:spreadsheet><table:table table:name="{escape(sheet)}">{body}{blank}</table:table>'
        "</office:spreadsheet></office:body></office:document-content>"
    )
    with zipfile.ZipFile(path, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("mimetype", "application/vnd.oasis.opendocument.spreadsheet")
        archive.writestr("content.xml", content)
        archive.writestr("META-INF/manifest.xml", (
            '<?xml version="1.0"?><manifest:manifest '
            'xmlns:manifest="urn:oasis:names:tc:opendocument:xmlns:manifest:1.0">'
            '<manifest:file-entry manifest:full-path="/" '
            'manifest:media-type="application/vnd.oasis.opendocument.spreadsheet"/></manifest:manifest>'
        ))
    return path


def write_xls(path: Path, rows: Rows, sheet: str = "Prices") -> Path:
    """A workbook of the binary format BIFF8 in an OLE container: numbers and texts only."""

    def record(kind: int, data: bytes) -> bytes:
        return struct.pack("<HH", kind, len(data)) + data

    def label(text: str) -> bytes:
        return struct.pack("<HB", len(text), 1) + text.encode("utf-16-le")

    cells = b""
    for number, row in enumerate(rows):
        for column, value in enumerate(row):
            place = struct.pack("<HHH", number, column, 0)
            if isinstance(value, int | float):
                cells += record(0x0203, place + struct.pack("<d", value))
            elif value is not None:
                cells += record(0x0204, place + label(str(value)))
    begin = struct.pack("<HHHHII", 0x0600, 0x0005, 0, 0, 0, 0)
    name = struct.pack("<BB", len(sheet), 0) + sheet.encode("latin-1")
    head_length = len(record(0x0809, begin)) + len(record(0x0085, struct.pack("<IH", 0, 0) + name)) + 4
    head = record(0x0809, begin) + record(0x0085, struct.pack("<IH", head_length, 0) + name) + record(0x000A, b"")
    body = record(0x0809, struct.pack("<HHHHII", 0x0600, 0x0010, 0, 0, 0, 0)) + cells + record(0x000A, b"")
    path.write_bytes(_ole(head + body))
    return path


def _ole(stream: bytes) -> bytes:
    """A compound file with the one stream Workbook, in sectors of 512 bytes."""
    size = max(len(stream), 4096)
    stream = stream.ljust((size + 511) // 512 * 512, b"\x00")
    sectors = len(stream) // 512
    end, free, table = 0xFFFFFFFE, 0xFFFFFFFF, 0xFFFFFFFD
    chain = [table, end, *range(3, sectors + 2), end]
    chain += [free] * (128 - len(chain))
    header = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(16) + struct.pack("<HHHHH", 0x3E, 3, 0xFFFE, 9, 6) + bytes(6)
    header += struct.pack("<IIIIIIIII", 0, 1, 1, 0, 4096, end, 0, end, 0) + struct.pack("<I", 0)
    header = header.ljust(512, b"\xff")

    def entry(name: str, kind: int, child: int, start: int, length: int) -> bytes:
        text = (name + "\0").encode("utf-16-le")
        return (
            text.ljust(64, b"\0") + struct.pack("<HBB", len(text), kind, 1) + struct.pack("<III", free, free, child)
            + bytes(36) + struct.pack("<IQ", start, length)
        )

    directory = entry("Root Entry", 5, 1, end, 0) + entry("Workbook", 2, free, 2, size) + bytes(256)
    assert len(chain) == 128, "more rows than one sector of the allocation table can hold"
    return header + struct.pack("<128I", *chain) + directory + stream
