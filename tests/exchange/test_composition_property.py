"""Whatever the format, the dialect and the place of unit and basis: the same samples come back as the same values."""

from __future__ import annotations

import math
import tempfile
from collections.abc import Callable
from decimal import Decimal
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from blendapp.domain import checks, units
from blendapp.domain.composition_rows import sample_means
from blendapp.domain.ingredients import Value
from blendapp.domain.library import Library
from blendapp.domain.list_rows import Fate
from blendapp.domain.problems import Refused
from blendapp.exchange import read_composition_list
from tests.exchange.made_lists import Rows, write_ods, write_text, write_xls, write_xlsx
from tests.mills import TODAY, Maker

INGREDIENTS = ("Maize", "Soybean meal 44 %", "Soybean meal 48 %", "Feed wheat", "Wheat feed", "Rapskuchen, kaltgepreßt")
# The mill's name, its own unit, and how laboratories may head it.
NUTRIENTS = {
    "Crude protein": ("%", ("Crude protein", "CP", "crude-protein")), "Lysine": ("%", ("Lysine", "Lys")),
    "Calcium": ("g/kg", ("Calcium", "Ca", "Calcium (Ca)")), "Zinc": ("mg/kg", ("Zinc", "Zn")),
    "ME poultry": ("kcal/kg", ("ME poultry", "ME, poultry")), "NDF": ("%", ("NDF", "Neutral detergent fiber")),
}
FAMILY_UNITS = {
    units.Family.MASS: {
        "%": ("%", "g/100 g", "% w/w"), "g/kg": ("g/kg", "mg/g"), "mg/kg": ("mg/kg", "ppm", "\u00b5g/g")
    },
    units.Family.ENERGY: {"MJ/kg": ("MJ/kg", "kJ/g"), "kcal/kg": ("kcal/kg", "cal/g"), "Mcal/kg": ("Mcal/kg",)},
}
BASES = {"as fed": ("as fed", "as is", "as received"), "dry matter": ("DM", "of dry matter", "dry basis")}
DIALECTS = (("", "."), ("", ","), (",", "."), (".", ","), (" ", ","))
FORMATS: tuple[tuple[str, Callable[[Path, Rows], Path]], ...] = (
    ("xlsx", write_xlsx), ("ods", write_ods), ("xls", write_xls),
    *(
        (f"text {separator!r} {encoding}", lambda path, rows, s=separator, e=encoding: write_text(path, rows, s, e))
        for separator in (",", ";", "\t") for encoding in ("utf-8", "utf-8-sig", "utf-16", "cp1252")
    ),
)


def _library() -> Library:
    maker = Maker()
    keys = {"NDF": "neutral detergent fibre", "Zinc": "total zinc", "ME poultry": "energy"}
    for name, (unit, _words) in NUTRIENTS.items():
        maker.nutrient(name, unit, key=keys.get(name, name.lower()))
    for name in INGREDIENTS:
        maker.ingredient(name, dry_matter_percent=88)
    return maker.library


LIBRARY = _library()


def shown(amount: Decimal, dialect: tuple[str, str]) -> str:
    group, sign = dialect
    return f"{amount:,.3f}".replace(",", "\x00").replace(".", sign).replace("\x00", group)


@st.composite
def tables(draw: st.DrawFn) -> tuple[Rows, list[dict[str, Any]]]:
    """Rows of a list, and of every sample its ingredient, number and values in base units."""
    names = draw(st.lists(st.sampled_from(INGREDIENTS), min_size=1, max_size=6))
    nutrients = draw(st.lists(st.sampled_from(sorted(NUTRIENTS)), min_size=1, max_size=4, unique=True))
    texts = draw(st.booleans())
    dialect = draw(st.sampled_from(DIALECTS))
    where = draw(st.sampled_from(("heading", "second heading", "title", "column")))
    one_basis = draw(st.sampled_from(sorted(BASES)))
    heads, unit_row, factors, bases = [], [], [], []
    for name in nutrients:
        own = units.concentration(NUTRIENTS[name][0]).family
        unit = draw(st.sampled_from(sorted(FAMILY_UNITS[own])))
        basis = draw(st.sampled_from(sorted(BASES))) if where in ("heading", "second heading") else one_basis
        how = draw(st.sampled_from(FAMILY_UNITS[own][unit]))
        said = f"{how} {draw(st.sampled_from(BASES[basis]))}" if where in ("heading", "second heading") else how
        word = draw(st.sampled_from(NUTRIENTS[name][1]))
        heads.append(word if where == "second heading" else f"{word} ({said})")
        unit_row.append(said)
        factors.append(units.concentration(unit).factor)
        bases.append(basis)
    dry = draw(st.sampled_from(("", "Dry matter %", "DM (%)", "Moisture %")))
    rows: list[list[Any]] = [["Larkwater"], []] if draw(st.booleans()) else []
    if where == "title":
        rows.append([f"All results on {one_basis} basis"])
    extra = ["Basis"] if where == "column" else []
    rows.append(["Ingredient", "Sample", *heads, *([dry] if dry else []), *extra])
    if where == "second heading":
        rows.append([None, None, *unit_row])
    expected = []
    for number, name in enumerate(names):
        amounts = [Decimal(draw(st.integers(min_value=1, max_value=99_999))) / 1000 for _one in nutrients]
        cells: list[Any] = [shown(amount, dialect) if texts else float(amount) for amount in amounts]
        spelled = draw(st.sampled_from((name, name.upper(), f" {name} ")))
        moist = [12.5 if "Moisture" in dry else 87.5] if dry else []
        rows.append([spelled, f"S{number}", *cells, *moist, *([one_basis] if extra else [])])
        values = {
            nutrient: (pytest.approx(float(amount) * factor, rel=1e-9), basis)
            for nutrient, amount, factor, basis in zip(nutrients, amounts, factors, bases, strict=True)
        }
        if dry:
            values["Dry matter"] = (pytest.approx(0.875), "as fed")
        expected.append({"ingredient": name, "sample": f"S{number}", "values": values})
    return rows, expected


