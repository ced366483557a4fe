"""Time of an answer (expand, solve, uniqueness, certificate) over that of one bare linprog call on the same arrays.

Run: python -m tests.benchmarks.bench_answer. Prints medians of paired ratios of processor
time, both timed in turn in one run.
"""

from __future__ import annotations

import os
import time
from typing import Any

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small matrices: threads only wait for each other

import numpy as np
from scipy.optimize import linprog

from blendapp.optimise.arrays import expand
from blendapp.optimise.certificate import check
from blendapp.optimise.program import Program
from blendapp.optimise.solve import solve
from tests.benchmarks.feedlike import mix

SIZES = ((40, 20), (100, 40), (300, 80))


def bare_call(program: Program) -> dict[str, Any]:
    """The arguments of the bare call: the very arrays that the answer is solved on."""
    arrays = expand(program)
    k = arrays.inequalities
    return {
        "c": arrays.cost,
        "A_ub": -arrays.a[:k],
        "b_ub": -arrays.b[:k],
        "A_eq": arrays.a[k:],
        "b_eq": arrays.b[k:],
        "bounds": np.stack((arrays.lower, arrays.upper), axis=1),
    }


def main(programs: int = 25) -> None:
    """Print one line a size."""
    for columns, limits in SIZES:
        bare, ours, ratio = [], [], []
        for seed in range(programs):
            program = mix(columns, limits, seed)
            call = bare_call(program)
            times = []
            for _ in range(3):
                start = time.process_time()
                result = linprog(**call)
                middle = time.process_time()
                solution = solve(program)
                check(program, solution)
                end = time.process_time()
                times.append((middle - start, end - middle))
                assert abs(result.fun - solution.objective) <= 1e-7 * abs(result.fun)
            first = min(t[0] for t in times)
            second = min(t[1] for t in times)
            bare.append(first)
            ours.append(second)
            ratio.append(second / first)
        print(
            f"answer {columns} x {limits}: {np.median(ours) * 1e3:.2f} ms over bare {np.median(bare) * 1e3:.2f} ms, "
            f"median ratio {np.median(ratio):.2f} (from {min(ratio):.2f} to {max(ratio):.2f})"
        )


if __name__ == "__main__":
    main()
