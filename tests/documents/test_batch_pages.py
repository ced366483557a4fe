"""What holds for each of the three pages of a batch, on both papers and in both units."""

from __future__ import annotations

import dataclasses
import io
import itertools
import re
from collections.abc import Callable

import batch_cases as made
import pytest
from page_reading import pieces, rules, squeezed
from PIL import Image

from blendapp.documents import Paper, batch_sheet, blank_record, master_record, page_count, page_text, render_png
from blendapp.domain.batches import Batch, proof_words
from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.notation import COMMA, PLAIN, use_notation
from blendapp.domain.wording import use_language, use_translator

MM = 72 / 25.4
Page = Callable[..., bytes]
PAGES = [pytest.param(draw, id=draw.__name__) for draw in (batch_sheet, master_record, blank_record)]
CASES = [pytest.param(batch, id=name) for name, batch in made.CASES.items()]
every_page = pytest.mark.parametrize("draw", PAGES)
every_case = pytest.mark.parametrize("batch", CASES)
every_paper = pytest.mark.parametrize("paper", list(Paper))


def clashes(pdf: bytes) -> list[tuple[str, str]]:
    upright = [p for p in pieces(pdf) if not p.across]
    by_page = itertools.groupby(upright, key=lambda p: p.page)
    return [
        (a.text, b.text)
        for _page, group in by_page
        for a, b in itertools.combinations(list(group), 2)
        if a.overlaps(b)
    ]


def outside(pdf: bytes, paper: Paper) -> list[str]:
    width, height = paper.size_pt
    return [
        p.text for p in pieces(pdf)
        if not p.across and not (
            p.left >= 12 * MM and p.right <= width - 12 * MM and p.bottom >= 8 * MM and p.top <= height - 8 * MM
        )
    ] + [str(r) for r in rules(pdf) if not (r.left >= 12 * MM and r.right <= width - 12 * MM)]


@every_page
@every_case
@every_paper
def test_nothing_overlaps_or_leaves_the_page(draw: Page, batch: Batch, paper: Paper) -> None:
    pdf = draw(batch, paper)
    assert outside(pdf, paper) == []
    assert clashes(pdf) == []


@every_page
@pytest.mark.parametrize("batch", [made.FULL, made.EXTREME_US])
def test_a_language_with_longer_words_overlaps_nothing(draw: Page, batch: Batch) -> None:
    use_translator(lambda text: f"{text} {'n' * (len(text) // 2)}", lambda one, many, count: f"{many} nnnnn nnnnn")
    try:
        pdf = draw(batch, Paper.A4)
    finally:
        use_language(None)
    assert outside(pdf, Paper.A4) == []
    assert clashes(pdf) == []


@every_page
@every_case
def test_each_page_has_the_general_caution_its_number_of_all_and_whose_it_is(draw: Page, batch: Batch) -> None:
    pages = page_text(draw(batch))
    for number, text in enumerate(pages, start=1):
        assert squeezed(GENERAL_CAUTION) in squeezed(text)
        assert f"Page {number} of {len(pages)}" in text
        assert batch.version in text
        assert squeezed(batch.formula)[:25] in squeezed(text)


@every_page
def test_the_marks_stand_across_and_at_the_head_of_every_page(draw: Page) -> None:
    pdf = draw(made.EXTREME)
    across = [(p.page, p.text.strip()) for p in pieces(pdf) if p.across]
    heads = [(p.page, p.text.strip()) for p in pieces(pdf) if not p.across and p.size == 15]
    for page in range(page_count(pdf)):
        for mark in ("NOT TO BE MIXED", "DRAFT"):
            assert (page, mark) in across
            assert (page, mark) in heads


@every_page
@every_case
def test_the_same_batch_gives_the_same_bytes_and_so_the_same_pixels(draw: Page, batch: Batch) -> None:
    again = dataclasses.replace(batch, lines=tuple(dataclasses.replace(line) for line in batch.lines))
    assert draw(batch) == draw(again)


def test_the_batch_names_its_paper_and_a_caller_may_name_another() -> None:
    def size(pdf: bytes) -> tuple[int, int]:
        return Image.open(io.BytesIO(render_png(pdf, 72, page=0)[0])).size

    assert size(batch_sheet(made.US)) == (612, 792)
    assert size(batch_sheet(made.FULL)) == pytest.approx((595, 842), abs=1)
    assert size(batch_sheet(made.US, Paper.A4)) == pytest.approx((595, 842), abs=1)


@every_page
@every_paper
@pytest.mark.parametrize("batch", [made.FULL, made.US, made.EXTREME])
def test_a_line_stands_whole_on_one_page_with_its_target_under_the_heads(
    draw: Page, paper: Paper, batch: Batch
) -> None:
    found = [p for p in pieces(draw(batch, paper)) if not p.across]
    numbers = [p for p in found if p.size == 9 and re.fullmatch(r"\d+\s*", p.text)]
    targets = [p for p in found if p.size == 16]
    assert len(targets) == len(batch.lines) + 1
    for number, target in zip(range(1, len(batch.lines) + 1), targets, strict=False):
        # Its number stands at its left, on the level of its target.
        beside = [p.text.strip() for p in numbers if p.page == target.page and abs(p.bottom - target.bottom) < 6]
        assert str(number) in beside
    for page in {p.page for p in targets}:
        title = max(p.top for p in found if p.page == page and p.text.strip() == "Ingredient")
        assert all(p.top < title for p in targets if p.page == page)


