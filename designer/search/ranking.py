"""What a search remembers of the designs that it has scored, in an order that no block or worker can change.

Every list kept here is a minimum, a front, or the first few of a total order; so it does not matter in which
order designs arrive, nor whether a design that cannot make any list was left out before.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import TYPE_CHECKING

import numpy as np

from designer.objective.score import Scores

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Ints = NDArray[np.int64]
    Mask = NDArray[np.bool_]

NEARLY_AS_GOOD = 1.5
"""A design off target counts as nearly as good as the best up to so many times its cost."""
ON_TARGET_SLACK = 1.0
"""A design on target counts as nearly as good up to so many tolerances more in cost."""
STEADY_WITHIN = 2.0
"""Where nothing is on target, the steadiest up to so many times the best cost is shown."""
CELL = 1.025
"""Designs whose constants all lie within this factor share a cell of the pool, which keeps the cheapest."""


@dataclass(frozen=True, slots=True)
class Rows:
    """Scored designs, arrays (designs,)."""

    index: Ints
    """The design's number; the lower one comes first between equals."""
    miss: Floats
    spread: Floats
    cost: Floats
    violation: Floats
    """Infinite where the jump never lands; miss, spread and cost are NaN there."""
    worst: Floats
    numbers: Mask
    """Whether only numbers differ from today (same step and grain)."""
    cell: Ints
    """Designs with the same cell look alike to a designer."""

    def __len__(self) -> int:
        return len(self.index)

    def take(self, which: Mask | Ints | slice) -> Rows:
        """Return the designs that a mask or an index array or a slice picks."""
        return Rows(*(getattr(self, part.name)[which] for part in fields(self)))

    @property
    def feasible(self) -> Mask:
        """Whether every jump lands and every ledge and gap does as it must."""
        return np.asarray(self.violation == 0.0)

    @property
    def on_target(self) -> Mask:
        """Whether it is feasible and no deviation is beyond its tolerance, to nine significant digits."""
        return np.asarray(self.feasible & (self.worst <= 1.0))

    @property
    def rank(self) -> Floats:
        """What orders designs of which none is feasible: cost + violation (DEVELOPERS.md, score)."""
        return self.cost + self.violation

    @property
    def off(self) -> Floats:
        """The front's first coordinate: the miss, to which an infeasible design's violation is added."""
        return self.miss + self.violation


def join(parts: Sequence[Rows]) -> Rows:
    """Return all designs of several lots."""
    return Rows(*(np.concatenate([getattr(p, f.name) for p in parts]) for f in fields(Rows)))


_NONE = np.zeros(0)
NO_ROWS = Rows(
    _NONE.astype(np.int64), _NONE, _NONE, _NONE, _NONE, _NONE, _NONE.astype(bool), _NONE.astype(np.int64)
)


def rows_of(scores: Scores, index: Ints, numbers: Mask, cell: Ints) -> Rows:
    """Return scored designs as rows."""
    return Rows(
        index, scores.miss, scores.rate_spread, scores.cost, scores.violation, scores.worst, numbers, cell
    )


def cells(*constants: Floats) -> Ints:
    """Return one number for the cell in which designs lie, of up to five constants, arrays (designs,)."""
    total = np.zeros(1, np.int64)
    for values in constants:
        with np.errstate(divide="ignore"):
            place = np.floor(np.log(np.asarray(values, dtype=np.float64)) / np.log(CELL))
        total = total * 4096 + (np.clip(place, -2048, 2046) + 2048).astype(np.int64)
    return total


@dataclass(frozen=True, slots=True)
class Leaders:
    """The designs worth remembering. `absorb` returns another; none is ever changed."""

    feasible: Rows = NO_ROWS
    """The two best feasible designs, by cost."""
    infeasible: Rows = NO_ROWS
    """The two best infeasible ones that land, by cost + violation."""
    front: Rows = NO_ROWS
    """Not dominated in (miss, rate spread), by miss; (miss + violation, spread) where nothing is feasible."""
    steady: Rows = NO_ROWS
    """The lowest rate spread among those on target."""
    numbers: Rows = NO_ROWS
    """The best feasible design that changes numbers only."""
    pool: Rows = NO_ROWS
    """The cheapest of each cell among designs nearly as good as the best, by cell."""

    @property
    def ranked(self) -> Rows:
        """The best and the runner-up (fewer where fewer land) in the order of the score (DEVELOPERS.md)."""
        return join([self.feasible, self.infeasible]).take(
            np.arange(len(self.feasible) + len(self.infeasible))[:2]
        )

    @property
    def best_cost(self) -> float:
        """The lowest feasible cost; infinite without one."""
        return float(self.feasible.cost[0]) if len(self.feasible) else np.inf


