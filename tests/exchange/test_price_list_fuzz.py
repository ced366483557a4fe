"""Damaged price lists of every format: read or refused in one sentence, never an error of another kind."""

from __future__ import annotations

import io
import random
import zipfile
from collections.abc import Callable
from pathlib import Path

import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Fate
from blendapp.domain.problems import Refused
from blendapp.exchange import read_price_list
from tests.exchange.made_lists import Rows, write_ods, write_text, write_xls, write_xlsx
from tests.mills import TODAY

ROWS: Rows = [
    ["Larkwater Grain, prices in USD"], ["Ingredient", "Price", "Freight", "Unit", "Valid from"],
    ["Maize", 190.5, 14.5, "t", "9/3/2026"], ["Wheat", "212,50", None, "bu", "March 9, 2026"],
    ["Soybean meal", "call", 3, "25 kg bag", 46090], ["Limestone", -3, 0, "t DM", "soon"],
]


def _damaged(data: bytes, chance: random.Random) -> bytes:
    found = bytearray(data)
    for _ in range(chance.randint(1, 12)):
        at = chance.randrange(len(found))
        match chance.randrange(4):
            case 0:
                found[at] = chance.randrange(256)
            case 1:
                del found[at : at + chance.randint(1, 40)]
            case 2:
                found[at:at] = found[at : at + chance.randint(1, 40)]
            case _:
                found[at:at] = chance.choice([b"\x00", b'"', b"<", b"&", b";", b"\t", b"\xff\xfe", b"=1/0", b"#REF!"])
        if not found:
            return b"x"
    return bytes(found)


def _inside(data: bytes, chance: random.Random) -> bytes:
    """The archive anew with one part damaged, so that its checksums hold and the damage reaches the parsers."""
    made = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(made, "w", zipfile.ZIP_DEFLATED) as new:
        parts = old.namelist()
        struck = chance.choice(parts)
        for part in parts:
            content = old.read(part)
            new.writestr(part, _damaged(content, chance) if part == struck and content else content)
    return made.getvalue()


@pytest.mark.parametrize(
    ("write", "damage", "count"),
    [(write_text, _damaged, 150), (write_xlsx, _damaged, 40), (write_xlsx, _inside, 80), (write_ods, _inside, 20),
     (write_xls, _damaged, 20)],
)
def test_a_damaged_list_is_read_or_refused(
    tmp_path: Path, library: Library, write: Callable[[Path, Rows], Path],
    damage: Callable[[bytes, random.Random], bytes], count: int,
) -> None:
    chance = random.Random(5)
    path = write(tmp_path / "list", ROWS)
    data = path.read_bytes()
    for _round in range(count):
        path.write_bytes(damage(data, chance))
        try:
            reading = read_price_list(path, library, TODAY)
        except Refused as refused:
            sentence = str(refused)
        else:
            sentence = ""
            assert sum(reading.count(fate) for fate in Fate) == len(reading.rows)
        assert "\n" not in sentence
