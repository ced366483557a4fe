"""Invented batches with everything that a batch can carry: 25 lines in kg, the same mill in lb, and extremes."""

from __future__ import annotations

import dataclasses
import datetime

import page_cases as made

from blendapp.domain.batches import Batch, BatchLine, CleanOut, Step, ToMake
from blendapp.domain.cautions import GENERAL_CAUTION
from blendapp.domain.units import LB_KG

GALLON_L = 231 * 2.54**3 / 1000
HOPPER, MINOR, PUMP, BENCH = "Hopper scale", "Minor scale", "Fat pump", "Bench scale"


def _line(name: str, steps: int, scale: str, step_kg: float, **more: object) -> BatchLine:
    target = round(steps * step_kg, 9)
    share = target * 1.001
    tolerance = max(step_kg, (0.01 if scale == BENCH else 0.02) * share)
    return BatchLine(1, name, scale, step_kg, share, target, tolerance_kg=tolerance, **more)  # type: ignore[arg-type]


def _liquid(name: str, steps: int, step_l: float, density_kg_per_l: float, tank: str) -> BatchLine:
    line = _line(name, steps, PUMP, step_l * density_kg_per_l, bins=(tank,))
    return dataclasses.replace(line, step_l=step_l, target_l=steps * step_l)


def _lines(hopper_kg: float, minor_kg: float, step_l: float, maize_steps: int) -> tuple[BatchLine, ...]:
    """25 lines, the steps of hopper, minor scale and pump as given; the bench scale has 5 g."""
    premix = ("Mineral premix, pigs",)
    return (
        _line("Maize", maize_steps, HOPPER, hopper_kg, bins=("Bin 4, lot M-2231",)),
        _line("Wheat", 61, HOPPER, hopper_kg, bins=("Bin 1", "Bin 2, lot W 77")),
        _line("Barley", 48, HOPPER, hopper_kg, bins=("Bin 3",)),
        _line("Soybean meal 46 %", 51, HOPPER, hopper_kg, bins=("Bin 7, lot 8123",)),
        _line("Rapeseed meal, solvent extracted", 24, HOPPER, hopper_kg, bins=("Bin 8",)),
        _line("Sunflower meal, dehulled", 12, HOPPER, hopper_kg, bins=("Bin 9",)),
        _line("Wheat feed", 18, HOPPER, hopper_kg),
        _line("Sugar beet pulp, dried", 9, HOPPER, hopper_kg),
        _line("Rework of Grower pig", 8, HOPPER, hopper_kg, rework=True),
        _line("Limestone flour", 49, MINOR, minor_kg, bins=("Bin 21",)),
        _line("Monocalcium phosphate", 19, MINOR, minor_kg, bins=("Bin 22",)),
        _line("Salt", 13, MINOR, minor_kg, fixed=True),
        _line("Lysine hydrochloride", 14, MINOR, minor_kg),
        _line("Sodium bicarbonate", 6, MINOR, minor_kg, of_opened=premix),
        _line("Magnesium oxide", 3, MINOR, minor_kg, of_opened=premix),
        _line("Potassium chloride", 4, MINOR, minor_kg),
        _liquid("Soya oil", 60, step_l, 0.915, "Tank 1"),
        _liquid("Molasses, cane", 40, step_l, 1.4, "Tank 2"),
        _line("DL-Methionine", 480, BENCH, 0.005, hand_add=True),
        _line("L-Threonine", 625, BENCH, 0.005, hand_add=True),
        _line("Vitamin and trace element premix", 800, BENCH, 0.005, hand_add=True, bins=("Shelf 3, lot V19",)),
        _line("Phytase", 40, BENCH, 0.005, hand_add=True),
        _line("Xylanase", 41, BENCH, 0.005, hand_add=True),
        _line("Choline chloride 60 %", 170, BENCH, 0.005, hand_add=True),
        dataclasses.replace(made.MEDICATED, tolerance_kg=0.025),
    )


def _total_kg(lines: tuple[BatchLine, ...]) -> float:
    return round(sum(line.target_kg for line in lines), 9)


_METRIC = _lines(5.0, 0.5, 0.5, 122)

FULL = dataclasses.replace(
    made.PLAIN,
    lines=_METRIC, batch_kg=_total_kg(_METRIC), order_kg=round(4 * _total_kg(_METRIC), 6), batches=4, place=2,
    animal="pig", stage="grower", site="North mill", mixer="Mixer 2",
    steps=(
        Step("Cereals and meals from the hopper", 1.5, "32 rpm"), Step("Minerals and hand-adds by the side port", 1.0),
        Step("Mix dry", 3.0, "32 rpm"), Step("Spray fat and molasses", 2.0, "nozzles at 3 bar"), Step("Empty"),
    ),
    to_make=(ToMake("Trace element mix", 3, "Trace elements, pigs", 80.0),),
    previous_feed="Broiler finisher, batch 1039", clean_out=CleanOut.FLUSH,
    clean_out_reason="Broiler finisher carried a medicated premix that is not for pigs.",
    loss_percent=0.5, product_dry_matter_percent=87.5, yield_kg=1869.2375,
    cautions=(GENERAL_CAUTION, "Feed nothing else with copper.", "Keep from sheep: 15 mg/kg of added copper."),
)

_US = _lines(5 * LB_KG, LB_KG, 0.5 * GALLON_L, 555)

US = dataclasses.replace(
    FULL, lines=_US, batch_kg=4200 * LB_KG, order_kg=16800 * LB_KG, yield_kg=4150 * LB_KG, mass_unit="lb",
    paper="letter",
)

# 60 lines, long names and words, 25 long cautions, a draft that breaks limits.
EXTREME = dataclasses.replace(
    FULL,
    formula=made.MANY.formula, version="draft 12", draft=True, approved_by="", number=None,
    lines=tuple(
        dataclasses.replace(
            _METRIC[n % 25],
            ingredient=f"Line {n} {_METRIC[n % 25].ingredient}"
            f"{' ' + made.LONG_NAME if n % 9 == 0 else ' ' + made.LONG_WORD if n % 13 == 0 else ''}",
            bins=(made.LONG_NAME, "Bin 12, lot " + made.LONG_WORD) if n % 11 == 0 else _METRIC[n % 25].bins,
            of_opened=(made.LONG_WORD, made.LONG_NAME) if n % 17 == 0 else (),
        )
        for n in range(60)
    ),
    steps=(Step(made.LONG_NAME + " " + made.LONG_WORD, 12.25, made.LONG_WORD), *FULL.steps * 4),
    to_make=tuple(ToMake(f"{made.LONG_NAME} {n}", n, made.LONG_WORD, 1234.5678) for n in range(6)),
    previous_feed=made.LONG_NAME, clean_out_reason=f"{made.LONG_NAME}. " * 3,
    yield_kg=None, yield_unknown="The yield is not known: the dry matter of Barley is not known.",
    broken=(0, 1), limits=made.MANY.limits, nutrients=made.MANY.nutrients,
    cautions=(GENERAL_CAUTION, *(f"Caution {n}: " + "the words of a rule that goes on " * 6 for n in range(1, 26))),
    mixer=made.LONG_NAME, site=made.LONG_WORD, stage="from weaning to slaughter",
)
EXTREME_US = dataclasses.replace(EXTREME, mass_unit="lb")

CASES: dict[str, Batch] = {"full": FULL, "us": US, "extreme": EXTREME, "extreme-us": EXTREME_US, "plain": made.PLAIN}
OTHER_DAY = datetime.date(2031, 7, 9)
