"""What is filled in by hand, and what stands printed instead, on each page of a batch."""

from __future__ import annotations

import dataclasses
import itertools
from collections.abc import Callable

import batch_cases as made
import pytest
from page_reading import Piece, figures_under, pieces, places_under, rules, squeezed

from blendapp.documents import Paper, batch_sheet, blank_record, master_record, page_count, page_text
from blendapp.documents.batch_head import code_text
from blendapp.domain.batches import BatchPage, CleanOut
from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.results import NutrientResult


def words(pdf: bytes) -> str:
    return squeezed(page_text(pdf))


def found(pdf: bytes, text: str) -> list[Piece]:
    return [p for p in pieces(pdf) if p.text.strip() == text]


def test_hand_adds_stand_apart_with_a_place_for_who_weighed_and_who_checked() -> None:
    pdf = batch_sheet(made.FULL)
    hand_adds = [line for line in made.FULL.lines if line.hand_add]
    # The titles take two lines: the second words stand over the places.
    assert [len(found(pdf, text)) for text in ("Weighed", "Checked", "by")] == [1, 1, 2]
    assert len(places_under(pdf, "by")) == 2 * len(hand_adds)
    text = words(pdf)
    assert text.index(squeezed("Hand-adds on Bench scale")) > text.index(squeezed("Fat pump, in steps of 0.5 l"))


def test_each_other_line_has_a_place_for_lot_weight_and_initials() -> None:
    pdf = batch_sheet(made.FULL)
    dry = sum(not line.hand_add and line.step_l is None for line in made.FULL.lines)
    hand = sum(line.hand_add for line in made.FULL.lines)
    liquid = sum(line.step_l is not None for line in made.FULL.lines)
    # The total of what was weighed has a place of its own, with its unit.
    assert len(places_under(pdf, "Weighed kg")) == dry + hand + 1
    assert len(found(pdf, "kg")) == 1
    assert len(places_under(pdf, "Dosed l")) == liquid
    assert len(places_under(pdf, "Initials")) >= dry + liquid


def test_bins_with_their_lots_stand_on_the_sheet_alone_and_the_others_leave_them_to_the_pen() -> None:
    text = words(batch_sheet(made.FULL))
    assert squeezed("From Bin 4, lot M-2231") in text
    assert squeezed("From Bin 1 or Bin 2, lot W 77") in text
    for other in (master_record, blank_record):
        assert "M-2231" not in words(other(made.FULL))
    assert "Bin,lot" in words(blank_record(made.FULL))


@pytest.mark.parametrize("draw", [batch_sheet, master_record, blank_record])
def test_rework_opened_ingredients_and_fixed_lines_say_what_they_are(draw: object) -> None:
    text = words(draw(made.FULL))  # type: ignore[operator]
    assert squeezed("Rework, at a stated share") in text
    assert text.count(squeezed("In place of Mineral premix, pigs")) == 2
    assert text.count(squeezed("Fixed by hand")) == 1


@pytest.mark.parametrize("chosen", list(CleanOut))
def test_the_chosen_clean_out_is_crossed_and_the_three_others_are_open(chosen: CleanOut) -> None:
    pdf = batch_sheet(dataclasses.replace(made.FULL, clean_out=chosen))
    crosses = found(pdf, "×")
    assert len(crosses) == 1
    label = {
        CleanOut.PHYSICAL: "Physical", CleanOut.FLUSH: "Flush", CleanOut.SEQUENCE: "Sequence",
        CleanOut.NONE: "None needed",
    }[chosen]
    beside = found(pdf, label)[0]
    assert crosses[0].page == beside.page
    assert 0 < beside.left - crosses[0].right < 15
    assert abs(beside.bottom - crosses[0].bottom) < 6


def test_a_clean_out_that_nobody_chose_is_left_to_the_pen() -> None:
    pdf = batch_sheet(dataclasses.replace(made.FULL, clean_out=None, previous_feed="", clean_out_reason=""))
    assert found(pdf, "×") == []
    for label in ("Physical", "Flush", "Sequence", "None needed"):
        assert len(found(pdf, label)) == 1
    assert len(places_under(pdf, "Feed before, and its batch")) == 1


