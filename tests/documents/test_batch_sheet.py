from __future__ import annotations

import dataclasses
import itertools
import re

import page_cases as made
import pytest
from page_reading import pieces, squeezed

from blendapp.documents import Paper, batch_sheet, page_count, page_text
from blendapp.documents.weighing_groups import in_order
from blendapp.domain.batches import Batch
from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.figures import write_kg
from blendapp.domain.notation import COMMA, PLAIN, use_notation
from blendapp.domain.wording import use_language, use_translator

MM = 72 / 25.4
PAPERS = list(Paper)
CASES = [pytest.param(batch, id=name) for name, batch in made.CASES.items()]


def words(batch: Batch, paper: Paper = Paper.A4) -> str:
    return squeezed(page_text(batch_sheet(batch, paper=paper)))


@pytest.mark.parametrize("paper", PAPERS)
@pytest.mark.parametrize("batch", CASES)
def test_no_text_overlaps_another_or_leaves_the_page(batch: Batch, paper: Paper) -> None:
    width, height = paper.size_pt
    upright = [p for p in pieces(batch_sheet(batch, paper=paper)) if not p.across]
    for piece in upright:
        assert piece.left >= 12 * MM
        assert piece.right <= width - 12 * MM
        assert piece.bottom >= 8 * MM
        assert piece.top <= height - 8 * MM
    clashes = [
        (a.text, b.text)
        for place, a in enumerate(upright)
        for b in upright[place + 1 :]
        if a.page == b.page and a.overlaps(b)
    ]
    assert clashes == []


@pytest.mark.parametrize("batch", CASES)
def test_a_language_with_longer_words_overlaps_nothing(batch: Batch) -> None:
    use_translator(lambda text: f"{text} {'n' * (len(text) // 2)}", lambda one, many, count: f"{many} nnnnn nnnnn")
    try:
        pdf = batch_sheet(batch, paper=Paper.LETTER)
    finally:
        use_language(None)
    upright = [p for p in pieces(pdf) if not p.across]
    assert all(p.left >= 12 * MM and p.right <= Paper.LETTER.size_pt[0] - 12 * MM for p in upright)
    assert not [
        (a.text, b.text) for a, b in itertools.combinations(upright, 2) if a.page == b.page and a.overlaps(b)
    ]


@pytest.mark.parametrize("paper", PAPERS)
def test_every_line_of_forty_stands_on_the_sheet_with_its_whole_name_and_target(paper: Paper) -> None:
    text = words(made.MANY, paper)
    for line in made.MANY.lines:
        assert squeezed(line.ingredient) in text
    targets = [write_kg(line.target_kg, line.step_kg) for group in in_order(made.MANY.lines) for line in group]
    shown = [p.text.strip() for p in pieces(batch_sheet(made.MANY, paper=paper)) if p.size == 16 and not p.across]
    assert shown == [*targets, "15753.750"]


def test_the_running_total_is_that_of_each_scale_and_hand_adds_have_none() -> None:
    sheet = pieces(batch_sheet(made.PLAIN))
    title = next(p for p in sheet if p.text.strip() == "Running kg")
    running = [p.text.strip() for p in sheet if p.size == 12 and abs(p.right - title.right) < 2 and p.page == 0]
    assert running == ["820", "1430", "1835", "21.5", "28.0"]
    assert [p.text.strip() for p in sheet if p.size == 16][-1] == "1869.750"
    assert made.PLAIN.total_kg == 1869.75


def test_lines_stand_by_scale_with_the_coarsest_first_and_hand_adds_last() -> None:
    groups = [[line.ingredient for line in group] for group in in_order(made.PLAIN.lines)]
    assert groups == [
        ["Barley", "Wheat", "Soybean meal 46 %"], ["Limestone", "Lysine hydrochloride"], ["Salt", "Worm premix 2 %"],
    ]
    text = words(made.PLAIN)
    places = [text.index(squeezed(part)) for part in (
        "Hopper scale, in steps of 5 kg", "Minor scale, in steps of 0.5 kg",
        "Hand-adds on Bench scale, in steps of 0.005 kg",
    )]
    assert places == sorted(places)


@pytest.mark.parametrize("paper", PAPERS)
def test_weights_are_at_least_12_point_and_lines_at_least_8_mm_apart(paper: Paper) -> None:
    sheet = pieces(batch_sheet(made.MANY, paper=paper))
    targets = [p for p in sheet if not p.across and p.size == 16]
    assert len(targets) == len(made.MANY.lines) + 1
    for above, below in itertools.pairwise(targets):
        if above.page == below.page:
            assert above.bottom - below.bottom >= 8 * MM
    figures = {p.size for p in sheet if not p.across and re.fullmatch(r"\d+\.\d{2,3}\s*(kg)?\s*", p.text)}
    assert min(figures - {10.5}) >= 12


