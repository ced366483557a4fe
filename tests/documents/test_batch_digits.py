"""The figures on the pages of a batch, read back from the PDF, are the figures of the batch."""

from __future__ import annotations

import dataclasses
import re
from collections.abc import Callable
from decimal import Decimal

import batch_cases as made
import pytest
from page_reading import figures_under, pieces, squeezed

from blendapp.documents import Paper, batch_sheet, blank_record, master_record, page_text
from blendapp.documents.weighing_groups import in_order
from blendapp.domain.batches import Batch, BatchLine
from blendapp.domain.units import LB_KG

Page = Callable[..., bytes]
PAGES = [pytest.param(draw, id=draw.__name__) for draw in (batch_sheet, master_record, blank_record)]
every_page = pytest.mark.parametrize("draw", PAGES)
every_paper = pytest.mark.parametrize("paper", list(Paper))


def lines_in_order(batch: Batch) -> list[BatchLine]:
    return [line for group in in_order(batch.lines) for line in group]


def large(pdf: bytes) -> list[str]:
    """The targets and the total, in order."""
    return [p.text.strip() for p in pieces(pdf) if p.size == 16 and not p.across]


def beside(pdf: bytes, title: str) -> list[str]:
    """The figures of 12 point in the columns of that title."""
    return [p.text.strip() for p in figures_under(pdf, title) if p.size == 12]


@every_page
@every_paper
def test_targets_in_kg_and_litres_are_those_of_the_batch_digit_for_digit(draw: Page, paper: Paper) -> None:
    shown = large(draw(made.FULL, paper))
    for text, line in zip(shown[:-1], lines_in_order(made.FULL), strict=True):
        if line.target_l is not None:
            assert Decimal(text.removesuffix("l").strip()) == Decimal(str(line.target_l))
        else:
            assert Decimal(text) == Decimal(str(line.target_kg))
    assert Decimal(shown[-1]) == Decimal(str(made.FULL.total_kg))


@every_page
@every_paper
def test_targets_in_lb_are_multiples_of_the_step_that_are_found_again(draw: Page, paper: Paper) -> None:
    shown = large(draw(made.US, paper))
    for text, line in zip(shown[:-1], lines_in_order(made.US), strict=True):
        if line.step_l is not None:
            assert text.endswith("US gal")
            gallons = float(text.removesuffix("US gal"))
            assert gallons * 231 * 2.54**3 / 1000 == pytest.approx(line.target_l, abs=1e-9)
        else:
            steps = float(text) * LB_KG / line.step_kg
            assert abs(steps - round(steps)) < 0.2
            assert round(steps) * line.step_kg == pytest.approx(line.target_kg, abs=1e-9)
        if line.scale in (made.HOPPER, made.MINOR):
            assert text == str(round(line.target_kg / LB_KG))


@every_page
def test_a_scale_that_shows_kg_has_its_kg_beside_the_pounds(draw: Page) -> None:
    hand_adds = [line for line in made.US.lines if line.hand_add]
    shown = beside(draw(made.US), "That is kg")
    assert [Decimal(text) for text in shown] == [Decimal(str(line.target_kg)) for line in hand_adds]


@every_page
@pytest.mark.parametrize("batch", [made.FULL, made.US])
def test_the_total_is_the_sum_of_the_masses_on_the_page(draw: Page, batch: Batch) -> None:
    pdf = draw(batch)
    *targets, total = large(pdf)
    masses = [text for text in targets if not text.endswith(("l", "US gal"))]
    liquids = beside(pdf, f"That is {batch.mass_unit}")
    assert len(liquids) == 2
    assert sum(map(Decimal, masses + liquids)) == Decimal(total)


def kg_mill_in_lb(*, liquids: bool) -> Batch:
    lines = tuple(line for line in made.FULL.lines if liquids or line.step_l is None)
    total = round(sum(line.target_kg for line in lines), 9)
    return dataclasses.replace(made.FULL, lines=lines, mass_unit="lb", batch_kg=total)


@every_page
@pytest.mark.parametrize("liquids", [True, False])
def test_pounds_of_kg_scales_add_up_to_the_batch_within_the_finest_step(draw: Page, liquids: bool) -> None:
    batch = kg_mill_in_lb(liquids=liquids)
    *targets, total = large(draw(batch))
    masses = [text for text in targets if not text.endswith("l")] + beside(draw(batch), "That is lb")
    assert len(masses) == len(batch.lines)
    assert sum(map(Decimal, masses)) == Decimal(total)
    finest_lb = min(line.step_kg for line in batch.lines) / LB_KG
    assert abs(float(total) - batch.total_kg / LB_KG) <= finest_lb


