"""Every entry of a price history is a quote of its own, and one undo."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from dataclasses import replace

import pytest

from blendapp.domain.library import Library
from blendapp.domain.list_rows import Fate
from blendapp.domain.plant import Site, Supplier
from blendapp.domain.price_history import Standing
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.domain.problems import Refused
from blendapp.domain.quotes import Quote, QuoteKind, Terms
from blendapp.services import edits
from blendapp.services.lists import roll_back
from blendapp.services.mill import Edit, Mill
from blendapp.services.movers import with_prices
from blendapp.services.price_history import (
    Turn,
    add_quote,
    buy_from,
    change_quote,
    coming,
    end_quote,
    expired,
    history,
    turned,
    withdraw_quote,
)
from blendapp.services.prices import apply_price_list
from tests.mills import TODAY, Maker

Opened = Callable[[Library], Mill]
DAY = datetime.timedelta(days=1)


@pytest.fixture
def mill(opened: Opened) -> Mill:
    """Maize at 200 since ten days, of Bay Grain, and at 190 of Delta; the mill works at North yard."""
    make = Maker(site_id=1)
    make.put(Site(1, "North yard"))
    make.put(Site(2, "South yard"))
    make.put(Supplier(1, "Bay Grain"))
    make.put(Supplier(2, "Delta"))
    make.ingredient("Maize", bushel_lb=56.0)
    make.put(Quote(1, 1, 200.0, supplier_id=1, valid_from=TODAY - 10 * DAY, recorded=TODAY - 10 * DAY, source="typed"))
    make.put(Quote(2, 1, 190.0, supplier_id=2, valid_from=TODAY - 20 * DAY, recorded=TODAY - 20 * DAY, source="typed"))
    return opened(make.library)


def price(mill: Mill, days: int = 0) -> float | None:
    return mill.library.price_per_t(1, TODAY + days * DAY)


def undone(mill: Mill, job: Callable[[], Edit], overwrites: bool = False) -> Edit:
    """Do a job, and see that one undo gives the file of before and one redo the file of after."""
    before = mill.store.dump()
    quotes = dict(mill.library.records["quote"])
    edit = job()
    after = mill.store.dump()
    assert after != before
    for key, old in () if overwrites else quotes.items():
        assert mill.library.records["quote"][key] == old, "a price that was taken was overwritten"
    mill.undo()
    assert mill.store.dump() == before
    mill.redo()
    assert mill.store.dump() == after
    return edit


def test_a_price_may_name_supplier_site_days_terms_and_kind(mill: Mill) -> None:
    undone(mill, lambda: add_quote(
        mill, 1, 5.0, TODAY, per="bu", supplier="bay  grain", site="North Yard", terms=Terms.DELIVERED,
        kind=QuoteKind.CONTRACT, valid_from=TODAY + DAY, valid_to=TODAY + 3 * DAY,
    ))
    quote = mill.library.records["quote"][3]
    assert (quote.supplier_id, quote.site_id, quote.bushel_lb) == (1, 1, 56.0)
    assert (quote.terms, quote.kind, quote.source) == (Terms.DELIVERED, QuoteKind.CONTRACT, "typed")
    assert price(mill) == 200
    assert price(mill, 1) == pytest.approx(196.8413, abs=1e-4)
    assert price(mill, 4) == 200


def test_a_new_supplier_is_added_with_its_first_price_as_one_undo(mill: Mill) -> None:
    undone(mill, lambda: add_quote(mill, 1, 180.0, TODAY, supplier=" Hill  Farms "))
    assert mill.library.named("supplier", "hill farms").name == "Hill Farms"  # type: ignore[union-attr]
    assert price(mill) == 180


def test_an_unknown_site_is_refused_and_the_sites_are_named(mill: Mill) -> None:
    with pytest.raises(Refused, match="North yard, South yard"):
        add_quote(mill, 1, 180.0, TODAY, site="West")


def test_a_price_of_another_site_counts_there_only(mill: Mill) -> None:
    add_quote(mill, 1, 150.0, TODAY, site="South yard")
    assert price(mill) == 200
    assert mill.library.price_per_t(1, TODAY, 2) == 150


def test_other_days_are_a_new_quote_in_the_place_of_the_old_one(mill: Mill) -> None:
    undone(mill, lambda: change_quote(mill, 1, TODAY, valid_from=TODAY + 2 * DAY))
    assert price(mill) == 190
    assert price(mill, 2) == 200
    found = history(mill.library, 1, TODAY)
    assert {line.quote.id: line.standing for line in found.lines} == {
        3: Standing.TO_COME, 2: Standing.IN_FORCE, 1: Standing.REPLACED
    }
    with pytest.raises(Refused, match="stands in the place"):
        change_quote(mill, 1, TODAY, price=1.0)


def test_a_change_that_changes_nothing_is_no_edit(mill: Mill) -> None:
    assert change_quote(mill, 1, TODAY, price=200.0, supplier="Bay Grain", entered="200").changes == ()


def test_ending_a_price_lets_what_is_valid_beside_it_count(mill: Mill) -> None:
    undone(mill, lambda: end_quote(mill, 1, TODAY, TODAY))
    assert price(mill) == 200
    assert price(mill, 1) == 190
    assert price(mill, -5) == 200
    with pytest.raises(Refused, match="cannot end before"):
        end_quote(mill, 3, TODAY - 11 * DAY, TODAY)


def test_withdrawing_a_price_makes_it_unknown_from_today_and_leaves_the_days_before(mill: Mill) -> None:
    undone(mill, lambda: withdraw_quote(mill, 1, TODAY))
    assert price(mill) is None
    assert price(mill, -1) == 200
    with pytest.raises(Refused, match="already"):
        withdraw_quote(mill, 3, TODAY)


def test_a_price_to_come_is_withdrawn_from_its_first_day(mill: Mill) -> None:
    add_quote(mill, 1, 210.0, TODAY, valid_from=TODAY + 5 * DAY)
    withdraw_quote(mill, 3, TODAY)
    assert price(mill, 4) == 200
    assert price(mill, 5) is None


def test_days_in_the_wrong_order_are_refused(mill: Mill) -> None:
    with pytest.raises(Refused, match="before its first"):
        add_quote(mill, 1, 1.0, TODAY, valid_from=TODAY, valid_to=TODAY - DAY)


def test_whom_it_is_bought_from_decides_and_is_undone(mill: Mill) -> None:
    undone(mill, lambda: buy_from(mill, 1, "Delta"))
    assert price(mill) == 190
    undone(mill, lambda: buy_from(mill, 1, ""))
    assert price(mill) == 200
    undone(mill, lambda: buy_from(mill, 1, "Hill Farms"))
    assert mill.library.ingredient(1).supplier_id == 3


def test_a_price_typed_over_one_of_the_site_takes_effect(mill: Mill) -> None:
    add_quote(mill, 1, 220.0, TODAY, site="North yard", supplier="Delta")
    undone(mill, lambda: edits.set_price(mill, 1, 230.0, TODAY))
    assert price(mill) == 230
    edits.set_price_per_t(mill, 1, 231.0, TODAY)
    assert price(mill) == 231
    edits.set_price(mill, 1, None, TODAY)
    assert price(mill) is None


def test_a_typed_price_may_name_its_supplier_and_site(mill: Mill) -> None:
    edits.set_price(mill, 1, 230.0, TODAY, supplier_id=2, site_id=1)
    quote = mill.library.quote_in_force(1, TODAY)
    assert quote is not None
    assert (quote.price, quote.supplier_id, quote.site_id) == (230, 2, 1)
    edits.set_price(mill, 1, 230.0, TODAY, supplier_id=1)
    assert mill.library.quote_in_force(1, TODAY).supplier_id == 1  # type: ignore[union-attr]


def test_what_expired_is_named_until_a_price_is_in_force_again(mill: Mill) -> None:
    end_quote(mill, 1, TODAY - 3 * DAY, TODAY)
    end_quote(mill, 2, TODAY - 5 * DAY, TODAY)
    gone = expired(mill.library, 1, TODAY)
    assert gone is not None
    assert (gone.price, gone.valid_to) == (200, TODAY - 3 * DAY)
    assert expired(mill.library, 1, TODAY - 4 * DAY) is None
    edits.set_price(mill, 1, 205.0, TODAY)
    assert expired(mill.library, 1, TODAY) is None


def test_a_withdrawn_price_has_not_expired(mill: Mill) -> None:
    withdraw_quote(mill, 1, TODAY)
    assert expired(mill.library, 1, TODAY) is None


def test_what_turns_over_night_is_told_with_both_prices(mill: Mill) -> None:
    add_quote(mill, 1, 210.0, TODAY, valid_from=TODAY + DAY)
    assert turned(mill.library, TODAY, TODAY) == []
    assert turned(mill.library, TODAY, TODAY + DAY) == [Turn(1, 200.0, 210.0)]


def test_what_is_to_come_is_the_next_day_on_which_another_quote_holds(mill: Mill) -> None:
    assert coming(mill.library, 1, TODAY) is None
    add_quote(mill, 1, 210.0, TODAY, valid_from=TODAY + 5 * DAY)
    step = coming(mill.library, 1, TODAY)
    assert step is not None
    assert (step.first, step.price_per_t) == (TODAY + 5 * DAY, 210)
    end_quote(mill, 1, TODAY + DAY, TODAY)
    end_quote(mill, 2, TODAY + DAY, TODAY)
    step = coming(mill.library, 1, TODAY)
    assert step is not None
    assert (step.first, step.price_per_t) == (TODAY + 2 * DAY, None)


def test_a_price_of_a_list_keeps_the_list_when_its_days_change(mill: Mill) -> None:
    from blendapp.domain.mills import PriceList
    from blendapp.domain.records import added

    now = datetime.datetime(2026, 3, 2, tzinfo=datetime.UTC)
    listed = Quote(mill.new_id("quote"), 1, 205.0, valid_from=TODAY, recorded=TODAY, source="a.csv", price_list_id=1)
    mill.apply("list", [added(PriceList(mill.new_id("price_list"), "a.csv", "ab" * 32, now, 1, 1)), added(listed)])
    change_quote(mill, listed.id, TODAY, valid_to=TODAY + DAY)
    new = mill.library.records["quote"][listed.id + 1]
    assert new == replace(listed, id=listed.id + 1, valid_to=TODAY + DAY, replaces_id=listed.id)


def reading(supplier_id: int | None, site_id: int | None) -> PriceListReading:
    rows = (PriceRow("Sheet", 2, Fate.ACCEPTED, ingredient_id=1, ingredient="Maize", price=180.0, per="t"),)
    return PriceListReading("a.csv", "ab" * 32, rows, supplier_id=supplier_id, site_id=site_id, currency="USD")


def test_a_list_says_whose_prices_it_brings_and_for_which_site(mill: Mill) -> None:
    undone(mill, lambda: apply_price_list(mill, reading(2, 1), TODAY))
    quote = mill.library.quote_in_force(1, TODAY)
    assert quote is not None
    assert (quote.price, quote.supplier_id, quote.site_id, quote.valid_from) == (180, 2, 1, TODAY)
    kept = mill.library.records["price_list"][1]
    assert (kept.supplier_id, kept.site_id) == (2, 1)


@pytest.mark.parametrize(("supplier_id", "site_id", "expected"), [(2, None, 180.0), (1, 1, 180.0), (2, 2, 200.0)])
def test_what_a_list_would_do_is_what_it_does_by_supplier_and_site(
    mill: Mill, supplier_id: int, site_id: int | None, expected: float
) -> None:
    would = with_prices(mill.library, reading(supplier_id, site_id), TODAY)
    assert would.price_per_t(1, TODAY) == expected
    apply_price_list(mill, reading(supplier_id, site_id), TODAY)
    assert price(mill) == expected


def test_a_list_of_another_supplier_gives_way_to_the_one_it_is_bought_from(mill: Mill) -> None:
    buy_from(mill, 1, "Bay Grain")
    assert with_prices(mill.library, reading(2, None), TODAY).price_per_t(1, TODAY) == 200
    apply_price_list(mill, reading(2, None), TODAY)
    assert price(mill) == 200


def test_rolling_a_list_back_takes_its_price_and_what_stands_in_its_place(mill: Mill) -> None:
    apply_price_list(mill, reading(1, None), TODAY)
    before = mill.store.dump()
    listed = mill.library.quotes_of(1)[-1]
    change_quote(mill, listed.id, TODAY, price=181.0)
    change_quote(mill, listed.id + 1, TODAY, valid_to=TODAY + DAY)
    assert price(mill) == 181
    undone(mill, lambda: roll_back(mill, 1), overwrites=True)
    assert price(mill) == 200
    assert [quote.id for quote in mill.library.quotes_of(1)] == [1, 2]
    for _time in range(3):
        mill.undo()
    assert mill.store.dump() == before
