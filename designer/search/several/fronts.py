"""Sums of squares of independent parts: supports, bounds, fronts, and the sums of fronts.

A design of one jump adds (squares, spreads) to the two sums of a set, and a violation. The cost
sqrt(squares/weight) + spread_weight·sqrt(spreads/weight) + violation rises with each sum and is concave in
them. So over everything that parts can add up to, it is least on the front, and already the supporting lines
squares + slope·spreads ≥ least bound it from below: the least of a sum of parts is the sum of their least.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, fields
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Ints = NDArray[np.int64]
    Mask = NDArray[np.bool_]

SLOPES = np.array([0.0, *(2.0**k for k in range(-10, 11))])
"""Slopes of the supporting lines; one more support holds the least of the spreads alone."""
SUPPORTS = len(SLOPES) + 1
SAFE = 16.0 * float(np.finfo(np.float64).eps)
"""By how much, relatively, bounds are lowered so that no rounding of floats makes them wrong."""
CORNERS = 48
"""So many corners of a front decide whether a part can still add to it; fewer only decide less often."""


@dataclass(frozen=True, slots=True)
class Price:
    """What sums cost."""

    weight: float
    """Of all targets; 0 without any."""
    spread_weight: float

    def __call__(self, squares: Floats, spreads: Floats, violation: Floats | float = 0.0) -> Floats:
        """Return miss + spread_weight·spread + violation, not rounded."""
        weight = self.weight or 1.0
        miss, spread = np.sqrt(squares / weight), np.sqrt(spreads / weight)
        with np.errstate(invalid="ignore"):  # 0 · infinity where a part cannot be
            cost = miss + self.spread_weight * spread
        return np.where(np.isfinite(squares), cost, np.inf) + violation


@dataclass(frozen=True, slots=True)
class Points:
    """What parts can add, arrays (points,)."""

    squares: Floats
    spreads: Floats
    violation: Floats
    chosen: NDArray[np.int32]
    """(points, jumps): the own design of each jump, −1 where the jump is not among the parts."""

    def __len__(self) -> int:
        return len(self.squares)

    def take(self, which: Mask | Ints) -> Points:
        """Return some of the points."""
        return Points(*(getattr(self, part.name)[which] for part in fields(self)))


def nothing(jumps: int) -> Points:
    """Return the one point of no parts at all."""
    zero = np.zeros(1)
    return Points(zero, zero, zero, np.full((1, jumps), -1, dtype=np.int32))


def union(parts: Sequence[Points]) -> Points:
    """Return all points of several lots."""
    return Points(*(np.concatenate([getattr(p, f.name) for p in parts]) for f in fields(Points)))


def added(one: Points, other: Points) -> Points:
    """Return every sum of a point of one and a point of the other (their Minkowski sum)."""
    n, m = len(one), len(other)
    first, second = np.repeat(np.arange(n), m), np.tile(np.arange(m), n)
    return Points(
        one.squares[first] + other.squares[second],
        one.spreads[first] + other.spreads[second],
        one.violation[first] + other.violation[second],
        np.maximum(one.chosen[first], other.chosen[second]),
    )


def undominated(points: Points) -> Points:
    """Return the points that no other equals or betters in every sum; of equals the first stays."""
    order = np.lexsort((points.violation, points.spreads, points.squares))
    points = points.take(order)
    if not points.violation.any():
        lowest = np.minimum.accumulate(points.spreads)
        keep = np.ones(len(points), dtype=bool)
        keep[1:] = points.spreads[1:] < lowest[:-1]
        return points.take(keep)
    keep = np.ones(len(points), dtype=bool)
    for at in range(len(points)):
        if keep[at]:
            worse = (points.spreads >= points.spreads[at]) & (points.violation >= points.violation[at])
            worse[: at + 1] = False  # squares ascend, so that only later ones can be dominated
            keep &= ~worse
    return points.take(keep)


def supports(squares: Floats, spreads: Floats) -> Floats:
    """Return over the last axis the least squares + slope·spreads for each slope, then the least spreads.

    (…, designs) become (…, SUPPORTS). Designs that cannot be are infinite.
    """
    found = np.empty((*squares.shape[:-1], SUPPORTS))
    found[..., 0] = squares.min(axis=-1)
    work = np.empty_like(spreads)
    for k in range(1, len(SLOPES)):
        np.multiply(spreads, SLOPES[k], out=work)
        work += squares
        found[..., k] = work.min(axis=-1)
    found[..., -1] = spreads.min(axis=-1)
    return found


def vertices(support: Floats) -> tuple[Floats, Floats]:
    """Return the corners (squares, spreads) of what lies above supporting lines, (…, SUPPORTS − 1) each.

    A function that is concave and rises with both sums is least at one of them. They are lowered a little, so
    that they bound what was added in floats.
    """
    lines = support[..., :-1]
    with np.errstate(invalid="ignore"):
        spreads = np.empty_like(lines)
        spreads[..., :-1] = (lines[..., 1:] - lines[..., :-1]) / np.diff(SLOPES)
        spreads[..., :-1] -= SAFE * lines[..., 1:] / np.diff(SLOPES)
        spreads[..., -1] = support[..., -1]
        squares = lines - SLOPES * spreads
        squares -= SAFE * (lines + SLOPES * np.abs(spreads))
        spreads -= SAFE * np.abs(spreads)
    impossible = np.isinf(lines)
    squares = np.where(impossible, np.inf, np.maximum(squares, 0.0))
    spreads = np.where(impossible, np.inf, np.maximum(spreads, 0.0))
    return squares, spreads


def least_cost(price: Price, support: Floats, violation: Floats | float = 0.0) -> Floats:
    """Return a lower bound, (…), on what anything above supporting lines (…, SUPPORTS) costs."""
    squares, spreads = vertices(support)
    return np.asarray(price(squares, spreads).min(axis=-1) + violation)


@dataclass(frozen=True, slots=True)
class Limit:
    """What a set may cost, and how large its sum of spreads may be."""

    price: Price
    cost: float = np.inf
    spreads: float = np.inf

    def may(self, lines: Floats, violation: Floats) -> Mask:
        """Return whether anything above supports (…, SUPPORTS), with at least a violation (…), is within."""
        return np.asarray(
            (least_cost(self.price, lines, violation) <= self.cost) & (lines[..., -1] <= self.spreads)
        )

    def keeps(
        self, squares: Floats, spreads: Floats, violation: Floats, rest: Floats, rest_violation: float
    ) -> Mask:
        """Return which points, (points,), may still end within the limit with the rest's supports added."""
        more_squares, more_spreads = vertices(rest)
        keep = np.isfinite(squares) & (spreads + rest[-1] <= self.spreads)
        if np.isfinite(self.cost):
            at = np.flatnonzero(keep)
            bound = self.price(
                squares[at, None] + more_squares, spreads[at, None] + more_spreads, violation[at, None]
            ).min(axis=1)
            keep[at] = bound + rest_violation <= self.cost
        return np.asarray(keep)

    def final(self, points: Points) -> Points:
        """Return the points within the limit."""
        cost = self.price(points.squares, points.spreads, points.violation)
        return points.take((cost <= self.cost) & (points.spreads <= self.spreads))