def test_table_heads_and_the_name_of_the_scale_stand_again_on_each_page_of_lines() -> None:
    pages = page_text(batch_sheet(made.MANY))
    with_lines = [text for text in pages if re.search(r"Ingredient \d|Micro \d", text)]
    assert len(with_lines) >= 3
    for text in with_lines:
        assert "Target kg" in text
        assert "Initials" in text
        first_line = re.search(r"Ingredient \d|Micro \d", text)
        assert first_line is not None
        assert "in steps of" in text[: first_line.start()]
    assert any("in steps of 5 kg, continued" in text for text in with_lines[1:])


@pytest.mark.parametrize("paper", PAPERS)
@pytest.mark.parametrize("batch", CASES)
def test_each_page_has_the_general_caution_and_its_number_of_all(batch: Batch, paper: Paper) -> None:
    pages = page_text(batch_sheet(batch, paper=paper))
    for number, text in enumerate(pages, start=1):
        assert squeezed(GENERAL_CAUTION) in squeezed(text)
        assert f"Page {number} of {len(pages)}" in text


def test_every_page_after_the_first_says_which_batch_it_belongs_to() -> None:
    batch = dataclasses.replace(made.MANY, number=77)
    for text in page_text(batch_sheet(batch))[1:]:
        assert "draft 12" in text
        assert "Batch 77" in text
        assert "Breeder layer" in text


def test_a_batch_that_breaks_a_limit_unaccepted_is_marked_across_every_page_and_names_the_limit() -> None:
    pdf = batch_sheet(made.MANY)
    across = [(p.page, p.text.strip()) for p in pieces(pdf) if p.across]
    for page in range(page_count(pdf)):
        assert (page, "NOT TO BE MIXED") in across
        assert (page, "DRAFT") in across
        assert page_text(pdf)[page].count("NOT TO BE MIXED") == 2
    text = words(made.MANY)
    assert squeezed("Lysine: asked at least 1.05 %, comes to 1.04970 %, 0.00030 % too little.") in text
    assert squeezed("Calcium: asked 0.7 to 0.9 %, comes to 0.921 %, 0.021 % too much.") in text


def test_an_accepted_batch_is_not_marked_and_says_who_accepted_what_and_why() -> None:
    text = words(made.ACCEPTED)
    assert "NOTTOBEMIXED" not in text
    assert squeezed("Lysine: asked at least 1.05 %") in text
    assert squeezed("Accepted by Marta Okonjo: Within the error of the analysis.") in text


def test_a_reason_without_a_name_does_not_take_the_mark_off() -> None:
    batch = dataclasses.replace(made.ACCEPTED, accepted_by="")
    assert "NOTTOBEMIXED" in words(batch)


def test_a_plain_batch_has_no_mark_and_its_number() -> None:
    pdf = batch_sheet(made.PLAIN)
    assert not [p for p in pieces(pdf) if p.across]
    text = words(made.PLAIN)
    for mark in ("DRAFT", "COPY", "NOTTOBEMIXED"):
        assert mark not in text
    assert "1041" in text
    assert "notnumbered" not in text
    assert "7480kgin4equalbatches" in text


def test_a_sheet_says_who_approved_its_version_and_a_draft_names_nobody() -> None:
    assert squeezed("This is version 3, approved by Marta Okonjo, nutritionist, 2026-01-30.") in words(made.PLAIN)
    assert "approvedby" not in words(made.MANY)


def test_the_mark_of_a_draft_follows_what_the_batch_is_and_not_its_words() -> None:
    called_otherwise = dataclasses.replace(made.PLAIN, version="Entwurf 4", draft=True, approved_by="")
    pdf = batch_sheet(called_otherwise)
    assert [p.text.strip() for p in pieces(pdf) if p.across] == ["DRAFT"] * page_count(pdf)
    assert "DRAFT" not in words(dataclasses.replace(made.PLAIN, version="drafty 4"))


def test_a_reprint_says_which_copy_it_is_on_every_page() -> None:
    for text in page_text(batch_sheet(made.NOT_FIT)):
        assert text.count("COPY 1") == 2


def test_a_preview_is_not_numbered() -> None:
    assert "notnumbered" in words(dataclasses.replace(made.PLAIN, number=None))


def test_what_prevents_a_sheet_stands_on_the_page_with_the_mark() -> None:
    text = words(made.NO_SHEET)
    assert squeezed("Salt has no scale; choose Bench scale for it") in text
    assert text.count("NOTTOBEMIXED") == 2


def test_a_medicated_line_shows_drug_level_species_and_withdrawal_as_entered() -> None:
    text = words(made.PLAIN)
    for part in ("MEDICATED", "fenbendazole 20 g/kg", "5 g per tonne of feed", "pigs", "4 days before slaughter"):
        assert squeezed(part) in text


