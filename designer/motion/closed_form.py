"""Stepped jumps without stepping: apex and landing in a few operations, however many steps they take.

Between the moments at which something changes (launch, top, terminal speed) every step takes the same `loss`
from the velocity, rounding included, because velocity is a multiple of the grain before and after it. See
phases.py for what follows from that. Independent of the kernel, which agrees wherever a jump is not flagged.
"""

from __future__ import annotations

import math
from typing import TYPE_CHECKING, Any

import numpy as np

from designer.motion.continuous import (
    constants_for,
    continuous_airtime,
    continuous_apex,
    continuous_landing_velocity,
)
from designer.motion.jumps import LONGEST_FLIGHT, Jumps, Launches, Status
from designer.motion.phases import NEAR, Block, Landing, Notes, Phase, band, take
from designer.motion.rounding import snap_array
from designer.motion.rule import Integrator, LandingTest, Mode, Place, Rule, Second

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

SWEPT_NOISE = 1e-8
"""Largest noise in height, as a share of the landing step's drop. The noise is a bound some ten times what is
seen, so the fraction is good to 1e-9; beyond it are flights of over about 6000 steps, and slow sinking."""

# v is on the grain, so snap(v − a) = v − snap'(a) with snap' the mirrored mode. Ties are flagged, so the
# three nearest modes are one. Toward zero alone asks for the sign of v − a: (v − a ≥ 0, v − a ≤ 0).
LOSS_MODES = {
    Mode.NEAREST_EVEN: (Mode.NEAREST_EVEN, Mode.NEAREST_EVEN),
    Mode.NEAREST_AWAY: (Mode.NEAREST_EVEN, Mode.NEAREST_EVEN),
    Mode.NEAREST_UP: (Mode.NEAREST_EVEN, Mode.NEAREST_EVEN),
    Mode.TOWARD_ZERO: (Mode.UP, Mode.DOWN),
    Mode.DOWN: (Mode.UP, Mode.UP),
    Mode.UP: (Mode.DOWN, Mode.DOWN),
}


def has_closed_form(rule: Rule, grain: Floats, second: Second | None = None) -> Bools:
    """Return for each grain (any shape, length/s) whether jumps have a closed form under this rule.

    They have one where nothing is rounded, or where velocity alone is, without carry, to a grain that is
    whole or 2⁻ⁿ: multiples of other grains have no exact binary value. A flight with a second jump has none.
    """
    grains = np.asarray(grain, dtype=np.float64)
    if rule.position.grain > 0.0 or second is not None:
        return np.zeros(grains.shape, dtype=bool)
    if rule.rounding.carry:
        return np.asarray(grains == 0.0)
    power_of_two = np.frexp(grains)[0] == 0.5
    exact: Bools = (grains >= 0.0) & (grains < np.inf) & ((np.floor(grains) == grains) | power_of_two)
    return exact


def closed_form(
    rule: Rule, launches: Launches, level: float = 0.0, *, second: Second | None = None
) -> tuple[Jumps, Bools]:
    """Return what becomes of every launch, and which of them must be stepped instead.

    Both have the launches' broadcast shape; near_apex_steps is −1. A jump is flagged where the answer hangs
    on float noise (a rounding tie, an apex or a landing within noise of its threshold) or where the rule has
    no closed form (with a `second` jump none has); what stands in the result there means nothing. `level`:
    length over the take-off. Nothing is validated: launches that make no sense come back flagged.
    """
    columns = launches.broadcast()
    shape = columns[0].shape
    speed, grain = (np.asarray(a, dtype=np.float64) for a in (launches.launch_speed, launches.grain))
    with np.errstate(all="ignore"):
        special = (snap_array(speed, grain, Mode.NEAREST_EVEN) != speed) | (not rule.launch_gravity)
    has_special = bool(np.any(special))
    special = np.broadcast_to(special, shape)
    kinds = (np.int8, np.int32, np.float64, np.int32, np.float64, np.float64, bool)
    results = [np.empty(shape, dtype=kind) for kind in kinds]
    with np.errstate(all="ignore"):
        for place in places(shape):
            size = results[0][place].size
            if size == 0:
                continue
            block = Block(rule, float(level), size, *(part_of(column, place) for column in columns))
            first = np.ravel(special[place]) if has_special else None
            for result, values in zip(results, _fly(block, first), strict=True):
                result[place] = np.reshape(values, result[place].shape)
    status, steps, apex, apex_step, fraction, velocity, flagged = results
    for sound in _sound(rule, launches, second):
        if not sound.all():
            flagged |= ~sound
    uncounted = np.full(shape, -1, dtype=np.int32)
    return Jumps(status, steps, apex, apex_step, fraction, velocity, uncounted), flagged


