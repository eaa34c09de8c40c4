"""What the closed form is made of: launches in blocks, and phases in which every step takes the same loss.

In such a phase height is a quadratic in the step number:

    y_k = y + h·(k·(v − shift) − loss·k(k − 1)/2),   v_k = v − loss·k

`shift` says by how much the velocity that moves the body in a step falls short of the one at its start: 0
(explicit), the loss of that step (semi-implicit) or half of it (average). Without rounding these are exact
samples of a parabola (Hairer, Lubich & Wanner, Geometric Numerical Integration, ch. I; from memory).
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from designer.motion.rule import Integrator, Place, Rule

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Bools = NDArray[np.bool_]
    Rows = NDArray[np.intp] | Bools

NEAR = 1e-9
"""A number of grains or steps this close to a tie or a whole number is left to the kernel."""


def take(a: Floats, rows: Rows) -> Floats:
    """Return these rows of an array, or the one value that it has for all."""
    return a[rows] if np.ndim(a) else a


def band(n: Floats, apex: Floats, high: float) -> Floats:
    """Return how far heights after n steps may differ between two orders of summing them, length."""
    result: Floats = (1e-12 + 1e-15 * n) * (apex + abs(high))
    return result


@dataclass(frozen=True, slots=True)
class Block:
    """The launches of one block: arrays (jumps,), or single numbers where all are the same; see Launches."""

    rule: Rule
    level: float
    size: int
    gravity: Floats
    launch_speed: Floats
    step: Floats
    grain: Floats
    fall_factor: Floats
    terminal_speed: Floats

    @property
    def high(self) -> float:
        """At or below this height a falling body has landed."""
        return self.level + self.rule.contact_tolerance

    @property
    def moves_rounded(self) -> bool:
        """Whether only rounded velocities move the body, where there is a grain."""
        return self.rule.rounding.at is Place.BEFORE_MOVE or self.rule.integrator is Integrator.EXPLICIT

    @property
    def has_unrounded(self) -> bool:
        """Whether any launch is without a grain."""
        return bool(np.any(self.grain == 0.0))

    def shift(self, rounded: Floats, unrounded: Floats) -> Floats:
        """Return how far the moving velocity falls short, given a step's loss after and before rounding."""
        if self.rule.integrator is Integrator.EXPLICIT:
            return np.zeros_like(rounded)
        lacks = rounded if self.rule.rounding.at is Place.BEFORE_MOVE else unrounded
        return lacks if self.rule.integrator is Integrator.SEMI_IMPLICIT else 0.5 * lacks

    def take(self, rows: Rows) -> Block:
        """Return the launches of these rows alone."""
        six = (self.gravity, self.launch_speed, self.step, self.grain, self.fall_factor, self.terminal_speed)
        return Block(self.rule, self.level, len(rows), *(take(a, rows) for a in six))


@dataclass(frozen=True, slots=True)
class Phase:
    """Steps that all take the same loss: the state (n, y, v) in which they start, and what each does."""

    n: Floats
    y: Floats
    v: Floats
    h: Floats
    loss: Floats
    shift: Floats

    def height(self, k: Floats) -> Floats:
        """Return y after k steps of this phase."""
        result: Floats = self.y + self.h * (k * (self.v - self.shift - 0.5 * self.loss * (k - 1.0)))
        return result

    def moving(self, k: Floats) -> Floats:
        """Return the velocity that moves the body in step k ≥ 1 of this phase."""
        result: Floats = self.v - self.shift - self.loss * (k - 1.0)
        return result

    def after(self, k: Floats, loss: Floats, shift: Floats) -> Phase:
        """Return the phase that follows after k steps of this one."""
        return Phase(self.n + k, self.height(k), self.v - self.loss * k, self.h, loss, shift)

    def with_v(self, v: Floats) -> Phase:
        """Return the same phase starting with velocity v."""
        return replace(self, v=v)

    def take(self, rows: Rows) -> Phase:
        """Return these rows of the phase."""
        return Phase(*(take(a, rows) for a in (self.n, self.y, self.v, self.h, self.loss, self.shift)))


@dataclass(frozen=True, slots=True)
class Landing:
    """Where jumps land: the step (infinity or NaN: never), height before it, drop in it, v after it."""

    n: Floats
    before: Floats
    drop: Floats
    v: Floats

    def take(self, rows: Rows) -> Landing:
        """Return these rows."""
        return Landing(self.n[rows], self.before[rows], self.drop[rows], self.v[rows])

    def put(self, rows: Rows, found: Landing) -> None:
        """Overwrite these rows."""
        self.n[rows], self.before[rows] = found.n, found.before
        self.drop[rows], self.v[rows] = found.drop, found.v


@dataclass(slots=True)
class Notes:
    """What is gathered on the way, arrays (jumps,): top, doubts, dead ends, landings on the way."""

    apex: Floats
    apex_step: Floats
    flagged: Bools
    stuck: Bools
    """Rises for ever."""
    early: list[tuple[Rows, Landing]]

    def take(self, rows: Rows) -> Notes:
        """Return these rows, with landings of their own to gather."""
        return Notes(self.apex[rows], self.apex_step[rows], self.flagged[rows], self.stuck[rows], [])
