"""One gravity, step and grain: what the jumps' own designs can add up to, found exactly.

A `Cell` holds for each jump the sums of its own designs that are allowed; the others are infinite. Its
methods answer, within a limit: what are the undominated sums of whole sets, and what is the least that a set
can cost that has a given own design.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING, Protocol

import numpy as np

from designer.search.several.assign import Group
from designer.search.several.fronts import (
    SLOPES,
    Limit,
    Points,
    Price,
    added,
    least_cost,
    nothing,
    supports,
    undominated,
    union,
)

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Ints = NDArray[np.int64]
    Mask = NDArray[np.bool_]

MOST_POINTS = 400_000
"""More sums than this at a time are first thinned to their front."""


class Pruner(Protocol):
    """Tells which partial sums are still of interest: a Limit, or what lies Beyond a front."""

    def may(self, lines: Floats, violation: Floats) -> Mask:
        """Return whether anything above supports (…, SUPPORTS), of at least a violation (…), may matter."""

    def keeps(
        self, squares: Floats, spreads: Floats, violation: Floats, rest: Floats, rest_violation: float
    ) -> Mask:
        """Return which points, (points,), may still matter once the rest's supports are added."""

    def final(self, points: Points) -> Points:
        """Return the whole sums that matter."""


@dataclass(frozen=True, slots=True)
class Own:
    """One jump's own designs in a cell, (links, private designs); squares is infinite where not allowed."""

    squares: Floats
    spreads: Floats
    violation: Floats

    def only(self, allowed: Mask) -> Own:
        """Return the same with fewer designs allowed, (own designs,) or (links, private designs)."""
        allowed = allowed.reshape(self.squares.shape)
        return Own(
            np.where(allowed, self.squares, np.inf), np.where(allowed, self.spreads, np.inf), self.violation
        )

    @property
    def allowed(self) -> Mask:
        """Which designs are allowed, (own designs,)."""
        return np.isfinite(self.squares).reshape(-1)