@pytest.mark.parametrize("draw", [batch_sheet, blank_record])
def test_the_place_for_the_total_has_the_unit_in_which_the_lines_are_weighed(draw: Page) -> None:
    def units(batch: Batch) -> list[str]:
        found = [p.text.strip() for p in pieces(draw(batch)) if p.size == 9]
        return [text for text in found if text in ("kg", "lb", "all in lb", "all in kg")]

    assert units(made.FULL) == units(kg_mill_in_lb(liquids=True)) == ["kg"]
    # A hopper in pounds and a bench scale in kilograms.
    assert units(made.US) == ["all in lb"]


@every_page
def test_kg_of_a_mill_that_prints_pounds_add_up_to_the_total_beside_it(draw: Page) -> None:
    batch = kg_mill_in_lb(liquids=False)
    *lines, total = beside(draw(batch), "That is kg")
    assert len(lines) == len(batch.lines)
    assert sum(map(Decimal, lines)) == Decimal(total) == Decimal(str(batch.total_kg))


@every_page
def test_a_total_of_rounded_lines_says_so_with_the_unrounded_one_and_the_kg(draw: Page) -> None:
    text = squeezed(page_text(draw(made.US)))
    exact = re.search(r"asthelinesareshown|sumofthelinesastheyareshown,rounded;unroundeditis([\d.]+)lb\.", text)
    assert exact is not None
    assert float(exact[1]) == pytest.approx(made.US.total_kg / LB_KG, abs=0.0006)
    together = re.search(r"Alllinesare([\d.]+)kgtogether", text)
    assert together is not None
    assert float(together[1]) == pytest.approx(made.US.total_kg, abs=1e-6)
    assert "rounded" not in squeezed(page_text(draw(made.FULL)))


def test_a_total_that_is_the_unrounded_one_to_its_last_digit_says_nothing_of_rounding() -> None:
    def sheet_of(first_kg: float, second_kg: float) -> tuple[list[str], str]:
        lines = tuple(
            dataclasses.replace(made.FULL.lines[0], target_kg=kg, share_kg=kg) for kg in (first_kg, second_kg)
        )
        pdf = batch_sheet(dataclasses.replace(made.FULL, lines=lines, batch_kg=first_kg + second_kg, mass_unit="lb"))
        return large(pdf), squeezed(page_text(pdf))

    # 970.034 and 804.687 lb.
    figures, text = sheet_of(440.0, 365.0)
    assert figures == ["970.03", "804.69", "1774.72"]
    assert "unroundeditis1774.721lb.Alllinesare805kgtogether." in text
    # 45359.237 kg are 100000 lb, on a scale of grams.
    figures, text = sheet_of(45359.237, 90718.474)
    assert figures == ["100000.00", "200000.00", "300000.00"]
    assert "unrounded" not in text


def test_a_batch_all_in_pounds_adds_up_without_a_word_of_rounding() -> None:
    lines = tuple(line for line in made.US.lines if line.scale in (made.HOPPER, made.MINOR))
    total = round(sum(line.target_kg for line in lines) / LB_KG)
    batch = dataclasses.replace(made.US, lines=lines, batch_kg=total * LB_KG)
    text = squeezed(page_text(batch_sheet(batch)))
    assert "rounded" not in text
    assert f"Residue0lb:thelinesadduptothebatchof{total}lb." in text
    assert large(batch_sheet(batch))[-1] == str(total)


def test_a_residue_stands_in_pounds() -> None:
    residue_lb = made.US.residue_kg / LB_KG
    found = re.search(r"Residue(−?)([\d.]+)lb:thelinescometo\2lb(less|more)", squeezed(page_text(batch_sheet(made.US))))
    assert found is not None
    assert (found[3] == "less") == (residue_lb < 0) == (found[1] == "−")
    assert float(found[2]) == pytest.approx(abs(residue_lb), rel=1e-3)


def bands(pdf: bytes) -> list[tuple[float, float, str]]:
    """Least, most and unit of what may be weighed, line by line."""
    found = [re.fullmatch(r"([\d.]+) to ([\d.]+)\s(kg|lb|l|US gal)\s*", p.text) for p in pieces(pdf) if p.size == 10]
    return [(float(m[1]), float(m[2]), m[3]) for m in found if m]


@every_page
@every_paper
@pytest.mark.parametrize("batch", [made.FULL, made.US, dataclasses.replace(made.FULL, mass_unit="lb")])
def test_what_may_be_weighed_is_every_step_of_the_scale_within_the_tolerance_of_the_share(
    draw: Page, paper: Paper, batch: Batch
) -> None:
    sizes = {"kg": 1.0, "lb": LB_KG, "l": 1.0, "US gal": made.GALLON_L}
    lines = lines_in_order(batch)
    for (least, most, unit), line in zip(bands(draw(batch, paper)), lines, strict=True):
        assert line.tolerance_kg is not None
        step = line.step_kg if line.step_l is None else line.step_l
        steps = range(1, 3000)
        allowed = [n for n in steps if abs(n * line.step_kg - line.share_kg) <= line.tolerance_kg + 1e-9]
        assert least * sizes[unit] == pytest.approx(allowed[0] * step, rel=1e-9)
        assert most * sizes[unit] == pytest.approx(allowed[-1] * step, rel=1e-9)
        assert allowed[0] * line.step_kg - 1e-9 <= line.target_kg <= allowed[-1] * line.step_kg + 1e-9


