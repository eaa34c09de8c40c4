"""The check case of the trade, and ties: common practice, no source; the numbers computed with fractions.

Launch 270, gravity 800, grain 1 to nearest at the end of the step, the average of the old and the unsnapped
new velocity, steps of whole milliseconds.
"""

from __future__ import annotations

LAUNCH_SPEED = 270.0
GRAVITY = 800.0
GRAIN = 1.0
UNROUNDED_APEX = 45.5625

# fmt: off
APEX_BY_MS = (
    36.477, 36.504, 54.594, 48.564, 45.56, 43.7724, 42.588, 48.528, 46.8234, 45.56,
    44.583, 43.8048, 47.3148, 46.34, 45.54, 44.8896, 44.3156, 46.7856, 46.1358, 45.56,
    45.0576, 44.616, 46.506, 45.9984, 45.5, 45.1568, 44.7768, 46.3008, 45.9012, 45.54,
    45.2166, 44.864, 46.134, 45.866, 45.5, 45.2304, 45.0216, 46.1016, 45.7704, 45.44,
)
"""The apex at a step of 1, 2, … 40 ms."""
# fmt: on

BEFORE_MOVE_APEX = {1: 36.45, 2: 36.45, 3: 54.675, 4: 48.6, 6: 43.74, 8: 48.6, 16: 44.856}
"""The same where the position moves by the snapped velocity: step in ms → apex."""

TOWARD_ZERO_APEX = {8: 41.746, 4: 36.557, 3: 36.531}
"""The same as the first table, rounded toward zero: step in ms → apex (to three decimals)."""

MIXED_STEPS_MS = (16, 17, 17)
MIXED_STEPS_APEX = 44.521
"""The first table's rule where the steps take turns (to three decimals)."""

TIES = {
    812.5: {
        "nearest-even": (48.6, 720),
        "nearest-away": (48.596, 696),
        "nearest-up": (48.6, 720),
        "up": (48.6, 720),
        "toward-zero": (41.656, 648),
    },
    687.5: {
        "nearest-even": (48.6, 720),
        "nearest-away": (58.316, 832),
        "nearest-up": (58.32, 864),
        "up": (58.32, 864),
        "toward-zero": (48.6, 760),
    },
    187.5: {
        "nearest-even": (145.8, 2160),
        "nearest-away": (291.596, 3688),
        "nearest-up": (291.6, 4320),
        "up": (291.6, 4320),
        "toward-zero": (145.8, 2608),
    },
}
"""Average, launch 270, 8 ms, grain 1, before the move, landing at the end of the step:
gravity → mode → (apex, airtime in ms). g·h is a whole number of grains and a half."""

STALLED_TIE_GRAVITY = 62.5
"""The same where g·h is half a grain: no mode of the table lands; toward zero hovers."""

PARITY = (812.5, 269.0, 47.884)
"""Gravity, launch speed, apex with ties to even: the first step takes 7 grains, then 6 each."""