def test_medicated_details_stand_on_the_page_of_their_line() -> None:
    fillers = tuple(made.line(f"Filler {n}", 10) for n in range(60))
    last = dataclasses.replace(made.MEDICATED, scale="Z")
    # Around the ends of the first two pages.
    for count in (*range(3, 9), *range(27, 33)):
        batch = dataclasses.replace(made.PLAIN, lines=(*fillers[:count], last))
        for text in page_text(batch_sheet(batch)):
            tagged = bool(re.search(r"^MEDICATED (?!FEED)", text, re.MULTILINE))
            assert ("Level: 5 g per tonne" in text) == tagged == ("fenbendazole" in text) == ("Total" in text)
            assert bool(re.search(rf"^{count + 1} Worm premix", text, re.MULTILINE)) == tagged


def test_a_residue_is_printed_with_its_sign_and_no_residue_is_said() -> None:
    less = "Residue −0.250 kg: the lines come to 0.250 kg less than the batch of 1870 kg."
    assert squeezed(less) in words(made.PLAIN)
    more = dataclasses.replace(made.PLAIN, batch_kg=1869.5)
    assert squeezed("Residue 0.250 kg: the lines come to 0.250 kg more than the batch of 1869.5 kg.") in words(more)
    assert squeezed("Residue 0 kg") in words(made.NO_SCALES)


def test_nutrients_show_value_and_unit_and_an_unknown_one_is_not_zero() -> None:
    text = "\n".join(page_text(batch_sheet(made.PLAIN)))
    assert "18.03 %" in text
    assert "13.12 MJ/kg" in text
    assert "8000 IU/kg" in text
    assert re.search(r"Available phosphorus\s+unknown", text)
    assert "Calcium: no value known for Grass meal; counted as 0." in text


def test_special_cautions_stand_whole_on_the_sheet() -> None:
    text = words(made.MANY)
    for caution in made.MANY.cautions:
        assert squeezed(caution) in text
    assert squeezed("4 cautions stand after the lines") in text


def test_letters_beyond_english_are_kept_and_those_without_a_letter_stand_by_their_code() -> None:
    text = words(made.UNICODE)
    for part in ("Färsenaufzucht Ωmega · тёлки №2", "Ačiū grūdai — žirniai", "Корм", "Mühle Łódź & Søn"):
        assert squeezed(part) in text
    assert "‹5927›‹9EA6›" in text
    assert "‹5927›‹8C46›" in text


def test_a_name_longer_than_a_page_is_printed_whole() -> None:
    name = " ".join(f"word{n}" for n in range(900))
    batch = dataclasses.replace(made.PLAIN, lines=(made.line(name, 1870),), mill="Mill " * 60)
    pdf = batch_sheet(batch)
    assert page_count(pdf) > 1
    found = re.findall(r"word\d+", " ".join(page_text(pdf)))
    assert found == name.split()
    assert squeezed(" ".join(page_text(pdf))).count("Mill") >= 60


def test_the_same_batch_gives_the_same_bytes() -> None:
    assert batch_sheet(made.MANY) == batch_sheet(made.MANY)


def test_numbers_take_the_decimal_sign_of_the_notation() -> None:
    use_notation(COMMA)
    try:
        text = words(made.PLAIN)
    finally:
        use_notation(PLAIN)
    for part in ("4,250", "1869,750", "21,5", "13,12", "Residue−0,250kg"):
        assert part in text
    assert not re.search(r"\d\.\d", text.replace("2026-02-03", ""))


def test_every_word_of_the_sheet_goes_through_the_catalogue() -> None:
    use_translator(lambda text: re.sub(r"[A-Za-z](?![^{]*\})", "x", text), lambda one, many, n: "x" if n == 1 else "xx")
    try:
        text = "\n".join(page_text(batch_sheet(dataclasses.replace(made.NOT_FIT, version="draft 1"))))
    finally:
        use_language(None)
    own = [made.NOT_FIT.formula, "draft 1", made.NOT_FIT.mill, "Feed nothing else with copper.", GENERAL_CAUTION]
    own += [made.NOT_FIT.approved_by]
    own += [line.ingredient for line in made.PLAIN.lines] + [line.scale for line in made.PLAIN.lines]
    own += [n.name for n in made.NUTRIENTS] + [n.unit for n in made.NUTRIENTS if n.unit] + ["Grass meal"]
    own += [made.MEDICATED.drug, made.MEDICATED.drug_level, made.MEDICATED.drug_species, made.MEDICATED.withdrawal]
    for part in sorted(own, key=len, reverse=True):
        text = text.replace(part, "")
    left = {word for word in re.findall(r"[A-Za-z]{2,}", text) if set(word.casefold()) != {"x"}}
    assert left <= {"kg"}