@settings(max_examples=120, deadline=None)
@given(tables(), st.sampled_from(FORMATS))
def test_any_table_in_any_format_comes_back_as_the_same_values(
    table: tuple[Rows, list[dict[str, Any]]], made: tuple[str, Callable[[Path, Rows], Path]]
) -> None:
    """What a clerk would ask about (a leap, a decimal sign that nothing tells) is a question, never another value."""
    rows, expected = table
    with tempfile.TemporaryDirectory() as folder:
        reading = read_composition_list(made[1](Path(folder, "Larkwater"), rows), LIBRARY, TODAY)
    filled = [number for number, cells in enumerate(rows, start=1) if any(cell is not None for cell in cells)]
    assert [row.row for row in reading.rows] == filled
    found = [row for row in reading.rows if row.fate is not Fate.IGNORED]
    assert [(row.ingredient, row.sample) for row in found] == [(one["ingredient"], one["sample"]) for one in expected]
    for row, wanted in zip(found, expected, strict=True):
        got = {
            one.nutrient: (one.amount * units.concentration(one.unit).factor, str(one.basis)) for one in row.values
        }
        assert {name: got[name] for name in got} == {name: wanted["values"][name] for name in got}
        assert row.fate is not Fate.REFUSED
        if row.fate is Fate.ACCEPTED:
            assert set(got) == set(wanted["values"])
        else:
            assert {str(one.asked) for one in row.questions} <= {"change", "decimal"}, row.reason


NASTY = (
    None, "", "Maize", "Ingredient", "CP % as fed", "CP", "% DM", "Sample", "Date", "Basis", "as fed", "DM %", "8,5",
    "8.5", "1,234", 8.5, -1.0, 0.0, 1e300, "n.d.", "<", ">", "#N/A", "=A1", "2026-02-03", "3/4/2026", "Mean", "(", ")",
    "%", "Zn", "mg/kg", "\u00b5", "\x00", "\u01c5", "12-14", "1e9", "N/A", "-", "Lysine (", "((%", "Ca) g/kg", "\u017f",
    "\u0663", "\uff18", "\u00bd", "\u00b2", "Moisture", "All results on dry matter basis", True, 5e-324, "9" * 400,
    "1.2.3,4", "' ", "kg" * 50, "\u202f8,5",
)
HEADS = (
    [], [["Ingredient", "CP % as fed", "DM %", "Zn mg/kg as fed", "Date"]], [["Sample", "Ingredient", "CP", "Ca"]],
    [["Ingredient", "CP", "DM"], [None, "%", "g/kg"]], [["Results as fed basis"], ["Maize"], ["No", "CP %", "n"]],
)


@settings(max_examples=150, deadline=None)
@given(
    st.sampled_from(HEADS), st.lists(st.lists(st.sampled_from(NASTY), max_size=6), max_size=12),
    st.sampled_from((write_xlsx, write_text, write_ods)),
)
def test_whatever_stands_in_a_table_every_row_has_one_fate_and_what_is_accepted_can_be_recorded(
    heads: Rows, below: Rows, write: Callable[[Path, Rows], Path]
) -> None:
    rows = [*heads, *below]
    if write is not write_text:
        rows = [[None if cell in ("\x00", "#N/A", "=A1") else cell for cell in cells] for cells in rows]
    with tempfile.TemporaryDirectory() as folder:
        path = write(Path(folder, "Larkwater"), rows)
        try:
            reading = read_composition_list(path, LIBRARY, TODAY)
        except Refused:  # an empty file
            return
    places = [(row.sheet, row.row) for row in reading.rows]
    assert len(places) == len(set(places))
    for row in reading.accepted:
        assert row.ingredient_id is not None
        assert row.values
        for one in row.values:
            assert math.isfinite(one.amount)
            if one.nutrient_id is None:
                assert 0 <= one.amount <= 100
            else:
                value = Value(1, row.ingredient_id, one.nutrient_id, one.amount, one.unit, one.basis)
                assert checks.faults(value, LIBRARY) == []
    for mean in sample_means(reading.accepted):
        assert math.isfinite(mean.amount)
