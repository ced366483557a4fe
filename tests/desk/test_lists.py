"""Lists that were applied, and what is remembered of them: opened, rolled back, answered anew, forgotten."""

from __future__ import annotations

import datetime
from pathlib import Path

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.lists import telling
from blendapp.domain.ingredients import Basis
from blendapp.domain.list_rows import ADD, DAY_FIRST, LEAVE_OUT, TAKE, Answer, ColumnRole
from blendapp.domain.mills import Asked, Synonym
from blendapp.domain.notation import PLAIN, use_notation
from blendapp.domain.plant import Site, Supplier
from blendapp.services.composition import apply_composition_list, read_composition_list
from blendapp.services.list_memory import remember, remembered
from blendapp.services.prices import apply_price_list, read_price_list
from tests.desk.conftest import Hands
from tests.mills import TODAY, Maker

ANSWERS = (
    Answer(Asked.INGREDIENT, "Yellow corn", ingredient_id=1), Answer(Asked.INGREDIENT, "Pallets", LEAVE_OUT),
    Answer(Asked.UNIT, "ton", "t"),
)


@pytest.fixture
def lists(bench: Bench, tmp_path: Path) -> Bench:
    """Two lists applied: of Larkwater with three answers, and of Seaboard, whose prices are in force now."""
    def take(name: str, text: str, *answers: Answer) -> None:
        (tmp_path / name).write_text(text)
        work = bench.work
        reading = read_price_list(work.mill, tmp_path / name, work.on, answers=answers)
        work.do(lambda mill: apply_price_list(mill, reading, work.on))

    take("Larkwater 2026-03-02.csv",
         "Product,Price,Unit\nYellow corn,190,ton\nPallets,12,ton\nLimestone,n/q,ton\nNobody knows,5,ton\n", *ANSWERS)
    take("Seaboard.csv", "Product,Price,Unit\nMaize,195,t\nSoybean meal,430,t\n")
    return bench


def text(model: object, owner: int, key: str) -> str:
    return str(model.cell(owner, key).data())  # type: ignore[attr-defined]


def test_every_list_stands_with_its_file_counts_and_digest_the_latest_first(lists: Bench) -> None:
    lists.commands.run("applied")
    rows = lists.applied.rows
    assert rows.owners == [2, 1]
    assert [text(rows, 1, key) for key in ("file_name", "about", "source", "rows", "accepted", "stands")] == [
        "Larkwater 2026-03-02.csv", "prices", "larkwater", "5", "1", ""]
    kept = lists.work.library.records["price_list"][1]
    assert text(rows, 1, "digest") == kept.digest[:10]
    assert text(rows, 1, "applied").startswith(f"{datetime.date.today():%Y-%m-%d}")


def test_a_list_opens_with_every_row_and_the_fate_that_it_had(lists: Bench, hands: Hands) -> None:
    lists.commands.run("applied")
    hands.go(lists.applied.table, 1, "file_name")
    opened = lists.applied.opened
    fates = {text(opened, at, "source_name"): text(opened, at, "fate") for at in opened.owners}
    assert fates["Yellow corn"] == "taken"
    assert fates["Pallets"] == fates["Limestone"] == "left alone"
    assert fates["Nobody knows"] == "question"
    at = next(at for at in opened.owners if text(opened, at, "source_name") == "Yellow corn")
    assert [text(opened, at, key) for key in ("ingredient", "price_per_t", "old_price_per_t")] == [
        "Maize", "190.00", "200.00"]
    assert lists.applied.heading.whole == "Larkwater 2026-03-02.csv: taken 1, question 1, left alone 3"
    hands.key(Qt.Key.Key_Return)
    assert QApplication.focusWidget() is lists.applied.inside


def test_rolling_back_is_one_undo_and_the_list_is_marked(lists: Bench, hands: Hands) -> None:
    work = lists.work
    lists.commands.run("applied")
    hands.click(lists.applied.roll)
    assert work.library.price_per_t(1, work.on) == 190
    assert text(lists.applied.rows, 2, "stands").startswith("rolled back on")
    assert not lists.applied.roll.isEnabled()
    assert "2 records that it brought are withdrawn" in lists.strip.words.text()
    assert lists.applied.remark.whole == "2 lists, 1 of them rolled back"
    work.undo()
    assert work.library.price_per_t(1, work.on) == 195
    assert text(lists.applied.rows, 2, "stands") == ""
    assert lists.applied.roll.isEnabled()
    work.undo()
    assert lists.applied.rows.owners == [1]
    assert lists.applied.chosen() is not None


