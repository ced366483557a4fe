"""Lists of analyses applied: samples, means with n and SD, one undo, and what rolling back restores."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from blendapp.domain.composition_rows import CompositionReading, CompositionRow
from blendapp.domain.ingredients import Basis, Origin, Value
from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT, TAKE, Answer, Fate
from blendapp.domain.mills import Asked, ListAbout
from blendapp.domain.plant import Bin
from blendapp.domain.problems import Refused
from blendapp.domain.records import added
from blendapp.services.composition import apply_composition_list, read_composition_list
from blendapp.services.edits import change, remove_ingredient, remove_nutrient, set_value
from blendapp.services.list_memory import remembered
from blendapp.services.lists import applied_lists, open_list, roll_back
from blendapp.services.mill import Mill
from blendapp.services.prices import apply_price_list, read_price_list
from tests.mills import TODAY, Maker

Opened = Callable[[Library], Mill]
LIST = """Ingredient,Sample,Sampled,DM %,CP % as fed,Lysine g/kg as fed
Maize,A1,2026-02-03,87.0,8.1,2.4
Maize,A2,2026-02-05,88.0,8.4,2.6
Maize,A3,2026-02-04,89.0,8.1,n.d.
Soybean meal,B1,2026-02-04,,45.5,
"""
PROTEIN, LYSINE = 1, 2
MAIZE, SOYA = 1, 2


@pytest.fixture
def mill(opened: Opened) -> Mill:
    maker = Maker()
    maker.nutrient("Crude protein", key="crude protein")
    maker.nutrient("Lysine", key="lysine")
    maker.ingredient("Maize", 200.0, {"Crude protein": 8.5}, dry_matter_percent=88)
    maker.ingredient("Soybean meal", 400.0, {"Crude protein": 46.0, "Lysine": 2.9}, dry_matter_percent=89)
    return opened(maker.library)


def read(mill: Mill, folder: Path, name: str, text: str, *answers: Answer) -> CompositionReading:
    (folder / name).write_text(text)
    return read_composition_list(mill, folder / name, TODAY, answers=answers)


def value(mill: Mill, ingredient_id: int, nutrient_id: int) -> Value:
    found = mill.library.value(ingredient_id, nutrient_id)
    assert found is not None
    return found


def test_the_mean_of_the_samples_takes_the_place_of_the_value_with_n_and_sd(mill: Mill, tmp_path: Path) -> None:
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST), TODAY)
    # By hand: (8.1 + 8.4 + 8.1) / 3 = 8.2; deviations -0.1, 0.2, -0.1; their squares sum to 0.06; over 2, root 0.1732.
    protein = value(mill, MAIZE, PROTEIN)
    assert (protein.amount, protein.unit, protein.basis, protein.n) == (8.2, "%", Basis.AS_FED, 3)
    assert protein.sd == pytest.approx(0.03 ** 0.5)
    assert (protein.origin, protein.source) == (Origin.MEASURED, "lab.csv")
    assert protein.date == datetime.date(2026, 2, 5)
    # By hand: 2.4 and 2.6 g/kg have the mean 2.5 and the deviations 0.1: the root of 0.02.
    lysine = value(mill, MAIZE, LYSINE)
    assert (lysine.amount, lysine.unit, lysine.n, lysine.sd) == (2.5, "g/kg", 2, pytest.approx(0.02 ** 0.5))
    assert mill.library.ingredient(MAIZE).dry_matter_percent == 88
    one = value(mill, SOYA, PROTEIN)
    assert (one.amount, one.n, one.sd) == (45.5, 1, None)
    assert mill.library.ingredient(SOYA).dry_matter_percent == 89
    assert value(mill, SOYA, LYSINE).amount == 2.9, "what was not measured keeps its value"


def test_every_accepted_row_is_a_lot_with_its_analyses(mill: Mill, tmp_path: Path) -> None:
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST), TODAY)
    (kept,) = applied_lists(mill)
    assert (kept.about, kept.rows, kept.accepted, kept.file_name) == (ListAbout.COMPOSITION, 5, 4, "lab.csv")
    lots = mill.library.all("lot")
    assert [(lot.ingredient_id, lot.name, lot.dry_matter_percent) for lot in lots] == [
        (MAIZE, "A1", 87), (MAIZE, "A2", 88), (MAIZE, "A3", 89), (SOYA, "B1", None)
    ]
    assert {lot.price_list_id for lot in lots} == {kept.id}
    assert lots[0].received == datetime.date(2026, 2, 3)
    found = [(v.lot_id, v.nutrient_id, v.amount, v.unit, v.basis) for v in mill.library.all("lot_value")]
    assert found == [
        (1, PROTEIN, 8.1, "%", "as fed"), (1, LYSINE, 2.4, "g/kg", "as fed"), (2, PROTEIN, 8.4, "%", "as fed"),
        (2, LYSINE, 2.6, "g/kg", "as fed"), (3, PROTEIN, 8.1, "%", "as fed"), (4, PROTEIN, 45.5, "%", "as fed"),
    ]


def test_a_list_its_samples_and_its_answers_are_one_undo(mill: Mill, tmp_path: Path) -> None:
    before = mill.store.dump()
    text = LIST.replace("CP % as fed", "CF % as fed")
    reading = read(mill, tmp_path, "lab.csv", text, Answer(Asked.NUTRIENT, "CF % as fed", LEAVE_OUT))
    apply_composition_list(mill, reading, TODAY)
    assert [(one.asked, one.answer) for one in remembered(mill)] == [(Asked.NUTRIENT, LEAVE_OUT)]
    mill.undo()
    assert mill.store.dump() == before
    mill.redo()
    assert mill.library.ingredient(MAIZE).dry_matter_percent == 88
    assert len(mill.library.all("lot")) == 3, "the soybean meal had no value that is read"


def test_what_was_answered_is_not_asked_again_of_the_next_list_of_the_source(mill: Mill, tmp_path: Path) -> None:
    text = "Product,Lab no,CP,Fibre score\nYellow corn,{},8.3,2\n"
    first = read(mill, tmp_path, "Larkwater 2026-03-02.csv", text.format(1))
    assert {(one.asked, one.about) for one in first.questions} == {
        (Asked.INGREDIENT, "Yellow corn"), (Asked.BASIS, ""), (Asked.CONCENTRATION, "CP"),
        (Asked.NUTRIENT, "Fibre score"),
    }
    answers = [
        Answer(Asked.INGREDIENT, "Yellow corn", ingredient_id=MAIZE), Answer(Asked.BASIS, "", "as fed"),
        Answer(Asked.CONCENTRATION, "CP", "%"), Answer(Asked.NUTRIENT, "Fibre score", LEAVE_OUT),
    ]
    answered = read(mill, tmp_path, "Larkwater 2026-03-02.csv", text.format(1), *answers)
    assert [row.fate for row in answered.rows] == [Fate.IGNORED, Fate.ACCEPTED]
    apply_composition_list(mill, answered, TODAY)
    again = read(mill, tmp_path, "Larkwater 2026-03-09.csv", text.format(2))
    assert again.questions == []
    assert [one.amount for one in again.accepted[0].values] == [8.3]
    assert read(mill, tmp_path, "Seaboard.csv", text.format(3)).accepted == []


def test_an_applied_list_opens_again_with_every_row(mill: Mill, tmp_path: Path) -> None:
    reading = read(mill, tmp_path, "lab.csv", LIST + "Oats,C1,2026-02-04,,11,\nMaize,A9,2026-02-04,,-8,\n")
    apply_composition_list(mill, reading, TODAY)
    (kept,) = applied_lists(mill, ListAbout.COMPOSITION)
    assert applied_lists(mill, ListAbout.PRICES) == []
    assert open_list(mill, kept.id) == [replace(row, questions=()) for row in reading.rows]
    assert [row.fate for row in open_list(mill, kept.id)][-2:] == [Fate.QUESTION, Fate.REFUSED]


def test_one_sample_whose_analyses_stand_in_two_tables_is_one_lot(mill: Mill, tmp_path: Path) -> None:
    text = "Ingredient,Sample,CP % as fed\nMaize,A1,8.2\n\nIngredient,Sample,Lysine % as fed\nMaize,A1,0.26\n"
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", text), TODAY)
    assert [lot.name for lot in mill.library.all("lot")] == ["A1"]
    assert [(one.lot_id, one.nutrient_id) for one in mill.library.all("lot_value")] == [(1, PROTEIN), (1, LYSINE)]
    later = read(mill, tmp_path, "later.csv", "Ingredient,Sample,DM %\nMaize,A1,87\n")
    assert len(later.accepted) == 1, "what was not measured before is no second time"
    assert read(mill, tmp_path, "later.csv", "Ingredient,Sample,CP % as fed\nMaize,A1,8.3\n").accepted == []


def test_nothing_is_recorded_where_no_row_was_accepted(mill: Mill, tmp_path: Path) -> None:
    with pytest.raises(Refused, match="no analysis"):
        apply_composition_list(mill, read(mill, tmp_path, "a.csv", "Ingredient,CP\nMaize,8\n"), TODAY)


def test_a_sample_that_is_on_record_is_asked_about(mill: Mill, tmp_path: Path) -> None:
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST), TODAY)
    again = read(mill, tmp_path, "lab.csv", LIST)
    assert {row.fate for row in again.rows[1:]} == {Fate.QUESTION}
    assert {one.asked for one in again.questions} == {Asked.TWIN}
    assert "lab.csv" in again.rows[1].reason
    (row,) = read(mill, tmp_path, "lab.csv", LIST, Answer(Asked.TWIN, "", TAKE, row=2)).accepted
    assert row.sample == "A1"
    roll_back(mill, applied_lists(mill)[0].id)
    assert len(read(mill, tmp_path, "lab.csv", LIST).accepted) == 4


# -- rolling back


def test_rolling_back_restores_exactly_what_stood_before(mill: Mill, tmp_path: Path) -> None:
    before = mill.store.dump()
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST), TODAY)
    applied = mill.store.dump()
    done = roll_back(mill, applied_lists(mill)[0].id)
    assert done.oddities == ()
    after = mill.store.dump()
    for kind in ("value", "ingredient", "lot", "lot_value"):
        assert after[kind] == before[kind], kind
    assert applied_lists(mill)[0].withdrawn is not None
    with pytest.raises(Refused, match="rolled back before"):
        roll_back(mill, applied_lists(mill)[0].id)
    mill.undo()
    assert mill.store.dump() == applied


def test_a_value_that_was_changed_since_stays_and_is_said(mill: Mill, tmp_path: Path) -> None:
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST), TODAY)
    set_value(mill, MAIZE, PROTEIN, 9.0)
    set_value(mill, MAIZE, LYSINE, None)
    done = roll_back(mill, applied_lists(mill)[0].id)
    assert value(mill, MAIZE, PROTEIN).amount == 9.0
    assert mill.library.value(MAIZE, LYSINE) is None
    assert value(mill, SOYA, PROTEIN).amount == 46.0
    said = {(one.place.record, "changed" in one.text, "cleared" in one.text) for one in done.oddities}
    assert said == {("Maize, Crude protein", True, False), ("Maize, Lysine", False, True)}


def test_of_an_ingredient_the_dry_matter_alone_is_taken_back(mill: Mill, tmp_path: Path) -> None:
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST.replace("89.0", "90.5")), TODAY)
    assert mill.library.ingredient(MAIZE).dry_matter_percent == 88.5
    change(mill, mill.library.ingredient(MAIZE), note="bought in autumn")
    roll_back(mill, applied_lists(mill)[0].id)
    maize = mill.library.ingredient(MAIZE)
    assert (maize.dry_matter_percent, maize.note) == (88, "bought in autumn")


@pytest.mark.parametrize("later_first", [True, False])
def test_two_lists_rolled_back_in_any_order_leave_what_stood_before_both(
    mill: Mill, tmp_path: Path, later_first: bool
) -> None:
    before = mill.store.dump()["value"]
    text = "Ingredient,Sample,CP % as fed\nMaize,{},{}\n"
    apply_composition_list(mill, read(mill, tmp_path, "one.csv", text.format("A", 8.2)), TODAY)
    apply_composition_list(mill, read(mill, tmp_path, "two.csv", text.format("B", 8.9)), TODAY)
    later, earlier = applied_lists(mill)
    first, second = (later, earlier) if later_first else (earlier, later)
    said = roll_back(mill, first.id).oddities
    assert value(mill, MAIZE, PROTEIN).amount == (8.2 if later_first else 8.9)
    assert len(said) == (0 if later_first else 1)
    roll_back(mill, second.id)
    assert mill.store.dump()["value"] == before


def test_a_lot_that_stands_in_a_bin_stays_and_is_said(mill: Mill, tmp_path: Path) -> None:
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST), TODAY)
    mill.apply("fill a bin", [added(Bin(mill.new_id("bin"), "3", MAIZE, 1))])
    done = roll_back(mill, applied_lists(mill)[0].id)
    assert [one.place.record for one in done.oddities] == ["A1"]
    assert [lot.name for lot in mill.library.all("lot")] == ["A1"]


def test_lists_of_both_kinds_stand_in_one_order(mill: Mill, tmp_path: Path) -> None:
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST), TODAY)
    (tmp_path / "prices.csv").write_text("Ingredient,Price,Unit\nMaize,205,t\n")
    apply_price_list(mill, read_price_list(mill, tmp_path / "prices.csv", TODAY), TODAY)
    assert [one.file_name for one in applied_lists(mill)] == ["prices.csv", "lab.csv"]
    assert [one.file_name for one in applied_lists(mill, ListAbout.PRICES)] == ["prices.csv"]


def test_an_ingredient_with_many_samples_is_not_removed_and_the_reason_is_short(mill: Mill, tmp_path: Path) -> None:
    rows = "".join(f"Maize,S{n},8.{n % 10}\n" for n in range(40))
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", "Ingredient,Sample,CP % as fed\n" + rows), TODAY)
    with pytest.raises(Refused, match="S5; 34 more"):
        remove_ingredient(mill, MAIZE)
    roll_back(mill, applied_lists(mill)[0].id)
    remove_ingredient(mill, MAIZE)
    assert MAIZE not in mill.library.records["ingredient"]


def test_a_nutrient_that_is_gone_is_not_brought_back_by_rolling_back(mill: Mill, tmp_path: Path) -> None:
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST), TODAY)
    remove_nutrient(mill, LYSINE)
    done = roll_back(mill, applied_lists(mill)[0].id)
    assert done.oddities == ()
    assert value(mill, MAIZE, PROTEIN).amount == 8.5
    assert mill.library.all("lot") == []


def test_what_was_typed_between_two_lists_comes_back(mill: Mill, tmp_path: Path) -> None:
    text = "Ingredient,Sample,CP % as fed\nMaize,{},{}\n"
    apply_composition_list(mill, read(mill, tmp_path, "one.csv", text.format("A", 8.2)), TODAY)
    set_value(mill, MAIZE, PROTEIN, 9.0)
    typed = value(mill, MAIZE, PROTEIN)
    apply_composition_list(mill, read(mill, tmp_path, "two.csv", text.format("B", 8.9)), TODAY)
    roll_back(mill, applied_lists(mill)[0].id)
    assert value(mill, MAIZE, PROTEIN) == typed
    (said,) = roll_back(mill, applied_lists(mill)[1].id).oddities
    assert "changed since" in said.text
    assert value(mill, MAIZE, PROTEIN) == typed


def test_it_holds_after_the_mill_was_closed_and_opened(
    mill: Mill, tmp_path: Path, reopened: Callable[[Mill], Mill]
) -> None:
    before = mill.store.dump()["value"]
    apply_composition_list(mill, read(mill, tmp_path, "lab.csv", LIST), TODAY)
    again = reopened(mill)
    samples = [row.sample for row in open_list(again, 1) if isinstance(row, CompositionRow)]
    assert samples == ["", "A1", "A2", "A3", "B1"]
    roll_back(again, 1)
    assert again.store.dump()["value"] == before
