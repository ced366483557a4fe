"""Pages: batch sheet, its sisters and formula report as PDF, and any PDF as pictures.

The PDF library and the renderer load slowly and are imported when the first page is asked for, so that a window
starts without them. The PDF that is made here is what the preview shows, the printer gets and the file keeps.
"""

from __future__ import annotations

from blendapp.documents.paper import Paper
from blendapp.domain.batches import Batch, BatchPage
from blendapp.domain.results import Result

__all__ = [
    "Paper", "batch_sheet", "blank_record", "formula_report", "master_record", "page_count", "page_text", "render_png",
]


def batch_sheet(batch: Batch, paper: Paper | None = None) -> bytes:
    """The batch sheet as a PDF: what the operator weighs from and writes into.

    paper: None is the paper that the batch names. The same batch, paper, language and notation give the same bytes.
    """
    return _batch_page(batch, BatchPage.SHEET, paper)


def master_record(batch: Batch, paper: Paper | None = None) -> bytes:
    """The master formula record as a PDF: what stands of this version for years, with no place to weigh in."""
    return _batch_page(batch, BatchPage.MASTER, paper)


def blank_record(batch: Batch, paper: Paper | None = None) -> bytes:
    """The blank batch record as a PDF: the sheet with its targets, all else to be filled in by hand."""
    return _batch_page(batch, BatchPage.BLANK, paper)


def _batch_page(batch: Batch, page: BatchPage, paper: Paper | None) -> bytes:
    from blendapp.documents import batch_page

    return batch_page.draw(batch, page, paper or Paper[batch.paper.upper()])


def formula_report(result: Result, *, mill: str = "", version: str = "", paper: Paper = Paper.A4) -> bytes:
    """One formulated formula as a PDF, whatever its status; without an answer no amount, value or cost stands on it.

    mill, version: as they stand on the page; "" leaves them out.
    """
    from blendapp.documents import report_page

    return report_page.draw(result, mill, version, paper)


def render_png(pdf: bytes, dots_per_inch: float, page: int | None = None) -> list[bytes]:
    """Every page as a PNG picture, or only the one at index `page` (from 0).

    Raises ValueError for what is no PDF or a resolution that is not above 0, IndexError for a page that is not there.
    """
    from blendapp.documents import pictures

    return pictures.render_png(pdf, dots_per_inch, page)


def page_count(pdf: bytes) -> int:
    """How many pages a PDF has. Raises ValueError if it is none."""
    from blendapp.documents import pictures

    return pictures.page_count(pdf)


def page_text(pdf: bytes) -> list[str]:
    """The text of each page as a PDF reader finds it. Raises ValueError if it is no PDF."""
    from blendapp.documents import pictures

    return pictures.page_text(pdf)
