"""How long stepped jumps stay above a height, without stepping: for clearing a block.

The way up has the closed form of the way down (see phases.py). Independent of the kernel, which agrees
wherever a jump is not flagged.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from designer.motion.closed_form import LOSS_MODES, SWEPT_NOISE, closed_form, first_step, part_of, places
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.phases import Block, Notes, Phase, band
from designer.motion.rounding import snap_array
from designer.motion.rule import LandingTest, Mode, Rule, Second

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Bools = NDArray[np.bool_]


def closed_time_above(
    rule: Rule, launches: Launches, height: float, *, second: Second | None = None
) -> tuple[Floats, Bools]:
    """Return for how long each launch stays above `height` (length), in seconds, and which must be stepped.

    Both have the launches' broadcast shape. What the time is says `designer.motion.simulate.time_above`; what
    flags mean, `closed_form`.
    """
    fall, flagged = closed_form(rule, launches, height, second=second)
    step = np.asarray(launches.step, dtype=np.float64)
    down = _moment(rule, fall.steps, fall.fraction, step)
    if height - rule.contact_tolerance <= 0.0:
        up = np.zeros(flagged.shape)
    else:
        up, doubtful = _ways_up(rule, launches, height, fall)
        flagged = flagged | (doubtful & (fall.status == Status.LANDS))
    whole = fall
    if height > 0.0:
        whole, doubtful = closed_form(rule, launches, 0.0, second=second)
        flagged = flagged | doubtful
    lands = whole.status == Status.LANDS
    flagged |= lands & (fall.status != Status.LANDS) & (fall.status != Status.OUT_OF_REACH)
    time = np.where(fall.status == Status.LANDS, np.maximum(down - up, 0.0), 0.0)
    return np.where(lands, time, np.nan), flagged


def _moment(rule: Rule, steps: NDArray[np.int32], fraction: Floats, step: Floats) -> Floats:
    """Return when a height is crossed in step n, `fraction` into it."""
    n = steps.astype(np.float64)
    if rule.landing_test is LandingTest.SWEPT:
        return np.asarray((n - 1.0) * step + step * fraction)
    return np.asarray(n * step)


def _ways_up(rule: Rule, launches: Launches, height: float, fall: Jumps) -> tuple[Floats, Bools]:
    """Return when each launch comes up to a height above the take-off, and where noise decides that."""
    columns = launches.broadcast()
    up, doubtful = np.zeros(columns[0].shape), np.zeros(columns[0].shape, dtype=bool)
    with np.errstate(all="ignore"):
        for place in places(up.shape):
            if up[place].size == 0:
                continue
            block = Block(rule, height, up[place].size, *(part_of(column, place) for column in columns))
            found = _way_up(block, np.ravel(fall.apex[place]))
            up[place], doubtful[place] = (np.reshape(values, up[place].shape) for values in found)
    return up, doubtful


def _way_up(block: Block, apex: Floats) -> tuple[Floats, Bools]:
    """Return the same for one block; `apex`: how high its jumps come, (jumps,)."""
    rule = block.rule
    low = block.level - rule.contact_tolerance
    speed = block.launch_speed + np.zeros(block.size)
    n = y = np.zeros(block.size)
    v = speed
    special = (snap_array(speed, block.grain, Mode.NEAREST_EVEN) != speed) | (not rule.launch_gravity)
    if special.any():
        n, y, v = first_step(block, special, _nothing_noted(block.size))
    loss = block.gravity * block.step
    rounded = snap_array(loss, block.grain, LOSS_MODES[rule.rounding.mode][0])
    rise = Phase(n, y, v, block.step, rounded, block.shift(rounded, loss))
    k = np.maximum(np.ceil(_steps_to(rise, low)), 1.0)
    after, before = rise.height(k), rise.height(k - 1.0)
    # In the last step of a rise toward zero the velocity is rounded the other way.
    last = np.floor(v / rounded) if rule.rounding.mode is Mode.TOWARD_ZERO else np.ceil(v / rounded)
    margin = band(n + k, apex, block.high)
    doubtful = (after < low + margin) | (before > low - margin) | (k > last)
    at_once = y >= low - margin
    doubtful = np.where(at_once, y < low + margin, doubtful)
    k, after, before = np.where(at_once, 0.0, k), np.where(at_once, y, after), np.where(at_once, 0.0, before)
    if rule.landing_test is not LandingTest.SWEPT:
        return (n + k) * block.step, doubtful
    climb = after - before
    doubtful |= margin > SWEPT_NOISE * climb
    fraction = np.minimum(np.maximum((block.level - before) / climb, 0.0), 1.0)
    return (n + k - 1.0) * block.step + block.step * fraction, doubtful


def _steps_to(rise: Phase, low: float) -> Floats:
    """Return after how many steps, not whole, a rise comes to a height: the smaller root, stable."""
    slope = rise.v - rise.shift + 0.5 * rise.loss
    above = (low - rise.y) / rise.h
    steps: Floats = 2.0 * above / (slope + np.sqrt(np.maximum(slope * slope - 2.0 * rise.loss * above, 0.0)))
    return steps


def _nothing_noted(size: int) -> Notes:
    no = np.zeros(size, dtype=bool)
    return Notes(np.zeros(size), np.zeros(size), no, no, [])