def test_a_price_leads_to_the_list_it_came_with_and_a_list_to_what_is_remembered(lists: Bench, hands: Hands) -> None:
    lists.show_history(1)
    owner = lists.history.rows.owners[0]
    hands.go(lists.history.table, owner, "source")
    hands.key(Qt.Key.Key_Return)
    assert lists.frame.middle.currentWidget() is lists.applied
    assert lists.applied.chosen().file_name == "Seaboard.csv"  # type: ignore[union-attr]
    hands.go(lists.applied.table, 1, "file_name")
    hands.click(lists.applied.memory)
    assert lists.frame.middle.currentWidget() is lists.memory
    assert lists.memory.filter.text() == "larkwater"
    assert len(lists.memory.rows.owners) == 3
    hands.key(Qt.Key.Key_Escape)
    assert lists.frame.middle.currentWidget() is lists.frame.bench


def memory(bench: Bench) -> dict[str, str]:
    rows = bench.memory.rows
    return {text(rows, owner, "about"): text(rows, owner, "answer") for owner in rows.owners}


def owner_of(bench: Bench, about: str) -> int:
    rows = bench.memory.rows
    return next(owner for owner in rows.owners if text(rows, owner, "about") == about)


def test_what_is_remembered_stands_in_plain_words_and_is_found_by_typing(lists: Bench, hands: Hands) -> None:
    lists.work.do(lambda mill: remember(mill, "Seaboard", Answer(Asked.DATES, "Valid from", DAY_FIRST)))
    lists.commands.run("memory")
    assert memory(lists) == {"Yellow corn": "Maize", "Pallets": "left out", "ton": "t",
                             "Valid from": "The day stands first"}
    assert text(lists.memory.rows, owner_of(lists, "ton"), "question") == "the unit means"
    lists.memory.filter.setFocus()
    hands.write("seab")
    assert list(memory(lists)) == ["Valid from"]
    assert lists.memory.remark.whole == "1 answer"


def test_an_answer_is_changed_in_its_cell_and_taken_back(lists: Bench, hands: Hands) -> None:
    lists.commands.run("memory")
    owner = owner_of(lists, "Yellow corn")
    hands.go(lists.memory.table, owner, "answer")
    hands.key(Qt.Key.Key_F2)
    focus = QApplication.focusWidget()
    assert focus is not None
    focus.selectAll()  # type: ignore[attr-defined]
    hands.write("Peas")
    hands.key(Qt.Key.Key_Return)
    assert lists.work.library.records["synonym"][owner].ingredient_id == 4
    lists.work.undo()
    assert memory(lists)["Yellow corn"] == "Maize"
    assert not lists.memory.rows.setData(lists.memory.rows.cell(owner, "answer"), "Nobody")
    assert "choose one of those" in lists.memory.rows.refusals[owner, "answer"].sentence


def test_forgotten_answers_are_one_undo(lists: Bench, hands: Hands) -> None:
    lists.commands.run("memory")
    hands.go(lists.memory.table, owner_of(lists, "Pallets"), "answer")
    hands.key(Qt.Key.Key_Delete)
    assert "Pallets" not in memory(lists)
    lists.memory.table.selectAll()
    hands.click(lists.memory.forget)
    assert memory(lists) == {}
    assert not lists.memory.forget.isEnabled()
    lists.work.undo()
    lists.work.undo()
    assert len(memory(lists)) == 3


def test_the_usual_change_of_a_class_is_set_and_changed_in_its_cell(lists: Bench, hands: Hands) -> None:
    lists.commands.run("memory")
    lists.memory.percent.setFocus()
    hands.write("12.5 %")
    hands.key(Qt.Key.Key_Return)
    assert memory(lists)["all other ingredients"] == "12.5 %"
    owner = owner_of(lists, "all other ingredients")
    assert text(lists.memory.rows, owner, "source") == "every list"
    assert lists.memory.rows.setData(lists.memory.rows.cell(owner, "answer"), "20")
    assert memory(lists)["all other ingredients"] == "20 %"
    assert not lists.memory.rows.setData(lists.memory.rows.cell(owner, "answer"), "-3 %")
    lists.memory.percent.setText("much")
    hands.click(lists.memory.set_change)
    assert "not a number" in lists.memory.fault.text()


def test_a_name_is_remembered_without_a_list(lists: Bench, hands: Hands) -> None:
    lists.commands.run("memory")
    hands.click(lists.memory.keep)
    assert "Write whose lists" in lists.memory.fault.text()
    lists.memory.source.setText("Seaboard.csv")
    lists.memory.name.setFocus()
    hands.write("Hipro")
    lists.memory.ingredient.setCurrentIndex(1)
    hands.click(lists.memory.keep)
    assert memory(lists)["Hipro"] == "Soybean meal"
    assert [one.name for one in remembered(lists.work.mill, "Seaboard 2026-03-09.csv")] == ["Hipro"]
    lists.work.undo()
    assert "Hipro" not in memory(lists)


# -- words, without a window