def test_a_medicated_line_near_the_end_of_its_tolerance_may_not_be_weighed_beyond_it() -> None:
    line = dataclasses.replace(
        made.FULL.lines[-1], step_kg=0.001, share_kg=0.9125, target_kg=0.921, tolerance_kg=0.009125
    )
    for draw in (batch_sheet, master_record, blank_record):
        assert "0.904to0.921kg" in squeezed(page_text(draw(dataclasses.replace(made.FULL, lines=(line,)))))


def test_a_line_with_one_step_within_its_tolerance_is_to_be_weighed_exactly() -> None:
    line = dataclasses.replace(made.FULL.lines[0], share_kg=102.0, target_kg=100.0, tolerance_kg=2.04)
    assert "exactly100kg" in squeezed(page_text(batch_sheet(dataclasses.replace(made.FULL, lines=(line,)))))


def test_very_long_figures_of_what_may_be_weighed_stand_in_two_lines() -> None:
    line = dataclasses.replace(
        made.FULL.lines[0], step_kg=0.000001, share_kg=12345.123456, target_kg=12345.123456, tolerance_kg=246.902469
    )
    pdf = batch_sheet(dataclasses.replace(made.FULL, lines=(line,)))
    small = [squeezed(p.text) for p in pieces(pdf) if p.size == 10]
    assert "12098.220987to" in small
    assert "12592.025925kg" in small


def test_a_line_without_a_tolerance_shows_none() -> None:
    lines = tuple(dataclasses.replace(line, tolerance_kg=None) for line in made.FULL.lines)
    pdf = batch_sheet(dataclasses.replace(made.FULL, lines=lines))
    assert bands(pdf) == []
    assert "maybeweighed" not in squeezed(page_text(pdf))


def test_running_totals_of_a_scale_add_up_what_stands_above_them() -> None:
    pdf = batch_sheet(made.US)
    running = iter(beside(pdf, "Running lb"))
    for scale in (made.HOPPER, made.MINOR):
        total = 0
        for line in made.US.lines:
            if line.scale == scale:
                total += round(line.target_kg / LB_KG)
                assert next(running) == str(total)
    assert next(running, None) is None


@every_page
def test_shares_of_the_master_record_are_those_of_the_total(draw: Page) -> None:
    if draw is not master_record:
        assert "%ofthetotal" not in squeezed(page_text(draw(made.FULL)))
        return
    *shares, whole = beside(draw(made.FULL), "% of the total")
    assert whole == "100.000"
    for text, line in zip(shares, lines_in_order(made.FULL), strict=True):
        exact = line.target_kg / made.FULL.total_kg * 100
        assert float(text) == pytest.approx(exact, rel=5e-3)
    assert sum(map(float, shares)) == pytest.approx(100, abs=0.01)


def test_orders_batches_and_yields_stand_in_the_unit_of_the_sheet() -> None:
    us, metric = (squeezed(page_text(batch_sheet(batch))) for batch in (made.US, made.FULL))
    assert "16800lbin4equalbatches" in us
    assert "4200lb" in us
    assert "4150lb" in us
    assert "176.37lb" in us
    assert "1869.2kg" in metric
    assert "80kg" in metric


def test_a_pound_scale_in_a_mill_of_kilograms_has_its_pounds_beside_the_kg() -> None:
    line = made.US.lines[1]
    batch = dataclasses.replace(made.US, lines=(line,), batch_kg=line.target_kg, mass_unit="kg")
    pdf = batch_sheet(batch)
    # The line and the total.
    assert beside(pdf, "That is lb") == ["305", "305"]
    steps = float(large(pdf)[0]) / line.step_kg
    assert round(steps) == 61
    assert abs(steps - 61) < 0.1


def test_litres_of_an_odd_density_keep_their_digits_and_the_kg_come_to_the_gram() -> None:
    line = dataclasses.replace(
        made.FULL.lines[16], step_kg=0.5 * 0.916667, step_l=0.5, target_l=33.5, target_kg=round(67 * 0.5 * 0.916667, 9)
    )
    pdf = batch_sheet(dataclasses.replace(made.FULL, lines=(line,), batch_kg=30))
    assert large(pdf)[0] == "33.5 l"
    assert float(beside(pdf, "That is kg")[0]) == pytest.approx(line.target_kg, abs=1e-6)
