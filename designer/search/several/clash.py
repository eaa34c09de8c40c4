"""Where no set of several jumps is feasible: which demands no set fulfils together, proved cell by cell."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from itertools import combinations
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.search.conflict import LARGEST_SET, count_demands, never_lands, tell_clashes
from designer.search.progress import Progress
from designer.search.result import Clash
from designer.search.several.measure import Measured, Measurer

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Mask = NDArray[np.bool_]

MOST_FOR_THREE = 24
"""With more demands than this only single ones and pairs are looked at."""

Demands = tuple[int, ...]


def clashes_of(brief: Brief, measurer: Measurer, progress: Progress) -> tuple[Clash, ...]:
    """Return the smallest sets of demands, jump by jump, that no set of the grid fulfils together."""
    count = count_demands(brief)
    largest = LARGEST_SET if count <= MOST_FOR_THREE else LARGEST_SET - 1
    sets: list[Demands] = [()]  # of no demand at all: does anything land?
    sets += [one for size in range(1, largest + 1) for one in combinations(range(count), size)]
    starts = np.cumsum([0, *(len(jump.view.features) for jump in measurer.jumps)])

    def fulfilled(tables: tuple[Measured, ...]) -> Mask:
        cache: dict[tuple[int, Demands], Mask] = {}

        def can(jump: int, mine: Demands) -> Mask:
            if (jump, mine) not in cache:
                cache[jump, mine] = _least(measurer, tables, jump, mine) <= 0.0
            return cache[jump, mine]

        return np.array([_in_any_cell(measurer, starts, one, can) for one in sets])

    possible = np.logical_or.reduce(
        list(measurer.every_block(fulfilled, progress, "Looking for what clashes", shortfalls=True))
    )
    if not possible[0]:
        return (never_lands(brief),)
    failing = [one for one, ok in zip(sets, possible, strict=True) if not ok]
    smallest = min((len(one) for one in failing), default=0)
    chosen = [one for one in failing if len(one) == smallest] if smallest else [tuple(range(count))]

    def least(wanted: Sequence[Sequence[int]]) -> list[float]:
        def sums(tables: tuple[Measured, ...]) -> list[float]:
            return [_least_of_set(measurer, tables, starts, tuple(one)) for one in wanted]

        found = list(measurer.every_block(sums, progress, "Looking for what clashes", shortfalls=True))
        return [min(column) for column in zip(*found, strict=True)]

    return tell_clashes(brief, chosen, least, proved=True)


def _mine(starts: NDArray[np.int64], jump: int, one: Demands) -> Demands:
    """Return which of a jump's own demands are in a set."""
    return tuple(int(k - starts[jump]) for k in one if starts[jump] <= k < starts[jump + 1])


def _least(measurer: Measurer, tables: Sequence[Measured], number: int, mine: Demands) -> Floats:
    """Return the least sum of a jump's shortfalls at each of its links, (cells, links); else infinite."""
    jump, table = measurer.jumps[number], tables[number]
    if table.shortfalls is None:
        raise ValueError("measured without shortfalls")
    total = np.where(np.isfinite(table.violation), 0.0, np.inf)
    for k in mine:
        total = total + table.shortfalls[:, :, k]
    return np.asarray(total.reshape(-1, jump.link_count, jump.private_count).min(axis=2))


def _in_any_cell(
    measurer: Measurer, starts: NDArray[np.int64], one: Demands, can: Callable[[int, Demands], Mask]
) -> bool:
    """Return whether some set of some cell fulfils these demands."""
    cells: Mask | None = None
    for group in measurer.groups:
        links: Mask | None = None
        for k, projection in zip(group.jumps, group.projections, strict=True):
            mine = can(k, _mine(starts, k, one))[:, projection]
            links = mine if links is None else links & mine
        if links is not None:
            some = np.asarray(links.any(axis=1))
            cells = some if cells is None else cells & some
    return bool(cells is not None and cells.any())


def _least_of_set(
    measurer: Measurer, tables: Sequence[Measured], starts: NDArray[np.int64], one: Demands
) -> float:
    """Return the least sum of shortfalls, length, that some set of some cell has at these demands."""
    total = np.zeros(len(tables[0].squares))
    for group in measurer.groups:
        links = np.zeros((len(total), group.link_count))
        for k, projection in zip(group.jumps, group.projections, strict=True):
            links = links + _least(measurer, tables, k, _mine(starts, k, one))[:, projection]
        total = total + links.min(axis=1)
    return float(total.min())
