"""Launches made in a line, for tests."""

from __future__ import annotations

import numpy as np

from designer.motion.jumps import Launches


def launches_of(
    gravity: object, launch_speed: object, step: object, grain: object = 0.0, fall: object = 1.0
) -> Launches:
    """Return launches without a terminal speed; numbers or arrays that broadcast."""
    six = (gravity, launch_speed, step, grain, fall, np.inf)
    return Launches(*(np.asarray(a, dtype=np.float64) for a in six))
