"""Answer, both-sided prices with their reach, price ranges and certificate over one bare linprog call, paired.

Run: python -m tests.benchmarks.bench_sensitivity. Processor time, so that other work on the machine does not count.
Degenerate programs have p limits moved exactly onto the values of the optimum, so that p more rows are active than
amounts are in use.
"""

from __future__ import annotations

import dataclasses
import os
import time

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small matrices: threads only wait for each other

import numpy as np
from scipy.optimize import linprog

from blendapp.optimise.certificate import check
from blendapp.optimise.program import Program
from blendapp.optimise.sensitivity import sensitivity
from blendapp.optimise.solve import solve
from tests.benchmarks.bench_answer import bare_call
from tests.benchmarks.feedlike import mix

CASES = (
    (100, 40, 0),
    (300, 80, 0),
    (100, 40, 2),
    (100, 40, 4),
    (100, 40, 8),
    (100, 40, 12),
    (300, 80, 8),
    (300, 80, 12),
)


def degenerate(program: Program, extra: int, seed: int) -> Program:
    """The program with `extra` limits that did not bind moved onto their values at the optimum."""
    random = np.random.default_rng(seed)
    solution = solve(program)
    assert solution.x is not None
    rows = list(program.rows)
    idle = [i for i, row in enumerate(rows) if row.limit is not None and solution.limits[row.limit].binding is None]
    for i in random.permutation(idle)[:extra].tolist():
        row = rows[i]
        value = solution.limits[row.limit].value
        rows[i] = dataclasses.replace(row, **{"minimum" if row.minimum is not None else "maximum": value})
    return dataclasses.replace(program, rows=tuple(rows))


def main(programs: int = 15) -> None:
    """Print one line a case."""
    for columns, limits, extra in CASES:
        ratio, parts, degrees = [], [], []
        for seed in range(programs):
            program = degenerate(mix(columns, limits, seed), extra, seed)
            call = bare_call(program)
            times = []
            for _ in range(3):
                start = time.process_time()
                linprog(**call)
                middle = time.process_time()
                solution = solve(program)
                check(program, solution)
                solved = time.process_time()
                sensitivity(solution)
                end = time.process_time()
                times.append((middle - start, solved - middle, end - solved))
            best = np.min(times, axis=0)
            ratio.append((best[1] + best[2]) / best[0])
            parts.append(best)
            degrees.append(solution.face.degree)
        bare, answer, prices = np.median(parts, axis=0) * 1e3
        print(
            f"prices {columns} x {limits}, {extra} more active limits (p = {min(degrees)} to {max(degrees)}): "
            f"bare {bare:.2f} ms, answer {answer:.2f} ms, prices {prices:.2f} ms, "
            f"median ratio {np.median(ratio):.2f} (to {max(ratio):.2f})"
        )


if __name__ == "__main__":
    main()