@dataclass(frozen=True)
class Cell:
    """The own designs of all jumps at one gravity, step and grain."""

    number: int
    """Which cell of the grid."""
    price: Price
    groups: tuple[Group, ...]
    own: tuple[Own, ...]

    def only(self, jump: int, allowed: Mask) -> Cell:
        """Return the cell with fewer of a jump's own designs allowed."""
        own = tuple(one.only(allowed) if k == jump else one for k, one in enumerate(self.own))
        return Cell(self.number, self.price, self.groups, own)

    @cached_property
    def _lines(self) -> tuple[Floats, ...]:
        """Each jump's supports at each of its links, (links, SUPPORTS)."""
        return tuple(supports(one.squares, one.spreads) for one in self.own)

    @cached_property
    def _least_violation(self) -> tuple[Floats, ...]:
        """Each jump's least violation at each of its links, (links,)."""
        return tuple(
            np.where(np.isfinite(one.squares), one.violation, np.inf).min(axis=1) for one in self.own
        )

    @cached_property
    def _group_lines(self) -> tuple[Floats, ...]:
        """Each group's supports at each combination of its links, (link combinations, SUPPORTS)."""
        found = []
        for group in self.groups:
            parts = zip(group.jumps, group.projections, strict=True)
            found.append(sum_of([self._lines[k][at] for k, at in parts]))
        return tuple(found)

    @cached_property
    def _group_violation(self) -> tuple[Floats, ...]:
        found = []
        for group in self.groups:
            parts = zip(group.jumps, group.projections, strict=True)
            found.append(sum_of([self._least_violation[k][at] for k, at in parts]))
        return tuple(found)

    @cached_property
    def lines(self) -> Floats:
        """The supports of whole sets, (SUPPORTS,)."""
        return sum_of([lines.min(axis=0) for lines in self._group_lines])

    @property
    def bound(self) -> float:
        """A lower bound on what a set of this cell costs; infinite where there is none."""
        violation = sum(float(one.min()) for one in self._group_violation)
        if not np.isfinite(violation):
            return np.inf
        return float(least_cost(self.price, self.lines)) + violation

    def _others(self, group: int) -> tuple[Floats, float]:
        """Return the supports and least violation of all groups but one."""
        lines = [one.min(axis=0) for k, one in enumerate(self._group_lines) if k != group]
        violation = sum(float(one.min()) for k, one in enumerate(self._group_violation) if k != group)
        return sum_of(lines) if lines else np.zeros(self.lines.shape), violation

    def _links_kept(self, number: int, pruner: Pruner) -> Ints:
        """Return the combinations of a group's links that may still matter."""
        rest, violation = self._others(number)
        lines, least = self._group_lines[number], self._group_violation[number]
        return np.flatnonzero(pruner.may(lines + rest, least + violation) & np.isfinite(lines[:, 0]))

    def _at_link(
        self, number: int, link: int, pruner: Pruner, without: int = -1, start: Points | None = None
    ) -> Points:
        """Return the undominated sums of a group's jumps (but one) at one combination of its links.

        They are added to the points of `start`, which stand for all other groups where there are any.
        """
        group = self.groups[number]
        if start is None:
            rest, violation = self._others(number)
        else:
            rest, violation = np.zeros(self.lines.shape), 0.0
        members = list(zip(group.jumps, group.projections, strict=True))
        left = [self._lines[k][at[link]] for k, at in members]
        least = [float(self._least_violation[k][at[link]]) for k, at in members]
        total = nothing(len(self.own)) if start is None else start
        for place, (k, at) in enumerate(members):
            if k == without:
                continue
            spared = [i for i, (j, _) in enumerate(members) if i > place or j == without]
            others = sum_of([rest, *(left[i] for i in spared)])
            other_violation = violation + sum(least[i] for i in spared)
            mine = self._points(k, int(at[link]))
            total = grown(total, mine, pruner, others, other_violation)
        return total

    def _points(self, jump: int, link: int) -> Points:
        """Return one jump's own designs at one of its links as points: only the undominated ones."""
        one = self.own[jump]
        at = np.flatnonzero(np.isfinite(one.squares[link]))
        chosen = np.full((len(at), len(self.own)), -1, dtype=np.int32)
        chosen[:, jump] = link * one.squares.shape[1] + at
        return undominated(
            Points(one.squares[link, at], one.spreads[link, at], one.violation[link, at], chosen)
        )

    def _of_group(self, number: int, pruner: Pruner) -> Points:
        """Return the undominated sums of one group, as far as they may matter."""
        found = [self._at_link(number, int(link), pruner) for link in self._links_kept(number, pruner)]
        return undominated(union(found)) if found else nothing(len(self.own)).take(np.zeros(0, np.int64))

    def sums(self, pruner: Pruner, without: int = -1) -> Points:
        """Return the undominated sums of whole sets, or of all groups but one, as far as they matter."""
        wanted = [k for k in range(len(self.groups)) if k != without]
        lines = [one.min(axis=0) for one in self._group_lines]
        least = [float(one.min()) for one in self._group_violation]
        total = nothing(len(self.own))
        for place, k in enumerate(wanted):
            spared = [*wanted[place + 1 :], *([without] if without >= 0 else [])]
            rest = sum_of([np.zeros(self.lines.shape), *(lines[i] for i in spared)])
            total = grown(total, self._of_group(k, pruner), pruner, rest, sum(least[i] for i in spared))
        return pruner.final(total) if without < 0 else total

    def least_with(self, jump: int, limit: Limit) -> Floats:
        """Return for each own design of a jump the least cost of a set with it, infinite beyond the limit."""
        one = self.own[jump]
        least = np.full(one.squares.shape, np.inf)
        number = next(k for k, group in enumerate(self.groups) if jump in group.jumps)
        group = self.groups[number]
        others = self.sums(limit, without=number)
        projection = group.projections[group.jumps.index(jump)]
        for link in self._links_kept(number, limit):
            at = int(projection[link])
            mine = np.flatnonzero(np.isfinite(one.squares[at]))
            rest = self._at_link(number, int(link), limit, without=jump, start=others)
            if not len(rest) or not len(mine):
                continue
            spreads = one.spreads[at, mine, None] + rest.spreads
            cost = self.price(
                one.squares[at, mine, None] + rest.squares,
                spreads,
                one.violation[at, mine, None] + rest.violation,
            )
            cost = np.where((spreads <= limit.spreads) & (cost <= limit.cost), cost, np.inf)
            least[at, mine] = np.minimum(least[at, mine], cost.min(axis=1))
        return least.reshape(-1)

    def glance(self) -> tuple[float, NDArray[np.int32]]:
        """Return the cost and own designs, (jumps,), of the cheapest set at a corner of the hull of all sums.

        Each supporting line touches the sums at one set: for each slope every jump's least squares +
        slope·spreads, at the links where the group's is least.
        """
        best = np.inf, np.full(len(self.own), -1, dtype=np.int32)
        for number, slope in enumerate(SLOPES):
            chosen = np.full(len(self.own), -1, dtype=np.int32)
            sums = np.zeros(3)
            for group, lines in zip(self.groups, self._group_lines, strict=True):
                link = int(np.argmin(lines[:, number]))
                for k, at in zip(group.jumps, group.projections, strict=True):
                    one, row = self.own[k], int(at[link])
                    with np.errstate(invalid="ignore"):
                        value = one.squares[row] + slope * one.spreads[row]
                    pick = int(np.argmin(np.where(np.isfinite(one.squares[row]), value, np.inf)))
                    chosen[k] = row * one.squares.shape[1] + pick
                    sums += one.squares[row, pick], one.spreads[row, pick], one.violation[row, pick]
            cost = float(self.price(sums[:1], sums[1:2], float(sums[2]))[0])
            if cost < best[0]:
                best = cost, chosen
        return best


def sum_of(parts: Sequence[Floats]) -> Floats:
    """Return the sum of arrays of one shape."""
    total = parts[0]
    for part in parts[1:]:
        total = total + part
    return total


def grown(total: Points, more: Points, pruner: Pruner, rest: Floats, rest_violation: float) -> Points:
    """Return the undominated sums of two lots that may still matter once the rest is added."""
    if not len(total) or not len(more):
        return total.take(np.zeros(0, np.int64))
    if len(total) > 1 and len(total) * len(more) > MOST_POINTS:
        count = min(len(total), 1 + len(total) * len(more) // MOST_POINTS)
        parts = np.array_split(np.arange(len(total)), count)
        kept = [grown(total.take(part), more, pruner, rest, rest_violation) for part in parts]
        return undominated(union(kept))
    every = added(total, more)
    keep = pruner.keeps(every.squares, every.spreads, every.violation, rest, rest_violation)
    return undominated(every.take(keep))
