"""Many jumps at once: the closed form where there is one, the kernel for the rest."""

from __future__ import annotations

from dataclasses import fields
from typing import TYPE_CHECKING

import numpy as np

from designer.motion.closed_form import closed_form
from designer.motion.jumps import Jumps, Launches
from designer.motion.rule import Rule, Second
from designer.motion.simulate import simulate, time_above
from designer.motion.stay import closed_time_above

if TYPE_CHECKING:
    from numpy.typing import NDArray


def fly_many(
    rule: Rule,
    launches: Launches,
    level: float = 0.0,
    *,
    second: Second | None = None,
    workers: int = 1,
    compiled: bool | None = None,
    count_near_apex: bool = False,
) -> Jumps:
    """Return what becomes of each launch at a landing level (length), in the launches' broadcast shape.

    Launches that the closed form cannot decide to the kernel's answer (ties, rules without one) are stepped;
    a second jump in the air, which has none, and count_near_apex step them all. `compiled` and `workers` are
    for the stepped part (see `simulate`) and never change a result.
    """
    if count_near_apex or second is not None:
        return simulate(
            rule,
            launches,
            level,
            second=second,
            workers=workers,
            compiled=compiled,
            count_near_apex=count_near_apex,
        )
    jumps, flagged = closed_form(rule, launches, level)
    if flagged.any():
        stepped = simulate(rule, _rows(launches, flagged), level, workers=workers, compiled=compiled)
        for part in fields(Jumps):
            getattr(jumps, part.name)[flagged] = getattr(stepped, part.name)
    return jumps


def above(
    rule: Rule,
    launches: Launches,
    height: float,
    *,
    second: Second | None = None,
    workers: int = 1,
    compiled: bool | None = None,
) -> NDArray[np.float64]:
    """Return for how long each launch stays above a height (length): seconds, in the broadcast shape.

    What that time is, to the step, says `designer.motion.simulate.time_above`: 0 where the jump never gets so
    high, NaN where it never lands. Stepped where `fly_many` steps.
    """
    if second is not None:
        return time_above(rule, launches, height, second=second, workers=workers, compiled=compiled)
    times, flagged = closed_time_above(rule, launches, height)
    if flagged.any():
        rest = _rows(launches, flagged)
        times[flagged] = time_above(rule, rest, height, workers=workers, compiled=compiled)
    return times


def _rows(launches: Launches, rows: NDArray[np.bool_]) -> Launches:
    """Return the launches that a mask of their broadcast shape names."""
    return Launches(*(np.ascontiguousarray(column[rows]) for column in launches.broadcast()))
