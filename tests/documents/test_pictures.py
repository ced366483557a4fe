from __future__ import annotations

import io
import subprocess
import sys

import page_cases as made
import pytest
from PIL import Image

from blendapp.documents import Paper, batch_sheet, page_count, page_text, render_png


def picture(png: bytes) -> Image.Image:
    return Image.open(io.BytesIO(png))


@pytest.mark.parametrize(("paper", "size"), [(Paper.A4, (827, 1170)), (Paper.LETTER, (850, 1100))])
def test_a_page_is_as_large_as_its_paper_at_the_asked_resolution(paper: Paper, size: tuple[int, int]) -> None:
    found = picture(render_png(batch_sheet(made.PLAIN, paper=paper), 100)[0]).size
    assert found == pytest.approx(size, abs=1)


def test_one_page_is_the_same_picture_as_among_all() -> None:
    pdf = batch_sheet(made.MANY)
    every = render_png(pdf, 40)
    assert len(every) == page_count(pdf) == len(page_text(pdf))
    assert render_png(pdf, 40, page=1) == [every[1]]


def test_the_same_batch_gives_the_same_pixels() -> None:
    assert render_png(batch_sheet(made.MANY), 50) == render_png(batch_sheet(made.MANY), 50)


def test_a_page_that_is_not_there_is_an_error() -> None:
    pdf = batch_sheet(made.PLAIN)
    for page in (-1, page_count(pdf)):
        with pytest.raises(IndexError):
            render_png(pdf, 50, page=page)


@pytest.mark.parametrize("resolution", [0, -10, float("nan")])
def test_a_resolution_that_is_not_above_0_is_refused(resolution: float) -> None:
    with pytest.raises(ValueError, match="above 0"):
        render_png(batch_sheet(made.PLAIN), resolution)


@pytest.mark.parametrize("read", [page_count, page_text, lambda pdf: render_png(pdf, 50)])
def test_what_is_no_pdf_is_refused_in_a_sentence(read: object) -> None:
    with pytest.raises(ValueError, match="not a PDF"):
        read(b"no pages here")  # type: ignore[operator]


def test_marks_are_pale_enough_for_the_text_over_them_and_all_text_is_dark_on_paper() -> None:
    def luminance(hexadecimal: str) -> float:
        parts = [int(hexadecimal[i : i + 2], 16) / 255 for i in (1, 3, 5)]
        linear = [p / 12.92 if p <= 0.04045 else ((p + 0.055) / 1.055) ** 2.4 for p in parts]
        return 0.2126 * linear[0] + 0.7152 * linear[1] + 0.0722 * linear[2]

    from blendapp.documents.pen import INK, SOFT, WASH

    # Relative luminance and contrast as WCAG 2.1 defines them.
    for ink in (INK, SOFT):
        assert (luminance(WASH) + 0.05) / (luminance(ink) + 0.05) >= 7
    # No darker picture of a mark than the constant says.
    batch = made.NO_SHEET
    grey = picture(render_png(batch_sheet(batch), 72)[0]).convert("L")
    lower_half = grey.crop((0, grey.height // 2, grey.width, int(grey.height * 0.93)))
    assert min(lower_half.getextrema()) >= int(WASH[1:3], 16) - 1
    assert min(lower_half.getextrema()) < 255


def test_the_pdf_library_and_the_renderer_are_not_loaded_before_the_first_page() -> None:
    code = (
        "import sys, blendapp.documents; "
        "print([m for m in ('reportlab', 'pypdfium2', 'PIL', 'numpy') if m in sys.modules])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
