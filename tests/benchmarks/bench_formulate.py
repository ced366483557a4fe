"""Time of the whole formulate job (build, solve, check, result) over that of one bare linprog call on its arrays.

Run: python -m tests.benchmarks.bench_formulate. The composition is warm, as it is in an open mill.
"""

from __future__ import annotations

import time

import numpy as np
from scipy.optimize import linprog

from blendapp.domain.formulas import Formula
from blendapp.domain.library import Library
from blendapp.optimise.build.composition import Composition
from blendapp.optimise.build.formula import build
from blendapp.optimise.program import Program
from blendapp.services.formulate import formulate
from tests.benchmarks.bench_answer import SIZES, bare_call
from tests.benchmarks.feedlike import mix
from tests.mills import TODAY, Maker


def mill_of(program: Program) -> tuple[Library, Formula]:
    """A library whose one formula is a made-up program of a mix."""
    make = Maker()
    limited = [row for row in program.rows if row.limit is not None]
    dry = next((row.divisor for row in limited if row.divisor is not None), np.full(program.size, 0.9))
    names = [f"Ingredient {j}" for j in range(program.size)]
    for i, _row in enumerate(limited):
        make.nutrient(f"Nutrient {i}", "g/kg")
    for j, name in enumerate(names):
        values = {f"Nutrient {i}": float(row.numerator[j]) for i, row in enumerate(limited)}
        make.ingredient(name, float(program.cost[j]), values, dry_matter_percent=float(dry[j]) * 100)
    feed = make.formula()
    for i, row in enumerate(limited):
        basis = "" if row.divisor is None else "dry matter"
        make.limit(feed, "nutrient", f"Nutrient {i}", row.minimum, row.maximum, basis=basis)
    for bound in program.bounds:
        most = None if bound.maximum is None else bound.maximum * 100
        make.limit(feed, "ingredient", names[bound.column], None, most)
    return make.library, feed


def main(programs: int = 15) -> None:
    """Print two lines a size: without and with both-sided prices and price ranges."""
    for prices in (False, True):
        print("with both-sided prices and price ranges" if prices else "with the solver's prices")
        measure(programs, prices)


def measure(programs: int, prices: bool) -> None:
    """Print one line a size."""
    for columns, limits in SIZES:
        ratios, ours, bare = [], [], []
        for seed in range(programs):
            library, feed = mill_of(mix(columns, limits, seed))
            composition = Composition(library)
            call = bare_call(build(library, feed, TODAY, composition).program)
            times = []
            for _ in range(3):
                start = time.perf_counter()
                result = linprog(**call)
                middle = time.perf_counter()
                answer = formulate(library, feed.id, TODAY, composition, prices=prices)
                end = time.perf_counter()
                assert answer.cost is not None
                assert abs(result.fun - answer.cost) <= 1e-6 * abs(result.fun)
                times.append((middle - start, end - middle))
            first, second = min(t[0] for t in times), min(t[1] for t in times)
            bare.append(first)
            ours.append(second)
            ratios.append(second / first)
        print(
            f"formulate {columns} x {limits}: {np.median(ours) * 1e3:.2f} ms over bare {np.median(bare) * 1e3:.2f} ms, "
            f"median ratio {np.median(ratios):.2f} (from {min(ratios):.2f} to {max(ratios):.2f})"
        )


if __name__ == "__main__":
    main()
