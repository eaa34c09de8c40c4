"""An objective module: the landing falls on a beat of the music.

Use: leapwright search objectives/rhythm-hopper.toml --objective objectives/on_the_beat.py

A target can ask for one airtime; this asks for any whole number of half beats, which no target can say.
Copy the file and change the two numbers at the top.
"""

from collections.abc import Mapping
from typing import Any

import numpy as np

BEATS_PER_MINUTE = 120.0
WITHIN = 0.008
"""Seconds off the beat that count as one tolerance; about where players begin to hear it."""


def deviations(constants: Mapping[str, Any], jumps: Mapping[str, Any]) -> dict[str, Any]:
    """Return how far each jump's landing is off the nearest half beat, in tolerances.

    constants: arrays (designs,) by name. jumps: by jump, then by measure; each measure has the arrays
    nominal, low and high, (designs,), NaN where a jump never lands.
    """
    half_beat = 60.0 / BEATS_PER_MINUTE / 2.0
    terms = {}
    for name, measures in jumps.items():
        airtime = measures["airtime"].nominal
        # np.rint leaves NaN alone, so a jump that never lands stays NaN, as it must.
        beats = np.maximum(1.0, np.rint(airtime / half_beat))
        terms[f"{name} off the beat"] = (airtime - beats * half_beat) / WITHIN
    return terms
