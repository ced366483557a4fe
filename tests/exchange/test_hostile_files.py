"""A file that cannot be read is refused in one sentence, whatever it is, and nothing but that happens."""

from __future__ import annotations

import io
import random
import zipfile
from collections.abc import Callable
from contextlib import suppress
from pathlib import Path

import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Fate
from blendapp.domain.problems import Refused
from blendapp.exchange import read_price_list, read_workbook
from tests.exchange.made_files import small_mill, write_sheets
from tests.exchange.made_lists import Rows, write_ods, write_text, write_xls, write_xlsx
from tests.mills import TODAY, Maker

ROWS: Rows = [["Ingredient", "Price", "Unit"], ["Maize", 205.25, "t"]]


def library() -> Library:
    maker = Maker()
    maker.ingredient("Maize", 200.0)
    return maker.library


def sentence(read: Callable[[], object]) -> str:
    """The one sentence with which a file is refused."""
    with pytest.raises(Refused) as caught:
        read()
    assert len(caught.value.problems) == 1
    return str(caught.value.problems[0])


def both(path: Path) -> tuple[str, str]:
    """How the price reader and the workbook reader refuse a file."""
    return (
        sentence(lambda: read_price_list(path, library(), TODAY)),
        sentence(lambda: read_workbook(path, Library(), {}, TODAY)),
    )


def repacked(path: Path, to: Path, change: Callable[[str, bytes], bytes]) -> Path:
    """A copy of an archive with its parts changed."""
    with zipfile.ZipFile(path) as source, zipfile.ZipFile(to, "w", zipfile.ZIP_DEFLATED) as target:
        for part in source.infolist():
            target.writestr(part.filename, change(part.filename, source.read(part)))
    return to


@pytest.mark.parametrize(
    ("content", "said"),
    [
        (b"", "empty"), (b"\x00" * 5000, "empty"), (bytes(range(256)) * 40, "neither a workbook nor a table"),
        (b"\x89PNG\r\n\x1a\n" + bytes(2000), "neither a workbook nor a table"), (b"PK\x03\x04 and no more", "damaged"),
        (b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(600), "no workbook"),
    ],
)
def test_what_is_no_table_is_refused(tmp_path: Path, content: bytes, said: str) -> None:
    path = tmp_path / "list.xlsx"
    path.write_bytes(content)
    for text in both(path):
        assert text.startswith("list.xlsx: ")
        assert said in text


def test_a_folder_and_a_missing_file_are_refused(tmp_path: Path) -> None:
    assert all("folder" in text for text in both(tmp_path))
    assert all("no such file" in text for text in both(tmp_path / "nothing.xlsx"))


def test_a_text_is_no_workbook(tmp_path: Path) -> None:
    path = write_text(tmp_path / "b.xlsx", ROWS)
    assert "text and no workbook" in sentence(lambda: read_workbook(path, Library(), {}, TODAY))


def test_another_archive_is_no_workbook(tmp_path: Path) -> None:
    path = tmp_path / "list.xlsx"
    with zipfile.ZipFile(path, "w") as archive:
        archive.writestr("letter.txt", "Dear miller")
    assert all("archive and no workbook" in text for text in both(path))