def _sound(rule: Rule, launches: Launches, second: Second | None) -> tuple[Bools, ...]:
    """Return, constant by constant and each in its own shape, which launches the closed form is meant for."""
    return (
        has_closed_form(rule, launches.grain, second),
        np.asarray((launches.gravity > 0.0) & (launches.gravity < np.inf)),
        np.isfinite(launches.launch_speed),
        np.asarray((launches.step > 0.0) & (launches.step <= 0.5 * LONGEST_FLIGHT)),
        np.asarray((launches.fall_factor >= 0.0) & (launches.fall_factor < np.inf)),
        np.asarray(launches.terminal_speed > 0.0),
    )


def part_of(column: Floats, place: tuple[Any, ...]) -> Any:
    """Return a block's part of a column, flat; one number where the column holds but one."""
    if any(stride for stride, length in zip(column.strides, column.shape, strict=True) if length > 1):
        return np.ravel(column[place])
    return column[(0,) * column.ndim]


def places(shape: tuple[int, ...]) -> Iterator[tuple[Any, ...]]:
    """Yield indices that cut an array of this shape into blocks of about CHUNK elements."""
    if not shape:
        yield ()
        return
    inner = math.prod(shape[1:])
    if inner > CHUNK:
        for i in range(shape[0]):
            for rest in places(shape[1:]):
                yield (i, *rest)
        return
    rows = max(1, CHUNK // max(inner, 1))
    for i in range(0, shape[0], rows):
        yield (slice(i, i + rows),)


def _fly(block: Block, special: Bools | None) -> tuple[NDArray[Any], ...]:
    """Return status, steps, apex, apex_step, fraction, landing_velocity, flagged of a block, each (jumps,).

    `special`: which launches need their first step taken by itself; None where none does.
    """
    zeros = np.zeros(block.size)
    notes = Notes(zeros, zeros, np.zeros(block.size, dtype=bool), np.zeros(block.size, dtype=bool), [])
    n, y, v = zeros, zeros, block.launch_speed + zeros
    if special is not None:
        n, y, v = first_step(block, special, notes)
    loss = block.gravity * block.step
    falling_loss = (block.gravity * block.fall_factor) * block.step
    two_pieces = bool(np.any(block.fall_factor != 1.0)) or block.rule.rounding.mode is Mode.TOWARD_ZERO
    rising_mode, falling_mode = LOSS_MODES[block.rule.rounding.mode]
    rounded = snap_array(falling_loss, block.grain, falling_mode)
    falling = Phase(n, y, v, block.step, rounded, block.shift(rounded, falling_loss))
    if two_pieces:
        rounded = snap_array(loss, block.grain, rising_mode)
        rising = Phase(n, y, v, block.step, rounded, block.shift(rounded, loss))
        falling = _rise(block, rising, loss, (falling.loss, falling.shift), notes)
    else:
        notes.stuck = (falling.loss == 0.0) & (v > 0.0)
        _top(block, falling, loss, None, notes)
    landing = _fall(block, falling, falling_loss, notes)
    for rows, found in reversed(notes.early):
        landing.put(rows, found)
    losses = (loss, falling_loss) if two_pieces else (loss,)
    notes.flagged = notes.flagged | _near_flip(block, losses, landing.v)
    still = (falling.loss == 0.0) & (falling.v == 0.0)
    return _outcome(block, landing, np.where(still, falling.n, np.inf), notes)


def first_step(block: Block, special: Bools, notes: Notes) -> tuple[Floats, Floats, Floats]:
    """Take the first step where it is unlike the others; return n, y and v, each (jumps,).

    It is where gravity starts only with the second, or where the launch is off the grain. Done in the rule's
    own operations, so ties need no flag.
    """
    rows = np.flatnonzero(special)
    part = block.take(rows)
    rule = block.rule
    start = part.launch_speed + np.zeros(rows.size)
    gravity = np.where(start > 0.0, part.gravity, part.gravity * part.fall_factor)
    loss = gravity * part.step if rule.launch_gravity else np.zeros(rows.size)
    unrounded = np.maximum(start - loss, -part.terminal_speed)
    rounded = snap_array(unrounded, part.grain, rule.rounding.mode)
    moving = rounded if rule.rounding.at is Place.BEFORE_MOVE else unrounded
    if rule.integrator is Integrator.EXPLICIT:
        moving = start
    elif rule.integrator is Integrator.AVERAGE:
        moving = 0.5 * (start + moving)
    height = moving * part.step
    n, y, v = np.zeros(block.size), np.zeros(block.size), block.launch_speed + np.zeros(block.size)
    n[rows], y[rows], v[rows] = 1.0, height, rounded
    down = (height < 0.0) & (height <= block.high)
    if down.any():
        found = Landing(np.ones(rows.size), np.zeros(rows.size), -height, rounded)
        notes.early.append((rows[down], found.take(down)))
    return n, y, v


def _top(block: Block, phase: Phase, loss: Floats, last: Floats | None, notes: Notes) -> None:
    """Note the highest point of a phase of `last` steps from the launch on, and the step that reaches it."""
    ratio = (phase.v - phase.shift) / phase.loss
    k = np.fmax(np.ceil(ratio), 0.0)  # 0/0 where v stays 0: nothing rises
    if last is not None:
        k = np.minimum(k, last)
    notes.apex = np.maximum(phase.height(k), 0.0)
    notes.apex_step = np.where(notes.apex > 0.0, phase.n + k, 0.0)
    # A step that moves by exactly nothing: kernel and closed form may see either sign, unless all is exact.
    if block.moves_rounded and not block.has_unrounded:
        return
    doubtful = _near_whole(ratio)
    exact = (phase.loss == loss) | block.moves_rounded
    notes.flagged = notes.flagged | (doubtful & ((block.grain == 0.0) | ~exact))


def _near_whole(ratio: Floats) -> Bools:
    """Return where v/loss and the like are so close to a whole number ≥ 0 that noise decides the side."""
    # Subtracting n times leaves an error of up to n/2 units in the last place of v: n² of them in v/loss.
    result: Bools = (np.abs(ratio - np.rint(ratio)) < NEAR + 2e-16 * ratio * ratio) & (ratio > -0.5)
    return result


def _rise(block: Block, rising: Phase, loss: Floats, falling: tuple[Floats, Floats], notes: Notes) -> Phase:
    """Rise until v ≤ 0, and return the phase of the fall; `falling` is its loss and shift."""
    toward_zero = block.rule.rounding.mode is Mode.TOWARD_ZERO
    ratio = rising.v / rising.loss
    k = np.ceil(ratio)
    if toward_zero:
        k = np.where(block.grain > 0.0, np.floor(ratio), k)
    notes.stuck = (rising.loss == 0.0) & (rising.v > 0.0)
    k = np.where((rising.v > 0.0) & ~notes.stuck, k, 0.0)
    _top(block, rising, loss, k, notes)
    if block.has_unrounded:
        notes.flagged = notes.flagged | (_near_whole(ratio) & (block.grain == 0.0))
    if not toward_zero:
        following = rising.after(k, *falling)
        _land_at_end(block, rising, k, following, notes)
        return following
    # The step that crosses zero: still the rising gravity, but u < 0 is rounded up.
    rounded = snap_array(loss, block.grain, Mode.DOWN)
    crossing = rising.after(k, rounded, block.shift(rounded, loss))
    _land_at_end(block, rising, k, crossing, notes)
    one = np.where((block.grain > 0.0) & (crossing.v > 0.0) & ~notes.stuck, 1.0, 0.0)
    following = crossing.after(one, *falling)
    _land_at_end(block, crossing, one, following, notes)
    higher = (one > 0.0) & (crossing.moving(one) > 0.0)
    notes.apex = np.where(higher, following.y, notes.apex)
    notes.apex_step = np.where(higher, following.n, notes.apex_step)
    return following


def _land_at_end(block: Block, phase: Phase, k: Floats, following: Phase, notes: Notes) -> None:
    """Note landings in the last of the k steps of a rise: no earlier one can move down."""
    margin = band(phase.n + k, notes.apex, block.high)
    low = (following.y <= block.high + margin) & (k >= 1.0) & (phase.moving(k) < 0.0)
    if not low.any():
        return
    rows = np.flatnonzero(low)
    y, margin = following.y[rows], take(margin, rows)
    drop = -(phase.h * phase.moving(k))[rows]
    notes.flagged[rows] |= (np.abs(y - block.high) < margin) | (margin > SWEPT_NOISE * drop)
    notes.early.append((rows, Landing(following.n[rows], y + drop, drop, following.v[rows])))


def _solve(block: Block, phase: Phase, notes: Notes) -> tuple[Landing, Bools, Floats]:
    """Return where a phase without end lands, where noise decides that, and the phase's own step number."""
    half = 0.5 * phase.loss
    first = phase.v - phase.shift
    slope = first + half
    above = (phase.y - block.high) / phase.h
    root = np.sqrt(np.maximum(slope * slope + 4.0 * half * above, 0.0))
    # Two forms of the later root of half·k² − slope·k − above = 0: each without cancellation on its side.
    upward = slope > 0.0
    if upward.all():
        k = (slope + root) / phase.loss
    else:
        k = 2.0 * above / (root - slope)
        if upward.any():
            k = np.where(upward, (slope + root) / phase.loss, k)
    lost = np.isnan(k)  # 0/0: a fall that starts at the very height at which it would have landed
    earliest = np.maximum(np.floor(first / phase.loss) + 2.0, 1.0)  # the first step that moves down
    k = np.maximum(np.ceil(k), earliest)
    drop = -phase.h * phase.moving(k)
    after = phase.height(k)
    before = after + drop
    n = phase.n + k
    margin = band(n, notes.apex, block.high)
    doubtful = (after > block.high - margin) | ((k > earliest) & (before < block.high + margin))
    if block.rule.landing_test is LandingTest.SWEPT:
        doubtful |= margin > SWEPT_NOISE * drop
    doubtful &= n <= LONGEST_FLIGHT / phase.h + 2.0
    doubtful |= lost
    return Landing(n, before, drop, phase.v - phase.loss * k), doubtful, k


def _fall(block: Block, phase: Phase, loss: Floats, notes: Notes) -> Landing:
    """Return where a fall lands that starts with this phase and may come to the terminal speed."""
    landing, doubtful, k = _solve(block, phase, notes)
    if not np.any(np.isfinite(block.terminal_speed)):
        notes.flagged = notes.flagged | doubtful
        return landing
    last = np.where(phase.loss == 0.0, phase.v, phase.v - phase.loss * (k - 1.0)) - loss
    rows = np.flatnonzero((last < -block.terminal_speed) & ~notes.stuck)
    if rows.size:
        part = notes.take(rows)
        landing.put(rows, _limited(block.take(rows), phase.take(rows), take(loss, rows), k[rows], part))
        doubtful[rows] |= part.flagged
    # A limit below what one step takes from v would already cut the step that crosses zero.
    too_low = block.gravity * block.step >= (1.0 - NEAR) * block.terminal_speed
    notes.flagged = notes.flagged | doubtful | too_low
    return landing


def _limited(block: Block, phase: Phase, loss: Floats, never_at: Floats, notes: Notes) -> Landing:
    """Return where falls land that come to the terminal speed before step `never_at` of the phase."""
    room = block.terminal_speed + phase.v - loss
    k = np.where(room >= 0.0, np.floor(room / phase.loss) + 1.0, 0.0)
    # Where the limit is met in just the step that lands, noise must not put it after the landing.
    k = np.minimum(k, np.where(never_at >= 1.0, never_at - 1.0, 0.0))
    v = phase.v - phase.loss * k
    mode = block.rule.rounding.mode
    limit = snap_array(-block.terminal_speed, block.grain, mode) + np.zeros(block.size)
    # The step that is cut short, from v to the limit …
    cut = phase.after(k, v - limit, block.shift(v - limit, v + block.terminal_speed))
    unrounded = np.maximum(limit - loss, -block.terminal_speed)
    # … and from there on a constant velocity.
    steady = cut.after(np.ones(block.size), np.zeros(block.size), block.shift(limit * 0.0, limit - unrounded))
    steady = steady.with_v(limit)
    settled = (snap_array(unrounded, block.grain, mode) == limit) & (limit < 0.0)
    landing, doubtful, _ = _solve(block, steady, notes)
    notes.flagged = notes.flagged | ~settled | doubtful
    _land_at_end(block, cut, np.ones(block.size), steady, notes)
    for rows, found in notes.early:
        landing.put(rows, found)
    return landing


def _near_flip(block: Block, losses: tuple[Floats, ...], landing_velocity: Floats) -> Bools:
    """Return where noise decides the rounding: next to a tie (nearest modes) or a whole grain (others)."""
    result = np.zeros(block.size, dtype=bool)
    if not np.any(block.grain > 0.0):
        return result
    falling = np.min(landing_velocity, where=landing_velocity > -np.inf, initial=0.0)
    near = NEAR + 1e-15 * max(-falling, np.max(np.abs(block.launch_speed))) / block.grain
    for loss in losses:
        grains = loss / block.grain
        off = np.abs(grains - np.rint(grains))
        if block.rule.rounding.mode.is_nearest:
            result |= off > 0.5 - near
        else:
            result |= (off < near) & (loss != 0.0)
    return result


def _outcome(block: Block, landing: Landing, still_from: Floats, notes: Notes) -> tuple[NDArray[Any], ...]:
    """Turn what was found into the arrays of a Jumps, and the flags.

    `still_from`: the step from which v stays 0, infinity where there is none.
    """
    rule = block.rule
    last = np.floor(LONGEST_FLIGHT / block.step + 0.5)
    low = block.level - rule.contact_tolerance
    above = block.level > 0.0 and low > 0.0
    flagged = notes.flagged
    lands = (landing.n <= last) & ~notes.stuck
    if above:
        flagged = flagged | (np.abs(notes.apex - low) < band(notes.apex_step, notes.apex, low))
        flagged |= ~lands & ~notes.stuck & (notes.apex_step >= last)
        lands &= notes.apex >= low
    fraction = np.ones(block.size)
    if rule.landing_test is LandingTest.SWEPT:
        fraction = np.minimum(np.maximum((landing.before - block.level) / landing.drop, 0.0), 1.0)
    floats: tuple[Floats, ...] = (notes.apex, fraction, landing.v)
    if lands.all():
        status = np.zeros(block.size, dtype=np.int8)
        steps, apex_step = landing.n, notes.apex_step
    else:
        status = np.where(still_from < last, np.int8(Status.HOVERS), np.int8(Status.TOO_LONG))
        if above:
            status[notes.apex < low] = Status.OUT_OF_REACH
        status[notes.stuck] = Status.NEVER_SLOWS
        status[lands] = Status.LANDS
        steps, apex_step = (np.where(lands, a, 0.0) for a in (landing.n, notes.apex_step))
        floats = tuple(np.where(lands, a, np.nan) for a in floats)
    apex, fraction, v = floats
    return status, steps.astype(np.int32), apex, apex_step.astype(np.int32), fraction, v, flagged
