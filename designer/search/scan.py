"""The exhaustive scan: every design of the grid at every rate, and so a certificate.

What flies does not know how fast one runs nor at which step aims are judged. So each distinct (gravity,
launch_speed, grain, fall_factor, terminal_speed) is flown once at every step in question, block by block, and
the designs are put together from that.
"""

from __future__ import annotations

import math
from collections import deque
from collections.abc import Callable, Generator, Iterator, Sequence
from concurrent.futures import Future, ThreadPoolExecutor
from contextlib import closing
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, TypeVar

import numpy as np

from designer.brief.model import Brief, Loop
from designer.motion.batch import fly_many
from designer.motion.closed_form import has_closed_form
from designer.motion.jumps import LONGEST_FLIGHT
from designer.motion.rule import SEARCHABLE
from designer.objective.score import Scores, score
from designer.objective.table import Designs, Fly, JumpTable, extremes, kinematics, scalars
from designer.search.conflict import failing_patterns, least_sums
from designer.search.evaluate import DOUBTFUL, WORTH_COMPILING
from designer.search.progress import Progress, Silent
from designer.search.ranking import NO_ROWS, Leaders, Rows, absorb, cells, contenders, join, rows_of
from designer.search.result import Certificate, RunnerUp
from designer.search.space import Space, values

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Ints = NDArray[np.int64]
    Floats = NDArray[np.float64]

T = TypeVar("T")

MOTION = ("gravity", "launch_speed", "grain", "fall_factor", "terminal_speed")
"""What decides a flight at a given step."""
BLOCK_JUMPS = 200_000
"""Jumps flown at a time: small enough for the caches, large enough for NumPy."""


