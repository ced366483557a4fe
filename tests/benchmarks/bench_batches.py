"""Time and quality of whole batches: 500 made ones of 25 lines, each rechecked and put to an independent solver.

Run: python -m tests.benchmarks.bench_batches [BATCHES]. The time allowed is the program's own, 1.5 s a batch. Half of
the batches have scales alone, in three kinds by how many of their 20 limits stand at the very value of the mix: 4, 8
and 12. The other half have it all: two liquids on meters, a premix opened into its parts, two of which are lines
already, and mostly rework, made through the road that a mill's batches take. Last the whole job of such a batch is
timed, from the answer to the batch with its cautions, as the window asks for it.
"""

from __future__ import annotations

import sys
import time
from collections import Counter
from dataclasses import dataclass

import numpy as np

from blendapp.optimise.steps.problem import Order
from blendapp.optimise.steps.search import NoBatch, whole_batch
from blendapp.services.batch import make_batch
from tests.mills import TODAY
from tests.optimise import made_batches
from tests.optimise.orders import order
from tests.optimise.whole_batch_check import check_none_better, recheck

BINDING = (4, 8, 12)
ALL = "meters, an opened premix, rework"
JOBS = 50


@dataclass(frozen=True)
class Found:
    kind: str
    seconds: float
    worked: float
    gaps: list[float]
    unproven: list[str]
    error_kg: float
    broken: int


def made(seed: int) -> tuple[str, Order]:
    """The kind and the batch of a seed."""
    if seed % 2:
        return ALL, made_batches.order(made_batches.made(seed, lines=24, tight=(2, 5, 8)[seed // 2 % 3]))
    binding = BINDING[seed // 2 % len(BINDING)]
    return f"scales alone, {binding} of 20 limits binding", order(seed, lines=25, limits=20, binding=binding)


def main(batches: int = 500) -> None:
    """Print the figures of each kind and of all."""
    everything: list[Found] = []
    proofs: Counter[str] = Counter()
    for seed in range(batches):
        kind, one = made(seed)
        start, spent = time.perf_counter(), time.process_time()
        found = whole_batch(one)
        seconds, worked = time.perf_counter() - start, time.process_time() - spent
        assert not isinstance(found, NoBatch), (seed, found)
        recheck(one, found)
        proofs.update(check_none_better(one, found, time_limit_s=2.0))
        gaps = [stage.gap / max(abs(stage.value), 1e-9) for stage in found.stages]
        unproven = [stage.aim for stage in found.stages if not stage.proven]
        everything.append(Found(kind, seconds, worked, gaps, unproven, float(found.error_kg), len(found.broken)))
    for wanted in (*sorted({one.kind for one in everything}), ""):
        show(wanted or "all", [one for one in everything if wanted in (one.kind, "")])
    print(
        f"none better, by the independent solver: total {proofs['total']}, limits {proofs['limits']}, "
        f"not decided {proofs['not proven']}"
    )
    jobs(min(JOBS, batches))


def show(kind: str, some: list[Found]) -> None:
    """The figures of one kind."""
    times = np.array([one.seconds for one in some])
    spread = np.array([one.gaps for one in some])
    worked = np.array([one.worked for one in some])
    unproven = Counter(aim for one in some for aim in one.unproven)
    print(
        f"{kind}: {len(some)} batches, median {np.median(times):.2f} s, 95th in a hundred "
        f"{np.quantile(times, 0.95):.2f} s, worst {times.max():.2f} s; work of the processor median "
        f"{np.median(worked):.2f} s, worst {worked.max():.2f} s"
    )
    print(
        f"  error of the total: median {np.median([one.error_kg for one in some]) * 1000:.3f} g, worst "
        f"{max(one.error_kg for one in some) * 1000:.3f} g; limits broken: median "
        f"{np.median([one.broken for one in some]):.0f}, worst {max(one.broken for one in some)}"
    )
    for at, aim in enumerate(("total", "limits", "deviation", "cost")):
        print(
            f"  {aim}: not proven best {unproven[aim]}, relative gap median {np.median(spread[:, at]):.4f}, "
            f"worst {spread[:, at].max():.4f}"
        )


def jobs(count: int) -> None:
    """From an answer to the batch with its cautions, yield and what is made first, as the window asks for it."""
    times = []
    for seed in range(count):
        one = made_batches.made(seed, lines=24, tight=5)
        answer = made_batches.answer(one)
        start = time.perf_counter()
        batch = make_batch(one.library, one.feed.id, one.batch_kg, TODAY, result=answer, rework=one.rework)
        times.append(time.perf_counter() - start)
        assert batch.cause is None, batch.cause
    print(
        f"the whole job of {count} batches with {ALL}: median {np.median(times):.2f} s, worst {max(times):.2f} s"
    )


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 500)