def test_the_feed_before_and_why_a_clean_out_is_needed_stand_on_the_sheet() -> None:
    text = words(batch_sheet(made.FULL))
    assert squeezed("Broiler finisher, batch 1039") in text
    assert squeezed(made.FULL.clean_out_reason) in text


def test_a_clean_out_that_is_needed_and_not_chosen_is_asked_for_or_answered_for_by_name() -> None:
    asked = "No clean-out is chosen: choose one before anything is weighed into the mixer."
    for chosen in (None, CleanOut.NONE):
        lacking = dataclasses.replace(made.FULL, clean_out=chosen)
        assert squeezed(asked) in words(batch_sheet(lacking))
        accepted = dataclasses.replace(lacking, accepted_by="Marta Okonjo", accepted_reason="Washed last night.")
        text = words(batch_sheet(accepted))
        assert squeezed("Mixed without a clean-out; accepted by Marta Okonjo: Washed last night.") in text
        assert squeezed(asked) not in text
    assert squeezed("Do what is crossed below before anything is weighed") in words(batch_sheet(made.FULL))
    assert squeezed("is weighed into the mixer") not in words(blank_record(made.FULL))


def test_a_line_of_nothing_says_that_it_is_left_out() -> None:
    lines = (dataclasses.replace(made.FULL.lines[6], target_kg=0.0), *made.FULL.lines[:6])
    text = words(batch_sheet(dataclasses.replace(made.FULL, lines=lines)))
    assert squeezed("Left out of this batch") in text


def test_the_code_says_formula_version_and_which_batch_or_record_it_is() -> None:
    assert code_text(made.FULL, BatchPage.SHEET) == "Grower pig 30 to 60 kg\nversion 3\nBatch 1041, 2 of 4"
    assert code_text(made.FULL, BatchPage.BLANK).endswith("\nnot numbered")
    assert code_text(made.US, BatchPage.MASTER).endswith("\nfor 4200 lb")
    assert len(code_text(made.EXTREME, BatchPage.SHEET).encode()) < 200


def test_each_step_has_its_minutes_setting_and_places_for_time_and_initials() -> None:
    pdf = batch_sheet(made.FULL)
    text = words(pdf)
    for step in made.FULL.steps:
        assert squeezed(step.text) in text
        if step.setting:
            assert squeezed(f"Setting: {step.setting}") in text
    assert [p.text.strip() for p in figures_under(pdf, "Minutes") if p.size == 12] == ["1.5", "1", "3", "2", "–"]
    # One more stands under the clean-out.
    assert len(places_under(pdf, "Time")) == len(made.FULL.steps) + 1


def test_without_steps_the_sheet_leaves_room_for_them_and_the_master_record_says_so() -> None:
    batch = dataclasses.replace(made.FULL, steps=())
    assert squeezed("No steps are entered for this formula; write down what is done.") in words(batch_sheet(batch))
    assert squeezed("No steps are entered for this formula.") in words(master_record(batch))


def test_what_is_made_first_stands_for_the_order_on_the_sheet_and_for_one_batch_elsewhere() -> None:
    text = words(batch_sheet(made.FULL))
    assert squeezed("To be made first") in text
    assert squeezed("by the formula Trace elements, pigs") in text
    assert "80kg" in text
    assert "20kg" in words(blank_record(made.FULL))
    assert "20kg" in words(master_record(made.FULL))
    assert squeezed("To be made first") not in words(batch_sheet(dataclasses.replace(made.FULL, to_make=())))


def test_the_yield_says_what_is_lost_and_dried_and_leaves_room_for_the_actual_one() -> None:
    text = words(batch_sheet(made.FULL))
    for part in (
        "0.5 % is lost on the way.", "The product holds 87.5 % dry matter, 12.5 % moisture.", "1869.2 kg",
        "Actual yield, kg", "Difference, kg", "Difference, %",
    ):
        assert squeezed(part) in text
    master = words(master_record(made.FULL))
    assert squeezed("0.5 % is lost on the way.") in master
    assert squeezed("Actual yield") not in master


