"""A brief in good order, in which the tests change one thing at a time."""

BASE = """\
title = "Crate yard"

[units]
length = "cm"
time = "s"
tile = 64

[loop]
steps = "each-frame"
aim_at = "60 Hz"

[rule]
integrator = "semi-implicit"
rounding = { mode = "nearest-even", at = "end" }
frame_time = "whole-ms-down"
landing_test = "swept"
launch_gravity = true

[today]
gravity = 1500
launch_speed = 580
grain = 1
run_speed = 500

[search]
gravity = { from = 900, to = 2900, every = 10 }
launch_speed = { from = 310, to = 950, every = 5 }
grain = { among = [0, 0.125, 1] }
run_speed = 500

[targets]
apex = { aim = 105, within = 2 }
airtime = { aim = 0.71, within = 0.02, weight = 1 }
max_gap = { at_least = 320, within = 10 }

[rates]
supported = ["60 Hz", "75 Hz", "90 Hz"]
watched = ["300 Hz"]
spread_weight = 1.0

[[ledges]]
name = "crate"
height = 97
must = "reach"
margin = 2

[[ledges]]
name = "crane"
height = 112
must = "stay-out"
margin = 1

[[gaps]]
name = "rails"
width = 300
far_level = -30
must = "cross"
margin = 5
"""


def changed(*changes: tuple[str, str]) -> str:
    """Return the brief with each first text, which must be there, replaced by the second."""
    text = BASE
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new, 1)
    return text


def line_of(text: str, marker: str) -> int:
    """Return the number, from 1, of the first line that holds a marker."""
    return next(number for number, line in enumerate(text.split("\n"), 1) if marker in line)


FIXED = changed(
    ('steps = "each-frame"\naim_at = "60 Hz"', 'steps = "fixed"'),
    ("run_speed = 500\n\n[search]", 'run_speed = 500\nstep = "8 ms"\n\n[search]'),
)
"""The same job where the step is a constant."""
