"""How long the ways to search take on one brief, and how good what they find is.

    python tests/benchmarks/bench_search.py [--seeds 3] [--trials 600] [--workers 2]

The brief: 2.55 million designs at 8 rates (tests/reference/search_briefs.py). One run, one table: the scan
with the closed form, the scan with every jump stepped by the compiled kernel, plain Python stepping
extrapolated from a sample, Optuna's TPE alone, and the study as `search` runs it (seeds, TPE, refinement).
"Success" counts the seeds that come within 1 % of the certified cost.
"""

from __future__ import annotations

import argparse
import statistics
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from designer.brief.model import Brief
from designer.motion.jumps import Launches
from designer.motion.simulate import simulate
from designer.search.evaluate import Evaluator, penalised
from designer.search.found import by_study
from designer.search.progress import Silent
from designer.search.run import search
from designer.search.scan import plan, scan
from designer.search.space import Space, build_space
from designer.search.study import BATCH, _suggest
from tests.reference.search_briefs import millions

NEAR = 1.01


def timed(work: Callable[[], Any]) -> tuple[float, Any]:
    start = time.perf_counter()
    result = work()
    return time.perf_counter() - start, result


def step_all(*given: Any, count_near_apex: bool = False, **options: Any) -> Any:
    return simulate(*given, **options | {"compiled": True})


def plain_seconds(brief: Brief, space: Space, sample: int = 300) -> float:
    """Extrapolate stepping every jump in plain Python from a sample."""
    layout = plan(brief, space)
    rng = np.random.default_rng(0)
    designs = space.designs(rng.integers(0, space.size, sample))
    launches: Launches = designs.launches(layout.steps)
    seconds, _ = timed(lambda: simulate(brief.rule, launches, compiled=False))
    return seconds / sample * layout.flights


def tpe_alone(brief: Brief, space: Space, seed: int, trials: int) -> float:
    """Return the best cost of TPE without seeds from physics and without refinement."""
    import optuna

    optuna.logging.set_verbosity(optuna.logging.WARNING)
    evaluator = Evaluator(brief, space, expected=trials)
    study = optuna.create_study(sampler=optuna.samplers.TPESampler(seed=seed))
    for start in range(0, trials, BATCH):
        asked = [study.ask() for _ in range(min(BATCH, trials - start))]
        rows = evaluator.tidy(np.array([_suggest(trial, space) for trial in asked]))
        for trial, value in zip(asked, penalised(evaluator(rows)), strict=True):
            study.tell(trial, min(float(value), 1e6))
    return float(np.min(penalised(evaluator.everything()[1])))


def main() -> None:
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])  # type: ignore[union-attr]
    parser.add_argument("--seeds", type=int, default=3)
    parser.add_argument("--trials", type=int, default=600)
    parser.add_argument("--workers", type=int, default=2)
    options = parser.parse_args()
    brief = millions()
    space = build_space(brief)
    simulate(
        brief.rule, space.designs(np.array([0])).launches(np.array([0.004])), compiled=True
    )  # load Numba
    rows: list[tuple[str, float, float, str]] = []

    def scans(name: str, **how: Any) -> float:
        seconds, found = timed(lambda: scan(brief, space, **how))
        rows.append((name, seconds, found.leaders.best_cost, "certified"))
        return float(found.leaders.best_cost)

    best = scans("scan, closed form, 1 worker")
    scans(f"scan, closed form, {options.workers} workers", workers=options.workers)
    scans("scan, every jump stepped (compiled), 1 worker", fly=step_all)
    rows.append(
        ("scan, plain Python stepping (extrapolated)", plain_seconds(brief, space), best, "certified")
    )
    seconds, result = timed(lambda: search(brief, workers=options.workers))
    rows.append(("whole search with shortlist and verdicts", seconds, result.best.verdict.cost, "certified"))

    def repeated(name: str, run: Callable[[int], float]) -> None:
        seconds, costs = zip(*(timed(lambda s=seed: run(s)) for seed in range(options.seeds)), strict=True)
        hits = sum(cost <= NEAR * best for cost in costs)
        rows.append(
            (name, statistics.median(seconds), statistics.median(costs), f"{hits} of {options.seeds}")
        )

    repeated(
        f"Optuna TPE alone, {options.trials} trials",
        lambda seed: tpe_alone(brief, space, seed, options.trials),
    )
    repeated(
        f"study: seeds, TPE ({options.trials}), refinement",
        lambda seed: (
            by_study(
                brief, space, seed=seed, trials=options.trials, objectives=(), workers=1, progress=Silent()
            ).leaders.best_cost
        ),
    )
    print(f"{space.size:,} designs × {len(brief.rates.supported)} rates; certified cost {best:.6f}\n")
    print(f"{'way':<48} {'seconds':>9} {'cost':>10} {'above best':>11}  success")
    for name, seconds, cost, success in rows:
        print(f"{name:<48} {seconds:>9.2f} {cost:>10.6f} {100 * (cost / best - 1):>9.1f} %  {success}")


if __name__ == "__main__":
    main()
