"""The separated scan: every own design of every jump measured once, and the best of all sets proved.

With gravity, step and grain fixed, what the jumps add to the two sums of squares is independent (a group at a
time, where links tie them). So a billion sets follow from some ten thousand measured designs.
"""

from __future__ import annotations

import math
from collections.abc import Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.motion.batch import fly_many
from designer.objective.score import nine_digits
from designer.objective.table import Fly, weights
from designer.search.progress import Progress, Silent
from designer.search.result import Certificate, RunnerUp
from designer.search.several.assign import SeveralSpace
from designer.search.several.cell import Cell
from designer.search.several.exact import (
    Allow,
    Chooser,
    Chosen,
    Placed,
    Wanted,
    clean,
    feasible,
    landing,
    on_target,
)
from designer.search.several.fronts import Price, least_cost, supports
from designer.search.several.gather import front_of_sets, pool_of_sets
from designer.search.several.measure import Measured, Measurer

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Ints = NDArray[np.int64]
    Mask = NDArray[np.bool_]

MOST_LINES = 40_000
"""Supports worked out at a time, (cells × link combinations): small enough for the memory."""


@dataclass(frozen=True, slots=True)
class _Summary:
    """What a block leaves behind."""

    lines: NDArray[np.float32]
    """The supports of feasible sets, (cells, SUPPORTS), a hair low; short numbers, as there may be many."""
    bound: Floats
    """A lower bound on what a feasible set costs, (cells,)."""
    strict_bound: Floats
    """The same of sets on target."""
    strict_spreads: Floats
    """The least sum of spreads of a set on target, (cells,)."""
    alone: tuple[float, ...]
    """The least cost of each jump by itself; infinite where it has no feasible design."""


@dataclass(frozen=True, slots=True)
class SeveralScan:
    """What a separated scan found."""

    best: Placed | None
    runner_up: Placed | None
    nearest: Placed | None
    """Where nothing is feasible: the lowest cost + violation."""
    proved: bool
    """Whether the nearest, too, is proved."""
    numbers: Placed | None
    """The best that keeps today's step and grain."""
    steady: Placed | None
    """The lowest rate spread among sets on target."""
    front: tuple[Chosen, ...]
    """Not dominated in (miss, rate spread) of nine digits, by miss."""
    pool: tuple[Chosen, ...]
    """Unlike sets nearly as good as the best; a selection."""
    alone: tuple[float | None, ...]
    """The best cost that each jump could have by itself."""
    evaluated: int
    """Own designs measured, of all jumps."""
    certificate: Certificate
    chooser: Chooser


def group_supports(measurer: Measurer, tables: Sequence[Measured], allow: Allow) -> Floats:
    """Return the supports of whole sets of allowed designs, (cells, SUPPORTS)."""
    cells = len(tables[0].squares)
    total: Floats | None = None
    for group in measurer.groups:
        height = max(
            1, MOST_LINES // max(group.link_count, *(measurer.jumps[k].link_count for k in group.jumps))
        )
        found = []
        for start in range(0, cells, height):
            lines: Floats | None = None
            for k, projection in zip(group.jumps, group.projections, strict=True):
                mine = _jump_supports(measurer, tables, k, slice(start, start + height), allow)[:, projection]
                lines = mine if lines is None else lines + mine
            if lines is not None:
                found.append(lines.min(axis=1))
        joined = np.concatenate(found)
        total = joined if total is None else total + joined
    if total is None:
        raise ValueError("a brief has at least one jump")
    return total


def _jump_supports(
    measurer: Measurer, tables: Sequence[Measured], number: int, rows: slice, allow: Allow
) -> Floats:
    """Return one jump's supports at each of its links, (cells, links, SUPPORTS)."""
    jump, table = measurer.jumps[number], tables[number]
    part = Measured(table.squares[rows], table.spreads[rows], table.violation[rows], table.worst[rows], None)
    allowed = allow(part)
    shape = (-1, jump.link_count, jump.private_count)
    squares, spreads = (np.where(allowed, one, np.inf) for one in (part.squares, part.spreads))
    return supports(squares.reshape(shape), spreads.reshape(shape))


def _alone(brief: Brief, measurer: Measurer, tables: Sequence[Measured]) -> tuple[float, ...]:
    found = []
    for jump, table in zip(measurer.jumps, tables, strict=True):
        price = Price(weights(jump.view.jumps), brief.rates.spread_weight)
        squares = np.where(feasible(table), table.squares, np.inf)
        found.append(float(price(squares, table.spreads).min()))
    return tuple(found)


def _summary(brief: Brief, measurer: Measurer, price: Price, tables: Sequence[Measured]) -> _Summary:
    lines = group_supports(measurer, tables, feasible)
    strict = group_supports(measurer, tables, on_target)
    return _Summary(
        _lowered(lines),
        least_cost(price, lines),
        least_cost(price, strict),
        strict[:, -1],
        _alone(brief, measurer, tables),
    )