def test_an_unknown_yield_stands_as_its_reason_and_no_figure() -> None:
    reason = "The yield is not known: the dry matter of Barley is not known."
    batch = dataclasses.replace(made.FULL, yield_kg=None, yield_unknown=reason)
    text = words(batch_sheet(batch))
    assert squeezed(reason) in text
    assert squeezed("is lost on the way") not in text
    assert "1869.2" not in text


def test_sample_and_release_have_their_places_on_what_is_filled_in_and_signatures_on_the_master_record() -> None:
    for draw in (batch_sheet, blank_record):
        text = words(draw(made.FULL))
        for part in ("Retained sample", "Sample number", "Kept at", "Released for use", "Signature"):
            assert squeezed(part) in text
    master = words(master_record(made.FULL))
    for part in ("Prepared by", "Checked by", "Approved by", "Signature", made.FULL.approved_by):
        assert squeezed(part) in master
    for part in ("Retained sample", "Released for use", "Weighed", "Initials", "Clean-out", "Batch number", "1041"):
        assert squeezed(part) not in master


def test_a_master_record_says_what_total_its_weights_are_for() -> None:
    assert squeezed(f"All weights on this record are for one batch of {made.FULL.batch_kg} kg.") in words(
        master_record(made.FULL)
    )
    assert squeezed("All weights on this record are for one batch of 4200 lb.") in words(master_record(made.US))


def test_a_blank_record_names_no_batch_no_day_and_no_feed_before() -> None:
    text = words(blank_record(dataclasses.replace(made.FULL, copy=2)))
    for absent in ("1041", "2026-02-03", "Broilerfinisher", "COPY", "×", "7551"):
        assert absent not in text
    for place in ("Batch number", "Date", "Order", "Which batch of the order", "Feed before, and its batch"):
        assert squeezed(place) in text
    for page in page_text(blank_record(made.FULL))[1:]:
        assert "Batch ____" in page


def test_a_blank_record_has_the_targets_of_the_sheet_and_is_no_other_for_another_batch() -> None:
    def targets(pdf: bytes) -> list[str]:
        return [p.text for p in pieces(pdf) if p.size == 16]

    assert targets(blank_record(made.FULL)) == targets(batch_sheet(made.FULL))
    other = dataclasses.replace(
        made.FULL, number=77, made=made.OTHER_DAY, previous_feed="Layer mash", clean_out=CleanOut.NONE, copy=1
    )
    assert blank_record(made.FULL) == blank_record(other)


def test_each_of_several_equal_batches_has_a_sheet_of_its_own_that_says_which_it_is() -> None:
    one = page_count(batch_sheet(made.FULL))
    order = page_text(batch_sheet(dataclasses.replace(made.FULL, place=0)))
    assert len(order) == 4 * one
    for place in range(4):
        first = order[place * one]
        assert squeezed(f"{place + 1} of 4") in squeezed(first)
        assert f"Page 1 of {one}" in first
        assert f"Batch 1041, {place + 1} of 4" in order[place * one + 1]
    assert "of 1" not in page_text(batch_sheet(dataclasses.replace(made.FULL, batches=1, place=0)))[0].split("Page")[0]


def test_an_order_of_very_many_batches_has_one_sheet_with_room_to_write_which_it_is() -> None:
    many = dataclasses.replace(made.FULL, batches=61, place=0)
    assert page_count(batch_sheet(many)) < 2 * page_count(batch_sheet(made.FULL))
    assert squeezed("Which of the 61 equal batches") in words(batch_sheet(many))
    assert squeezed("Which of the") not in words(batch_sheet(made.FULL))