@dataclass(frozen=True, slots=True)
class Plan:
    """A grid laid out for scanning."""

    space: Space
    steps: Floats
    """Every distinct step in question, seconds, (columns,)."""
    supported: tuple[int, ...]
    """The columns of the supported rates."""
    nominals: tuple[int, ...]
    """The column at which aims are judged, for each point of the step axis."""

    @property
    def motion_shape(self) -> tuple[int, ...]:
        """How many points each axis of MOTION has."""
        return tuple(len(self.space.axis(name).points or ()) for name in MOTION)

    @property
    def flights(self) -> int:
        """How many constants must be flown, each at every step."""
        return int(np.prod(self.motion_shape, dtype=np.int64))

    def block_starts(self) -> range:
        """Return where each block of flights starts."""
        return range(0, self.flights, max(1, BLOCK_JUMPS // len(self.steps)))


def plan(brief: Brief, space: Space) -> Plan:
    """Lay out a grid for scanning."""
    supported = [rate.step for rate in brief.rates.supported]
    nominal = [brief.aim_at.step] if brief.aim_at is not None else list(space.axis("step").points or ())
    steps = sorted({*supported, *nominal})
    return Plan(
        space,
        np.array(steps),
        tuple(steps.index(h) for h in supported),
        tuple(steps.index(h) for h in nominal),
    )


def steps_to_simulate(brief: Brief, layout: Plan) -> float:
    """Estimate from the unrounded jump how many steps a scan must simulate, closed forms set aside."""
    gravity, launch, grain, fall = (values(layout.space.axis(name)) for name in MOTION[:4])
    with np.errstate(divide="ignore"):
        flight = np.mean(1.0 / gravity) * np.mean(launch) * np.mean(1.0 + 1.0 / np.sqrt(fall))
    steps = float(np.sum(min(float(flight), LONGEST_FLIGHT) / layout.steps))
    share = float(np.mean(np.where(has_closed_form(brief.rule, grain), DOUBTFUL, 1.0)))
    levels = 1 + len({gap.far_level for gap in brief.gaps} - {0.0})
    return share * levels * layout.flights * steps


@dataclass(frozen=True, slots=True)
class Batch:
    """Designs that share step and run speed, tabled and scored."""

    index: Ints
    designs: Designs
    tables: tuple[JumpTable, ...]
    scores: Scores
    cell: Ints
    """Designs with the same cell look alike to a designer."""


def batches(
    brief: Brief, layout: Plan, start: int, compiled: bool | None = None, fly: Fly = fly_many
) -> Iterator[Batch]:
    """Fly one block and yield its designs, a batch for each nominal step and run speed."""
    space = layout.space
    stop = min(start + layout.block_starts().step, layout.flights)
    at = dict(zip(MOTION, np.unravel_index(np.arange(start, stop), layout.motion_shape), strict=True))
    count = stop - start
    still = np.zeros(count, dtype=np.intp)
    chosen = {name: values(space.axis(name))[at.get(name, still)] for name in SEARCHABLE}
    flown = Designs(**chosen)
    kin = kinematics(brief, flown.launches(layout.steps), compiled=compiled, fly=fly)
    steps, runs = values(space.axis("step")), values(space.axis("run_speed"))
    for j, run in enumerate(runs):
        cell = cells_of(replace(flown, run_speed=np.full(count, run)))
        for i, nominal in enumerate(layout.nominals):
            designs = replace(flown, step=np.full(count, steps[i]), run_speed=np.full(count, run))
            place = at | {"step": still + i, "run_speed": still + j}
            index = np.ravel_multi_index([place[name] for name in SEARCHABLE], space.shape)
            tables = extremes(brief, kin, nominal, layout.supported, scalars(brief, designs))
            yield Batch(index.astype(np.int64), designs, tables, score(brief, tables), cell)


def only_numbers(brief: Brief, designs: Designs) -> NDArray[np.bool_]:
    """Return which designs keep today's step and grain, so that only numbers change."""
    today = brief.today
    if today is None:
        return np.zeros(len(designs.grain), dtype=bool)
    same = np.asarray(designs.grain == today.grain)
    return same if brief.loop is Loop.EACH_FRAME else same & (designs.step == today.step)


def cells_of(designs: Designs) -> Ints:
    """Return the cells in which designs lie, by what moves their measures most."""
    return cells(
        designs.gravity, designs.launch_speed, designs.run_speed, designs.fall_factor, designs.terminal_speed
    )


def in_order(
    work: Callable[[int], T], starts: range, workers: int, progress: Progress, stage: str
) -> Generator[T, None, None]:
    """Yield work(start) for each block, in order, with a few blocks under way in each worker thread."""
    if workers <= 1 or len(starts) == 1:
        for done, start in enumerate(starts):
            yield work(start)
            progress.update(stage, done + 1, len(starts))
        return
    pool = ThreadPoolExecutor(workers)
    try:
        waiting: deque[Future[T]] = deque()
        done = 0
        for start in starts:
            waiting.append(pool.submit(work, start))
            if len(waiting) > 2 * workers:
                yield waiting.popleft().result()
                done += 1
                progress.update(stage, done, len(starts))
        while waiting:
            yield waiting.popleft().result()
            done += 1
            progress.update(stage, done, len(starts))
    finally:
        pool.shutdown(wait=True, cancel_futures=True)


@dataclass(frozen=True, slots=True)
class Scan:
    """What a scan found."""

    leaders: Leaders
    evaluated: int
    certificate: Certificate
    failing: frozenset[int]
    """Which features fail together, as bits, in designs that land; told only where nothing is feasible."""


def scan(
    brief: Brief,
    space: Space,
    *,
    workers: int = 1,
    progress: Progress | None = None,
    fly: Fly = fly_many,
) -> Scan:
    """Score every design of a grid; neither the number of workers nor their pace changes the result.

    `fly` measures the jumps; the stepper in its place gives a scan without closed form, to compare.
    """
    layout = plan(brief, space)
    leaders = Leaders()
    # Block by block the work looks small; what counts is the whole.
    compiled = True if steps_to_simulate(brief, layout) > WORTH_COMPILING else None

    def work(start: int) -> tuple[int, Rows, set[int]]:
        so_far, kept, count = leaders, [NO_ROWS], 0
        patterns: set[int] = set()
        for batch in batches(brief, layout, start, compiled, fly):
            rows = rows_of(batch.scores, batch.index, only_numbers(brief, batch.designs), batch.cell)
            kept.append(contenders(so_far, rows))
            count += len(rows)
            if not len(so_far.feasible):
                patterns |= failing_patterns(batch.scores)
        return count, join(kept), patterns

    evaluated = 0
    failing: set[int] = set()
    blocks = in_order(work, layout.block_starts(), workers, progress or Silent(), "Scanning the grid")
    with closing(blocks):  # an interruption stops the threads at once
        for count, rows, patterns in blocks:
            leaders = absorb(leaders, rows)
            evaluated += count
            failing |= patterns
    return Scan(
        leaders,
        evaluated,
        _certificate(brief, space, leaders, evaluated),
        frozenset() if len(leaders.feasible) else frozenset(failing),
    )


def least_shortfalls(
    brief: Brief,
    space: Space,
    sets: Sequence[Sequence[int]],
    *,
    workers: int = 1,
    progress: Progress | None = None,
) -> list[float]:
    """Return for each set of features the least sum of shortfalls that any design reaches, length."""
    layout = plan(brief, space)
    compiled = True if steps_to_simulate(brief, layout) > WORTH_COMPILING else None

    def work(start: int) -> list[float]:
        found = [
            least_sums(batch.scores.shortfalls, sets) for batch in batches(brief, layout, start, compiled)
        ]
        return [min(column) for column in zip(*found, strict=True)]

    least = [math.inf] * len(sets)
    blocks = in_order(work, layout.block_starts(), workers, progress or Silent(), "Looking for what clashes")
    with closing(blocks):
        for found in blocks:
            least = [min(pair) for pair in zip(least, found, strict=True)]
    return least


def _certificate(brief: Brief, space: Space, leaders: Leaders, evaluated: int) -> Certificate:
    second = leaders.ranked.take(np.array([1] if len(leaders.ranked) > 1 else [], dtype=np.int64))
    runner_up = None
    if len(second):
        constants = space.designs(second.index).constants(0, brief)
        runner_up = RunnerUp(constants, float(second.cost[0]), float(second.violation[0]))
    return Certificate(
        kind="grid",
        method="enumerated",
        grid_points=space.size,
        evaluated=evaluated,
        complete=evaluated == space.size,
        grid_hash=space.grid_hash(brief.rule),
        runner_up=runner_up,
    )
