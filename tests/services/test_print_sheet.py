"""Sheets get numbers 1, 2, 3, each once; a copy says so and has the same digits."""

from __future__ import annotations

import io
import os
import stat
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pypdfium2
import pytest

from blendapp.domain.batches import Batch
from blendapp.domain.formulas import Animal
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.plant import Scale
from blendapp.domain.problems import Refused
from blendapp.services import edits, people, sheets
from blendapp.services.batch import make_batch, print_copy, print_sheet
from blendapp.services.mill import Mill, MillFileError
from tests.mills import TODAY, Maker

Opened = Callable[[Library], Mill]
Reopened = Callable[[Mill], Mill]


def library() -> Library:
    make = Maker()
    make.nutrient("Lysine")
    make.put(Scale(1, "Big", 5.0))
    make.put(Scale(2, "Small", 2.0))
    make.ingredient("Maize", 200, {"Lysine": 0.3}, scale_id=1)
    make.ingredient("Lysine HCl", 2000, {"Lysine": 78.0}, scale_id=2, tags=(Tag.MEDICATED,), drug="none, a test")
    sound, broken = make.formula("Sound", animal=Animal.PIG), make.formula("Broken", animal=Animal.PIG)
    make.limit(sound, "nutrient", "Lysine", 0.5)
    make.limit(broken, "nutrient", "Lysine", 0.512, 0.515)
    for feed in (sound, broken):
        make.limit(feed, "ingredient", "Lysine HCl")
    return make.library


def text_of(path: Path) -> str:
    document = pypdfium2.PdfDocument(io.BytesIO(path.read_bytes()))
    return "\n".join(document[n].get_textpage().get_text_bounded() for n in range(len(document)))


def batch_of(mill: Mill, formula_id: int = 1, order_kg: float = 1000) -> Batch:
    batch = make_batch(mill.library, formula_id, order_kg, TODAY, mill.composition)
    assert batch.cause is None
    return batch


def test_sheets_are_numbered_1_2_3_and_no_number_is_given_twice(
    opened: Opened, reopened: Reopened, tmp_path: Path
) -> None:
    mill = opened(library())
    assert [print_sheet(mill, batch_of(mill), tmp_path / f"{n}.pdf").number for n in (1, 2)] == [1, 2]
    mill = reopened(mill)
    printed = print_sheet(mill, batch_of(mill), tmp_path / "3.pdf")
    assert printed.number == 3
    assert [record.number for record in mill.library.all("batch")] == [1, 2, 3]
    assert mill.store.read_all()["batch"] == mill.library.all("batch")
    assert len(list(tmp_path.glob("*.pdf"))) == 3


def test_a_batch_has_no_number_before_it_is_printed(opened: Opened) -> None:
    mill = opened(library())
    assert batch_of(mill).number is None
    assert mill.library.all("batch") == []


