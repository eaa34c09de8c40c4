"""Cost of one jump: closed form, compiled kernel and plain kernel in one run. A script, not a test.

    python tests/benchmarks/bench_closed_form.py [--times N]

Prints ns a jump (the least CPU time of several runs) and how many times the closed form's cost that is. The
grid is 361 gravities by 101 launch speeds by 8 steps; the kernels fly a part of it.
"""

from __future__ import annotations

import argparse
import sys
import time
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

import numpy as np

sys.path.insert(0, str(Path(__file__).resolve().parents[2]))

from designer.motion.closed_form import closed_form
from designer.motion.jumps import Launches
from designer.motion.rule import Integrator, LandingTest, Mode, Place, Rounding, Rule
from designer.motion.simulate import simulate

STEPS_MS = (3, 4, 7, 8, 11, 14, 17, 33)


@dataclass(frozen=True)
class Case:
    """A rule and the constants that go with it."""

    name: str
    rule: Rule
    grain: float = 1.0
    fall_factor: float = 1.0
    terminal_speed: float = np.inf


BEFORE = Rounding(Mode.NEAREST_EVEN, Place.BEFORE_MOVE)
CASES = (
    Case("semi-implicit, grain 1 before the move", Rule(Integrator.SEMI_IMPLICIT, BEFORE)),
    Case("semi-implicit, no grain", Rule(Integrator.SEMI_IMPLICIT), grain=0.0),
    Case("average, grain 1 at the end", Rule(Integrator.AVERAGE)),
    Case("… end-of-step landing", Rule(Integrator.AVERAGE, landing_test=LandingTest.END_OF_STEP)),
    Case("… no gravity in the first step", Rule(Integrator.AVERAGE, launch_gravity=False)),
    Case("… falls at 1.5", Rule(Integrator.AVERAGE), fall_factor=1.5),
    Case(
        "… falls at 1.5, terminal speed 300", Rule(Integrator.AVERAGE), fall_factor=1.5, terminal_speed=300.0
    ),
    Case("average, grain 1 toward zero", Rule(Integrator.AVERAGE, Rounding(Mode.TOWARD_ZERO))),
    Case("average, grain 0.1 (no closed form)", Rule(Integrator.AVERAGE), grain=0.1),
)


def grid(case: Case, every: int) -> Launches:
    """Return every n-th gravity and launch speed at all steps: arrays (designs, 1) and (steps,)."""
    gravity, speed = np.meshgrid(
        np.arange(200.0, 2001.0, 5.0)[::every], np.arange(100.0, 601.0, 5.0)[::every]
    )
    single = (case.grain, case.fall_factor, case.terminal_speed)
    columns = (gravity.reshape(-1, 1), speed.reshape(-1, 1), np.array(STEPS_MS) / 1000.0)
    return Launches(*columns, *(np.asarray(x) for x in single))


def nanoseconds(work: Callable[[], object], jumps: int, times: int) -> float:
    """Return the least CPU time of several runs, for one jump."""
    work()
    best = np.inf
    for _ in range(times):
        start = time.process_time()
        work()
        best = min(best, time.process_time() - start)
    return best / jumps * 1e9


def main() -> None:
    """Print one line a case."""
    options = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    options.add_argument("--times", type=int, default=5, help="runs of which the quickest counts (default 5)")
    count = options.parse_args().times
    print(f"{'':42} {'closed form':>16} {'compiled kernel':>20} {'plain kernel':>20}")
    for case in CASES:
        whole, part, few = grid(case, 1), grid(case, 5), grid(case, 40)
        sizes = [np.prod(np.broadcast_shapes(x.gravity.shape, x.step.shape)) for x in (whole, part, few)]
        _, flagged = closed_form(case.rule, whole)
        form = nanoseconds(lambda c=case, x=whole: closed_form(c.rule, x), sizes[0], count)
        compiled = nanoseconds(lambda c=case, x=part: simulate(c.rule, x, compiled=True), sizes[1], count)
        plain = nanoseconds(lambda c=case, x=few: simulate(c.rule, x, compiled=False), sizes[2], 1)
        print(
            f"{case.name:42} {form:10.0f} ns     {compiled:10.0f} ns {compiled / form:5.0f}x"
            f" {plain:11.0f} ns {plain / form:5.0f}x   flagged {flagged.mean():.1%}"
        )


if __name__ == "__main__":
    main()
