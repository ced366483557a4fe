"""The history of a price: worked by hand, and against asking for every single day."""

from __future__ import annotations

import datetime
import itertools

import pytest
from hypothesis import given
from hypothesis import strategies as st

from blendapp.domain.checks import faults
from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.mills import MillInfo, PriceList
from blendapp.domain.plant import Site, Supplier
from blendapp.domain.price_history import Standing, Step, price_history, steps
from blendapp.domain.quotes import Quote, Terms, in_force
from blendapp.domain.records import added

MONDAY = datetime.date(2026, 3, 2)
DAY = datetime.timedelta(days=1)


def day(number: int) -> datetime.date:
    return MONDAY + number * DAY


def quote(
    record_id: int, price: float | None, first: int | None = None, last: int | None = None, **more: object
) -> Quote:
    return Quote(
        record_id, 1, price, valid_from=None if first is None else day(first),
        valid_to=None if last is None else day(last), **more,  # type: ignore[arg-type]
    )


def library(*quotes: Quote, site_id: int | None = None, supplier_id: int | None = None) -> Library:
    made = Library()
    made.apply(map(added, (
        MillInfo(site_id=site_id), Site(1, "North yard"), Site(2, "South yard"), Supplier(1, "Bay Grain"),
        Supplier(2, "Delta"), Ingredient(1, "Maize", supplier_id=supplier_id),
        PriceList(5, "monday.xlsx", "ab" * 32, datetime.datetime(2026, 3, 2, tzinfo=datetime.UTC), 3, 3), *quotes,
    )))
    return made


DAYS = st.none() | st.integers(-6, 6).map(day)
QUOTES = st.lists(
    st.builds(
        Quote, st.integers(1, 40), st.just(1), st.none() | st.integers(1, 5).map(float),
        site_id=st.sampled_from([None, None, 1, 2]), supplier_id=st.sampled_from([None, 1, 2]), valid_from=DAYS,
        valid_to=DAYS, replaces_id=st.none() | st.integers(1, 40),
    ),
    max_size=9, unique_by=lambda one: one.id,
)


@given(QUOTES, st.sampled_from([None, 1]), st.sampled_from([None, 1, 2]))
def test_the_steps_say_of_every_day_what_asking_for_that_day_says(
    quotes: list[Quote], site_id: int | None, supplier_id: int | None
) -> None:
    found = steps(quotes, site_id, supplier_id)
    for number in range(-9, 10):
        on = day(number)
        expected = in_force(quotes, on, site_id, supplier_id)
        holding = [
            step for step in found
            if (step.first is None or step.first <= on) and (step.last is None or on <= step.last)
        ]
        assert len(holding) == (1 if found else 0)
        assert (holding[0].quote if holding else None) == expected
    for one, other in itertools.pairwise(found):
        assert one.last is not None
        assert other.first == one.last + DAY
        assert one.quote != other.quote
    if found:
        assert found[0].first is None
        assert found[-1].last is None


def test_a_history_by_hand() -> None:
    quotes = [
        quote(1, 200.0, 0), quote(2, 210.0, 7, 13), quote(3, None, 20), quote(4, 190.0, 30, terms=Terms.DELIVERED)
    ]
    found = price_history(library(*quotes), 1, day(10))
    assert found.steps == (
        Step(None, day(-1), None), Step(day(0), day(6), quotes[0]), Step(day(7), day(13), quotes[1]),
        Step(day(14), day(19), quotes[0]), Step(day(20), day(29), quotes[2]), Step(day(30), None, quotes[3]),
    )
    assert [step.price_per_t for step in found.steps] == [None, 200, 210, 200, None, 190]
    assert [(line.quote.id, line.standing) for line in found.lines] == [
        (4, Standing.TO_COME), (3, Standing.TO_COME), (2, Standing.IN_FORCE), (1, Standing.GIVES_WAY)
    ]
    assert found.why == (
        "In force is 210 per t, valid from 2026-03-09, and not 200 per t, valid from 2026-03-02: "
        "its first day, 2026-03-09, is later than 2026-03-02."
    )


def test_a_withdrawn_price_is_a_break_and_not_0() -> None:
    found = price_history(library(quote(1, 200.0, 0), quote(2, None, 3)), 1, day(5))
    assert [step.price_per_t for step in found.steps] == [None, 200, None]
    assert found.in_force is not None
    assert found.in_force.quote.id == 2
    assert "unknown, not 0" in found.why


