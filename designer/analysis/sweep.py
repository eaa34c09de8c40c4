"""How far one set of constants reaches at every whole rate: the data behind the reach pictures."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from designer.brief.model import Brief
from designer.brief.rates import step_of_hz
from designer.motion.batch import fly_many
from designer.motion.jumps import Jumps, Launches, Status
from designer.motion.measures import max_gap, of_flight, sure_gap
from designer.motion.rule import Constants

if TYPE_CHECKING:
    from numpy.typing import NDArray

    Floats = NDArray[np.float64]

LOW_HZ, HIGH_HZ = 20, 1000


@dataclass(frozen=True, slots=True)
class GapReach:
    """How wide a gap is crossed at one landing level, arrays (rates,) in the brief's length."""

    max_gap: Floats
    """From the very edge; 0 where the level is out of reach, NaN where the jump never lands."""
    sure_gap: Floats
    """In the worst phase of the take-off step."""


@dataclass(frozen=True, slots=True)
class RateReach:
    """One set of constants at every whole rate; arrays (rates,), lengths in the brief's unit."""

    rate: NDArray[np.int64]
    """Whole Hz, ascending."""
    step: Floats
    """Seconds: what frame_time makes of the rate."""
    status: NDArray[np.int8]
    """A Status of designer.motion.jumps."""
    apex: Floats
    """NaN where the jump never lands; so are the others."""
    step_top: Floats
    """apex + step_up: the highest ledge that is still made."""
    airtime: Floats
    """Seconds, to level 0."""
    gaps: Mapping[float, GapReach]
    """By landing level: 0 and every far_level of the brief."""

    @property
    def lands(self) -> NDArray[np.bool_]:
        """Where the jump lands at all, (rates,)."""
        return np.asarray(self.status == Status.LANDS)


def reach_by_rate(
    brief: Brief, constants: Constants, low_hz: int = LOW_HZ, high_hz: int = HIGH_HZ
) -> RateReach:
    """Measure constants at each whole rate from low_hz to high_hz; equal steps are flown once.

    The brief has one jump, or is the view of one.
    """
    if not 1 <= low_hz <= high_hz:
        raise ValueError(f"rates must be 1 ≤ low ≤ high, in Hz; got {low_hz} and {high_hz}")
    rule = brief.rule
    rate = np.arange(low_hz, high_hz + 1, dtype=np.int64)
    step = np.array([step_of_hz(int(hz), rule.frame_time) for hz in rate], dtype=np.float64)
    distinct, where = np.unique(step, return_inverse=True)
    launches = _launches(constants, distinct)
    second = brief.jumps[0].second
    flown = fly_many(rule, launches, second=second)
    airtime = of_flight("airtime", rule, launches, flown)
    apex = of_flight("apex", rule, launches, flown)[where]
    levels = sorted({0.0, *(gap.far_level for gap in brief.gaps)})
    return RateReach(
        rate=rate,
        step=step,
        status=flown.status[where],
        apex=apex,
        step_top=apex + constants.step_up,
        airtime=airtime[where],
        gaps={level: _gap_reach(brief, constants, launches, flown, level, where) for level in levels},
    )


def _launches(constants: Constants, steps: Floats) -> Launches:
    """Return one launch a step, arrays (steps,)."""
    terminal = np.inf if constants.terminal_speed is None else constants.terminal_speed
    values = (constants.pull, constants.launch_speed)
    rest = (constants.grain, constants.fall_factor, terminal)
    full = [np.full(len(steps), value, dtype=np.float64) for value in (*values, *rest)]
    return Launches(full[0], full[1], steps, full[2], full[3], full[4])


def _gap_reach(
    brief: Brief,
    constants: Constants,
    launches: Launches,
    flown: Jumps,
    level: float,
    where: NDArray[np.intp],
) -> GapReach:
    """Return what is crossed at one level, spread from distinct steps to rates."""
    second = brief.jumps[0].second
    jumps = flown if level == 0.0 else fly_many(brief.rule, launches, level, second=second)
    airtime = of_flight("airtime", brief.rule, launches, jumps)
    widest = max_gap(airtime, constants.run_speed, constants.edge_allowance)
    sure = sure_gap(widest, constants.run_speed, np.asarray(launches.step))
    stuck = flown.status != Status.LANDS
    unreached = np.isnan(airtime) & ~stuck
    widest, sure = (np.where(unreached, 0.0, values) for values in (widest, sure))
    widest, sure = (np.where(stuck, np.nan, values) for values in (widest, sure))
    return GapReach(widest[where], sure[where])
