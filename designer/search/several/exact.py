"""Which set comes first: by cost to nine significant digits, and between equals by the constants in order.

Sets are far too many to be listed, and so may be those that cost the same. So constants are fixed one at a
time, in the order that decides, each to the lowest value with which some set still costs no more.
"""

from __future__ import annotations

import math
from collections.abc import Callable, Iterator, Sequence
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.motion.rule import SHARED, Constants
from designer.objective.score import NOISE, Parts, Scores, put_together
from designer.search.several.assign import DECIDING, set_of
from designer.search.several.cell import Cell, Own
from designer.search.several.fronts import Limit, Price
from designer.search.several.measure import Measured, Measurer

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Mask = NDArray[np.bool_]

SLACK = 1e-13
"""Sums are added in another order than the score adds them; so much they may differ, relatively."""
MOST_LEAVES = 200
"""Where nothing is feasible, so many sets of nearly the same rank are compared one by one."""

Chosen = tuple[int, ...]
"""A set: the number of its cell, then the own design of each jump."""
Allow = Callable[[Measured], "Mask"]
"""Which own designs of a jump may be used, (cells, own designs)."""


def feasible(one: Measured) -> Mask:
    """Allow designs that land and fail nothing."""
    return np.asarray(one.violation == 0.0)


def on_target(one: Measured) -> Mask:
    """Allow designs that fail nothing and miss no target by more than its tolerance (ranking.on_target)."""
    return np.asarray((one.violation == 0.0) & (one.worst <= 1.0 + 5e-9))


def landing(one: Measured) -> Mask:
    """Allow designs that land."""
    return np.isfinite(one.violation)


@dataclass(frozen=True, slots=True)
class Placed:
    """A set that was scored: which, and its score."""

    chosen: Chosen
    score: Scores
    """Arrays of one."""

    @property
    def cost(self) -> float:
        """To nine significant digits; float noise is 0."""
        return clean(float(self.score.cost[0]))

    @property
    def spread(self) -> float:
        """The rate spread, likewise."""
        return clean(float(self.score.rate_spread[0]))

    @property
    def rank(self) -> float:
        """Cost + violation."""
        return self.cost + float(self.score.violation[0])


def clean(value: float) -> float:
    """Return a rounded number, 0 where it is but float noise."""
    return 0.0 if value < NOISE else value


def _unit(rounded: float) -> float:
    return float(10.0 ** (math.floor(math.log10(rounded)) - 8))


def upper_edge(rounded: float) -> float:
    """Return where numbers end that round to this one, to nine significant digits, or to less."""
    return rounded + 0.5 * _unit(rounded) if rounded >= NOISE else NOISE


def lower_edge(rounded: float) -> float:
    """Return where numbers end that round to less than this one."""
    return rounded - 0.5 * _unit(rounded * (1.0 - 1e-9)) if rounded >= NOISE else 0.0


OWN_ORDER = tuple(name for name in DECIDING if name not in SHARED)


@dataclass(frozen=True, slots=True)
class Wanted:
    """Sets among which the first is looked for."""

    cells: NDArray[np.int64]
    """Numbers of cells, ascending."""
    bounds: Floats
    """Lower bounds on what each costs (with the violation, where that counts)."""
    build: Callable[[int], Sequence[Cell]]
    """Makes a cell, or several that hold its sets together."""

    def among(self, which: Mask) -> Wanted:
        """Return the same for some of the cells."""
        return Wanted(self.cells[which], self.bounds[which], self.build)


