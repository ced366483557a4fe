"""Commands run in this process, with what they print and their exit status."""

from __future__ import annotations

import json
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import pytest

from blendapp.__main__ import main
from blendapp.domain.formulas import Admits, Amounts, Animal
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.plant import Mixer, Scale
from blendapp.domain.records import KINDS, added
from tests.mills import Maker


@dataclass(frozen=True)
class Run:
    status: int
    out: str
    err: str

    @property
    def json(self) -> Any:
        """The one object on standard output; fails where there is anything else, or a number that JSON has not."""
        def refuse(word: str) -> None:
            raise AssertionError(f"{word} is no JSON")

        return json.loads(self.out, parse_constant=refuse)

    @property
    def faults(self) -> list[str]:
        """The lines of an unusable call, once it is shown that nothing else was said."""
        assert self.status == 2, (self.out, self.err)
        assert self.out == ""
        assert "Traceback" not in self.err
        lines = self.err.splitlines()
        assert lines
        assert all(line.strip() for line in lines)
        return lines


@pytest.fixture
def run(capfd: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch) -> Callable[..., Run]:
    monkeypatch.delenv("BLENDAPP_LANGUAGE", raising=False)

    def call(*arguments: object) -> Run:
        capfd.readouterr()
        try:
            status = main([str(argument) for argument in arguments])
        except SystemExit as left:  # --help leaves by itself
            status = int(left.code or 0)
        found = capfd.readouterr()
        return Run(status, found.out, found.err)

    return call


def library() -> Library:
    """One formula for every status, one that rounding breaks, and one that lacks a scale."""
    make = Maker(currency="EUR")
    make.nutrient("Protein", key="crude protein")
    make.nutrient("Energy", "MJ/kg")
    make.put(Mixer(1, "Mixer", 100.0, 2000.0))
    make.put(Scale(1, "Big", 5.0))
    make.put(Scale(2, "Bench", 0.5, hand_add=True))
    make.ingredient("Maize", 200, {"Protein": 8.5, "Energy": 14.1}, dry_matter_percent=87, scale_id=1)
    make.ingredient("Soybean meal", 400, {"Protein": 46.0}, dry_matter_percent=89, scale_id=1)
    make.ingredient("Premix", 900, {"Protein": 0.0, "Energy": 0.0}, dry_matter_percent=95, scale_id=2)
    make.ingredient("Fish meal", None, {"Protein": 65.0, "Energy": 12.0}, scale_id=1)
    make.ingredient("Whey", -5, {"Protein": 0.8, "Energy": 0.9}, tags=(Tag.ONLY_WHEN_LISTED,), scale_id=1)
    make.ingredient("Coccidiostat", 9000, {"Protein": 0.0, "Energy": 0.0}, tags=(Tag.IONOPHORE,), scale_id=2)
    make.ingredient("Grit", 50, {"Protein": 0.0, "Energy": 0.0}, tags=(Tag.ONLY_WHEN_LISTED,))
    sound = make.formula("Sound", animal=Animal.PIG)
    make.limit(sound, "nutrient", "Protein", 16.0, 18.0)
    make.limit(sound, "nutrient", "Energy", 10.0, None, basis="at 88 % dry matter")
    make.limit(sound, "ingredient", "Premix", 0.5, 0.5)
    make.limit(sound, "ratio", "Protein", None, 9.0, per="Energy")
    make.limit(sound, "group", ["Maize", "Soybean meal"], maximum=995.0, unit="kg/t")
    make.limit(sound, "ingredient", "Maize")
    conflict = make.formula("Conflict", animal=Animal.PIG)
    make.limit(conflict, "nutrient", "Protein", 70.0)
    unbounded = make.formula("Unbounded", amounts=Amounts.RATION, animal=Animal.CATTLE)
    make.limit(unbounded, "ingredient", "Whey")
    incomplete = make.formula("Incomplete", animal=Animal.PIG)
    make.limit(incomplete, "nutrient", "Protein", 50.0)
    horse = make.formula("Horse", animal=Animal.HORSE)
    make.limit(horse, "ingredient", "Coccidiostat", None, 1.0)
    ration = make.formula("Ration", amounts=Amounts.RATION, animal=Animal.CATTLE)
    make.limit(ration, "nutrient", "Protein", 1200.0, 1200.0, unit="g/day", basis="per day")
    make.limit(ration, "nutrient", "Dry matter", 8.0, basis="per day")
    broken = make.formula("Broken", animal=Animal.PIG)
    make.limit(broken, "nutrient", "Protein", 16.01, 16.02)
    gritty = make.formula("Gritty", animal=Animal.POULTRY, admits=Admits.LISTED)
    make.limit(gritty, "ingredient", "Grit", 1.0, 1.0)
    make.limit(gritty, "ingredient", "Maize")
    return make.library


@pytest.fixture
def mill(tmp_path: Path) -> Path:
    from blendapp.storage import create

    path = tmp_path / "valley.mill"
    found = library()
    create(path, [added(record) for kind in KINDS for record in found.all(kind)]).close()
    return path