def test_a_workbook_that_is_cut_short_is_refused(tmp_path: Path) -> None:
    data = write_sheets(tmp_path / "whole.xlsx", small_mill()).read_bytes()
    path = tmp_path / "cut.xlsx"
    for length in (len(data) // 3, len(data) * 2 // 3, len(data) - 10):
        path.write_bytes(data[:length])
        both(path)


def test_a_workbook_with_a_password_is_named_so(tmp_path: Path) -> None:
    path = tmp_path / "locked.xlsx"
    directory = "EncryptedPackage".encode("utf-16-le")
    path.write_bytes(b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1" + bytes(1000) + directory + bytes(900))
    assert all("password" in text for text in both(path))


def test_an_archive_with_a_password_is_named_so(tmp_path: Path) -> None:
    data = bytearray(write_xlsx(tmp_path / "a.xlsx", ROWS).read_bytes())
    place = data.find(b"PK\x01\x02")
    while place >= 0:
        data[place + 8] |= 1
        place = data.find(b"PK\x01\x02", place + 4)
    path = tmp_path / "b.xlsx"
    path.write_bytes(data)
    assert all("password" in text for text in both(path))


def test_a_compressed_bomb_is_not_opened(tmp_path: Path) -> None:
    inside = write_xlsx(tmp_path / "a.xlsx", ROWS)
    path = repacked(
        inside, tmp_path / "bomb.xlsx",
        lambda name, data: data + b" " * 60_000_000 if name.endswith("sheet1.xml") else data,
    )
    assert path.stat().st_size < 100_000
    assert all("unpacks to far more" in text for text in both(path))


def test_a_bomb_that_lies_about_its_size_is_refused(tmp_path: Path) -> None:
    inside = write_xlsx(tmp_path / "a.xlsx", ROWS)
    path = repacked(
        inside, tmp_path / "liar.xlsx",
        lambda name, data: data + b" " * 60_000_000 if name.endswith("sheet1.xml") else data,
    )
    data = path.read_bytes()
    with zipfile.ZipFile(io.BytesIO(data)) as archive:
        size = next(p for p in archive.infolist() if p.filename.endswith("sheet1.xml")).file_size
    path.write_bytes(data.replace(size.to_bytes(4, "little"), (4000).to_bytes(4, "little")))
    assert all("damaged" in text for text in both(path))


@pytest.mark.parametrize("part", ["xl/worksheets/sheet1.xml", "xl/workbook.xml", "xl/styles.xml"])
def test_an_external_entity_is_not_followed(tmp_path: Path, part: str) -> None:
    (tmp_path / "secret.txt").write_text("777")
    declared = f'<!DOCTYPE x [<!ENTITY e SYSTEM "file://{tmp_path}/secret.txt">]>'.encode()

    def change(name: str, data: bytes) -> bytes:
        head, _sign, rest = data.partition(b"?>") if data.startswith(b"<?xml") else (b"", b"", data)
        return (head + b"?>" if head else b"") + declared + rest if name == part else data

    path = repacked(write_xlsx(tmp_path / "a.xlsx", ROWS), tmp_path / "entity.xlsx", change)
    assert all("declares entities" in text for text in both(path))


def test_an_entity_behind_a_long_comment_is_not_followed_either(tmp_path: Path) -> None:
    declared = b"<!--" + b"x" * 10_000 + b"-->" + b'<!DOCTYPE x [<!ENTITY e "1">]>'
    path = repacked(
        write_xlsx(tmp_path / "a.xlsx", ROWS), tmp_path / "entity.xlsx",
        lambda name, data: declared + data if name.endswith("sheet1.xml") else data,
    )
    assert all("declares entities" in text for text in both(path))


def test_a_cell_far_out_costs_no_memory(tmp_path: Path) -> None:
    path = repacked(
        write_xlsx(tmp_path / "a.xlsx", ROWS), tmp_path / "far.xlsx",
        lambda name, data: data.replace(b'r="B2"', b'r="XFD1048576"') if name.endswith("sheet1.xml") else data,
    )
    assert all("reaches to row 1048576 and column 16384" in text for text in both(path))


def test_a_filled_cell_repeated_a_million_times_is_refused(tmp_path: Path) -> None:
    path = repacked(
        write_ods(tmp_path / "a.ods", ROWS), tmp_path / "many.ods",
        lambda name, data: data.replace(
            b'<table:table-cell office:value-type="float"',
            b'<table:table-cell table:number-columns-repeated="16384" office:value-type="float"',
        ).replace(b"<table:table-row>", b'<table:table-row table:number-rows-repeated="1000000">')
        if name == "content.xml" else data,
    )
    assert all("repeats a filled cell" in text for text in both(path))


def test_a_text_of_one_endless_cell_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "long.csv"
    path.write_text("Ingredient,Price,Unit\nMaize," + "1" * 300_000 + ",t\n")
    assert "too long" in sentence(lambda: read_price_list(path, library(), TODAY))


@pytest.mark.parametrize(("write", "times"), [(write_xlsx, 100), (write_ods, 20), (write_xls, 12), (write_text, 100)])
def test_a_file_with_damaged_bytes_is_read_or_refused_in_sentences(
    tmp_path: Path, write: Callable[[Path, Rows], Path], times: int
) -> None:
    data = write(tmp_path / "whole", ROWS).read_bytes()
    path = tmp_path / "damaged"
    for seed in range(times):
        chance = random.Random(seed)
        changed = bytearray(data)
        for _byte in range(chance.randint(1, 12)):
            changed[chance.randrange(len(changed))] = chance.randrange(256)
        path.write_bytes(bytes(changed))
        for read in (
            lambda: read_price_list(path, library(), TODAY), lambda: read_workbook(path, Library(), {}, TODAY)
        ):
            with suppress(Refused):
                read()


@pytest.mark.parametrize(
    "part", ["xl/worksheets/sheet1.xml", "xl/workbook.xml", "xl/styles.xml", "[Content_Types].xml"]
)
def test_a_part_with_damaged_bytes_is_read_or_refused_in_sentences(tmp_path: Path, part: str) -> None:
    whole = write_xlsx(tmp_path / "whole.xlsx", ROWS)
    for seed in range(60):
        chance = random.Random(seed)

        def damage(name: str, data: bytes, chance: random.Random = chance) -> bytes:
            if name != part:
                return data
            changed = bytearray(data)
            for _byte in range(chance.randint(1, 6)):
                changed[chance.randrange(len(changed))] = chance.randrange(32, 127)
            return bytes(changed)

        path = repacked(whole, tmp_path / "damaged.xlsx", damage)
        for read in (
            lambda: read_price_list(path, library(), TODAY),  # noqa: B023
            lambda: read_workbook(path, Library(), {}, TODAY),  # noqa: B023
        ):
            with suppress(Refused):
                read()


def test_a_text_of_a_million_columns_is_refused(tmp_path: Path) -> None:
    path = tmp_path / "wide.csv"
    path.write_text(",".join(["x"] * 1_000_000) + "\n")
    assert "1000000 columns" in sentence(lambda: read_price_list(path, library(), TODAY))


def test_a_workbook_of_a_million_columns_is_refused(tmp_path: Path) -> None:
    chance = random.Random(1)  # so that it packs no better than a table does
    cells = b"".join(b"<c><v>%d</v></c>" % chance.randrange(10**9) for _cell in range(1_000_000))
    path = repacked(
        write_xlsx(tmp_path / "a.xlsx", ROWS), tmp_path / "wide.xlsx",
        lambda name, data: data.replace(b"<sheetData>", b'<sheetData><row r="1">' + cells + b"</row>")
        if name.endswith("sheet1.xml") else data,
    )
    assert "and column 16385" in sentence(lambda: read_price_list(path, library(), TODAY))


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("x," * 900 + "\nIngredient,Price,Unit\n", "reaches to column AHP"),
        ("Maize,205,t\n" * 60_000, "60000 filled rows"),
        ("Ingredient,Price,Unit\nMaize,205,t\n" * 600, "more than 500 rows of headings"),
    ],
)
def test_what_is_no_list_of_a_mill_is_refused_at_once(tmp_path: Path, text: str, said: str) -> None:
    path = tmp_path / "much.csv"
    path.write_text(text.replace("x,", "word,"))
    assert said in sentence(lambda: read_price_list(path, library(), TODAY))


def test_a_very_long_cell_does_not_fill_the_screen(tmp_path: Path) -> None:
    path = write_text(tmp_path / "long.csv", [*ROWS, ["Maize", "1,5 " * 9000, "t"], ["Soy " * 9000, 205, "t"]])
    rows = read_price_list(path, library(), TODAY).rows
    assert [row.fate for row in rows[2:]] == [Fate.QUESTION, Fate.QUESTION]
    assert all(len(row.reason) < 500 and all(len(one.text) < 500 for one in row.questions) for row in rows)


def test_many_twins_are_told_in_a_short_sentence(tmp_path: Path) -> None:
    path = write_text(tmp_path / "twins.csv", [*ROWS, *([["Maize", 205, "t"]] * 3000)])
    rows = read_price_list(path, library(), TODAY).rows
    assert rows[1].reason.endswith("row 7 and row 8 and 2994 more; say which holds.")