@every_page
def test_scales_that_go_on_on_another_page_say_so_under_the_heads(draw: Page) -> None:
    pages = page_text(draw(made.EXTREME))
    with_lines = [text for text in pages if re.search(r"^\d+ Line \d+", text, re.MULTILINE)]
    assert len(with_lines) >= 3
    for text in with_lines:
        first = re.search(r"^\d+ Line \d+", text, re.MULTILINE)
        assert first is not None
        assert re.search(r"in steps of [\d.]+.(kg|l)", text[: first.start()])
        assert "Ingredient" in text[: first.start()]
    assert any("in steps of 5 kg, continued" in text for text in with_lines[1:])


@pytest.mark.parametrize("draw", [batch_sheet, blank_record])
@every_case
@every_paper
def test_places_to_write_in_are_at_least_8_mm_apart(draw: Page, batch: Batch, paper: Paper) -> None:
    columns: dict[tuple[int, float, float], list[float]] = {}
    for rule in rules(draw(batch, paper)):
        columns.setdefault((rule.page, round(rule.left, 1), round(rule.right, 1)), []).append(rule.y)
    narrow = [(key, ys) for key, ys in columns.items() if key[2] - key[1] < 150 and len(ys) > 1]
    assert narrow
    for _key, ys in narrow:
        for above, below in itertools.pairwise(sorted(ys, reverse=True)):
            assert above - below >= 8 * MM


@every_page
@every_case
def test_no_text_is_smaller_than_8_point_and_every_weight_is_at_least_12(draw: Page, batch: Batch) -> None:
    found = [p for p in pieces(draw(batch)) if not p.across]
    assert min(p.size for p in found) >= 8.5
    weights = [p for p in found if re.fullmatch(r"\d[\d.]*(\s?(kg|lb|l|US gal))\s*", p.text)]
    columns = [p for p in found if p.size in (12, 16) and re.fullmatch(r"[\d.]+\s*", p.text)]
    assert columns
    assert min(p.size for p in (*weights, *columns)) >= 12


@every_page
def test_text_over_a_mark_keeps_a_contrast_of_7_to_1_as_drawn_in_grey(draw: Page) -> None:
    # Without words over it, only paper, marks and what is written in black or dark grey are left.
    grey = Image.open(io.BytesIO(render_png(draw(made.EXTREME), 72, page=1)[0])).convert("L")
    levels = grey.histogram()
    # The palest area that covers the page besides white is the mark.
    mark = max(range(150, 250), key=lambda level: levels[level])
    assert levels[mark] > 3000

    def luminance(level: float) -> float:
        part = level / 255
        return part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4

    from blendapp.documents.pen import INK, LINE, SOFT

    for ink in (INK, SOFT, LINE):
        assert (luminance(mark) + 0.05) / (luminance(int(ink[1:3], 16)) + 0.05) >= 7


@every_page
def test_numbers_take_the_decimal_sign_of_the_notation(draw: Page) -> None:
    batch = dataclasses.replace(made.FULL, mill="Mill", cautions=())
    use_notation(COMMA)
    try:
        text = "\n".join(page_text(draw(batch)))
    finally:
        use_notation(PLAIN)
    assert "24,5" in text
    assert "2,400" in text
    assert "30,0 l" in text
    assert not re.search(r"\d\.\d", text)


@every_page
@every_case
def test_every_caution_stands_whole_on_every_page_kind(draw: Page, batch: Batch) -> None:
    text = squeezed(page_text(draw(batch)))
    for caution in batch.cautions:
        assert squeezed(caution) in text


@every_page
def test_few_cautions_and_the_withdrawal_stand_before_the_first_line(draw: Page) -> None:
    first = squeezed(page_text(draw(made.FULL))[0])
    before = first[: first.index("Hopperscale,")]
    assert "MEDICATEDFEED" in before
    assert squeezed("Worm premix 2 % · Species: pigs · Withdrawal: 4 days before slaughter") in before
    assert squeezed("Keep from sheep: 15 mg/kg of added copper.") in before


def test_a_medicated_feed_without_a_withdrawal_says_that_none_is_entered() -> None:
    lines = (*made.FULL.lines[:-1], dataclasses.replace(made.FULL.lines[-1], withdrawal=""))
    text = squeezed(page_text(batch_sheet(dataclasses.replace(made.FULL, lines=lines))))
    assert squeezed("Worm premix 2 % · Species: pigs · no withdrawal is entered") in text


@every_page
def test_a_weighing_that_is_not_proven_best_says_how_much_better_one_could_be(draw: Page) -> None:
    unproven = dataclasses.replace(made.FULL, unproven="total", gap=0.2)
    assert squeezed(proof_words(unproven)) in squeezed(" ".join(page_text(draw(unproven))))
    assert "Time was up" not in " ".join(page_text(draw(made.FULL)))