def test_a_sheet_holds_every_line_with_its_kilograms(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    printed = print_sheet(mill, batch_of(mill), tmp_path / "a.pdf")
    text = text_of(tmp_path / "a.pdf")
    assert "COPY" not in text
    for line in printed.lines:
        assert line.ingredient in text
        assert f"{line.target_kg:.0f}" in text


def test_a_copy_says_so_and_has_the_digits_of_its_sheet_whatever_changed_since(
    opened: Opened, tmp_path: Path
) -> None:
    mill = opened(library())
    printed = print_sheet(mill, batch_of(mill), tmp_path / "a.pdf")
    first = text_of(tmp_path / "a.pdf")
    edits.set_value(mill, 1, 1, 0.4)
    edits.change(mill, mill.library.ingredient(1), name="Corn")
    (record,) = mill.library.all("batch")
    for count in (1, 2):
        copied = print_copy(mill, record.id, tmp_path / f"copy {count}.pdf")
        assert copied == replace(printed, copy=count)
        text = text_of(tmp_path / f"copy {count}.pdf")
        assert "COPY" in text
        assert set(first.split()) <= set(text.split())
    assert mill.library.all("batch")[0].copies == 2
    assert mill.store.next_batch_number() == 2


def test_a_batch_comes_back_from_its_plain_form_equal(opened: Opened) -> None:
    mill = opened(library())
    for batch in (batch_of(mill), batch_of(mill, 2), make_batch(mill.library, 1, 1000, TODAY)):
        assert sheets.batch_from_plain(sheets.batch_to_plain(batch)) == batch


def test_printing_is_not_undone(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    edits.set_value(mill, 1, 1, 0.31)
    print_sheet(mill, batch_of(mill), tmp_path / "a.pdf")
    assert mill.undo_text == "Change Lysine of Maize"
    mill.undo()
    assert mill.undo() is None
    assert len(mill.library.all("batch")) == 1


def test_what_a_sheet_rests_on_cannot_be_undone_away(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    made = edits.duplicate_formula(mill, 1, "New").changes[0].id
    print_sheet(mill, batch_of(mill, made), tmp_path / "a.pdf")
    before = mill.store.dump()
    with pytest.raises((Refused, MillFileError)) as refusal:
        mill.undo()
    assert str(refusal.value)
    assert mill.store.dump() == before
    assert mill.library.formula(made).name == "New"
    with pytest.raises(Refused, match="must stay on record"):
        edits.remove_formula(mill, made)


def test_broken_limits_are_accepted_by_name_and_with_a_reason(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    batch = batch_of(mill, 2)
    assert batch.broken
    assert not batch.fit_to_mix
    plain = print_sheet(mill, batch, tmp_path / "a.pdf")
    assert not plain.fit_to_mix
    accepted = print_sheet(mill, batch, tmp_path / "b.pdf", reason=" within the analysis ", by="Ann Miller")
    assert accepted.fit_to_mix
    record = mill.library.all("batch")[1]
    assert (record.accepted_reason, record.accepted_by) == ("within the analysis", "Ann Miller")
    assert record.printed_by == "Ann"
    text = text_of(tmp_path / "b.pdf")
    assert "within the analysis" in text
    assert "Ann Miller" in text


@pytest.mark.parametrize(("reason", "by"), [("because", ""), ("", "Ann"), ("because", "  ")])
def test_half_an_acceptance_is_refused_and_gives_no_number(
    reason: str, by: str, opened: Opened, tmp_path: Path
) -> None:
    mill = opened(library())
    with pytest.raises(Refused, match="both a reason and a name"):
        print_sheet(mill, batch_of(mill, 2), tmp_path / "a.pdf", reason=reason, by=by)
    assert mill.library.all("batch") == []
    assert list(tmp_path.glob("*.pdf")) == []


def test_a_batch_that_cannot_be_made_is_not_printed(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    edits.change(mill, mill.library.ingredient(1), scale_id=None)
    batch = make_batch(mill.library, 1, 1000, TODAY)
    with pytest.raises(Refused, match="No scale weighs Maize"):
        print_sheet(mill, batch, tmp_path / "a.pdf")
    assert mill.library.all("batch") == []


@pytest.mark.parametrize("where", ["missing/a.pdf", "folder", "."])
def test_a_sheet_that_cannot_be_written_gives_no_number_and_leaves_no_file(
    where: str, opened: Opened, tmp_path: Path
) -> None:
    mill = opened(library())
    (tmp_path / "folder").mkdir()
    before = sorted(tmp_path.rglob("*"))
    with pytest.raises(Refused, match="cannot be written"):
        print_sheet(mill, batch_of(mill), tmp_path / where)
    assert mill.library.all("batch") == []
    assert mill.store.next_batch_number() == 1
    assert sorted(tmp_path.rglob("*")) == before


def test_a_file_that_stood_there_is_replaced_whole_or_not_at_all(
    opened: Opened, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    mill = opened(library())
    path = tmp_path / "a.pdf"
    path.write_text("old")

    def refuse(*_given: object) -> None:
        raise Refused("The mill file is full.")

    with monkeypatch.context() as patched:
        patched.setattr(mill, "record", refuse)
        with pytest.raises(Refused):
            print_sheet(mill, batch_of(mill), path)
    assert path.read_text() == "old"
    assert [p.name for p in tmp_path.iterdir() if "pdf" in p.name] == ["a.pdf"]
    print_sheet(mill, batch_of(mill), path)
    assert path.read_bytes().startswith(b"%PDF")


@pytest.mark.skipif(os.name != "posix", reason="permissions of files as POSIX has them")
def test_a_sheet_may_be_read_by_whoever_the_mask_lets(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    mask = os.umask(0o022)
    try:
        print_sheet(mill, batch_of(mill), tmp_path / "a.pdf")
    finally:
        os.umask(mask)
    assert stat.S_IMODE((tmp_path / "a.pdf").stat().st_mode) == 0o644


def test_a_page_becomes_pictures_for_preview(opened: Opened) -> None:
    mill = opened(library())
    images = sheets.page_images(sheets.batch_pdf(batch_of(mill)), 40)
    assert images
    assert all(image.startswith(b"\x89PNG") for image in images)


def test_where_the_mill_has_persons_one_of_them_accepts_and_is_named_as_the_mill_writes_it(
    opened: Opened, tmp_path: Path
) -> None:
    mill = opened(library())
    for name in ("Ann Ågren", "Ben Marsh", "Cy Left"):
        person = people.add_person(mill, name)
    people.change_person(mill, person.id, active=False)
    broken = batch_of(mill, 2)
    assert broken.broken

    def printed(by: str) -> str:
        return print_sheet(mill, broken, tmp_path / "a.pdf", reason="seen", by=by).accepted_by

    for by, words in (
        ("Ben Mash", "Nobody active in this mill is called “Ben Mash”; did you mean Ben Marsh?"),
        ("the boss", "nothing is accepted in that name. Name one of: Ann Ågren, Ben Marsh."),
        ("Cy Left", "Nobody active in this mill is called “Cy Left”"),
    ):
        with pytest.raises(Refused) as refused:
            printed(by)
        assert words in str(refused.value)
    assert not (tmp_path / "a.pdf").exists()
    assert mill.library.all("batch") == []
    assert printed("  ann  ÅGREN ") == "Ann Ågren"
    (record,) = mill.library.all("batch")
    assert record.accepted_by == "Ann Ågren"


def test_where_the_mill_has_no_active_person_anybody_may_be_named(opened: Opened, tmp_path: Path) -> None:
    mill = opened(library())
    gone = people.add_person(mill, "Cy Left")
    people.change_person(mill, gone.id, active=False)
    done = print_sheet(mill, batch_of(mill, 2), tmp_path / "a.pdf", reason="seen", by=" the shift leader ")
    assert done.accepted_by == "the shift leader"
