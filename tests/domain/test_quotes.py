from __future__ import annotations

import datetime

import pytest
from hypothesis import given
from hypothesis import strategies as st

from blendapp.domain.quotes import Quote, in_force, rule

MONDAY = datetime.date(2026, 3, 2)
DAY = datetime.timedelta(days=1)
DATES = st.none() | st.integers(-3, 3).map(lambda n: MONDAY + n * DAY)
QUOTES = st.lists(
    st.builds(Quote, st.integers(1, 99), st.just(1), st.floats(0, 9), site_id=st.sampled_from([None, 1, 2]),
              valid_from=DATES, valid_to=DATES),
    max_size=8, unique_by=lambda quote: quote.id,
)


def quote(record_id: int, first: int | None = None, last: int | None = None, **fields: object) -> Quote:
    return Quote(
        record_id, 1, 100.0 + record_id, valid_from=None if first is None else MONDAY + first * DAY,
        valid_to=None if last is None else MONDAY + last * DAY, **fields,  # type: ignore[arg-type]
    )


def found(*quotes: Quote, site_id: int | None = None) -> int | None:
    best = in_force(quotes, MONDAY, site_id)
    return None if best is None else best.id


def test_the_quote_whose_first_day_is_latest_is_in_force_whatever_was_recorded_last() -> None:
    assert found(quote(1, -1), quote(2, -5)) == 1


def test_of_two_with_the_same_first_day_the_one_recorded_last_is_in_force() -> None:
    assert found(quote(1, -1), quote(2, -1)) == 2
    assert found(quote(2, -1), quote(1, -1)) == 2


def test_a_quote_of_a_day_to_come_is_not_in_force() -> None:
    assert found(quote(1, -1), quote(2, 1)) == 1


@pytest.mark.parametrize(("last", "expected"), [(-1, None), (0, 1)])
def test_the_last_day_of_validity_is_included(last: int, expected: int | None) -> None:
    assert found(quote(1, -5, last)) == expected


def test_the_first_day_of_validity_is_included_and_none_is_the_earliest() -> None:
    assert found(quote(1, 0), quote(2, None)) == 1
    assert found(quote(2, None)) == 2


def test_a_quote_of_the_site_counts_before_one_of_the_mill_and_of_another_site_never() -> None:
    quotes = (quote(1, -5, site_id=7), quote(2, 0), quote(3, 0, site_id=8))
    assert found(*quotes, site_id=7) == 1
    assert found(*quotes) == 2


def bought(*quotes: Quote, supplier_id: int | None, site_id: int | None = None) -> int | None:
    best = in_force(quotes, MONDAY, site_id, supplier_id)
    return None if best is None else best.id


def test_a_quote_of_the_ingredients_own_supplier_counts_before_a_later_one_of_another() -> None:
    quotes = (quote(1, -5, supplier_id=7), quote(2, 0, supplier_id=8))
    assert bought(*quotes, supplier_id=7) == 1
    assert bought(*quotes, supplier_id=8) == 2
    assert bought(*quotes, supplier_id=9) == 2


def test_a_quote_of_no_supplier_counts_like_one_of_the_own_supplier() -> None:
    assert bought(quote(1, -5, supplier_id=7), quote(2, -3), quote(3, 0, supplier_id=8), supplier_id=7) == 2
    assert bought(quote(1, -1, supplier_id=7), quote(2, -3), quote(3, 0, supplier_id=8), supplier_id=7) == 1


def test_without_a_supplier_of_its_own_whose_quote_it_is_makes_no_difference() -> None:
    assert bought(quote(1, -5), quote(2, -1, supplier_id=8), quote(3, -2, supplier_id=7), supplier_id=None) == 2


def test_the_site_decides_before_the_supplier_and_the_supplier_before_the_day() -> None:
    at_site = quote(1, -9, site_id=1, supplier_id=8)
    own = quote(2, -5, supplier_id=7)
    late = quote(3, 0, supplier_id=8)
    assert bought(at_site, own, late, supplier_id=7, site_id=1) == 1
    assert bought(at_site, own, late, supplier_id=7) == 2
    assert bought(own, late, supplier_id=7, site_id=1) == 2


def test_a_quote_of_the_own_supplier_that_has_ended_gives_way_to_another_suppliers() -> None:
    assert bought(quote(1, -5, -1, supplier_id=7), quote(2, -9, supplier_id=8), supplier_id=7) == 2


def test_a_replaced_quote_counts_no_more_though_it_is_valid() -> None:
    assert found(quote(1, -1), quote(2, -5, replaces_id=1)) == 2
    assert found(quote(1, -1), quote(2, 3, replaces_id=1)) is None


def test_a_withdrawn_price_is_in_force_and_is_unknown() -> None:
    withdrawn = Quote(2, 1, None, valid_from=MONDAY)
    best = in_force([quote(1, -1), withdrawn], MONDAY)
    assert best is withdrawn
    assert best.price_per_t is None


@given(QUOTES, st.sampled_from([None, 1, 2]))
def test_the_rule_holds_over_any_quotes(quotes: list[Quote], site: int | None) -> None:
    valid = [
        q for q in quotes
        if q.site_id in (None, site) and (q.valid_from is None or q.valid_from <= MONDAY)
        and (q.valid_to is None or q.valid_to >= MONDAY)
    ]
    at_site = [q for q in valid if q.site_id is not None]
    pool = at_site or valid
    first = max((q.valid_from or datetime.date.min for q in pool), default=None)
    expected = max((q.id for q in pool if (q.valid_from or datetime.date.min) == first), default=None)
    best = in_force(quotes, MONDAY, site)
    assert (None if best is None else best.id) == expected


def test_the_rule_is_stated_for_a_person() -> None:
    assert "first day of validity is latest" in rule()
    assert "recorded last" in rule()


def test_a_price_per_bushel_uses_the_bushel_of_its_own_day() -> None:
    assert round(Quote(1, 1, 5.0, "bu", 56.0).price_per_t or 0, 4) == 196.8413
    assert Quote(1, 1, 0.0).price_per_t == 0.0
    assert Quote(1, 1, -12.0).price_per_t == -12.0
