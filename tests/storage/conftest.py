"""An invented mill with at least one record of every kind."""

from __future__ import annotations

import datetime
import os
import subprocess
import sys
from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from blendapp.domain.formulas import Admits, Amounts, Animal, Formula, Limit, LimitBasis, LimitKind, MixingStep, Subject
from blendapp.domain.ingredients import Basis, Ingredient, Origin, Tag, Value
from blendapp.domain.mills import (
    Acknowledgement,
    Asked,
    FormulaVersion,
    ListAbout,
    MillInfo,
    Person,
    PriceList,
    PrintedBatch,
    Synonym,
    VersionState,
)
from blendapp.domain.nutrients import Nutrient
from blendapp.domain.plant import Bin, Lot, LotValue, Mixer, Scale, Site, Supplier
from blendapp.domain.quotes import Quote, QuoteKind, Terms
from blendapp.domain.records import Record
from blendapp.storage import Store, create

DAY = datetime.date(2026, 3, 2)
MOMENT = datetime.datetime(2026, 3, 2, 8, 15, 30, 123456, tzinfo=datetime.UTC)


@pytest.fixture
def records(first_records: list[Record]) -> list[Record]:
    """At least one record of each kind, links among them, optional fields both filled and empty."""
    return [
        *first_records,
        MixingStep(1, 1, 1, "Mix dry", 3.0, "32 rpm"),
        MixingStep(2, None, 1, "Take the sample"),
        Scale(3, "Fat pump", None, site_id=1, step_l=0.5, least_l=2.0, greatest_l=150.0),
        Formula(3, "Pellet", loss_percent=0.8, product_dry_matter_percent=88.5),
        Ingredient(4, "Minerals", made_by_formula_id=2, opened=True, supplier_id=1),
        PriceList(2, "lab.xlsx", "cd" * 32, MOMENT, 4, 4, about=ListAbout.COMPOSITION, site_id=1),
        Lot(2, 1, "S-4", DAY, price_list_id=2),
        Quote(3, 2, 5.7, valid_from=DAY, replaces_id=2),
    ]


@pytest.fixture
def first_records() -> list[Record]:
    """What a file of the first revision held, as it stands in data/: two of some kinds and one of most."""
    return [
        MillInfo(name="Mühle am Bach", currency="EUR", ton_means="t"),
        Person(1, "Ann Miller", "nutritionist", "$hash$", True),
        Site(1, "North yard"),
        Supplier(1, "Bay Grain", "pays in 30 days"),
        Scale(1, "Big scale", 5.0, 20.0, 2000.0, None, False, 1),
        Scale(2, "Hand scale", 0.001, hand_add=True),
        Mixer(1, "Mixer", 500.0, 2000.0, 1),
        Nutrient(1, "Crude protein", "%", True, "crude protein"),
        Nutrient(2, "Energy", "MJ/kg", False),
        Formula(1, "Layer mash", Amounts.BLEND, Animal.POULTRY, "lay", 2000.0, Admits.LISTED, "line 1\nline 2"),
        Formula(2, "Cow ration", Amounts.RATION),
        Ingredient(1, "Maize", "Cereals", 88.0, scale_id=1, bushel_lb=56.0),
        Ingredient(2, "Urea", tags=(Tag.NON_PROTEIN_NITROGEN, Tag.ONLY_WHEN_LISTED), basis=Basis.DRY_MATTER),
        Ingredient(3, "Premix", made_by_formula_id=1, drug="Monensin", drug_level="100 mg/kg", withdrawal="3 days"),
        Value(1, 1, 1, 8.5, "%", Basis.AS_FED, Origin.MEASURED, "lab 7", DAY, 12, 0.4, "8,5"),
        Value(2, 2, 1, 281.0, "%"),
        Value(3, 1, 2, -1.25e-7, "MJ/kg", Basis.DRY_MATTER),
        Lot(1, 1, "L-77", DAY, 24000.0, 1),
        LotValue(1, 1, 1, 85.0, "g/kg", "dry matter", "lab 8", DAY),
        Bin(1, "Bin 4", 1, 1, 1),
        PriceList(1, "march.csv", "ab" * 32, MOMENT, 30, 28, 1, "two refused", "march", MOMENT),
        Quote(1, 1, 5.6, "bu", 56.0, 1, 1, QuoteKind.CONTRACT, Terms.DELIVERED, DAY, None, DAY, "phone", "5,60", 1),
        Quote(2, 2, None),
        Synonym(1, "Bay Grain", "corn no 2", 1, "bu"),
        Synonym(2, "Bay Grain", "EUR", None, "", Asked.RATE, "EUR", 1.085, DAY),
        Limit(1, 1, LimitKind.NUTRIENT, Subject.nutrient(1), minimum=16.0, maximum=18.0),
        Limit(
            2, 1, LimitKind.RATIO, Subject.ingredients(1, 2), Subject.of_class("Cereals, whole"), 0.1, None, "",
            LimitBasis.AT_DRY_MATTER, 88.0, "kept",
        ),
        FormulaVersion(
            1, 1, 1, VersionState.APPROVED, "{}", MOMENT, "Ann", 1, MOMENT, "Ann Miller", 1, "nutritionist", "n",
            "ab" * 32,
        ),
        Acknowledgement(1, 1, "unknown lysine", "known to be low", 1, MOMENT, "Ann Miller"),
        PrintedBatch(1, 1, 1, "1", 2000.0, MOMENT, "Ann", sheet='{"lines": []}', copies=1),
    ]


@pytest.fixture
def store(tmp_path: Path, records: list[Record]) -> Iterator[Store]:
    """That mill, open, in a folder of its own."""
    from blendapp.domain.records import added

    opened = create(tmp_path / "north.mill", [added(record) for record in records])
    yield opened
    if opened._users > 0:
        opened.close()


@pytest.fixture
def run_child() -> Iterator[Callable[..., subprocess.Popen[str]]]:
    """Starts a Python program as another process: run_child(program, *arguments). Ends those still running."""
    started: list[subprocess.Popen[str]] = []

    def start(program: str, *arguments: object) -> subprocess.Popen[str]:
        environment = {**os.environ, "PYTHONPATH": os.pathsep.join(path for path in sys.path if path) or os.getcwd()}
        child = subprocess.Popen(
            [sys.executable, "-c", program, *map(str, arguments)],
            stdin=subprocess.PIPE, stdout=subprocess.PIPE, text=True, env=environment,
        )
        started.append(child)
        return child

    yield start
    for child in started:
        if child.poll() is None:
            child.kill()
        child.communicate()
