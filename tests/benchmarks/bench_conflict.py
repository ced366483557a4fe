"""One conflict with its repairs over one bare linprog call on the same, infeasible, program, and over one on the
feasible program that it was made from, in processor time. Run: python -m tests.benchmarks.bench_conflict"""

from __future__ import annotations

import dataclasses
import os
import time

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")  # small matrices: threads only wait for each other

import numpy as np
from scipy.optimize import linprog

from blendapp.optimise.conflicts import conflict
from blendapp.optimise.program import Program
from blendapp.optimise.solve import solve
from tests.benchmarks.bench_answer import bare_call
from tests.benchmarks.feedlike import mix


def impossible(program: Program, seed: int) -> Program:
    """The program with one limit after another asked more than its answer has, until it is infeasible."""
    random = np.random.default_rng(seed)
    solution = solve(program)
    rows = list(program.rows)
    for share in (0.05, 0.15, 0.5):
        for i in random.permutation(len(rows)).tolist():
            row = rows[i]
            if row.limit is None or (row.minimum is not None and row.maximum is not None):
                continue
            value = solution.limits[row.limit].value
            assert value is not None
            if row.maximum is None:
                rows[i] = dataclasses.replace(row, minimum=value * (1 + share))
            else:
                rows[i] = dataclasses.replace(row, maximum=value * (1 - share))
            made = dataclasses.replace(program, rows=tuple(rows))
            if solve(made).status == "infeasible":
                return made
    raise AssertionError("the program stayed feasible")


def main(programs: int = 15) -> None:
    """Print one line a size."""
    for columns, limits in ((100, 40), (300, 80)):
        times, members = [], []
        for seed in range(programs):
            base = mix(columns, limits, seed)
            program = impossible(base, seed)
            feasible, infeasible = bare_call(base), bare_call(program)
            best = []
            for _ in range(3):
                start = time.process_time()
                linprog(**feasible)
                second = time.process_time()
                linprog(**infeasible)
                third = time.process_time()
                found = conflict(program)
                end = time.process_time()
                assert found is not None
                best.append((second - start, third - second, end - third))
            times.append(np.min(best, axis=0))
            members.append(len(found.members))
        bare, bare_infeasible, ours = np.median(times, axis=0) * 1e3
        print(
            f"conflict {columns} x {limits} ({np.median(members):.0f} members): {ours:.2f} ms, median ratio to a bare "
            f"solve of the same program {np.median([t[2] / t[1] for t in times]):.2f} ({bare_infeasible:.2f} ms), of "
            f"the feasible program {np.median([t[2] / t[0] for t in times]):.2f} ({bare:.2f} ms)"
        )


if __name__ == "__main__":
    main()