SYNONYMS = [
    Synonym(1, "a", "Corn", 1), Synonym(2, "a", "Pallets", answer=LEAVE_OUT),
    Synonym(3, "a", "", asked=Asked.UNIT, answer="short ton"),
    Synonym(4, "a", "EUR", asked=Asked.RATE, rate=1.085, given=TODAY),
    Synonym(5, "a", "Ex works | Delivered", asked=Asked.PRICE, answer="Delivered"),
    Synonym(6, "a", "Price | Freight", asked=Asked.PRICE, answer=ADD),
    Synonym(7, "a", "Price", asked=Asked.DECIMAL, answer=","),
    Synonym(8, "a", "From", asked=Asked.DATES, answer=DAY_FIRST),
    Synonym(9, "a", "Old", asked=Asked.HIDDEN_COLUMN, answer=TAKE),
    Synonym(10, "a", "column 3", asked=Asked.COLUMN, answer=ColumnRole.NOTE.value),
    Synonym(11, "a", "", asked=Asked.SUPPLIER, answer="Bay Grain"),
    Synonym(12, "a", "", asked=Asked.SITE, answer="North"),
    Synonym(13, "a", "RP", asked=Asked.NUTRIENT, answer="Protein"),
    Synonym(14, "a", "TS", asked=Asked.NUTRIENT, answer="Dry matter"),
    Synonym(15, "a", "RP", asked=Asked.CONCENTRATION, answer="g/kg"),
    Synonym(16, "a", "", asked=Asked.BASIS, answer=Basis.DRY_MATTER.value),
    Synonym(17, "", "Cereal", asked=Asked.USUAL_CHANGE, answer="12.5"),
]


@pytest.mark.parametrize("one", SYNONYMS, ids=lambda one: f"{one.asked} {one.name}")
def test_an_answer_reads_back_from_its_own_words(one: Synonym) -> None:
    use_notation(PLAIN)
    make = Maker()
    make.nutrient("Protein")
    make.ingredient("Maize")
    make.put(Supplier(1, "Bay Grain"))
    make.put(Site(1, "North"))
    words = telling.told_answer(one, make.library, "USD")
    assert words
    assert telling.question_words(one) != str(one.asked)
    answer = telling.read_answer(one, words, make.library, TODAY)
    assert (answer.asked, answer.about) == (one.asked, one.name)
    assert (answer.answer, answer.ingredient_id, answer.rate, answer.given) == (
        one.answer, one.ingredient_id, one.rate, one.given)
    with pytest.raises(ValueError, match="An answer is needed"):
        telling.read_answer(one, " ", make.library, TODAY)


def test_what_has_one_answer_only_is_forgotten_and_not_changed() -> None:
    library = Maker().library
    assert not telling.is_changed_here(Synonym(1, "a", "", asked=Asked.CENTS, answer=TAKE), library)
    assert not telling.is_changed_here(Synonym(1, "a", "Prices", asked=Asked.TABLE, answer="row 5"), library)
    assert telling.is_changed_here(Synonym(1, "a", "Price | Freight", asked=Asked.PRICE, answer=ADD), library)


def test_a_rate_without_a_day_is_of_today_and_a_bad_one_is_refused() -> None:
    use_notation(PLAIN)
    one = Synonym(1, "a", "EUR", asked=Asked.RATE, rate=1.0, given=TODAY - datetime.timedelta(days=7))
    assert telling.read_answer(one, "1.09", Maker().library, TODAY).given == TODAY
    for text, match in (("-1", "above 0"), ("1.1 on soon", "is not a day"), ("one", "not a number")):
        with pytest.raises(ValueError, match=match):
            telling.read_answer(one, text, Maker().library, TODAY)


def test_every_answer_that_is_remembered_has_a_question_in_words() -> None:
    for asked in Asked:
        if asked.is_remembered:
            assert telling.question_words(Synonym(1, "a", "b", asked=asked)) != str(asked), asked


def test_a_list_of_analyses_opens_with_its_samples_and_is_rolled_back(
    lists: Bench, hands: Hands, tmp_path: Path
) -> None:
    path = tmp_path / "lab.csv"
    path.write_text("Ingredient,Sample,Crude protein (% as fed)\nMaize,S-1,8.8\nMaize,S-2,9.2\nNobody knows,S-3,12\n")
    work = lists.work
    reading = read_composition_list(work.mill, path, work.on)
    work.do(lambda mill: apply_composition_list(mill, reading, work.on))
    assert work.library.value(1, 1).amount == pytest.approx(9.0)  # type: ignore[union-attr]
    lists.commands.run("applied")
    assert text(lists.applied.rows, 3, "about") == "analyses"
    opened = lists.applied.opened
    at = next(at for at in opened.owners if text(opened, at, "sample") == "S-1")
    assert text(opened, at, "fate") == "taken"
    assert text(opened, at, "ingredient") == "Maize"
    assert text(opened, at, "values") == "Crude protein 8.8 %"
    hands.click(lists.applied.roll)
    assert work.library.value(1, 1).amount == 10.0  # type: ignore[union-attr]
    assert text(lists.applied.rows, 3, "stands").startswith("rolled back")
    work.undo()
    assert work.library.value(1, 1).amount == pytest.approx(9.0)  # type: ignore[union-attr]
