"""Texts that are attached to the cells of an .xlsx sheet. Runs only in the process that parses."""

from __future__ import annotations

import posixpath
import re
import zipfile

from blendapp.exchange.tables import column_number
from blendapp.exchange.xlsx_parser import careful_parser

MOST_COMMENTS, MOST_LETTERS = 5_000, 300
_REFERENCE = re.compile(r"([A-Z]{1,3})([0-9]{1,7})")
# A comment in a thread is kept a second time as plain text, below a hint to those who see only that.
_THREAD = re.compile(r"^\[Threaded comment\].*?Comment:\s*", re.DOTALL)
_AUTHOR = re.compile(r"^[^\n:]{1,60}:\s*\n")


def read_comments(archive: zipfile.ZipFile, part: str) -> dict[tuple[int, int], str]:
    """The comments of the sheet in a part of the archive, by (row, column) from 0, without the name of their author.

    Raises ForbiddenEntities, expat.ExpatError.
    """
    folder, name = posixpath.split(part)
    try:
        relations = archive.read(f"{folder}/_rels/{name}.rels")
    except KeyError:
        return {}
    targets: list[str] = []

    def relation(tag: str, attributes: dict[str, str]) -> None:
        if tag.rpartition(":")[2] == "Relationship" and attributes.get("Type", "").endswith("/comments"):
            target = attributes.get("Target", "")
            targets.append(target.lstrip("/") if target.startswith("/") else posixpath.join(folder, target))

    parser = careful_parser()
    parser.StartElementHandler = relation
    parser.Parse(relations, True)
    found: dict[tuple[int, int], str] = {}
    for target in targets:
        try:
            data = archive.read(posixpath.normpath(target))
        except KeyError:
            continue
        reading = _Reading()
        parser = careful_parser()
        parser.StartElementHandler = reading.start
        parser.EndElementHandler = reading.end
        parser.CharacterDataHandler = reading.characters
        parser.Parse(data, True)
        found |= reading.found
    return found


class _Reading:
    def __init__(self) -> None:
        self.found: dict[tuple[int, int], str] = {}
        self.place: tuple[int, int] | None = None
        self.in_text = False
        self.letters: list[str] = []

    def start(self, tag: str, attributes: dict[str, str]) -> None:
        tag = tag.rpartition(":")[2]
        if tag == "comment":
            found = _REFERENCE.fullmatch(attributes.get("ref", ""))
            self.place = (int(found[2]) - 1, column_number(found[1])) if found else None
            self.letters.clear()
        elif tag == "t":
            self.in_text = True

    def characters(self, text: str) -> None:
        if self.in_text:
            self.letters.append(text)

    def end(self, tag: str) -> None:
        tag = tag.rpartition(":")[2]
        if tag == "t":
            self.in_text = False
        elif tag == "comment" and self.place is not None and len(self.found) < MOST_COMMENTS:
            text = _AUTHOR.sub("", _THREAD.sub("", "".join(self.letters).strip()))
            if text := " ".join(text.split())[:MOST_LETTERS]:
                self.found[self.place] = text
