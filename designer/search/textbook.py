"""What the textbook says of one jump: measures in continuous time, for what is said before a search.

Pieces of constant gravity (OpenStax, University Physics vol. 1, sections 3.5 and 4.3): the rise, a second
jump where there is one, the fall with its factor and its terminal speed. Rounding and the order of a step are
left out; `blur` says by how much a step may move each measure.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass

from designer.motion.rule import How, LandingTest, Second

OF_THE_FALL = (
    "airtime",
    "landing_speed",
    "max_gap",
    "sure_gap",
    "steps",
    "effective_gravity",
    "time_near_apex",
)
"""Measures that a terminal speed can move."""


@dataclass(frozen=True, slots=True)
class Flight:
    """A jump from the take-off level back to it."""

    apex: float
    apex_time: float
    airtime: float
    landing_speed: float


def _fall(height: float, downward: float, gravity: float, limit: float) -> tuple[float, float]:
    """Return (seconds, speed at the end) of falling `height` from a downward speed, no faster than limit."""
    start = min(downward, limit)
    end = math.sqrt(start * start + 2.0 * gravity * height)
    if end <= limit:
        return (end - start) / gravity, end
    free = (limit * limit - start * start) / (2.0 * gravity)
    return (limit - start) / gravity + (height - free) / limit, limit


def _up_and_down(height: float, upward: float, constants: Mapping[str, float]) -> Flight:
    """Return the flight from a height with a velocity, times counted from there."""
    gravity = constants["gravity"] * constants["gravity_factor"]
    falling, limit = gravity * constants["fall_factor"], constants["terminal_speed"]
    if upward <= 0.0:
        seconds, speed = _fall(height, -upward, falling, limit)
        return Flight(height, 0.0, seconds, speed)
    top, rise = height + upward * upward / (2.0 * gravity), upward / gravity
    seconds, speed = _fall(top, 0.0, falling, limit)
    return Flight(top, rise, rise + seconds, speed)


def _state(at: float, first: Flight, constants: Mapping[str, float]) -> tuple[float, float]:
    """Return (height, velocity) `at` seconds after the launch, before the landing."""
    gravity = constants["gravity"] * constants["gravity_factor"]
    launch, limit = constants["launch_speed"], constants["terminal_speed"]
    if at <= first.apex_time:
        return launch * at - 0.5 * gravity * at * at, launch - gravity * at
    falling, seconds = gravity * constants["fall_factor"], at - first.apex_time
    free = min(seconds, limit / falling)
    drop = 0.5 * falling * free * free + (seconds - free) * (limit if seconds > free else 0.0)
    return first.apex - drop, -falling * free


def flight(constants: Mapping[str, float], second: Second | None = None) -> Flight:
    """Return the continuous jump of constants by name; terminal_speed is infinite where there is none."""
    first = _up_and_down(0.0, constants["launch_speed"], constants)
    if second is None:
        return first
    at = first.apex_time if second.when is None else second.when
    if at >= first.airtime:
        return first
    height, velocity = _state(at, first, constants)
    upward = second.launch_speed + (velocity if second.how is How.ADD else 0.0)
    after = _up_and_down(height, upward, constants)
    earlier = first.apex if at >= first.apex_time else height
    on_top = after.apex > earlier
    return Flight(
        after.apex if on_top else earlier,
        at + after.apex_time if on_top else min(at, first.apex_time),
        at + after.airtime,
        after.landing_speed,
    )


def measures(constants: Mapping[str, float], step: float, second: Second | None = None) -> dict[str, float]:
    """Return every measure that continuous time knows; flip_margin is none of them."""
    flown = flight(constants, second)
    reach = constants["run_speed"] * flown.airtime + constants["edge_allowance"]
    found = {
        "apex": flown.apex,
        "apex_time": flown.apex_time,
        "airtime": flown.airtime,
        "landing_speed": flown.landing_speed,
        "max_gap": reach,
        "sure_gap": max(0.0, reach - constants["run_speed"] * step),
        "step_top": flown.apex + constants["step_up"],
        "steps": flown.airtime / step,
        "effective_gravity": (constants["launch_speed"] + flown.landing_speed) / flown.airtime,
    }
    if second is None:
        gravity = constants["gravity"] * constants["gravity_factor"]
        down, _ = _fall(
            0.1 * flown.apex, 0.0, gravity * constants["fall_factor"], constants["terminal_speed"]
        )
        found["time_near_apex"] = math.sqrt(0.2 * flown.apex / gravity) + down
    return found


def blur(constants: Mapping[str, float], step: float, landing_test: LandingTest) -> dict[str, float]:
    """Return by how much the steps of a build may move each measure against the continuous one."""
    gravity = constants["gravity"] * constants["gravity_factor"]
    fall = gravity * max(1.0, constants["fall_factor"])
    late = step if landing_test is LandingTest.END_OF_STEP else 0.0
    high = 0.125 * gravity * step * step
    return {
        "apex": high,
        "apex_time": 0.5 * step,
        "airtime": late,
        "landing_speed": fall * step,
        "max_gap": constants["run_speed"] * late,
        "sure_gap": constants["run_speed"] * late,
        "step_top": high,
        "steps": 1.0,
        "effective_gravity": fall * step / flight(constants).airtime,
        "time_near_apex": step,
    }
