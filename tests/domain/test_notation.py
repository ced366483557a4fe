from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from blendapp.domain.notation import COMMA, PLAIN, Notation, notation, use_notation

GROUPED = [Notation(".", ","), Notation(",", "."), Notation(",", "\u202f"), Notation(",", "\u00a0"), Notation(".", "'")]
BOTH = pytest.mark.parametrize("written", [PLAIN, COMMA], ids=["point", "comma"])
ALL = pytest.mark.parametrize("written", [PLAIN, COMMA, *GROUPED])
finite = st.floats(allow_nan=False, allow_infinity=False)


@ALL
@given(value=st.floats(-1e9, 1e9), decimals=st.integers(0, 6))
def test_a_number_written_with_decimals_reads_back_as_that_rounding(
    written: Notation, value: float, decimals: int
) -> None:
    assert written.read(written.write(value, decimals)) == float(f"{value:.{decimals}f}")


@BOTH
@given(value=finite)
def test_a_number_written_exactly_reads_back_as_itself(written: Notation, value: float) -> None:
    assert written.read(written.write_exact(value)) == value


@BOTH
@given(value=st.one_of(st.integers(-(10**8), 10**8).map(lambda n: n / 10_000), st.integers(-(10**6), 10**6)))
def test_what_a_person_types_reads_back_as_itself_when_written_short(written: Notation, value: float) -> None:
    assert written.read(written.write_short(value)) == value


@pytest.mark.parametrize(
    ("value", "text"), [(0.1, "0.1"), (1e-5, "0.00001"), (1.5e-7, "1.5e-07"), (8.0, "8"), (-0.0, "0"), (0.1 + 0.2,
                        "0.30000000000000004"), (1250000.0, "1250000"), (None, "")]
)
def test_an_exact_number_is_written_as_a_person_would_type_it(value: float | None, text: str) -> None:
    assert PLAIN.write_exact(value) == text
    assert COMMA.write_exact(value) == text.replace(".", ",")


def test_a_comma_under_a_point_is_refused_and_never_125() -> None:
    with pytest.raises(ValueError, match=r"“12,5” is not a number here; write it like 1234\.5"):
        PLAIN.read("12,5")


def test_a_point_under_a_comma_is_refused_and_never_125() -> None:
    with pytest.raises(ValueError, match="write it like 1234,5"):
        COMMA.read("12.5")


@pytest.mark.parametrize("text", ["0,950", "-0,125", "00,250", "+0,500"])
def test_a_fraction_with_the_wrong_sign_is_never_read_as_thousands(text: str) -> None:
    with pytest.raises(ValueError, match="not a number here"):
        PLAIN.read(text)
    with pytest.raises(ValueError, match="not a number here"):
        COMMA.read(text.replace(",", "."))


@pytest.mark.parametrize(
    "text",
    ["", "  ", "abc", "1.2.3", "1,2,3", "--5", "+-5", "- 5", "5 %", "1_000", "nan", "inf", "-inf", "1e999", "0x10", "٣",
     "1 2", "12 34", "1234 567", "1,23,456", ",123", "1,,234", "1,234 567", "e5", ".", "-", "½", "1\n2"],
)
def test_what_is_no_number_is_refused(text: str) -> None:
    with pytest.raises(ValueError, match="not a number here"):
        PLAIN.read(text)


@pytest.mark.parametrize(
    ("text", "value"),
    [("1,234.5", 1234.5), ("1 234.5", 1234.5), ("1\u00a0234", 1234), ("1\u202f234\u202f567", 1234567), ("1'234", 1234),
     (" 12.5 ", 12.5), ("\u221212.5", -12.5), ("+3", 3), (".5", 0.5), ("5.", 5), ("1e3", 1000), ("-1,234", -1234),
     ("007", 7)],
)
def test_what_a_person_types_is_taken(text: str, value: float) -> None:
    assert PLAIN.read(text) == value


@pytest.mark.parametrize(
    ("text", "value"), [("12,5", 12.5), ("1.234,5", 1234.5), ("1.234", 1234), ("1 234,5", 1234.5), (",5", 0.5)]
)
def test_what_a_person_types_with_a_decimal_comma_is_taken(text: str, value: float) -> None:
    assert COMMA.read(text) == value


@pytest.mark.parametrize(
    ("value", "decimals", "text"), [(-0.004, 2, "0.00"), (1234.5, 1, "1234.5"), (None, 2, ""), (-1.5, 0, "-2")]
)
def test_a_number_has_a_fixed_count_of_decimals(value: float | None, decimals: int, text: str) -> None:
    assert PLAIN.write(value, decimals) == text


def test_thousands_are_grouped_only_where_a_grouping_sign_is_given() -> None:
    assert Notation(",", ".").write(1234567.5, 1) == "1.234.567,5"
    assert COMMA.write(1234567.5, 1) == "1234567,5"


@pytest.mark.parametrize(
    ("value", "most", "text"),
    [(100.0, 0, "100"), (1.25, 6, "1.25"), (1e-9, 6, "1e-09"), (-0.0, 6, "0"), (2e15, 6, "2e+15"), (None, 6, "")],
)
def test_a_short_number_has_no_trailing_zeros(value: float | None, most: int, text: str) -> None:
    assert PLAIN.write_short(value, most) == text


def test_the_notation_in_use_is_the_one_taken() -> None:
    try:
        use_notation(COMMA)
        assert notation().write(1.5, 1) == "1,5"
    finally:
        use_notation(PLAIN)
    assert math.isclose(notation().read("1.5"), 1.5)
