"""Each jump's own designs measured for every gravity, step and grain, block by block of gravities.

What flies does not know how fast one runs nor at which step aims are judged: each distinct (gravity·factor,
launch_speed, grain, fall_factor, terminal_speed) is flown once at every step in question.
"""

from __future__ import annotations

from collections import OrderedDict
from collections.abc import Callable, Iterator
from contextlib import closing
from dataclasses import dataclass, replace
from typing import TYPE_CHECKING, TypeVar

import numpy as np

from designer.brief.model import Brief, Ceiling, Ledge
from designer.motion.batch import fly_many
from designer.motion.closed_form import has_closed_form
from designer.motion.jumps import LONGEST_FLIGHT
from designer.motion.measures import OF_FLIGHT
from designer.objective.score import nine_digits, parts
from designer.objective.table import Designs, Fly, extremes, kinematics, scalars
from designer.search.evaluate import DOUBTFUL, WORTH_COMPILING
from designer.search.progress import Progress
from designer.search.scan import BLOCK_JUMPS, in_order
from designer.search.several.assign import Jump, SeveralSpace, jumps_and_groups
from designer.search.space import values

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

T = TypeVar("T")

BLOCK_DESIGNS = 400_000
"""Own designs of all jumps in a block, at most where one gravity has fewer."""
KEPT_DESIGNS = 6_000_000
"""So many own designs stay in memory, 40 bytes each; the others are measured again where they are wanted."""
MOTION = ("launch_speed", "fall_factor", "terminal_speed", "gravity_factor")
"""What decides a flight beside gravity, step and grain."""
WITHOUT_RUN = {*OF_FLIGHT, "step_top", "flip_margin"}
"""Measures that do not ask how fast one runs."""


@dataclass(frozen=True, slots=True)
class Measured:
    """One jump's own designs in a block: arrays (cells, own designs), a cell a (gravity, step, grain)."""

    squares: Floats
    spreads: Floats
    violation: Floats
    """Infinite where the jump never lands; the sums are 0 there."""
    worst: Floats
    """To nine significant digits."""
    shortfalls: Floats | None
    """(cells, own designs, features of the view), length; only where asked for."""


@dataclass(frozen=True, slots=True)
class _Motions:
    """One jump's distinct flights and run speeds, and which of them each own design has."""

    distinct: Floats
    """(motions, 4) in the order of MOTION."""
    motion: NDArray[np.int64]
    """(own designs,)."""
    runs: Floats
    """The run speeds that matter, distinct."""
    run: NDArray[np.int64]


def _needs_run(view: Brief) -> bool:
    measures = {target.measure for jump in view.jumps for target in jump.targets}
    level = any(not isinstance(feature, (Ledge, Ceiling)) for feature in view.features)
    return level or bool(measures - WITHOUT_RUN)


def _motions(jump: Jump) -> _Motions:
    stacked = np.column_stack([jump.own[name] for name in MOTION])
    distinct, motion = np.unique(stacked, axis=0, return_inverse=True)
    runs = jump.own["run_speed"]
    if not _needs_run(jump.view):
        runs = np.full(jump.count, runs[0])
    speeds, run = np.unique(runs, return_inverse=True)
    return _Motions(distinct, motion.reshape(-1), speeds, run.reshape(-1))


