"""The memory of price lists, and lists that were applied: opened again and rolled back."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import ADD, LEAVE_OUT, TAKE, Answer, Fate
from blendapp.domain.mills import Asked, Synonym
from blendapp.domain.plant import Site, Supplier
from blendapp.domain.price_rows import PriceListReading
from blendapp.domain.problems import Refused
from blendapp.domain.records import added
from blendapp.services.list_memory import answer_again, forget, remember, remembered, set_usual_change
from blendapp.services.lists import applied_lists, open_list, roll_back
from blendapp.services.mill import Mill
from blendapp.services.prices import apply_price_list, read_price_list
from tests.mills import TODAY, Maker

Opened = Callable[[Library], Mill]
MONDAY = TODAY + datetime.timedelta(days=7)
LIST = """Product,Price,Freight,Unit,Valid from
Yellow corn,186,14,ton,4/3/2026
Pallets,12,1,ton,4/3/2026
Soybean meal,380,16,ton,4/3/2026
"""
ANSWERS = [
    Answer(Asked.INGREDIENT, "Yellow corn", ingredient_id=1), Answer(Asked.INGREDIENT, "Pallets", LEAVE_OUT),
    Answer(Asked.UNIT, "ton", "t"), Answer(Asked.PRICE, "Price | Freight", ADD),
    Answer(Asked.DATES, "Valid from", "day first"),
]


@pytest.fixture
def mill(opened: Opened) -> Mill:
    maker = Maker()
    maker.ingredient("Maize", 200.0)
    maker.ingredient("Soybean meal", 400.0)
    return opened(maker.library)


def read(
    mill: Mill, folder: Path, name: str, text: str, *answers: Answer, on: datetime.date = TODAY
) -> PriceListReading:
    (folder / name).write_text(text)
    return read_price_list(mill, folder / name, on, answers=answers)


def test_what_was_answered_is_not_asked_again_of_the_next_list_of_the_source(mill: Mill, tmp_path: Path) -> None:
    first = read(mill, tmp_path, "Larkwater 2026-03-02.csv", LIST)
    assert first.accepted == []
    assert {question.asked for question in first.questions} == {
        Asked.INGREDIENT, Asked.UNIT, Asked.PRICE, Asked.DATES
    }
    answered = read(mill, tmp_path, "Larkwater 2026-03-02.csv", LIST, *ANSWERS)
    assert [row.price_per_t for row in answered.accepted] == [200, 396]
    apply_price_list(mill, answered, TODAY)
    again = read(mill, tmp_path, "Larkwater 2026-03-09.csv", LIST.replace("186", "190"), on=MONDAY)
    assert again.questions == []
    assert [row.price_per_t for row in again.accepted] == [204, 396]
    assert [row.valid_from for row in again.accepted] == [datetime.date(2026, 3, 4)] * 2


def test_another_source_is_asked_all_the_same(mill: Mill, tmp_path: Path) -> None:
    apply_price_list(mill, read(mill, tmp_path, "Larkwater.csv", LIST, *ANSWERS), TODAY)
    other = read(mill, tmp_path, "Seaboard.csv", LIST)
    assert other.accepted == []
    assert {Asked.UNIT, Asked.PRICE, Asked.DATES} <= {question.asked for question in other.questions}


def test_the_source_may_be_named(mill: Mill, tmp_path: Path) -> None:
    (tmp_path / "a.csv").write_text(LIST)
    reading = read_price_list(mill, tmp_path / "a.csv", TODAY, answers=ANSWERS, source="Bay Grain")
    apply_price_list(mill, reading, TODAY)
    assert {one.source for one in remembered(mill)} == {"bay grain"}
    assert read_price_list(mill, tmp_path / "a.csv", TODAY, source="Bay Grain").questions == []


def test_a_list_and_its_answers_are_one_undo(mill: Mill, tmp_path: Path) -> None:
    before = mill.store.dump()
    apply_price_list(mill, read(mill, tmp_path, "Larkwater.csv", LIST, *ANSWERS), TODAY)
    assert len(remembered(mill)) == len(ANSWERS)
    mill.undo()
    assert mill.store.dump() == before


def test_answers_are_seen_by_source_changed_and_forgotten(mill: Mill, tmp_path: Path) -> None:
    apply_price_list(mill, read(mill, tmp_path, "Larkwater.csv", LIST, *ANSWERS), TODAY)
    assert [(one.asked, one.name) for one in remembered(mill, "Larkwater.csv")] == [
        (Asked.INGREDIENT, "Pallets"), (Asked.INGREDIENT, "Yellow corn"), (Asked.UNIT, "ton"),
        (Asked.PRICE, "Price | Freight"), (Asked.DATES, "Valid from"),
    ]
    assert remembered(mill, "Seaboard") == []
    unit = remembered(mill, "Larkwater")[2]
    answer_again(mill, unit.id, Answer(Asked.UNIT, "ton", "short ton"))
    assert read(mill, tmp_path, "Larkwater.csv", LIST).accepted[0].price_per_t == pytest.approx(200 * 1.10231, rel=1e-5)
    forget(mill, [unit.id])
    assert [question.asked for question in read(mill, tmp_path, "Larkwater.csv", LIST).questions] == [Asked.UNIT]
    with pytest.raises(Refused, match="no longer remembered"):
        forget(mill, [unit.id])
    mill.undo()
    assert read(mill, tmp_path, "Larkwater.csv", LIST).questions == []


def test_a_new_answer_takes_the_place_of_the_one_before(mill: Mill, tmp_path: Path) -> None:
    apply_price_list(mill, read(mill, tmp_path, "Larkwater.csv", LIST, *ANSWERS), TODAY)
    other = replace(ANSWERS[2], answer="short ton")
    apply_price_list(mill, read(mill, tmp_path, "Larkwater.csv", LIST, other), TODAY)
    (unit,) = [one for one in remembered(mill) if one.asked is Asked.UNIT]
    assert unit.answer == "short ton"
    remember(mill, "Larkwater", ANSWERS[2])
    (unit,) = [one for one in remembered(mill) if one.asked is Asked.UNIT]
    assert unit.answer == "t"


def test_what_holds_for_one_row_is_not_remembered(mill: Mill, tmp_path: Path) -> None:
    text = "Ingredient,Price,Unit\nMaize,300,t\n"
    leap = Answer(Asked.CHANGE, "", TAKE, row=2)
    apply_price_list(mill, read(mill, tmp_path, "Larkwater.csv", text, leap), TODAY)
    assert remembered(mill) == []
    with pytest.raises(Refused, match="one row"):
        remember(mill, "Larkwater", leap)


def test_a_rate_of_another_day_is_asked_for_again_and_the_last_one_named(mill: Mill, tmp_path: Path) -> None:
    text = "Ingredient,Price EUR/t\nMaize,180\n"
    rate = Answer(Asked.RATE, "EUR", rate=1.1, given=TODAY)
    apply_price_list(mill, read(mill, tmp_path, "Larkwater.csv", text, rate), TODAY)
    assert read(mill, tmp_path, "Larkwater.csv", text).questions == []
    (question,) = read(mill, tmp_path, "Larkwater.csv", text, on=MONDAY).questions
    assert question.asked is Asked.RATE
    assert "1.1" in question.text


def test_of_two_names_the_one_that_held_is_taken_next_time_too(mill: Mill, tmp_path: Path) -> None:
    text = "Product,Price,Unit\nMaize,205,t\nYellow corn,207,t\n"
    answers = Answer(Asked.INGREDIENT, "Yellow corn", ingredient_id=1), Answer(Asked.TWIN, "", TAKE, row=3)
    apply_price_list(mill, read(mill, tmp_path, "Larkwater.csv", text, *answers), TODAY)
    again = read(mill, tmp_path, "Larkwater.csv", text)
    assert [row.fate for row in again.rows] == [Fate.IGNORED, Fate.IGNORED, Fate.ACCEPTED]


def test_an_applied_list_opens_again_with_every_row(mill: Mill, tmp_path: Path) -> None:
    reading = read(mill, tmp_path, "Larkwater.csv", LIST + "Oatmeal,9,,t,\n", *ANSWERS)
    apply_price_list(mill, reading, TODAY)
    (kept,) = applied_lists(mill)
    assert (kept.source, kept.rows, kept.accepted) == ("larkwater", 5, 2)
    assert open_list(mill, kept.id) == [replace(row, questions=()) for row in reading.rows]
    with pytest.raises(Refused):
        open_list(mill, 99)


def test_rolling_back_withdraws_exactly_the_quotes_of_the_list(mill: Mill, tmp_path: Path) -> None:
    plain = "Ingredient,Price,Unit\nMaize,{},t\nSoybean meal,{},t\n"
    apply_price_list(mill, read(mill, tmp_path, "one.csv", plain.format(205, 405)), TODAY)
    apply_price_list(mill, read(mill, tmp_path, "two.csv", plain.format(210, 410)), TODAY)
    one, two = applied_lists(mill)[::-1]
    assert mill.library.price_per_t(1, TODAY) == 210
    before = mill.store.dump()
    roll_back(mill, two.id)
    assert [mill.library.price_per_t(key, TODAY) for key in (1, 2)] == [205, 405]
    assert {quote.price_list_id for quote in mill.library.all("quote")} == {None, one.id}
    assert mill.library.records["price_list"][two.id].withdrawn is not None
    assert len(open_list(mill, two.id)) == 3
    with pytest.raises(Refused, match="rolled back before"):
        roll_back(mill, two.id)
    mill.undo()
    assert mill.store.dump() == before
    roll_back(mill, one.id)
    assert mill.library.price_per_t(1, TODAY) == 210


def test_a_price_to_come_takes_effect_on_its_day_and_ends_on_its_last(mill: Mill, tmp_path: Path) -> None:
    text = "Ingredient,Price,Unit,Valid from,Valid to\nMaize,215,t,2026-03-09,2026-03-15\n"
    apply_price_list(mill, read(mill, tmp_path, "Larkwater.csv", text), TODAY)
    days = [datetime.date(2026, 3, day) for day in (8, 9, 15, 16)]
    assert [mill.library.price_per_t(1, day) for day in days] == [200, 215, 215, 200]


@pytest.mark.parametrize(("class_name", "percent", "fate"), [
    ("", 30, Fate.ACCEPTED), ("", 20, Fate.QUESTION), ("Cereals", 20, Fate.QUESTION), ("Oilseeds", 20, Fate.ACCEPTED)
])
def test_the_usual_change_of_a_price_is_the_persons_own_by_class(
    opened: Opened, tmp_path: Path, class_name: str, percent: float, fate: Fate
) -> None:
    maker = Maker()
    maker.ingredient("Maize", 200.0, class_name="Cereals")
    mill = opened(maker.library)
    set_usual_change(mill, class_name, 1)
    set_usual_change(mill, class_name, percent)
    assert len(remembered(mill)) == 1
    assert read(mill, tmp_path, "a.csv", "Ingredient,Price,Unit\nMaize,250,t\n").rows[1].fate is fate
    with pytest.raises(Refused):
        set_usual_change(mill, class_name, 0)


def test_the_unit_of_a_name_is_remembered_where_the_list_leaves_it_open(mill: Mill, tmp_path: Path) -> None:
    mill.apply("unit of a name", [added(Synonym(mill.new_id("synonym"), "a", "Maize", 1, "kg"))])
    text = "Ingredient,Price,Unit\nMaize,0.2,\nSoybean meal,0.4,\n"
    assert [row.fate for row in read(mill, tmp_path, "a.csv", text).rows[1:]] == [Fate.ACCEPTED, Fate.QUESTION]
    (row,) = read(mill, tmp_path, "a.csv", text.replace("0.2,", "200,t")).accepted
    assert row.price_per_t == 200


STRANGE = "Larkwater\nFutter,Preis,je\nMaize,205,t\nSoybean meal,410,t\n"
PLACES = [
    Answer(Asked.TABLE, "", "row 2"), Answer(Asked.COLUMN, "Preis", "price"), Answer(Asked.COLUMN, "je", "unit"),
    Answer(Asked.SUPPLIER, "", "Larkwater Ltd"), Answer(Asked.SITE, "", "North yard"),
]


def test_where_the_table_stands_and_whose_it_is_are_known_the_next_week(mill: Mill, tmp_path: Path) -> None:
    mill.apply("supplier and site", [added(Supplier(4, "Larkwater Ltd")), added(Site(5, "North yard"))])
    assert read(mill, tmp_path, "Larkwater week 10.csv", STRANGE).sheets[0].tables[0].heading_rows == ()
    answered = read(mill, tmp_path, "Larkwater week 10.csv", STRANGE, *PLACES)
    apply_price_list(mill, answered, TODAY)
    again = read(mill, tmp_path, "Larkwater week 11.csv", STRANGE.replace("205", "206"), on=MONDAY)
    assert (again.questions, again.supplier_id, again.site_id) == ([], 4, 5)
    assert [row.price_per_t for row in again.accepted] == [206, 410]
    assert again.sheets[0].tables[0].heading_rows == (2,)
    assert {one.asked for one in remembered(mill)} == {one.asked for one in PLACES}


def test_an_expired_list_is_asked_about_again_the_next_time(mill: Mill, tmp_path: Path) -> None:
    text = "Product,Price,Unit,Valid to\nMaize,205,t,2026-02-01\nSoybean meal,410,t,2026-02-01\n"
    answered = read(mill, tmp_path, "Larkwater.csv", text, Answer(Asked.EXPIRED_LIST, "2026-02-01", TAKE))
    apply_price_list(mill, answered, TODAY)
    assert mill.library.price_per_t(1, TODAY) == 205
    assert [one.asked for one in read(mill, tmp_path, "Larkwater.csv", text).questions] == [Asked.EXPIRED_LIST]


def test_a_row_that_names_its_site_and_its_supplier_is_recorded_for_them(opened: Opened, tmp_path: Path) -> None:
    maker = Maker()
    maker.put(Site(1, "Larkwater"))
    maker.put(Site(2, "Fellgate"))
    maker.put(Supplier(1, "Marram Grain"))
    maker.ingredient("Maize", 200.0)
    mill = opened(maker.library)
    text = "Product,Site,Supplier,Price $/t\nMaize,Larkwater,Marram Grain,205\nMaize,Fellgate,,208\n"
    reading = read(mill, tmp_path, "Broker.csv", text, Answer(Asked.SUPPLIER, "", "Marram Grain"))
    apply_price_list(mill, reading, TODAY)
    quotes = [quote for quote in mill.library.all("quote") if quote.price_list_id is not None]
    assert [(one.site_id, one.supplier_id, one.price) for one in quotes] == [(1, 1, 205), (2, 1, 208)]
    prices = [mill.library.price_per_t(1, TODAY, site) for site in (None, 1, 2)]
    assert prices == [200, 205, 208]
    assert [row.site_id for row in open_list(mill, 1)] == [None, 1, 2]
