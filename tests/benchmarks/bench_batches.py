"""Time and quality of whole batches: 500 made ones of 25 lines, each rechecked and put to an independent solver.

Run: python -m tests.benchmarks.bench_batches [BATCHES]. The time allowed is the program's own, 1.5 s a batch. The
batches come in three kinds by how many of their 20 limits stand at the very value of the mix: 4, 8 and 12.
"""

from __future__ import annotations

import sys
import time
from collections import Counter

import numpy as np

from blendapp.optimise.steps.search import NoBatch, whole_batch
from tests.optimise.orders import order
from tests.optimise.whole_batch_check import check_none_better, recheck

BINDING = (4, 8, 12)


def main(batches: int = 500) -> None:
    """Print the figures of each kind and of all."""
    everything: list[tuple[int, float, list[float], list[str]]] = []
    worked: list[float] = []
    proofs: Counter[str] = Counter()
    for seed in range(batches):
        kind = BINDING[seed % len(BINDING)]
        made = order(seed, lines=25, limits=20, binding=kind)
        start, spent = time.perf_counter(), time.process_time()
        found = whole_batch(made)
        seconds = time.perf_counter() - start
        worked.append(time.process_time() - spent)
        assert not isinstance(found, NoBatch), (seed, found)
        recheck(made, found)
        proofs.update(check_none_better(made, found, time_limit_s=2.0))
        gaps = [stage.gap / max(abs(stage.value), 1e-9) for stage in found.stages]
        everything.append((kind, seconds, gaps, [stage.aim for stage in found.stages if not stage.proven]))
    for wanted in (*BINDING, 0):
        some = [one for one in everything if wanted in (one[0], 0)]
        times = np.array([seconds for _k, seconds, _g, _u in some])
        spread = np.array([gaps for _k, _s, gaps, _u in some])
        unproven = Counter(aim for _k, _s, _g, aims in some for aim in aims)
        name = f"{wanted} of 20 limits binding" if wanted else "all"
        print(
            f"{name}: {len(some)} batches of 25 lines, median {np.median(times):.2f} s, 95th in a hundred "
            f"{np.quantile(times, 0.95):.2f} s, worst {times.max():.2f} s"
        )
        for at, aim in enumerate(("total", "limits", "deviation", "cost")):
            print(
                f"  {aim}: not proven best {unproven[aim]}, relative gap median {np.median(spread[:, at]):.4f}, "
                f"worst {spread[:, at].max():.4f}"
            )
    print(
        f"work of the processor a batch: median {np.median(worked):.2f} s, 95th in a hundred "
        f"{np.quantile(worked, 0.95):.2f} s, worst {max(worked):.2f} s"
    )
    print(
        f"none better, by the independent solver: total {proofs['total']}, limits {proofs['limits']}, "
        f"not decided {proofs['not proven']}"
    )


if __name__ == "__main__":
    main(int(sys.argv[1]) if len(sys.argv) > 1 else 500)