def _first(rows: Rows, keys: Sequence[Floats], count: int) -> Rows:
    """Return the first designs by keys (the last decides first), then by number."""
    return rows.take(np.lexsort((rows.index, *keys))[:count])


def undominated(rows: Rows) -> Rows:
    """Return the exact front in (off, spread), by off; of equal pairs the first design stays."""
    if not len(rows):
        return rows
    rows = rows.take(np.lexsort((rows.index, rows.spread, rows.off)))
    lowest = np.minimum.accumulate(rows.spread)
    keep = np.ones(len(rows), dtype=bool)
    keep[1:] = rows.spread[1:] < lowest[:-1]
    return rows.take(keep)


def _off_front(front: Rows, rows: Rows) -> Mask:
    """Return which designs a front dominates, or equals with a lower number."""
    if not len(front):
        return np.zeros(len(rows), dtype=bool)
    off = rows.off
    at = np.searchsorted(front.off, off, side="right") - 1
    spread = front.spread[at]
    equal = (spread == rows.spread) & ((front.off[at] < off) | (front.index[at] < rows.index))
    return np.asarray((at >= 0) & ((spread < rows.spread) | equal))


def _pool_key(rows: Rows) -> Ints:
    return rows.cell * 2 + rows.on_target


def _nearly(rows: Rows, best: float) -> Mask:
    """Return which feasible designs are nearly as good as one of cost `best`."""
    limit = np.where(rows.on_target, best + ON_TARGET_SLACK, NEARLY_AS_GOOD * best)
    return np.asarray(rows.feasible & (rows.cost <= limit))


def _cheapest_of_cells(rows: Rows) -> Rows:
    key = _pool_key(rows)
    order = np.lexsort((rows.index, rows.cost, key))
    key = key[order]
    first = np.ones(len(order), dtype=bool)
    first[1:] = key[1:] != key[:-1]
    return rows.take(order[first])


def _beats_pool(pool: Rows, rows: Rows) -> Mask:
    if not len(pool):
        return np.ones(len(rows), dtype=bool)
    keys, wanted = _pool_key(pool), _pool_key(rows)
    at = np.minimum(np.searchsorted(keys, wanted), len(keys) - 1)
    return np.asarray((keys[at] != wanted) | (rows.cost <= pool.cost[at]))


def contenders(leaders: Leaders, rows: Rows) -> Rows:
    """Return the designs that might still make one of the lists; the others cannot change any."""
    feasible, on_target = rows.feasible, rows.on_target
    full = len(leaders.feasible) == 2
    keep = feasible & (rows.cost <= (leaders.feasible.cost[-1] if full else np.inf))
    if not full:
        worst = leaders.infeasible.rank[-1] if len(leaders.infeasible) == 2 else np.inf
        keep |= np.isfinite(rows.violation) & ~feasible & (rows.rank <= worst)
    if len(leaders.feasible):
        keep |= feasible & ~_off_front(leaders.front, rows)
    else:
        keep |= np.isfinite(rows.violation) & (feasible | ~_off_front(leaders.front, rows))
    keep |= on_target & (rows.spread <= (leaders.steady.spread[0] if len(leaders.steady) else np.inf))
    keep |= (
        feasible & rows.numbers & (rows.cost <= (leaders.numbers.cost[0] if len(leaders.numbers) else np.inf))
    )
    # A cheaper best is yet to come at worst, so this limit only ever shrinks.
    pooled = np.flatnonzero(_nearly(rows, leaders.best_cost))
    keep[pooled] |= _beats_pool(leaders.pool, rows.take(pooled))
    return rows.take(keep)


def absorb(leaders: Leaders, rows: Rows) -> Leaders:
    """Return the leaders among those so far and more designs, which may include hopeless ones."""
    rows = rows.take(np.isfinite(rows.violation))
    if not len(rows):
        return leaders
    good, bad = rows.take(rows.feasible), rows.take(~rows.feasible)
    best = join([leaders.feasible, good])
    best = _first(best, [best.cost], 2)
    nearest = join([leaders.infeasible, bad])
    old_front = leaders.front.take(leaders.front.feasible) if len(best) else leaders.front
    steady = join([leaders.steady, good.take(good.on_target)])
    numbers = join([leaders.numbers, good.take(good.numbers)])
    pool = join([leaders.pool, good])
    return Leaders(
        feasible=best,
        infeasible=_first(nearest, [nearest.rank], 2),
        front=undominated(join([old_front, good if len(best) else bad])),
        steady=_first(steady, [steady.cost, steady.spread], 1),
        numbers=_first(numbers, [numbers.cost], 1),
        pool=_cheapest_of_cells(pool.take(_nearly(pool, float(best.cost[0]) if len(best) else np.inf))),
    )
