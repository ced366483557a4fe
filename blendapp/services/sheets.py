"""Pages as bytes, files that appear whole, and a batch as plain data, so that its sheet prints alike years later."""

from __future__ import annotations

import contextlib
import datetime
import json
import os
import secrets
from collections.abc import Callable, Iterator
from dataclasses import asdict, replace
from pathlib import Path
from typing import Any

from blendapp.domain.batches import Batch, BatchLine, BatchPage, CleanOut, Step, ToMake
from blendapp.domain.formulas import LimitKind
from blendapp.domain.mills import PrintedBatch
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.results import LimitResult, NutrientResult, Result, Side
from blendapp.domain.wording import _
from blendapp.services.targets import refuse_over_a_mill


def batch_pdf(batch: Batch, paper: str = "", page: str = BatchPage.SHEET) -> bytes:
    """A page of a batch as a PDF. paper: "A4" or "letter", "" is the batch's own. page: one of BatchPage."""
    from blendapp import documents

    draw = {
        BatchPage.SHEET: documents.batch_sheet,
        BatchPage.MASTER: documents.master_record,
        BatchPage.BLANK: documents.blank_record,
    }[BatchPage(page)]
    return draw(batch, documents.Paper[paper.upper()] if paper else None)


def write_page(batch: Batch, path: Path, page: str, paper: str = "") -> None:
    """Write a page of a batch that takes no number and is not recorded. Raises Refused as `unfinished` does."""
    with unfinished(path, batch_pdf(batch, paper, page)) as finish:
        finish()


def report_pdf(result: Result, mill: str, version: str, paper: str = "A4") -> bytes:
    """The report of an answer, or of why there is none, as a PDF."""
    from blendapp import documents

    return documents.formula_report(result, mill=mill, version=version, paper=documents.Paper[paper.upper()])


def page_images(pdf: bytes, dots_per_inch: float) -> Iterator[bytes]:
    """Every page of a PDF as PNG, one after the other, for the preview and the printer."""
    from blendapp import documents

    for number in range(documents.page_count(pdf)):
        yield documents.render_png(pdf, dots_per_inch, number)[0]


def page_count(pdf: bytes) -> int:
    """How many pages a PDF has."""
    from blendapp import documents

    return documents.page_count(pdf)


@contextlib.contextmanager
def unfinished(path: Path, data: bytes) -> Iterator[Callable[[], None]]:
    """Data written beside its path; calling what is yielded puts it in place, else it is gone after.

    Raises Refused where the folder or the file cannot be written, and where a mill file stands there.
    """
    refuse_over_a_mill(path)
    if path.is_dir():
        raise _unwritable(path, IsADirectoryError(_("it is a folder")))
    # Not a private temporary file: the sheet is for whoever the folder lets read.
    beside = path.with_name(f".{path.name}.{secrets.token_hex(4)}")
    try:
        try:
            with open(beside, "xb") as file:
                file.write(data)
                file.flush()
                os.fsync(file.fileno())
        except OSError as error:
            raise _unwritable(path, error) from error
        yield lambda: _put(beside, path)
    finally:
        with contextlib.suppress(OSError):
            beside.unlink()


def _put(beside: Path, path: Path) -> None:
    try:
        os.replace(beside, path)
    except OSError as error:
        raise _unwritable(path, error) from error


def _unwritable(path: Path, error: OSError) -> Refused:
    text = _("The file cannot be written ({reason}); choose another place.")
    return Refused(Problem(text.format(reason=error.strerror or error), Place(file=str(path))))


def broken_sentences(batch: Batch) -> list[str]:
    """The limits that a batch does not keep, with by how much, as its pages say it."""
    from blendapp.documents.phrases import broken_words

    return [broken_words(batch.limits[at]) for at in batch.broken]


def printed_batch(record: PrintedBatch, copy: int = 0) -> Batch:
    """The batch of a printed sheet, as it was printed or as such a copy of it."""
    return replace(batch_from_plain(json.loads(record.sheet)), copy=copy)


def batch_to_plain(batch: Batch) -> dict[str, Any]:
    """A batch as JSON can hold it."""
    plain = asdict(batch)
    plain["made"] = batch.made.isoformat()
    return plain


def batch_from_plain(plain: dict[str, Any]) -> Batch:
    """The batch behind its plain form."""
    limits = tuple(
        LimitResult(**{
            **limit,
            "kind": LimitKind(limit["kind"]),
            "binding": None if limit["binding"] is None else Side(limit["binding"]),
            "room": None if limit["room"] is None else tuple(limit["room"]),
        })
        for limit in plain["limits"]
    )
    nutrients = tuple(NutrientResult(**{**n, "missing": tuple(n["missing"])}) for n in plain["nutrients"])
    return Batch(**{
        **plain,
        "made": datetime.date.fromisoformat(plain["made"]),
        "lines": tuple(
            BatchLine(**{**line, **{name: tuple(line.get(name, ())) for name in ("bins", "of_opened", "tags")}})
            for line in plain["lines"]
        ),
        "steps": tuple(Step(**step) for step in plain.get("steps", ())),
        "to_make": tuple(ToMake(**one) for one in plain.get("to_make", ())),
        "clean_out": None if plain.get("clean_out") is None else CleanOut(plain["clean_out"]),
        "limits": limits,
        "nutrients": nutrients,
        "broken": tuple(plain["broken"]),
        "cautions": tuple(plain["cautions"]),
    })