def scan_several(
    brief: Brief,
    space: SeveralSpace,
    *,
    workers: int = 1,
    progress: Progress | None = None,
    fly: Fly = fly_many,
) -> SeveralScan:
    """Find the best of all sets of a grid and prove it; neither workers nor their pace change the result."""
    measurer = Measurer(brief, space, workers=workers, fly=fly)
    price = Price(weights(brief.jumps), brief.rates.spread_weight)

    listen = progress or Silent()
    blocks = list(
        measurer.every_block(
            lambda tables: _summary(brief, measurer, price, tables), listen, "Measuring each jump"
        )
    )
    lines = np.concatenate([one.lines for one in blocks])
    bounds, strict_bounds, strict_spreads = (
        np.concatenate([getattr(one, name) for one in blocks])
        for name in ("bound", "strict_bound", "strict_spreads")
    )
    alone = tuple(
        None if math.isinf(cost) else clean(float(nine_digits(np.array(cost))))
        for cost in (min(column) for column in zip(*(one.alone for one in blocks), strict=True))
    )
    del blocks
    chooser = Chooser(measurer, price)
    listen.update("Adding the jumps up", 0, 5)
    numbers = np.arange(measurer.cell_count)
    all_good = Wanted(numbers, bounds, lambda cell: [chooser.cell(cell, feasible)])
    best = chooser.best_of(all_good)
    listen.update("Adding the jumps up", 1, 5)
    nearest, proved = (None, True) if best is not None else _nearest(chooser, listen)
    runner_up = _runner_up(chooser, all_good, best if best is not None else nearest, best is not None, listen)
    listen.update("Adding the jumps up", 2, 5)
    same = only_numbers(brief, measurer)
    numbers_only = chooser.best_of(all_good.among(same[numbers])) if best is not None else None
    steady = _steady(chooser, strict_bounds, strict_spreads) if best is not None else None
    listen.update("Adding the jumps up", 3, 5)
    front = front_of_sets(chooser, lines, bounds) if best is not None else ()
    listen.update("Adding the jumps up", 4, 5)
    pool = pool_of_sets(chooser, all_good, best) if best is not None else ()
    listen.update("Adding the jumps up", 5, 5)
    return SeveralScan(
        best,
        runner_up,
        nearest,
        proved,
        numbers_only,
        steady,
        front,
        pool,
        alone,
        measurer.cell_count * measurer.own_count,
        _certificate(chooser, runner_up, proved),
        chooser,
    )


def only_numbers(brief: Brief, measurer: Measurer) -> Mask:
    """Return which cells keep today's step and grain, (cells,)."""
    today = brief.jumps[0].today
    if today is None:
        return np.zeros(measurer.cell_count, dtype=bool)
    step = np.ones(len(measurer.nominals), dtype=bool)
    if brief.aim_at is None:
        step = measurer.nominals == today.step
    same = step[:, None] & (measurer.grains == today.grain)
    return np.tile(same.reshape(-1), len(measurer.gravities))


def _certificate(chooser: Chooser, second: Placed | None, proved: bool) -> Certificate:
    space, measurer = chooser.space, chooser.measurer
    runner_up = None
    if second is not None:
        constants = chooser.constants(second.chosen)
        runner_up = RunnerUp(constants, second.cost, float(second.score.violation[0]))
    return Certificate(
        kind="grid",
        method="separated",
        grid_points=space.size,
        evaluated=measurer.cell_count * measurer.own_count,
        complete=proved,
        grid_hash=space.grid_hash(chooser.brief.rule),
        runner_up=runner_up,
    )


def landing_cells(chooser: Chooser, progress: Progress) -> Wanted:
    """Return all sets that land, with bounds on cost + violation."""
    measurer = chooser.measurer

    def summed(tables: tuple[Measured, ...]) -> Floats:
        lines = group_supports(measurer, tables, landing)
        violation = np.zeros(len(lines))
        for group in measurer.groups:
            least = 0.0
            for k, projection in zip(group.jumps, group.projections, strict=True):
                jump = measurer.jumps[k]
                shape = (-1, jump.link_count, jump.private_count)
                least = least + tables[k].violation.reshape(shape).min(axis=2)[:, projection]
            violation += least.min(axis=1)  # type: ignore[attr-defined]
        return np.asarray(least_cost(chooser.price, lines, violation))

    bounds = np.concatenate(list(measurer.every_block(summed, progress, "Looking for the nearest")))
    numbers = np.arange(measurer.cell_count)
    return Wanted(numbers, bounds, lambda cell: [chooser.cell(cell, landing)])


def _nearest(chooser: Chooser, progress: Progress) -> tuple[Placed | None, bool]:
    return chooser.nearest_of(landing_cells(chooser, progress))


def _without(chooser: Chooser, wanted: Wanted, first: Chosen, allow: Allow) -> Wanted:
    """Return the same sets but one."""

    def build(number: int) -> list[Cell]:
        cell = chooser.cell(number, allow)
        return chooser.without(cell, first) if number == first[0] else [cell]

    return Wanted(wanted.cells, wanted.bounds, build)


def _runner_up(
    chooser: Chooser, good: Wanted, first: Placed | None, is_feasible: bool, progress: Progress
) -> Placed | None:
    """Return the second best set: the best that is not the first."""
    if first is None:
        return None
    if is_feasible:
        second = chooser.best_of(_without(chooser, good, first.chosen, feasible))
        if second is not None:
            return second
    wanted = landing_cells(chooser, progress)
    return chooser.nearest_of(_without(chooser, wanted, first.chosen, landing))[0]


def _lowered(lines: Floats) -> NDArray[np.float32]:
    """Return supports as short numbers that are not above them."""
    with np.errstate(over="ignore"):
        short = lines.astype(np.float32)
    return np.where(np.isfinite(lines), np.nextafter(short, np.float32(-np.inf)), np.float32(np.inf))


def _steady(chooser: Chooser, bounds: Floats, spreads: Floats) -> Placed | None:
    """Return the lowest rate spread among sets on target; of equals the cheapest, then the first."""
    least = float(spreads.min())
    if math.isinf(least):
        return None
    spread = clean(float(nine_digits(np.sqrt(np.array(least) / (chooser.price.weight or 1.0)))))
    wanted = Wanted(np.arange(len(bounds)), bounds, lambda cell: [chooser.cell(cell, on_target)])
    return chooser.best_of(wanted.among(spreads <= chooser.spreads_up_to(spread)), spread=spread)
