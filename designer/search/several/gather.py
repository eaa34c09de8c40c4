"""More than the best: the front over all sets, and a pool of unlike ones nearly as good."""

from __future__ import annotations

import math
from collections.abc import Iterator, Sequence
from typing import TYPE_CHECKING

import numpy as np

from designer.objective.score import NOISE
from designer.search.ranking import CELL, NEARLY_AS_GOOD, ON_TARGET_SLACK
from designer.search.several.exact import Chooser, Chosen, Placed, Wanted, feasible
from designer.search.several.fronts import Beyond, Points, union
from designer.search.several.measure import Measurer

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Ints = NDArray[np.int64]
    Mask = NDArray[np.bool_]

POOL_CELLS = 96
"""From so many cells of unlike gravity the pool takes a set, and what is beside each of the first few."""
POOL_CENTRES = 12


def front_of_sets(chooser: Chooser, lines: NDArray[np.float32], bounds: Floats) -> tuple[Chosen, ...]:
    """Return one set for each undominated pair (miss, rate spread) of nine digits, by miss."""
    numbers: Ints = np.zeros(0, dtype=np.int64)
    points: Points | None = None
    known = [Beyond(np.zeros(0), np.zeros(0))]
    order = np.argsort(bounds, kind="stable")[: np.count_nonzero(np.isfinite(bounds))]
    for number in _promising(order, lines, known):
        found = chooser.distinct(chooser.cell(number, feasible)).sums(known[0])
        if not len(found):
            continue
        every = found if points is None else union([points, found])
        at = np.append(numbers, np.full(len(found), number))
        place = _undominated_at(every)
        points, numbers = every.take(place), at[place]
        known[0] = Beyond(points.squares, points.spreads)
    if points is None:
        return ()
    sets = [(int(n), *own) for n, own in zip(numbers, points.chosen.tolist(), strict=True)]
    scores = chooser.scores(sets)
    rounded = np.column_stack([scores.miss, scores.rate_spread])
    rounded[rounded < NOISE] = 0.0
    keys = [(*pair, *chooser.order(one)) for pair, one in zip(rounded.tolist(), sets, strict=True)]
    lowest, front = np.inf, []
    for k in sorted(range(len(sets)), key=lambda k: keys[k]):
        if rounded[k, 1] < lowest:
            lowest = rounded[k, 1]
            front.append(sets[k])
    return tuple(front)


def _promising(order: Ints, lines: NDArray[np.float32], known: Sequence[Beyond]) -> Iterator[int]:
    """Yield cells that may add to a front, the one of `known`, which grows meanwhile."""

    def may(some: Ints) -> Mask:
        return known[0].may(lines[some].astype(np.float64))

    start, height = 0, 16
    while start < len(order):
        some = order[start : start + height]
        for number in some[may(some)]:
            if may(np.array([number]))[0]:
                yield int(number)
        start, height = start + height, min(2 * height, 4096)


def _undominated_at(points: Points) -> Ints:
    """Return where the undominated points are, by squares."""
    order = np.lexsort((points.spreads, points.squares))
    spreads = points.spreads[order]
    keep = np.ones(len(order), dtype=bool)
    keep[1:] = spreads[1:] < np.minimum.accumulate(spreads)[:-1]
    return order[keep]


def pool_of_sets(chooser: Chooser, good: Wanted, best: Placed) -> tuple[Chosen, ...]:
    """Return sets nearly as good as the best: one of each of many unlike cells, and some beside them."""
    measurer = chooser.measurer
    limit = max(NEARLY_AS_GOOD * best.cost, best.cost + ON_TARGET_SLACK)
    seen: set[int] = set()
    chosen = [best.chosen]
    for number in np.argsort(good.bounds, kind="stable"):
        if good.bounds[number] > limit or len(chosen) > POOL_CELLS:
            break
        gravity = measurer.gravities[measurer.at(int(number))[0]]
        key = math.floor(math.log(gravity) / math.log(CELL))
        if key in seen:
            continue
        seen.add(key)
        cost, own = chooser.cell(int(number), feasible).glance()
        if cost <= limit:
            chosen.append((int(number), *own.tolist()))
    found = dict.fromkeys(chosen)
    for one in chosen[:POOL_CENTRES]:
        found |= dict.fromkeys(_beside(measurer, one))
    sets = list(found)
    scores = chooser.scores(sets)
    near = (scores.violation == 0.0) & (scores.cost <= limit)
    return tuple(one for one, kept in zip(sets, near, strict=True) if kept)


def _beside(measurer: Measurer, one: Chosen) -> list[Chosen]:
    """Return sets that differ from one in the links of one group, or in what one jump has for itself."""
    found = []
    for group in measurer.groups:
        for link in range(group.link_count if group.links else 0):
            other = list(one)
            for k, projection in zip(group.jumps, group.projections, strict=True):
                private = measurer.jumps[k].private_count
                other[k + 1] = int(projection[link]) * private + one[k + 1] % private
            found.append(tuple(other))
    for k, jump in enumerate(measurer.jumps):
        first = one[k + 1] - one[k + 1] % jump.private_count
        found += [(*one[: k + 1], own, *one[k + 2 :]) for own in range(first, first + jump.private_count)]
    return found