@pytest.mark.parametrize("paper", list(Paper))
def test_one_sheet_for_many_batches_says_that_it_is_copied_and_leaves_room_on_each_page(paper: Paper) -> None:
    many = dataclasses.replace(made.FULL, batches=100, place=0)
    pages = page_text(batch_sheet(many, paper))
    said = "This one sheet is for each of the 100 equal batches: copy it before use, one copy for each batch."
    assert squeezed(said) in squeezed(pages[0])
    label = found(batch_sheet(many, paper), "Which of the 100 equal batches")[0]
    place = max(places_under(batch_sheet(many, paper), label.text.strip()), key=lambda rule: rule.y)
    assert 15 < label.bottom - place.y < 35
    assert len(pages) > 2
    for text in pages[1:]:
        assert "Batch 1041, _______ of 100" in text
    for batch in (made.FULL, dataclasses.replace(made.FULL, place=0), dataclasses.replace(made.FULL, batches=1)):
        assert squeezed("copy it before use") not in words(batch_sheet(batch, paper))


def test_a_medicated_line_of_any_scale_stands_apart_and_is_weighed_by_one_and_checked_by_another() -> None:
    drug = dataclasses.replace(made.FULL.lines[11], drug="fenbendazole 20 g/kg")
    others = [line for line in made.FULL.lines if not line.hand_add and line is not made.FULL.lines[11]]
    for draw in (batch_sheet, blank_record):
        pdf = draw(dataclasses.replace(made.FULL, lines=(drug, *others), steps=()))
        assert squeezed("Medicated, on Minor scale, in steps of 0.5 kg") in words(pdf)
        assert [len(found(pdf, text)) for text in ("Weighed", "Checked", "by")] == [1, 1, 2]
        assert len(places_under(pdf, "by")) == 2
    apart = words(batch_sheet(dataclasses.replace(made.FULL, lines=(*made.FULL.lines, drug))))
    titles = ("Fat pump, in", "Medicated, on Minor scale", "Hand-adds on Bench")
    places = [apart.index(squeezed(title)) for title in titles]
    assert places == sorted(places)


@pytest.mark.parametrize("draw", [batch_sheet, master_record])
def test_what_the_formula_limits_stands_before_the_other_nutrients(draw: Callable[..., bytes]) -> None:
    def order(nutrients: tuple[NutrientResult, ...]) -> list[str]:
        text = words(draw(dataclasses.replace(made.FULL, nutrients=nutrients)))
        names = [n.name for n in nutrients]
        heads = ("Nutrients that the formula limits", "Other nutrients that result", "Nutrients that result")
        known = {part: text.rindex(squeezed(part)) for part in (*names, *heads) if squeezed(part) in text}
        return sorted(known, key=lambda part: known[part])

    limited, free = NutrientResult(1, "Zinc", "mg/kg", 90, (), True), NutrientResult(2, "Ash", "%", 5, (), False)
    first, second = "Nutrients that the formula limits", "Other nutrients that result"
    assert order((free, limited)) == [first, "Zinc", second, "Ash"]
    assert order((free,)) == ["Nutrients that result", "Ash"]
    assert order((limited,)) == [first, "Zinc"]


def test_many_cautions_follow_the_lines_and_the_sheet_says_so_above_them() -> None:
    text = words(batch_sheet(made.EXTREME))
    pointer = text.index(squeezed("25 cautions stand after the lines of this sheet"))
    assert pointer < text.index("Hopperscale,") < text.index("Caution1:") < text.index(squeezed("Released for use"))
    assert text.count(squeezed(GENERAL_CAUTION)) == len(page_text(batch_sheet(made.EXTREME)))


def test_places_stand_side_by_side_without_touching() -> None:
    pdf = blank_record(made.EXTREME)
    level = sorted(rules(pdf), key=lambda r: (r.page, -round(r.y), r.left))
    for a, b in itertools.pairwise(level):
        if a.page == b.page and abs(a.y - b.y) < 0.5 and a.right - a.left < 150 and b.right - b.left < 150:
            assert b.left - a.right >= 5
