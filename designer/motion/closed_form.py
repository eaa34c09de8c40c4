"""Stepped jumps without stepping: apex and landing in a few operations, whatever the number of steps.

Between the moments at which something changes (launch, the top, the terminal speed) every step takes the same
`loss` from the velocity, rounding included, because the velocity is a multiple of the grain before and after.
Height is then a quadratic in the step number:

    y_k = y + h·(k·(v − shift) − loss·k(k − 1)/2),   v_k = v − loss·k

where `shift` says by how much the velocity that moves the body in a step differs from the one at its start:
0 (explicit), the loss of that step (semi-implicit) or half of it (average). Without rounding these are the exact
samples of a parabola (Hairer, Lubich & Wanner, Geometric Numerical Integration, ch. I; from memory).

Independent of the kernel, which must agree wherever a jump is not flagged; flagged jumps are those that float
noise decides, and those whose rule has no such form.
"""

from __future__ import annotations

import math
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from designer.motion.continuous import (
    constants_for,
    continuous_airtime,
    continuous_apex,
    continuous_landing_velocity,
)
from designer.motion.jumps import LONGEST_FLIGHT, Jumps, Launches, Status
from designer.motion.rounding import snap_array
from designer.motion.rule import Integrator, LandingTest, Mode, Place, Rule

if TYPE_CHECKING:
    from collections.abc import Iterator

    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Bools = NDArray[np.bool_]

__all__ = [
    "closed_form",
    "constants_for",
    "continuous_airtime",
    "continuous_apex",
    "continuous_landing_velocity",
    "has_closed_form",
]

CHUNK = 16_384
"""Jumps worked on at once: their arrays stay in a core's own cache."""

NEAR = 1e-9
"""A number of grains or steps this close to a tie or a whole number is left to the kernel."""

# What u = v − a is rounded to, as a direction for a: v is on the grain, so snap(v − a) = v − snap'(a). Ties are
# flagged, so the three nearest modes are one; toward zero is the one mode that asks for the sign of u.
LOSS_MODE = {
    Mode.NEAREST_EVEN: Mode.NEAREST_EVEN,
    Mode.NEAREST_AWAY: Mode.NEAREST_EVEN,
    Mode.NEAREST_UP: Mode.NEAREST_EVEN,
    Mode.DOWN: Mode.UP,
    Mode.UP: Mode.DOWN,
}


def has_closed_form(rule: Rule, grain: Floats) -> Bools:
    """Return for each grain (any shape, length/s) whether jumps have a closed form under this rule.

    They have one where nothing is rounded, or where velocity alone is, without carry, to a grain that is whole
    or 2⁻ⁿ: multiples of other grains have no exact binary value.
    """
    grains = np.asarray(grain, dtype=np.float64)
    if rule.position.grain > 0.0:
        return np.zeros(grains.shape, dtype=bool)
    power_of_two = np.frexp(grains)[0] == 0.5
    exact = (grains > 0.0) & ((np.floor(grains) == grains) | power_of_two)
    return (grains == 0.0) | (exact if not rule.rounding.carry else np.zeros(grains.shape, dtype=bool))


def closed_form(rule: Rule, launches: Launches, level: float = 0.0) -> tuple[Jumps, Bools]:
    """Return what becomes of every launch, and which of them must be stepped instead.

    Both have the launches' broadcast shape; near_apex_steps is −1. A jump is flagged where the answer hangs on
    float noise (a rounding tie, a landing or an apex within noise of its threshold) or where the rule has no
    closed form; what stands in the result there means nothing. `level` in length units, over the take-off.
    Nothing is validated: launches that make no sense come back flagged.
    """
    columns = launches.broadcast()
    shape = columns[0].shape
    off_grain = snap_array(launches.launch_speed, launches.grain, Mode.NEAREST_EVEN) != np.asarray(
        launches.launch_speed
    )
    special = np.broadcast_to(off_grain | (not rule.launch_gravity), shape)
    any_special = bool(np.any(off_grain)) or not rule.launch_gravity
    kinds = (np.int8, np.int32, np.float64, np.int32, np.float64, np.float64, bool)
    results: tuple[NDArray[Any], ...] = tuple(np.empty(shape, dtype=kind) for kind in kinds)
    constant = [np.asarray(column).size > 0 and not any(column.strides) for column in columns]
    with np.errstate(all="ignore"):
        for place in _blocks(shape):
            parts = [
                column.flat[0] if same else np.ravel(column[place])
                for column, same in zip(columns, constant, strict=True)
            ]
            first = np.ravel(special[place]) if any_special else None
            block = _Block(rule, float(level), results[0][place].size, *parts)
            for result, values in zip(results, _fly(block, first), strict=True):
                result[place] = np.reshape(values, result[place].shape)
    flagged = results[6] | ~has_closed_form(rule, columns[3])
    return Jumps(*results[:6], near_apex_steps=np.full(shape, -1, dtype=np.int32)), flagged