class Measurer:
    """Measures a grid of several jumps; remembers blocks while they fit into memory."""

    def __init__(
        self,
        brief: Brief,
        space: SeveralSpace,
        *,
        workers: int = 1,
        fly: Fly = fly_many,
        keep: int | None = None,
    ) -> None:
        self.brief, self.space, self.workers, self._fly = brief, space, workers, fly
        self.jumps, self.groups = jumps_and_groups(space)
        self._motions = [_motions(jump) for jump in self.jumps]
        self.gravities, self.nominals, self.grains = (
            values(space.shared(name)) for name in ("gravity", "step", "grain")
        )
        supported = [rate.step for rate in brief.rates.supported]
        nominal = [brief.aim_at.step] if brief.aim_at is not None else self.nominals.tolist()
        self.steps = np.array(sorted({*supported, *nominal}))
        self._supported = [self.steps.tolist().index(h) for h in supported]
        self._nominal = [self.steps.tolist().index(h) for h in nominal]
        per_gravity = len(self.grains) * sum(len(one.distinct) for one in self._motions) * len(self.steps)
        fits = BLOCK_JUMPS // per_gravity, BLOCK_DESIGNS // max(1, self.cells_per_gravity * self.own_count)
        self._height = max(1, min(*fits, len(self.gravities)))
        self._kept: OrderedDict[int, tuple[Measured, ...]] = OrderedDict()
        keep = KEPT_DESIGNS if keep is None else keep
        self._room = max(2, keep // max(1, self._height * self.cells_per_gravity * self.own_count))
        # Block by block the work looks small; what counts is the whole.
        self._compiled = True if self.steps_to_simulate() > WORTH_COMPILING else None

    @property
    def own_count(self) -> int:
        """How many own designs all jumps have together, for one gravity, step and grain."""
        return sum(jump.count for jump in self.jumps)

    @property
    def cells_per_gravity(self) -> int:
        """How many (step, grain) there are."""
        return len(self.nominals) * len(self.grains)

    @property
    def cell_count(self) -> int:
        """How many (gravity, step, grain) there are; cells count in this order, the grain fastest."""
        return len(self.gravities) * self.cells_per_gravity

    @property
    def flights(self) -> int:
        """How many jumps are to be flown in all, each at one step."""
        motions = sum(len(one.distinct) for one in self._motions)
        return len(self.gravities) * len(self.grains) * len(self.steps) * motions

    def steps_to_simulate(self) -> float:
        """Estimate from the unrounded jump how many steps a scan must simulate, closed forms set aside."""
        total = 0.0
        share = np.where(has_closed_form(self.brief.rule, self.grains), DOUBTFUL, 1.0)
        for jump, one in zip(self.jumps, self._motions, strict=True):
            launch, fall, _, factor = one.distinct.T
            with np.errstate(divide="ignore"):
                flight = np.mean(1.0 / self.gravities) * np.mean(
                    launch / factor * (1.0 + 1.0 / np.sqrt(fall))
                )
            stepped = 1.0 if jump.view.jumps[0].second is not None else float(np.mean(share))
            steps = float(np.sum(min(float(flight), LONGEST_FLIGHT) / self.steps))
            levels = 1 + len({gap.far_level for gap in jump.view.gaps} - {0.0})
            total += stepped * levels * steps * len(one.distinct)
        return total * len(self.gravities) * len(self.grains)

    @property
    def starts(self) -> range:
        """The first gravity of each block, as its place on the axis."""
        return range(0, len(self.gravities), self._height)

    def cells_of(self, start: int) -> range:
        """Return the cells of the block that starts at a gravity."""
        stop = min(start + self._height, len(self.gravities))
        return range(start * self.cells_per_gravity, stop * self.cells_per_gravity)

    def at(self, cell: int) -> tuple[int, int, int]:
        """Return the places of a cell on the axes gravity, step and grain."""
        rest, grain = divmod(cell, len(self.grains))
        gravity, step = divmod(rest, len(self.nominals))
        return gravity, step, grain

    def measure(self, start: int, *, shortfalls: bool = False) -> tuple[Measured, ...]:
        """Measure every jump in the block that starts at a gravity."""
        gravities = self.gravities[start : start + self._height]
        pairs = zip(self.jumps, self._motions, strict=True)
        return tuple(self._measure(jump, motions, gravities, shortfalls) for jump, motions in pairs)

    def _measure(self, jump: Jump, motions: _Motions, gravities: Floats, shortfalls: bool) -> Measured:
        view = jump.view
        size = (len(gravities), len(self.nominals), len(self.grains), jump.count)
        short = np.empty((*size, len(view.features))) if shortfalls else None
        out = Measured(np.empty(size), np.empty(size), np.empty(size), np.empty(size), short)
        jumps = len(gravities) * len(self.grains) * len(self.steps)
        height = max(1, BLOCK_JUMPS // jumps)
        for start in range(0, len(motions.distinct), height):
            self._fly_some(jump, motions, gravities, slice(start, start + height), out)
        flat = (-1, jump.count)
        squares = out.squares.reshape(flat)
        return Measured(
            squares,
            out.spreads.reshape(flat),
            out.violation.reshape(flat),
            out.worst.reshape(flat),
            None if short is None else short.reshape(len(squares), jump.count, len(view.features)),
        )

    def _fly_some(self, jump: Jump, motions: _Motions, gravities: Floats, some: slice, out: Measured) -> None:
        """Fly some of a jump's distinct motions and put down what all own designs with them add."""
        distinct = motions.distinct[some]
        within = (motions.motion >= some.start) & (motions.motion < some.stop)
        shape = (len(gravities), len(self.grains), len(distinct))
        g, q, m = (place.reshape(-1) for place in np.indices(shape))
        launch, fall, terminal, factor = distinct[m].T
        flown = Designs(
            gravities[g],
            launch,
            np.full(len(g), np.nan),
            self.grains[q],
            np.zeros(len(g)),
            fall,
            terminal,
            factor,
        )
        view = jump.view
        kin = kinematics(view, flown.launches(self.steps), compiled=self._compiled, fly=self._fly)
        for r, run in enumerate(motions.runs):
            mine = np.flatnonzero(within & (motions.run == r))
            if not len(mine):
                continue
            which = motions.motion[mine] - some.start
            for s, nominal in enumerate(self._nominal):
                designs = replace(
                    flown, step=np.full(len(g), self.nominals[s]), run_speed=np.full(len(g), run)
                )
                tables = extremes(view, kin, nominal, self._supported, scalars(view, designs))
                found = parts(view, tables)
                for target, added, stuck in (
                    (out.squares, found.squares, 0.0),
                    (out.spreads, found.spreads, 0.0),
                    (out.violation, found.violation, np.inf),
                    (out.worst, nine_digits(found.worst), np.inf),
                ):
                    target[:, s, :, mine] = _rows(np.where(found.lands, added, stuck), shape, which)
                if out.shortfalls is not None:
                    held = np.where(found.lands[:, None], found.shortfalls, np.inf)
                    for k in range(held.shape[1]):
                        out.shortfalls[:, s, :, mine, k] = _rows(held[:, k], shape, which)

    def every_block(
        self,
        reduce: Callable[[tuple[Measured, ...]], T],
        progress: Progress,
        stage: str,
        *,
        shortfalls: bool = False,
    ) -> Iterator[T]:
        """Yield what `reduce` makes of each block's tables, in order; what fits into memory is kept."""

        def work(start: int) -> tuple[int, tuple[Measured, ...] | None, T]:
            tables = self._kept.get(start)
            if tables is None or shortfalls:
                tables = self.measure(start, shortfalls=shortfalls)
            return start, None if shortfalls else tables, reduce(tables)

        blocks = in_order(work, self.starts, self.workers, progress, stage)
        with closing(blocks):  # an interruption stops the threads at once
            for start, tables, reduced in blocks:
                if tables is not None and len(self._kept) < self._room:
                    self._kept[start] = tables
                yield reduced

    def block_of(self, cell: int) -> tuple[tuple[Measured, ...], int]:
        """Return the tables of the block that holds a cell, and the cell's row in it."""
        gravity = cell // self.cells_per_gravity
        start = gravity - gravity % self._height
        if start in self._kept:
            self._kept.move_to_end(start)
        else:
            if len(self._kept) >= self._room:
                self._kept.popitem(last=False)
            self._kept[start] = self.measure(start)
        return self._kept[start], cell - self.cells_of(start).start


def _rows(of_flights: Floats, shape: tuple[int, ...], which: NDArray[np.int64]) -> Floats:
    """Return (own designs, gravities, grains) of (gravities × grains × motions,)."""
    return np.moveaxis(of_flights.reshape(shape)[:, :, which], 2, 0)