class Chooser:
    """Finds first sets in cells of one measured grid."""

    def __init__(self, measurer: Measurer, price: Price) -> None:
        self.measurer, self.price = measurer, price
        self.brief, self.space = measurer.brief, measurer.space
        self._keys = [np.column_stack([jump.own[name] for name in OWN_ORDER]) for jump in measurer.jumps]

    def cell(self, number: int, allow: Allow) -> Cell:
        """Return a cell with the allowed own designs of each jump."""
        tables, row = self.measurer.block_of(number)
        own = []
        for jump, table in zip(self.measurer.jumps, tables, strict=True):
            shape = (jump.link_count, jump.private_count)
            whole = Own(
                *(part[row].reshape(shape) for part in (table.squares, table.spreads, table.violation))
            )
            one = Measured(
                table.squares[row], table.spreads[row], table.violation[row], table.worst[row], None
            )
            own.append(whole.only(allow(one)))
        return Cell(number, self.price, self.measurer.groups, tuple(own))

    def without(self, cell: Cell, chosen: Chosen) -> list[Cell]:
        """Return cells that together hold every set of a cell but one: in each, one jump is another.

        Own designs with the same constants are the same.
        """
        found = []
        for jump, (own, keys) in enumerate(zip(chosen[1:], self._keys, strict=True)):
            other = (keys != keys[own]).any(axis=1)
            found.append(cell.only(jump, other))
        return found

    def place(self, chosen: Chosen) -> Placed:
        """Score a set as the brief's own score does."""
        return Placed(chosen, self.scores([chosen]))

    def scores(self, sets: Sequence[Chosen]) -> Scores:
        """Score sets from their jumps' parts, in the order of the brief's jumps."""
        rows = [self.measurer.block_of(chosen[0]) for chosen in sets]
        found = []
        for k, jump in enumerate(self.measurer.jumps):
            columns = [
                [
                    getattr(tables[k], name)[row, chosen[k + 1]]
                    for (tables, row), chosen in zip(rows, sets, strict=True)
                ]
                for name in ("squares", "spreads", "violation", "worst")
            ]
            squares, spreads, violation, worst = (np.array(column) for column in columns)
            none = np.zeros((len(sets), len(jump.view.features)))
            found.append(Parts(squares, spreads, violation, worst, np.isfinite(violation), none))
        return put_together(self.brief, found)

    def matrix(self, sets: Sequence[Chosen]) -> Floats:
        """Return the values of all variables of some sets, (sets, variables)."""
        axes = self.space.axes
        found = np.tile([axis.low for axis in axes], (len(sets), 1))
        for row, chosen in enumerate(sets):
            for name, at in zip(("gravity", "step", "grain"), self.measurer.at(chosen[0]), strict=True):
                place = self.space.terms[0][name].variable
                found[row, place] = (axes[place].points or ())[at]
            for jump, own in zip(self.measurer.jumps, chosen[1:], strict=True):
                places = (*jump.links, *jump.private)
                shape = tuple(len(axes[place].points or ()) for place in places)
                for place, point in zip(places, np.unravel_index(own, shape) if places else (), strict=True):
                    found[row, place] = (axes[place].points or ())[int(point)]
        return found

    def constants(self, chosen: Chosen) -> tuple[Constants, ...]:
        """Return a set as constants, one a jump."""
        return set_of(self.brief, self.space.each_designs(self.matrix([chosen])), 0)

    def order(self, chosen: Chosen) -> tuple[float, ...]:
        """Return what decides between sets of the same cost: their constants in order."""
        at = dict(zip(("gravity", "step", "grain"), self.measurer.at(chosen[0]), strict=True))
        found: list[float] = []
        for name in DECIDING:
            if name in SHARED:
                found.append(float(at[name]))
            else:
                column = OWN_ORDER.index(name)
                found += [float(keys[own, column]) for own, keys in zip(chosen[1:], self._keys, strict=True)]
        return tuple(found)

    def least(self, wanted: Wanted, limit: Limit) -> tuple[float, Chosen | None]:
        """Return the least cost of any set within a limit, not rounded, and one such set (None of none)."""
        best, chosen = limit.cost, None
        for k in np.argsort(wanted.bounds, kind="stable"):
            if wanted.bounds[k] > best or not np.isfinite(wanted.bounds[k]):
                break
            for cell in wanted.build(int(wanted.cells[k])):
                seen = cell.glance()[0] if np.isinf(limit.spreads) else np.inf
                points = cell.sums(Limit(self.price, min(best, seen * (1.0 + SLACK)), limit.spreads))
                if not len(points):
                    continue
                costs = self.price(points.squares, points.spreads, points.violation)
                at = int(np.argmin(costs))
                if chosen is None or costs[at] < best:
                    best, chosen = float(costs[at]), (cell.number, *points.chosen[at].tolist())
        return best, chosen

    def best_of(self, wanted: Wanted, *, spread: float = np.inf) -> Placed | None:
        """Return the first of some sets by cost to nine significant digits, then by the constants.

        Only sets count whose rate spread, to nine digits, is at most `spread`. None where there is none.
        """
        spreads = self.spreads_up_to(spread)
        cost, chosen = self.least(wanted, Limit(self.price, np.inf, spreads))
        if chosen is None:
            return None
        found = self.place(chosen)
        lower = lower_edge(found.cost)
        if cost * (1.0 - SLACK) <= lower:  # summed in the order of the score, another one may round to less
            for leaf in self.in_order(wanted, Limit(self.price, lower * (1.0 + SLACK), spreads)):
                other = self.place(leaf)
                if other.cost < found.cost and other.spread <= spread:
                    found = other
        limit = Limit(self.price, upper_edge(found.cost) * (1.0 + SLACK), spreads)
        for leaf in self.in_order(wanted, limit):
            first = self.place(leaf)
            if first.cost <= found.cost and first.spread <= spread:
                return first
        return found

    def spreads_up_to(self, spread: float) -> float:
        """Return the sum of spreads of a rate spread that rounds to at most this one."""
        weight = self.price.weight or 1.0
        return upper_edge(spread) ** 2 * weight * (1.0 + 4.0 * SLACK) if np.isfinite(spread) else np.inf

    def nearest_of(self, wanted: Wanted) -> tuple[Placed | None, bool]:
        """Return the first of some sets by cost + violation, and whether that is proved.

        It is not where too many sets are too near to one another to be compared one by one.
        """
        rank, chosen = self.least(wanted, Limit(self.price))
        if chosen is None:
            return None, True
        best = self.place(chosen)
        key = best.rank, self.order(chosen)
        # A rank is the sum of two rounded numbers: the first may belong to a hair more than the least.
        limit = Limit(self.price, max(rank, best.rank) * (1.0 + 2e-8) + 2.0 * NOISE)
        for count, leaf in enumerate(self.in_order(wanted, limit)):
            if count == MOST_LEAVES:
                return best, False
            other = self.place(leaf)
            if (other.rank, self.order(leaf)) < key:
                best, key = other, (other.rank, self.order(leaf))
        return best, True

    def in_order(self, wanted: Wanted, limit: Limit) -> Iterator[Chosen]:
        """Yield sets within a limit in the order that decides between equals.

        Own designs with the same parts as one that comes before them are left out: they are never first.
        """
        near = wanted.cells[wanted.bounds <= limit.cost]
        gravities = np.array([self.measurer.at(int(number))[0] for number in near])
        for gravity in np.unique(gravities):
            numbers = near[gravities == gravity].tolist()
            cells = [self.distinct(cell) for number in numbers for cell in wanted.build(number)]
            some = [cell for cell in cells if len(cell.sums(limit))]
            if some:
                yield from self._descend(some, 0, limit)

    def distinct(self, cell: Cell) -> Cell:
        """Return a cell in which each jump keeps, of designs alike in parts and links, only the first."""
        for k, (own, keys) in enumerate(zip(cell.own, self._keys, strict=True)):
            shape = own.squares.shape
            link = np.repeat(np.arange(shape[0]), shape[1])
            columns = [link, *(part.reshape(-1) for part in (own.squares, own.spreads, own.violation))]
            order = np.lexsort((*keys.T[::-1], *columns))
            stacked = np.column_stack(columns)[order]
            first = np.ones(len(order), dtype=bool)
            first[1:] = (stacked[1:] != stacked[:-1]).any(axis=1)
            keep = np.zeros(len(order), dtype=bool)
            keep[order[first]] = True
            cell = cell.only(k, keep & own.allowed)
        return cell

    def _descend(self, cells: list[Cell], position: int, limit: Limit) -> Iterator[Chosen]:
        """Fix the constant at a position, then the later ones; gravity is the same in all cells."""
        places = _positions(len(self.measurer.jumps))
        if position == len(places):
            for cell in cells:
                for chosen in cell.sums(limit).chosen[:1].tolist():
                    yield (cell.number, *chosen)
            return
        name, jump = places[position]
        if jump is None:
            at = [self.measurer.at(cell.number)[SHARED.index(name)] for cell in cells]
            for value in sorted(set(at)):
                some = [cell for cell, one in zip(cells, at, strict=True) if one == value]
                yield from self._descend(some, position + 1, limit)
            return
        keys = self._keys[jump][:, OWN_ORDER.index(name)]
        left = {float(key) for cell in cells for key in np.unique(keys[cell.own[jump].allowed])}
        if len(left) == 1:
            yield from self._descend(cells, position + 1, limit)
            return
        possible = [np.isfinite(cell.least_with(jump, limit)) for cell in cells]
        for value in np.unique(np.concatenate([keys[mask] for mask in possible])):
            masks = [mask & (keys == value) for mask in possible]
            pairs = zip(cells, masks, strict=True)
            kept = [cell.only(jump, mask) for cell, mask in pairs if mask.any()]
            yield from self._descend(kept, position + 1, limit)


def _positions(jumps: int) -> list[tuple[str, int | None]]:
    """Return the constants in the order that decides, each of OWN once a jump; gravity is fixed before."""
    found: list[tuple[str, int | None]] = []
    for name in DECIDING[1:]:
        found += [(name, None)] if name in SHARED else [(name, k) for k in range(jumps)]
    return found
