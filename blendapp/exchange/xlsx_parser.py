"""The parser of every XML part of a workbook; it opens nothing that declares entities."""

from __future__ import annotations

from xml.parsers import expat


class ForbiddenEntities(Exception):
    """A part of the file declares a document type."""


def careful_parser(namespaces: bool = False) -> expat.XMLParserType:
    """A parser that raises ForbiddenEntities where a document type or an entity is declared."""
    def forbid(*_arguments: object) -> None:
        raise ForbiddenEntities

    parser = expat.ParserCreate(namespace_separator=" ") if namespaces else expat.ParserCreate()
    parser.StartDoctypeDeclHandler = forbid
    parser.EntityDeclHandler = forbid
    parser.buffer_text = True
    return parser
