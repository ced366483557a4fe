"""Near-optimal ranges of all columns over one bare linprog call, paired, in processor time.

Run: python -m tests.benchmarks.bench_near
"""

from __future__ import annotations

import os
import time

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small matrices: threads only wait for each other

import numpy as np
from scipy.optimize import linprog

from blendapp.optimise.near import near_optimal
from blendapp.optimise.solve import solve
from tests.benchmarks.bench_answer import bare_call
from tests.benchmarks.feedlike import mix


def main(programs: int = 11) -> None:
    """Print one line a size."""
    for columns, limits in ((100, 40), (300, 80)):
        times = []
        for seed in range(programs):
            program = mix(columns, limits, seed)
            call = bare_call(program)
            solution = solve(program)
            start = time.process_time()
            linprog(**call)
            middle = time.process_time()
            found = near_optimal(solution)
            end = time.process_time()
            assert found.complete
            times.append((middle - start, end - middle))
        bare, ours = np.median(times, axis=0) * 1e3
        ratios = [b / a for a, b in times]
        print(
            f"near-optimal ranges {columns} x {limits}: bare {bare:.2f} ms, ranges {ours:.2f} ms, "
            f"median ratio {np.median(ratios):.2f} (to {max(ratios):.2f})"
        )


if __name__ == "__main__":
    main()
