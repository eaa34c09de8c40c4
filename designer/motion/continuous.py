"""The textbook jump: formulas for continuous time, and what they give when turned round.

Motion under constant gravity (OpenStax, University Physics vol. 1, sections 3.5 and 4.3), with gravity times
`fall_factor` from the top on. Every argument may be an array; all broadcast together. Lengths in one unit,
times in seconds, upward positive. What does not exist is NaN: a height above the apex, a square root of a
negative number. Nothing is validated.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    Floats = NDArray[np.float64]


def continuous_apex(gravity: ArrayLike, launch_speed: ArrayLike) -> Floats:
    """Return the height of the top, v²/(2g); 0 where the launch is not upward."""
    g, v = _floats(gravity, launch_speed)
    up = np.maximum(v, 0.0)
    apex: Floats = up * up / (2.0 * g)
    return apex


def continuous_airtime(
    gravity: ArrayLike, launch_speed: ArrayLike, level: ArrayLike = 0.0, fall_factor: ArrayLike = 1.0
) -> Floats:
    """Return the seconds until the body comes down to `level`: v/g + √(2(apex − level)/(g·fall_factor)).

    With fall_factor 1 this is (v + √(v² − 2gL))/g (University Physics vol. 1, section 4.3). NaN where the
    level is above the apex. A downward launch falls with gravity·fall_factor from the start.
    """
    g, v, target, factor = _floats(gravity, launch_speed, level, fall_factor)
    falling = g * factor
    with np.errstate(invalid="ignore", divide="ignore"):
        from_top = v / g + np.sqrt(2.0 * (continuous_apex(g, v) - target) / falling)
        downward = (v + np.sqrt(v * v - 2.0 * falling * _below(target))) / falling
    return np.where(v > 0.0, from_top, downward)


def continuous_landing_velocity(
    gravity: ArrayLike, launch_speed: ArrayLike, level: ArrayLike = 0.0, fall_factor: ArrayLike = 1.0
) -> Floats:
    """Return the (negative) velocity at `level` on the way down; NaN where the level is above the apex."""
    g, v, target, factor = _floats(gravity, launch_speed, level, fall_factor)
    falling = g * factor
    with np.errstate(invalid="ignore"):
        from_top = np.sqrt(2.0 * falling * (continuous_apex(g, v) - target))
        downward = np.sqrt(v * v - 2.0 * falling * _below(target))
    return np.where(v > 0.0, -from_top, -downward)


def continuous_height(
    gravity: ArrayLike, launch_speed: ArrayLike, time: ArrayLike, fall_factor: ArrayLike = 1.0
) -> Floats:
    """Return the height at `time` seconds after the launch."""
    g, v, t, factor = _floats(gravity, launch_speed, time, fall_factor)
    rising = np.clip(t, 0.0, np.maximum(v, 0.0) / g)
    falling = t - rising
    start = np.minimum(v, 0.0)
    height: Floats = np.maximum(v, 0.0) * rising - 0.5 * g * rising * rising
    return height + start * falling - 0.5 * (g * factor) * falling * falling


def continuous_velocity(
    gravity: ArrayLike, launch_speed: ArrayLike, time: ArrayLike, fall_factor: ArrayLike = 1.0
) -> Floats:
    """Return the velocity at `time` seconds after the launch."""
    g, v, t, factor = _floats(gravity, launch_speed, time, fall_factor)
    rising = np.clip(t, 0.0, np.maximum(v, 0.0) / g)
    velocity: Floats = v - g * rising - g * factor * (t - rising)
    return velocity


def times_at_height(
    gravity: ArrayLike, launch_speed: ArrayLike, height: ArrayLike, fall_factor: ArrayLike = 1.0
) -> tuple[Floats, Floats]:
    """Return when the body passes `height` on the way up, and when on the way down, in seconds.

    The way up is NaN below the take-off level; both are NaN above the apex.
    """
    g, v, target, factor = _floats(gravity, launch_speed, height, fall_factor)
    with np.errstate(invalid="ignore"):
        # The smaller root, free of cancellation.
        up = 2.0 * target / (v + np.sqrt(v * v - 2.0 * g * target))
    up = np.where((target >= 0.0) & (v > 0.0), up, np.nan)
    return up, continuous_airtime(g, v, target, factor)


def constants_for(apex: ArrayLike, airtime: ArrayLike, fall_factor: ArrayLike = 1.0) -> tuple[Floats, Floats]:
    """Return (gravity, launch_speed) of the jump with this apex and this airtime back to the take-off level.

    From airtime = √(2·apex/g)·(1 + 1/√fall_factor) and apex = v²/(2g).
    """
    top, time, factor = _floats(apex, airtime, fall_factor)
    share = 1.0 + 1.0 / np.sqrt(factor)
    gravity: Floats = 2.0 * top * (share / time) ** 2
    launch_speed: Floats = np.sqrt(2.0 * gravity * top)
    return gravity, launch_speed


def launch_speed_for(gravity: ArrayLike, apex: ArrayLike) -> Floats:
    """Return the launch speed that reaches `apex` under `gravity`: √(2g·apex)."""
    g, top = _floats(gravity, apex)
    speed: Floats = np.sqrt(2.0 * g * top)
    return speed


def run_speed_for(
    gap: ArrayLike,
    gravity: ArrayLike,
    launch_speed: ArrayLike,
    level: ArrayLike = 0.0,
    fall_factor: ArrayLike = 1.0,
) -> Floats:
    """Return the run speed that crosses `gap` to a far side at `level`; NaN where that is above the apex."""
    (width,) = _floats(gap)
    speed: Floats = width / continuous_airtime(gravity, launch_speed, level, fall_factor)
    return speed


def _below(level: Floats) -> Floats:
    """Return the levels at or below the take-off; NaN for others, which a downward launch never sees."""
    return np.where(level <= 0.0, level, np.nan)


def _floats(*arguments: ArrayLike) -> tuple[Floats, ...]:
    """Return each argument as a float64 array."""
    return tuple(np.asarray(argument, dtype=np.float64) for argument in arguments)
