"""From raw jumps to what designers talk about (DEVELOPERS.md, measures); one definition for every command."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.rule import LandingTest, Rule

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

MEASURES = {
    "apex": "length",
    "apex_time": "time",
    "airtime": "time",
    "landing_speed": "speed",
    "max_gap": "length",
    "sure_gap": "length",
    "step_top": "length",
    "steps": "count",
    "effective_gravity": "acceleration",
    "time_near_apex": "time",
    "flip_margin": "acceleration",
}
"""Every measure by name, with the kind of unit that it has. Each may be a target."""

OF_FLIGHT = ("apex", "apex_time", "airtime", "landing_speed", "steps", "effective_gravity", "time_near_apex")
"""Measures that follow from the flight alone; the others also need run_speed, step_up or edge_allowance,
or (flip_margin) belong to the constants."""

UNITS = {"length": "{u}", "time": "s", "speed": "{u}/s", "acceleration": "{u}/s²", "count": ""}


def unit_of(measure: str, length_unit: str) -> str:
    """Return the unit of a measure for tables and axes: "cm/s²"; empty for counts."""
    return UNITS[MEASURES[measure]].format(u=length_unit)


def of_flight(name: str, rule: Rule, launches: Launches, jumps: Jumps) -> NDArray[np.float64]:
    """Return one of OF_FLIGHT for each jump, in the launches' shape; NaN where the jump does not land.

    Units are the brief's length and seconds. time_near_apex needs jumps flown with near_apex_steps counted.
    """
    h = np.asarray(launches.step, dtype=np.float64)
    n = jumps.steps.astype(np.float64)
    match name:
        case "apex":
            values = jumps.apex
        case "apex_time":
            values = jumps.apex_step * h
        case "airtime":
            swept = rule.landing_test is LandingTest.SWEPT
            values = (n - 1.0) * h + h * jumps.fraction if swept else n * h
        case "landing_speed":
            values = 0.0 - jumps.landing_velocity
        case "steps":
            values = n
        case "effective_gravity":
            with np.errstate(divide="ignore", invalid="ignore"):
                values = (launches.launch_speed - jumps.landing_velocity) / (n * h)
        case "time_near_apex":
            values = jumps.near_apex_steps * h
        case _:
            raise ValueError(f"{name!r} does not follow from the flight alone; known: {', '.join(OF_FLIGHT)}")
    return np.where(jumps.status == Status.LANDS, values, np.nan)


def max_gap(airtime: Floats, run_speed: Floats | float, edge_allowance: Floats | float) -> Floats:
    """Return run_speed·airtime + edge_allowance, length."""
    return np.asarray(run_speed * airtime + edge_allowance, dtype=np.float64)


def sure_gap(reach: Floats, run_speed: Floats | float, step: Floats) -> Floats:
    """Return max(0, max_gap − run_speed·h): the gap in the worst phase of the take-off step, length."""
    return np.maximum(0.0, np.asarray(reach - run_speed * step, dtype=np.float64))


def clearance(time_above: Floats, run_speed: Floats | float) -> Floats:
    """Return run_speed·(time above a block's height): the longest block of that height it clears, length.

    `time_above` in seconds (see designer.motion.batch.above).
    """
    return np.asarray(run_speed * time_above, dtype=np.float64)


def head_top(apex: Floats, body_height: Floats | float) -> Floats:
    """Return apex + body_height: how high the top of the body comes under a ceiling, length."""
    return np.asarray(apex + body_height, dtype=np.float64)
