"""Texts and small readings of the desk that need no window."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from blendapp.desk.finder.search import Found, best
from blendapp.desk.formulas import read_nutrient
from blendapp.desk.have.reading import read_price, whose_price
from blendapp.desk.meet.telling import price_sentence
from blendapp.desk.meet.words import cost_rank, step_words, tag_step, tag_words
from blendapp.desk.table.block import read_block, write_block
from blendapp.desk.table.look import fitting_decimals, number_look
from blendapp.domain.formulas import LimitKind
from blendapp.domain.library import Library
from blendapp.domain.notation import COMMA, PLAIN, use_notation
from blendapp.domain.plant import Site, Supplier
from blendapp.domain.records import added
from blendapp.domain.results import LimitResult, Side

NO_CELL = "\r\x0b\x0c\x1c\x1d\x1e\x85\u2028\u2029\x00"
cells = st.text(st.characters(exclude_categories=("Cs",), exclude_characters=NO_CELL))


@given(st.integers(1, 4).flatmap(lambda width: st.lists(st.lists(cells, min_size=width, max_size=width), min_size=1)))
def test_a_block_is_read_as_it_was_written(rows: list[list[str]]) -> None:
    text = write_block(rows)
    if text and not text.endswith("\n"):
        assert read_block(text) == rows


def test_a_block_of_a_spreadsheet_ends_with_a_line_break_that_is_no_row() -> None:
    assert read_block("1\t2\r\n3\t\r\n") == [["1", "2"], ["3", ""]]


def test_an_unknown_number_is_a_dot_zero_is_0_and_figures_keep_their_decimal_sign() -> None:
    use_notation(COMMA)
    try:
        assert number_look(None, 2).text == "·"
        assert number_look(0.0, 2).text == "0"
        assert number_look(12.5, 2).text == "12,50"
        assert number_look(12.5, 2).typed == "12,5"
    finally:
        use_notation(PLAIN)


def test_a_value_shows_the_decimals_it_was_entered_with() -> None:
    assert fitting_decimals(0.125, 2) == 3
    assert fitting_decimals(12.0, 2) == 2
    assert fitting_decimals(None, 2) == 2


def limit(**fields: object) -> LimitResult:
    plain = {"index": 0, "limit_id": 1, "kind": LimitKind.NUTRIENT, "name": "Lysine", "per": None, "basis": None,
             "unit": "%", "minimum": None, "maximum": None, "value": None}
    return LimitResult(**{**plain, **fields})  # type: ignore[arg-type]


def test_a_tag_says_step_money_and_how_far() -> None:
    found = limit(minimum=18.5, value=18.5, binding=Side.MINIMUM, shadow_price_unique=True, relax_saving=24.0,
                  tighten_cost=24.0, relax_holds_to=18.4)
    assert tag_words(found, 1, "USD", "t") == "0.1 less saves 2.40 USD/t, to 18.4"
    found = limit(maximum=25.0, value=25.0, binding=Side.MAXIMUM, shadow_price_unique=True, relax_saving=0.19)
    assert tag_words(found, 1, "USD", "t") == "0.25 more saves 0.048 USD/t"


def test_a_tag_never_shows_a_figure_where_more_than_one_price_fits() -> None:
    found = limit(minimum=18.5, value=18.5, binding=Side.MINIMUM, shadow_price_unique=False)
    assert tag_words(found, 1, "USD", "t") == "more than one price fits"


def test_a_side_that_saves_nothing_says_what_the_other_costs() -> None:
    found = limit(minimum=0.95, value=0.95, binding=Side.MINIMUM, shadow_price_unique=True, relax_saving=0.0,
                  tighten_cost=10.787)
    assert tag_words(found, 2, "USD", "t") == "0.0095 more costs 0.10 USD/t"


def test_a_target_tells_what_raising_and_lowering_it_do() -> None:
    found = limit(minimum=2.0, maximum=2.0, value=2.0, binding=Side.MINIMUM, shadow_price_unique=True, raise_cost=-3.0,
                  lower_cost=3.0)
    assert tag_words(found, 2, "USD", "t") == "0.02 more saves 0.060 USD/t, 0.02 less costs 0.060 USD/t"
    sentence = price_sentence(found, "Lysine", 2, "USD", "t")
    assert sentence == "Lysine is held at 2.00 %: 0.02 % more saves 0.060 USD/t; 0.02 % less costs 0.060 USD/t."


def test_pointing_at_a_wall_says_both_sides_with_units_and_how_far() -> None:
    found = limit(minimum=0.95, value=0.95, binding=Side.MINIMUM, shadow_price_unique=False, relax_saving=0.0,
                  tighten_cost=10.787, tighten_holds_to=1.4)
    assert price_sentence(found, "Lysine", 2, "USD", "t") == (
        "Lysine holds the mix at its minimum of 0.95 %: 0.0095 % less changes nothing; "
        "0.0095 % more costs 0.10 USD/t, as far as 1.40 %.")
    found = limit(maximum=25.0, value=25.0, binding=Side.MAXIMUM, shadow_price_unique=True, relax_saving=0.19,
                  relax_holds_to=31.2, tighten_cost=0.19, tighten_holds_to=20.0)
    assert price_sentence(found, "Wheat", 1, "USD", "t", given=True) == (
        "Given these ingredients, Wheat holds the mix at its maximum of 25.0 %: 0.25 % more saves 0.048 USD/t, "
        "as far as 31.2 %; 0.25 % less costs 0.048 USD/t, as far as 20.0 %.")


def test_a_ratio_says_that_its_price_holds_at_this_point_only() -> None:
    found = limit(kind=LimitKind.RATIO, per="Phosphorus", unit="", minimum=2.0, value=2.0, binding=Side.MINIMUM,
                  shadow_price_unique=True, relax_saving=0.5, tighten_cost=0.5)
    assert "multiplies amounts" in price_sentence(found, "Calcium : Phosphorus", 2, "USD", "t")
    found = limit(minimum=2.0, value=2.0, binding=Side.MINIMUM, shadow_price_unique=True, relax_saving=0.5)
    assert "no higher minimum can be met" in price_sentence(found, "Lysine", 2, "USD", "t")


def test_a_step_is_a_hundredth_of_every_bound_and_never_more_than_its_price_holds() -> None:
    assert tag_step(11.5, 1) == pytest.approx(0.115)
    assert tag_step(2500.0, 0) == pytest.approx(25.0)
    assert tag_step(-40.0, 0) == pytest.approx(0.4)
    assert tag_step(0.0, 2) == pytest.approx(0.01)
    assert tag_step(11.5, 1, 11.45) == pytest.approx(0.05)
    assert step_words(0.115, 1) == "0.115"
    assert step_words(25.0, 0) == "25"


@given(st.lists(st.tuples(st.floats(0.01, 3000), st.floats(0.001, 500), st.floats(0.001, 2)), min_size=2, max_size=6))
def test_a_larger_tag_never_stands_below_a_smaller_one(limits: list[tuple[float, float, float]]) -> None:
    found = [
        limit(minimum=bound, value=bound, binding=Side.MINIMUM, shadow_price_unique=True, relax_saving=price,
              relax_holds_to=bound - room)
        for bound, price, room in limits
    ]
    found.sort(key=lambda one: cost_rank(one, 2), reverse=True)
    figures = [float(tag_words(one, 2, "USD", "t").partition("saves ")[2].partition(" ")[0]) for one in found]
    assert figures == sorted(figures, reverse=True)
    assert cost_rank(limit(minimum=1.0, value=2.0), 2) == 0.0 < cost_rank(found[-1], 2)


def test_prices_are_read_with_the_mass_they_are_per() -> None:
    assert read_price("452") == (452.0, None)
    assert read_price("18.20 / cwt") == (18.2, "cwt")
    assert read_price("4.10 per bu") == (4.1, "bu")
    with pytest.raises(ValueError, match="stone"):
        read_price("4 / stone")


def test_a_nutrient_is_read_with_its_unit() -> None:
    assert read_nutrient("Copper (mg/kg)") == ("Copper", "mg/kg")
    assert read_nutrient("Lysine") == ("Lysine", "%")
    with pytest.raises(ValueError, match="stone"):
        read_nutrient("Lysine (stone)")
    with pytest.raises(ValueError, match="name"):
        read_nutrient("  ")


def test_what_begins_with_the_typed_text_is_found_first() -> None:
    things = [Found(words, "", lambda: None) for words in ("Soya oil", "Fish oil", "Oil, mixed", "Maize")]
    assert [one.words for one in best(things, "oil")] == ["Oil, mixed", "Soya oil", "Fish oil"]
    assert [one.words for one in best(things, "fi oi")] == ["Fish oil"]


def whose_library() -> Library:
    library = Library()
    library.apply(added(one) for one in (
        Supplier(1, "Bay Grain"), Supplier(2, "Hay from Hill"), Site(1, "North yard"), Site(2, "Mill at Sea")))
    return library


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("452", ("452", None, None)),
        ("18.2 / cwt from bay grain", ("18.2 / cwt", 1, None)),
        ("210 from Bay Grain at North Yard", ("210", 1, 1)),
        ("210 at north yard", ("210", None, 1)),
        ("4.1 per bu from Bay  Grain", ("4.1 per bu", 1, None)),
        ("210 from Hay from Hill at Mill at Sea", ("210", 2, 2)),
        ("210 at mill at sea", ("210", None, 2)),
    ],
)
def test_a_typed_price_may_name_its_supplier_and_site(text: str, expected: tuple[str, int | None, int | None]) -> None:
    assert whose_price(whose_library(), text) == expected


@pytest.mark.parametrize(
    ("text", "known"), [("210 from Nobody", "Bay Grain, Hay from Hill"), ("210 at Home", "North yard"),
                        ("210 from Bay Grain at Home", "North yard"), ("210 from Nobody at North yard", "Bay Grain")])
def test_an_unknown_supplier_or_site_is_refused_with_those_that_are_known(text: str, known: str) -> None:
    with pytest.raises(ValueError, match=known):
        whose_price(whose_library(), text)