@dataclass(frozen=True, slots=True)
class Beyond:
    """A front so far: only what it does not dominate is of interest."""

    squares: Floats
    """Ascending, (members,)."""
    spreads: Floats
    """Descending."""

    def _corners(self) -> tuple[Floats, Floats]:
        """Return the inner corners of the staircase of some members: a newcomer lies below one of them."""
        count = len(self.squares)
        if not count:
            return np.array([np.inf]), np.array([np.inf])
        some = np.unique(np.linspace(0, count - 1, CORNERS).round().astype(np.int64))
        return np.append(self.squares[some], np.inf), np.append(np.inf, self.spreads[some])

    def may(self, lines: Floats, violation: Floats | float = 0.0) -> Mask:
        """Return for supports (…, SUPPORTS) whether anything above them may lie outside the front."""
        flat = lines.reshape(-1, SUPPORTS)
        found = [self._may(flat[at : at + 4096]) for at in range(0, len(flat), 4096)]
        return np.concatenate(found).reshape(lines.shape[:-1])

    def _may(self, support: Floats) -> Mask:
        squares, spreads = self._corners()
        with np.errstate(invalid="ignore"):
            reach = squares[:, None] + np.where(SLOPES > 0.0, SLOPES * spreads[:, None], 0.0)
        reach = np.column_stack([reach, spreads])  # (corners, SUPPORTS)
        low = np.where(np.isinf(support), np.inf, support * (1.0 - SAFE))
        return np.asarray((reach >= low[..., None, :]).all(axis=-1).any(axis=-1))

    def keeps(
        self, squares: Floats, spreads: Floats, violation: Floats, rest: Floats, rest_violation: float
    ) -> Mask:
        """Return which points may still end outside the front with the rest's supports added."""
        lines = squares[:, None] + SLOPES * spreads[:, None]
        return self.may(np.column_stack([lines, spreads]) + rest) & np.isfinite(squares)

    def final(self, points: Points) -> Points:
        """Return the points that the front neither dominates nor equals."""
        if not len(self.squares):
            return points
        at = np.searchsorted(self.squares, points.squares, side="right") - 1
        lowest = np.where(at >= 0, self.spreads[np.maximum(at, 0)], np.inf)
        return points.take(points.spreads < lowest)


def front_of(points: Points) -> Beyond:
    """Return undominated points, ascending in squares, as a front to compare with."""
    return Beyond(points.squares, points.spreads)
