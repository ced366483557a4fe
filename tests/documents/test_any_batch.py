"""Made-up batches of every kind of line: nothing overlaps, nothing leaves the page, every line is there."""

from __future__ import annotations

import dataclasses
import random

import batch_cases as made
import pytest
from page_reading import pieces, squeezed
from test_batch_pages import clashes, outside

from blendapp.documents import Paper, batch_sheet, blank_record, letters, master_record, page_text
from blendapp.domain.batches import Batch, BatchLine, CleanOut, Step, ToMake
from blendapp.domain.units import LB_KG
from blendapp.domain.wording import use_language, use_translator

WORDS = ("Maize", "Soybean", "meal", "46 %", "extracted", "x" * 40, "Ω", "大豆", "premix", "feed-grade-98.5", "a")
STEPS_KG = (5.0, 0.5, 0.1, 0.005, 0.0001, 20.0, 5 * LB_KG, LB_KG, 0.5 * LB_KG, LB_KG / 16, 0.4575, 0.123457)
STEPS_L = (0.5, 0.1, 1.0, 0.25 * made.GALLON_L, 0.1 * 4.54609)


def words(chance: random.Random, most: int) -> str:
    return " ".join(chance.choice(WORDS) for _ in range(chance.randint(1, most)))


def any_line(chance: random.Random) -> BatchLine:
    step, count = chance.choice(STEPS_KG), chance.randint(0, 4000)
    more: dict[str, object] = {"hand_add": chance.random() < 0.3, "fixed": chance.random() < 0.1}
    if chance.random() < 0.2:
        step_l = chance.choice(STEPS_L)
        step = step_l * chance.choice((0.9, 0.915, 0.9166667, 1.4))
        more |= {"step_l": step_l, "target_l": count * step_l}
    target = round(count * step, 9)
    if chance.random() < 0.5:
        more["tolerance_kg"] = chance.choice((step, 3.3 * step, 0.02 * target))
    if chance.random() < 0.5:
        more["bins"] = tuple(words(chance, 3) for _ in range(chance.randint(1, 3)))
    if chance.random() < 0.1:
        more["of_opened"] = tuple(words(chance, 4) for _ in range(chance.randint(1, 9)))
    if chance.random() < 0.1:
        more |= {"drug": words(chance, 12), "drug_level": words(chance, 3), "withdrawal": words(chance, 30)}
    scale = chance.choice(("Big scale", "", "Small scale by the door", words(chance, 4)))
    name = words(chance, chance.choice((2, 4, 30)))
    return BatchLine(1, name, scale, step, target, target, **more)  # type: ignore[arg-type]


def any_batch(chance: random.Random) -> Batch:
    lines = tuple(any_line(chance) for _ in range(chance.choice((1, 3, 14, 40))))
    return dataclasses.replace(
        made.FULL, formula=words(chance, 12), lines=lines, mass_unit=chance.choice(("kg", "lb")),
        batch_kg=chance.choice((1000.0, 1234.5678)), draft=chance.random() < 0.5,
        steps=tuple(Step(words(chance, 20), chance.choice((None, 2.25)), words(chance, 6)) for _ in range(4)),
        to_make=tuple(ToMake(words(chance, 5), 1, words(chance, 4), chance.random() * 1e3) for _ in range(2)),
        previous_feed=words(chance, 8), clean_out=chance.choice((None, *CleanOut)),
        clean_out_reason=words(chance, 12), mixer=words(chance, 5), site=words(chance, 3),
        cautions=tuple(words(chance, 40) for _ in range(chance.randint(0, 25))), batches=3, place=chance.randint(1, 3),
        yield_kg=chance.choice((None, 1.5, 12345.678)), yield_unknown=words(chance, 9),
    )


@pytest.mark.parametrize("seed", range(6))
def test_every_line_of_any_batch_stands_whole_on_each_page_and_nothing_overlaps(seed: int) -> None:
    chance = random.Random(seed)
    batch = any_batch(chance)
    if seed % 3 == 2:
        use_translator(lambda text: f"{text} {'n' * (len(text) // 2)}", lambda one, many, count: f"{many} nnnnn")
    try:
        pdfs = [(paper, draw(batch, paper)) for paper in Paper for draw in (batch_sheet, master_record, blank_record)]
    finally:
        use_language(None)
    for paper, pdf in pdfs:
        assert outside(pdf, paper) == []
        assert clashes(pdf) == []
        assert sum(p.size == 16 and not p.across for p in pieces(pdf)) == len(batch.lines) + 1
        text = squeezed(page_text(pdf))
        for line in batch.lines:
            # A name that a page break divides is still there; its beginning always stands in one piece.
            assert squeezed(letters.plain(line.ingredient))[:60] in text