def test_without_a_quote_there_is_no_line_and_a_sentence() -> None:
    found = price_history(library(), 1, day(0))
    assert (found.steps, found.lines, found.in_force) == ((), (), None)
    assert "left out of every mix" in found.why


def test_what_ended_says_until_when_and_the_price_is_unknown() -> None:
    found = price_history(library(quote(1, 200.0, 0, 3)), 1, day(4))
    assert found.lines[0].standing is Standing.ENDED
    assert found.lines[0].why == "It held until 2026-03-05."
    assert found.why.startswith("No quote is in force on 2026-03-06")


@pytest.mark.parametrize(
    ("quotes", "expected"),
    [
        ((quote(1, 200.0, 0, site_id=1), quote(2, 190.0, 1)),
         "a quote of North yard comes before one of the whole mill"),
        ((quote(1, 200.0, 0, supplier_id=1), quote(2, 190.0, 1, supplier_id=2)),
         "it is bought from Bay Grain, whose quotes come before those of Delta"),
        ((quote(1, 200.0, 0), quote(2, 190.0, 1, supplier_id=2)),
         "it is bought from Bay Grain, and a quote of nobody in particular comes before one of Delta"),
        ((quote(1, 200.0, 1), quote(2, 190.0, 0)), "its first day, 2026-03-03, is later than 2026-03-02"),
        ((quote(1, 200.0, 0), quote(2, 190.0)),
         "its first day, 2026-03-02, is later than that of one without a first day"),
        ((quote(2, 200.0, 0), quote(1, 190.0, 0)), "of two with the same first day, the one recorded last holds"),
    ],
)
def test_the_part_of_the_rule_that_decides_is_named(quotes: tuple[Quote, Quote], expected: str) -> None:
    found = price_history(library(*quotes, site_id=1, supplier_id=1), 1, day(5))
    assert found.in_force is not None
    assert found.in_force.quote == quotes[0]
    assert found.why.endswith(f"{expected}.")
    assert next(line for line in found.lines if line.quote == quotes[1]).why == f"Another comes first: {expected}."


def test_supplier_site_and_list_are_named() -> None:
    quotes = (
        quote(1, 5.6, 0, per="cwt", supplier_id=1, site_id=1, source="monday.xlsx", price_list_id=5),
        quote(2, 210.0, 0, site_id=2, source="typed"),
    )
    found = price_history(library(*quotes, site_id=1), 1, day(0))
    elsewhere, here = found.lines
    assert (here.supplier, here.site, here.source, here.price_list_id) == ("Bay Grain", "North yard", "monday.xlsx", 5)
    assert (elsewhere.source, elsewhere.standing) == ("typed by hand", Standing.ELSEWHERE)
    assert (found.site, found.supplier) == ("North yard", "")
    assert "5.6 per cwt of Bay Grain for North yard, valid from 2026-03-02" in found.why


def test_a_replaced_quote_stays_on_record_and_counts_on_no_day() -> None:
    quotes = (quote(1, 200.0, 0), quote(2, 200.0, 0, 3, replaces_id=1, recorded=day(2)))
    found = price_history(library(*quotes), 1, day(5))
    assert found.in_force is None
    assert [line.standing for line in found.lines] == [Standing.ENDED, Standing.REPLACED]
    assert "2026-03-04" in found.lines[1].why
    assert in_force(quotes, day(5)) is None
    assert in_force(quotes, day(1)) == quotes[1]


def test_the_last_day_of_the_calendar_is_a_day_like_any_other() -> None:
    forever = Quote(1, 1, 200.0, valid_from=day(0), valid_to=datetime.date.max)
    assert steps([forever]) == (Step(None, day(-1), None), Step(day(0), None, forever))


@pytest.mark.parametrize(("replaces_id", "wrong"), [(1, False), (7, True), (3, True), (None, False)])
def test_a_price_takes_the_place_of_another_one_of_the_same_ingredient_only(
    replaces_id: int | None, wrong: bool
) -> None:
    made = library(quote(1, 200.0), Quote(7, 2, 50.0))
    made.apply([added(Ingredient(2, "Salt"))])
    found = faults(quote(3, 210.0, replaces_id=replaces_id), made)
    assert bool(found) is wrong
    assert all("same ingredient" in sentence for _field, sentence in found)
