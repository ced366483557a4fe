"""What a PDF looks like and says: pictures for preview and printer, text for checks."""

from __future__ import annotations

import io
from collections.abc import Iterator
from contextlib import contextmanager

import pypdfium2

from blendapp.domain.wording import _


@contextmanager
def _opened(pdf: bytes) -> Iterator[pypdfium2.PdfDocument]:
    try:
        document = pypdfium2.PdfDocument(pdf)
    except pypdfium2.PdfiumError as error:
        raise ValueError(_("These pages cannot be shown: the file is not a PDF, or it is damaged.")) from error
    try:
        yield document
    finally:
        document.close()


def render_png(pdf: bytes, dots_per_inch: float, page: int | None = None) -> list[bytes]:
    if not dots_per_inch > 0:
        raise ValueError(_("The resolution of a picture must be above 0 dots per inch."))
    with _opened(pdf) as document:
        if page is not None and not 0 <= page < len(document):
            raise IndexError(page)
        chosen = range(len(document)) if page is None else [page]
        return [_png(document[index], dots_per_inch) for index in chosen]


def _png(page: pypdfium2.PdfPage, dots_per_inch: float) -> bytes:
    bitmap = page.render(scale=dots_per_inch / 72)
    out = io.BytesIO()
    bitmap.to_pil().save(out, format="PNG", dpi=(dots_per_inch, dots_per_inch))
    return out.getvalue()


def page_count(pdf: bytes) -> int:
    with _opened(pdf) as document:
        return len(document)


def page_text(pdf: bytes) -> list[str]:
    with _opened(pdf) as document:
        return [_text(document[index]) for index in range(len(document))]


def _text(page: pypdfium2.PdfPage) -> str:
    found: str = page.get_textpage().get_text_bounded()
    # The reader marks a hyphen at the end of a line by this sign, as if it were not part of the word.
    return found.replace("\x02", "-\n").replace("\r\n", "\n")
