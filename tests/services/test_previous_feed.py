"""What went through the mixer before, by its sheets, and when it must be cleaned out before the next feed."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path
from typing import Any

import pytest

from blendapp.domain.batches import Batch, CleanOut
from blendapp.domain.formulas import Admits, Animal, Limit, LimitKind, Subject
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.plant import Mixer, Scale
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change, added
from blendapp.services import edits
from blendapp.services.batch import make_batch, print_copy, print_sheet
from blendapp.services.mill import Mill
from blendapp.services.sheets import printed_batch
from tests.mills import TODAY, Maker

Opened = Callable[[Library], Mill]
FEEDS = {
    "Plain": (Animal.PIG, ("Maize",)),
    "Drugged": (Animal.PIG, ("Maize", "Drug")),
    "Broiler": (Animal.POULTRY, ("Maize", "Ionophore")),
    "Fattener": (Animal.PIG, ("Maize", "Bone meal", "Copper sulphate")),
    "Horse": (Animal.HORSE, ("Maize",)),
    "Cow": (Animal.CATTLE, ("Maize",)),
    "Lamb": (Animal.SHEEP, ("Maize",)),
    "Unsaid": (None, ("Maize",)),
    "Also drugged": (Animal.PIG, ("Maize", "Drug")),
    "Same drug": (Animal.PIG, ("Maize", "Other carrier")),
}


def library() -> Library:
    make = Maker()
    make.put(Scale(1, "Scale", 0.1))
    make.put(Mixer(1, "Small mixer", 50.0, 600.0))
    make.put(Mixer(2, "Big mixer", 500.0, 2000.0))
    make.ingredient("Maize", 200.0, scale_id=1)
    for name, fields in {
        "Drug": {"tags": (Tag.MEDICATED,), "drug": "Tylosin"},
        "Other carrier": {"tags": (Tag.MEDICATED,), "drug": "tylosin"},
        "Ionophore": {"tags": (Tag.IONOPHORE,)},
        "Bone meal": {"tags": (Tag.RUMINANT_PROTEIN,)},
        "Copper sulphate": {"tags": (Tag.ADDED_COPPER, Tag.ONLY_WHEN_LISTED)},
    }.items():
        make.ingredient(name, 500.0, scale_id=1, **fields)
    for name, (animal, parts) in FEEDS.items():
        feed = make.formula(name, animal=animal, admits=Admits.LISTED)
        for part in parts:
            make.limit(feed, "ingredient", part, *((None, None) if part == "Maize" else (1.0, 1.0)))
    return make.library


@pytest.fixture
def mill(opened: Opened) -> Mill:
    return opened(library())


def batch_of(mill: Mill, feed: str, kg: float = 1000.0, **more: Any) -> Batch:
    formula = mill.library.named("formula", feed)
    assert formula is not None
    batch = make_batch(mill.library, formula.id, kg, TODAY, mill.composition, **more)
    assert batch.cause is None, batch.cause
    return batch


def printed(mill: Mill, tmp_path: Path, feed: str, kg: float = 1000.0, **more: Any) -> Batch:
    return print_sheet(mill, batch_of(mill, feed, kg, **more), tmp_path / "a.pdf")


def test_the_feed_before_is_that_of_the_last_sheet_of_the_same_mixer(mill: Mill, tmp_path: Path) -> None:
    assert batch_of(mill, "Plain").previous_feed == ""
    for feed, kg in (("Plain", 1000.0), ("Cow", 1000.0), ("Lamb", 400.0)):
        printed(mill, tmp_path, feed, kg)
    assert [record.mixer_id for record in mill.library.all("batch")] == [2, 2, 1]
    big, small = batch_of(mill, "Plain"), batch_of(mill, "Plain", 400.0)
    assert (big.previous_feed, big.previous_number) == ("Cow (sheet 2, 2026-03-02)", 2)
    assert (small.previous_feed, small.previous_number) == ("Lamb (sheet 3, 2026-03-02)", 3)
    assert big.clean_out_reason == small.clean_out_reason == ""


def test_the_smallest_mixer_that_fits_takes_a_batch_unless_one_is_chosen(mill: Mill) -> None:
    assert (batch_of(mill, "Plain", 550.0).mixer, batch_of(mill, "Plain", 700.0).mixer) == ("Small mixer", "Big mixer")
    assert batch_of(mill, "Plain", 550.0, mixer_id=2).mixer == "Big mixer"
    assert batch_of(mill, "Plain", 1200.0, mixer_id=1).batches == 2
    with pytest.raises(Refused, match="choose one of Small mixer, Big mixer"):
        batch_of(mill, "Plain", mixer_id=9)


@pytest.mark.parametrize(
    ("before", "after", "words"),
    [
        ("Drugged", "Plain", "Drug (drug: Tylosin) is not in this feed"),
        ("Drugged", "Cow", "Drug (drug: Tylosin) is not in this feed"),
        ("Broiler", "Horse", "Ionophore (ionophore) can kill horses"),
        ("Broiler", "Unsaid", "Ionophore (ionophore) can kill horses"),
        ("Fattener", "Cow", "Bone meal (ruminant protein) is prohibited in feed for ruminants"),
        ("Fattener", "Lamb", "Copper sulphate (added copper) can poison sheep"),
        ("Drugged", "Also drugged", ""),
        ("Drugged", "Same drug", ""),
        ("Broiler", "Cow", ""),
        ("Fattener", "Horse", ""),
        ("Plain", "Horse", ""),
    ],
)
def test_a_clean_out_is_asked_for_by_what_the_feed_before_held(
    before: str, after: str, words: str, mill: Mill, tmp_path: Path
) -> None:
    printed(mill, tmp_path, before)
    batch = batch_of(mill, after)
    if not words:
        assert batch.clean_out_reason == ""
        assert not batch.lacks_clean_out
        return
    assert batch.clean_out_reason.startswith(f"{before} (sheet 1, 2026-03-02) went through before: ")
    assert words in batch.clean_out_reason
    assert batch_of(mill, after, mixer_id=1, kg=500.0).clean_out_reason == "", "another mixer"


@pytest.mark.parametrize("clean_out", [None, CleanOut.NONE])
def test_a_sheet_after_a_drug_is_not_printed_until_somebody_says_what_is_done(
    clean_out: CleanOut | None, mill: Mill, tmp_path: Path
) -> None:
    printed(mill, tmp_path, "Drugged")
    batch = batch_of(mill, "Plain", clean_out=clean_out)
    assert batch.lacks_clean_out
    with pytest.raises(Refused, match="Choose physical, flush or sequence; or choose none needed, and say why"):
        print_sheet(mill, batch, tmp_path / "b.pdf")
    assert not (tmp_path / "b.pdf").exists()
    assert mill.store.next_batch_number() == 2
    accepted = print_sheet(mill, batch, tmp_path / "b.pdf", reason="the mixer was washed last night", by="Ann")
    assert (accepted.number, accepted.accepted_by, accepted.clean_out) == (2, "Ann", clean_out)


def test_a_reason_for_a_broken_limit_waives_no_clean_out(mill: Mill, tmp_path: Path) -> None:
    printed(mill, tmp_path, "Drugged")
    cow = mill.library.named("formula", "Cow")
    assert cow is not None
    edits.change(mill, cow, admits=Admits.ALL)
    mill.apply("A limit that no scale keeps", [added(Limit(
        99, cow.id, LimitKind.INGREDIENT, Subject.ingredients(6), None, 0.033, 0.034
    ))])
    batch = batch_of(mill, "Cow")
    assert batch.broken
    assert batch.lacks_clean_out
    with pytest.raises(Refused, match="Choose physical"):
        print_sheet(mill, batch, tmp_path / "b.pdf", reason="within the analysis", by="Ann")
    chosen = replace(batch, clean_out=CleanOut.NONE)
    assert print_sheet(mill, chosen, tmp_path / "b.pdf", reason="washed, within the analysis", by="Ann").number == 2


@pytest.mark.parametrize("clean_out", [CleanOut.PHYSICAL, CleanOut.FLUSH, CleanOut.SEQUENCE])
def test_a_clean_out_that_was_chosen_is_kept_with_its_reason(
    clean_out: CleanOut, mill: Mill, tmp_path: Path
) -> None:
    printed(mill, tmp_path, "Drugged")
    sheet = printed(mill, tmp_path, "Plain", clean_out=clean_out)
    assert (sheet.number, sheet.clean_out) == (2, clean_out)
    assert "Tylosin" in sheet.clean_out_reason
    assert print_copy(mill, 2, tmp_path / "copy.pdf") == replace(sheet, copy=1)
    assert batch_of(mill, "Cow").clean_out_reason == "", "the feed before is now plain"


def test_what_a_person_says_of_the_feed_before_stands_but_does_not_clean_the_mixer(mill: Mill, tmp_path: Path) -> None:
    printed(mill, tmp_path, "Drugged")
    batch = batch_of(mill, "Plain", previous_feed=" Wheat ")
    assert (batch.previous_feed, batch.previous_number) == ("Wheat", None)
    assert "Tylosin" in batch.clean_out_reason
    assert printed(mill, tmp_path, "Plain", previous_feed="Wheat", clean_out=CleanOut.SEQUENCE).previous_feed == "Wheat"


def test_a_drug_inside_what_went_through_counts_and_so_does_one_whose_record_is_gone(
    mill: Mill, tmp_path: Path
) -> None:
    maker = mill.library.named("formula", "Also drugged")
    maize = mill.library.named("ingredient", "Maize")
    assert maker is not None
    assert maize is not None
    sheet = printed(mill, tmp_path, "Drugged")
    for feed in ("Drugged", "Also drugged"):
        formula = mill.library.named("formula", feed)
        assert formula is not None
        for limit in mill.library.limits(formula.id):
            if limit.subject.ids == (2,):
                edits.remove_limit(mill, limit.id)
    edits.remove_ingredient(mill, 2)
    assert "Drug (drug: Tylosin)" in batch_of(mill, "Plain").clean_out_reason
    assert sheet.lines


def test_what_a_sheet_said_of_its_lines_counts_whatever_becomes_of_their_tags(mill: Mill, tmp_path: Path) -> None:
    printed(mill, tmp_path, "Broiler")
    edits.change(mill, mill.library.ingredient(4), tags=())
    (record,) = mill.library.all("batch")
    assert {line.ingredient: line.tags for line in printed_batch(record).lines}["Ionophore"] == ("ionophore",)
    assert "Ionophore (ionophore) can kill horses" in batch_of(mill, "Horse").clean_out_reason


def test_a_premix_that_holds_a_drug_asks_for_a_clean_out(opened: Opened, tmp_path: Path) -> None:
    found = library()
    premix, drugged = found.ingredient(6), found.named("formula", "Drugged")
    assert drugged is not None
    found.apply([Change(premix, replace(premix, made_by_formula_id=drugged.id))])
    mill = opened(found)
    printed(mill, tmp_path, "Fattener")
    reason = batch_of(mill, "Plain").clean_out_reason
    assert "before: Drug (drug: Tylosin) is not in this feed. Clean out" in reason, "named once, and by its own name"


def test_a_batch_that_was_made_before_another_went_through_is_not_printed_as_if_nothing_had(
    mill: Mill, tmp_path: Path
) -> None:
    early = batch_of(mill, "Plain")
    printed(mill, tmp_path, "Drugged")
    with pytest.raises(Refused, match="Since this batch was made, another went through its mixer"):
        print_sheet(mill, early, tmp_path / "b.pdf")
    cow = batch_of(mill, "Cow", clean_out=CleanOut.FLUSH)
    printed(mill, tmp_path, "Plain", clean_out=CleanOut.FLUSH)
    late = print_sheet(mill, cow, tmp_path / "b.pdf")
    assert (late.previous_feed, late.clean_out_reason) == ("Plain (sheet 2, 2026-03-02)", "")


def test_in_a_mill_without_mixers_every_sheet_went_through_the_one_it_has(opened: Opened, tmp_path: Path) -> None:
    found = library()
    found.apply([Change(mixer, None) for mixer in found.mixers])
    mill = opened(found)
    printed(mill, tmp_path, "Drugged")
    batch = batch_of(mill, "Plain")
    assert (batch.mixer, batch.mixer_id, batch.previous_number) == ("", None, 1)
    assert batch.lacks_clean_out
