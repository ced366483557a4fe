"""500 formulas of 60 x 30 after a change of five prices, over a loop of bare linprog calls over all of them, in
processor time, once they are kept (bases and warm solvers built). Run: python -m tests.benchmarks.bench_many"""

from __future__ import annotations

import os
import time

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small matrices: threads only wait for each other

import numpy as np
from scipy.optimize import linprog

from blendapp.optimise.kept import Kept
from blendapp.optimise.solve import solve
from tests.benchmarks.bench_answer import bare_call
from tests.benchmarks.feedlike import mix


def main(formulas: int = 500) -> None:
    """Print one line a size of change."""
    programs = [mix(60, 30, seed) for seed in range(formulas)]
    calls = [bare_call(program) for program in programs]
    start = time.process_time()
    kept = [Kept(solve(program)) for program in programs]
    for one in kept:
        one.prepare()
    built = time.process_time() - start
    print(f"{formulas} formulas solved and kept in {built:.2f} s")
    costs = [program.cost.copy() for program in programs]
    random = np.random.default_rng(1)
    for share in (0.02, 0.05):
        for cost in costs:
            changed = random.choice(cost.size, 5, replace=False)
            cost[changed] *= 1 + random.choice((-share, share), 5)
        start = time.process_time()
        bare = [linprog(**{**call, "c": cost}).fun for call, cost in zip(calls, costs, strict=True)]
        middle = time.process_time()
        ours = [one.reprice(cost) for one, cost in zip(kept, costs, strict=True)]
        end = time.process_time()
        for fun, one in zip(bare, ours, strict=True):
            assert abs(fun - one.objective) <= 1e-7 * abs(fun)
        print(
            f"five prices by {share:.0%}: {end - middle:.3f} s over bare {middle - start:.3f} s, "
            f"{(middle - start) / (end - middle):.1f} times faster; {np.mean([one.stays for one in ours]):.0%} "
            "kept their mix"
        )


if __name__ == "__main__":
    main()