def _blocks(shape: tuple[int, ...]) -> Iterator[tuple[Any, ...]]:
    """Yield indices that cut an array of this shape into blocks of about CHUNK elements."""
    if not shape:
        yield ()
        return
    inner = math.prod(shape[1:])
    if inner > CHUNK:
        for i in range(shape[0]):
            for rest in _blocks(shape[1:]):
                yield (i, *rest)
        return
    rows = max(1, CHUNK // max(inner, 1))
    for i in range(0, shape[0], rows):
        yield (slice(i, i + rows),)


@dataclass(frozen=True, slots=True)
class _Block:
    """The launches of one block: arrays (jumps,), or floats where all are the same; units as in Launches."""

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
        """Whether the velocity that moves the body is the rounded one (or rounding plays no part in it)."""
        return self.rule.rounding.at is Place.BEFORE_MOVE or self.rule.integrator is Integrator.EXPLICIT

    def shift(self, rounded: Floats, unrounded: Floats) -> Floats:
        """Return what the moving velocity lacks, given the loss of the step after and before rounding."""
        if self.rule.integrator is Integrator.EXPLICIT:
            return np.zeros_like(rounded)
        lacks = rounded if self.rule.rounding.at is Place.BEFORE_MOVE else unrounded
        return lacks if self.rule.integrator is Integrator.SEMI_IMPLICIT else 0.5 * lacks

    def take(self, rows: NDArray[np.intp]) -> _Block:
        """Return the launches of these rows alone."""
        six = (self.gravity, self.launch_speed, self.step, self.grain, self.fall_factor, self.terminal_speed)
        return _Block(self.rule, self.level, rows.size, *(_take(a, rows) for a in six))


@dataclass(frozen=True, slots=True)
class _Phase:
    """Steps that all take the same loss: where they start, after n steps in all, and what each does."""

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

    def after(self, k: Floats, loss: Floats, shift: Floats) -> _Phase:
        """Return the phase that follows after k steps of this one."""
        return _Phase(self.n + k, self.height(k), self.v - self.loss * k, self.h, loss, shift)


@dataclass(slots=True)
class _Landing:
    """Where jumps land: the step (inf or NaN where never), the move of that step and the velocity after it."""

    n: Floats
    before: Floats
    drop: Floats
    v: Floats


@dataclass(slots=True)
class _Notes:
    """What is gathered on the way: the top so far, landings before the last phase, doubts, dead ends."""

    apex: Floats
    apex_step: Floats
    early: list[tuple[NDArray[np.intp], _Landing]]
    flagged: Bools
    stuck: Bools
    """Rises for ever."""


def _take(a: Floats, rows: NDArray[np.intp]) -> Floats:
    """Return these rows of an array, or the one value that it has for all."""
    return a[rows] if np.ndim(a) else a


def _fly(block: _Block, special: Bools | None) -> tuple[NDArray[Any], ...]:
    """Return status, steps, apex, apex_step, fraction, landing_velocity and flagged of a block, each (jumps,)."""
    zeros = np.zeros(block.size)
    no = np.zeros(block.size, dtype=bool)
    notes = _Notes(zeros, zeros, [], no, no)
    g, h, q = block.gravity, block.step, block.grain
    loss = g * h
    n, y, v = zeros, zeros, block.launch_speed + zeros
    if special is not None:
        n, y, v = _first_step(block, special, notes)
    toward_zero = block.rule.rounding.mode is Mode.TOWARD_ZERO and bool(np.any(q > 0.0))
    fall_loss = (g * block.fall_factor) * h
    split = toward_zero or bool(np.any(block.fall_factor != 1.0))
    rounded = snap_array(
        fall_loss, q, Mode.DOWN if toward_zero else LOSS_MODE.get(block.rule.rounding.mode, Mode.DOWN)
    )
    falling = rounded, block.shift(rounded, fall_loss)
    if split:
        up = snap_array(loss, q, Mode.UP if toward_zero else LOSS_MODE.get(block.rule.rounding.mode, Mode.UP))
        rising = _Phase(n, y, v, h, up, block.shift(up, loss))
        last = _rise(block, rising, loss, notes, falling)
    else:
        last = _Phase(n, y, v, h, *falling)
        _peak(block, last, loss, np.inf, notes)
        notes.stuck = (last.loss == 0.0) & (v > 0.0)
    landing, still = _fall(block, last, fall_loss, notes)
    for rows, found in reversed(notes.early):
        for whole, part in zip(
            (landing.n, landing.before, landing.drop, landing.v),
            (found.n, found.before, found.drop, found.v),
            strict=True,
        ):
            whole[rows] = part
    return _outcome(block, landing, still, notes, (loss, fall_loss))
